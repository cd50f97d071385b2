"""Compiled search for the line below a strength profile that carries most, and for what a crust adds."""

import math
from typing import NamedTuple

import numpy as np
from numba import njit

from probsoil._typing import FloatArray, IntArray

REACH = 2.0  # depth over width down to which the line lies nowhere above the profile, and circles go
LINE_ENDS = 1.0  # depth over width below which the line stays as it is; no slip-line field goes deeper
_STEPS = 40  # of the golden section: the ratio to 1e-8 of a row of the table
_ALIKE = 1e-12  # of the strength: corners nearer to a straight line are none
_GOLDEN = 0.5 * (math.sqrt(5.0) - 1.0)


class Factors(NamedTuple):
    """Table of growing strength [-].

    Ratio, ln(1 + ratio), F, circle over strip, row by row; then what a rectangle takes of a circle's excess.
    """

    ratio: FloatArray
    place: FloatArray
    growth: FloatArray
    circle: FloatArray
    square: float


class Circles(NamedTuple):
    """Circles through the far edge of a foundation of width one, (n_circle,) [-].

    Height of the centre above the base, radius, capacity per strength and angle of half the arc, capacity
    on strength 1, and on strength that grows from 0 by 1 over the width and then stays.
    """

    height: FloatArray
    radius: FloatArray
    per_angle: FloatArray
    even: FloatArray
    growing: FloatArray


_compiled = njit(nogil=True, cache=True, error_model="numpy")


@_compiled
def _bearing_factor(place: float, ratio: float, across: float, factors: Factors) -> float:
    """Return capacity over strength at the level, shape included, for a ratio and its ln(1 + ratio)."""
    row = 1
    while place > factors.place[row] and row < factors.place.size - 1:
        row += 1
    share = (place - factors.place[row - 1]) / (factors.place[row] - factors.place[row - 1])
    growth = factors.growth[row - 1] + share * (factors.growth[row] - factors.growth[row - 1])
    excess = factors.circle[row - 1] + share * (factors.circle[row] - factors.circle[row - 1]) - 1.0
    if excess > 0.0:
        excess *= factors.square
    return float(growth * (2.0 + math.pi + 0.25 * ratio) * (1.0 + excess * across))


@_compiled
def _hull(
    below: FloatArray, strength: FloatArray, at_level: float, depth: FloatArray, least: FloatArray
) -> int:
    """Write the corners of the profile's lower hull, from its weakest point down, and return their number.

    No other point ever holds a line down that does not fall with depth.
    """
    depth[0], least[0] = 0.0, at_level
    corners = 1
    for point in range(below.size):
        if below[point] > REACH and point > 0:
            break
        z, su = min(below[point], LINE_ENDS), strength[point]
        while corners > 0 and (
            su <= least[corners - 1]
            or (
                corners > 1
                and (su - least[corners - 1]) * (depth[corners - 1] - depth[corners - 2])
                <= (least[corners - 1] - least[corners - 2]) * (z - depth[corners - 1])
                + _ALIKE * su * (z - depth[corners - 2])
            )
        ):
            corners -= 1
        if corners == 0 or z > depth[corners - 1]:
            depth[corners], least[corners] = z, su
            corners += 1
    return corners


@_compiled
def _start(ratio: float, corners: int, depth: FloatArray, least: FloatArray) -> float:
    """Greatest strength at the level of a line of one ratio that is nowhere above the profile."""
    start = np.inf
    for corner in range(corners):
        start = min(start, least[corner] / (1.0 + ratio * depth[corner]))
    return start


@_compiled
def _best_ratio(corners: int, depth: FloatArray, least: FloatArray, across: float, factors: Factors) -> float:
    """Ratio of growth of the line that carries most: the best row of the table, then golden section."""
    best, most, row = 0.0, -1.0, 0
    for trial in range(factors.place.size):
        ratio = factors.ratio[trial]
        carried = _start(ratio, corners, depth, least)
        carried *= _bearing_factor(factors.place[trial], ratio, across, factors)
        if carried > most:
            best, most, row = ratio, carried, trial
    low, high = factors.place[max(row - 1, 0)], factors.place[min(row + 1, factors.place.size - 1)]
    inner, by_inner, left = 0.0, -1.0, True  # the next trial lies left or right of the one that is kept
    for _ in range(_STEPS + 1):
        place = high - _GOLDEN * (high - low) if left else low + _GOLDEN * (high - low)
        ratio = math.expm1(place)
        carried = _start(ratio, corners, depth, least) * _bearing_factor(place, ratio, across, factors)
        if carried > most:
            best, most = ratio, carried
        if by_inner < 0.0:
            inner, by_inner, left = place, carried, False
            continue
        if carried > by_inner:
            low, high = (low, inner) if left else (inner, high)
            inner, by_inner = place, carried
        else:
            low, high = (place, high) if left else (low, place)
        left = inner - low > high - inner
    return best


