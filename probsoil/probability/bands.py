"""Limits that hold at once for a whole exceedance curve, beside those of each threshold by itself."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.special import betainccinv, betaincinv

from probsoil._typing import ArrayLike, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.probability.binomial import clopper_pearson
from probsoil.probability.counts import Sense, as_sample, exceeding_counts

if TYPE_CHECKING:
    import pandas as pd

RANK_RATIO = 1.2  # from one rank to the next of those whose limits hold together
_COLUMNS = ("threshold", "exceeding", "probability", "low", "high", "band_low", "band_high")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ExceedanceBand:
    """Exceedance curve of independent realisations with limits of both kinds.

    Attributes
    ----------
    sense : {"not more than", "not less than"}
        What the limit demands.
    threshold : ndarray, shape (n_threshold,), [any]
        Thresholds, in the unit of the quantity.
    exceeding : ndarray of int, shape (n_threshold,), [-]
        Realisations beyond each threshold.
    probability : ndarray, shape (n_threshold,), [-]
        Share beyond each threshold.
    low, high : ndarray, shape (n_threshold,), [-]
        Limits of each threshold taken by itself.
    band_low, band_high : ndarray, shape (n_threshold,), [-]
        Limits that hold at once for every threshold, those between the given ones among them.
    confidence : float, [-]
        Confidence of either kind.
    model_runs : int, [-]
        Realisations behind the curve.
    """

    sense: Sense
    threshold: FloatArray
    exceeding: IntArray
    probability: FloatArray
    low: FloatArray
    high: FloatArray
    band_low: FloatArray
    band_high: FloatArray
    confidence: float
    model_runs: int

    def __post_init__(self) -> None:
        for name in _COLUMNS:  # own, read-only columns
            column = getattr(self, name).copy()
            column.setflags(write=False)
            object.__setattr__(self, name, column)

    def to_frame(self) -> "pd.DataFrame":
        """Return the curve as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per threshold.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        return pd.DataFrame({name: getattr(self, name) for name in _COLUMNS})


def exceedance_band(
    values: ArrayLike, thresholds: ArrayLike, sense: Sense, *, confidence: float = 0.95
) -> ExceedanceBand:
    """Exceedance curve with pointwise and simultaneous limits.

    Parameters
    ----------
    values : array_like, shape (n,), [any]
        Quantity in each of independent realisations; not a number where it did not converge.
    thresholds : array_like, shape (n_threshold,), [any]
        Thresholds, in the unit of `values`; they may be chosen after seeing the values.
    sense : {"not more than", "not less than"}
        What the limit demands.
    confidence : float, [-]
        Confidence of either kind of limits.

    Returns
    -------
    band : ExceedanceBand
        Counts, shares and limits.

    Raises
    ------
    ShapeError
        If there are no values, or values or thresholds are not one row.
    ParameterError
        If the sense is unknown or the confidence lies outside 0 to 1.

    Notes
    -----
    Pointwise limits are those of `clopper_pearson`, the others those of `simultaneous_limits`. Both are
    for independent realisations of a number fixed beforehand, not for replicated designs.
    """
    sample, _ = as_sample(values, None)
    ladder = np.asarray(thresholds, dtype=np.float64)
    if ladder.ndim != 1:
        raise ShapeError(f"thresholds must have shape (n_threshold,); got {ladder.shape}")
    exceeding = exceeding_counts(sample, ladder, sense)[0]
    low, high = clopper_pearson(exceeding, sample.size, confidence)
    band_low, band_high = simultaneous_limits(exceeding, sample.size, confidence)
    return ExceedanceBand(
        sense=sense,
        threshold=ladder,
        exceeding=exceeding,
        probability=exceeding / sample.size,
        low=low,
        high=high,
        band_low=band_low,
        band_high=band_high,
        confidence=confidence,
        model_runs=sample.size,
    )


def simultaneous_limits(
    exceeding: ArrayLike, n: int, confidence: float = 0.95
) -> tuple[FloatArray, FloatArray]:
    r"""Limits of exceedance probabilities that hold for every threshold at once.

    Parameters
    ----------
    exceeding : array_like of int, shape (...,), [-]
        Counts k of independent realisations beyond any thresholds.
    n : int, [-]
        Realisations, at least 1.
    confidence : float, [-]
        Probability with which no threshold whatever has its exceedance probability outside.

    Returns
    -------
    low, high : ndarray, shape (...,), [-]
        Limits for each count.

    Raises
    ------
    ParameterError
        If a count lies outside 0 to n, n is less than 1 or the confidence lies outside 0 to 1.

    Notes
    -----
    The narrower of two bands, each at half of the error :math:`\alpha`. One is that of Dvoretzky, Kiefer and
    Wolfowitz with Massart's constant, :math:`k/n \pm \sqrt{\ln(4/\alpha)/(2n)}`, which is the better in the
    middle and says nothing of small probabilities. The other holds in the tails: the probability
    of exceeding the k-th greatest value has the beta distribution (k, n - k + 1); exact limits of it at
    a fixed ladder of J ranks, growing by a fifth from either end, each at :math:`\alpha/(4J)` on
    either side, hold together, and as the curve falls they bound it between the ranks.

    References
    ----------
    .. [1] P. Massart, "The tight constant in the Dvoretzky-Kiefer-Wolfowitz inequality", Annals of
       Probability, 18, 1990 (recalled; not opened).
    .. [2] H. A. David and H. N. Nagaraja, "Order Statistics", 3rd ed., Wiley, 2003 (recalled; not
       opened).
    """
    k = np.asarray(exceeding, dtype=np.int64)
    if not 0.0 < confidence < 1.0:
        raise ParameterError(f"confidence must lie between 0 and 1; got {confidence:g}")
    if n < 1 or (k < 0).any() or (k > n).any():
        raise ParameterError("a count must lie between 0 and the number of realisations, at least 1")
    error = 0.5 * (1.0 - confidence)
    reach = np.sqrt(np.log(2.0 / error) / (2.0 * n))
    rank = rank_ladder(n)
    tail = 0.5 * error / len(rank)
    lowest = np.concatenate([[0.0], betaincinv(rank, n - rank + 1.0, tail)])
    highest = np.concatenate([betainccinv(rank, n - rank + 1.0, tail), [1.0]])
    low = np.maximum(lowest[np.searchsorted(rank, k, side="right")], k / n - reach)
    high = np.minimum(highest[np.searchsorted(rank, k, side="right")], k / n + reach)
    return np.maximum(low, 0.0), np.minimum(high, 1.0)


def rank_ladder(n: int) -> IntArray:
    """Give ranks that grow by a fifth from either end of a sample.

    Parameters
    ----------
    n : int, [-]
        Size of the sample.

    Returns
    -------
    rank : ndarray of int, shape (n_rank,), [-]
        Rising ranks from 1 to n; a rank k has its mirror image n + 1 - k.
    """
    steps = [1]
    while steps[-1] < n // 2:
        steps.append(max(steps[-1] + 1, int(RANK_RATIO * steps[-1])))
    half = np.array([step for step in steps if 2 * step <= n + 1], dtype=np.int64)
    ladder: IntArray = np.unique(np.concatenate([half, n + 1 - half]))
    return ladder
