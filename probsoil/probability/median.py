"""Interval of a median from the order of a sample."""

import numpy as np
from scipy.special import bdtr

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError


def median_interval(values: FloatArray, confidence: float = 0.95) -> tuple[float, float] | None:
    """Limits of the median by order statistics.

    Parameters
    ----------
    values : ndarray, shape (n,), [any]
        Sample without not-a-number; infinite values sort as they stand.
    confidence : float, [-]
        Confidence of the two limits together.

    Returns
    -------
    limits : tuple of float or None, [any]
        The k-th smallest and the k-th greatest value; None where there are too few (fewer than 6 at
        95 %).

    Raises
    ------
    ParameterError
        If the confidence lies outside 0 to 1.

    Notes
    -----
    The number of values below the median is binomial with parameter one half, so k is the greatest
    number with P(fewer than k below) at most half of one minus the confidence; the limits cover with at
    least the stated confidence whatever the distribution. Values are taken as independent. Latin
    hypercube and Sobol' points spread more evenly, and the limits are then as a rule on the wide side.

    References
    ----------
    .. [1] H. A. David and H. N. Nagaraja, "Order Statistics", 3rd ed., Wiley, 2003 (recalled; not
       opened).
    """
    if not 0.0 < confidence < 1.0:
        raise ParameterError(f"confidence must lie between 0 and 1; got {confidence:g}")
    n = len(values)
    below = bdtr(np.arange(n // 2, dtype=np.float64), n, 0.5)  # P(at most k - 1 below), k = 1, 2, ...
    k = int(np.searchsorted(below, 0.5 * (1.0 - confidence), side="right"))
    if k == 0:
        return None
    order = np.sort(values)
    return float(order[k - 1]), float(order[n - k])
