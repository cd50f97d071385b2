"""Probability that a limit is exceeded, with its interval and what it was found from."""

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal, TypeAlias

import numpy as np
from scipy.special import ndtri

from probsoil._typing import ArrayLike, IntArray
from probsoil.errors import ParameterError
from probsoil.probability.binomial import unseen_bound
from probsoil.probability.counts import Sense, as_sample, exceeding_counts, exceeds
from probsoil.probability.intervals import METHODS, probability_interval

if TYPE_CHECKING:
    import pandas as pd

Verdict: TypeAlias = Literal["within target", "beyond target", "not conclusive"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Exceedance:
    """Estimated probability that a limit is exceeded.

    Attributes
    ----------
    threshold : float, [any]
        Threshold, in the unit of the quantity.
    sense : {"not more than", "not less than"}
        What the limit demands.
    probability : float, [-]
        Share of the realisations that exceed.
    interval : tuple of float, [-]
        Two-sided limits of the probability.
    confidence : float, [-]
        Confidence of the limits.
    exceeding : int, [-]
        Realisations that exceed, those that did not converge among them.
    not_converged : int, [-]
        Realisations without a number; counted as exceeding.
    never_reached : int, [-]
        Realisations with an infinite value.
    reliability_index : float or None, [-]
        beta = -Phi^-1(probability); None at a probability of 0 or 1.
    reliability_interval : tuple of float or None, [-]
        Limits of beta, the lower first; None where infinite.
    method : str
        How the points were drawn and the limits found.
    model_runs : int, [-]
        Realisations behind the estimate.
    unseen_bound : float or None, [-]
        Where no realisation exceeds, the one-sided upper limit of the probability at `confidence`; where
        every one does, the one-sided lower limit; None otherwise and where nothing is uncertain.
    target : float or None, [-]
        Target probability, if there is one.
    verdict : str or None
        Whether the whole interval lies within or beyond the target; where no or every realisation exceeds,
        whether the one-sided bound does.
    """

    threshold: float
    sense: Sense
    probability: float
    interval: tuple[float, float]
    confidence: float
    exceeding: int
    not_converged: int
    never_reached: int
    reliability_index: float | None
    reliability_interval: tuple[float | None, float | None]
    method: str
    model_runs: int
    unseen_bound: float | None
    target: float | None
    verdict: Verdict | None

    def to_frame(self) -> "pd.DataFrame":
        """Return the result as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row; the limits in columns of their own.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        row = {name: getattr(self, name) for name in self.__slots__ if not name.endswith("interval")}
        row["low"], row["high"] = self.interval
        row["reliability_low"], row["reliability_high"] = self.reliability_interval
        return pd.DataFrame([row])


def exceedance(  # noqa: PLR0913 - keyword-only options
    values: ArrayLike,
    threshold: float,
    sense: Sense,
    *,
    replicate: ArrayLike | None = None,
    method: str = "monte carlo",
    confidence: float = 0.95,
    target: float | None = None,
    certain: bool = False,
) -> Exceedance:
    """Probability that a limit is exceeded.

    Parameters
    ----------
    values : array_like, shape (n,), [any]
        Quantity of the limit in each realisation; not a number where it did not converge.
    threshold : float, [any]
        Threshold, in the unit of `values`.
    sense : {"not more than", "not less than"}
        What the limit demands.
    replicate : array_like of int, shape (n,), [-], optional
        Replicate of each realisation, from 0, for points that are not independent.
    method : str
        Name of the way the points were drawn; opens the method of the result.
    confidence : float, [-]
        Confidence of the limits.
    target : float, [-], optional
        Target probability.
    certain : bool
        True where no parameter is uncertain and every realisation is the same calculation.

    Returns
    -------
    result : Exceedance
        Probability, limits, counts and verdict.

    Raises
    ------
    ShapeError
        If there are no values or the replicates do not match them.
    ParameterError
        If the sense is unknown, the threshold is not a number, or the confidence or the target lies
        outside 0 to 1.

    Notes
    -----
    The limits are those of `probsoil.probability.intervals.probability_interval`: sampling error only,
    neither model error nor a wrong choice of distributions.
    """
    sample, index = as_sample(values, replicate)
    if target is not None and not 0.0 < target < 1.0:
        raise ParameterError(f"the target probability must lie between 0 and 1; got {target:g}")
    exceeding = int(exceeds(sample, threshold, sense).sum())
    counts = exceeding_counts(sample, np.array([threshold], dtype=np.float64), sense, index)
    sizes = replicate_sizes(sample.size, index)
    found = probability_interval(counts, sizes, confidence, certain=certain)
    low, high = float(found.low[0]), float(found.high[0])
    bound = None if certain else _one_sided(exceeding, sample.size, confidence)
    return Exceedance(
        threshold=float(threshold),
        sense=sense,
        probability=exceeding / sample.size,
        interval=(low, high),
        confidence=confidence,
        exceeding=exceeding,
        not_converged=int(np.isnan(sample).sum()),
        never_reached=int(np.isinf(sample).sum()),
        reliability_index=reliability_index(exceeding / sample.size),
        reliability_interval=(reliability_index(high), reliability_index(low)),
        method=f"{method}; {METHODS[int(found.method[0])]}",
        model_runs=sample.size,
        unseen_bound=bound,
        target=target,
        verdict=None if target is None else _verdict((low, high), bound, exceeding == 0, target),
    )


def reliability_index(probability: float) -> float | None:
    """Reliability index of an exceedance probability.

    Parameters
    ----------
    probability : float, [-]
        Exceedance probability.

    Returns
    -------
    beta : float or None, [-]
        -Phi^-1(probability); None at 0 and 1, where it is infinite.

    Raises
    ------
    ParameterError
        If the probability lies outside 0 to 1.
    """
    if not 0.0 <= probability <= 1.0:
        raise ParameterError(f"probability must lie between 0 and 1; got {probability:g}")
    return None if probability in (0.0, 1.0) else 0.0 - float(ndtri(probability))


def replicate_sizes(n: int, replicate: IntArray | None) -> IntArray:
    """Count the points in each replicate.

    Parameters
    ----------
    n : int, [-]
        Number of points in all.
    replicate : ndarray of int, shape (n,), [-], or None
        Replicate of each point, from 0; None for one.

    Returns
    -------
    sizes : ndarray of int, shape (n_replicate,), [-]
        Points in each.
    """
    if replicate is None:
        return np.array([n], dtype=np.int64)
    return np.bincount(replicate).astype(np.int64)


def _one_sided(exceeding: int, n: int, confidence: float) -> float | None:
    """Bound of the probability where one outcome was not seen at all."""
    if 0 < exceeding < n:
        return None
    bound = unseen_bound(n, confidence)
    return bound if exceeding == 0 else 1.0 - bound


def _verdict(interval: tuple[float, float], bound: float | None, none_seen: bool, target: float) -> Verdict:
    low, high = interval
    if bound is not None:
        low, high = (0.0, bound) if none_seen else (bound, 1.0)
    if high <= target:
        return "within target"
    return "beyond target" if low > target else "not conclusive"
