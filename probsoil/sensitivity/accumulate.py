"""Sums from which the drivers of a limit are found: they add up chunk by chunk.

Memory does not grow with the number of realisations, and sums merged in the order of the chunks are
the same bit for bit whoever computed the chunks.
"""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import ArrayLike, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError

GROUPS = 20  # groups of realisations that the jackknife leaves out in turn


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Gathering:
    """Latent normals that count together as one parameter, such as one at each of several places.

    Attributes
    ----------
    member : ndarray of int, shape (d,), [-]
        Parameter that each latent normal belongs to, from 0.
    shift : ndarray, shape (d,), [-]
        How far each moves when its parameter moves up by one standard deviation as a whole.
    """

    member: IntArray
    shift: FloatArray

    @property
    def size(self) -> int:
        """Number of parameters [-]."""
        return int(self.member.max(initial=-1)) + 1

    def added_up(self, values: FloatArray) -> FloatArray:
        """Add up what belongs to the latent normals of each parameter.

        Parameters
        ----------
        values : ndarray, shape (d, ...), [any]
            One row per latent normal.

        Returns
        -------
        sums : ndarray, shape (n_parameter, ...), [any]
            One row per parameter; the order of the sums is fixed.
        """
        sums = np.zeros((self.size, *values.shape[1:]))
        for place, member in enumerate(self.member):
            sums[member] += values[place]
        return sums


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DriverSums:
    """Additive sums over realisations, for one limit, m parameters and their d latent normals.

    Each parameter has one latent normal, m = d, unless several are gathered.

    Attributes
    ----------
    count : ndarray of int, shape (2,), [-]
        Realisations that meet the limit and that exceed it.
    mean_score, mean_square : ndarray, shape (2, m), [-]
        Sums of w = R^-1 z and of its square, over those that meet and those that exceed.
    spread_score, spread_square : ndarray, shape (2, m), [-]
        Sums of z w - 1 and of its square, likewise.
    fitted : ndarray of int, shape (20,), [-]
        Realisations with a finite quantity, by jackknife group.
    products : ndarray, shape (20, d + 2, d + 2), [any]
        Sums of the products of (1, z, quantity) with itself over those, by jackknife group.
    """

    count: IntArray
    mean_score: FloatArray
    mean_square: FloatArray
    spread_score: FloatArray
    spread_square: FloatArray
    fitted: IntArray
    products: FloatArray

    @property
    def dimension(self) -> int:
        """Number of latent normals d [-]."""
        return int(self.products.shape[1]) - 2


def driver_sums(
    z: FloatArray,
    inverse_correlation: FloatArray,
    quantity: FloatArray,
    exceeded: ArrayLike,
    group: ArrayLike | None = None,
    *,
    gathering: Gathering | None = None,
) -> DriverSums:
    """Sum over the realisations of one chunk.

    Parameters
    ----------
    z : ndarray, shape (n, d), [-]
        Correlated latent normals.
    inverse_correlation : ndarray, shape (d, d), [-]
        Inverse R^-1 of their correlation.
    quantity : ndarray, shape (n,), [any]
        Quantity of the limit; what is not finite is left out of the linear fit.
    exceeded : array_like of bool, shape (n,), [-]
        Whether each realisation exceeds the limit.
    group : array_like of int, shape (n,), [-], optional
        Jackknife group of each realisation, 0 to 19: the replicate, for points that are not independent.
        None deals the rows out in turn.
    gathering : Gathering or None
        Which latent normals count together; None for each by itself.

    Returns
    -------
    sums : DriverSums
        Sums of this chunk.

    Raises
    ------
    ShapeError
        If the arrays do not match.
    ParameterError
        If a group does not lie between 0 and 19.
    """
    n, dimension = z.shape
    flag = np.asarray(exceeded, dtype=np.bool_)
    index = np.arange(n) % GROUPS if group is None else np.asarray(group, dtype=np.int64)
    for name, array in (("quantity", quantity), ("exceeded", flag), ("group", index)):
        if array.shape != (n,):
            raise ShapeError(f"{name} must have shape ({n},); got {array.shape}")
    if n and not (index.min() >= 0 and index.max() < GROUPS):
        raise ParameterError(f"group must lie between 0 and {GROUPS - 1}; got {index.min()} to {index.max()}")
    mean_score = np.einsum("ni,ij->nj", z, inverse_correlation)
    spread_score = z * mean_score - 1.0
    if gathering is not None:
        mean_score = gathering.added_up((gathering.shift * mean_score).T).T
        spread_score = gathering.added_up(spread_score.T).T
    sides = [~flag, flag]
    rows = np.column_stack([np.ones(n), z, quantity])
    fit = np.isfinite(quantity)
    products = np.zeros((GROUPS, dimension + 2, dimension + 2))
    for number in np.unique(index[fit]):
        part = rows[fit & (index == number)]
        # einsum and not @: a matrix library may sum in another order on another machine or thread count
        products[number] = np.einsum("ni,nj->ij", part, part)
    return DriverSums(
        count=np.array([side.sum() for side in sides], dtype=np.int64),
        mean_score=np.stack([mean_score[side].sum(axis=0) for side in sides]),
        mean_square=np.stack([(mean_score[side] ** 2).sum(axis=0) for side in sides]),
        spread_score=np.stack([spread_score[side].sum(axis=0) for side in sides]),
        spread_square=np.stack([(spread_score[side] ** 2).sum(axis=0) for side in sides]),
        fitted=np.bincount(index[fit], minlength=GROUPS).astype(np.int64),
        products=products,
    )


def merge(first: DriverSums, second: DriverSums) -> DriverSums:
    """Add up the sums over two sets of realisations together.

    Parameters
    ----------
    first, second : DriverSums
        Sums over each set. Merge in the order of the chunks for the same bits every time.

    Returns
    -------
    sums : DriverSums
        Sums over both.

    Raises
    ------
    ShapeError
        If they are over different numbers of parameters.
    """
    if first.dimension != second.dimension:
        raise ShapeError(f"cannot merge sums over {first.dimension} and over {second.dimension} parameters")
    return DriverSums(
        **{name: getattr(first, name) + getattr(second, name) for name in DriverSums.__dataclass_fields__}
    )
