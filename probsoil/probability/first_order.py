"""First-order reliability: the most likely way to exceed a limit, and what it alone would give."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.special import ndtr

from probsoil._typing import BoolArray, FloatArray
from probsoil.errors import ConvergenceError, ParameterError
from probsoil.probability.design_point_search import Margin, SearchEnd, alike, design_point_search
from probsoil.probability.limit_state import CountedMargin, LimitState, generator

if TYPE_CHECKING:
    import pandas as pd

STAGE = 11
ASSUMPTION = (
    "the limit is a plane through each design point, and no part of the exceeding region is as near to the "
    "origin as the points the search found; no interval goes with it"
)

_RADII = np.array([1.5, 3.0, 4.5])
_APART = 0.5  # cosine above which two starts look the same way
_FARTHER = 2.0  # what lies beyond the nearest point by more than this adds a few hundredths at most


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FirstOrder:
    """Design points of a limit and the probability to first order.

    Attributes
    ----------
    point : ndarray, shape (n_point, d), [-]
        Design points in independent standard normals, the nearest first.
    beta : ndarray, shape (n_point,), [-]
        Reliability index of each: its distance from the origin, below zero where the origin exceeds.
    converged : ndarray of bool, shape (n_point,), [-]
        Whether the search settled at the point.
    probability : float, [-]
        Phi(-beta) of the nearest point.
    any_bound : float, [-]
        Probability that any of the planes is passed, at most: the sum of their probabilities.
    origin_exceeds : bool
        Whether the median realisation exceeds.
    model_runs : int, [-]
        Runs spent.
    assumption : str
        What must hold for the number to be right.
    """

    point: FloatArray
    beta: FloatArray
    converged: BoolArray
    probability: float
    any_bound: float
    origin_exceeds: bool
    model_runs: int
    assumption: str = ASSUMPTION

    @property
    def direction(self) -> FloatArray:
        """Unit vectors towards the design points, shape (n_point, d), [-]."""
        return np.asarray(self.point / np.linalg.norm(self.point, axis=1, keepdims=True))

    def to_frame(self) -> "pd.DataFrame":
        """Return the design points as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per design point; its coordinates in columns `u_1`, ...
        """
        import pandas as pd  # deferred: a scenario check never needs it

        columns = {"beta": self.beta, "converged": self.converged, "probability": ndtr(-self.beta)}
        return pd.DataFrame(columns | {f"u_{i + 1}": self.point[:, i] for i in range(self.point.shape[1])})


def first_order(
    limit: LimitState, *, starts: int = 6, directions: int = 64, seed: int = 0, step: float = 1e-3
) -> FirstOrder:
    """Design points of a limit, and the probability to first order (FORM).

    Parameters
    ----------
    limit : LimitState
        Performance function and limit.
    starts : int, [-]
        Searches besides the one from the origin and those opposite to what they find.
    directions : int, [-]
        Random directions looked along, at three radii, for starts.
    seed : int, [-]
        Seed of the directions.
    step : float, [-]
        Half of the step of central differences; well above the noise of the performance.

    Returns
    -------
    result : FirstOrder
        Design points, their indices, the probability of the nearest.

    Raises
    ------
    ParameterError
        If the starts, directions or step are out of range.
    ConvergenceError
        If no search reaches the limit.

    Notes
    -----
    Hasofer and Lind's index with searches that need no smoothness (`design_point_search`). Where the origin
    exceeds, the nearest point that meets the limit is sought and beta is negative. Points farther than
    the nearest by more than two are left out, and so are those at which a search did not settle, unless
    none did.

    References
    ----------
    .. [1] A. M. Hasofer and N. C. Lind, "Exact and invariant second-moment code format", Journal of the
       Engineering Mechanics Division, ASCE, 100, 1974 (recalled; not opened).
    .. [2] R. Rackwitz and B. Fiessler, "Structural reliability under combined random load sequences",
       Computers and Structures, 9, 1978 (recalled; not opened).
    """
    if starts < 0 or directions < 1 or not 0.0 < step < 1.0:
        raise ParameterError("starts must be 0 or more, directions 1 or more, step between 0 and 1")
    counted = CountedMargin(limit)
    middle = float(counted(np.zeros((1, limit.dimension)))[0])
    exceeds = middle < 0.0

    def margin(u: FloatArray) -> FloatArray:
        return -counted(u) if exceeds else counted(u)

    scale, begin = _starts(margin, limit.dimension, generator(seed, STAGE), (starts, directions))
    ends = _searched(margin, begin, scale, step)
    if not ends:
        raise ConvergenceError(
            "no design point: none of the searches reached the limit", best=abs(middle), error=np.inf
        )
    points = np.array([end.u for end in ends])
    beta = np.linalg.norm(points, axis=1) * (-1.0 if exceeds else 1.0)
    return FirstOrder(
        point=points,
        beta=beta,
        converged=np.array([end.converged for end in ends]),
        probability=float(ndtr(-beta[0])),
        any_bound=_any_bound(beta),
        origin_exceeds=exceeds,
        model_runs=counted.runs,
    )


def _any_bound(beta: FloatArray) -> float:
    if beta[0] < 0.0:  # planes that bound the part that meets the limit; the origin lies beyond all
        return float(ndtr(-beta[0]))
    return float(min(ndtr(-beta).sum(), 1.0))


def _starts(
    margin: Margin, d: int, random: np.random.Generator, counts: tuple[int, int]
) -> tuple[float, list[FloatArray]]:
    """Typical slope of the margin, and starts: the origin and the most promising directions."""
    starts, directions = counts
    way = random.standard_normal((directions, d))
    way /= np.linalg.norm(way, axis=1, keepdims=True)
    look = (_RADII[:, np.newaxis, np.newaxis] * way).reshape(-1, d)
    origin = np.zeros(d)
    value = margin(np.concatenate([origin[np.newaxis], look]))
    radius = np.repeat(_RADII, directions)
    change = np.abs(value[1:] - value[0]) / radius
    change = change[np.isfinite(change) & (change > 0.0)]
    scale = float(np.median(change)) if len(change) else max(abs(float(value[0])), 1.0)
    # distance squared, with the distance the margin still asks for on top
    promise = 0.5 * radius**2 + 2.0 * _RADII[-1] * np.maximum(value[1:], 0.0) / scale
    begin: list[FloatArray] = [origin]
    for row in np.argsort(promise, kind="stable"):
        if len(begin) > starts:
            break
        away = [start @ look[row] / (np.linalg.norm(start) * radius[row]) for start in begin[1:]]
        if all(cosine < _APART for cosine in away):
            begin.append(look[row])
    return scale, begin


def _searched(margin: Margin, begin: list[FloatArray], scale: float, step: float) -> list[SearchEnd]:
    """Different ends of the searches, the nearest first."""
    ends: list[SearchEnd] = []

    def look_from(start: FloatArray) -> None:
        known = [end.u for end in ends if end.converged]
        _add(ends, design_point_search(margin, start, scale, step=step, known=known))

    for start in begin:
        look_from(start)
    for end in tuple(ends):  # a limit on both sides of the median has a twin opposite
        look_from(-end.u)
    settled = [end for end in ends if end.converged] or ends
    settled.sort(key=lambda end: float(np.linalg.norm(end.u)))
    return [end for end in settled if np.linalg.norm(end.u) <= np.linalg.norm(settled[0].u) + _FARTHER]


def _add(ends: list[SearchEnd], end: SearchEnd | None) -> None:
    if end is None:
        return
    for place, other in enumerate(ends):
        if alike(end.u, other.u):
            nearer = np.linalg.norm(end.u) < np.linalg.norm(other.u)
            if (end.converged, nearer) > (other.converged, False):
                ends[place] = end
            return
    ends.append(end)
