"""Stress that the works add to each point of the ground through the stages."""

from dataclasses import dataclass, replace

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.amounts import Amount, beside_depths, greater, key_of
from probsoil.ground.constants import WATER_UNIT_WEIGHT
from probsoil.ground.embankment import Embankment
from probsoil.ground.excavation import pressure_on_base
from probsoil.ground.foundation import Foundation
from probsoil.ground.further_load import Places, below_base, foundation_influence, share_above
from probsoil.ground.load_stress import strip_influence, trapezia_influence
from probsoil.ground.profile import ClayColumns, Points, Values, column
from probsoil.ground.site_model import SiteModel
from probsoil.ground.top_up import AddedFill


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class AppliedLoad:
    """Added vertical stress below the centreline or reported point, and what goes with it.

    Attributes
    ----------
    stress : ndarray, shape (n_knot, n_sample, n_point), [kPa]
        At the load knots, before any loss of weight by submergence.
    spread : ndarray, shape (n_sample, n_point), [-]
        Share of the pressure of the full-height fill that reaches each point.
    slope_share : ndarray, shape (n_sample, n_point), [-]
        Stress below the middle of the slope over that below the centreline, full height; for a
        foundation that below the edge (at the middle of a long side) over that below the reported
        point, at most 1; 1 for a wide area.
    height : ndarray, shape (n_knot,) or (n_knot, n_sample), [m]
        Height of fill at the load knots, where it is highest on the site.
    water_depth : ndarray, shape (n_sample,), [m]
        Depth of the water table.
    berm_share : ndarray or None, shape (n_sample, n_point), [-]
        As `slope_share`, below the middle of a berm and its slope; None without berms.
    further : ndarray or None, shape (n_load, n_knot, n_sample, n_point), [kPa]
        What of `stress` each further load adds; None without.
    further_spread : ndarray or None, shape (n_sample, n_point), [-]
        As `spread`, of all further loads together; None without.
    added_fill : AddedFill or None
        Fill that held the level, besides `stress`; None where none did or before it is known.
    """

    stress: FloatArray
    spread: FloatArray
    slope_share: FloatArray
    height: FloatArray
    water_depth: FloatArray
    berm_share: FloatArray | None = None
    further: FloatArray | None = None
    further_spread: FloatArray | None = None
    added_fill: AddedFill | None = None

    @property
    def spread_of_all(self) -> FloatArray:
        """Share of a pressure on every load of the site that reaches each point, (n_sample, n_point), [-]."""
        return self.spread if self.further_spread is None else self.spread + self.further_spread

    def fill_added(self, time: float) -> FloatArray:
        """Return the fill added so that the level stays.

        Parameters
        ----------
        time : float, [years]
            Time.

        Returns
        -------
        thickness : ndarray, shape (n_sample,), [m]
            Zero where none is.
        """
        return np.zeros(len(self.spread)) if self.added_fill is None else self.added_fill.at(time)


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
        Linear between knots; with the fill that held the level.
    """
    stress = between_knots(site, load.stress, time)
    if load.added_fill is None:
        return stress
    pressure = load.added_fill.unit_weight * load.fill_added(time)
    return np.asarray(stress + pressure[:, None] * load.spread)


def between_knots(site: SiteModel, stress: FloatArray, time: float) -> FloatArray:
    """Return a stress given at the load knots at a time between them.

    Parameters
    ----------
    site : SiteModel
        Its load knots.
    stress : ndarray, shape (n_knot, n_sample, n_point), [kPa]
        At the knots.
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
    return np.asarray((1.0 - share) * stress[after - 1] + share * stress[after])


