"""Undrained shear strength from the critical state: M, lambda, kappa and the stress history."""

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError
from probsoil.ground._checks import checked


def sine_of_friction_angle(m: ArrayLike) -> FloatArray:
    r"""Return sin(phi') of the critical state in triaxial compression for a slope M.

    Parameters
    ----------
    m : array_like, shape (...,), [-]
        Slope M of the critical state line, q = M p', between 0 and 3.

    Returns
    -------
    sine : ndarray, shape (...,), [-]
        :math:`\sin\phi' = 3M/(6 + M)`.

    Raises
    ------
    ParameterError
        If an argument is not finite or out of its range.

    Notes
    -----
    By definition of q and p' in triaxial compression; inverse of `m_from_friction_angle`.
    """
    slope = checked("m", m, above=0.0)
    return np.asarray(3.0 * slope / (6.0 + slope), dtype=np.float64)


def m_from_friction_angle(angle: ArrayLike) -> FloatArray:
    r"""Return the slope M of the critical state line in triaxial compression.

    Parameters
    ----------
    angle : array_like, shape (...,), [degrees]
        Critical state friction angle.

    Returns
    -------
    m : ndarray, shape (...,), [-]
        :math:`M = 6\sin\phi'/(3 - \sin\phi')`.

    Raises
    ------
    ParameterError
        If an argument is not finite or out of its range.

    Notes
    -----
    By definition of q and p' in triaxial compression.
    """
    sine = np.sin(np.radians(checked("angle", angle, at_least=0.0)))
    return np.asarray(6.0 * sine / (3.0 - sine), dtype=np.float64)


def plastic_volumetric_ratio(lam: ArrayLike, kap: ArrayLike) -> FloatArray:
    r"""Return Lambda = 1 - kappa/lambda.

    Parameters
    ----------
    lam, kap : array_like, shape (...,), [-]
        Slopes of void ratio against the natural logarithm of stress.

    Returns
    -------
    ratio : ndarray, shape (...,), [-]
        :math:`\Lambda`.

    Raises
    ------
    ParameterError
        If an argument is not finite or out of its range.
    """
    return np.asarray(1.0 - checked("kap", kap, at_least=0.0) / checked("lam", lam, above=0.0))


def isotropic_strength_ratio(
    m: ArrayLike, ratio: ArrayLike, overconsolidation: ArrayLike = 1.0
) -> FloatArray:
    r"""Return su/p'0 of Modified Cam clay, isotropically consolidated, triaxial compression.

    Parameters
    ----------
    m : array_like, shape (...,), [-]
        Slope M of the critical state line.
    ratio : array_like, shape (...,), [-]
        :math:`\Lambda = 1 - \kappa/\lambda`.
    overconsolidation : array_like, shape (...,), [-]
        R, greatest over present mean effective stress.

    Returns
    -------
    strength_ratio : ndarray, shape (...,), [-]
        :math:`s_u/p'_0 = (M/2)(R/2)^\Lambda`.

    Raises
    ------
    ParameterError
        If an argument is not finite or out of its range.

    References
    ----------
    .. [1] D. M. Wood, Soil Behaviour and Critical State Soil Mechanics. Cambridge University
       Press, 1990 (from memory, not opened; the identity is derived again in the tests).
    """
    slope, over = checked("m", m, above=0.0), checked("overconsolidation", overconsolidation, at_least=1.0)
    return np.asarray(0.5 * slope * (0.5 * over) ** checked("ratio", ratio))


def normally_consolidated_strength_ratio(m: ArrayLike, ratio: ArrayLike) -> FloatArray:
    r"""Return S = su/s'v of Modified Cam clay consolidated at rest, triaxial compression.

    Parameters
    ----------
    m : array_like, shape (...,), [-]
        Slope M of the critical state line; the friction angle that belongs to it is used.
    ratio : array_like, shape (...,), [-]
        :math:`\Lambda = 1 - \kappa/\lambda`.

    Returns
    -------
    strength_ratio : ndarray, shape (...,), [-]
        S of the normally consolidated clay.

    Raises
    ------
    ParameterError
        If an argument is not finite or out of its range.

    Notes
    -----
    With :math:`a = (3 - \sin\phi')/[2(3 - 2\sin\phi')]`,
    :math:`S = (\sin\phi'/2a)\,[(a^2 + 1)/2]^\Lambda`. It follows from the ellipse of Modified Cam
    clay for a stress state at rest with :math:`K_0 = 1 - \sin\phi'` (Jaky); the earth pressure that
    the model itself would predict is higher and is not used.

    References
    ----------
    .. [1] C. P. Wroth, The interpretation of in situ soil tests, Geotechnique 34(4), 1984
       (from memory, not opened; the identity is derived again in the tests).
    """
    sine = sine_of_friction_angle(m)
    a = (3.0 - sine) / (2.0 * (3.0 - 2.0 * sine))
    return np.asarray(sine / (2.0 * a) * ((a * a + 1.0) / 2.0) ** checked("ratio", ratio))


def undrained_shear_strength(
    stress: ArrayLike, yield_stress: ArrayLike, strength_ratio: ArrayLike, exponent: ArrayLike
) -> FloatArray:
    r"""Return the undrained shear strength for the present stress and stress history.

    Parameters
    ----------
    stress : array_like, shape (...,), [kPa]
        Present effective vertical stress, above zero.
    yield_stress : array_like, shape (...,), [kPa]
        Present preconsolidation stress, not below `stress`.
    strength_ratio : array_like, shape (...,), [-]
        S, strength over effective vertical stress when normally consolidated.
    exponent : array_like, shape (...,), [-]
        Lambda, or the exponent m of a measured relation.

    Returns
    -------
    strength : ndarray, shape (...,), [kPa]
        :math:`s_u = S\,\sigma'_v\,OCR^{m}`.

    Raises
    ------
    ParameterError
        If an argument is not finite or out of its range.

    Notes
    -----
    Both stresses are the current ones, so strength grows as the clay consolidates. The form is
    that of critical state theory and of Ladd's normalised strength (common practice).
    """
    s = checked("stress", stress, above=0.0)
    largest = checked("yield_stress", yield_stress, above=0.0)
    if (largest < s).any():
        raise ParameterError("yield_stress must not be below stress")
    ratio, power = checked("strength_ratio", strength_ratio), checked("exponent", exponent)
    return np.asarray(ratio * s * (largest / s) ** power)
