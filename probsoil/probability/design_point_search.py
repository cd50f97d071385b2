"""Search for the points of the exceeding region nearest to the origin, smooth or not.

One search from one start. Each step offers two aims: the nearest point of the last linearised limit, as
in the method of Hasofer, Lind, Rackwitz and Fiessler, and the nearest point that all linearised limits
gathered nearby allow. Where the limit is smooth the first leads; at an edge, where the first alone would
jump to and fro between two faces, the second finds the edge. A step is taken only where it betters the
distance, with a penalty for limits still met.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

import numpy as np

from probsoil._typing import FloatArray

Margin = Callable[[FloatArray], FloatArray]

_STEPS = 0.5 ** np.arange(9)
_REACH = 1.0  # linearised limits farther away than this are forgotten
_KEPT = 12
_NULL_STEPS = 8
_SAME = 0.05  # distance over 1 + radius below which two design points are one
_BESIDE = 4  # points tried for a slope that no edge spoils
_BENT = 0.02  # share of the slope by which the sides of a difference may differ; a curve bends by the step
_CLOSE = 1e-4  # an aim no farther than this ends the search
_SETTLED = 2e-3  # aim and limit no farther than this over 1 + radius: the point counts as found
_PENALTY = 2.0  # over the multiplier of the constraint; above one the penalty is exact


@dataclass(slots=True, kw_only=True, eq=False)
class SearchEnd:
    """Where a search ended.

    Attributes
    ----------
    u : ndarray, shape (d,), [-]
        Point on the limit.
    converged : bool
        Whether the point is on the limit and no nearer one was in sight.
    iterations : int, [-]
        Gradients taken.
    """

    u: FloatArray
    converged: bool
    iterations: int


def design_point_search(
    margin: Margin,
    start: FloatArray,
    scale: float,
    *,
    step: float = 1e-3,
    known: Sequence[FloatArray] = (),
    iterations: int = 100,
) -> SearchEnd | None:
    """Nearest point of a limit, searched from one start.

    Parameters
    ----------
    margin : callable
        Margins (n,) at rows (n, d), above zero at the origin.
    start : ndarray, shape (d,), [-]
        Start.
    scale : float, [any]
        Typical change of the margin over one unit, in its unit.
    step : float, [-]
        Half of the step of the central differences.
    known : sequence of ndarray, shape (d,), [-]
        Design points already found; the search ends where it comes upon one.
    iterations : int, [-]
        Greatest number of gradients.

    Returns
    -------
    end : SearchEnd or None
        Point on the limit; None where the search did not reach the limit or came upon a known point.
    """
    search = _Search(lambda u: margin(u) / scale, step)
    search.move(start, float(search.margin(start[np.newaxis])[0]))
    while search.gradients < iterations and search.advance():
        if any(alike(search.u, point) for point in known):
            return None
    found = on_limit(search.margin, search.u)
    if found is None:
        return None
    return SearchEnd(
        u=found,
        converged=bool(search.apart + np.linalg.norm(found - search.u) < _SETTLED * (1.0 + search.radius)),
        iterations=search.gradients,
    )


def alike(one: FloatArray, other: FloatArray) -> bool:
    """Whether two design points are the same for every purpose.

    Parameters
    ----------
    one, other : ndarray, shape (d,), [-]
        Points.

    Returns
    -------
    alike : bool
        True where they are closer than 0.05 (1 + radius).
    """
    return bool(np.linalg.norm(one - other) < _SAME * (1.0 + np.linalg.norm(one)))


@dataclass(slots=True)
class _Plane:
    """Linearised limit: slope . v <= level on its exceeding side."""

    at: FloatArray
    slope: FloatArray
    level: float
    size: float  # of the gradient; slope is of unit length


@dataclass(slots=True)
class _Search:
    margin: Margin
    step: float
    u: FloatArray = field(default_factory=lambda: np.zeros(0))
    value: float = np.inf
    penalty: float = 0.0
    gradients: int = 0
    planes: list[_Plane] = field(default_factory=list)
    apart: float = np.inf  # of the nearest aim

    @property
    def radius(self) -> float:
        return float(np.linalg.norm(self.u))

    def move(self, u: FloatArray, value: float) -> None:
        self.u, self.value = u, value

    def advance(self) -> bool:
        """Take one step that betters the merit; False where the point is the aim or none does."""
        self.planes = [plane for plane in self.planes if np.linalg.norm(plane.at - self.u) <= _REACH]
        if not self._linearise(self.u, self.value):
            return False
        for _ in range(_NULL_STEPS):
            aims = self._aims()
            self.apart = min(float(np.linalg.norm(aim - self.u)) for aim in aims)
            if self.apart < _CLOSE and abs(self.value) < _CLOSE:
                return False
            trial = np.concatenate([self.u + _STEPS[:, np.newaxis] * (aim - self.u) for aim in aims])
            value = self.margin(trial)
            merit = self._merit(trial, value)
            best = int(merit.argmin())
            now = float(self._merit(self.u[np.newaxis], np.array([self.value]))[0])
            if merit[best] < now - 1e-10 * (1.0 + abs(now)):
                self.move(trial[best], float(value[best]))
                return True
            # no better point: look at the limit across the edge that stands in the way
            if not self._linearise(trial[best], float(value[best])):
                return False
        self.penalty *= 4.0  # several faces together can ask for more than any of them alone
        return self.value > _CLOSE

    def _merit(self, u: FloatArray, value: FloatArray) -> FloatArray:
        squares = np.einsum("ij,ij->i", u, u)
        return np.asarray(0.5 * squares + self.penalty * np.maximum(value, 0.0))

    def _linearise(self, u: FloatArray, value: float) -> bool:
        u, value, slope = self._differentiated(u, value)
        size = float(np.linalg.norm(slope))
        if size == 0.0 or not np.isfinite(value):
            return False
        self.planes = [
            *self.planes[-_KEPT + 1 :],
            _Plane(u, slope / size, float(slope @ u - value) / size, size),
        ]
        aim = abs(self.planes[-1].level)
        self.penalty = max(self.penalty, _PENALTY * max(self.radius, aim, 1.0) / size)
        return True

    def _differentiated(self, u: FloatArray, value: float) -> tuple[FloatArray, float, FloatArray]:
        """Gradient at a point, or beside it where differences reach across an edge.

        Across an edge each coordinate would take its own mix of the faces, which is no slope of the limit.
        """
        at = u
        for attempt in range(_BESIDE):
            self.gradients += 1
            slope, bend = differences(self.margin, at, value, self.step)
            if np.abs(bend).max() <= _BENT * np.abs(slope).max():
                break
            if attempt + 1 < _BESIDE:
                # any direction will do, the same every time
                way = np.random.default_rng(np.random.SeedSequence(self.gradients)).standard_normal(len(u))
                at = u + 2.0 ** (attempt + 2) * self.step * way
                value = float(self.margin(at[np.newaxis])[0])
        return at, value, slope

    def _aims(self) -> list[FloatArray]:
        last = self.planes[-1]
        aims = [last.level * last.slope]
        if len(self.planes) > 1:
            slopes = np.array([plane.slope for plane in self.planes])
            together = nearest_within(slopes, np.array([plane.level for plane in self.planes]))
            if together is not None:
                aims.append(together[0])
                size = np.array([plane.size for plane in self.planes])
                self.penalty = max(self.penalty, _PENALTY * float((together[1] / size).sum()))
        return aims


def differences(margin: Margin, u: FloatArray, value: float, step: float) -> tuple[FloatArray, FloatArray]:
    """Gradient by central differences, and how far the two sides of each differ.

    Parameters
    ----------
    margin : callable
        Margins (n,) at rows (n, d).
    u : ndarray, shape (d,), [-]
        Point.
    value : float, [any]
        Margin there.
    step : float, [-]
        Half of the step.

    Returns
    -------
    gradient, bend : ndarray, shape (d,), [any]
        Change per unit, and half the difference of the changes on the two sides; zero where not finite.
    """
    d = len(u)
    offsets = step * np.eye(d)
    values = margin(np.concatenate([u + offsets, u - offsets]))
    with np.errstate(invalid="ignore"):
        slope = (values[:d] - values[d:]) / (2.0 * step)
        bend = (values[:d] + values[d:] - 2.0 * value) / (2.0 * step)
    finite = np.isfinite(slope) & np.isfinite(bend)
    return np.where(finite, slope, 0.0), np.where(finite, bend, 0.0)


def nearest_within(slopes: FloatArray, levels: FloatArray) -> tuple[FloatArray, FloatArray] | None:
    """Point nearest to the origin within half-spaces.

    Parameters
    ----------
    slopes : ndarray, shape (k, d), [-]
        Normals of the half-spaces slopes . v <= levels, of unit length.
    levels : ndarray, shape (k,), [-]
        Levels.

    Returns
    -------
    nearest, multipliers : ndarray, shape (d,) and (k,), [-], or None
        Nearest point, and the weights of the normals that make it up; None where the half-spaces have no
        point in common or the origin is in all.

    Notes
    -----
    Least-distance programming by non-negative least squares [1]_.

    References
    ----------
    .. [1] C. L. Lawson and R. J. Hanson, Solving Least Squares Problems. Englewood Cliffs: Prentice-Hall,
       1974, ch. 23 (recalled; not opened).
    """
    from scipy.optimize import nnls  # deferred: start-up

    if (levels >= 0.0).all():
        return None
    system = np.vstack([-slopes.T, -levels])
    wanted = np.zeros(len(system))
    wanted[-1] = 1.0
    weights, _ = nnls(system, wanted)
    left = system @ weights - wanted
    if abs(left[-1]) < 1e-9:
        return None
    return np.asarray(-left[:-1] / left[-1], dtype=np.float64), np.asarray(weights / abs(left[-1]))


def on_limit(margin: Margin, u: FloatArray) -> FloatArray | None:
    """Point where the ray through a point crosses the limit nearest to it.

    Parameters
    ----------
    margin : callable
        Margins (n,) at rows (n, d), above zero at the origin.
    u : ndarray, shape (d,), [-]
        Point near the limit.

    Returns
    -------
    crossing : ndarray, shape (d,), [-], or None
        Point on the limit, to 1e-9 of its radius; None where the ray does not cross within a tenth.
    """
    low, high = 0.9, 1.1
    if np.linalg.norm(u) == 0.0:
        return None
    for _ in range(8):
        factor = np.linspace(low, high, 17)
        beyond = margin(factor[:, np.newaxis] * u) <= 0.0
        crossings = np.flatnonzero(beyond[1:] & ~beyond[:-1])
        if len(crossings) == 0:
            return None
        first = int(crossings[np.abs(factor[crossings] - 1.0).argmin()])
        low, high = float(factor[first]), float(factor[first + 1])
    return np.asarray(0.5 * (low + high) * u)
