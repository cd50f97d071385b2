"""Exact limits of a probability from a count of independent trials."""

import numpy as np
from scipy.special import betainccinv, betaincinv

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError


def clopper_pearson(
    successes: ArrayLike, trials: ArrayLike, confidence: float = 0.95
) -> tuple[FloatArray, FloatArray]:
    r"""Two-sided exact binomial limits.

    Parameters
    ----------
    successes : array_like of int, shape (...,), [-]
        Counts k.
    trials : array_like of int, shape (...,), [-]
        Numbers of independent trials n, at least 1.
    confidence : float, [-]
        Confidence of the two limits together.

    Returns
    -------
    low, high : ndarray, shape (...,), [-]
        Limits; `low` is 0 where k = 0, `high` is 1 where k = n.

    Raises
    ------
    ParameterError
        If a count lies outside 0 to n or the confidence outside 0 to 1.

    Notes
    -----
    With :math:`\alpha` one minus the confidence and :math:`B^{-1}` the inverse of the regularised
    incomplete beta function, the limits are :math:`B^{-1}(\alpha/2; k, n-k+1)` and
    :math:`B^{-1}(1-\alpha/2; k+1, n-k)`; they cover with at least the stated confidence.

    References
    ----------
    .. [1] C. J. Clopper and E. S. Pearson, "The use of confidence or fiducial limits illustrated in
       the case of the binomial", Biometrika, 26, 1934 (recalled; not opened).
    """
    k, n = np.broadcast_arrays(np.asarray(successes, dtype=np.float64), np.asarray(trials, dtype=np.float64))
    _check(k, n, confidence)
    tail = 0.5 * (1.0 - confidence)
    none, every = k == 0, k == n
    low = np.where(none, 0.0, betaincinv(np.where(none, 1.0, k), n - k + 1.0, tail))
    high = np.where(every, 1.0, betainccinv(k + 1.0, np.where(every, 1.0, n - k), tail))
    return low, high


def unseen_bound(trials: int, confidence: float = 0.95) -> float:
    """One-sided upper limit of a probability of which no case was seen.

    Parameters
    ----------
    trials : int, [-]
        Number of independent trials n, at least 1.
    confidence : float, [-]
        Confidence of the limit.

    Returns
    -------
    bound : float, [-]
        1 - (1 - confidence)^(1/n), which is about 3/n at 95 %.

    Raises
    ------
    ParameterError
        If there are no trials or the confidence lies outside 0 to 1.
    """
    _check(np.zeros(1), np.array([trials], dtype=np.float64), confidence)
    return float(-np.expm1(np.log1p(-confidence) / trials))


def _check(k: FloatArray, n: FloatArray, confidence: float) -> None:
    if not 0.0 < confidence < 1.0:
        raise ParameterError(f"confidence must lie between 0 and 1; got {confidence:g}")
    if not (n >= 1).all():
        raise ParameterError(f"the number of trials must be at least 1; got {n.min():g}")
    if not ((k >= 0) & (k <= n)).all():
        raise ParameterError("a count must lie between 0 and the number of trials")
