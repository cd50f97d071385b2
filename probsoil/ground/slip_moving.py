"""Slip circles that move with a section of fill that is not the same in every realisation.

A circle is kept as where it leaves and enters along the surface, told from the corners of the section, and
the depth it touches (in the fill, its bend). On the section of a realisation that gives another circle, whose
moments are worked out anew.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, fields, replace

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.embankment import EmbankmentSection
from probsoil.ground.lanes import Lanes
from probsoil.ground.slip import FillStrength, GroundStrength, circles_above_base, slice_strengths
from probsoil.ground.slip_circles import (
    SHALLOWEST_IN_FILL,
    CircleLayout,
    candidate_circles,
    dense_weights,
)
from probsoil.ground.slip_driving import Circles, driven
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

    def on(self, layout: CircleLayout) -> Circles:
        """Return the circles on a section.

        Parameters
        ----------
        layout : CircleLayout
            With the section.

        Returns
        -------
        circles : Circles
            Those that exist there; all of the layout where none does.
        """
        section = layout.section
        fitting = self.above_berms == section.above_berms
        ways = [way_at(section, place[fitting]) for place in (self.leave, self.enter)]
        leave, enter = (surface_point(section, way) for way in ways)
        third, ground = self.third[fitting], self.in_ground[fitting]
        thin = min(SHALLOWEST_IN_FILL, 0.5 * section.height)
        within = ~ground & (leave < enter).all(axis=1)
        groups = [
            arcs_touching(section, leave[ground], enter[ground], third[ground]),
            arcs_bent(section, leave[within], enter[within], third[within], shallowest=thin),
        ]
        found = driven(section, groups)
        return found if len(found) else candidate_circles(layout)


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
    everything = Circles(
        **{
            one.name: np.concatenate([getattr(circles, one.name) for _, circles in chosen])
            for one in fields(Circles)
        }
    )
    deepest = max((layout for layout, _ in chosen), key=lambda layout: layout.depth)
    return MovingFamily(**joined, slice_edge=deepest.slice_edge_for(everything))


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
    for place, (layout, circles, edge, strength) in enumerate(_cases(ground, family, layouts)):
        if layout is None:
            continue
        found = _factors(fill, place, layout, (circles, edge, strength))
        found[~circles_above_base(circles, ground.boundary[place, -1])] = np.inf
        worst = int(np.argmin(found))
        factor[place] = found[worst]
        position[place] = [getattr(circles, name)[worst] for name in POSITION]
    return factor, position


_Case = tuple[CircleLayout | None, Circles, FloatArray, FloatArray]


def _cases(
    ground: GroundStrength, family: MovingFamily | None, layouts: Sequence[CircleLayout | None]
) -> Iterator[_Case]:
    """Yield layout, circles, slice edges and the strength on the slices of every realisation."""
    nothing, n_sample = _NO_CIRCLES, len(layouts)
    together = None
    if family is not None:
        together = Lanes(n_sample).unpack(slice_strengths(ground, family.slice_edge, n_sample))
    for place, layout in enumerate(layouts):
        if layout is None:
            yield None, nothing, np.zeros(0), np.zeros(0)
        elif family is not None and together is not None:
            yield layout, family.on(layout), family.slice_edge, together[place]
        else:
            circles, alone = candidate_circles(layout), ground[place : place + 1]
            strength = Lanes(1).unpack(slice_strengths(alone, layout.slice_edge, 1))
            yield layout, circles, layout.slice_edge, strength[0]


def _factors(
    fill: FillStrength, place: int, layout: CircleLayout, case: tuple[Circles, FloatArray, FloatArray]
) -> FloatArray:
    """Return the factor of safety of every circle in one realisation."""
    circles, edge, strength = case
    rows, terms = dense_weights(layout, circles, edge)
    weight, tangent = fill.unit_weight[place], np.tan(np.radians(fill.friction_angle[place]))
    pressed = fill.on_top[place]
    by_fill = tangent * (weight * terms[0] + pressed * terms[2]) + fill.cohesion[place] * terms[1]
    resisting = np.einsum("ij,j->i", rows, strength) + by_fill
    return np.asarray(resisting / (fill.driving_weight[place] * circles.driving + pressed * circles.traffic))


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


_NO_CIRCLES = Circles(**{one.name: np.zeros(0) for one in fields(Circles)})
