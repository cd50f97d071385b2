"""Vertical stress that a load adds to the ground, from elasticity (Boussinesq half-space)."""

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError
from probsoil.ground._checks import checked


def embankment_influence(
    depth: ArrayLike, offset: ArrayLike, *, base_width: float, top_width: float
) -> FloatArray:
    r"""Return the vertical stress under a long trapezoidal load, as a share of its full pressure.

    Parameters
    ----------
    depth : array_like, shape (...,), [m]
        Depth below the base, zero or more.
    offset : array_like, shape (...,), [m]
        Horizontal distance from the centreline; broadcast against `depth`.
    base_width, top_width : float, [m]
        Widths of the trapezium, ``base_width >= top_width >= 0``, base above zero.

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
    if not base_width >= top_width >= 0.0 or base_width <= 0.0:
        raise ParameterError(
            f"widths must be base >= top >= 0 with base > 0; got base {base_width:g} m, top {top_width:g} m"
        )
    z, x = np.broadcast_arrays(checked("depth", depth, at_least=0.0), np.abs(checked("offset", offset)))
    toe, shoulder = base_width / 2.0, top_width / 2.0
    left = _ramp(z, x + toe, x + shoulder)
    right = _ramp(z, toe - x, shoulder - x)
    return np.asarray(left + right, dtype=np.float64)


def _ramp(z: FloatArray, toe: FloatArray, shoulder: FloatArray) -> FloatArray:
    """Return the stress of the half of the load on one side, from signed distances to its edges."""
    run = toe - shoulder
    steep = run < 1e-9 * (1.0 + np.abs(toe))
    slope = (toe * np.arctan2(toe, z) - shoulder * np.arctan2(shoulder, z)) / np.where(steep, 1.0, run)
    # a vertical side is the limit of the quotient: the uniform strip
    squares = toe * toe + z * z
    strip = np.arctan2(toe, z) + toe * z / np.where(squares > 0.0, squares, 1.0)
    return np.asarray(np.where(steep, strip, slope) / np.pi, dtype=np.float64)
