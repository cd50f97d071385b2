"""Strength of the ground through the stages and the safety against a slip that it gives."""

from collections.abc import Iterator

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.ground.applied_load import AppliedLoad, LoadedGround, stress_at
from probsoil.ground.consolidation import ConsolidationResult
from probsoil.ground.profile import Values, column
from probsoil.ground.rows import chosen
from probsoil.ground.site_model import SiteModel
from probsoil.ground.slip import FillStrength, GroundStrength, competing_circles, slip_safety
from probsoil.ground.slip_circles import CircleFamily, circle_family
from probsoil.ground.slip_moving import MovingFamily
from probsoil.ground.slip_works import families_on_sections, slip_on_sections
from probsoil.ground.undrained_strength import undrained_shear_strength

_BEYOND_TOE = 0  # the zone in which no load changes the stress
_TINY = 1e-12  # kPa; the least pressure that is divided by


def zone_strengths(
    site: SiteModel, values: Values, ground: LoadedGround, result: ConsolidationResult
) -> tuple[FloatArray, FloatArray]:
    """Return the undrained strength of the clay in three zones at the recorded times.

    Parameters
    ----------
    site : SiteModel
        Recorded times.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading and the added stress.
    result : ConsolidationResult
        Stresses below the centreline.

    Returns
    -------
    strength : ndarray, shape (n_record, n_sample, n_zone, n_point), [kPa]
        Beyond the toe, under the slope, under the crest and, with berms, under a berm; zero in
        granular layers.
    before : ndarray, shape (n_sample, n_point), [kPa]
        Before loading.

    Notes
    -----
    With the mode factor of the site, which brings triaxial compression to the average along a
    slip surface. Under the crest the stresses are those below the centreline; under the slope and
    under a berm their gain is reduced in proportion to the elastic stress there; beyond the toe
    they do not change. What excess pore pressure there was before the works dissipates in full under
    slope and berm; that it does so beyond the toe is left out, on the safe side.
    """
    n_sample = ground.points.depth.shape[0]
    mode = column(values, "site.mode_factor", n_sample)[:, None]
    clay, n_point = ground.clay, ground.points.layer.size
    layer = ground.points.layer[clay]
    ratio = chosen(ground.columns.strength_ratio, layer)
    exponent = chosen(ground.columns.strength_exponent, layer)
    stress0, yield0 = chosen(ground.points.stress, clay), chosen(ground.yield_stress, clay)
    gains = zone_gains(site, ground, float(site.record[0]))
    before = np.zeros((n_sample, n_point))
    before[:, clay] = mode * undrained_shear_strength(stress0, yield0, ratio, exponent)
    strength = np.zeros((site.record.size, len(gains), n_sample, n_point))
    strength[:, _BEYOND_TOE] = before
    for slot, time in enumerate(site.record):
        if slot and ground.points.excess is not None:
            gains = zone_gains(site, ground, float(time))
        for zone, (gain, kept) in enumerate(gains):
            if zone == _BEYOND_TOE:
                continue
            # a weighted mean rather than a gain, so that a stress near zero stays above zero
            stress = (1.0 - gain) * stress0 + gain * result.stress[:, slot]
            largest = (1.0 - kept) * stress0 + kept * result.yield_stress[:, slot]
            past = np.maximum(np.maximum(yield0, largest), stress)
            su = undrained_shear_strength(stress, past, ratio, exponent)
            strength[slot, zone][:, clay] = mode * su
    return strength.swapaxes(1, 2), before


def _zone_shares(load: AppliedLoad) -> list[FloatArray]:
    """Return the share of the stress below the centreline that acts in each zone."""
    shares = [np.zeros_like(load.slope_share), load.slope_share, np.ones_like(load.slope_share)]
    return shares if load.berm_share is None else [*shares, load.berm_share]


