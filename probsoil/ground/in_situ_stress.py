"""Stress in the ground before anything is built, for every realisation."""

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.constants import WATER_UNIT_WEIGHT


def total_vertical_stress(
    depth: FloatArray,
    boundary: FloatArray,
    *,
    unit_weight: FloatArray,
    unit_weight_above: FloatArray,
    water_table: FloatArray,
) -> FloatArray:
    """Return the total vertical stress from the weight of the layers above.

    Parameters
    ----------
    depth : ndarray, shape (n_sample, n_point), [m]
        Depths below ground level, zero or more.
    boundary : ndarray, shape (n_sample, n_layer + 1), [m]
        Depths of the layer boundaries, ground level (0) first.
    unit_weight, unit_weight_above : ndarray, shape (n_sample, n_layer), [kN/m3]
        Bulk unit weight of each layer below and above the water table.
    water_table : ndarray, shape (n_sample,), [m]
        Depth of the water table.

    Returns
    -------
    stress : ndarray, shape (n_sample, n_point), [kPa]
        Total vertical stress.

    Notes
    -----
    Sum over the layers of bulk unit weight times thickness (common practice).
    """
    stress = np.zeros_like(depth)
    dry_to = np.minimum(depth, water_table[:, None])
    for layer in range(unit_weight.shape[1]):
        top, bottom = boundary[:, layer, None], boundary[:, layer + 1, None]
        above = np.clip(dry_to, top, bottom) - top
        within = np.clip(depth, top, bottom) - top
        stress += unit_weight_above[:, layer, None] * above
        stress += unit_weight[:, layer, None] * (within - above)
    return stress


def hydrostatic_pressure(depth: FloatArray, water_table: FloatArray) -> FloatArray:
    """Return the pore pressure at rest: hydrostatic below the water table, zero above.

    Parameters
    ----------
    depth : ndarray, shape (n_sample, n_point), [m]
        Depths below ground level.
    water_table : ndarray, shape (n_sample,), [m]
        Depth of the water table.

    Returns
    -------
    pressure : ndarray, shape (n_sample, n_point), [kPa]
        Pore pressure.

    Notes
    -----
    Suction above the water table is neglected (common practice; it is on the soft side for
    stiffness and strength of a crust).
    """
    return WATER_UNIT_WEIGHT * np.maximum(depth - water_table[:, None], 0.0)


def preconsolidation_stress(
    effective: FloatArray, form: str, value: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """Return the preconsolidation stress, never below the present effective stress.

    Parameters
    ----------
    effective : ndarray, shape (n_sample, n_point), [kPa]
        Effective vertical stress in situ.
    form : {"preconsolidation", "ocr", "pop"}
        Whether `value` is the stress itself, its ratio to `effective`, or its excess over it.
    value : ndarray, shape (n_sample,), [kPa], [-] or [kPa]
        The number that goes with `form`.

    Returns
    -------
    stress : ndarray, shape (n_sample, n_point), [kPa]
        Preconsolidation stress.
    floored : ndarray of bool, shape (n_sample, n_point), [-]
        Where the present stress replaced a smaller number.

    Notes
    -----
    By definition: a soil that carries a stress has carried it before.
    """
    given = {
        "preconsolidation": lambda: np.broadcast_to(value[:, None], effective.shape),
        "ocr": lambda: value[:, None] * effective,
        "pop": lambda: effective + value[:, None],
    }[form]()
    return np.maximum(given, effective), given < effective
