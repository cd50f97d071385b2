"""The straight line that stands for a strength profile in bearing, and what a crust adds to it."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.ground._bearing_kernel import LINE_ENDS, REACH, Circles, Factors, best_lines
from probsoil.ground.bearing_capacity import RECTANGLE_SHARE, growth_table
from probsoil.ground.foundation import Foundation

CRUST_RATIOS = (0.0, 0.25, 0.5, 1.0, 2.0, 4.0)
"""Growth over the width by strength at the level of the lines on which a crust is tried, [-]."""

# Centre of a circle outward from the nearer edge and above the base, over the width. (0, 0.4288) is best for
# one strength, those further out for soft clay at depth, those further in and up where strength grows. Seven
# hundred times as many lower no capacity by more than 2 % (5 % below a crust of 1.5 widths and 8 times su).
_CENTRES = np.array(
    [
        *((-0.25, 0.7), (-0.25, 1.1), (0.0, 0.4288), (0.0, 0.7), (0.0, 1.1), (0.3, 0.2)),
        *((0.3, 0.4288), (0.3, 0.7), (0.7, 0.2), (0.7, 0.4288), (1.1, 0.2), (1.1, 0.4288)),
    ]
)


CRUST_DEPTH = 0.9
"""Share of its depth with which a crust counts, [-]: soft clay draws a failure deeper than a circle."""


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class StrengthLine:
    """Line of strength below a level.

    Attributes
    ----------
    start : ndarray, shape (n_sample,), [kPa]
        Strength at the level.
    growth : ndarray, shape (n_sample,), [kPa/m]
        Growth with depth.
    crust_factor : ndarray, shape (n_sample,), [-]
        What the worst circle carries with the crust over what the circles carry on the line; 1 without one.
    circle : ndarray of int, shape (n_sample,), [-]
        Number of that circle in `circle_sections`; -1 without a crust.
    """

    start: FloatArray
    growth: FloatArray
    crust_factor: FloatArray
    circle: IntArray


def circle_sections() -> tuple[FloatArray, FloatArray]:
    """Return the centres of the circles on which a crust is tried, over the width.

    Returns
    -------
    aside, above : ndarray, shape (n_circle,), [-]
        Distance of the centre outward from the nearer edge, and above the base. Every circle goes through
        the farther edge.
    """
    return _CENTRES[:, 0].copy(), _CENTRES[:, 1].copy()


def _circles() -> Circles:
    aside, above = circle_sections()
    radius = np.hypot(aside + 1.0, above)
    per_angle = 2.0 * radius**2 / (aside + 0.5)

    def grown_from(depth: float) -> FloatArray:  # arc integral of the depth below a level
        half = np.arccos(np.minimum((above + depth) / radius, 1.0))
        return np.asarray(radius * np.sin(half) - (above + depth) * half)

    return Circles(
        height=above,
        radius=radius,
        per_angle=per_angle,
        even=per_angle * np.arccos(above / radius),
        growing=per_angle * (grown_from(0.0) - grown_from(LINE_ENDS)),
    )


CIRCLES = _circles()
"""The circles of `circle_sections` for the search."""


def strength_line(
    shape: Foundation, *, below: FloatArray, edge: FloatArray, strength: FloatArray, width: FloatArray
) -> StrengthLine:
    r"""Return the line of strength below a level that carries most and is nowhere above the profile.

    Parameters
    ----------
    shape : Foundation
        Plan and contact.
    below, edge : ndarray, shape (n_sample, n_point), [m]
        Depth of every clay point and of its upper edge below the level, in order of depth; points above
        the level (negative) do not count.
    strength : ndarray, shape (n_sample, n_point), [kPa]
        Undrained strength.
    width : ndarray, shape (n_sample,), [m]
        Width at the level.

    Returns
    -------
    line : StrengthLine
        Of all :math:`c_0 + \rho \min(z, B)` that lie nowhere above the profile down to 2 B, the one of the
        greatest capacity, shape and crust included.

    Notes
    -----
    Clay on which a stronger clay is laid carries no less, so that the capacity of a line below the profile
    is a lower bound. A crust is what of the strength above the line never grows with depth. It raises the
    capacity in the proportion in which it raises that of slip circles: circles by themselves overrate, by
    7 % on one strength, and both sides of the ratio do. So the capacity of a strip stays 7 % below the
    best of these circles on the profile itself. A crust counts with `CRUST_DEPTH` of its depth, since softer
    clay below it draws a failure deeper than circles go.
    """
    place, growth, circle = growth_table(shape.contact)
    of_circle = shape.shape == "circle"
    factors = Factors(
        np.expm1(place), place, growth, circle, 1.0 if of_circle else RECTANGLE_SHARE / (circle[0] - 1.0)
    )
    across = np.ones_like(width) if of_circle else proportion(shape, width)
    start, ratio, gain, worst = best_lines(
        np.ascontiguousarray(below / width[:, None]),
        np.ascontiguousarray(CRUST_DEPTH * np.maximum(edge, 0.0) / width[:, None]),
        np.ascontiguousarray(strength),
        strength_at_level(below, strength, width),
        across,
        np.array(CRUST_RATIOS),
        factors,
        CIRCLES,
    )
    return StrengthLine(start=start, growth=ratio * start / width, crust_factor=gain, circle=worst)


def strength_at_level(below: FloatArray, strength: FloatArray, width: FloatArray) -> FloatArray:
    """Return the strength at a level, carried on from the first two points below it.

    Parameters
    ----------
    below : ndarray, shape (n_sample, n_point), [m]
        Depth of every clay point below the level, negative above it.
    strength : ndarray, shape (n_sample, n_point), [kPa]
        Undrained strength.
    width : ndarray, shape (n_sample,), [m]
        Width at the level.

    Returns
    -------
    at_level : ndarray, shape (n_sample,), [kPa]
        On their straight line where strength grows, but a millionth of the growth over the width or more;
        else that of the first point.

    Notes
    -----
    Where strength grows from nothing, half a cell at the first point's strength would count for much.
    """
    n_sample, n_point = below.shape
    row, first = np.arange(n_sample), np.minimum((below < 0.0).sum(axis=1), n_point - 1)
    second = np.minimum(first + 1, n_point - 1)
    upper, apart = strength[row, first], below[row, second] - below[row, first]
    rise = np.maximum(strength[row, second] - upper, 0.0) / np.where(apart > 0.0, apart, 1.0)
    return np.asarray(np.maximum(upper - rise * np.maximum(below[row, first], 0.0), 1e-6 * rise * width))


def proportion(shape: Foundation, width: FloatArray) -> FloatArray:
    """Return the width over the length of a foundation whose load has spread.

    Parameters
    ----------
    shape : Foundation
        Its plan at the base.
    width : ndarray, shape (n_sample,), [m]
        Width that it has spread to.

    Returns
    -------
    across : ndarray, shape (n_sample,), [-]
        Zero for a strip.
    """
    return np.asarray(width / (width - shape.width + shape.length))


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class CrustParts:
    """The numbers behind a crust factor, of one realisation.

    Attributes
    ----------
    line, excess, arc : ndarray, shape (n_point,), [kPa, kPa, -]
        At every clay point that counts: the line, the crust, and what the worst circle carries per
        strength there.
    number : ndarray of int, shape (n_point,), [-]
        Numbers of these points among those given.
    alone : float, [kPa]
        Least that a circle carries on the line.
    worst_on_line : float, [kPa]
        What the worst circle carries on the line.
    """

    line: FloatArray
    excess: FloatArray
    arc: FloatArray
    number: IntArray
    alone: float
    worst_on_line: float


def crust_parts(
    line: StrengthLine, *, below: FloatArray, edge: FloatArray, strength: FloatArray, width: float
) -> CrustParts:
    """Return the numbers behind the crust factor of one realisation, point by point.

    Parameters
    ----------
    line : StrengthLine
        Of one realisation.
    below, edge : ndarray, shape (n_point,), [m]
        As for `strength_line`.
    strength : ndarray, shape (n_point,), [kPa]
        Undrained strength.
    width : float, [m]
        Width at the level.

    Returns
    -------
    parts : CrustParts
        Without a crust, of the circle that is worst on the line.
    """
    number = np.flatnonzero((below >= 0.0) & (below <= REACH * width))
    number = number if number.size else np.array([below.size - 1])
    start, growth, circle = float(line.start[0]), float(line.growth[0]), int(line.circle[0])
    along = start + growth * np.clip(below[number], 0.0, LINE_ENDS * width)
    at_level = strength_at_level(below[None], strength[None], np.array([width]))[0]
    excess = np.minimum.accumulate(np.minimum(strength[number] - along, at_level - start)).clip(min=0.0)
    on_line = start * CIRCLES.even + growth * width * CIRCLES.growing
    worst = int(on_line.argmin()) if circle < 0 else circle
    from_edge = np.append(CRUST_DEPTH * np.maximum(edge[number], 0.0) / width, np.inf)
    from_edge[0] = 0.0
    cosine = np.minimum((CIRCLES.height[worst] + from_edge) / CIRCLES.radius[worst], 1.0)
    arc = -np.diff(CIRCLES.per_angle[worst] * np.arccos(cosine))
    return CrustParts(
        line=along,
        excess=excess if circle >= 0 else np.zeros_like(excess),
        arc=arc,
        number=number,
        alone=float(on_line.min()),
        worst_on_line=float(on_line[worst]),
    )
