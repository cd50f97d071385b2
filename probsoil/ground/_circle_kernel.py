"""Compiled geometry of slip circles: weights of strength in the moments about the centre."""

import math
from typing import NamedTuple

from numba import njit

from probsoil._typing import FloatArray

ARC_POINTS = 480  # points along a circle; more change no factor of safety by 0.1 %


class Circles(NamedTuple):
    """Centre, radius, where the arc leaves and enters, and where traffic begins; (n_circle,) [m]."""

    centre_x: FloatArray
    centre_y: FloatArray
    radius: FloatArray
    exit_x: FloatArray
    exit_y: FloatArray
    entry_x: FloatArray
    entry_y: FloatArray
    loaded_x: FloatArray


class Form(NamedTuple):
    """Section of the fill and where the zones of strength end, from the outer toe [m]."""

    height: float
    slope: float
    base: float
    berm_width: float
    berm_height: float
    berm_zone: float
    slope_zone: float
    n_zone: int


@njit(nogil=True, cache=True, error_model="numpy")
def _top(x: float, form: Form) -> float:
    """Height of the fill surface at x from the outer toe."""
    inside = min(x, form.base - x)
    if inside <= 0.0:
        return 0.0
    berm = min(form.berm_height, form.height, inside / form.slope)
    return max(berm, min(form.height, (inside - form.berm_width) / form.slope))


@njit(nogil=True, cache=True, error_model="numpy")
def _zone(x: float, form: Form) -> int:
    """Zone of strength: 0 beyond the toe, 1 under the slope, 2 under the crest, 3 under a berm."""
    inside = min(x, form.base - x)
    if inside < 0.0:
        return 0
    if inside < form.berm_zone:
        return 3
    return 1 if inside < form.slope_zone else 2


@njit(nogil=True, cache=True, error_model="numpy")
def resisting_weights(
    circles: Circles, form: Form, edge: FloatArray, rows: FloatArray, fill: FloatArray
) -> None:
    """Weights of ground strength (`rows`) and of fill friction and cohesion (`fill`).

    `rows` is (circle, kind * zone * slice) [m2], kinds cohesive and, where there is room for it,
    frictional; `fill` is (3, circle): friction moment per unit weight and tangent [m3], moment of
    cohesion per kPa, and friction moment of traffic per kPa and tangent [m2].
    """
    n_slice, n_zone = edge.size - 1, form.n_zone
    frictional = rows.shape[1] > n_zone * n_slice
    for c in range(circles.radius.size):
        centre_x, centre_y, radius = circles.centre_x[c], circles.centre_y[c], circles.radius[c]
        first = math.atan2(circles.exit_x[c] - centre_x, centre_y - circles.exit_y[c])
        last = math.atan2(circles.entry_x[c] - centre_x, centre_y - circles.entry_y[c])
        turn = (last - first) / ARC_POINTS
        moment = radius * radius * turn
        sine, cosine = math.sin(first + 0.5 * turn), math.cos(first + 0.5 * turn)
        turn_sine, turn_cosine = math.sin(turn), math.cos(turn)
        level = 0
        for _ in range(ARC_POINTS):
            x = centre_x + radius * sine
            y = centre_y - radius * cosine
            if y > 0.0:
                column = _top(x, form) - y
                if column > 0.0:
                    fill[0, c] += moment * cosine * cosine * column
                    fill[1, c] += moment
                    if x > circles.loaded_x[c]:
                        fill[2, c] += moment * cosine * cosine
            else:
                while level < n_slice - 1 and -y > edge[level + 1]:
                    level += 1
                while level > 0 and -y <= edge[level]:
                    level -= 1
                zone = _zone(x, form)
                rows[c, zone * n_slice + level] += moment
                if frictional:
                    rows[c, (n_zone + zone) * n_slice + level] += moment * cosine * cosine
            sine, cosine = (
                sine * turn_cosine + cosine * turn_sine,
                cosine * turn_cosine - sine * turn_sine,
            )
