"""The ground's answer to the works, for many realisations at once."""

from dataclasses import dataclass, field, replace

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.ground.applied_load import LoadedGround, applied_load
from probsoil.ground.bearing import bearing_at_checks
from probsoil.ground.clay_settlement import consolidate_clay, degrees_of_consolidation
from probsoil.ground.consolidation import ConsolidationResult
from probsoil.ground.excavation import kept_above_least
from probsoil.ground.granular_settlement import granular_settlement
from probsoil.ground.level_held import level_held
from probsoil.ground.profile import Values, clay_columns, points_in_situ, sample_size, yield_stresses
from probsoil.ground.secondary_compression import secondary_settlement
from probsoil.ground.site_model import SiteModel
from probsoil.ground.stability import (
    competing_families,
    moving_families,
    slip_at_checks,
    zone_strengths,
)
from probsoil.ground.top_up import added_fill
from probsoil.ground.undrained_distortion import undrained_distortion
from probsoil.ground.works import built, overdrawn

COMPETING = 2e-3


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Response:
    """What the ground does in every realisation, without model error.

    Attributes
    ----------
    times : ndarray, shape (n_time,), [years]
        Time axis.
    settlement : ndarray, shape (n_sample, n_time), [m]
        Settlement of ground level (of the base of a foundation) at the centreline or reported point,
        secondary compression and undrained distortion included.
    secondary : ndarray, shape (n_sample, n_time), [m]
        Part of it that is secondary compression.
    degree : ndarray, shape (n_sample, n_time), [-]
        Degree of consolidation of the clay under the load of each time from the end of the last
        stage on; not a number before it.
    record : ndarray, shape (n_record,), [years]
        Times at which the following is kept.
    degree_at_record : ndarray, shape (n_sample, n_record), [-]
        Degree of consolidation under the load present at those times.
    slip_times : ndarray, shape (n_check,), [years]
        Times at which slip was looked at.
    slip : ndarray, shape (n_sample, n_check), [-]
        Least factor of safety.
    critical_circle : ndarray of int, shape (n_sample, n_check), [-]
        Its index in the family of that time.
    bearing : ndarray, shape (n_sample, n_bearing), [-]
        Least factor of safety of a foundation against bearing failure at the site's `bearing_times`.
    converged : ndarray of bool, shape (n_sample,), [-]
        Whether the consolidation was solved to tolerance with open voids; where not, settlement,
        degree and slip are not numbers.
    voids_closed : ndarray of bool, shape (n_sample,), [-]
        Whether the void ratio fell below 0.05 somewhere, which counts as not converged.
    floored : ndarray of bool, shape (n_sample,), [-]
        Whether the preconsolidation stress was raised to the stress in situ anywhere.
    kappa_clipped : ndarray of bool, shape (n_sample,), [-]
        Whether kappa was brought below lambda in any layer.
    distortion : ndarray, shape (n_sample, n_time), [m]
        Part of the settlement that is undrained distortion of the clay; empty where none is computed.
    uplifted : ndarray of bool, shape (n_sample,), [-]
        Whether pore pressure in situ is no less than the weight of the ground somewhere.
    fill_added : ndarray, shape (n_sample, n_time), [m]
        Thickness of fill added on the centreline so that its level stays; no columns where none is.
    circle : ndarray, shape (n_sample, n_check, 6), [m]
        Where the critical circle lies, where the section of the fill is uncertain; otherwise empty.
    mean_width : ndarray, shape (n_sample,), [m]
        Of the section of an embankment, area over height; 1 for any other load.
    overdrawn : ndarray of bool, shape (n_sample,), [-]
        Whether a stage was to take off more than is there, and took what was; never where nothing that
        is built is uncertain.
    """

    times: FloatArray
    settlement: FloatArray
    secondary: FloatArray
    degree: FloatArray
    record: FloatArray
    degree_at_record: FloatArray
    slip_times: FloatArray
    slip: FloatArray
    critical_circle: IntArray
    converged: BoolArray
    voids_closed: BoolArray
    floored: BoolArray
    kappa_clipped: BoolArray
    bearing: FloatArray = field(default_factory=lambda: np.zeros((0, 0)))
    distortion: FloatArray = field(default_factory=lambda: np.zeros((0, 0)))
    uplifted: BoolArray = field(default_factory=lambda: np.zeros(0, dtype=np.bool_))
    fill_added: FloatArray = field(default_factory=lambda: np.zeros((0, 0)))
    circle: FloatArray = field(default_factory=lambda: np.zeros((0, 0, 6)))
    overdrawn: BoolArray = field(default_factory=lambda: np.zeros(0, dtype=np.bool_))
    mean_width: FloatArray = field(default_factory=lambda: np.ones(1))


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class GroundState:
    """Everything behind a `Response`, for a calculation sheet.

    Attributes
    ----------
    ground : LoadedGround
        The ground before loading and the stress that is added.
    consolidation : ConsolidationResult
        Answer of the clay.
    granular_settlement : ndarray, shape (n_sample, n_time), [m]
        Settlement of the granular layers.
    strength : ndarray, shape (n_record, n_sample, 3, n_point), [kPa]
        Undrained strength at the recorded times beyond the toe, under the slope and under the
        crest, with the mode factor; zero in granular layers.
    strength_before : ndarray, shape (n_sample, n_point), [kPa]
        The same before loading.
    response : Response
        The answer.
    """

    ground: LoadedGround
    consolidation: ConsolidationResult
    granular_settlement: FloatArray
    strength: FloatArray
    strength_before: FloatArray
    response: Response


