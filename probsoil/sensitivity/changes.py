"""Realisations repeated with something changed about one parameter or group: the same draws each time."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal, TypeAlias

import numpy as np
from scipy.special import ndtri

from probsoil._typing import ArrayLike, BoolArray, FloatArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.probability.binomial import clopper_pearson
from probsoil.probability.limit_state import generator

Exceeding: TypeAlias = Callable[[FloatArray], ArrayLike]
"""Whether the limit is exceeded, (n,), at rows of correlated latent normals (n, d)."""
Others: TypeAlias = Literal["keep", "follow"]

STAGE = 20
_ROWS = 16_384  # realisations evaluated together


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Trials:
    """Realisations to be repeated with something changed.

    Attributes
    ----------
    exceeded : callable
        Whether the limit is exceeded, (n,), at rows of correlated latent normals (n, d).
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals.
    parameters : mapping of str to sequence of int
        Latent normals of each parameter or group, counted from 0.
    z : ndarray, shape (n, d), [-]
        Correlated latent normals: the same for every change (common random numbers).
    before : ndarray of bool, shape (n,), [-]
        Whether each exceeds with nothing changed.
    others : {"keep", "follow"}
        What the other parameters do: keep their values, so that the change is of this parameter alone; or
        follow it by their correlation, as if it had been learnt (conditional on it).
    confidence : float, [-]
        Confidence of all limits.
    """

    exceeded: Exceeding
    correlation: FloatArray
    parameters: Mapping[str, Sequence[int]]
    z: FloatArray
    before: BoolArray
    others: Others
    confidence: float

    def __post_init__(self) -> None:
        d = len(self.correlation)
        if self.correlation.shape != (d, d) or d == 0:
            raise ShapeError(
                f"correlation must have shape (d, d) with d at least 1; got {self.correlation.shape}"
            )
        if self.z.ndim != 2 or self.z.shape[1] != d or self.before.shape != (len(self.z),) or not len(self.z):
            raise ShapeError(
                f"latent normals must have shape (n, {d}) with n at least 1, and n flags; "
                f"got {self.z.shape} and {self.before.shape}"
            )
        own = self.parameters.values()
        if any(len(columns) == 0 or not all(0 <= i < d for i in columns) for columns in own):
            raise ParameterError(f"each parameter must name latent normals from 0 to {d - 1}")
        if self.others not in ("keep", "follow"):
            raise ParameterError(f"others must be 'keep' or 'follow'; got {self.others!r}")
        if not 0.0 < self.confidence < 1.0:
            raise ParameterError(f"confidence must lie between 0 and 1; got {self.confidence:g}")

    def changed(self, name: str, factor: float, shift: float) -> BoolArray:
        """Whether each realisation exceeds with the latent normals of a parameter changed.

        Parameters
        ----------
        name : str
            Parameter or group.
        factor, shift : float, [-]
            Its latent normals become `factor` times what they are, plus `shift`.

        Returns
        -------
        after : ndarray of bool, shape (n,), [-]
            Whether each exceeds then.
        """
        after = np.empty(len(self.z), dtype=np.bool_)
        for first in range(0, len(self.z), _ROWS):
            rows = slice(first, first + _ROWS)
            after[rows] = flags_of(self.exceeded, self.moved(name, factor, shift, rows))
        return after

    def moved(self, name: str, factor: float, shift: float, rows: slice | None = None) -> FloatArray:
        """Latent normals with those of a parameter changed.

        Parameters
        ----------
        name : str
            Parameter or group.
        factor, shift : float, [-]
            Its latent normals become `factor` times what they are, plus `shift`.
        rows : slice, optional
            Realisations; None for all.

        Returns
        -------
        z : ndarray, shape (n, d), [-]
            Changed latent normals: where the others follow, they move by R_ou R_uu^-1 times the change of
            those of the parameter, u.
        """
        z = self.z[slice(None) if rows is None else rows].copy()
        own = list(self.parameters[name])
        move = (factor - 1.0) * z[:, own] + shift
        if self.others == "follow":
            slope = np.linalg.solve(self.correlation[np.ix_(own, own)], self.correlation[own])
            return np.asarray(z + np.einsum("nu,uj->nj", move, slope))
        z[:, own] += move
        return z


def trials(
    exceeded: Exceeding,
    correlation: ArrayLike,
    parameters: Mapping[str, Sequence[int]] | Sequence[str],
    *,
    draws: FloatArray | tuple[int, int] = (20_000, 0),
    others: Others = "keep",
    confidence: float = 0.95,
) -> Trials:
    """Draw realisations, or take given ones, and run them with nothing changed.

    Parameters
    ----------
    exceeded : callable
        Whether the limit is exceeded, (n,), at rows of correlated latent normals (n, d).
    correlation : array_like, shape (d, d), [-]
        Correlation R of the latent normals.
    parameters : mapping of str to sequence of int, or sequence of str
        Latent normals of each parameter or group, counted from 0; names alone for one each, in order.
    draws : ndarray, shape (n, d), [-], or tuple of int
        Correlated latent normals, independent realisations; or number of realisations and seed.
    others : {"keep", "follow"}
        What the other parameters do; see `Trials`.
    confidence : float, [-]
        Confidence of all limits.

    Returns
    -------
    trials : Trials
        Realisations and which of them exceed.

    Raises
    ------
    ShapeError
        If the shapes do not match or the function returns another number of values.
    ParameterError
        If there are no realisations, `others` is unknown, the confidence lies outside 0 to 1, or a latent
        normal does not exist.
    """
    matrix = np.asarray(correlation, dtype=np.float64)
    own = parameters if isinstance(parameters, Mapping) else {name: [i] for i, name in enumerate(parameters)}
    z = drawn_latents(matrix, *draws) if isinstance(draws, tuple) else np.asarray(draws, dtype=np.float64)
    before = [flags_of(exceeded, z[first : first + _ROWS]) for first in range(0, len(z), _ROWS)]
    return Trials(
        exceeded=exceeded,
        correlation=matrix,
        parameters=own,
        z=z,
        before=np.concatenate([np.zeros(0, dtype=np.bool_), *before]),
        others=others,
        confidence=confidence,
    )


def paired_difference(
    before: BoolArray, after: BoolArray, confidence: float
) -> tuple[float, tuple[float, float]]:
    r"""Difference of two probabilities from the same realisations.

    Parameters
    ----------
    before, after : ndarray of bool, shape (n,), [-]
        Whether each realisation exceeds.
    confidence : float, [-]
        Confidence of the limits.

    Returns
    -------
    difference : float, [-]
        Probability after less probability before.
    interval : tuple of float, [-]
        Limits.

    Notes
    -----
    Only realisations that change sides count. With one added to those that leave, one to those that join, and
    two to n, the limits are :math:`p_{01} - p_{10} \pm t \sqrt{(p_{01} + p_{10} - (p_{01} - p_{10})^2)
    / (n + 2)}` [1]_: they keep a width where none changes sides.

    References
    ----------
    .. [1] D. G. Bonett and R. M. Price, "Adjusted Wald confidence interval for a difference of binomial
       proportions based on paired data", Journal of Educational and Behavioral Statistics, 37, 2012
       (recalled; not opened).
    """
    n = len(before)
    joined, left = int((after & ~before).sum()), int((before & ~after).sum())
    first, second = (joined + 1) / (n + 2), (left + 1) / (n + 2)
    middle = first - second
    reach = -float(ndtri(0.5 * (1.0 - confidence))) * np.sqrt((first + second - middle**2) / (n + 2))
    return (joined - left) / n, (float(middle - reach), float(middle + reach))


def probability_of(flags: BoolArray, confidence: float) -> tuple[float, tuple[float, float]]:
    """Probability from independent realisations with exact limits.

    Parameters
    ----------
    flags : ndarray of bool, shape (n,), [-]
        Whether each realisation exceeds.
    confidence : float, [-]
        Confidence of the limits.

    Returns
    -------
    probability : float, [-]
        Share that exceeds.
    interval : tuple of float, [-]
        Exact binomial limits.
    """
    low, high = clopper_pearson(flags.sum(), flags.size, confidence)
    return float(flags.mean()), (float(low), float(high))


def drawn_latents(correlation: FloatArray, n: int, seed: int) -> FloatArray:
    """Draw correlated latent normals.

    Parameters
    ----------
    correlation : ndarray, shape (d, d), [-]
        Correlation R.
    n, seed : int, [-]
        Number of realisations, and seed of the user.

    Returns
    -------
    z : ndarray, shape (n, d), [-]
        Independent realisations.

    Raises
    ------
    ParameterError
        If there are no realisations.
    """
    if n < 1:
        raise ParameterError(f"the number of realisations must be at least 1; got {n}")
    factor = np.linalg.cholesky(correlation)
    u = generator(seed, STAGE).standard_normal((n, len(correlation)))
    return np.asarray(np.einsum("nj,ij->ni", u, factor))


def flags_of(exceeded: Exceeding, z: FloatArray) -> BoolArray:
    """Whether each realisation exceeds, checked.

    Parameters
    ----------
    exceeded : callable
        Whether the limit is exceeded, (n,), at rows of correlated latent normals (n, d).
    z : ndarray, shape (n, d), [-]
        Correlated latent normals.

    Returns
    -------
    flags : ndarray of bool, shape (n,), [-]
        Whether each exceeds.

    Raises
    ------
    ShapeError
        If the function returns another number of values.
    ParameterError
        If it does not return true or false.
    """
    flags = np.asarray(exceeded(z))
    if flags.shape != (len(z),):
        raise ShapeError(f"exceeded must return shape ({len(z)},); got {flags.shape}")
    if flags.dtype != np.bool_:
        raise ParameterError(f"exceeded must return true or false; got {flags.dtype}")
    return flags
