"""Laws given by lists of numbers. Their score is not unique where one value has a probability of its own.

Such a value stands for a whole stretch of latent normals. Its score is then the middle rank: the
normal score of the probability below the value plus half of its own. What the law is conditioned
on never cuts such a stretch: `kept_scores` gives it whole or not at all.
"""

from dataclasses import dataclass
from typing import Self

import numpy as np
from scipy.special import ndtr, ndtri

from probsoil._typing import FloatArray
from probsoil.parameters.laws import nearer_tail_score
from probsoil.scenario.percentile_curve import PercentileCurve


@dataclass(frozen=True, slots=True, eq=False)
class StepLaw:
    """Law of a few values, each with its probability.

    Attributes
    ----------
    values : ndarray, shape (n,), [any]
        Values, rising, in the parameter's unit.
    below : ndarray, shape (n + 1,), [-]
        Probability below each value, and one.
    above : ndarray, shape (n + 1,), [-]
        One, and the probability above each value.
    steps : ndarray, shape (n - 1,), [-]
        Normal scores at which one value gives way to the next.
    """

    values: FloatArray
    below: FloatArray
    above: FloatArray
    steps: FloatArray

    @classmethod
    def of(cls, values: FloatArray, probabilities: FloatArray) -> Self:
        """Return the law.

        Parameters
        ----------
        values : ndarray, shape (n,), [any]
            Values, rising.
        probabilities : ndarray, shape (n,), [-]
            Probability of each; they sum to one.

        Returns
        -------
        law : StepLaw
            Law.
        """
        below = np.concatenate([[0.0], np.cumsum(probabilities)])
        above = np.concatenate([np.cumsum(probabilities[::-1])[::-1], [0.0]])
        steps = np.where(below < above, ndtri(below), -ndtri(above))[1:-1]
        return cls(values, below, above, steps)

    @property
    def mean(self) -> float:
        """Mean of the law, in the parameter's unit, [any]."""
        return float(self.values @ np.diff(self.below))

    @property
    def sd(self) -> float:
        """Standard deviation of the law, in the parameter's unit, [any]."""
        return float(np.sqrt((self.values - self.mean) ** 2 @ np.diff(self.below)))

    def quantile(self, z: FloatArray) -> FloatArray:
        """Values at latent standard normals.

        Parameters
        ----------
        z : ndarray, shape (...,), [-]
            Latent standard normals.

        Returns
        -------
        values : ndarray, shape (...,), [any]
            Values, in the parameter's unit.
        """
        return np.asarray(self.values[np.searchsorted(self.steps, z, side="left")])

    def score(self, value: float) -> float:
        """Return the middle rank of a value; between two values the score of the step.

        Parameters
        ----------
        value : float, [any]
            Value, in the parameter's unit.

        Returns
        -------
        z : float, [-]
            Standard normal score; infinite beyond the values.
        """
        first, last = (int(np.searchsorted(self.values, value, side=side)) for side in ("left", "right"))
        return nearer_tail_score(
            0.5 * float(self.below[first] + self.below[last]),
            0.5 * float(self.above[first] + self.above[last]),
        )

    def kept_scores(self, low: float, high: float) -> tuple[float, float]:
        """Return the scores whose values lie from one bound to another, both included.

        Parameters
        ----------
        low, high : float, [any]
            Bounds, in the parameter's unit.

        Returns
        -------
        start, end : float, [-]
            Normal scores; infinite where nothing is cut.
        """
        edges = np.concatenate([[-np.inf], self.steps, [np.inf]])
        start = float(edges[np.searchsorted(self.values, low, side="left")])
        # a step itself belongs to the lower value
        return float(np.nextafter(start, np.inf)) if np.isfinite(start) else start, float(
            edges[np.searchsorted(self.values, high, side="right")]
        )


