"""Compiled search for the least factor of safety of every realisation over a family of circles.

Realisations run in lanes as in the consolidation kernel. The resisting moment of a circle is a
sum of strengths times fixed weights, so one sparse row per circle serves all realisations.
"""

from typing import NamedTuple

import numpy as np
from numba import njit

from probsoil._typing import FloatArray, IntArray
from probsoil.ground.lanes import LANES


class Moments(NamedTuple):
    """What the factor of safety of every circle is made of.

    `strength` is (block, column, lane) [kPa]; the sparse rows are circles, weights in [m2];
    `fill` (block, 3, lane) holds unit weight, tangent of the friction angle and cohesion;
    `fill_terms` (3, circle) holds the driving moment per unit weight [m3], the friction moment
    per unit weight and tangent [m3] and the cohesion moment per kPa [m2].
    """

    strength: FloatArray
    row_start: IntArray
    column: IntArray
    weight: FloatArray
    fill: FloatArray
    fill_terms: FloatArray


_compiled = njit(nogil=True, cache=True, error_model="numpy", fastmath={"contract"})


@_compiled
def strength_on_slices(
    slice_depth: FloatArray,
    boundary: FloatArray,
    first_point: IntArray,
    point_depth: FloatArray,
    strength: FloatArray,
    below: FloatArray,
    out: FloatArray,
) -> None:
    """Interpolate strength from the points of a layer to fixed depths, never across a boundary.

    `boundary` (block, layer + 1, lane) and `point_depth` (block, point, lane) are depths [m];
    points ``first_point[j]`` to ``first_point[j + 1]`` belong to layer j; `strength` is (block,
    kind, point, lane); slices below the last boundary take ``below[kind]``; `out` is (block, kind, slice,
    lane).
    """
    n_block, n_kind, _, _ = strength.shape
    n_layer = first_point.size - 1
    for b in range(n_block):
        for lane in range(LANES):
            layer = 0
            point = 0
            for k in range(slice_depth.size):
                z = slice_depth[k]
                while layer < n_layer and z > boundary[b, layer + 1, lane]:
                    layer += 1
                if layer == n_layer:
                    for kind in range(n_kind):
                        out[b, kind, k, lane] = below[kind]
                    continue
                first, last = first_point[layer], first_point[layer + 1] - 1
                point = max(point, first)
                while point < last and point_depth[b, point + 1, lane] < z:
                    point += 1
                lower = min(point + 1, last)
                gap = point_depth[b, lower, lane] - point_depth[b, point, lane]
                share = (z - point_depth[b, point, lane]) / gap if gap > 0.0 else 0.0
                share = min(max(share, 0.0), 1.0)
                for kind in range(n_kind):
                    upper_value = strength[b, kind, point, lane]
                    lower_value = strength[b, kind, lower, lane]
                    out[b, kind, k, lane] = upper_value + share * (lower_value - upper_value)


@_compiled
def _factors(b: int, circle: int, moments: Moments, ratio: FloatArray) -> None:
    """Factor of safety of one circle in every lane of a block."""
    driving, friction, cohesion = moments.fill_terms[:, circle]
    for lane in range(LANES):
        by_friction = moments.fill[b, 0, lane] * moments.fill[b, 1, lane] * friction
        ratio[lane] = by_friction + moments.fill[b, 2, lane] * cohesion
    for entry in range(moments.row_start[circle], moments.row_start[circle + 1]):
        j = moments.column[entry]
        weight = moments.weight[entry]
        for lane in range(LANES):
            ratio[lane] += weight * moments.strength[b, j, lane]
    for lane in range(LANES):
        ratio[lane] /= moments.fill[b, 0, lane] * driving


@_compiled
def least_factor(moments: Moments, factor: FloatArray, critical: IntArray) -> None:
    """Least ratio of resisting to driving moment over all circles, and which circle gives it.

    `factor` and `critical` are (block, lane).
    """
    ratio = np.empty(LANES)
    for b in range(factor.shape[0]):
        for lane in range(LANES):
            factor[b, lane] = np.inf
            critical[b, lane] = -1
        for c in range(moments.row_start.size - 1):
            _factors(b, c, moments, ratio)
            for lane in range(LANES):
                if ratio[lane] < factor[b, lane]:
                    factor[b, lane] = ratio[lane]
                    critical[b, lane] = c


@_compiled
def near_least(moments: Moments, factor: FloatArray, within: float, near: FloatArray) -> None:
    """Mark (1.0) the circles that come `within` a share of the least factor in any realisation."""
    ratio = np.empty(LANES)
    for b in range(factor.shape[0]):
        for c in range(moments.row_start.size - 1):
            if near[c] == 0.0:
                _factors(b, c, moments, ratio)
                for lane in range(LANES):
                    if ratio[lane] <= (1.0 + within) * factor[b, lane]:
                        near[c] = 1.0
