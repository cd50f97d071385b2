"""What a calculation sheet says of time, drainage segments, drains, strength and slip."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from probsoil.assessment.sheet_run import SheetRun
from probsoil.assessment.sheet_sublayers import PointState, Sublayer
from probsoil.ground.clay_settlement import (
    added_stress_when_done,
    by_segment,
    segment_settlement_when_done,
    settlement_when_done,
)
from probsoil.ground.drain_flow import drain_terms
from probsoil.ground.secondary_compression import CreepSpell, end_of_primary
from probsoil.ground.slip_moments import SlipMoments, critical_moments
from probsoil.ground.stability import zone_gains

ZONES = ("beyond_toe", "under_slope", "under_crest", "under_berm")
"""Zones of strength in their order; the last one only with berms."""

_SLOPE, _CREST = 1, 2
_ROUND = {1, 2, 5}


def time_rows(run: SheetRun) -> list[dict[str, Any]]:
    """Return settlement and degree of consolidation at the times that matter.

    Parameters
    ----------
    run : SheetRun
        The computation.

    Returns
    -------
    rows : list of dict
        At the starts and ends of stages, the times of limits, round times (1, 2, 5, 10 years and so on)
        and the horizon: load, the parts of the settlement [m], the settlement of the clay once the excess
        pressure under that load is gone [m], and the degree [-].
    """
    site, state = run.site, run.state
    clay = state.consolidation.settlement[0]
    rows = []
    for index, time in enumerate(site.times.tolist()):
        if time != 0.0 and not _wanted(run, time):
            continue
        row = {
            "time": time,
            "fill_height": site.fill_height(time),
            "fill_added": run.fill_added(time),
            "surface_pressure": run.surface_pressure(time),
            "clay": float(clay[index]),
            "granular": float(state.granular_settlement[0, index]),
            "secondary": float(state.response.secondary[0, index]),
            "distortion": float(state.response.distortion[0, index]) if site.distorts else 0.0,
            "settlement": float(state.response.settlement[0, index]),
        }
        rows.append({**row, **_consolidation(run, time)})
    return rows


def _consolidation(run: SheetRun, time: float) -> dict[str, float | None]:
    if time == 0.0:
        return {"clay_when_done": None, "degree": None}
    slot, ground, result = run.slot(time), run.state.ground, run.state.consolidation
    settled = result.settlement[:, slot + 1]  # the first time is the start
    to_come = added_stress_when_done(run.site, ground, time, settled)
    done = settlement_when_done(run.site, ground, result.yield_stress[:, slot], to_come)
    return {
        "clay_when_done": float(done[0]),
        "degree": float(run.state.response.degree_at_record[0, slot]),
    }


def _wanted(run: SheetRun, time: float) -> bool:
    given = {run.site.horizon, *run.site.knots.tolist()}
    for limit in run.scenario.limits:
        at, between = getattr(limit, "at", None), getattr(limit, "between", None)
        given |= {at} if at is not None else set(between or ())
    mantissa = time / 10.0 ** np.floor(np.log10(time))
    return time in given or (time >= 0.5 and any(np.isclose(mantissa, figure) for figure in _ROUND))


def segment_rows(run: SheetRun, state: PointState) -> list[dict[str, Any]]:
    """Return primary and secondary settlement of every drainage segment.

    Parameters
    ----------
    run : SheetRun
        The computation.
    state : PointState
        Secondary compression of every point.

    Returns
    -------
    rows : list of dict
        Depths [m], settlement of the clay at the horizon and when done [m], the degree [-], when primary
        consolidation ends after the last stage [years] (None where 95 % is not reached), and secondary
        compression at the horizon [m] with the spells it is made of: t0, tp and their end [years],
        settlement per decade of time [m] and number of decades [-].
    """
    site, ground, result = run.site, run.state.ground, run.state.consolidation
    points, cells = ground.points, site.cells
    state_done = segment_settlement_when_done(site, ground, result)[0]
    end = end_of_primary(site, ground, result)[0]
    depth, half = points.depth[0, ground.clay], 0.5 * points.thickness[0, ground.clay]
    rows = []
    for segment in range(cells.n_segment):
        mine = cells.segment == segment
        now, done = float(result.by_segment[0, segment, -1]), float(state_done[segment])
        rows.append(
            {
                "segment": segment + 1,
                "layers": [site.layers[index].name for index in np.unique(cells.layer[mine])],
                "top": float((depth - half)[mine][0]),
                "bottom": float((depth + half)[mine][-1]),
                "drains_at": _faces(cells.drained[mine]),
                "settlement": now,
                "settlement_when_done": done,
                "degree": 1.0 if now >= done else now / done,
                "end_of_primary": float(end[segment]) if np.isfinite(end[segment]) else None,
                **_creep(run, state.spells, segment),
            }
        )
    return rows


def _faces(drained: np.ndarray) -> str:
    if drained.sum() > 1.0:
        return "top and bottom"
    return "top" if drained[0] else "bottom" if drained[-1] else "nowhere"


def _creep(run: SheetRun, spells: Sequence[CreepSpell], segment: int) -> dict[str, Any]:
    """Return the numbers of secondary compression of one segment, spell by spell."""
    rows = [_spell(run, spells, index, segment) for index in range(len(spells))]
    crept = [row for row in rows if row["secondary"] > 0.0]
    return {"creep": crept, "secondary": sum(row["secondary"] for row in crept)}


def _spell(run: SheetRun, spells: Sequence[CreepSpell], index: int, segment: int) -> dict[str, Any]:
    spell, horizon = spells[index], run.site.horizon
    rate = float(by_segment(run.site, spell.per_cell)[0, segment])
    decades = float(spell.decades(np.array([horizon]), segment)[0, 0])
    return {
        "after": run.site.changes[index].name,
        "origin": float(spell.origin[0, segment]),
        "begin": float(spell.begin[0, segment]),
        "until": min(spell.end, horizon),
        "creep_per_decade": rate,
        "decades": decades,
        "secondary": rate * decades,
    }


def drain_record(run: SheetRun, rows: list[Sublayer]) -> dict[str, Any] | None:
    """Return the numbers of vertical drains.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of Sublayer
        The sub-layers.

    Returns
    -------
    record : dict or None
        Geometry [m], mu of spacing and smear [-], and at every clay sub-layer that drains reach the
        resistance term and the whole mu [-]; None without drains.
    """
    form, given = run.site.drains, run.scenario.drains
    if form is None or given is None:
        return None
    terms = drain_terms(run.site, form, run.values, run.state.ground)
    cell_of_point = np.cumsum(run.state.ground.clay) - 1
    reached = []
    for row in rows:
        cell = int(cell_of_point[row.nearest])
        if run.site.layers[row.layer].is_clay and terms.reached[0, cell] > 0.0:
            resistance, factor = float(terms.resistance[0, cell]), float(terms.factor[0, 0])
            reached.append(
                {
                    "sublayer": row.number,
                    "depth": float(run.state.ground.points.depth[0, row.nearest]),
                    "share_reached": float(terms.reached[0, cell]),
                    "permeability_ratio": float(terms.ratio[0, cell]),
                    "permeability": float(terms.permeability[0, cell]),
                    "resistance": resistance,
                    "factor": factor + resistance,
                }
            )
    return {
        "pattern": given.pattern,
        "spacing": float(run.at.get("drains.spacing", given.spacing.expectation)),
        "influence_diameter": form.influence_diameter,
        "diameter": form.diameter,
        "spacing_ratio": form.influence_diameter / form.diameter,
        "smear_ratio": form.smear_ratio,
        "smear_permeability_ratio": float(run.at["drains.smear_kh_ks"]),
        "bottom": form.bottom,
        "discharge_capacity": form.discharge_capacity,
        "installed": form.installed,
        "factor": float(terms.factor[0, 0]),
        "rows": reached,
    }


def strength_rows(run: SheetRun, rows: list[Sublayer]) -> list[dict[str, Any]]:
    """Return undrained strength before and after every stage at the cell nearest to each row's middle.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of Sublayer
        The sub-layers.

    Returns
    -------
    rows : list of dict
        One per clay sub-layer: S, exponent and mode factor [-], strength before [kPa], and at the end of
        every stage stress, preconsolidation and strength under the crest and under the slope [kPa].
    """
    return [_strength_row(run, row) for row in rows if run.site.layers[row.layer].is_clay]


def _strength_row(run: SheetRun, row: Sublayer) -> dict[str, Any]:
    state, here = run.state, row.nearest
    ground, columns = state.ground, state.ground.columns
    cell = int(np.cumsum(ground.clay)[here]) - 1
    start, past = float(ground.points.stress[0, here]), float(ground.yield_stress[0, here])
    stages = {}
    for stage in run.site.stages:
        slot = run.slot(stage.end)
        stress = float(state.consolidation.stress[0, slot, cell])
        kept = float(state.consolidation.yield_stress[0, slot, cell])
        gain, largest_gain = (float(one[0, cell]) for one in zone_gains(run.site, ground, stage.end)[_SLOPE])
        beside = start + gain * (stress - start)
        stages[stage.name] = {
            "stress": stress,
            "preconsolidation": max(past, kept, stress),
            "under_crest": float(state.strength[slot, 0, _CREST, here]),
            "stress_under_slope": beside,
            "preconsolidation_under_slope": max(past, start + largest_gain * (kept - start), beside),
            "slope_gain": gain,
            "under_slope": float(state.strength[slot, 0, _SLOPE, here]),
        }
    return {
        "sublayer": row.number,
        "layer": run.site.layers[row.layer].name,
        "depth": float(ground.points.depth[0, here]),
        "strength_ratio": float(columns.strength_ratio[0, row.layer]),
        "exponent": float(columns.strength_exponent[0, row.layer]),
        "mode_factor": float(run.at["site.mode_factor"]),
        "initial_stress": start,
        "initial_excess": 0.0 if ground.points.excess is None else float(ground.points.excess[0, here]),
        "preconsolidation": past,
        "slope_share": float(ground.load.slope_share[0, here]),
        "before": float(state.strength_before[0, here]),
        "at_end_of_stage": stages,
    }


def slip_rows(run: SheetRun) -> list[dict[str, Any]]:
    """Return the critical circle and its moments at every time at which slip is looked at.

    Parameters
    ----------
    run : SheetRun
        The computation.

    Returns
    -------
    rows : list of dict
        Circle [m], lengths of its arc [m], resisting moments by zone and kind and driving moment [kNm/m],
        and the factor of safety [-].
    """
    site, safety = run.site, run.state.response.slip[0]
    ends = site.end_names
    moments = critical_moments(site, run.values, run.state)
    return [
        {
            "stage": ends.get(float(time), f"at {float(time):g} years"),
            "time": float(time),
            "fill_height": site.fill_height(float(time)),
            "factor": float(factor),
            **_circle(one),
        }
        for time, factor, one in zip(site.slip_times, safety, moments, strict=True)
    ]


def _circle(one: SlipMoments) -> dict[str, Any]:
    def by_zone(values: np.ndarray) -> dict[str, float]:
        return dict(zip(ZONES, values.tolist(), strict=False))

    along = one.radius * np.where(one.clay_length > 0.0, one.clay_length, 1.0)
    return {
        "centre_x": one.centre_x,
        "centre_y": one.centre_y,
        "radius": one.radius,
        "deepest": one.touch,
        "leaves_at": one.exit_x,
        "enters_at": one.entry_x,
        "clay_length": by_zone(one.clay_length),
        "clay_strength": by_zone(one.clay_moment / along),
        "clay_moment": by_zone(one.clay_moment),
        "granular_length": by_zone(one.sand_length),
        "granular_moment": float(one.sand_moment.sum()),
        "fill_length": one.fill_length,
        "fill_friction_form": one.fill_friction_form,
        "traffic_friction_form": one.traffic_friction_form,
        "fill_friction_moment": one.fill_friction,
        "fill_cohesion_moment": one.fill_cohesion,
        "resisting_moment": one.resisting,
        "driving_form": one.driving_form,
        "heavier": one.heavier,
        "traffic_form": one.traffic_form,
        "traffic_moment": one.traffic,
        "driving_moment": one.driving,
    }
