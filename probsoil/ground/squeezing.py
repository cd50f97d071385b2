"""Squeezing of a thin clay layer out from under a load: a check beside slip and bearing."""

from collections.abc import Iterator

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.applied_load import LoadedGround, fill_weight
from probsoil.ground.bearing import net_pressure
from probsoil.ground.bearing_capacity import limited_thickness_factor, squeezing_safety
from probsoil.ground.foundation import Foundation
from probsoil.ground.profile import Values
from probsoil.ground.site_model import SiteModel

FIRM = 2.0
"""Mean strength of clay over that of the clay above it, from which on it counts as firm, [-]."""

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
        Least over the runs of clay; infinite in a realisation without thin clay, None where there is none
        at all, and for a wide area. Thin is, under an embankment, thinner than its slope is wide, and under
        a foundation, thinner than half its width.

    Notes
    -----
    Looked at is every run of neighbouring clay layers below the load that ends on something firm: a
    granular layer, the end of the profile, or clay of `FIRM` times its mean strength or more. Strength is
    the mean below the slope or the edge. A crust or a granular blanket above the run resists nothing; it
    spreads a foundation's load at 2 vertical to 1 horizontal, an embankment's not. Under a foundation it is
    Mandel and Salencon's strip without a factor for depth, with less friction under a circle and a smooth
    base.
    """
    if site.foundation is None and site.embankment is None:
        return None
    here = strength[int(np.searchsorted(site.record, time)), :, _EDGE]
    least = np.full(here.shape[0], np.inf)
    for first, last in _runs(site):
        top, thickness, mean, firm = _run(site, ground, here, (first, last))
        factor, thin = _factor(site, values, ground, (top, thickness, mean), time)
        least = np.where(firm & thin & (thickness > 0.0), np.minimum(least, factor), least)
    return least if np.isfinite(least).any() else None


def _runs(site: SiteModel) -> Iterator[tuple[int, int]]:
    """Yield the first layer of every run of neighbouring clay layers, and the layer after its last."""
    for first in range(len(site.layers)):
        for last in range(first, len(site.layers)):
            if not site.layers[last].is_clay:
                break
            yield first, last + 1


def _mean(ground: LoadedGround, strength: FloatArray, top: FloatArray, layers: tuple[int, int]) -> FloatArray:
    """Return the mean strength of some layers below a depth, zero where there is nothing of them."""
    points = ground.points
    upper, lower = points.depth - 0.5 * points.thickness, points.depth + 0.5 * points.thickness
    mine = (points.layer >= layers[0]) & (points.layer < layers[1])
    weight = np.where(mine, np.maximum(lower - np.maximum(upper, top[:, None]), 0.0), 0.0)
    total = weight.sum(axis=1)
    return np.asarray((weight * strength).sum(axis=1) / np.where(total > 0.0, total, 1.0))


def _run(
    site: SiteModel, ground: LoadedGround, strength: FloatArray, layers: tuple[int, int]
) -> tuple[FloatArray, FloatArray, FloatArray, BoolArray]:
    """Return top, thickness and mean strength of a run of clay, and whether what lies below it is firm."""
    first, last = layers
    boundary = ground.points.boundary
    top = np.maximum(boundary[:, first], 0.0 if site.foundation is None else site.foundation.depth)
    mean = _mean(ground, strength, top, layers)
    if last == len(site.layers) or not site.layers[last].is_clay:
        firm = np.ones(mean.size, dtype=np.bool_)
    else:
        firm = _mean(ground, strength, top, (last, last + 1)) >= FIRM * mean
    return top, np.maximum(boundary[:, last] - top, 0.0), mean, firm


def _held_share(shape: Foundation) -> float:
    """Return how much of its width counts in the friction that holds the clay: all of a rough strip's.

    Mean pressure of clay pressed out between two plates with the strength on both: half the width over the
    thickness of a strip, a third of the diameter of a circle; half of that where one plate is smooth.
    """
    plan = 2.0 / 3.0 if shape.shape == "circle" else 1.0
    return plan * (0.5 if shape.contact == "smooth" else 1.0)


def _factor(
    site: SiteModel,
    values: Values,
    ground: LoadedGround,
    clay: tuple[FloatArray, FloatArray, FloatArray],
    time: float,
) -> tuple[FloatArray, BoolArray]:
    """Return the factor of safety of a run of clay and whether the run is thin."""
    top, thickness, mean = clay
    there, su = np.where(thickness > 0.0, thickness, 1.0), np.where(mean > 0.0, mean, 1.0)
    if site.foundation is not None:
        width, share = site.foundation.spread_area(top - site.foundation.depth)
        pressure = net_pressure(site, values, mean.size, time) * share
        pressed = pressure > 0.0
        capacity = limited_thickness_factor(_held_share(site.foundation) * width, there) * su
        safety = np.where(pressed, capacity / np.where(pressed, pressure, 1.0), np.inf)
        return safety, width > _THIN * thickness
    height, shape = site.fill_height(time), site.embankment
    if shape is None:
        return np.full(mean.size, np.inf), np.zeros(mean.size, dtype=np.bool_)
    slope, height = (np.broadcast_to(one, mean.shape) for one in (shape.side_slope, height))
    loaded = (height > 0.0) & (slope > 0.0)
    slope, height = np.where(loaded, slope, 1.0), np.where(loaded, height, 1.0)
    factor = squeezing_safety(
        su,
        thickness=there,
        height=height,
        side_slope=slope,
        unit_weight=fill_weight(values, mean.size) * (1.0 + ground.load.fill_added(time) / height),
    )
    return factor, loaded & (thickness < slope * height)
