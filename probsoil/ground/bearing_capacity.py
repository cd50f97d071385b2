"""Undrained bearing capacity of clay below a foundation."""

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError
from probsoil.ground._checks import checked
from probsoil.ground.foundation import Contact

STRIP_FACTOR = 2.0 + np.pi
"""Bearing capacity factor of a strip at the surface of clay of one strength, [-] (Prandtl 1921)."""

DEEPEST = 2.5
"""Depth over width beyond which Skempton's depth factor stays as it is, [-]."""

RECTANGLE_SHARE = 0.2
"""What a square on clay of one strength carries more than a strip, as a share, [-] (Skempton 1951)."""

# Own slip-line solutions (tests/published/slip_line_fields.py makes them), c0 at the base, c0 + rho z
# below it: rho B/c0; Davis and Booker's F of a smooth and a rough strip; mean pressure below a smooth and a
# rough circle over that below such a strip. The last row stands for c0 = 0, where the strip carries rho B/4
# and the circle, whose pressure rises inward from its rim in the same way, rho D/6. Beyond a ratio of 100
# the circle's numbers scatter by 2 % with the mesh, and the lower are kept.
_TABLE = np.array(
    [
        (0.0, 1.0000, 1.0000, 1.1065, 1.1764),
        (0.25, 1.0334, 1.0744, 1.0860, 1.1278),
        (0.5, 1.0620, 1.1339, 1.0696, 1.0949),
        (1.0, 1.1095, 1.2258, 1.0443, 1.0510),
        (2.0, 1.1807, 1.3466, 1.0093, 1.0039),
        (3.0, 1.2328, 1.4271, 0.9850, 0.9766),
        (4.0, 1.2731, 1.4867, 0.9666, 0.9573),
        (6.0, 1.3309, 1.5690, 0.9391, 0.9304),
        (8.0, 1.3696, 1.6219, 0.9191, 0.9118),
        (10.0, 1.3963, 1.6572, 0.9039, 0.8977),
        (12.0, 1.4151, 1.6809, 0.8915, 0.8864),
        (16.0, 1.4373, 1.7068, 0.8715, 0.8689),
        (20.0, 1.4473, 1.7159, 0.8566, 0.8561),
        (30.0, 1.4481, 1.7068, 0.8308, 0.8333),
        (40.0, 1.4355, 1.6814, 0.8145, 0.8180),
        (60.0, 1.4026, 1.6247, 0.7920, 0.7991),
        (100.0, 1.3456, 1.5326, 0.7691, 0.7746),
        (300.0, 1.2170, 1.3321, 0.7311, 0.7293),
        (1000.0, 1.1202, 1.1834, 0.7090, 0.7211),
        (1e6, 1.0000, 1.0000, 2.0 / 3.0, 2.0 / 3.0),
    ]
)
_COLUMN = {"smooth": (1, 3), "rough": (2, 4)}


def growth_table(contact: Contact) -> tuple[FloatArray, FloatArray, FloatArray]:
    r"""Return the table of strength that grows with depth.

    Parameters
    ----------
    contact : {"rough", "smooth"}
        Contact of the base with the soil.

    Returns
    -------
    place, factor, circle : ndarray, shape (n_row,), [-]
        :math:`\ln(1 + \rho B/c_0)`, Davis and Booker's factor of a strip, and a circle over a strip.

    Raises
    ------
    ParameterError
        If the contact is unknown.
    """
    if contact not in _COLUMN:
        raise ParameterError(f"contact must be rough or smooth; got {contact!r}")
    factor, circle = (np.ascontiguousarray(_TABLE[:, column]) for column in _COLUMN[contact])
    return np.log1p(_TABLE[:, 0]), factor, circle


def _looked_up(ratio: ArrayLike, contact: Contact, which: int) -> FloatArray:
    place, *values = growth_table(contact)
    return np.asarray(np.interp(np.log1p(checked("ratio", ratio, at_least=0.0)), place, values[which]))


