"""Families of slip circles through an embankment and the ground below it.

Everything here depends on the geometry alone and is worked out once for all realisations:
a circle's driving moment per unit weight of fill and the weight of each strength in its
resisting moment. Coordinates: x from the toe towards the embankment, y upward from ground level.
"""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError
from probsoil.ground._circle_kernel import driving_moments, resisting_weights

N_ZONE = 3  # beyond the toe, under the slope, under the crest
_BLOCK = 2000  # circles worked out at a time
_EXITS, _ENTRIES, _DEPTHS = 24, 24, 48
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
    slice_depth : ndarray, shape (n_slice,), [m]
        Depths at which strength is wanted (slice centres).
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
    slice_depth: FloatArray

    @property
    def n_circle(self) -> int:
        """Number of circles, [-]."""
        return int(self.radius.size)

    def subset(self, keep: BoolArray) -> "CircleFamily":
        """Return some of the circles.

        Parameters
        ----------
        keep : ndarray of bool, shape (n_circle,), [-]
            Which to keep.

        Returns
        -------
        family : CircleFamily
            Those circles in their order.
        """
        entries = np.diff(self.row_start)
        kept_entries = np.repeat(keep, entries)
        return CircleFamily(
            centre_x=self.centre_x[keep],
            centre_y=self.centre_y[keep],
            radius=self.radius[keep],
            driving=self.driving[keep],
            fill_friction=self.fill_friction[keep],
            fill_cohesion=self.fill_cohesion[keep],
            row_start=np.concatenate([[0], np.cumsum(entries[keep])]).astype(np.int64),
            column=self.column[kept_entries],
            weight=self.weight[kept_entries],
            slice_depth=self.slice_depth,
        )


def circle_family(
    section: EmbankmentSection,
    *,
    depth: float,
    density: float = 1.0,
    n_slice: int = 48,
    frictional_ground: bool = False,
) -> CircleFamily:
    """Return a dense family of circles that enter at the top of the fill and leave beyond the toe.

    Parameters
    ----------
    section : EmbankmentSection
        Fill at the time looked at.
    depth : float, [m]
        Depth below which no circle goes.
    density : float, [-]
        1 for the family used in campaigns; higher for checks (the number of circles grows with
        its cube).
    n_slice : int, [-]
        Number of depth slices.
    frictional_ground : bool
        Whether some layer has frictional strength; otherwise its columns are left out.

    Returns
    -------
    family : CircleFamily
        Circles with their weights.

    Raises
    ------
    ParameterError
        If the section has no height or the depth is not positive.

    Notes
    -----
    A circle is fixed by where it leaves (at the toe or beyond), where it enters (on the top of
    the fill, up to the far shoulder) and the depth it touches. On level ground the soil inside
    the circle below ground level balances about the centre, so only fill drives. Every circle goes
    at least 0.2 m into the ground: ravelling of the fill's own slope is not looked at. Friction acts
    on the normal stress of the ordinary method of slices, weight of column times the squared
    cosine of the base's inclination.

    References
    ----------
    .. [1] W. Fellenius, Calculation of the stability of earth dams, Trans. 2nd Congr. Large Dams,
       Washington, 1936 (ordinary method; from memory, not opened).
    """
    if section.height <= 0.0 or depth <= 0.0:
        raise ParameterError(f"height and depth must be above zero; got {section.height:g} and {depth:g} m")
    leave, enter, touch = _grid(section, depth, density)
    centre_x, centre_y, valid = _through(leave, enter, touch, section.height)
    centre_x, centre_y, touch = centre_x[valid], centre_y[valid], touch[valid]
    radius = centre_y + touch
    edge = depth * np.linspace(0.0, 1.0, n_slice + 1) ** 1.5
    form = (section.height, max(section.side_slope, 1e-12), section.base_width, section.slope_zone)
    driving = np.empty(radius.size)
    driving_moments(centre_x, centre_y, radius, form, driving)
    keep = driving > _LEAST_DRIVING
    centre_x, centre_y, radius, driving = centre_x[keep], centre_y[keep], radius[keep], driving[keep]
    fill = np.zeros((2, radius.size))
    count, column, weight = _sparse_rows(
        (centre_x, centre_y, radius), form, edge, fill, n_kind=2 if frictional_ground else 1
    )
    return CircleFamily(
        centre_x=centre_x,
        centre_y=centre_y,
        radius=radius,
        driving=driving,
        fill_friction=fill[0],
        fill_cohesion=fill[1],
        row_start=np.concatenate([[0], np.cumsum(count)]).astype(np.int64),
        column=column,
        weight=weight,
        slice_depth=0.5 * (edge[1:] + edge[:-1]),
    )


def _sparse_rows(
    circles: tuple[FloatArray, FloatArray, FloatArray],
    form: tuple[float, float, float, float],
    edge: FloatArray,
    fill: FloatArray,
    *,
    n_kind: int,
) -> tuple[IntArray, IntArray, FloatArray]:
    """Return entries per circle, their columns and weights, block by block to spare memory."""
    count, column, weight = [], [], []
    for first in range(0, fill.shape[1], _BLOCK):
        part = slice(first, first + _BLOCK)
        x, y, radius = (values[part] for values in circles)
        rows = np.zeros((radius.size, n_kind * N_ZONE * (edge.size - 1)))
        resisting_weights(x, y, radius, form, edge, rows, fill[:, part])
        circle, place = np.nonzero(rows > 0.0)
        count.append(np.bincount(circle, minlength=radius.size))
        column.append(place)
        weight.append(rows[circle, place])
    return (
        np.concatenate(count).astype(np.int64),
        np.concatenate(column).astype(np.int64),
        np.concatenate(weight),
    )


def _grid(
    section: EmbankmentSection, depth: float, density: float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return exit, entry and touch depth of all candidate circles, flattened, [m]."""
    reach = 2.0 * depth + 1.5 * section.height
    leave = -reach * np.linspace(0.0, 1.0, round(_EXITS * density) + 1) ** 2
    shoulder, far = section.shoulder, section.base_width - section.shoulder
    run = min(far - shoulder, reach)
    enter = shoulder + run * np.linspace(0.0, 1.0, round(_ENTRIES * density) + 1)[1:] ** 1.5
    shallow = min(_SHALLOWEST, 0.5 * depth)
    touch = shallow + (depth - shallow) * np.linspace(0.0, 1.0, round(_DEPTHS * density)) ** 1.5
    mesh = np.meshgrid(leave, enter, touch, indexing="ij")
    return mesh[0].ravel(), mesh[1].ravel(), mesh[2].ravel()


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
