"""Vertical stress that a load adds to the ground, from elasticity (Boussinesq half-space)."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError
from probsoil.ground._checks import checked
from probsoil.ground.amounts import Amount


def embankment_influence(
    depth: ArrayLike, offset: ArrayLike, *, base_width: Amount, top_width: Amount
) -> FloatArray:
    r"""Return the vertical stress under a long trapezoidal load, as a share of its full pressure.

    Parameters
    ----------
    depth : array_like, shape (...,), [m]
        Depth below the base, zero or more.
    offset : array_like, shape (...,), [m]
        Horizontal distance from the centreline; broadcast against `depth`.
    base_width, top_width : float or ndarray, shape (...,), [m]
        Widths of the trapezium, ``base_width >= top_width >= 0``, base above zero; broadcast against `depth`.

    Returns
    -------
    influence : ndarray, shape (...,), [-]
        Added vertical stress over unit weight times height of the fill.

    Raises
    ------
    ParameterError
        If the widths are not ``base_width >= top_width >= 0`` with a base above zero, or a depth is
        negative.

    Notes
    -----
    With :math:`f(x) = x \arctan(x/z)` and a and b the signed horizontal distances from the point to
    the toe and to the shoulder of one half, that half adds :math:`[f(a) - f(b)]/(\pi (a - b))`; for
    a point below the shoulder this is the influence factor of Osterberg (1957). The ground is a
    homogeneous elastic half-space and the fill has no stiffness of its own.

    References
    ----------
    .. [1] J. O. Osterberg, Influence values for vertical stresses in a semi-infinite mass due to
       an embankment loading, Proc. 4th Int. Conf. Soil Mech. Found. Eng., London, vol. 1, 1957
       (formula from memory; tested against the integral of the line load).
    """
    check_widths(base_width, top_width)
    z, x = np.broadcast_arrays(checked("depth", depth, at_least=0.0), np.abs(checked("offset", offset)))
    toe, shoulder = base_width / 2.0, top_width / 2.0
    left = _ramp(z, x + toe, x + shoulder)
    right = _ramp(z, toe - x, shoulder - x) if x.any() else left
    return np.asarray(left + right, dtype=np.float64)


def check_widths(base_width: Amount, top_width: Amount) -> None:
    """Refuse widths that are those of no trapezium.

    Parameters
    ----------
    base_width, top_width : float or ndarray, shape (...,), [m]
        Its widths.

    Raises
    ------
    ParameterError
        If they are not ``base_width >= top_width >= 0`` with a base above zero.
    """
    base, top = np.broadcast_arrays(base_width, top_width)
    good = (base >= top) & (top >= 0.0) & (base > 0.0)
    if not good.all():
        raise ParameterError(
            f"widths must be base >= top >= 0 with base > 0; got base {base[~good][0]:g} m, "
            f"top {top[~good][0]:g} m"
        )


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Trapezium:
    """One trapezium of a section of fill.

    Attributes
    ----------
    base_width, top_width : float or ndarray, shape (n_sample,) or (n_sample, 1), [m]
        Its widths.
    height : float or ndarray, shape (n_sample,) or (n_sample, 1), [m]
        Its height.
    """

    base_width: Amount
    top_width: Amount
    height: Amount


def trapezia_influence(depth: ArrayLike, offset: ArrayLike, trapezia: Sequence[Trapezium]) -> FloatArray:
    """Return the vertical stress under trapezia stacked on one centreline, per unit weight of fill.

    Parameters
    ----------
    depth : array_like, shape (...,), [m]
        Depth below the base, zero or more.
    offset : array_like, shape (...,), [m]
        Horizontal distance from the centreline; broadcast against `depth`.
    trapezia : sequence of Trapezium
        Such as berms with the fill between them and what stands above.

    Returns
    -------
    influence : ndarray, shape (...,), [m]
        Added vertical stress over unit weight: the sum of each height times its influence, every
        trapezium taken as a load on ground level.

    Raises
    ------
    ParameterError
        As for `embankment_influence`.
    """
    z, x = np.broadcast_arrays(np.asarray(depth, dtype=np.float64), np.asarray(offset, dtype=np.float64))
    total = np.zeros(z.shape)
    for one in trapezia:
        widths = {"base_width": one.base_width, "top_width": one.top_width}
        total += one.height * embankment_influence(z, x, **widths)
    return total


def _ramp(z: FloatArray, toe: FloatArray, shoulder: FloatArray) -> FloatArray:
    """Return the stress of the half of the load on one side, from signed distances to its edges."""
    run = toe - shoulder
    steep = run < 1e-9 * (1.0 + np.abs(toe))
    slope = (toe * np.arctan2(toe, z) - shoulder * np.arctan2(shoulder, z)) / np.where(steep, 1.0, run)
    if not steep.any():
        return np.asarray(slope / np.pi)
    # a vertical side is the limit of the quotient: the uniform strip
    return np.asarray(np.where(steep, _strip_side(z, toe), slope / np.pi), dtype=np.float64)


def _strip_side(z: FloatArray, edge: FloatArray) -> FloatArray:
    """Return the stress of a uniform strip from a point to an edge at a signed distance."""
    squares = edge * edge + z * z
    inner = np.arctan2(edge, z) + edge * z / np.where(squares > 0.0, squares, 1.0)
    return np.asarray(inner / np.pi, dtype=np.float64)


def strip_influence(depth: ArrayLike, offset: ArrayLike, *, width: Amount) -> FloatArray:
    r"""Return the vertical stress under a long strip of uniform pressure, as a share of it.

    Parameters
    ----------
    depth : array_like, shape (...,), [m]
        Depth below the strip, zero or more.
    offset : array_like, shape (...,), [m]
        Horizontal distance from the centreline; broadcast against `depth`.
    width : float or ndarray, shape (...,), [m]
        Width of the strip, above zero; broadcast against `depth`.

    Returns
    -------
    influence : ndarray, shape (...,), [-]
        Added vertical stress over the pressure.

    Raises
    ------
    ParameterError
        If the width is not above zero or a depth is negative.

    Notes
    -----
    Michell's solution, the integral of Flamant's line load: with a the signed distance to one edge,
    that side adds :math:`[\arctan(a/z) + a z/(a^2 + z^2)]/\pi`.

    References
    ----------
    .. [1] J. H. Michell, The inversion of plane stress, Proc. London Math. Soc. 34, 1902 (formula
       from memory; tested against the integral of the line load).
    """
    half = checked("width", width, above=0.0) / 2.0
    z, x = np.broadcast_arrays(checked("depth", depth, at_least=0.0), checked("offset", offset))
    return _strip_side(z, half + x) + _strip_side(z, half - x)


def rectangle_influence(
    depth: ArrayLike, x: ArrayLike, y: ArrayLike, *, width: Amount, length: Amount
) -> FloatArray:
    r"""Return the vertical stress under a rectangle of uniform pressure, as a share of it.

    Parameters
    ----------
    depth : array_like, shape (...,), [m]
        Depth below the rectangle, zero or more.
    x, y : array_like, shape (...,), [m]
        Distances from the centre along the width and along the length; anywhere, also outside.
    width, length : float or ndarray, shape (...,), [m]
        Sides of the rectangle, above zero; broadcast against `depth`.

    Returns
    -------
    influence : ndarray, shape (...,), [-]
        Added vertical stress over the pressure.

    Raises
    ------
    ParameterError
        If a side is not above zero or a depth is negative.

    Notes
    -----
    Newmark's stress below the corner, added and subtracted for the four rectangles that have a
    corner at the point. With sides a and b and :math:`R^2 = a^2 + b^2 + z^2` the corner takes
    :math:`\frac{1}{2\pi}\left[\arctan\frac{ab}{zR} + \frac{abz}{R}\left(\frac{1}{a^2+z^2} +
    \frac{1}{b^2+z^2}\right)\right]`: the same number as Newmark's and Fadum's in m = a/z and
    n = b/z, whose arctangent needs pi added where :math:`m^2n^2 > m^2 + n^2 + 1`; this one never does.

    References
    ----------
    .. [1] N. M. Newmark, Simplified computation of vertical pressures in elastic foundations, Univ. of
       Illinois Eng. Exp. Station Circular 24, 1935; R. E. Fadum, Influence values for estimating
       stresses in elastic foundations, Proc. 2nd Int. Conf. Soil Mech. Found. Eng., Rotterdam, vol. 3,
       1948 (formula from memory; tested against printed values and the integral of point loads).
    """
    half_width = checked("width", width, above=0.0) / 2.0
    half_length = checked("length", length, above=0.0) / 2.0
    z, x, y = np.broadcast_arrays(checked("depth", depth, at_least=0.0), checked("x", x), checked("y", y))
    total = np.zeros(z.shape)
    for side in (half_width + x, half_width - x):
        for other in (half_length + y, half_length - y):
            total += _corner(z, side, other)
    return total


def _corner(z: FloatArray, a: FloatArray, b: FloatArray) -> FloatArray:
    """Return the stress below a corner from signed sides: odd in each of them."""
    first, second = a * a + z * z, b * b + z * z
    radius = np.sqrt(first + b * b)
    inverse = 1.0 / np.where(first > 0.0, first, 1.0) + 1.0 / np.where(second > 0.0, second, 1.0)
    sides = a * b * z / np.where(radius > 0.0, radius, 1.0)
    return np.asarray((np.arctan2(a * b, z * radius) + sides * inverse) / (2.0 * np.pi), dtype=np.float64)


def circle_influence(depth: ArrayLike, radius: ArrayLike, *, diameter: Amount) -> FloatArray:
    r"""Return the vertical stress under a circle of uniform pressure, as a share of it.

    Parameters
    ----------
    depth : array_like, shape (...,), [m]
        Depth below the circle, zero or more.
    radius : array_like, shape (...,), [m]
        Distance from the centre, zero or more; anywhere, also outside.
    diameter : float or ndarray, shape (...,), [m]
        Diameter of the circle, above zero; broadcast against `depth`.

    Returns
    -------
    influence : ndarray, shape (...,), [-]
        Added vertical stress over the pressure.

    Raises
    ------
    ParameterError
        If the diameter is not above zero, or a depth or radius is negative.

    Notes
    -----
    Below the centre :math:`1 - [1 + (R/z)^2]^{-3/2}`. Elsewhere, with a and b the greatest and
    least distance from the point to the rim and :math:`k^2 = 4Rr/a^2`,
    :math:`[r<R] - \frac{z}{\pi a}\left[\frac{z^2 - R^2 + r^2}{b^2} E(k) + \frac{R-r}{R+r}
    \Pi\left(\frac{4Rr}{(R+r)^2}, k\right)\right]`, in complete elliptic integrals: the integral of
    Boussinesq's point load over the circle, taken along its rim. It was derived for this program and is
    tested against the double integral.

    References
    ----------
    .. [1] J. Boussinesq, Application des potentiels, Gauthier-Villars, Paris, 1885 (point load, from
       memory).
    """
    rim = checked("diameter", diameter, above=0.0) / 2.0
    z, r = np.broadcast_arrays(checked("depth", depth, at_least=0.0), checked("radius", radius, at_least=0.0))
    if not r.any():
        return np.asarray(1.0 - (z / np.hypot(z, rim)) ** 3, dtype=np.float64)
    from scipy.special import ellipe  # deferred: only needed away from the centre

    far, near = (r + rim) ** 2 + z * z, (r - rim) ** 2 + z * z
    shallow = near <= 0.0  # on the rim itself
    near = np.where(shallow, far, near)  # any number: the depth that multiplies it is zero
    first = (z * z + r * r - rim * rim) / near * ellipe(4.0 * rim * r / far)
    second = _third_kind(near / far, (rim - r) / (rim + r))
    inside = np.where(r < rim, 1.0, np.where(r > rim, 0.0, 0.5))
    return np.asarray(inside - z / (np.pi * np.sqrt(far)) * (first + second), dtype=np.float64)


def _third_kind(complement: FloatArray, ratio: FloatArray) -> FloatArray:
    """Return ratio times the complete elliptic integral of the third kind, n = 1 - ratio^2, 1 - k^2 given.

    Zero where the ratio is: the jump across the rim, where the integral is infinite, is taken up elsewhere.
    """
    from scipy.special import elliprf, elliprj

    if not ratio.any():
        return np.zeros_like(ratio)
    rest = ratio * ratio
    safe = np.where(rest > 0.0, rest, 1.0)
    third = elliprf(0.0, complement, 1.0) + (1.0 - safe) / 3.0 * elliprj(0.0, complement, 1.0, safe)
    return np.asarray(np.where(rest > 0.0, ratio * third, 0.0))
