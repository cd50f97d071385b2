"""Orthonormal polynomials of one variable, from the coefficients of their three-term recurrence.

Hermite polynomials serve the latent standard normals. Where parameters are independent, the polynomials
orthogonal under a parameter's own law may be used in its place; chaospy finds their recurrences.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError, ShapeError

if TYPE_CHECKING:
    import chaospy

_REACH = 24.0  # x^40 of a lognormal law with log_sd 0.5 still has its weight within
_SPACING = 1 / 32


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class OrthonormalBasis:
    """Recurrences of the orthonormal polynomials of several independent variables.

    Attributes
    ----------
    centre : ndarray, shape (d, degree), [any]
        Coefficients a_k of x, in the unit of each variable.
    square : ndarray, shape (d, degree + 1), [any]
        Coefficients b_k, unit squared; the first, the mass of the law, is one.
    """

    centre: FloatArray
    square: FloatArray

    @property
    def dimension(self) -> int:
        """Number of variables, [-]."""
        return len(self.centre)

    @property
    def degree(self) -> int:
        """Greatest degree the recurrences reach, [-]."""
        return int(self.centre.shape[1])

    def tables(self, points: FloatArray, degree: int) -> FloatArray:
        r"""Orthonormal polynomials of every variable at every point.

        Parameters
        ----------
        points : ndarray, shape (n, d), [any]
            Points, each variable in its own unit.
        degree : int, [-]
            Greatest degree wanted.

        Returns
        -------
        tables : ndarray, shape (d, degree + 1, n), [-]
            Values of degree 0 to `degree`.

        Raises
        ------
        ShapeError
            If the points have another number of variables.
        ParameterError
            If the degree is beyond the recurrences.

        Notes
        -----
        :math:`\sqrt{b_{k+1}}\,\psi_{k+1} = (x - a_k)\,\psi_k - \sqrt{b_k}\,\psi_{k-1}` with
        :math:`\psi_0 = 1` [1]_.

        References
        ----------
        .. [1] W. Gautschi, Orthogonal Polynomials: Computation and Approximation. Oxford: Oxford University
           Press, 2004 (recalled; not opened).
        """
        if points.ndim != 2 or points.shape[1] != self.dimension:
            raise ShapeError(f"points must have shape (n, {self.dimension}); got {points.shape}")
        if degree > self.degree:
            raise ParameterError(f"degree must be at most {self.degree}, that of the basis; got {degree}")
        x = np.ascontiguousarray(points.T, dtype=np.float64)
        tables = np.ones((self.dimension, degree + 1, len(points)))
        before = np.zeros_like(x)
        for k in range(degree):
            here = tables[:, k]
            following = (x - self.centre[:, k, np.newaxis]) * here
            following -= np.sqrt(self.square[:, k, np.newaxis]) * before
            tables[:, k + 1] = following / np.sqrt(self.square[:, k + 1, np.newaxis])
            before = here
        return tables


def hermite_basis(dimension: int, degree: int) -> OrthonormalBasis:
    """Hermite polynomials, orthonormal under the standard normal law.

    Parameters
    ----------
    dimension : int, [-]
        Number of standard normals.
    degree : int, [-]
        Greatest degree.

    Returns
    -------
    basis : OrthonormalBasis
        Recurrences with a_k = 0 and b_k = k.
    """
    square = np.maximum(np.arange(degree + 1, dtype=np.float64), 0.0)
    square[0] = 1.0
    return OrthonormalBasis(centre=np.zeros((dimension, degree)), square=np.tile(square, (dimension, 1)))


def distribution_basis(distributions: "Sequence[chaospy.Distribution]", degree: int) -> OrthonormalBasis:
    """Polynomials orthonormal under given laws of chaospy.

    Parameters
    ----------
    distributions : sequence of chaospy.Distribution
        Law of each variable, one-dimensional; the variables are independent.
    degree : int, [-]
        Greatest degree.

    Returns
    -------
    basis : OrthonormalBasis
        Recurrences, closed where chaospy has them and by its discretised Stieltjes procedure elsewhere.

    Raises
    ------
    ParameterError
        If there is no distribution or one is not one-dimensional.
    """
    import chaospy  # deferred: takes a second to import

    if len(distributions) == 0 or any(len(law) != 1 for law in distributions):
        raise ParameterError("distributions must be one or more one-dimensional laws")
    found = [chaospy.stieltjes(degree, law)[0][:, 0] for law in distributions]
    return _from_pairs(found, degree)


def quantile_basis(quantiles: Sequence[Callable[[FloatArray], FloatArray]], degree: int) -> OrthonormalBasis:
    """Polynomials orthonormal under laws known by their quantiles at standard normals.

    Parameters
    ----------
    quantiles : sequence of callable
        For each variable, its value at latent standard normals (n,), rising.
    degree : int, [-]
        Greatest degree, at most 20.

    Returns
    -------
    basis : OrthonormalBasis
        Recurrences by the discretised Stieltjes procedure.

    Raises
    ------
    ParameterError
        If the degree is above 20, or a quantile is constant or not finite.

    Notes
    -----
    The nodes are equally spaced in z: the trapezoidal rule of a smooth function times the normal density is
    exact to rounding in the far tail too, where weights of Gauss's rule lose their digits. A law that a
    physical bound cuts has a kink there, and the rule an error of the square of the spacing, 1/32.
    """
    if degree > 20:
        raise ParameterError(f"degree must be at most 20; got {degree}")
    z = np.arange(-_REACH, _REACH + _SPACING, _SPACING)
    weight = np.exp(-0.5 * z**2)
    weight /= weight.sum()
    return _from_pairs([_stieltjes(quantile(z), weight, degree) for quantile in quantiles], degree)


def _stieltjes(x: FloatArray, weight: FloatArray, degree: int) -> FloatArray:
    """Coefficients a_k and b_k of the polynomials orthogonal on weighted nodes."""
    if not np.isfinite(x).all() or np.ptp(x) == 0.0:
        raise ParameterError("a quantile must be finite and not constant")
    middle = float(weight @ x)
    scale = float(np.sqrt(weight @ (x - middle) ** 2))
    t = (x - middle) / scale  # the recurrence is formed where its numbers are near one
    pairs = np.zeros((2, degree + 1))
    pairs[1, 0] = 1.0
    before, here = np.zeros_like(t), np.ones_like(t)
    for k in range(degree + 1):
        pairs[0, k] = weight @ (t * here**2)
        following = (t - pairs[0, k]) * here - (np.sqrt(pairs[1, k]) * before if k else 0.0)
        norm = float(np.sqrt(weight @ following**2))
        if k < degree:
            pairs[1, k + 1] = norm**2
        before, here = here, following / norm
    pairs[0] = middle + scale * pairs[0]
    pairs[1, 1:] *= scale**2
    return pairs


def _from_pairs(pairs: Sequence[FloatArray], degree: int) -> OrthonormalBasis:
    stacked = np.array([np.asarray(pair, dtype=np.float64)[:, : degree + 1] for pair in pairs])
    return OrthonormalBasis(centre=stacked[:, 0, :degree].copy(), square=stacked[:, 1].copy())
