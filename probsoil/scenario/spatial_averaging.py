"""How much of the point-to-point variability of a property is left in a layer average.

The checks of a scenario need it as well as the drawing of parameters, hence its place in this room.
"""

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError
from probsoil.scenario.distributions import Distribution, Lognormal, Normal

_SERIES_BELOW = 0.25  # the closed form loses digits to cancellation at smaller ratios
_SERIES_TERMS = 16


def variance_function(ratio: ArrayLike) -> FloatArray:
    r"""Variance of a layer average over the variance at a point.

    Parameters
    ----------
    ratio : array_like, shape (...,), [-]
        Averaging length over the scale of fluctuation, :math:`q = L / \delta`, zero or more.

    Returns
    -------
    reduction : ndarray, shape (...,), [-]
        Variance function :math:`\Gamma^2`, from 1 (very thin layer) down to 0.

    Raises
    ------
    ParameterError
        If a ratio is negative or not a number.

    Notes
    -----
    For the exponential (Markov) correlation :math:`\rho(\tau) = \exp(-2 |\tau| / \delta)`

    .. math:: \Gamma^2 = \frac{2 q - 1 + e^{-2 q}}{2 q^2}.

    Below :math:`q = 0.25` its power series replaces it, because the closed form loses digits.

    References
    ----------
    .. [1] E. Vanmarcke, "Probabilistic modeling of soil profiles", Journal of the Geotechnical
       Engineering Division, ASCE, 103(GT11), 1977 (recalled; not opened).
    """
    q = np.asarray(ratio, dtype=np.float64)
    bad = ~(q >= 0.0)
    if bad.any():
        raise ParameterError(f"ratio must be >= 0; got {q[bad].flat[0]:g} ({bad.sum()} of {q.size} values)")
    thin = q < _SERIES_BELOW
    thick = np.where(thin, 1.0, q)
    closed = (1.0 / thick) * (1.0 + np.expm1(-2.0 * thick) / (2.0 * thick))
    return np.where(thin, _series(np.where(thin, q, 0.0)), closed)


def _series(q: FloatArray) -> FloatArray:
    """Sum 2 (-2q)^k / (k + 2)! from the last term inward (Horner)."""
    total = np.zeros_like(q)
    for k in range(_SERIES_TERMS, 0, -1):
        total = (1.0 + total) * (-2.0 * q / (k + 2))
    return 1.0 + total


def averaged_variance(point_variance: float, *, scale: float, length: float) -> float:
    """Variance of the average of a property over a length.

    Parameters
    ----------
    point_variance : float, [any]
        Variance from point to point, in the square of the property's unit (or of its logarithm).
    scale : float, [m]
        Vertical scale of fluctuation, above zero.
    length : float, [m]
        Length averaged over, zero or more.

    Returns
    -------
    variance : float, [any]
        Variance of the average, same unit as `point_variance`.

    Raises
    ------
    ParameterError
        If `scale` is not above zero or `length` is negative.
    """
    if not scale > 0.0:
        raise ParameterError(f"the scale of fluctuation must be above zero; got {scale:g} m")
    return point_variance * float(variance_function(length / scale))


def inherent_variance(distribution: Normal | Lognormal, length: float | None) -> float:
    """Variance that variability from point to point leaves in a layer average.

    Parameters
    ----------
    distribution : Normal or Lognormal
        Law as the user gave it.
    length : float or None, [m]
        Length averaged over; None for none, which leaves the variability whole.

    Returns
    -------
    variance : float, [any]
        Of the property for a normal law, of its logarithm for a lognormal one.
    """
    cov = distribution.inherent_cov
    if isinstance(distribution, Normal):
        return remaining_variance((cov * distribution.mean) ** 2, distribution.vertical_scale, length)
    return remaining_variance(float(np.log1p(cov**2)), distribution.vertical_scale, length)


def remaining_variance(point_variance: float, scale: float | None, length: float | None) -> float:
    """Variance of an average where there may be nothing to average over.

    Parameters
    ----------
    point_variance : float, [any]
        Variance from point to point.
    scale, length : float or None, [m]
        Vertical scale of fluctuation and length averaged over.

    Returns
    -------
    variance : float, [any]
        The whole of it where the scale or the length is not known.
    """
    if point_variance == 0.0 or scale is None or length is None:
        return point_variance
    return averaged_variance(point_variance, scale=scale, length=length)


def local_share(distribution: Distribution, length: float | None) -> float:
    """Share of a layer average's variance that differs from place to place.

    Parameters
    ----------
    distribution : Distribution
        Law as the user gave it.
    length : float or None, [m]
        Length averaged over.

    Returns
    -------
    share : float, [-]
        Inherent variance over the whole variance, in the logarithm for a lognormal law; 0 for a law
        without variability from point to point.
    """
    if not isinstance(distribution, Normal | Lognormal):
        return 0.0
    known = distribution.sd if isinstance(distribution, Normal) else distribution.log_sd
    local = inherent_variance(distribution, length)
    return local / (known**2 + local)


def point_weight(depth: ArrayLike, *, scale: float, length: float) -> FloatArray:
    r"""Covariance of a point with the average over the layer, over the variance at a point.

    Parameters
    ----------
    depth : array_like, shape (n,), [m]
        Depth of the points below the top of the layer, taken to the nearer boundary if outside.
    scale : float, [m]
        Vertical scale of fluctuation, above zero.
    length : float, [m]
        Thickness of the layer, zero or more.

    Returns
    -------
    weight : ndarray, shape (n,), [-]
        :math:`\gamma(z)`; its mean over the layer is the variance function.

    Raises
    ------
    ParameterError
        If `scale` is not above zero.

    Notes
    -----
    The exponential correlation of `variance_function`, integrated over the layer,

    .. math:: \gamma(z) = \frac{\delta}{2 H}
              \left[2 - e^{-2 z / \delta} - e^{-2 (H - z) / \delta}\right].
    """
    if not scale > 0.0:
        raise ParameterError(f"the scale of fluctuation must be above zero; got {scale:g} m")
    z = np.clip(np.asarray(depth, dtype=np.float64), 0.0, length)
    if length < 1e-9 * scale:
        return np.ones_like(z)
    ends = np.expm1(-2.0 * z / scale) + np.expm1(-2.0 * (length - z) / scale)
    return np.asarray(-0.5 * scale / length * ends, dtype=np.float64)
