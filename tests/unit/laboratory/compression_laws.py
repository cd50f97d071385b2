"""Laws of first loading that tests are drawn from; fixed before any of them was interpreted.

Each gives the fall of void ratio beyond a first straight branch as a function of the distance t from the
logarithm of the stress where the two branches, extended, meet.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

LAWS = ("straight", "specific volume", "hyperbolic", "structured", "asymmetric")
"""Straight in e over ln stress; straight in ln(1 + e); bend with long tails; virgin branch that flattens;
bend wholly beyond the yield stress, which starts at once and dies out."""

Curve = Callable[[np.ndarray], np.ndarray]


@dataclass(frozen=True, kw_only=True)
class Branches:
    """Slopes of the two branches [-], and where they meet [ln kPa]."""

    initial: float
    lam: float
    meeting: float
    void_ratio: float


def softened(distance: np.ndarray, width: float) -> np.ndarray:
    return width * np.logaddexp(0.0, distance / width)


def first_loading(law: str, made: Branches, rng: np.random.Generator, width: float) -> tuple[Curve, Curve]:
    """Return void ratio (zero at 1 kPa) against ln stress, and the two branches without their rounding."""
    steeper = made.lam - made.initial
    ending, reach = rng.uniform(0.3, 0.8), rng.uniform(0.7, 1.2)
    tail, late = rng.uniform(0.04, 0.12), rng.uniform(0.1, 0.3)

    def virgin(at: np.ndarray) -> np.ndarray:
        if law != "structured":
            return at
        return (at + ending * at / (1.0 + at / reach)) / (1.0 + ending)

    def rounded(at: np.ndarray) -> np.ndarray:
        if law == "hyperbolic":
            return 0.5 * (at + np.sqrt(at**2 + 4.0 * tail**2))
        if law == "asymmetric":  # yields at t = -late; the branches meet at t = 0
            beyond = np.maximum(at + late, 0.0)
            return beyond - late * (1.0 - np.exp(-beyond / late))
        return softened(at, width)

    def curve(bending: Curve) -> Curve:
        def straight(x: np.ndarray) -> np.ndarray:
            return -made.initial * x - steeper * virgin(bending(x - made.meeting))

        return specific_volume(straight, made) if law == "specific volume" else straight

    return curve(rounded), curve(lambda at: np.maximum(at, 0.0))


def specific_volume(straight: Curve, made: Branches) -> Curve:
    """Return the law whose logarithm of specific volume is straight; slopes in e are those at yield."""
    at_yield = 1.0 + made.void_ratio - made.initial * made.meeting
    return lambda x: (1.0 + made.void_ratio) * (np.exp(straight(x) / at_yield) - 1.0)


def mean_slope(branches: Curve, start: float, end: float) -> float:
    """Return the mean slope of the virgin branch from its start to the last load."""
    low, high = branches(np.array([start, end]))
    return float((low - high) / (end - start))
