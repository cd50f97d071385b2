"""Squeezing of a thin clay layer out from under a load: a check beside slip and bearing."""

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.applied_load import LoadedGround, fill_weight
from probsoil.ground.bearing import net_pressure
from probsoil.ground.bearing_capacity import limited_thickness_factor, squeezing_safety
from probsoil.ground.profile import Values
from probsoil.ground.site_model import SiteModel

_EDGE = 1  # zone of strength below the slope or the edge
_THIN = 2.0  # width over thickness beyond which a foundation feels the firm base


def squeezing_at(
    site: SiteModel, values: Values, ground: LoadedGround, strength: FloatArray, time: float
) -> FloatArray | None:
    """Return the factor of safety against squeezing at one time, where clay is thin enough for it.

    Parameters
    ----------
    site : SiteModel
        Load, stages and recorded times.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        Points and layer boundaries.
    strength : ndarray, shape (n_record, n_sample, 3, n_point), [kPa]
        Undrained strength at the recorded times, mode factor included.
    time : float, [years]
        A recorded time with a load on the ground.

    Returns
    -------
    factor : ndarray or None, shape (n_sample,), [-]
        None for a wide area, where no clay begins at the level of the load, and where the clay is too
        thick (in the first realisation): under an embankment thicker than its slope is wide, under a
        foundation thicker than half its width.

    Notes
    -----
    The clay counts from the level of the load down to the next granular layer or the end of the
    profile, taken as firm, with its mean strength below the slope or the edge. Under a foundation it
    is Mandel and Salencon's strip, without factors for shape and depth.
    """
    level = 0.0 if site.foundation is None else site.foundation.depth
    weight = _clay_below(site, ground, level)
    if weight is None:
        return None
    thickness = weight.sum(axis=1)
    here = strength[int(np.searchsorted(site.record, time)), :, _EDGE]
    mean = (weight * here).sum(axis=1) / thickness
    if site.foundation is not None:
        factor = limited_thickness_factor(site.foundation.width, thickness)
        thin = site.foundation.width > _THIN * thickness[0]
        pressure = net_pressure(site, values, mean.size, time)
        pressed = pressure > 0.0
        safety = np.where(pressed, factor * mean / np.where(pressed, pressure, 1.0), np.inf)
        return safety if thin and pressed[0] else None
    height, shape = site.fill_height(time), site.embankment
    if shape is None or thickness[0] >= shape.side_slope * height:
        return None
    return squeezing_safety(
        mean,
        thickness=thickness,
        height=height,
        side_slope=shape.side_slope,
        unit_weight=fill_weight(values, mean.size) * (1.0 + ground.load.fill_added(time) / height),
    )


def _clay_below(site: SiteModel, ground: LoadedGround, level: float) -> FloatArray | None:
    """Return the thickness that each point stands for in the run of clay below a level."""
    boundary = ground.points.boundary
    first = int(np.searchsorted(boundary[0, 1:], level, side="right"))
    last = first
    while last < len(site.layers) and site.layers[last].is_clay:
        last += 1
    if last == first:
        return None
    points = ground.points
    top, bottom = points.depth - 0.5 * points.thickness, points.depth + 0.5 * points.thickness
    mine = (points.layer >= first) & (points.layer < last)
    return np.where(mine, np.maximum(bottom - np.maximum(top, level), 0.0), 0.0)