def zone_gains(site: SiteModel, ground: LoadedGround, time: float) -> list[tuple[FloatArray, FloatArray]]:
    """Return what share of the gain of stress below the centreline every zone has.

    Parameters
    ----------
    site : SiteModel
        Load knots.
    ground : LoadedGround
        The ground before loading and the added stress.
    time : float, [years]
        Time.

    Returns
    -------
    gains : list of (ndarray, ndarray), shape (n_sample, n_cell), [-]
        For every zone the share of the effective stress gained so far, and that of the largest so far.

    Notes
    -----
    The same degree of consolidation is taken at one depth everywhere: with the initial excess ui, the added
    stress q and the zone's share c of it, the gain is (ui + c q)/(ui + q) of that below the centreline, and
    c where there is no ui. Beyond the toe c is zero, and so is the gain.
    """
    clay, excess = ground.clay, ground.points.excess
    shares = [chosen(share, clay) for share in _zone_shares(ground.load)]
    if excess is None:
        return [(share, share) for share in shares]
    underway = chosen(excess, clay)
    so_far = chosen(ground.load.stress[site.knots <= time].max(axis=0), clay)
    now = np.maximum(chosen(stress_at(site, ground.load, time), clay), 0.0)
    most = np.maximum(so_far, now)
    beside = [
        tuple(
            np.where(underway > 0.0, (underway + share * added) / np.maximum(underway + added, _TINY), share)
            for added in (now, most)
        )
        for share in shares[1:]
    ]
    return [(shares[0], shares[0]), *((gain, kept) for gain, kept in beside)]


def slip_at_checks(
    site: SiteModel, values: Values, ground: LoadedGround, strength: FloatArray
) -> tuple[FloatArray, IntArray, FloatArray | None]:
    """Return the least factor of safety at every time at which slip is looked at.

    Parameters
    ----------
    site : SiteModel
        Times and families of circles; where it holds none, all circles are laid out afresh.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        Points and added stress.
    strength : ndarray, shape (n_record, n_sample, n_zone, n_point), [kPa]
        Undrained strength at the recorded times.

    Returns
    -------
    factor : ndarray, shape (n_sample, n_check), [-]
        Least factor of safety.
    critical : ndarray of int, shape (n_sample, n_check), [-]
        Index of the circle in the family of that time.
    position : ndarray or None, shape (n_sample, n_check, 6), [m]
        Where the critical circle lies, where the section is that of each realisation.
    """
    n_sample, n_check = ground.points.depth.shape[0], site.slip_times.size
    factor, critical = np.empty((n_sample, n_check)), np.zeros((n_sample, n_check), dtype=np.int64)
    if site.section_varies:
        sections = slip_sections(site, values, ground, strength)
        factor, position = slip_on_sections(site, sections, n_sample)
        return factor, critical, position
    for check, (here, fill) in enumerate(slip_sections(site, values, ground, strength)):
        family = site.families[check] if site.families else circle_family(site.layouts[check])
        factor[:, check], critical[:, check] = slip_safety(here, fill, family)
    return factor, critical, None


def competing_families(
    site: SiteModel, values: Values, ground: LoadedGround, strength: FloatArray, *, within: float
) -> tuple[CircleFamily, ...]:
    """Return the circles that come near to being critical in some of the given realisations.

    Parameters
    ----------
    site : SiteModel
        Times and families of circles.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        Points and added stress.
    strength : ndarray, shape (n_record, n_sample, n_zone, n_point), [kPa]
        Undrained strength at the recorded times.
    within : float, [-]
        How far above the least factor a circle may be, as a share of it.

    Returns
    -------
    families : tuple of CircleFamily
        One for each time at which slip is looked at.
    """
    sections = slip_sections(site, values, ground, strength)
    return tuple(
        competing_circles(here, fill, layout, within=within)
        for (here, fill), layout in zip(sections, site.layouts, strict=True)
    )


