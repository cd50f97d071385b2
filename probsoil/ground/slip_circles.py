"""Families of slip circles through an embankment and the ground below it.

Everything here depends on the geometry alone and is worked out once for all realisations:
a circle's driving moment per unit weight of fill and the weight of each strength in its
resisting moment. Coordinates: x from the toe towards the embankment, y upward from ground level.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError
from probsoil.ground._circle_kernel import driving_moments, resisting_weights

N_ZONE = 3  # beyond the toe, under the slope, under the crest
_EXITS, _ENTRIES, _DEPTHS, _SLICES = 24, 24, 48, 72
_CROWDED = 0.3  # of the spacing
_SHALLOWEST = 0.2  # m; a circle that touches less deep slips in the fill, not in the ground
_LEAST_DRIVING = 1e-9


@dataclass(frozen=True, slots=True, kw_only=True)
class EmbankmentSection:
    """Cross-section of the fill at one time.

    Attributes
    ----------
    height : float, [m]
        Height of fill, above zero.
    side_slope : float, [-]
        Horizontal run per unit of rise, zero or more.
    base_width : float, [m]
        Width at ground level.
    full_height : float, [m]
        Greatest height the embankment ever has; it sets where the zone under the slope ends.
    """

    height: float
    side_slope: float
    base_width: float
    full_height: float

    @property
    def shoulder(self) -> float:
        """Distance from the toe to the near edge of the present top, [m]."""
        return self.side_slope * self.height

    @property
    def slope_zone(self) -> float:
        """Distance from the toe to where the zone under the crest begins, [m]."""
        return self.side_slope * self.full_height


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class CircleFamily:
    """Circles and the weights of strength in their resisting moments.

    Attributes
    ----------
    centre_x, centre_y, radius : ndarray, shape (n_circle,), [m]
        Geometry.
    driving : ndarray, shape (n_circle,), [m3]
        Overturning moment per metre run and unit weight of fill.
    fill_friction : ndarray, shape (n_circle,), [m3]
        Resisting moment of friction in the fill per unit weight and tangent of friction angle.
    fill_cohesion : ndarray, shape (n_circle,), [m2]
        Resisting moment of cohesion in the fill per kPa.
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
    """

    centre_x: FloatArray
    centre_y: FloatArray
    radius: FloatArray
    driving: FloatArray
    fill_friction: FloatArray
    fill_cohesion: FloatArray
    row_start: IntArray
    column: IntArray
    weight: FloatArray
    slice_edge: FloatArray

    @property
    def n_circle(self) -> int:
        """Number of circles, [-]."""
        return int(self.radius.size)


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
    """

    section: EmbankmentSection
    depth: float
    boundaries: tuple[float, ...] = ()
    density: float = 1.0
    frictional_ground: bool = False

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
        even = np.linspace(0.0, 1.0, round(_SLICES * self.density) + 1)
        return _with(self.depth * even**1.5, self.inner_boundaries)

    @property
    def form(self) -> tuple[float, float, float, float]:
        """Height, side slope, base width and start of the crest zone, for the kernels, [m], [-]."""
        one = self.section
        return one.height, max(one.side_slope, 1e-12), one.base_width, one.slope_zone


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Circles:
    """Geometry of circles.

    Attributes
    ----------
    centre_x, centre_y, radius : ndarray, shape (n_circle,), [m]
        Centre and radius.
    driving : ndarray, shape (n_circle,), [m3]
        Overturning moment per metre run and unit weight of fill.
    """

    centre_x: FloatArray
    centre_y: FloatArray
    radius: FloatArray
    driving: FloatArray

    def __len__(self) -> int:
        return int(self.radius.size)

    def __getitem__(self, which: slice | BoolArray) -> "Circles":
        return Circles(**{name: getattr(self, name)[which] for name in self.__slots__})


def candidate_circles(layout: CircleLayout) -> Circles:
    """Return the circles of a layout, without the weights of strength.

    Parameters
    ----------
    layout : CircleLayout
        Which circles.

    Returns
    -------
    circles : Circles
        All that enter at the top of the fill, leave at the toe or beyond and turn over some fill.

    Notes
    -----
    A circle is fixed by where it leaves (at the toe or beyond), where it enters (on the top of
    the fill, up to the far shoulder) and the depth it touches. On level ground the soil inside
    the circle below ground level balances about the centre, so only fill drives. Every circle goes
    at least 0.2 m into the ground: ravelling of the fill's own slope is not looked at.
    """
    leave, enter, touch = _grid(layout)
    centre_x, centre_y, valid = _through(leave, enter, touch, layout.section.height)
    centre_x, centre_y, touch = centre_x[valid], centre_y[valid], touch[valid]
    radius = centre_y + touch
    driving = np.empty(radius.size)
    driving_moments(centre_x, centre_y, radius, layout.form, driving)
    circles = Circles(centre_x=centre_x, centre_y=centre_y, radius=radius, driving=driving)
    return circles[driving > _LEAST_DRIVING]