@dataclass(frozen=True, slots=True, eq=False)
class InterpolatedLaw:
    """Law whose quantile runs straight in the probability through equally spaced values.

    Attributes
    ----------
    values : ndarray, shape (n,), [any]
        Values at probabilities 0, 1/(n - 1), ..., 1, rising or staying, in the parameter's unit.
    """

    values: FloatArray

    @property
    def mean(self) -> float:
        """Mean of the law, in the parameter's unit, [any]."""
        return float((self.values[:-1] + self.values[1:]).mean()) / 2.0

    @property
    def sd(self) -> float:
        """Standard deviation of the law, in the parameter's unit, [any]."""
        left, right = self.values[:-1] - self.mean, self.values[1:] - self.mean
        return float(np.sqrt((left**2 + left * right + right**2).mean() / 3.0))

    def quantile(self, z: FloatArray) -> FloatArray:
        """Values at latent standard normals.

        Parameters
        ----------
        z : ndarray, shape (...,), [-]
            Latent standard normals.

        Returns
        -------
        values : ndarray, shape (...,), [any]
            Values, in the parameter's unit.
        """
        # counted from the nearer end, so that both keep their digits
        last = self.values.size - 1
        place = last * ndtr(-np.abs(z))
        piece = np.minimum(place.astype(np.int64), last - 1)
        part, lower = place - piece, np.asarray(z) < 0.0
        start = np.where(lower, self.values[piece], self.values[last - piece])
        end = np.where(lower, self.values[piece + 1], self.values[last - piece - 1])
        return np.asarray(start + part * (end - start))

    def score(self, value: float) -> float:
        """Return the score of a value, the middle rank of one that was given several times.

        Parameters
        ----------
        value : float, [any]
            Value, in the parameter's unit.

        Returns
        -------
        z : float, [-]
            Standard normal score; infinite at and beyond either end.
        """
        first, last = self._places(value)
        whole = 2.0 * (self.values.size - 1)
        return nearer_tail_score((first + last) / whole, 1.0 - (first + last) / whole)

    def kept_scores(self, low: float, high: float) -> tuple[float, float]:
        """Return the scores whose values lie from one bound to another, both included.

        Parameters
        ----------
        low, high : float, [any]
            Bounds, in the parameter's unit.

        Returns
        -------
        start, end : float, [-]
            Normal scores; infinite where nothing is cut.
        """
        whole = self.values.size - 1
        start, end = self._places(low)[0] / whole, self._places(high)[1] / whole
        return nearer_tail_score(start, 1.0 - start), nearer_tail_score(end, 1.0 - end)

    def _places(self, value: float) -> tuple[float, float]:
        """Return the first and the last place along the values, fractions included, that a value has."""
        first, after = (int(np.searchsorted(self.values, value, side=side)) for side in ("left", "right"))
        if after > first:
            return float(first), float(after - 1)
        if first in (0, self.values.size):
            end = float(max(first - 1, 0))
            return end, end
        before, behind = self.values[first - 1], self.values[first]
        place = float(first - 1 + (value - before) / (behind - before))
        return place, place


@dataclass(frozen=True, slots=True, eq=False)
class PercentileLaw:
    """Law of a smooth curve through stated percentiles.

    Attributes
    ----------
    curve : PercentileCurve
        Curve.
    mean, sd : float, [any]
        Mean and standard deviation, in the parameter's unit.
    """

    curve: PercentileCurve
    mean: float
    sd: float

    @classmethod
    def of(cls, curve: PercentileCurve) -> Self:
        """Return the law of a curve.

        Parameters
        ----------
        curve : PercentileCurve
            Curve.

        Returns
        -------
        law : PercentileLaw
            Law.
        """
        return cls(curve, *curve.moments())

    def quantile(self, z: FloatArray) -> FloatArray:
        """Values at latent standard normals.

        Parameters
        ----------
        z : ndarray, shape (...,), [-]
            Latent standard normals.

        Returns
        -------
        values : ndarray, shape (...,), [any]
            Values, in the parameter's unit.
        """
        return self.curve.quantile(z)

    def score(self, value: float) -> float:
        """Latent standard normal at which a value lies.

        Parameters
        ----------
        value : float, [any]
            Value, in the parameter's unit.

        Returns
        -------
        z : float, [-]
            Standard normal score; infinite at and beyond an end of the law's range.
        """
        return self.curve.score(value)
