"""Families of slip circles through an embankment and the ground below it.

Everything here depends on the geometry alone and is worked out once for all realisations:
a circle's driving moment per unit weight of fill and the weight of each strength in its
resisting moment. Coordinates: x from the outer toe towards the embankment, y upward from ground level.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.errors import ParameterError
from probsoil.ground import _circle_kernel as kernel
from probsoil.ground.embankment import EmbankmentSection
from probsoil.ground.slip_driving import Circles, driven
from probsoil.ground.slip_grid import (
    Arcs,
    arcs_beside,
    arcs_through_ground,
    arcs_within_fill,
    end_steps,
    ground_touches,
)

_SLICES, _FINER = 72, 1.5  # slices, and how many times finer they are once circles are chosen
_DENSER_IN_FILL = 1.5  # a slip of the shoulder under traffic is small
_CROWDED = 0.3  # of the spacing
_SHALLOWEST = 0.2  # m; a circle that goes less deep into the ground slips in the fill
SHALLOWEST_IN_FILL = 0.5
"""Depth below the shoulder of the shallowest circle in the fill, [m]; what is smaller is ravelling."""


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class CircleFamily:
    """Circles and the weights of strength in their resisting moments.

    Attributes
    ----------
    circles : Circles
        Geometry and driving moments.
    fill_friction : ndarray, shape (n_circle,), [m3]
        Resisting moment of friction in the fill per unit weight and tangent of friction angle.
    fill_cohesion : ndarray, shape (n_circle,), [m2]
        Resisting moment of cohesion in the fill per kPa.
    traffic_friction : ndarray, shape (n_circle,), [m2]
        Resisting moment of friction in the fill below traffic per kPa and tangent of friction angle.
    row_start : ndarray, shape (n_circle + 1,), [-]
        Sparse rows: place in `column` and `weight` of the first entry of each circle, then their number.
    column : ndarray, shape (n_entry,), [-]
        Strength that an entry multiplies: columns count zone by zone through the slices, first
        cohesive strength, then frictional.
    weight : ndarray, shape (n_entry,), [m2]
        Resisting moment per metre run and kPa of that strength; the resisting moment of the ground
        is the sum over the entries of a circle.
    slice_edge : ndarray, shape (n_slice + 1,), [m]
        Depths between the slices in which strength is wanted.
    n_zone : int, [-]
        Zones of strength: beyond the toe, under the slope, under the crest and, with berms, under a berm.
    """

    circles: Circles
    fill_friction: FloatArray
    fill_cohesion: FloatArray
    traffic_friction: FloatArray
    row_start: IntArray
    column: IntArray
    weight: FloatArray
    slice_edge: FloatArray
    n_zone: int

    @property
    def n_circle(self) -> int:
        """Number of circles, [-]."""
        return len(self.circles)


@dataclass(frozen=True, slots=True, kw_only=True)
class CircleLayout:
    """Which circles to look at.

    Attributes
    ----------
    section : EmbankmentSection
        Fill at the time looked at.
    depth : float, [m]
        Depth below which no circle goes, above zero.
    boundaries : tuple of float, [m]
        Usual depths of the layer boundaries; circles touch them and slices end there.
    density : float, [-]
        1 for campaigns; higher for checks (the number of circles grows with its cube, that of depth
        slices in proportion).
    frictional_ground : bool
        Whether some layer has frictional strength; otherwise its columns are left out.
    within_fill : bool
        Whether circles wholly in the fill are looked at too: fill with cohesion. Without any, the
        shallowest of them would always be the worst, and that is ravelling.
    """

    section: EmbankmentSection
    depth: float
    boundaries: tuple[float, ...] = ()
    density: float = 1.0
    frictional_ground: bool = False
    within_fill: bool = False

    def __post_init__(self) -> None:
        if self.section.height <= 0.0 or self.depth <= 0.0:
            raise ParameterError(
                f"height and depth must be above zero; got {self.section.height:g} and {self.depth:g} m"
            )

    @property
    def inner_boundaries(self) -> list[float]:
        """Boundaries that lie within the depth, rising, [m]."""
        return sorted(value for value in self.boundaries if 0.0 < value < self.depth)

    @property
    def slice_edge(self) -> FloatArray:
        """Depths between the slices in which strength is wanted, shape (n_slice + 1,), [m]."""
        return self._edges(1.0, self.inner_boundaries)

    def slice_edge_for(self, touch: FloatArray) -> FloatArray:
        """Return depths between slices that end where circles do.

        Parameters
        ----------
        touch : ndarray, shape (n_circle,), [m]
            Depths of their lowest points.

        Returns
        -------
        edge : ndarray, shape (n_slice + 1,), [m]
            A circle runs along the bottom of the last slice it cuts, and takes nothing from below it.
        """
        touch = np.round(touch, 6)
        inner = touch[(touch > 0.0) & (touch < self.depth)]
        edge = self._edges(_FINER, sorted({*self.inner_boundaries, *inner.tolist()}))
        return edge[: max(int(np.searchsorted(edge, touch.max(initial=0.0))), 1) + 1]

    def _edges(self, finer: float, fixed: Sequence[float]) -> FloatArray:
        even = np.linspace(0.0, 1.0, round(finer * _SLICES * self.density) + 1)
        return _with(self.depth * even**1.5, fixed)

    @property
    def reach(self) -> float:
        """How far circles go beyond the toe and behind the shoulder, [m]."""
        return 2.0 * self.depth + 1.5 * self.section.height + self.section.berm_width

    @property
    def touch(self) -> FloatArray:
        """Depths that circles through the ground touch, shape (n_touch,), [m]."""
        shallow = min(_SHALLOWEST, 0.5 * self.depth)
        touch = ground_touches(self.depth, self.density, shallow)
        return _with(touch, [value for value in self.inner_boundaries if value > shallow])

    def depth_step(self, touch: FloatArray) -> FloatArray:
        """Return how far apart in depth candidates are near given depths.

        Parameters
        ----------
        touch : ndarray, shape (n_circle,), [m]
            Depths.

        Returns
        -------
        step : ndarray, shape (n_circle,), [m]
            Spacing.
        """
        depths = self.touch
        return np.asarray(np.interp(touch, depths, np.gradient(depths)))


def candidate_circles(layout: CircleLayout) -> Circles:
    """Return the circles of a layout, without the weights of strength.

    Parameters
    ----------
    layout : CircleLayout
        Which circles.

    Returns
    -------
    circles : Circles
        All that enter at the top of the fill or of a berm, leave on the slope, at the toe or beyond
        and turn over some fill.

    Notes
    -----
    A circle is fixed by where it leaves, where it enters and the depth it touches; one wholly in the
    fill by its bend instead. On level ground the soil inside the circle below ground level balances
    about the centre, so only fill drives, and traffic on the part of the top that lies inside the
    circle and beyond its centre: elsewhere it would resist.
    """
    section, density = layout.section, layout.density
    groups: list[Arcs] = [arcs_through_ground(section, layout.touch, reach=layout.reach, density=density)]
    if layout.within_fill:
        thin = min(SHALLOWEST_IN_FILL, 0.5 * section.height)
        groups.append(arcs_within_fill(section, shallowest=thin, density=_DENSER_IN_FILL * density))
    return driven(section, groups)


def circles_beside(layout: CircleLayout, circles: Circles, moves: FloatArray) -> Circles:
    """Return circles a little beside given ones.

    Parameters
    ----------
    layout : CircleLayout
        Which circles they were chosen from.
    circles : Circles
        Some of its candidates, or circles beside them.
    moves : ndarray, shape (n_move, 3), [-]
        How far beside in where it leaves, where it enters and how deep it touches, as shares of the
        spacing of the candidates; no move at all keeps the circle itself.

    Returns
    -------
    circles : Circles
        For each circle through the ground those moved, and all wholly in the fill as they are.
    """
    in_ground = circles.touch > 0.0
    through, within = circles[in_ground], circles[~in_ground]
    step = np.stack(
        [
            *end_steps(layout.section, through, layout.reach) / layout.density,
            layout.depth_step(through.touch),
        ]
    )
    return driven(layout.section, [arcs_beside(layout.section, through, moves, step, layout.depth), within])


def weighed(layout: CircleLayout, circles: Circles, edge: FloatArray | None = None) -> CircleFamily:
    """Return circles with the weights of strength in their resisting moments.

    Parameters
    ----------
    layout : CircleLayout
        Section and slices.
    circles : Circles
        Geometry.
    edge : ndarray or None, shape (n_slice + 1,), [m]
        Depths between the slices; None for those of the layout.

    Returns
    -------
    family : CircleFamily
        The same circles, in their order.

    Notes
    -----
    In the fill friction acts on the normal stress of the ordinary method of slices, the weight of
    the column and of the traffic on it times the squared cosine of the base's inclination; in
    granular ground on the effective vertical stress, without traffic, times the same.

    References
    ----------
    .. [1] W. Fellenius, Calculation of the stability of earth dams, Trans. 2nd Congr. Large Dams,
       Washington, 1936 (ordinary method; from memory, not opened).
    """
    edge = layout.slice_edge if edge is None else edge
    rows, fill = dense_weights(layout, circles, edge)
    circle, column = np.nonzero(rows > 0.0)
    count = np.bincount(circle, minlength=len(circles))
    return CircleFamily(
        circles=circles,
        fill_friction=fill[0],
        fill_cohesion=fill[1],
        traffic_friction=fill[2],
        row_start=np.concatenate([[0], np.cumsum(count)]).astype(np.int64),
        column=column.astype(np.int64),
        weight=rows[circle, column],
        slice_edge=edge,
        n_zone=layout.section.n_zone,
    )


def dense_weights(layout: CircleLayout, circles: Circles, edge: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the weights of strength as full rows.

    Parameters
    ----------
    layout : CircleLayout
        Section and slices.
    circles : Circles
        Geometry; a few thousand at a time spare memory.
    edge : ndarray, shape (n_slice + 1,), [m]
        Depths between the slices.

    Returns
    -------
    rows : ndarray, shape (n_circle, n_column), [m2]
        Weight of the strength of each zone and slice.
    fill : ndarray, shape (3, n_circle), [m3] and [m2]
        Moment of friction in the fill per unit weight and tangent, of cohesion per kPa, and of friction
        below traffic per kPa and tangent.
    """
    form = _form(layout.section)
    n_kind = 2 if layout.frictional_ground else 1
    rows = np.zeros((len(circles), n_kind * form.n_zone * (edge.size - 1)))
    fill = np.zeros((3, len(circles)))
    arcs = kernel.Circles(**{name: getattr(circles, name) for name in kernel.Circles._fields})
    kernel.resisting_weights(arcs, form, edge, rows, fill)
    return rows, fill


