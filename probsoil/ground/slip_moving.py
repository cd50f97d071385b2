"""Slip circles that move with a section of fill that is not the same in every realisation.

A circle is kept as where it leaves and enters along the surface, told from the corners of the section, and
the depth it touches (in the fill, its bend). On the section of a realisation that gives another circle, whose
moments are worked out anew.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.ground.embankment import EmbankmentSection
from probsoil.ground.lanes import Lanes
from probsoil.ground.slip import (
    FillStrength,
    GroundStrength,
    circles_above_base,
    circles_serving,
    slice_strengths,
)
from probsoil.ground.slip_circles import (
    SHALLOWEST_IN_FILL,
    CircleLayout,
    candidate_circles,
    dense_weights,
)
from probsoil.ground.slip_driving import LEAST_DRIVING, Circles, with_moments
from probsoil.ground.slip_grid import arcs_bent, arcs_touching, bend_of, surface_point

POSITION = ("centre_x", "centre_y", "radius", "touch", "exit_x", "entry_x")
"""What is told of where a critical circle lies, in this order."""


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class MovingFamily:
    """Circles by their place on a section, whatever its size.

    Attributes
    ----------
    leave, enter : ndarray, shape (n_circle,), [-] or [m]
        Where they leave and enter, as `place_on` tells it.
    third : ndarray, shape (n_circle,), [m] or [-]
        Depth they touch, above zero; in the fill their bend.
    in_ground, above_berms : ndarray of bool, shape (n_circle,), [-]
        Whether they go through the ground, and whether the fill stood above berms where they were chosen.
    slice_edge : ndarray, shape (n_slice + 1,), [m]
        Depths between the slices in which strength is wanted.
    """

    leave: FloatArray
    enter: FloatArray
    third: FloatArray
    in_ground: BoolArray
    above_berms: BoolArray
    slice_edge: FloatArray

    def __getitem__(self, which: IntArray) -> "MovingFamily":
        """Return some of the circles."""
        return replace(
            self,
            leave=self.leave[which],
            enter=self.enter[which],
            third=self.third[which],
            in_ground=self.in_ground[which],
            above_berms=self.above_berms[which],
        )

    def on(self, section: EmbankmentSection) -> tuple[Circles, IntArray]:
        """Return the circles on a section.

        Parameters
        ----------
        section : EmbankmentSection
            Fill.

        Returns
        -------
        circles : Circles
            Those that exist there.
        number : ndarray of int, shape (n_circle,), [-]
            Which of the family they are.
        """
        fitting = self.above_berms == section.above_berms
        leave, enter = (surface_point(section, way_at(section, place)) for place in (self.leave, self.enter))
        thin = min(SHALLOWEST_IN_FILL, 0.5 * section.height)
        through = np.flatnonzero(fitting & self.in_ground)
        within = np.flatnonzero(fitting & ~self.in_ground & (leave < enter).all(axis=1))
        touching, first = arcs_touching(section, leave[through], enter[through], self.third[through])
        bent, second = arcs_bent(section, leave[within], enter[within], self.third[within], shallowest=thin)
        circles = with_moments(section, [touching, bent])
        number, driving = np.concatenate([through[first], within[second]]), circles.driving > LEAST_DRIVING
        return circles[driving], number[driving]


def place_on(section: EmbankmentSection, way: FloatArray) -> FloatArray:
    """Return places on the near surface in a form that another section has too.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    way : ndarray, shape (n,), [m]
        Run and rise together from the toe, below zero beyond it.

    Returns
    -------
    place : ndarray, shape (n,), [-] or [m]
        Beyond the toe the way itself; up to the shoulder the number of corners passed and the share of the
        way to the next; on the top that of the shoulder and the distance behind it.
    """
    corners = section.corners.sum(axis=1)
    last = corners.size - 1
    inside = np.interp(way, corners, np.arange(corners.size))
    return np.where(way < 0.0, way, np.where(way > corners[-1], last + way - corners[-1], inside))


def way_at(section: EmbankmentSection, place: FloatArray) -> FloatArray:
    """Return run and rise to places on the near surface.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    place : ndarray, shape (n,), [-] or [m]
        As `place_on` gives them.

    Returns
    -------
    way : ndarray, shape (n,), [m]
        Run and rise together from the toe, below zero beyond it; at most to the far shoulder.
    """
    corners = section.corners.sum(axis=1)
    last = corners.size - 1
    inside = np.interp(place, np.arange(corners.size), corners)
    behind = np.minimum(place - last, section.base_width - 2.0 * section.shoulder)
    return np.where(place < 0.0, place, np.where(place > last, corners[-1] + behind, inside))


def moving_family(chosen: Sequence[tuple[CircleLayout, Circles]]) -> MovingFamily:
    """Return circles chosen on some sections as ones that move with the section.

    Parameters
    ----------
    chosen : sequence of (CircleLayout, Circles)
        Sections, and circles chosen on each.

    Returns
    -------
    family : MovingFamily
        All of them.
    """
    parts = [_placed(layout.section, circles) for layout, circles in chosen]
    names = parts[0].keys()
    joined = {name: np.concatenate([part[name] for part in parts]) for name in names}
    touch = np.concatenate([circles.touch for _, circles in chosen])
    deepest = max((layout for layout, _ in chosen), key=lambda layout: layout.depth)
    return MovingFamily(**joined, slice_edge=deepest.slice_edge_for(touch))


def _placed(section: EmbankmentSection, circles: Circles) -> dict[str, FloatArray]:
    ground = circles.touch > 0.0
    third = circles.touch.copy()
    third[~ground] = bend_of(circles[~ground])
    return {
        "leave": place_on(section, circles.exit_x + circles.exit_y),
        "enter": place_on(section, circles.entry_x + circles.entry_y),
        "third": third,
        "in_ground": ground,
        "above_berms": np.full(len(circles), section.above_berms),
    }


def moving_safety(
    ground: GroundStrength,
    fill: FillStrength,
    family: MovingFamily | None,
    layouts: Sequence[CircleLayout | None],
) -> tuple[FloatArray, FloatArray]:
    """Return the least factor of safety on the section of every realisation, and the circle.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers, n_sample realisations.
    fill : FillStrength
        Fill of the same realisations.
    family : MovingFamily or None
        Circles; None for all of every layout.
    layouts : sequence of CircleLayout or None
        Section of every realisation; None where there is no fill.

    Returns
    -------
    factor : ndarray, shape (n_sample,), [-]
        Least ratio of resisting to driving moment; infinite without fill.
    position : ndarray, shape (n_sample, 6), [m]
        The circle, as in `POSITION`; not a number without fill.

    Notes
    -----
    The same moments as of `slip.slip_safety`.
    """
    n_sample = fill.unit_weight.size
    factor, position = np.full(n_sample, np.inf), np.full((n_sample, len(POSITION)), np.nan)
    for place, case in enumerate(_cases(ground, family, layouts)):
        if case is not None:
            found = _factors(ground, fill, place, case)
            worst = int(np.argmin(found))
            factor[place] = found[worst]
            position[place] = [getattr(case.circles, name)[worst] for name in POSITION]
    return factor, position


def serving(
    ground: GroundStrength,
    fill: FillStrength,
    family: MovingFamily,
    layouts: Sequence[CircleLayout | None],
    mean: CircleLayout,
    *,
    within: float,
) -> MovingFamily:
    """Return a few circles of a family that between them are nearly critical in every realisation.

    Parameters
    ----------
    ground : GroundStrength
        Strength of the layers, n_sample realisations.
    fill : FillStrength
        Fill of the same realisations.
    family : MovingFamily
        Circles to choose from.
    layouts : sequence of CircleLayout or None
        Section of every realisation; None where there is no fill.
    mean : CircleLayout
        With the mean section.
    within : float, [-]
        How far above the least factor of a realisation the best circle chosen may be, as a share of it.

    Returns
    -------
    family : MovingFamily
        The circles chosen, and two beside each in depth.
    """
    factor = np.full((family.leave.size, len(layouts)), np.inf)
    for place, case in enumerate(_cases(ground, family, layouts)):
        if case is not None and case.number is not None:
            factor[case.number, place] = _factors(ground, fill, place, case)
    looked_at = np.isfinite(factor).any(axis=0)
    near = factor[:, looked_at] <= (1.0 + within) * factor[:, looked_at].min(axis=0)
    return _with_others_in_depth(family[circles_serving(near)], mean)


def _with_others_in_depth(family: MovingFamily, layout: CircleLayout) -> MovingFamily:
    """Return circles with two beside each in depth, for realisations whose layers end elsewhere."""
    step = np.where(family.in_ground, layout.depth_step(family.third) / 3.0, 0.0)
    some = np.flatnonzero(family.in_ground)
    numbers = np.concatenate([np.arange(step.size), some, some])
    moved = np.concatenate([family.third, (family.third - step)[some], (family.third + step)[some]])
    found = replace(family[numbers], third=moved)
    shallowest = family.third.min(where=family.in_ground, initial=layout.depth)
    deep = (moved >= shallowest) & (moved <= layout.depth)
    kept = np.flatnonzero(~found.in_ground | deep)
    touch = np.where(found.in_ground, moved, 0.0)[kept]
    return replace(found[kept], slice_edge=layout.slice_edge_for(touch))


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class _Case:
    """Circles of one realisation, with the slices and the strength on them; `number` where of a family."""

    layout: CircleLayout
    circles: Circles
    edge: FloatArray
    strength: FloatArray
    number: IntArray | None = None


def _cases(
    ground: GroundStrength, family: MovingFamily | None, layouts: Sequence[CircleLayout | None]
) -> Iterator[_Case | None]:
    """Yield the circles of every realisation; where none of a family exist, all of its layout."""
    together = np.zeros((len(layouts), 0))
    if family is not None:
        together = Lanes(len(layouts)).unpack(slice_strengths(ground, family.slice_edge, len(layouts)))
    for place, layout in enumerate(layouts):
        if layout is None:
            yield None
            continue
        if family is not None:
            circles, number = family.on(layout.section)
            if number.size:
                edge = family.slice_edge
                yield _Case(
                    layout=layout, circles=circles, edge=edge, strength=together[place], number=number
                )
                continue
        edge, alone = layout.slice_edge, ground[place : place + 1]
        strength = Lanes(1).unpack(slice_strengths(alone, edge, 1))[0]
        yield _Case(layout=layout, circles=candidate_circles(layout), edge=edge, strength=strength)


def _factors(ground: GroundStrength, fill: FillStrength, place: int, case: _Case) -> FloatArray:
    """Return the factor of safety of every circle in one realisation, infinite below the firm base."""
    circles = case.circles
    rows, terms = dense_weights(case.layout, circles, case.edge)
    weight, tangent = fill.unit_weight[place], np.tan(np.radians(fill.friction_angle[place]))
    pressed = fill.on_top[place]
    by_fill = tangent * (weight * terms[0] + pressed * terms[2]) + fill.cohesion[place] * terms[1]
    resisting = np.einsum("ij,j->i", rows, case.strength) + by_fill
    factor = resisting / (fill.driving_weight[place] * circles.driving + pressed * circles.traffic)
    factor[~circles_above_base(circles, ground.boundary[place, -1])] = np.inf
    return np.asarray(factor)


def with_section(layout: CircleLayout, section: EmbankmentSection, depth: float) -> CircleLayout:
    """Return a layout for another section.

    Parameters
    ----------
    layout : CircleLayout
        Its density, boundaries and so on.
    section : EmbankmentSection
        Fill.
    depth : float, [m]
        Depth below which no circle goes.

    Returns
    -------
    layout : CircleLayout
        Otherwise the same.
    """
    return replace(layout, section=section, depth=depth)
