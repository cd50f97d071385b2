"""Consolidation of the clay layers of a site and how far it has gone."""

from dataclasses import replace

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.applied_load import (
    LoadedGround,
    relief_by_water,
    share_above_base,
    stress_at,
)
from probsoil.ground.compression import void_ratio_lost
from probsoil.ground.conductivity import (
    Conductivity,
    conductivity_from_cv,
    conductivity_from_permeability,
)
from probsoil.ground.consolidation import (
    ClayState,
    ConsolidationResult,
    LoadHistory,
    Submergence,
    consolidate,
)
from probsoil.ground.constants import SECONDS_PER_YEAR
from probsoil.ground.drain_flow import radial_drainage
from probsoil.ground.level_held import level_held
from probsoil.ground.profile import Values, column
from probsoil.ground.rows import chosen, row_sum
from probsoil.ground.site_model import SiteModel

_OPEN_ABOVE_BASE = np.log(1e4)  # ln of how much more easily water passes above a foundation's base
_NOTHING = 1e-9  # m; a settlement below it counts as finished


def consolidate_clay(site: SiteModel, values: Values, ground: LoadedGround) -> ConsolidationResult:
    """Return the consolidation of all clay layers below the centreline.

    Parameters
    ----------
    site : SiteModel
        Cells, time axis and recorded times.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading and the added stress.

    Returns
    -------
    result : ConsolidationResult
        Settlement of the clay through time and stresses at the recorded times.
    """
    cells, clay, load = site.cells, ground.clay, ground.load
    state = _clay_state(site, ground)
    spread = chosen(load.spread_of_all, clay)
    height = np.broadcast_to(np.atleast_2d(load.height.T).T, (site.knots.size, len(spread)))
    submergence = Submergence(spread=spread, height=height, water_depth=load.water_depth)
    history = LoadHistory(
        time=site.knots,
        stress=_added_total(ground),
        submergence=submergence if site.submergence else None,
        level_held=level_held(site, values, ground),
    )
    flow = _conductivity(site, values, state)
    if site.foundation is not None or site.face > 0.0:
        above = chosen(share_above_base(site.base, ground.points), clay)
        flow = replace(flow, log_value=flow.log_value + _OPEN_ABOVE_BASE * above)
    if site.drains is not None:
        flow = replace(flow, drains=radial_drainage(site, site.drains, values, ground))
    return consolidate(state, flow, cells, history, times=site.times, record=site.record)


def _added_total(ground: LoadedGround) -> FloatArray:
    """Return by how much total stress less steady pore pressure exceeds the effective stress in situ.

    Excess pore pressure that is there before the works acts like a load that stands from the start.
    """
    added, excess = chosen(ground.load.stress, ground.clay), ground.points.excess
    return added if excess is None else added + chosen(excess, ground.clay)


def _clay_state(site: SiteModel, ground: LoadedGround) -> ClayState:
    layer = site.cells.layer
    return ClayState(
        thickness=chosen(ground.points.thickness, ground.clay),
        stress=chosen(ground.points.stress, ground.clay),
        yield_stress=chosen(ground.yield_stress, ground.clay),
        void_ratio=chosen(ground.columns.void_ratio, layer),
        lam=chosen(ground.columns.lam, layer),
        kap=chosen(ground.columns.kap, layer),
    )


def _conductivity(site: SiteModel, values: Values, state: ClayState) -> Conductivity:
    log_value, decline = np.zeros_like(state.lam), np.zeros_like(state.lam)
    follows, power = np.zeros(site.cells.n_cell), np.ones(site.cells.n_cell, dtype=np.int64)
    for index, layer in enumerate(site.layers):
        mine = site.cells.layer == index
        if not layer.is_clay:
            continue
        first = column(values, f"{layer.name}.{layer.flow}", state.lam.shape[0])[:, None]
        void_ratio = state.void_ratio[:, mine]
        if layer.flow == "cv":
            log_value[:, mine] = conductivity_from_cv(first, state.lam[:, mine], void_ratio)
            follows[mine], power[mine] = 1.0, 2
        else:
            index_of_change = column(values, f"{layer.name}.ck", state.lam.shape[0])[:, None]
            log_value[:, mine], decline[:, mine] = conductivity_from_permeability(
                first * SECONDS_PER_YEAR, index_of_change, void_ratio
            )
    return Conductivity(log_value=log_value, decline=decline, follows=follows, power=power)


