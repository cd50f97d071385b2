"""Probability of exceeding each of a ladder of round thresholds."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import ArrayLike, FloatArray, IntArray
from probsoil.errors import ParameterError
from probsoil.probability.counts import Sense, as_sample, exceeding_counts
from probsoil.probability.exceedance import replicate_sizes
from probsoil.probability.intervals import probability_interval

if TYPE_CHECKING:
    import pandas as pd

MOST_STEPS = 400  # steps of 1, 2 or 5 x 10^k then number between 160 and 400
_COLUMNS = ("threshold", "exceeding", "probability", "low", "high")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ExceedanceCurve:
    """Estimated probability of exceeding each of a set of thresholds.

    Attributes
    ----------
    sense : {"not more than", "not less than"}
        What the limit demands.
    step : float, [any]
        Distance between thresholds, 1, 2 or 5 times a power of ten.
    threshold : ndarray, shape (n_threshold,), [any]
        Thresholds in rising order, in the unit of the quantity.
    exceeding : ndarray of int, shape (n_threshold,), [-]
        Realisations beyond each threshold.
    probability, low, high : ndarray, shape (n_threshold,), [-]
        Share beyond each threshold and its limits, each threshold taken by itself.
    confidence : float, [-]
        Confidence of the limits.
    model_runs : int, [-]
        Realisations behind the curve.
    """

    sense: Sense
    step: float
    threshold: FloatArray
    exceeding: IntArray
    probability: FloatArray
    low: FloatArray
    high: FloatArray
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


def exceedance_curve(
    values: ArrayLike,
    sense: Sense,
    *,
    through: float,
    replicate: ArrayLike | None = None,
    confidence: float = 0.95,
    certain: bool = False,
) -> ExceedanceCurve:
    """Probability of exceeding each of a ladder of round thresholds.

    Parameters
    ----------
    values : array_like, shape (n,), [any]
        Quantity of the limit in each realisation; not a number where it did not converge.
    sense : {"not more than", "not less than"}
        What the limit demands.
    through : float, [any]
        Threshold of the limit; one of the ladder is exactly this.
    replicate : array_like of int, shape (n,), [-], optional
        Replicate of each realisation, from 0, for points that are not independent.
    confidence : float, [-]
        Confidence of the limits at each threshold.
    certain : bool
        True where no parameter is uncertain: limits are then the probabilities themselves.

    Returns
    -------
    curve : ExceedanceCurve
        Counts, probabilities and limits; at `through` they are those of `exceedance`.

    Raises
    ------
    ShapeError
        If there are no values or the replicates do not match them.
    ParameterError
        If the sense is unknown, `through` is not finite or the confidence lies outside 0 to 1.
    """
    sample, index = as_sample(values, replicate)
    if not np.isfinite(through):
        raise ParameterError(f"the threshold to pass through must be finite; got {through:g}")
    step, threshold = round_thresholds(sample[np.isfinite(sample)], float(through))
    counts = exceeding_counts(sample, threshold, sense, index)
    sizes = replicate_sizes(sample.size, index)
    found = probability_interval(counts, sizes, confidence, certain=certain)
    exceeding = counts.sum(axis=0)
    return ExceedanceCurve(
        sense=sense,
        step=step,
        threshold=threshold,
        exceeding=exceeding,
        probability=exceeding / sample.size,
        low=found.low,
        high=found.high,
        confidence=confidence,
        model_runs=sample.size,
    )


def round_thresholds(values: FloatArray, through: float) -> tuple[float, FloatArray]:
    """Ladder of thresholds in round steps that spans a sample and passes through one value.

    Parameters
    ----------
    values : ndarray, shape (n,), [any]
        Finite values; may be empty.
    through : float, [any]
        Value that must be one of the thresholds.

    Returns
    -------
    step : float, [any]
        1, 2 or 5 times a power of ten.
    threshold : ndarray, shape (n_threshold,), [any]
        Thresholds in rising order, from at or below the least to at or above the greatest of all.
    """
    least = min(float(values.min(initial=through)), through)
    most = max(float(values.max(initial=through)), through)
    span = most - least
    if span <= 1e-9 * max(abs(least), abs(most)):  # one value throughout: one step either side
        span = 0.01 * MOST_STEPS * (abs(through) or 1.0)
    step = _round_up(span / MOST_STEPS)
    first = int(np.floor((least - through) / step))
    last = int(np.ceil((most - through) / step))
    if first == last:
        first, last = -1, 1
    decimals = 6 - int(np.floor(np.log10(step)))
    threshold = np.round(through + step * np.arange(first, last + 1), decimals)
    threshold[-first] = through
    return step, threshold


def _round_up(step: float) -> float:
    """Smallest 1, 2 or 5 times a power of ten that is not below `step`."""
    exponent = int(np.floor(np.log10(step)))
    # written out as decimals and read back, so that each is the nearest float to what a person writes
    ladder = (float(f"{digit}e{exponent + up}") for up in (0, 1) for digit in (1, 2, 5))
    return next(candidate for candidate in ladder if candidate >= step * (1.0 - 1e-12))
