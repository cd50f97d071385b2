"""Compiled geometry of slip circles: weights of strength in the moments about the centre."""

import math

from numba import njit

from probsoil._typing import FloatArray

ARC_POINTS = 480  # points along a circle; more change no factor of safety by 0.1 %
COLUMN_POINTS = 240


@njit(nogil=True, cache=True, error_model="numpy")
def _top(x: float, height: float, slope: float, base: float) -> float:
    """Height of the fill surface at x from the toe."""
    if x <= 0.0 or x >= base:
        return 0.0
    return min(height, min(x, base - x) / slope)


@njit(nogil=True, cache=True, error_model="numpy")
def driving_moments(
    centre_x: FloatArray,
    centre_y: FloatArray,
    radius: FloatArray,
    section: tuple[float, float, float, float],
    driving: FloatArray,
) -> None:
    """Moment of the fill inside each circle about its centre per unit weight [m3].

    `section` holds fill height, side slope, base width and where the zone under the crest begins.
    """
    height, slope, base, _ = section
    for c in range(radius.size):
        r2 = radius[c] * radius[c]
        left = max(centre_x[c] - math.sqrt(r2 - centre_y[c] ** 2), 0.0)
        right = centre_x[c] + math.sqrt(r2 - (centre_y[c] - height) ** 2)
        width = (right - left) / COLUMN_POINTS
        moment = 0.0
        for k in range(COLUMN_POINTS):
            x = left + (k + 0.5) * width
            arc = centre_y[c] - math.sqrt(max(r2 - (x - centre_x[c]) ** 2, 0.0))
            moment += max(_top(x, height, slope, base) - max(arc, 0.0), 0.0) * (x - centre_x[c])
        driving[c] = moment * width


@njit(nogil=True, cache=True, error_model="numpy")
def resisting_weights(
    centre_x: FloatArray,
    centre_y: FloatArray,
    radius: FloatArray,
    section: tuple[float, float, float, float],
    edge: FloatArray,
    rows: FloatArray,
    fill: FloatArray,
) -> None:
    """Weights of ground strength (`rows`) and of fill friction and cohesion (`fill`).

    `rows` is (circle, kind * zone * slice) [m2], zones beyond the toe, under the slope and under
    the crest, kinds cohesive and, where there is room for it, frictional; `fill` is (2, circle):
    friction moment per unit weight and tangent [m3], cohesion moment per kPa [m2].
    """
    height, slope, base, slope_zone = section
    n_slice = edge.size - 1
    frictional = rows.shape[1] > 3 * n_slice
    for c in range(radius.size):
        first = -math.asin(math.sqrt(1.0 - (centre_y[c] / radius[c]) ** 2))
        last = math.acos((centre_y[c] - height) / radius[c])
        turn = (last - first) / ARC_POINTS
        moment = radius[c] * radius[c] * turn
        sine, cosine = math.sin(first + 0.5 * turn), math.cos(first + 0.5 * turn)
        turn_sine, turn_cosine = math.sin(turn), math.cos(turn)
        level = 0
        for _ in range(ARC_POINTS):
            x = centre_x[c] + radius[c] * sine
            y = centre_y[c] - radius[c] * cosine
            if y > 0.0:
                column = _top(x, height, slope, base) - y
                if column > 0.0:
                    fill[0, c] += moment * cosine * cosine * column
                    fill[1, c] += moment
            else:
                while level < n_slice - 1 and -y > edge[level + 1]:
                    level += 1
                while level > 0 and -y <= edge[level]:
                    level -= 1
                if x < 0.0 or x > base:
                    zone = 0
                elif x < slope_zone or x > base - slope_zone:
                    zone = 1
                else:
                    zone = 2
                rows[c, zone * n_slice + level] += moment
                if frictional:
                    rows[c, (3 + zone) * n_slice + level] += moment * cosine * cosine
            sine, cosine = (
                sine * turn_cosine + cosine * turn_sine,
                cosine * turn_cosine - sine * turn_sine,
            )
