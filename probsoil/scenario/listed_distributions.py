"""Distributions given by lists of numbers: values with probabilities, values, percentiles."""

import math
from bisect import bisect_left, bisect_right
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import ClassVar, Literal

import numpy as np

from probsoil.scenario.describing import GREATEST_LOG_SD, Described, figure, normal_cdf, with_unit
from probsoil.scenario.percentile_curve import PercentileCurve, percentile_curve

Smoothing = Literal["none", "linear"]
Fit = Literal["value", "logarithm"]
_SHOWN = 5  # values named one by one


@dataclass(frozen=True, slots=True, kw_only=True)
class Discrete(Described):
    """A few values, each with its probability.

    Attributes
    ----------
    values : tuple of float, [base unit]
        Possible values, rising.
    probabilities : tuple of float, [-]
        Probability of each; they sum to one.
    """

    kind: ClassVar[str] = "discrete"
    values: tuple[float, ...]
    probabilities: tuple[float, ...]

    @property
    def expectation(self) -> float:
        """Mean, [base unit]; seldom one of the values."""
        return math.fsum(p * value for p, value in zip(self.probabilities, self.values, strict=True))

    def _outside(self, low: float, high: float) -> float:
        pairs = zip(self.probabilities, self.values, strict=True)
        return math.fsum(p for p, value in pairs if not low <= value <= high)

    def _words(self, unit: str) -> str:
        if len(self.values) > _SHOWN:
            ends = f"{figure(self.values[0])} to {with_unit(self.values[-1], unit)}"
            mean = figure(self.expectation)
            return f"one of {len(self.values)} values from {ends}, mean {mean}"
        pairs = zip(self.values, self.probabilities, strict=True)
        return "one of " + ", ".join(f"{with_unit(value, unit)} ({p:.3g})" for value, p in pairs)


@dataclass(frozen=True, slots=True, kw_only=True)
class Empirical(Described):
    """Values as they were found, all alike in weight.

    Attributes
    ----------
    values : tuple of float, [base unit]
        Values, rising; equal ones stand as often as they were given.
    smoothing : str
        ``none``: each value as it is. ``linear``: anything between neighbours in rank, the quantile a
        straight line in the probability from the least value at 0 to the greatest at 1.
    source : str
        File they come from; empty where they stand in the scenario.
    """

    kind: ClassVar[str] = "empirical"
    values: tuple[float, ...]
    smoothing: Smoothing = "none"
    source: str = ""

    @property
    def expectation(self) -> float:
        """Mean, [base unit]; with linear smoothing the two end values count half."""
        if self.smoothing == "none":
            return math.fsum(self.values) / len(self.values)
        ends = 0.5 * (self.values[0] + self.values[-1])
        return (ends + math.fsum(self.values[1:-1])) / (len(self.values) - 1)

    def _outside(self, low: float, high: float) -> float:
        if self.smoothing == "none":
            inside = bisect_right(self.values, high) - bisect_left(self.values, low)
            return 1.0 - inside / len(self.values)
        return self._below(low, bisect_left) + 1.0 - self._below(high, bisect_right)

    def _below(self, end: float, bisect: Callable[[Sequence[float], float], int]) -> float:
        """Return the share below an end; bisection says on which side of equal values."""
        place = bisect(self.values, end)
        if place in (0, len(self.values)):
            return float(place > 0)
        before, after = self.values[place - 1 : place + 1]
        part = (end - before) / (after - before)
        return (place - 1 + part) / (len(self.values) - 1)

    def _words(self, unit: str) -> str:
        ends = f"{figure(self.values[0])} to {with_unit(self.values[-1], unit)}"
        how = "as they are" if self.smoothing == "none" else "linear between them"
        source = f" of {self.source}" if self.source else ""
        count = f"{len(self.values)} values{source}"
        return f"empirical, {count} from {ends}, mean {figure(self.expectation)}, {how}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Percentiles(Described):
    """A smooth distribution through stated percentiles, for judgement elicited from people.

    Attributes
    ----------
    percent : tuple of float, [%]
        Percentages, rising.
    values : tuple of float, [base unit]
        Value that is not exceeded with each.
    low, high : float or None, [base unit]
        Ends of the range; None where the tail goes on.
    fit : str
        What is fitted against the normal score: the ``value`` or its ``logarithm``.
    """

    kind: ClassVar[str] = "percentiles"
    percent: tuple[float, ...]
    values: tuple[float, ...]
    low: float | None = None
    high: float | None = None
    fit: Fit = "value"

    @property
    def curve(self) -> PercentileCurve:
        """Curve through the percentiles."""
        return percentile_curve(
            self.percent, self.values, self.low, self.high, logarithmic=self.fit == "logarithm"
        )

    @property
    def expectation(self) -> float:
        """Mean, [base unit]."""
        return self.curve.moments()[0]

    @property
    def is_usable(self) -> bool:
        """Whether rounding leaves a rising curve, and a logarithm no wider tail than other laws may have."""
        slope, ends = self.curve.slope, (self.curve.low, self.curve.high)
        finite = bool(np.isfinite(slope).all() and (slope > 0.0).all()) and not any(map(math.isnan, ends))
        return finite and (self.fit == "value" or float(slope.max()) <= GREATEST_LOG_SD)

    def _outside(self, low: float, high: float) -> float:
        return normal_cdf(self.curve.score(low)) + normal_cdf(-self.curve.score(high))

    def _words(self, unit: str) -> str:
        pairs = zip(self.percent, self.values, strict=True)
        text = ", ".join(f"{figure(value)} at {percent:g} %" for percent, value in pairs)
        ends = [
            f"{name} {with_unit(end, unit)}"
            for name, end in (("down to", self.low), ("up to", self.high))
            if end is not None
        ]
        unit_text = "" if unit in ("", "-") else f" {'degrees' if unit == 'degree' else unit}"
        what = "logarithm" if self.fit == "logarithm" else "value"
        return ", ".join([f"percentiles {text}{unit_text}", f"fit of the {what}", *ends])