def strength_growth_factor(ratio: ArrayLike, contact: Contact = "rough") -> FloatArray:
    r"""Return Davis and Booker's factor F for strength that grows with depth.

    Parameters
    ----------
    ratio : array_like, shape (...,), [-]
        :math:`\rho B/c_0`: growth of strength per depth times width over strength at the base.
    contact : {"rough", "smooth"}
        Contact of the base with the soil.

    Returns
    -------
    factor : ndarray, shape (...,), [-]
        F in :math:`q = F[(2 + \pi)c_0 + \rho B/4]` of a strip.

    Raises
    ------
    ParameterError
        If a ratio is negative or not finite, or the contact unknown.

    Notes
    -----
    Interpolated in :math:`\ln(1 + \rho B/c_0)` between slip-line solutions of this program's own
    tests; the chart of the publication was not opened.

    References
    ----------
    .. [1] E. H. Davis and J. R. Booker, The effect of increasing strength with depth on the bearing
       capacity of clays, Geotechnique 23(4), 1973 (form from memory, numbers computed anew).
    """
    return _looked_up(ratio, contact, 0)


def circle_shape_factor(ratio: ArrayLike, contact: Contact = "rough") -> FloatArray:
    r"""Return the bearing capacity of a circle over that of a strip as wide.

    Parameters
    ----------
    ratio : array_like, shape (...,), [-]
        :math:`\rho D/c_0`.
    contact : {"rough", "smooth"}
        Contact of the base with the soil.

    Returns
    -------
    factor : ndarray, shape (...,), [-]
        1.176 (rough, Nc = 6.05) or 1.107 (smooth, 5.69) for one strength, less where it grows.

    Raises
    ------
    ParameterError
        If a ratio is negative or not finite, or the contact unknown.

    References
    ----------
    .. [1] R. T. Shield, On the plastic flow of metals under conditions of axial symmetry, Proc. Roy.
       Soc. A 233, 1955 (5.69); G. Eason and R. T. Shield, The plastic indentation of a semi-infinite
       solid by a perfectly rough circular punch, ZAMP 11, 1960 (6.05); both from memory. The numbers
       for growing strength are slip-line solutions of this program's own tests.
    """
    return _looked_up(ratio, contact, 1)


def rectangle_shape_factor(
    ratio: ArrayLike, width_over_length: ArrayLike, contact: Contact = "rough"
) -> FloatArray:
    r"""Return the bearing capacity of a rectangle over that of a strip as wide.

    Parameters
    ----------
    ratio : array_like, shape (...,), [-]
        :math:`\rho B/c_0`.
    width_over_length : array_like, shape (...,), [-]
        B/L, from 0 (a strip) to 1 (a square).
    contact : {"rough", "smooth"}
        Contact of the base with the soil.

    Returns
    -------
    factor : ndarray, shape (...,), [-]
        :math:`1 + s B/L`.

    Raises
    ------
    ParameterError
        If a ratio is negative or not finite, B/L is above 1, or the contact unknown.

    Notes
    -----
    s = 0.2 for one strength (Skempton). Where strength grows, s falls as the excess of the circle
    over the strip does, and where the circle carries less than a strip it equals that deficit.

    References
    ----------
    .. [1] A. W. Skempton, The bearing capacity of clays, Building Research Congress, London, 1951 (from
       memory, not opened).
    """
    share = checked("width_over_length", width_over_length, at_least=0.0)
    if (share > 1.0).any():
        raise ParameterError("width_over_length must be at most 1: the width is the shorter side")
    excess = circle_shape_factor(ratio, contact) - 1.0
    most = circle_shape_factor(0.0, contact) - 1.0
    return np.asarray(1.0 + np.where(excess > 0.0, RECTANGLE_SHARE * excess / most, excess) * share)


def depth_factor(depth: ArrayLike, width: ArrayLike) -> FloatArray:
    """Return Skempton's depth factor.

    Parameters
    ----------
    depth : array_like, shape (...,), [m]
        Depth of the base below ground level.
    width : array_like, shape (...,), [m]
        Width or diameter.

    Returns
    -------
    factor : ndarray, shape (...,), [-]
        1 + 0.2 D/B, with D/B at most 2.5.

    Raises
    ------
    ParameterError
        If a depth is negative or a width not above zero.

    References
    ----------
    .. [1] A. W. Skempton, The bearing capacity of clays, Building Research Congress, London, 1951 (from
       memory, not opened).
    """
    relative = checked("depth", depth, at_least=0.0) / checked("width", width, above=0.0)
    return np.asarray(1.0 + 0.2 * np.minimum(relative, DEEPEST))


