"""Least factor of safety against an undrained slip on a circle."""

from dataclasses import dataclass, replace

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.ground._slip_kernel import Moments, least_factor, strength_on_slices
from probsoil.ground.lanes import LANES, Lanes
from probsoil.ground.slip_circles import (
    CircleFamily,
    CircleLayout,
    candidate_circles,
    circles_beside,
    dense_weights,
    weighed,
)
from probsoil.ground.slip_driving import Circles

_BLOCK = 2000  # circles weighed at a time while screening
_IN_DEPTH = np.array([[0.0, 0.0, step] for step in (-1.0, 0.0, 1.0)])
_AT_ENDS = np.array([[leave, enter, 0.0] for leave in (-1.0, 0.0, 1.0) for enter in (-1.0, 0.0, 1.0)])
_ROUNDS = ((_IN_DEPTH / 3.0, 0.04), (_IN_DEPTH / 9.0, 0.02), (_AT_ENDS / 3.0, 0.005))
# Rounds of refinement: moves in spacings of the candidates, and how near the least factor a circle must come
# for others to be looked at beside it. The spacing in depth costs up to 4 % where a weak layer is thin.
_SCOUTS, _HOPELESS = 64, 0.3
# Circles this far above the least factor in so many realisations are not looked at in the others: of those
# within 4 % of the least in any of 512 none was lost, with a third of the margin one in ten thousand.
_LEVEL = 1e-6  # m; a circle may touch the base this much below it, for rounding


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class GroundStrength:
    """Strength of the ground at points that follow the layers of each realisation.

    Attributes
    ----------
    boundary : ndarray, shape (n_sample, n_layer + 1), [m]
        Depths of layer boundaries, ground level first.
    point_layer : ndarray of int, shape (n_point,), [-]
        Layer of each point, rising.
    point_depth : ndarray, shape (n_sample, n_point), [m]
        Depths of the points.
    cohesive : ndarray, shape (n_sample, n_zone, n_point), [kPa]
        Undrained strength beyond the toe, under the slope, under the crest and, with berms, under a
        berm; zero in layers with friction.
    frictional : ndarray or None, shape (n_sample, n_zone, n_point), [kPa]
        Effective vertical stress times the tangent of the friction angle in the same zones; None
        where no layer has friction.
    """

    boundary: FloatArray
    point_layer: IntArray
    point_depth: FloatArray
    cohesive: FloatArray
    frictional: FloatArray | None

    def __getitem__(self, some: slice) -> "GroundStrength":
        """Return some of the realisations."""
        return replace(
            self,
            boundary=self.boundary[some],
            point_depth=self.point_depth[some],
            cohesive=self.cohesive[some],
            frictional=None if self.frictional is None else self.frictional[some],
        )


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class FillStrength:
    """Fill of each realisation and the traffic on it.

    Attributes
    ----------
    unit_weight : ndarray, shape (n_sample,), [kN/m3]
        Bulk unit weight.
    friction_angle : ndarray, shape (n_sample,), [degrees]
        Effective friction angle.
    cohesion : ndarray, shape (n_sample,), [kPa]
        Effective cohesion.
    traffic : ndarray or None, shape (n_sample,), [kPa]
        Pressure on the top; None for none.
    heavier : ndarray or None, shape (n_sample,), [-]
        Weight that drives over that of the fill in the section, where fill lies below it besides; None
        for 1.
    """

    unit_weight: FloatArray
    friction_angle: FloatArray
    cohesion: FloatArray
    traffic: FloatArray | None = None
    heavier: FloatArray | None = None

    def __getitem__(self, some: slice) -> "FillStrength":
        """Return some of the realisations."""
        return FillStrength(
            unit_weight=self.unit_weight[some],
            friction_angle=self.friction_angle[some],
            cohesion=self.cohesion[some],
            traffic=None if self.traffic is None else self.traffic[some],
            heavier=None if self.heavier is None else self.heavier[some],
        )

    @property
    def on_top(self) -> FloatArray:
        """Pressure of traffic on the top, shape (n_sample,), [kPa]."""
        return np.zeros_like(self.unit_weight) if self.traffic is None else self.traffic

    @property
    def driving_weight(self) -> FloatArray:
        """Unit weight of the section that drives as the whole fill does, shape (n_sample,), [kN/m3]."""
        return self.unit_weight if self.heavier is None else self.unit_weight * self.heavier