def circle_family(layout: CircleLayout) -> CircleFamily:
    """Return all circles of a layout with their weights.

    Parameters
    ----------
    layout : CircleLayout
        Which circles.

    Returns
    -------
    family : CircleFamily
        Tens of thousands of circles; `slip.competing_circles` chooses those that matter.
    """
    return weighed(layout, candidate_circles(layout))


def _form(section: EmbankmentSection) -> kernel.Form:
    bermed = section.berm_width > 0.0
    return kernel.Form(
        height=section.height,
        slope=max(section.side_slope, 1e-12),
        base=section.base_width,
        berm_width=section.berm_width if section.above_berms else 0.0,
        berm_height=section.berm_height if bermed else 0.0,
        berm_zone=section.berm_zone,
        slope_zone=section.slope_zone,
        n_zone=section.n_zone,
    )


def _with(depths: FloatArray, fixed: Sequence[float]) -> FloatArray:
    """Return rising depths joined with fixed ones; an inner one that crowds a fixed one gives way."""
    if not fixed:
        return depths
    wanted = np.asarray(fixed, dtype=np.float64)
    nearest = np.abs(depths[:, None] - wanted[None, :]).min(axis=1)
    keep = nearest > _CROWDED * np.gradient(depths)
    keep[[0, -1]] = True
    return np.unique(np.concatenate([depths[keep], wanted]))
