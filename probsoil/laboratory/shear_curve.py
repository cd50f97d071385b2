"""What neighbouring readings of a triaxial test say together: stress ratio, and whether it is at rest."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.laboratory.regression import regression

_NEAR = 0.7  # of the greatest ratio: from where on readings tell of failure
_LEAST_NEAR = 5  # readings for a curve of three coefficients
_MOST_NEAR = 60  # nearer ones repeat the errors of their neighbours
TAIL = 0.25
"""Share of the strain reached over which a late change is taken [-]."""

_LEAST_TAIL = 3


def _normal_nodes() -> tuple[FloatArray, FloatArray]:
    """Return points and weights that integrate over three independent standard normal variables."""
    node, weight = np.polynomial.hermite_e.hermegauss(5)
    grids = np.meshgrid(node, node, node, indexing="ij")
    share = np.einsum("i,j,k->ijk", weight, weight, weight).ravel()
    return np.stack([one.ravel() for one in grids]), share / share.sum()


_NODES, _WEIGHTS = _normal_nodes()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SmoothRatio:
    """Stress ratio near failure by a curve through the readings.

    Attributes
    ----------
    place : ndarray, shape (n,), [-]
        Readings the curve runs through.
    ratio, standard_error : ndarray, shape (n,), [-]
        Of the curve at these readings.
    excess : float, [-]
        By how much the greatest of a curve that errs like this one lies above the greatest of the true one,
        on average.
    """

    place: IntArray
    ratio: FloatArray
    standard_error: FloatArray
    excess: float


def smooth_ratio(
    strain: FloatArray, ratio: FloatArray, error: FloatArray, sound: BoolArray
) -> SmoothRatio | None:
    """Return the stress ratio near failure by a curve through the readings.

    Parameters
    ----------
    strain : ndarray, shape (n,), [-]
        Axial, positive.
    ratio, error : ndarray, shape (n,), [-]
        q/p' as read and its standard error.
    sound : ndarray, shape (n,), [-]
        Which readings have a ratio.

    Returns
    -------
    curve : SmoothRatio or None
        A parabola in one over the square root of strain through the readings from the first to the last
        that reach 0.7 of the greatest ratio; None where these are fewer than five.

    Notes
    -----
    The greatest of several readings that err lies above the ratio itself. On the curve that excess is small,
    and what is left of it is computed: the mean over the errors of the three coefficients (Gauss-Hermite
    quadrature) of the greatest of the curve, less the greatest. All readings count the same: weights by their
    own errors would favour those that err downwards. Of ratios that grow as a hyperbola or an exponential
    without error of reading the curve gives the greatest within 0.5 %.
    """
    usable = np.flatnonzero(sound & (strain > 0.0))
    if usable.size < _LEAST_NEAR or not ratio[usable].max() > 0.0:
        return None
    reached = np.flatnonzero(ratio[usable] >= _NEAR * ratio[usable].max())
    place = usable[reached[0] : reached[-1] + 1]
    place = place[:: -(-place.size // _MOST_NEAR)]
    abscissa = 1.0 / np.sqrt(strain[place])
    if np.unique(abscissa).size < _LEAST_NEAR:
        return None
    centred = (abscissa - abscissa.mean()) / abscissa.std()
    design = np.stack([np.ones_like(centred), centred, centred**2], axis=1)
    fit = regression(design, ratio[place], float(error[place].mean()), correlation=0.0)
    curve = design @ fit.coefficient
    variance = np.einsum("ij,jk,ik->i", design, fit.covariance, design)
    return SmoothRatio(
        place=place,
        ratio=np.asarray(curve),
        standard_error=np.asarray(np.sqrt(variance)),
        excess=_excess(design, fit.coefficient, ratio[place] - curve),
    )


def _excess(design: FloatArray, coefficient: FloatArray, left: FloatArray) -> float:
    """Return the mean excess of the greatest of the curve by the scatter found alone."""
    n, n_coefficient = design.shape
    variance = float(left @ left) / (n - n_coefficient)
    root = np.linalg.cholesky(np.linalg.inv(design.T @ design)) * np.sqrt(variance)
    drawn = design @ (coefficient[:, None] + root @ _NODES)
    return float(drawn.max(axis=0) @ _WEIGHTS - (design @ coefficient).max())


def late_change(strain: FloatArray, reading: FloatArray) -> float:
    """Return by how much a reading changes over the last quarter of the strain reached.

    Parameters
    ----------
    strain : ndarray, shape (n,), [-]
        Axial, positive, rising.
    reading : ndarray, shape (n,), [any]
        What was read, all known.

    Returns
    -------
    change : float, [unit of the reading]
        By a straight line through the readings there, the last three at least, so that neither close
        readings nor the errors of one decide.
    """
    if strain.size < _LEAST_TAIL:
        return 0.0
    inside = strain >= (1.0 - TAIL) * strain[-1]
    inside[-_LEAST_TAIL:] = True
    at = strain[inside] - strain[inside].mean()
    spread = float(at @ at)
    return float(at @ reading[inside]) / spread * TAIL * float(strain[-1]) if spread > 0.0 else 0.0