def applied_load(
    site: SiteModel,
    values: Values,
    depth: FloatArray,
    thickness: FloatArray | None = None,
    *,
    thick: BoolArray | None = None,
) -> AppliedLoad:
    """Return the stress that the stages add at given depths.

    Parameters
    ----------
    site : SiteModel
        Shape and stages of the load.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    depth : ndarray, shape (n_sample, n_point), [m]
        Depths of the points.
    thickness : ndarray or None, shape (n_sample, n_point), [m]
        Thickness of ground that each point stands for, about its depth; None for points alone.
    thick : ndarray of bool or None, shape (n_point,), [-]
        Points that stand for so much (a quarter of a granular layer) that the stress of a foundation is
        averaged over it; None for none.

    Returns
    -------
    load : AppliedLoad
        Stress at every knot of the load.

    Notes
    -----
    Between knots the stress is taken as linear in time, also while an embankment rises and its
    top narrows; the base stays the same. A foundation adds nothing above its base; where the base
    cuts through the thickness of a point, the part below it counts; likewise the bottom of ground dug out
    below an embankment or an area. Further loads add their stress at
    the reported point, each from its own place.
    """
    n_sample, berm = depth.shape[0], None
    half = np.zeros_like(depth) if thickness is None else 0.5 * thickness
    places = Places(depth=depth, half=half, thick=None if thickness is None else thick)
    heights = [site.fill_height(float(time)) for time in site.knots]
    pressures = [site.pressure(float(time)) for time in site.knots]
    weight = fill_weight(values, n_sample)
    if site.embankment is not None and site.embankment.pit > 0.0:
        spread, share, stress = _in_pit(site, site.embankment, values, places)
    elif site.embankment is not None:
        spread, share, berm = _embankment_spread(site.embankment, depth, site.offset)
        at_height = {
            key_of(height): _influence(site.embankment, depth, height, site.offset)
            for height in {key_of(one): one for one in heights}.values()
        }
        stress = [weight[:, None] * at_height[key_of(height)] for height in heights]
    else:
        spread, share = np.ones_like(depth), np.ones_like(depth)
        if site.foundation is not None:
            spread, share = _foundation_spread(site.foundation, places)
        elif site.face > 0.0:
            spread = 1.0 - share_above(site.face, depth, half)
        stress = [
            pressure_on_base(site, values, weight * height + pressure, float(time))[:, None] * spread
            for height, pressure, time in zip(heights, pressures, site.knots, strict=True)
        ]
    alone = AppliedLoad(
        stress=np.stack(stress),
        spread=spread,
        slope_share=share,
        height=np.stack(
            np.broadcast_arrays(*(site.greatest_fill_height(float(time)) for time in site.knots))
        ),
        water_depth=column(values, "site.water_table", n_sample),
        berm_share=berm,
    )
    return _with_further_loads(alone, site, values, places)


def _with_further_loads(load: AppliedLoad, site: SiteModel, values: Values, places: Places) -> AppliedLoad:
    if not site.further_loads:
        return load
    n_sample, spread = len(places.depth), np.zeros_like(places.depth)
    stresses = np.empty((len(site.further_loads), *load.stress.shape))
    for place, one in enumerate(site.further_loads):
        weight = fill_weight(values, n_sample, one.address)[:, None]
        by_pressure = one.pressure_influence(places, site.point)
        spread += by_pressure
        for knot, time in enumerate(site.knots.tolist()):
            by_fill = one.fill_influence(places, site.point, site.fill_height(time, one.name))
            pressure = beside_depths(site.pressure(time, one.name))
            stresses[place, knot] = weight * by_fill + pressure * by_pressure
    # what submergence takes off is taken to be the same under every load
    total = load.stress + stresses.sum(axis=0)
    return replace(load, stress=total, further=stresses, further_spread=spread)


def fill_weight(values: Values, n_sample: int, address: str = "load") -> FloatArray:
    """Return the unit weight of the fill.

    Parameters
    ----------
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    n_sample : int, [-]
        Number of realisations.
    address : str
        First part of the load's addresses.

    Returns
    -------
    weight : ndarray, shape (n_sample,), [kN/m3]
        Zero where all stages give a pressure.
    """
    key = f"{address}.fill_unit_weight"
    return column(values, key, n_sample) if key in values else np.zeros(n_sample)


def _embankment_spread(
    shape: Embankment, depth: FloatArray, offset: float
) -> tuple[FloatArray, FloatArray, FloatArray | None]:
    """Return the influence below the centreline, and what of it acts below slope and berm.

    Away from the centreline no strength is asked for, and the shares are ones.
    """
    shape = shape.beside_depths
    middle = 0.5 * shape.base_width
    centre = _influence(shape, depth, shape.full_height, offset)
    if offset != 0.0:
        return centre / shape.full_height, np.ones_like(depth), None

    def share(place: Amount) -> FloatArray:
        return np.clip(_influence(shape, depth, shape.full_height, middle - place) / centre, 0.0, 1.0)

    slope = share(0.5 * (shape.berm_zone + shape.slope_zone))
    berm = share(0.5 * shape.berm_zone) if shape.berm_width > 0.0 else None
    return centre / shape.full_height, slope, berm