def moving_families(
    site: SiteModel, values: Values, ground: LoadedGround, strength: FloatArray, *, within: float
) -> tuple[MovingFamily, ...]:
    """Return the same where the section of the fill is that of each realisation.

    Parameters
    ----------
    site : SiteModel
        With what is built in every realisation.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        Points and added stress.
    strength : ndarray, shape (n_record, n_sample, n_zone, n_point), [kPa]
        Undrained strength at the recorded times.
    within : float, [-]
        How far above the least factor a circle may be, as a share of it.

    Returns
    -------
    families : tuple of MovingFamily
        One for each time at which slip is looked at.
    """
    sections = slip_sections(site, values, ground, strength)
    return families_on_sections(site, sections, len(ground.points.depth), within=within)


def slip_sections(
    site: SiteModel, values: Values, ground: LoadedGround, strength: FloatArray
) -> Iterator[tuple[GroundStrength, FillStrength]]:
    """Yield the strength of ground and fill at every time at which slip is looked at.

    Parameters
    ----------
    site : SiteModel
        Times at which slip is looked at.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        Points and added stress.
    strength : ndarray, shape (n_record, n_sample, n_zone, n_point), [kPa]
        Undrained strength at the recorded times.

    Yields
    ------
    ground, fill : GroundStrength, FillStrength
        At one time.
    """
    if site.slip_times.size == 0:
        return
    n_sample = ground.points.depth.shape[0]
    tangent = _tangents(site, values, ground)
    for time in site.slip_times:
        slot = int(np.searchsorted(site.record, time))
        fill = FillStrength(
            unit_weight=column(values, "load.fill_unit_weight", n_sample),
            friction_angle=column(values, "load.fill_phi", n_sample),
            cohesion=column(values, "load.fill_cohesion", n_sample),
            traffic=column(values, "load.traffic", n_sample) if time >= site.traffic_from else None,
            heavier=heavier_by_added_fill(site, ground.load, float(time)),
        )
        here = GroundStrength(
            boundary=ground.points.boundary,
            point_layer=ground.points.layer,
            point_depth=ground.points.depth,
            cohesive=strength[slot],
            frictional=_frictional(site, ground, tangent, float(time)),
        )
        yield here, fill


def heavier_by_added_fill(site: SiteModel, load: AppliedLoad, time: float) -> FloatArray | None:
    """Return how much more the fill weighs by what was added to hold its level.

    Parameters
    ----------
    site : SiteModel
        For the height of fill.
    load : AppliedLoad
        With the fill that was added.
    time : float, [years]
        A time with fill on the ground.

    Returns
    -------
    ratio : ndarray or None, shape (n_sample,), [-]
        Thickness of the fill over its height above the ground as it was; None where none is added.

    Notes
    -----
    The fill that was added lies below the section, in the hollow that the ground has sunk by, and is
    taken to be everywhere in the same proportion to the fill above it. Its whole weight counts, also
    below the water table.
    """
    if load.added_fill is None:
        return None
    height = site.fill_height(time)
    if isinstance(height, np.ndarray):  # where no fill is left there is nothing to slip
        height = np.where(height > 0.0, height, 1.0)
    return np.asarray(1.0 + load.fill_added(time) / height)


def _tangents(site: SiteModel, values: Values, ground: LoadedGround) -> FloatArray:
    """Return tan(phi) at every point, zero in clay."""
    n_sample = ground.points.depth.shape[0]
    tangent = np.zeros((n_sample, ground.points.layer.size))
    for index, layer in enumerate(site.layers):
        if not layer.is_clay:
            angle = column(values, f"{layer.name}.phi", n_sample)
            tangent[:, ground.points.layer == index] = np.tan(np.radians(angle))[:, None]
    return tangent


def _frictional(site: SiteModel, ground: LoadedGround, tangent: FloatArray, time: float) -> FloatArray | None:
    if all(layer.is_clay for layer in site.layers):
        return None
    added = stress_at(site, ground.load, time)
    shares = _zone_shares(ground.load)
    return np.stack([(ground.points.stress + share * added) * tangent for share in shares], axis=1)
