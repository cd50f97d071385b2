"""One door for any performance function: its runs, made once and kept.

The ground model is one caller, a formula in a test another, a user's own function a third. Whatever
asks for a run names the point by its stage and index; a run that was made before is not made again, so
several limits and several designs share their runs and a longer design keeps those of a shorter one.
"""

import time
from dataclasses import dataclass, field

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.parameters.designs import CHUNK_SIZE, POINT_STAGE
from probsoil.probability.counts import Sense, exceeds
from probsoil.probability.limit_state import Performance, generator

POOL_STAGE = 4  # first spawn key of the points that are ranked by a score
TRAINING_STAGE = 5  # of the points that scores are fitted to
TAIL_STAGE = 6  # of the points among which scores are compared

_ROWS_AT_ONCE = 1 << 14  # points made and run together, so that a long design fits the memory


@dataclass(frozen=True, slots=True, kw_only=True)
class QuantityLimit:
    """A threshold on one of the quantities that a performance function gives.

    Attributes
    ----------
    threshold : float, [any]
        Threshold, in the unit of the quantity.
    sense : {"not more than", "not less than"}
        What the limit demands.
    quantity : int, [-]
        Column of the quantity, from 0.
    name : str
        What the limit is called in tables.
    target : float or None, [-]
        Target probability, if there is one.
    """

    threshold: float
    sense: Sense = "not more than"
    quantity: int = 0
    name: str = "limit"
    target: float | None = None

    def __post_init__(self) -> None:
        exceeds(np.zeros(1), self.threshold, self.sense)  # refuses an unknown sense and not-a-number
        if self.quantity < 0:
            raise ParameterError(f"the column of a quantity must be 0 or more; got {self.quantity}")
        if self.target is not None and not 0.0 < self.target < 1.0:
            raise ParameterError(f"the target probability must lie between 0 and 1; got {self.target:g}")

    def exceeded(self, outcome: FloatArray) -> BoolArray:
        """Whether each run exceeds, by the rule of `exceeds`.

        Parameters
        ----------
        outcome : ndarray, shape (n, n_quantity), [any]
            Quantities of each run.

        Returns
        -------
        exceeded : ndarray of bool, shape (n,), [-]
            True where the limit is not met.

        Raises
        ------
        ShapeError
            If there is no such quantity.
        """
        if self.quantity >= outcome.shape[1]:
            raise ShapeError(
                f"{self.name} watches quantity {self.quantity}, but there are only {outcome.shape[1]}"
            )
        return exceeds(outcome[:, self.quantity], self.threshold, self.sense)


@dataclass(slots=True)
class _Kept:
    """Runs of one stage in rising order of their index."""

    index: IntArray
    outcome: FloatArray


