"""Stress that the works add to each point of the ground through the stages."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.constants import WATER_UNIT_WEIGHT
from probsoil.ground.load_stress import embankment_influence
from probsoil.ground.profile import ClayColumns, Points, Values, column
from probsoil.ground.site_model import Embankment, SiteModel


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class AppliedLoad:
    """Added vertical stress below the centreline, and what goes with it.

    Attributes
    ----------
    stress : ndarray, shape (n_knot, n_sample, n_point), [kPa]
        At the load knots, before any loss of weight by submergence.
    spread : ndarray, shape (n_sample, n_point), [-]
        Share of the pressure of the full-height fill that reaches each point.
    slope_share : ndarray, shape (n_sample, n_point), [-]
        Stress below the middle of the slope over that below the centreline, full height; 1 for a
        wide area.
    height : ndarray, shape (n_knot,), [m]
        Height of fill at the load knots.
    water_depth : ndarray, shape (n_sample,), [m]
        Depth of the water table.
    """

    stress: FloatArray
    spread: FloatArray
    slope_share: FloatArray
    height: FloatArray
    water_depth: FloatArray


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class LoadedGround:
    """The ground before loading and the stress that the works will add.

    Attributes
    ----------
    points : Points
        Where the ground is looked at: n_point depths.
    columns : ClayColumns
        Properties of the clay layers.
    yield_stress : ndarray, shape (n_sample, n_point), [kPa]
        Preconsolidation stress before loading; in granular layers the stress in situ.
    clay : ndarray of bool, shape (n_point,), [-]
        Which points are clay cells.
    load : AppliedLoad
        Added stress.
    """

    points: Points
    columns: ClayColumns
    yield_stress: FloatArray
    clay: BoolArray
    load: AppliedLoad


def stress_at(site: SiteModel, load: AppliedLoad, time: float) -> FloatArray:
    """Return the added stress at a time, before any loss of weight by submergence.

    Parameters
    ----------
    site : SiteModel
        Its load knots.
    load : AppliedLoad
        Stress at the knots.
    time : float, [years]
        Time.

    Returns
    -------
    stress : ndarray, shape (n_sample, n_point), [kPa]
        Linear between knots.
    """
    knots = site.knots
    after = int(np.clip(np.searchsorted(knots, time), 1, knots.size - 1))
    share = (time - knots[after - 1]) / (knots[after] - knots[after - 1])
    return np.asarray((1.0 - share) * load.stress[after - 1] + share * load.stress[after])


def applied_load(site: SiteModel, values: Values, depth: FloatArray) -> AppliedLoad:
    """Return the stress that the stages add at given depths.

    Parameters
    ----------
    site : SiteModel
        Shape and stages of the load.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    depth : ndarray, shape (n_sample, n_point), [m]
        Depths of the points.

    Returns
    -------
    load : AppliedLoad
        Stress at every knot of the load.

    Notes
    -----
    Between knots the stress is taken as linear in time, also while an embankment rises and its
    top narrows; the base stays the same.
    """
    n_sample = depth.shape[0]
    heights = [site.fill_height(float(time)) for time in site.knots]
    pressures = [site.pressure(float(time)) for time in site.knots]
    has_fill = "load.fill_unit_weight" in values
    weight = column(values, "load.fill_unit_weight", n_sample) if has_fill else np.zeros(n_sample)
    if site.embankment is None:
        spread, share = np.ones_like(depth), np.ones_like(depth)
        stress = [
            np.broadcast_to((weight * height + pressure)[:, None], depth.shape)
            for height, pressure in zip(heights, pressures, strict=True)
        ]
    else:
        shape = site.embankment
        spread = _influence(shape, depth, shape.full_height)
        middle = shape.base_width / 2.0 - shape.side_slope * shape.full_height / 2.0
        share = np.clip(_influence(shape, depth, shape.full_height, middle) / spread, 0.0, 1.0)
        at_height = {height: _influence(shape, depth, height) for height in set(heights)}
        stress = [weight[:, None] * height * at_height[height] for height in heights]
    return AppliedLoad(
        stress=np.stack(stress),
        spread=spread,
        slope_share=share,
        height=np.array(heights),
        water_depth=column(values, "site.water_table", n_sample),
    )


def relief_by_water(site: SiteModel, load: AppliedLoad, time: float, settled: FloatArray) -> FloatArray:
    """Return the added stress that submergence takes off again.

    Parameters
    ----------
    site : SiteModel
        Whether submergence counts, and the fill.
    load : AppliedLoad
        Added stress.
    time : float, [years]
        Time, for the height of fill.
    settled : ndarray, shape (n_sample,), [m]
        Settlement of the clay.

    Returns
    -------
    relief : ndarray, shape (n_sample, n_point), [kPa]
        Weight of the water displaced by what has sunk below the water table, first the ground above
        it and then the fill, spread like the load and never more than it.
    """
    if not site.submergence:
        return np.zeros_like(load.spread)
    submerged = np.minimum(np.maximum(settled, 0.0), load.water_depth + site.fill_height(time))
    return np.minimum(WATER_UNIT_WEIGHT * submerged[:, None] * load.spread, stress_at(site, load, time))


def _influence(shape: Embankment, depth: FloatArray, height: float, offset: float = 0.0) -> FloatArray:
    return embankment_influence(
        depth, offset, base_width=shape.base_width, top_width=max(shape.top_width(height), 0.0)
    )