def cell_settlement(site: SiteModel, ground: LoadedGround, result: ConsolidationResult) -> FloatArray:
    """Return the settlement of every cell at the end of the time axis.

    Parameters
    ----------
    site : SiteModel
        Cells; its last recorded time is the horizon.
    ground : LoadedGround
        The ground before loading.
    result : ConsolidationResult
        Consolidation of the clay.

    Returns
    -------
    settlement : ndarray, shape (n_sample, n_cell), [m]
        Shortening of each cell.
    """
    return shortening(site, ground, result.stress[:, -1], result.yield_stress[:, -1])


def shortening(
    site: SiteModel, ground: LoadedGround, stress: FloatArray, yield_stress: FloatArray
) -> FloatArray:
    """Return the compression of every cell at an effective stress.

    Parameters
    ----------
    site : SiteModel
        Cells.
    ground : LoadedGround
        The ground before loading.
    stress : ndarray, shape (n_sample, n_cell), [kPa]
        Effective vertical stress.
    yield_stress : ndarray, shape (n_sample, n_cell), [kPa]
        Preconsolidation stress reached so far.

    Returns
    -------
    shortening : ndarray, shape (n_sample, n_cell), [m]
        Thickness times strain.
    """
    state = _clay_state(site, ground)
    lost = void_ratio_lost(
        stress,
        yield_stress,
        initial_stress=state.stress,
        initial_yield_stress=state.yield_stress,
        slopes=(state.lam, state.kap),
    )
    return np.asarray(state.thickness / (1.0 + state.void_ratio) * lost)


def settlement_when_done(
    site: SiteModel, ground: LoadedGround, yield_stress: FloatArray, added: FloatArray
) -> FloatArray:
    """Return the settlement of the clay once all excess pore pressure has gone.

    Parameters
    ----------
    site : SiteModel
        Cells.
    ground : LoadedGround
        The ground before loading.
    yield_stress : ndarray, shape (n_sample, n_cell), [kPa]
        Preconsolidation stress reached so far.
    added : ndarray, shape (n_sample, n_cell), [kPa]
        Added stress that stays.

    Returns
    -------
    settlement : ndarray, shape (n_sample,), [m]
        Sum over the cells of thickness times strain.
    """
    initial = chosen(ground.points.stress, ground.clay)
    return row_sum(shortening(site, ground, initial + added, yield_stress))


def added_stress_when_done(
    site: SiteModel, ground: LoadedGround, time: float, settled: FloatArray
) -> FloatArray:
    """Return what the effective stress gains under the load of a time once all excess pore pressure has gone.

    Parameters
    ----------
    site : SiteModel
        Stages.
    ground : LoadedGround
        Added stress.
    time : float, [years]
        Time.
    settled : ndarray, shape (n_sample,), [m]
        Settlement, for what submergence takes off.

    Returns
    -------
    added : ndarray, shape (n_sample, n_cell), [kPa]
        Below the centreline: what the load leaves, and the excess pressure from before the works.
    """
    excess = ground.points.excess
    gain = stress_at(site, ground.load, time) - relief_by_water(site, ground.load, time, settled, excess)
    return chosen(gain if excess is None else gain + excess, ground.clay)