def strip_capacity(
    strength: ArrayLike, growth: ArrayLike, width: ArrayLike, contact: Contact = "rough"
) -> FloatArray:
    r"""Return the net bearing capacity of a strip at the surface of clay of growing strength.

    Parameters
    ----------
    strength : array_like, shape (...,), [kPa]
        Undrained strength :math:`c_0` at the base, zero or more.
    growth : array_like, shape (...,), [kPa/m]
        Growth :math:`\rho` of the strength with depth, zero or more.
    width : array_like, shape (...,), [m]
        Width B.
    contact : {"rough", "smooth"}
        Contact of the base with the soil.

    Returns
    -------
    capacity : ndarray, shape (...,), [kPa]
        :math:`F[(2 + \pi)c_0 + \rho B/4]`, in excess of the weight of soil beside the base.

    Raises
    ------
    ParameterError
        If an argument is negative or not finite.
    """
    c0 = checked("strength", strength, at_least=0.0)
    rise = checked("growth", growth, at_least=0.0) * checked("width", width, above=0.0)
    factor = strength_growth_factor(growth_ratio(c0, rise), contact)
    return np.asarray(factor * (STRIP_FACTOR * c0 + 0.25 * rise))


def growth_ratio(strength: ArrayLike, rise: ArrayLike) -> FloatArray:
    r"""Return the ratio of the rise of strength over the width to the strength at the base.

    Parameters
    ----------
    strength : array_like, shape (...,), [kPa]
        :math:`c_0`.
    rise : array_like, shape (...,), [kPa]
        :math:`\rho B`.

    Returns
    -------
    ratio : ndarray, shape (...,), [-]
        :math:`\rho B/c_0`, at most 1e6, which stands for no strength at the base.
    """
    c0, more = np.broadcast_arrays(np.asarray(strength, dtype=np.float64), np.asarray(rise, dtype=np.float64))
    small = c0 <= 1e-6 * more
    return np.asarray(np.where(small, np.where(more > 0.0, 1e6, 0.0), more / np.where(small, 1.0, c0)))


def limited_thickness_factor(width: ArrayLike, thickness: ArrayLike) -> FloatArray:
    """Return the bearing capacity factor of a rough strip on clay of one strength over a firm base.

    Parameters
    ----------
    width : array_like, shape (...,), [m]
        Width B of the strip.
    thickness : array_like, shape (...,), [m]
        Thickness H of the clay below it.

    Returns
    -------
    factor : ndarray, shape (...,), [-]
        4.14 + 0.5 B/H, not below 2 + pi: clay that is thin is squeezed out and holds more.

    Raises
    ------
    ParameterError
        If an argument is not above zero.

    References
    ----------
    .. [1] J. Mandel and J. Salencon, Force portante d'un sol sur une assise rigide, Geotechnique 22(1),
       1972; straight line as in US highway guidance (both from memory, not opened).
    """
    ratio = checked("width", width, above=0.0) / checked("thickness", thickness, above=0.0)
    return np.asarray(np.maximum(np.pi + 1.0 + 0.5 * ratio, STRIP_FACTOR))


def squeezing_safety(
    strength: ArrayLike,
    *,
    thickness: ArrayLike,
    height: ArrayLike,
    side_slope: ArrayLike,
    unit_weight: ArrayLike,
) -> FloatArray:
    r"""Return the factor of safety against squeezing of thin clay from under the side of an embankment.

    Parameters
    ----------
    strength : array_like, shape (...,), [kPa]
        Undrained strength of the clay.
    thickness : array_like, shape (...,), [m]
        Its thickness D, from ground level down.
    height : array_like, shape (...,), [m]
        Height H of the fill.
    side_slope : array_like, shape (...,), [-]
        Horizontal run n of the side per unit of rise.
    unit_weight : array_like, shape (...,), [kN/m3]
        Unit weight of the fill.

    Returns
    -------
    factor : ndarray, shape (...,), [-]
        :math:`2 c n/(\gamma D) + 4.14\,c/(\gamma H)`.

    Raises
    ------
    ParameterError
        If an argument is not above zero.

    References
    ----------
    .. [1] US highway guidance, after V. Silvestri (from memory, not opened).
    """
    su = checked("strength", strength, above=0.0)
    per_thickness = (
        2.0 * checked("side_slope", side_slope, above=0.0) / checked("thickness", thickness, above=0.0)
    )
    per_height = 4.14 / checked("height", height, above=0.0)
    return np.asarray(su * (per_thickness + per_height) / checked("unit_weight", unit_weight, above=0.0))
