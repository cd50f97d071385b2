"""Compression of clay: void ratio against the logarithm of effective stress."""

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.ground._checks import checked

LN10 = float(np.log(10.0))


def lambda_from_compression_index(compression_index: ArrayLike) -> FloatArray:
    r"""Return the slope per natural logarithm for a slope per decade, Cc or Cs.

    Parameters
    ----------
    compression_index : array_like, shape (...,), [-]
        Fall of void ratio per tenfold stress, Cc (or the swelling index Cs).

    Returns
    -------
    slope : ndarray, shape (...,), [-]
        Lambda (or kappa), :math:`C_c / \ln 10`.

    Raises
    ------
    ParameterError
        If an argument is not finite or out of its range.

    Notes
    -----
    By definition for lambda. For kappa the same conversion is common practice; in one-dimensional
    unloading it neglects the change of the horizontal stress ratio.
    """
    return checked("compression_index", compression_index, above=0.0) / LN10


def lambda_from_compression_ratio(compression_ratio: ArrayLike, void_ratio: ArrayLike) -> FloatArray:
    r"""Return the slope per natural logarithm for a strain per decade, CR or RR.

    Parameters
    ----------
    compression_ratio : array_like, shape (...,), [-]
        Strain per tenfold stress, :math:`CR = C_c / (1 + e_0)`.
    void_ratio : array_like, shape (...,), [-]
        Initial void ratio e0.

    Returns
    -------
    slope : ndarray, shape (...,), [-]
        Lambda (or kappa), :math:`CR (1 + e_0) / \ln 10`.

    Raises
    ------
    ParameterError
        If an argument is not finite or out of its range.

    Notes
    -----
    By definition.
    """
    ratio = checked("compression_ratio", compression_ratio, above=0.0)
    return ratio * (1.0 + checked("void_ratio", void_ratio, above=0.0)) / LN10


def void_ratio_lost(
    stress: ArrayLike,
    yield_stress: ArrayLike,
    *,
    initial_stress: ArrayLike,
    initial_yield_stress: ArrayLike,
    slopes: tuple[ArrayLike, ArrayLike],
) -> FloatArray:
    r"""Return the void ratio lost between the initial state and a state of stress.

    Parameters
    ----------
    stress : array_like, shape (...,), [kPa]
        Effective vertical stress now.
    yield_stress : array_like, shape (...,), [kPa]
        Largest effective stress so far (the current preconsolidation stress); a `stress` above
        it yields the soil and becomes the new value.
    initial_stress, initial_yield_stress : array_like, shape (...,), [kPa]
        Effective and preconsolidation stress before loading, the second not below the first.
    slopes : tuple of two array_like, shape (...,), [-]
        Lambda and kappa, slopes of void ratio against the natural logarithm of stress.

    Returns
    -------
    lost : ndarray, shape (...,), [-]
        :math:`e_0 - e`, positive in compression.

    Raises
    ------
    ParameterError
        If an argument is not finite or out of its range.

    Notes
    -----
    With the stresses s, initial s0, preconsolidation sp0 and :math:`y = \max(sp, s)`,
    :math:`e_0 - e = \kappa \ln(sp_0/s_0) + \lambda \ln(y/sp_0) - \kappa \ln(y/s)`: recompression
    to the initial preconsolidation stress, virgin compression to the largest stress, swelling
    from there. Time effects are left out.

    References
    ----------
    .. [1] A. Schofield and P. Wroth, Critical State Soil Mechanics. London: McGraw-Hill, 1968
       (the lines of slope lambda and kappa; from memory, not opened).
    """
    lam, kap = checked("lambda", slopes[0], above=0.0), checked("kappa", slopes[1], above=0.0)
    s = checked("stress", stress, above=0.0)
    s0 = checked("initial_stress", initial_stress, above=0.0)
    sp0 = checked("initial_yield_stress", initial_yield_stress, above=0.0)
    largest = np.maximum(checked("yield_stress", yield_stress, above=0.0), s)
    recompression = kap * np.log(sp0 / s0)
    virgin = lam * np.log(largest / sp0)
    swelling = kap * np.log(largest / s)
    return np.asarray(recompression + virgin - swelling, dtype=np.float64)