@_compiled
def _excess(
    line: tuple[float, float], at_level: float, below: FloatArray, strength: FloatArray, excess: FloatArray
) -> int:
    """Write what of the strength above a line never grows with depth; return how many points have some."""
    start, ratio = line
    last = at_level - start
    for point in range(below.size):
        along = start * (1.0 + ratio * min(below[point], LINE_ENDS))
        last = max(min(last, strength[point] - along), 0.0)
        excess[point] = last
        if last <= 0.0:
            return point
    return below.size


@_compiled
def _crust(
    start: float, ratio: float, excess: FloatArray, used: int, arc: FloatArray, circles: Circles
) -> tuple[float, int]:
    """Return what the circles carry with the crust over what they carry without, and the worst circle."""
    alone, least, worst = np.inf, np.inf, -1
    for circle in range(circles.height.size):
        carried = start * (circles.even[circle] + ratio * circles.growing[circle])
        alone = min(alone, carried)
        carried += excess[0] * circles.even[circle]
        for point in range(1, min(used + 1, excess.size)):
            carried -= (excess[point - 1] - excess[point]) * arc[point, circle]
        if carried < least:
            least, worst = carried, circle
    return least / alone, worst


@_compiled
def _arcs(done: int, wanted: int, edge: FloatArray, circles: Circles, arc: FloatArray) -> int:
    """Write what every circle carries per strength below the upper edges of points not done yet."""
    for point in range(done, wanted):
        for circle in range(circles.height.size):
            cosine = (circles.height[circle] + edge[point]) / circles.radius[circle]
            arc[point, circle] = circles.per_angle[circle] * math.acos(cosine) if cosine < 1.0 else 0.0
    return max(done, wanted)


@_compiled
def best_lines(
    below: FloatArray,
    edge: FloatArray,
    strength: FloatArray,
    at_level: FloatArray,
    across: FloatArray,
    crust_ratio: FloatArray,
    factors: Factors,
    circles: Circles,
) -> tuple[FloatArray, FloatArray, FloatArray, IntArray]:
    """Return start, ratio, crust factor and circle (-1: none) of the line that carries most, row by row."""
    n_sample, n_point = below.shape
    start, best, gain = np.empty(n_sample), np.empty(n_sample), np.ones(n_sample)
    worst = np.full(n_sample, -1)
    depth, least, excess = np.empty(n_point + 1), np.empty(n_point + 1), np.empty(n_point)
    arc = np.empty((n_point, circles.height.size))
    for row in range(n_sample):
        first = 0
        while first < n_point - 1 and below[row, first] < 0.0:
            first += 1
        under, profile = below[row, first:].copy(), strength[row, first:]
        if under[0] < 0.0:  # the level lies in the lower half of the last point's clay: one strength
            under[0] = LINE_ENDS
        corners = _hull(under, profile, at_level[row], depth, least)
        best[row] = _best_ratio(corners, depth, least, across[row], factors)
        start[row] = _start(best[row], corners, depth, least)
        most = start[row] * _bearing_factor(math.log1p(best[row]), best[row], across[row], factors)
        done = 1
        for ratio in crust_ratio:
            from_line = _start(ratio, corners, depth, least)
            used = _excess((from_line, ratio), at_level[row], under, profile, excess)
            if from_line <= 0.0 or used == 0:
                continue
            done = _arcs(done, min(used + 1, under.size), edge[row, first:], circles, arc)
            factor, circle = _crust(from_line, ratio, excess[: under.size], used, arc, circles)
            carried = factor * from_line * _bearing_factor(math.log1p(ratio), ratio, across[row], factors)
            if carried > most:
                most, start[row], best[row], gain[row], worst[row] = carried, from_line, ratio, factor, circle
    return start, best, gain, worst