@dataclass(slots=True, eq=False)
class TrueRuns:
    """Runs of a performance function, each made once.

    Attributes
    ----------
    performance : callable
        Takes independent standard normals, shape (n, d), one row per realisation, and gives shape
        (n,) or (n, n_quantity); the answer to a row must not depend on the other rows.
    dimension : int, [-]
        Number of uncertain parameters d.
    seed : int, [-]
        Seed of every point.
    n_runs : int, [-]
        Runs made so far.
    seconds : float, [s]
        Time spent in the performance function.
    """

    performance: Performance
    dimension: int = field(kw_only=True)
    seed: int = field(kw_only=True)
    n_runs: int = field(default=0, init=False)
    seconds: float = field(default=0.0, init=False)
    _kept: dict[int, _Kept] = field(default_factory=dict, init=False)

    def __post_init__(self) -> None:
        if self.dimension < 1:
            raise ParameterError(f"the number of parameters must be at least 1; got {self.dimension}")
        if self.seed < 0:
            raise ParameterError(f"the seed must be 0 or more; got {self.seed}")

    def points(self, stage: int, index: IntArray) -> FloatArray:
        """Draw the standard normals of numbered points.

        Parameters
        ----------
        stage : int, [-]
            Stage of the random numbers.
        index : ndarray of int, shape (n,), [-]
            Numbers of the points, from 0.

        Returns
        -------
        u : ndarray, shape (n, d), [-]
            Points; those of stage 0 are the points of `probsoil.parameters.MonteCarlo`.
        """
        chunk, row = np.divmod(index, CHUNK_SIZE)
        u = np.empty((len(index), self.dimension))
        by_chunk = np.argsort(chunk, kind="stable")
        numbers, size = np.unique(chunk, return_counts=True)
        for number, stop, count in zip(numbers, np.cumsum(size), size, strict=True):
            members = by_chunk[stop - count : stop]
            u[members] = self.block(stage, int(number))[row[members]]
        return u

    def block(self, stage: int, number: int) -> FloatArray:
        """Draw the standard normals of one chunk of points.

        Parameters
        ----------
        stage : int, [-]
            Stage of the random numbers.
        number : int, [-]
            Number of the chunk, from 0.

        Returns
        -------
        u : ndarray, shape (1024, d), [-]
            Points.
        """
        return generator(self.seed, stage, number).standard_normal((CHUNK_SIZE, self.dimension))

    def outcomes(self, stage: int, index: IntArray, spread: float = 1.0) -> FloatArray:
        """Quantities at numbered points; runs only those that have not been run.

        Parameters
        ----------
        stage : int, [-]
            Stage of the random numbers.
        index : ndarray of int, shape (n,), [-]
            Numbers of the points, from 0.
        spread : float, [-]
            Factor on the standard normals, one for each stage.

        Returns
        -------
        outcome : ndarray, shape (n, n_quantity), [any]
            Quantities of each point.

        Raises
        ------
        ShapeError
            If the performance function does not give one row per point.
        """
        kept = self._kept.get(stage)
        new = np.unique(index[~self.is_kept(stage, index)])
        if new.size:
            parts = np.array_split(new, -(-new.size // _ROWS_AT_ONCE))
            made = np.concatenate([self._run(spread * self.points(stage, part)) for part in parts])
            kept = self._kept[stage] = _Kept(new, made) if kept is None else _merged(kept, new, made)
        if kept is None:
            return np.empty((0, 1))
        return kept.outcome[np.searchsorted(kept.index, index)]

    def keep(self, stage: int, outcome: FloatArray) -> None:
        """Take over the first runs of a stage, made elsewhere; they do not count as made here.

        Parameters
        ----------
        stage : int, [-]
            Stage of the random numbers, of which nothing has been run here.
        outcome : ndarray, shape (n, n_quantity), [any]
            Quantities at its points 0 to n - 1.

        Raises
        ------
        ParameterError
            If points of the stage have been run already.
        """
        if stage in self._kept:
            raise ParameterError(f"points of stage {stage} have been run already")
        self._kept[stage] = _Kept(first_points(len(outcome)), outcome.copy())

    def is_kept(self, stage: int, index: IntArray) -> BoolArray:
        """Whether each point has been run.

        Parameters
        ----------
        stage : int, [-]
            Stage of the random numbers.
        index : ndarray of int, shape (n,), [-]
            Numbers of the points, from 0.

        Returns
        -------
        kept : ndarray of bool, shape (n,), [-]
            True where a run costs nothing.
        """
        kept = self._kept.get(stage)
        if kept is None:
            return np.zeros(len(index), dtype=np.bool_)
        place = np.minimum(np.searchsorted(kept.index, index), len(kept.index) - 1)
        return np.asarray(kept.index[place] == index)

    def _run(self, u: FloatArray) -> FloatArray:
        start = time.perf_counter()
        outcome = np.asarray(self.performance(u), dtype=np.float64)
        self.seconds += time.perf_counter() - start
        if outcome.ndim not in (1, 2) or len(outcome) != len(u):
            raise ShapeError(
                "a performance function must give shape (n,) or (n, n_quantity) for points of shape"
                f" {u.shape}; got {outcome.shape}"
            )
        self.n_runs += len(u)
        return outcome.reshape(len(u), -1)


def first_points(n: int) -> IntArray:
    """Numbers of the first points of a stage.

    Parameters
    ----------
    n : int, [-]
        How many.

    Returns
    -------
    index : ndarray of int, shape (n,), [-]
        0 to n - 1.
    """
    return np.arange(n, dtype=np.int64)


def monte_carlo_outcomes(runs: TrueRuns, n: int) -> FloatArray:
    """Quantities at the first points of plain Monte Carlo.

    Parameters
    ----------
    runs : TrueRuns
        Performance function and its runs.
    n : int, [-]
        Number of points.

    Returns
    -------
    outcome : ndarray, shape (n, n_quantity), [any]
        Quantities; the first rows are those of any smaller n.
    """
    return runs.outcomes(POINT_STAGE, first_points(n))


def _merged(kept: _Kept, index: IntArray, outcome: FloatArray) -> _Kept:
    every = np.concatenate([kept.index, index])
    order = np.argsort(every, kind="stable")
    return _Kept(every[order], np.concatenate([kept.outcome, outcome])[order])