def _in_pit(
    site: SiteModel, shape: Embankment, values: Values, places: Places
) -> tuple[FloatArray, FloatArray, list[FloatArray]]:
    """Return spread, share and stress of an embankment on ground that is dug out and replaced by its fill.

    What fills the pit, less the soil and the water that were there, acts on its bottom as a strip as wide as
    the base, and the embankment above ground level on the same bottom; ones for the share below the slope,
    since no slip is looked at.
    """
    loaded, below = below_base(places, shape.pit)
    weight = fill_weight(values, len(below))
    strip = strip_influence(below, site.offset, width=beside_depths(shape.base_width))
    full = _influence(shape, below, shape.full_height, site.offset) + shape.pit * strip
    spread = loaded * full / beside_depths(shape.full_height + shape.pit)
    stress = []
    for time in site.knots.tolist():
        height = site.fill_height(time)
        above = greater(height - shape.pit, 0.0)
        in_pit = pressure_on_base(site, values, weight * height, time) - weight * above
        by_fill = weight[:, None] * _influence(shape, below, above, site.offset)
        stress.append(np.asarray(loaded * (by_fill + in_pit[:, None] * strip)))
    return np.asarray(spread), np.ones_like(spread), stress


def _foundation_spread(shape: Foundation, places: Places) -> tuple[FloatArray, FloatArray]:
    """Return the influence below the reported point, and that below the edge over it."""
    at_depth = replace(places, thick=None)
    spread = foundation_influence(shape, at_depth, *shape.at)
    edge = foundation_influence(shape, at_depth, 0.5 * shape.width, 0.0)
    share = np.clip(edge / np.where(spread > 0.0, spread, 1.0), 0.0, 1.0)
    return foundation_influence(shape, places, *shape.at), np.where(spread > 0.0, share, 1.0)


def share_above_base(base: Amount, points: Points) -> FloatArray:
    """Return the share of each point's thickness that lies above the base of a load.

    Parameters
    ----------
    base : float or ndarray, shape (n_sample,), [m]
        Its depth.
    points : Points
        Depths and thicknesses.

    Returns
    -------
    share : ndarray, shape (n_sample, n_point), [-]
        From 0 below the base to 1 above it.
    """
    return share_above(base, points.depth, 0.5 * points.thickness)


def relief_by_water(
    site: SiteModel,
    load: AppliedLoad,
    time: float,
    settled: FloatArray,
    excess: FloatArray | None = None,
) -> FloatArray:
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
    excess : ndarray or None, shape (n_sample, n_point), [kPa]
        Pore pressure that is still to dissipate when the works begin.

    Returns
    -------
    relief : ndarray, shape (n_sample, n_point), [kPa]
        Weight of the water displaced by what has sunk below the water table, first the ground above
        it and then the fill, spread like the load and never more than it and the initial excess; under
        further loads the ground is taken to have sunk as much.
    """
    if not site.submergence:
        return np.zeros_like(load.spread)
    sunk = np.where(settled > 0.0, settled, 0.0)  # also where there is no number for want of convergence
    submerged = np.minimum(sunk, load.water_depth + site.greatest_fill_height(time) + load.fill_added(time))
    most = stress_at(site, load, time)
    if excess is not None:
        most = most + excess
    return np.minimum(WATER_UNIT_WEIGHT * submerged[:, None] * load.spread_of_all, np.maximum(most, 0.0))


def _influence(shape: Embankment, depth: FloatArray, height: Amount, offset: Amount = 0.0) -> FloatArray:
    """Return the added stress at a height of fill over the unit weight of fill, [m]."""
    trapezia = shape.beside_depths.trapezia(greater(beside_depths(height), 0.0))
    influence = trapezia_influence(depth, offset, trapezia)
    # far beside the toe the two halves cancel but for rounding
    return influence if isinstance(offset, float) and offset == 0.0 else np.maximum(influence, 0.0)