def respond(site: SiteModel, values: Values) -> Response:
    """Return what the ground does, for every realisation.

    Parameters
    ----------
    site : SiteModel
        What no realisation changes.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address, each in its own unit.

    Returns
    -------
    response : Response
        Settlement, degree of consolidation and slip safety.
    """
    return ground_state(site, values).response


def ground_state(site: SiteModel, values: Values) -> GroundState:
    """Return what the ground does with all that led to it.

    Parameters
    ----------
    site : SiteModel
        What no realisation changes.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address, each in its own unit.

    Returns
    -------
    state : GroundState
        Stresses, strengths and the response.

    Notes
    -----
    The consolidation is solved below the centreline. Under the middle of the slope the clay is
    taken to have consolidated to the same degree at each depth under its smaller stress; beyond
    the toe nothing changes. Granular layers settle at once with the added stress over their
    constrained modulus; so does clay that has an undrained modulus, by distortion at constant volume.
    """
    n_sample = sample_size(values)
    site = built(site, values, n_sample)
    points = points_in_situ(site, values, n_sample)
    columns = clay_columns(site, values, n_sample)
    yield_stress, floored = yield_stresses(site, values, points)
    clay = np.array([site.layers[index].is_clay for index in points.layer])
    load = applied_load(site, values, points.depth, points.thickness, thick=~clay)
    if site.excavates:
        load = replace(load, stress=kept_above_least(load.stress, points.stress))
    ground = LoadedGround(points=points, columns=columns, yield_stress=yield_stress, clay=clay, load=load)
    result = consolidate_clay(site, values, ground)
    ground, granular = _with_added_fill(site, values, ground, result)
    secondary = secondary_settlement(site, values, ground, result)
    settlement, distortion = result.settlement + granular + secondary, np.zeros((0, 0))
    if site.distorts:
        distortion = undrained_distortion(site, values, ground)
        settlement = settlement + distortion
    strength, before = zone_strengths(site, values, ground, result)
    slip, critical, circle = slip_at_checks(site, values, ground, strength)
    slip[~result.converged] = np.nan
    bearing = bearing_at_checks(site, values, ground, strength)
    bearing[~result.converged] = np.nan
    at_record, after_last = degrees_of_consolidation(site, ground, result)
    response = Response(
        times=site.times,
        settlement=settlement,
        distortion=distortion,
        secondary=secondary,
        degree=after_last,
        record=site.record,
        degree_at_record=at_record,
        slip_times=site.slip_times,
        slip=slip,
        critical_circle=critical,
        circle=np.zeros((0, 0, 6)) if circle is None else circle,
        mean_width=_width(site, n_sample),
        overdrawn=overdrawn(site, values, n_sample),
        bearing=bearing,
        fill_added=_fill_added(ground, result),
        converged=result.converged,
        voids_closed=result.voids_closed,
        floored=np.asarray(floored.any(axis=1)),
        kappa_clipped=np.asarray(columns.kappa_clipped.any(axis=1)),
        uplifted=points.uplifted,
    )
    return GroundState(
        ground=ground,
        consolidation=result,
        granular_settlement=granular,
        strength=strength,
        strength_before=before,
        response=response,
    )


def _with_added_fill(
    site: SiteModel, values: Values, ground: LoadedGround, result: ConsolidationResult
) -> tuple[LoadedGround, FloatArray]:
    """Return the ground with the fill that held the level, and the settlement of the granular layers."""
    granular = granular_settlement(site, values, ground)
    held = level_held(site, values, ground)
    if held is None:
        return ground, granular
    added = added_fill(held, site.times, result.settlement, granular)
    load = replace(ground.load, added_fill=added)
    return replace(ground, load=load), granular + held.granular_share[:, None] * added.thickness


def _fill_added(ground: LoadedGround, result: ConsolidationResult) -> FloatArray:
    if ground.load.added_fill is None:
        return np.zeros((result.converged.size, 0))
    return np.where(result.converged[:, None], ground.load.added_fill.thickness, np.nan)


def _width(site: SiteModel, n_sample: int) -> FloatArray:
    """Mean width of the section of every realisation, [m]."""
    width = 1.0 if site.embankment is None else site.embankment.mean_width
    return np.full(n_sample, width, dtype=np.float64)


def screened(site: SiteModel, pilot: Values, *, within: float = COMPETING) -> SiteModel:
    """Return the site with only those slip circles that compete in a set of pilot realisations.

    Parameters
    ----------
    site : SiteModel
        As laid out.
    pilot : mapping of str to ndarray, shape (n_sample,), or float
        Values of every quantity, spread more widely than the realisations to come; or, with
        ``within = 0``, the very values to be computed.
    within : float, [-]
        A circle stays if its factor comes this close (as a share) to the least one anywhere.

    Returns
    -------
    site : SiteModel
        The same, with smaller families.

    Notes
    -----
    Which circle is critical changes little between realisations, so most of a dense family is
    never close. What the screening may have lost is part of the discretisation error that a
    campaign reports, measured against a full and denser family.
    """
    if not site.layouts:
        return site
    state = ground_state(replace(site, slip_times=site.slip_times[:0]), pilot)
    here = built(site, pilot, sample_size(pilot))
    if here.section_varies:
        moving = moving_families(here, pilot, state.ground, state.strength, within=within)
        return replace(site, moving=moving)
    families = competing_families(here, pilot, state.ground, state.strength, within=within)
    return replace(site, families=families)
