"""Soil dug out for a load: what the ground loses by it and what is then put back."""

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.amounts import Amount
from probsoil.ground.in_situ_stress import hydrostatic_pressure, total_vertical_stress
from probsoil.ground.profile import LEAST_STRESS, Values, layers_by_weight
from probsoil.ground.site_model import SiteModel


def stress_dug_out(
    site: SiteModel, values: Values, n_sample: int, level: Amount
) -> tuple[FloatArray, FloatArray]:
    """Return total stress and pore pressure in situ at a level.

    Parameters
    ----------
    site : SiteModel
        Layers.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    n_sample : int, [-]
        Number of realisations.
    level : float or ndarray, shape (n_sample,), [m]
        Depth below ground level.

    Returns
    -------
    total, pore : ndarray, shape (n_sample,), [kPa]
        Weight of the soil above the level, and pressure of the water there.
    """
    _, boundary, weights = layers_by_weight(site, values, n_sample)
    depth = np.array(np.broadcast_to(level, (n_sample,)))[:, None]
    total = total_vertical_stress(depth, boundary, **weights)
    return total[:, 0], hydrostatic_pressure(depth, weights["water_table"])[:, 0]


def pressure_on_base(site: SiteModel, values: Values, placed: FloatArray, time: float) -> FloatArray:
    """Return by how much the effective stress on the base of a load exceeds that in situ.

    Parameters
    ----------
    site : SiteModel
        Stages.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    placed : ndarray, shape (n_sample,), [kPa]
        Pressure that fill and structure exert, water under the base included.
    time : float, [years]
        Time.

    Returns
    -------
    pressure : ndarray, shape (n_sample,), [kPa]
        Negative while less than the soil dug out weighs; where no soil is dug out, what is placed.

    Notes
    -----
    Water stands in the excavation, and presses under the base, as high as the water table: digging takes
    the effective stress at the level reached, so that nothing is left on it and never less; what is placed
    first takes the place of the water.
    """
    if not site.excavates:
        return placed
    total, pore = stress_dug_out(site, values, placed.size, site.dug(time))
    return np.asarray(placed - np.minimum(placed, pore) - (total - pore))


def kept_above_least(stress: FloatArray, in_situ: FloatArray) -> FloatArray:
    """Return added stresses of which none leaves less than the least effective stress.

    Parameters
    ----------
    stress : ndarray, shape (n_knot, n_sample, n_point), [kPa]
        Added stress.
    in_situ : ndarray, shape (n_sample, n_point), [kPa]
        Effective stress before.

    Returns
    -------
    stress : ndarray, shape (n_knot, n_sample, n_point), [kPa]
        Raised right below a bare base, where a centimetre of soil weighs next to nothing.
    """
    return np.maximum(stress, LEAST_STRESS - in_situ)
