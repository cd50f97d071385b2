"""Compiled search for the least factor of safety of every realisation over a family of circles.

Realisations run in lanes as in the consolidation kernel. The resisting moment of a circle is a
sum of strengths times fixed weights, so one sparse row per circle serves all realisations.
"""

from typing import NamedTuple

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.ground._compiling import compiled, kept
from probsoil.ground.lanes import LANES


class Moments(NamedTuple):
    """What the factor of safety of every circle is made of.

    `strength` is (block, column, lane) [kPa]; the sparse rows are circles, weights in [m2];
    `fill` (block, 5, lane) holds unit weight, tangent of the friction angle, cohesion, traffic and the
    unit weight that drives;
    `fill_terms` (5, circle) holds the driving moment per unit weight [m3], the friction moment
    per unit weight and tangent [m3], the moments of cohesion and of traffic per kPa, and the friction
    moment of traffic per kPa and tangent [m2]; `touch` (circle,) and `bottom` (block, lane) are depths [m]
    of the lowest point of a circle and of the firm base.
    """

    strength: FloatArray
    row_start: IntArray
    column: IntArray
    weight: FloatArray
    fill: FloatArray
    fill_terms: FloatArray
    touch: FloatArray
    bottom: FloatArray


@compiled
def _interpolated(
    z: float, first: int, last: int, depth: FloatArray, strength: FloatArray, kind: int, lane: int
) -> float:
    """Strength of a layer at depth z from its points `first` to `last`, level beyond them."""
    point = first
    while point < last and depth[point + 1, lane] < z:
        point += 1
    lower = min(point + 1, last)
    gap = depth[lower, lane] - depth[point, lane]
    share = (z - depth[point, lane]) / gap if gap > 0.0 else 0.0
    share = min(max(share, 0.0), 1.0)
    upper = strength[kind, point, lane]
    value: float = upper + share * (strength[kind, lower, lane] - upper)
    return value


@kept
def strength_on_slices(
    edge: FloatArray,
    boundary: FloatArray,
    first_point: IntArray,
    point_depth: FloatArray,
    strength: FloatArray,
    out: FloatArray,
) -> None:
    """Mean strength of every slice, each layer by the thickness it has in the slice.

    `edge` (slice + 1,) holds the depths between slices [m]; `boundary` (block, layer + 1, lane) and
    `point_depth` (block, point, lane) are depths [m]; points ``first_point[j]`` to
    ``first_point[j + 1] - 1`` belong to layer j; `strength` is (block, kind, point, lane); of a slice
    that reaches below the last boundary its upper part alone counts, and below that the strength
    goes on as it is there; `out` is (block, kind, slice, lane).
    """
    n_block, n_kind, _, _ = strength.shape
    n_layer = first_point.size - 1
    for b in range(n_block):
        for lane in range(LANES):
            for k in range(edge.size - 1):
                bottom = boundary[b, n_layer, lane]
                for kind in range(n_kind):
                    out[b, kind, k, lane] = strength[b, kind, -1, lane] if edge[k] >= bottom else 0.0
                end = min(edge[k + 1], bottom)
                for layer in range(n_layer):
                    upper = max(edge[k], boundary[b, layer, lane])
                    lower = min(end, boundary[b, layer + 1, lane])
                    if lower > upper:
                        share = (lower - upper) / (end - edge[k])
                        first, last = first_point[layer], first_point[layer + 1] - 1
                        for kind in range(n_kind):
                            out[b, kind, k, lane] += share * _interpolated(
                                0.5 * (upper + lower), first, last, point_depth[b], strength[b], kind, lane
                            )


@compiled
def _factors(b: int, circle: int, moments: Moments, ratio: FloatArray) -> None:
    """Factor of safety of one circle in every lane of a block."""
    driving, friction, cohesion, traffic, under_traffic = moments.fill_terms[:, circle]
    for lane in range(LANES):
        normal = moments.fill[b, 0, lane] * friction + moments.fill[b, 3, lane] * under_traffic
        ratio[lane] = moments.fill[b, 1, lane] * normal + moments.fill[b, 2, lane] * cohesion
    entry, end = moments.row_start[circle], moments.row_start[circle + 1]
    while entry + 3 < end:  # four at a time, so that the sums go to memory and back less often
        j0, j1, j2, j3 = moments.column[entry : entry + 4]
        w0, w1, w2, w3 = moments.weight[entry : entry + 4]
        for lane in range(LANES):
            ratio[lane] += (w0 * moments.strength[b, j0, lane] + w1 * moments.strength[b, j1, lane]) + (
                w2 * moments.strength[b, j2, lane] + w3 * moments.strength[b, j3, lane]
            )
        entry += 4
    while entry < end:
        for lane in range(LANES):
            ratio[lane] += moments.weight[entry] * moments.strength[b, moments.column[entry], lane]
        entry += 1
    for lane in range(LANES):
        ratio[lane] /= moments.fill[b, 4, lane] * driving + moments.fill[b, 3, lane] * traffic


@kept
def least_factor(moments: Moments, factor: FloatArray, critical: IntArray) -> None:
    """Least ratio of resisting to driving moment over the circles above the base, and which gives it.

    `factor` and `critical` are (block, lane). Where every circle reaches below the base, the shallowest
    is taken.
    """
    ratio = np.empty(LANES)
    shallowest = int(np.argmin(moments.touch))
    for b in range(factor.shape[0]):
        for lane in range(LANES):
            factor[b, lane] = np.inf
            critical[b, lane] = -1
        for c in range(moments.row_start.size - 1):
            _factors(b, c, moments, ratio)
            for lane in range(LANES):
                above = moments.touch[c] <= moments.bottom[b, lane]
                if above and ratio[lane] < factor[b, lane]:
                    factor[b, lane] = ratio[lane]
                    critical[b, lane] = c
        _factors(b, shallowest, moments, ratio)
        for lane in range(LANES):
            if critical[b, lane] < 0:
                factor[b, lane] = ratio[lane]
                critical[b, lane] = shallowest
