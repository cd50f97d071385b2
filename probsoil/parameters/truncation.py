"""A standard normal conditioned on an interval, accurate in both tails."""

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr, ndtri

from probsoil._typing import FloatArray


def interval_probability(start: float, end: float) -> float:
    """Probability that a standard normal lies between two scores.

    Parameters
    ----------
    start, end : float, [-]
        Scores, `start` not above `end`; may be infinite.

    Returns
    -------
    probability : float, [-]
        Probability, computed from the nearer tail.
    """
    if start > 0.0:
        return float(ndtr(-start) - ndtr(-end))
    return float(ndtr(end) - ndtr(start))


@dataclass(frozen=True, slots=True)
class Truncation:
    """Interval of standard normal scores that a law is conditioned on.

    Attributes
    ----------
    start, end : float, [-]
        Lowest and highest score kept; may be infinite.
    """

    start: float
    end: float

    @property
    def kept(self) -> float:
        """Probability of the interval before conditioning [-]."""
        return interval_probability(self.start, self.end)

    def score(self, z: FloatArray) -> FloatArray:
        """Scores inside the interval that stand for the unconditioned scores `z`.

        Parameters
        ----------
        z : ndarray, shape (n,), [-]
            Standard normal scores.

        Returns
        -------
        inside : ndarray, shape (n,), [-]
            Scores of the conditioned law with the same probability below them.
        """
        below = ndtr(self.start) + self.kept * ndtr(z)
        above = ndtr(-self.end) + self.kept * ndtr(-z)
        inside = np.where(below < above, ndtri(below), -ndtri(above))
        return np.clip(inside, self.start, self.end)

    def inverse(self, score: float) -> float:
        """Unconditioned score that stands for a score inside the interval.

        Parameters
        ----------
        score : float, [-]
            Score of the conditioned law.

        Returns
        -------
        z : float, [-]
            Standard normal score with the same probability below it.
        """
        inside = min(max(score, self.start), self.end)
        below = interval_probability(self.start, inside) / self.kept
        above = interval_probability(inside, self.end) / self.kept
        return float(ndtri(below)) if below < above else -float(ndtri(above))
