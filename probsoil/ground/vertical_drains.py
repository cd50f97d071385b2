"""Vertical drains: radial flow to a grid of drains with smear and well resistance."""

from typing import Literal

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError
from probsoil.ground._checks import checked
from probsoil.ground.amounts import Amount

Pattern = Literal["triangular", "square"]
_EQUIVALENT = {"triangular": 1.05, "square": 1.13}


def influence_diameter(spacing: Amount, pattern: Pattern) -> Amount:
    """Return the diameter of the cylinder of soil that one drain serves.

    Parameters
    ----------
    spacing : float or ndarray, shape (n_sample,), [m]
        Distance between drains, above zero.
    pattern : {"triangular", "square"}
        Grid of the drains.

    Returns
    -------
    diameter : float or ndarray, shape (n_sample,), [m]
        1.05 times the spacing in a triangular grid, 1.13 times in a square one.

    Raises
    ------
    ParameterError
        If the spacing is not above zero or the pattern is unknown.

    Notes
    -----
    The circle has the area of the grid's cell (common practice; rounded as is usual).
    """
    if pattern not in _EQUIVALENT:
        raise ParameterError(f"pattern must be one of {', '.join(_EQUIVALENT)}; got {pattern!r}")
    served = _EQUIVALENT[pattern] * checked("spacing", spacing, above=0.0)
    return served if isinstance(spacing, np.ndarray) else float(served)


def drain_factor(
    spacing_ratio: ArrayLike, smear_ratio: ArrayLike = 1.0, permeability_ratio: ArrayLike = 1.0
) -> FloatArray:
    r"""Return the factor mu of radial consolidation with equal vertical strain.

    Parameters
    ----------
    spacing_ratio : array_like, shape (...,), [-]
        n, diameter of the soil cylinder over that of the drain, above `smear_ratio`.
    smear_ratio : array_like, shape (...,), [-]
        s, diameter of the smear zone over that of the drain, 1 for none.
    permeability_ratio : array_like, shape (...,), [-]
        Horizontal permeability of the undisturbed soil over that of the smear zone, at least 1.

    Returns
    -------
    factor : ndarray, shape (...,), [-]
        With q the permeability ratio, :math:`(n^2 - 1)\,\mu = n^2 (\ln\frac{n}{s} + q \ln s - \frac{3}{4})
        + s^2 (1 - \frac{s^2}{4 n^2}) + q\,(1 - s^2 + \frac{s^4 - 1}{4 n^2})`.

    Raises
    ------
    ParameterError
        If the ratios are out of order.

    Notes
    -----
    With it :math:`U_r = 1 - \exp(-8 T_h/\mu)`, :math:`T_h = c_h t/D_e^2`. Without smear it is
    Barron's :math:`F(n)`; for large n Hansbo's :math:`\ln(n/s) + (k_h/k_s) \ln s - 3/4`. Exact for
    equal strain of the soil around the drain, its smear zone included, however wide that is.

    References
    ----------
    .. [1] R. A. Barron, Consolidation of fine-grained soils by drain wells, Trans. ASCE 113, 1948.
    .. [2] S. Hansbo, Consolidation of fine-grained soils by prefabricated drains, Proc. 10th Int.
       Conf. Soil Mech. Found. Eng., Stockholm, 1981. (Both from memory, not opened.)
    """
    s = checked("smear_ratio", smear_ratio, at_least=1.0)
    n = checked("spacing_ratio", spacing_ratio, above=1.0)
    if (n <= s).any():
        raise ParameterError("spacing_ratio must be above smear_ratio: the smear zones would meet")
    ratio = checked("permeability_ratio", permeability_ratio, at_least=1.0)
    wide = n**2 * (np.log(n / s) + ratio * np.log(s) - 0.75)
    outside = s**2 * (1.0 - s**2 / (4.0 * n**2))
    in_smear = ratio * (1.0 - s**2 + (s**4 - 1.0) / (4.0 * n**2))
    return np.asarray((wide + outside + in_smear) / (n**2 - 1.0))


def well_resistance(
    depth: ArrayLike, length: ArrayLike, permeability: ArrayLike, discharge_capacity: ArrayLike
) -> FloatArray:
    r"""Return what the drain's own resistance adds to the factor mu.

    Parameters
    ----------
    depth : array_like, shape (...,), [m]
        Distance along the drain from the end at which it discharges.
    length : array_like, shape (...,), [m]
        Length of the drain, closed at the other end.
    permeability : array_like, shape (...,), [m/year]
        Horizontal permeability of the soil.
    discharge_capacity : array_like, shape (...,), [m3/year]
        Flow through the drain at a hydraulic gradient of one, above zero.

    Returns
    -------
    addition : ndarray, shape (...,), [-]
        :math:`\pi z (2 l - z) k_h/q_w`.

    Raises
    ------
    ParameterError
        If an argument is out of range.

    References
    ----------
    .. [1] S. Hansbo, Proc. 10th Int. Conf. Soil Mech. Found. Eng., Stockholm, 1981 (from memory,
       not opened).
    """
    length = checked("length", length, at_least=0.0)
    z = np.minimum(checked("depth", depth, at_least=0.0), length)
    kh = checked("permeability", permeability, above=0.0)
    capacity = checked("discharge_capacity", discharge_capacity, above=0.0)
    return np.asarray(np.pi * z * (2.0 * length - z) * kh / capacity)


def radial_degree_of_consolidation(time_factor: ArrayLike, factor: ArrayLike) -> FloatArray:
    r"""Return the average degree of consolidation by radial flow alone.

    Parameters
    ----------
    time_factor : array_like, shape (...,), [-]
        :math:`T_h = c_h t/D_e^2`, zero or more.
    factor : array_like, shape (...,), [-]
        mu, see `drain_factor`.

    Returns
    -------
    degree : ndarray, shape (...,), [-]
        :math:`U_r = 1 - \exp(-8 T_h/\mu)`.

    Raises
    ------
    ParameterError
        If an argument is out of range.
    """
    t, mu = checked("time_factor", time_factor, at_least=0.0), checked("factor", factor, above=0.0)
    return np.asarray(-np.expm1(-8.0 * t / mu))