def final_added_stress(site: SiteModel, ground: LoadedGround, result: ConsolidationResult) -> FloatArray:
    """Return what the effective stress gains after the last stage once all excess pore pressure has gone.

    Parameters
    ----------
    site : SiteModel
        Stages.
    ground : LoadedGround
        Added stress.
    result : ConsolidationResult
        Consolidation of the clay, for what submergence takes off.

    Returns
    -------
    added : ndarray, shape (n_sample, n_cell), [kPa]
        With the settlement at the horizon.
    """
    return added_stress_when_done(site, ground, site.horizon, np.nan_to_num(result.settlement[:, -1]))


def by_segment(site: SiteModel, of_cells: FloatArray) -> FloatArray:
    """Return the sums over the cells of every drainage segment.

    Parameters
    ----------
    site : SiteModel
        Cells.
    of_cells : ndarray, shape (n_sample, n_cell), [m]
        What is to be summed.

    Returns
    -------
    sums : ndarray, shape (n_sample, n_segment), [m]
        One for each segment.
    """
    cells = site.cells
    parts = [of_cells[:, cells.segment == one] for one in range(cells.n_segment)]
    return np.stack([row_sum(part) for part in parts], axis=1)


def segment_settlement_when_done(
    site: SiteModel, ground: LoadedGround, result: ConsolidationResult
) -> FloatArray:
    """Return the settlement of every drainage segment once all excess pore pressure has gone.

    Parameters
    ----------
    site : SiteModel
        Cells and stages.
    ground : LoadedGround
        The ground before loading and the added stress.
    result : ConsolidationResult
        Consolidation of the clay.

    Returns
    -------
    settlement : ndarray, shape (n_sample, n_segment), [m]
        Under the load that stays after the last stage.
    """
    final = chosen(ground.points.stress, ground.clay) + final_added_stress(site, ground, result)
    return by_segment(site, shortening(site, ground, final, result.yield_stress[:, -1]))


def degrees_of_consolidation(
    site: SiteModel, ground: LoadedGround, result: ConsolidationResult
) -> tuple[FloatArray, FloatArray]:
    """Return the degree of consolidation at the recorded times and after the last stage.

    Parameters
    ----------
    site : SiteModel
        Time axis and recorded times.
    ground : LoadedGround
        The ground before loading and the added stress.
    result : ConsolidationResult
        Consolidation of the clay.

    Returns
    -------
    at_record : ndarray, shape (n_sample, n_record), [-]
        Under the load present at each recorded time.
    after_last : ndarray, shape (n_sample, n_time), [-]
        Under the load that stays, from the end of the last stage on; not a number before.

    Notes
    -----
    Settlement of the clay so far over the settlement that the load then present, and what excess pore
    pressure there was before the works, would reach in the end, between 0 and 1; where the ground is
    already lower than that (after a removal of load) it is 1.
    """
    at_record = np.empty((result.settlement.shape[0], site.record.size))
    done_last = np.empty(result.settlement.shape[0])
    final = result.settlement[:, -1]
    for slot, time in enumerate(site.record):
        now = result.settlement[:, np.searchsorted(site.times, time)]
        done = _done(site, ground, result.yield_stress[:, slot], float(time), now)
        at_record[:, slot] = _degree(now, done)
        if time == site.last_load_change:
            done_last = _done(site, ground, result.yield_stress[:, slot], float(time), final)
    after_last = _degree(result.settlement, done_last[:, None])
    after_last[:, site.times < site.last_change] = np.nan
    return at_record, after_last


def _done(
    site: SiteModel, ground: LoadedGround, yield_stress: FloatArray, time: float, settled: FloatArray
) -> FloatArray:
    added = added_stress_when_done(site, ground, time, settled)
    return settlement_when_done(site, ground, yield_stress, added)


def _degree(settled: FloatArray, done: FloatArray) -> FloatArray:
    finished = (done <= _NOTHING) | (settled >= done)
    ratio = settled / np.where(done > _NOTHING, done, 1.0)
    return np.asarray(np.where(finished, 1.0, np.clip(ratio, 0.0, 1.0)), dtype=np.float64)
