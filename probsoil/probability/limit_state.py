"""A limit on a performance function of independent standard normals."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.probability.counts import SENSES, Sense

Performance: TypeAlias = Callable[[FloatArray], FloatArray]
"""Values (n,) at rows of independent standard normals (n, d)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitState:
    """Performance function with the limit it must meet.

    Attributes
    ----------
    performance : callable
        Values (n,) at rows of independent standard normals (n, d).
    dimension : int, [-]
        Number of standard normals d.
    threshold : float, [any]
        Threshold, in the unit of the performance.
    sense : {"not more than", "not less than"}
        What the limit demands.
    """

    performance: Performance
    dimension: int
    threshold: float = 0.0
    sense: Sense = "not less than"

    def __post_init__(self) -> None:
        if self.dimension < 1:
            raise ParameterError(f"dimension must be at least 1; got {self.dimension}")
        if self.sense not in SENSES:
            raise ParameterError(f"sense must be 'not more than' or 'not less than'; got {self.sense!r}")
        if not np.isfinite(self.threshold):
            raise ParameterError(f"threshold must be finite; got {self.threshold:g}")

    def margin(self, u: FloatArray) -> FloatArray:
        """Distance to the threshold, below zero where the limit is exceeded.

        Parameters
        ----------
        u : ndarray, shape (n, d), [-]
            Independent standard normals.

        Returns
        -------
        margin : ndarray, shape (n,), [any]
            Margin, in the unit of the performance; minus infinity where the performance is not a number,
            which counts as exceeding.

        Raises
        ------
        ShapeError
            If the performance does not return one value a row.
        """
        values = np.asarray(self.performance(u), dtype=np.float64)
        if values.shape != (len(u),):
            raise ShapeError(f"performance must return shape ({len(u)},); got {values.shape}")
        gap = self.threshold - values if self.sense == "not more than" else values - self.threshold
        return np.where(np.isnan(gap), -np.inf, gap)


class CountedMargin:
    """Margin of a limit that counts its runs.

    Parameters
    ----------
    limit : LimitState
        Limit.

    Attributes
    ----------
    runs : int, [-]
        Rows evaluated so far.
    """

    def __init__(self, limit: LimitState) -> None:
        self.limit = limit
        self.runs = 0

    def __call__(self, u: FloatArray) -> FloatArray:
        """Return the margins of `LimitState.margin` and count the rows."""
        self.runs += len(u)
        return self.limit.margin(u)


def generator(seed: int, stage: int, index: int = 0) -> np.random.Generator:
    """Random generator of one use.

    Parameters
    ----------
    seed : int, [-]
        Seed of the user, 0 or more.
    stage, index : int, [-]
        Use and its part, as in the table of random numbers for contributors.

    Returns
    -------
    generator : numpy.random.Generator
        Its stream depends on the three numbers only.
    """
    return np.random.default_rng(np.random.SeedSequence(seed, spawn_key=(stage, index)))