def slip_safety(
    ground: GroundStrength, fill: FillStrength, family: CircleFamily
) -> tuple[FloatArray, IntArray]:
    r"""Return the least factor of safety over a family of circles, and the circle.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers, n_sample realisations.
    fill : FillStrength
        Fill of the same realisations.
    family : CircleFamily
        Circles for the section at the time looked at.

    Returns
    -------
    factor : ndarray, shape (n_sample,), [-]
        Least ratio of resisting to driving moment.
    critical : ndarray of int, shape (n_sample,), [-]
        Index of the circle in `family`.

    Notes
    -----
    Total-stress analysis: :math:`F = R \sum \tau\,\Delta l / M_d` with undrained strength in clay
    and friction on the ordinary method's normal stress in fill and granular layers. Circles stay
    above the last layer's bottom, below which the ground counts as firm. Traffic drives, and presses
    on the fill below it. Plane strain; end effects, progressive failure and cracks in the fill are
    left out.
    """
    n_sample = fill.unit_weight.size
    lanes = Lanes(n_sample)
    tangent = np.tan(np.radians(fill.friction_angle))
    moments = Moments(
        strength=slice_strengths(ground, family.slice_edge, n_sample),
        row_start=family.row_start,
        column=family.column,
        weight=family.weight,
        fill=lanes.pack(
            np.stack([fill.unit_weight, tangent, fill.cohesion, fill.on_top, fill.driving_weight], axis=1)
        ),
        fill_terms=np.stack(
            [
                family.circles.driving,
                family.fill_friction,
                family.fill_cohesion,
                family.circles.traffic,
                family.traffic_friction,
            ]
        ),
        touch=family.circles.touch,
        bottom=lanes.pack(ground.boundary[:, -1:])[:, 0] + _LEVEL,
    )
    factor = np.empty((lanes.n_block, LANES))
    critical = np.empty(factor.shape, dtype=np.int64)
    least_factor(moments, factor, critical)
    return factor.reshape(-1)[:n_sample], critical.reshape(-1)[:n_sample]


def competing_circles(
    ground: GroundStrength, fill: FillStrength, layout: CircleLayout, *, within: float
) -> CircleFamily:
    """Return a few circles that between them are critical, or nearly so, in every realisation.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers, n_sample realisations.
    fill : FillStrength
        Fill of the same realisations.
    layout : CircleLayout
        Circles to choose from.
    within : float, [-]
        How far above the least factor of a realisation the best circle chosen may be, as a share of it.

    Returns
    -------
    family : CircleFamily
        The circles chosen.

    Notes
    -----
    All circles of the layout first, on its slices, in a few realisations, and those not hopeless there
    in all; then three times those that came near the least factor in some realisation, and others beside
    them, on slices that end where circles do. Of these a few are taken, one by one, each time the one that
    serves most of the realisations not yet served; to each come two beside it in depth, for other
    realisations, whose layers end elsewhere.
    """
    chosen = chosen_circles(ground, fill, layout, within=within)
    return weighed(layout, chosen, layout.slice_edge_for(chosen.touch))


def chosen_circles(
    ground: GroundStrength, fill: FillStrength, layout: CircleLayout, *, within: float
) -> Circles:
    """Return the circles of `competing_circles` without their weights.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers, n_sample realisations.
    fill : FillStrength
        Fill of the same realisations.
    layout : CircleLayout
        Circles to choose from.
    within : float, [-]
        As there.

    Returns
    -------
    circles : Circles
        Geometry.
    """
    circles = _promising(ground, fill, layout)
    factor = _every_factor(ground, fill, layout, circles, layout.slice_edge)
    for moves, worth in _ROUNDS:
        near = factor <= (1.0 + worth) * factor.min(axis=0)
        circles = circles_beside(layout, circles[np.asarray(near.any(axis=1))], moves)
        factor = _every_factor(ground, fill, layout, circles, layout.slice_edge_for(circles.touch))
    chosen = circles[circles_serving(factor <= (1.0 + within) * factor.min(axis=0))]
    return circles_beside(layout, chosen, _IN_DEPTH / 3.0)


def chosen_in_fill(
    ground: GroundStrength, fill: FillStrength, layout: CircleLayout, *, within: float
) -> Circles:
    """Return a few circles that are the worst, or nearly so, of those wholly in the fill.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers, n_sample realisations.
    fill : FillStrength
        Fill of the same realisations.
    layout : CircleLayout
        Circles to choose from.
    within : float, [-]
        As for `competing_circles`.

    Returns
    -------
    circles : Circles
        Geometry; none where the layout has no circles in the fill.
    """
    circles = candidate_circles(layout)
    circles = circles[circles.touch <= 0.0]
    if not len(circles):
        return circles
    factor = _every_factor(ground, fill, layout, circles, layout.slice_edge)
    return circles[circles_serving(factor <= (1.0 + within) * factor.min(axis=0))]