def weighed(layout: CircleLayout, circles: Circles) -> CircleFamily:
    """Return circles with the weights of strength in their resisting moments.

    Parameters
    ----------
    layout : CircleLayout
        Section and slices.
    circles : Circles
        Geometry.

    Returns
    -------
    family : CircleFamily
        The same circles, in their order.

    Notes
    -----
    In the fill friction acts on the normal stress of the ordinary method of slices, the weight of
    the column times the squared cosine of the base's inclination; in granular ground on the
    effective vertical stress times the same.

    References
    ----------
    .. [1] W. Fellenius, Calculation of the stability of earth dams, Trans. 2nd Congr. Large Dams,
       Washington, 1936 (ordinary method; from memory, not opened).
    """
    edge = layout.slice_edge
    rows, fill = dense_weights(layout, circles)
    circle, column = np.nonzero(rows > 0.0)
    count = np.bincount(circle, minlength=len(circles))
    return CircleFamily(
        centre_x=circles.centre_x,
        centre_y=circles.centre_y,
        radius=circles.radius,
        driving=circles.driving,
        fill_friction=fill[0],
        fill_cohesion=fill[1],
        row_start=np.concatenate([[0], np.cumsum(count)]).astype(np.int64),
        column=column.astype(np.int64),
        weight=rows[circle, column],
        slice_edge=edge,
    )


def dense_weights(layout: CircleLayout, circles: Circles) -> tuple[FloatArray, FloatArray]:
    """Return the weights of strength as full rows.

    Parameters
    ----------
    layout : CircleLayout
        Section and slices.
    circles : Circles
        Geometry; a few thousand at a time spare memory.

    Returns
    -------
    rows : ndarray, shape (n_circle, n_column), [m2]
        Weight of the strength of each zone and slice.
    fill : ndarray, shape (2, n_circle), [m3] and [m2]
        Moment of friction in the fill per unit weight and tangent, and of cohesion per kPa.
    """
    edge = layout.slice_edge
    n_kind = 2 if layout.frictional_ground else 1
    rows = np.zeros((len(circles), n_kind * N_ZONE * (edge.size - 1)))
    fill = np.zeros((2, len(circles)))
    resisting_weights(circles.centre_x, circles.centre_y, circles.radius, layout.form, edge, rows, fill)
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
        Tens of thousands of circles; `slip.competing_circles` keeps those that matter.
    """
    return weighed(layout, candidate_circles(layout))


def _grid(layout: CircleLayout) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return exit, entry and touch depth of all candidate circles, flattened, [m]."""
    section, depth, density = layout.section, layout.depth, layout.density
    reach = 2.0 * depth + 1.5 * section.height
    leave = -reach * np.linspace(0.0, 1.0, round(_EXITS * density) + 1) ** 2
    shoulder, far = section.shoulder, section.base_width - section.shoulder
    run = min(far - shoulder, reach)
    enter = shoulder + run * np.linspace(0.0, 1.0, round(_ENTRIES * density) + 1)[1:] ** 1.5
    shallow = min(_SHALLOWEST, 0.5 * depth)
    touch = shallow + (depth - shallow) * np.linspace(0.0, 1.0, round(_DEPTHS * density)) ** 1.5
    touch = _with(touch, [value for value in layout.inner_boundaries if value > shallow])
    mesh = np.meshgrid(leave, enter, touch, indexing="ij")
    return mesh[0].ravel(), mesh[1].ravel(), mesh[2].ravel()


def _with(depths: FloatArray, fixed: Sequence[float]) -> FloatArray:
    """Return rising depths joined with fixed ones; an inner one that crowds a fixed one gives way."""
    if not fixed:
        return depths
    wanted = np.asarray(fixed, dtype=np.float64)
    nearest = np.abs(depths[:, None] - wanted[None, :]).min(axis=1)
    keep = nearest > _CROWDED * np.gradient(depths)
    keep[[0, -1]] = True
    return np.unique(np.concatenate([depths[keep], wanted]))


def _through(
    leave: FloatArray, enter: FloatArray, touch: FloatArray, height: float
) -> tuple[FloatArray, FloatArray, BoolArray]:
    """Return centres of the circles through (leave, 0) and (enter, height) that touch depth `touch`.

    With the centre at (c, y) and radius y + d: ``(c - leave)^2 = 2 y d + d^2`` and
    ``(enter - c)^2 = (y + d)^2 - (height - y)^2``; eliminating y leaves a quadratic in c.
    """
    ratio = (touch + height) / touch
    # (enter - c)^2 = ratio * (c - leave)^2 + rest
    rest = touch * touch - height * height - ratio * touch * touch
    a = ratio - 1.0
    b = -2.0 * ratio * leave + 2.0 * enter
    c0 = ratio * leave * leave + rest - enter * enter
    discriminant = b * b - 4.0 * a * c0
    with np.errstate(invalid="ignore"):
        centre = (-b + np.sqrt(discriminant)) / (2.0 * a)
    high = ((centre - leave) ** 2 - touch * touch) / (2.0 * touch)
    valid = np.isfinite(centre) & (centre > leave) & (centre < enter) & (high >= height)
    return centre, high, valid
