r"""Vertical displacement below a load in an incompressible elastic half-space (Boussinesq).

With Poisson's ratio 1/2 a point load P moves a point of the ground by
:math:`w = 3P/(4\pi E)\,(1/R + z^2/R^3)`. Over a loaded area the two terms are its potential V and z times
the solid angle :math:`\Omega` that it fills, and with n the outward normal of the rim and :math:`\rho` the
distance from the point in plan

.. math:: V + z\,\Omega = \oint \frac{\rho \cdot n}{R}\,dl ,

an integral along the rim, without any trouble at the point or at ground level. For a strip the sum is
infinite; its finite part is given here, and differences between depths are what counts. The derivation was
made for this program; tests hold it to the double integral of point loads.
"""

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.ground._checks import checked
from probsoil.ground.amounts import Amount
from probsoil.ground.load_stress import check_widths

_FACTOR = 3.0 / (4.0 * np.pi)


def strip_displacement(depth: ArrayLike, offset: ArrayLike, *, width: Amount) -> FloatArray:
    r"""Return the displacement below a long strip of uniform pressure, times modulus over pressure.

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
    displacement : ndarray, shape (...,), [m]
        Up to a constant: :math:`-\frac{3}{4\pi} \sum a \ln(a^2 + z^2)`, a the distances to the two edges.

    Raises
    ------
    ParameterError
        If the width is not above zero or a depth is negative.
    """
    half = checked("width", width, above=0.0) / 2.0
    z, x = np.broadcast_arrays(checked("depth", depth, at_least=0.0), checked("offset", offset))
    return -_FACTOR * (_edge(z, half + x) + _edge(z, half - x))


def _edge(z: FloatArray, a: FloatArray) -> FloatArray:
    squares = a * a + z * z
    return np.asarray(a * np.log(np.where(squares > 0.0, squares, 1.0)), dtype=np.float64)


def embankment_displacement(
    depth: ArrayLike, offset: ArrayLike, *, base_width: Amount, top_width: Amount
) -> FloatArray:
    r"""Return the displacement below a long trapezoidal load, times modulus over its full pressure.

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
    displacement : ndarray, shape (...,), [m]
        Up to a constant: the mean of the strip's over all widths from the top's to the base's,
        :math:`-\frac{3}{4\pi} \sum [G(a) - G(b)]/[2(a - b)]` with
        :math:`G(x) = (x^2 + z^2)[\ln(x^2 + z^2) - 1]`, a and b the distances to toe and shoulder.

    Raises
    ------
    ParameterError
        If the widths are not ``base_width >= top_width >= 0`` with a base above zero, or a depth is
        negative.
    """
    check_widths(base_width, top_width)
    z, x = np.broadcast_arrays(checked("depth", depth, at_least=0.0), checked("offset", offset))
    toe, shoulder = base_width / 2.0, top_width / 2.0
    steep = np.asarray(toe - shoulder < 1e-9 * (1.0 + toe))
    if steep.all():
        return strip_displacement(z, x, width=base_width)
    sides = [_bowl(z, toe + side * x) - _bowl(z, shoulder + side * x) for side in (1.0, -1.0)]
    sloping = -_FACTOR * (sides[0] + sides[1]) / (2.0 * np.where(steep, 1.0, toe - shoulder))
    if not steep.any():
        return np.asarray(sloping)
    return np.asarray(np.where(steep, strip_displacement(z, x, width=base_width), sloping))


def _bowl(z: FloatArray, x: FloatArray) -> FloatArray:
    squares = x * x + z * z
    return np.asarray(squares * (np.log(np.where(squares > 0.0, squares, 1.0)) - 1.0), dtype=np.float64)


def rectangle_displacement(
    depth: ArrayLike, x: ArrayLike, y: ArrayLike, *, width: Amount, length: Amount
) -> FloatArray:
    r"""Return the displacement below a rectangle of uniform pressure, times modulus over pressure.

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
    displacement : ndarray, shape (...,), [m]
        :math:`\frac{3}{4\pi} \sum a\,\mathrm{arsinh}\frac{b}{\sqrt{a^2 + z^2}} +
        b\,\mathrm{arsinh}\frac{a}{\sqrt{b^2 + z^2}}`, the four rectangles with a corner at the point added
        and subtracted.

    Raises
    ------
    ParameterError
        If a side is not above zero or a depth is negative.
    """
    half_width = checked("width", width, above=0.0) / 2.0
    half_length = checked("length", length, above=0.0) / 2.0
    z, x, y = np.broadcast_arrays(checked("depth", depth, at_least=0.0), checked("x", x), checked("y", y))
    total = np.zeros(z.shape)
    for side in (half_width + x, half_width - x):
        for other in (half_length + y, half_length - y):
            total += _reach(z, side, other) + _reach(z, other, side)
    return _FACTOR * total


def _reach(z: FloatArray, a: FloatArray, b: FloatArray) -> FloatArray:
    away = np.hypot(a, z)
    return np.asarray(a * np.arcsinh(b / np.where(away > 0.0, away, 1.0)), dtype=np.float64)


def circle_displacement(depth: ArrayLike, radius: ArrayLike, *, diameter: Amount) -> FloatArray:
    r"""Return the displacement below a circle of uniform pressure, times modulus over pressure.

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
    displacement : ndarray, shape (...,), [m]
        :math:`\frac{3}{2\pi}\left[\frac{R^2 - r^2 - z^2}{a} K(k) + a E(k)\right]` with
        :math:`a^2 = (R + r)^2 + z^2` and :math:`k^2 = 4Rr/a^2`; below the centre
        :math:`\frac{3}{2} R^2/\sqrt{R^2 + z^2}`.

    Raises
    ------
    ParameterError
        If the diameter is not above zero, or a depth or radius is negative.
    """
    rim = checked("diameter", diameter, above=0.0) / 2.0
    z, r = np.broadcast_arrays(checked("depth", depth, at_least=0.0), checked("radius", radius, at_least=0.0))
    if not r.any():
        return np.asarray(1.5 * rim * rim / np.hypot(rim, z), dtype=np.float64)
    from scipy.special import ellipe, ellipkm1  # deferred: only needed away from the centre

    far, near = (r + rim) ** 2 + z * z, (r - rim) ** 2 + z * z
    reach = np.sqrt(far)
    safe = np.where(near > 0.0, near / far, 1.0)  # on the rim itself the first term is zero
    first = np.where(near > 0.0, (rim * rim - r * r - z * z) / reach * ellipkm1(safe), 0.0)
    return np.asarray(2.0 * _FACTOR * (first + reach * ellipe(4.0 * rim * r / far)), dtype=np.float64)