def _promising(ground: GroundStrength, fill: FillStrength, layout: CircleLayout) -> Circles:
    """Return the candidates that are not far above the least factor in every one of a few realisations."""
    circles = candidate_circles(layout)
    scouts = slice(0, _SCOUTS)
    factor = _every_factor(ground[scouts], fill[scouts], layout, circles, layout.slice_edge)
    promising = factor <= (1.0 + _HOPELESS) * factor.min(axis=0)
    return circles[np.asarray(promising.any(axis=1))]


def _every_factor(
    ground: GroundStrength, fill: FillStrength, layout: CircleLayout, circles: Circles, edge: FloatArray
) -> FloatArray:
    """Return the factor of safety of every circle in every realisation, (n_circle, n_sample), [-]."""
    n_sample = fill.unit_weight.size
    strength = Lanes(n_sample).unpack(slice_strengths(ground, edge, n_sample)).T
    tangent = np.tan(np.radians(fill.friction_angle))
    factor = np.empty((len(circles), n_sample))
    for first in range(0, len(circles), _BLOCK):
        part = slice(first, first + _BLOCK)
        rows, terms = dense_weights(layout, circles[part], edge)
        by_fill = np.outer(terms[0], fill.unit_weight * tangent) + np.outer(terms[1], fill.cohesion)
        by_fill += np.outer(terms[2], fill.on_top * tangent)
        driving = np.outer(circles.driving[part], fill.driving_weight)
        driving += np.outer(circles.traffic[part], fill.on_top)
        factor[part] = (rows @ strength + by_fill) / driving
    factor[~circles_above_base(circles, ground.boundary[None, :, -1])] = np.inf
    return factor


def circles_above_base(circles: Circles, bottom: FloatArray | float) -> BoolArray:
    """Return which circles stay above the firm base.

    Parameters
    ----------
    circles : Circles
        Geometry.
    bottom : ndarray, shape (1, n_sample), or float, [m]
        Depth of the base.

    Returns
    -------
    above : ndarray of bool, shape (n_circle, n_sample) or (n_circle,), [-]
        The shallowest circle counts as one of them wherever the base is.
    """
    touch = circles.touch if np.ndim(bottom) == 0 else circles.touch[:, None]
    above = np.asarray(touch <= bottom + _LEVEL)
    above[np.argmin(circles.touch)] = True
    return above


def circles_serving(near: BoolArray) -> IntArray:
    """Choose circles until every realisation has one that is near its least factor, greedily.

    Parameters
    ----------
    near : ndarray of bool, shape (n_circle, n_sample), [-]
        Whether a circle is near the least factor of a realisation; each has one.

    Returns
    -------
    chosen : ndarray of int, shape (n_chosen,), [-]
        Numbers of the circles, rising.
    """
    chosen: list[int] = []
    left = np.ones(near.shape[1], dtype=bool)
    while left.any():
        chosen.append(int(np.argmax(near[:, left].sum(axis=1))))
        left &= ~near[chosen[-1]]
    return np.array(sorted(chosen), dtype=np.int64)


def slice_strengths(ground: GroundStrength, edge: FloatArray, n_sample: int) -> FloatArray:
    """Return the strength of every zone and slice.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers.
    edge : ndarray, shape (n_slice + 1,), [m]
        Depths between slices.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    strength : ndarray, shape (n_block, n_column, LANES), [kPa]
        Columns run through the slices of each zone, cohesive first, then frictional.
    """
    lanes = Lanes(n_sample)
    kinds = [ground.cohesive] if ground.frictional is None else [ground.cohesive, ground.frictional]
    strength = np.concatenate(kinds, axis=1)
    n_kind, n_slice = strength.shape[1], edge.size - 1
    at_points = np.stack([lanes.pack(strength[:, kind]) for kind in range(n_kind)], axis=1)
    first_point = np.searchsorted(ground.point_layer, np.arange(ground.boundary.shape[1]))
    on_slices = np.empty((lanes.n_block, n_kind, n_slice, LANES))
    strength_on_slices(
        edge,
        lanes.pack(ground.boundary),
        first_point.astype(np.int64),
        lanes.pack(ground.point_depth),
        at_points,
        on_slices,
    )
    return on_slices.reshape(lanes.n_block, n_kind * n_slice, LANES)
