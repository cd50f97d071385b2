"""Sub-layers of a calculation sheet: a few rows per layer that add up to the computed settlement.

A row stands for neighbouring cells of one layer. Its stresses are written at the centre of the cell
nearest to its middle, where they can be followed from the weights of the soil. Void ratio depends on the
logarithm of stress and lambda, kappa and e0 are the same over a layer, so the change of void ratio worked
out from the *means of the logarithms* over the cells, weighted by thickness, is exactly the mean of the
cells' own: rows add up to the computed settlement without a remainder.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.assessment.sheet_run import SheetRun
from probsoil.ground.profile import Values, column
from probsoil.ground.secondary_compression import CreepSpell, creep_reduction, creep_spells, secondary_by_cell
from probsoil.ground.site_model import SiteModel

_MOST = 4  # rows to a clay layer
_GRANULAR = 2
_NO_PRESSURE = 1e-6  # kPa; what is left of excess pressure below it is rounding


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Sublayer:
    """Neighbouring points of one layer.

    Attributes
    ----------
    number : int, [-]
        Counted from ground level, 1 first.
    layer : int, [-]
        Index of the layer.
    points : ndarray of int, shape (n,), [-]
        Its points among all of the profile.
    nearest : int, [-]
        The point nearest to its middle.
    top, bottom : float, [m]
        Depths before loading.
    """

    number: int
    layer: int
    points: IntArray
    nearest: int
    top: float
    bottom: float


def sublayers(run: SheetRun) -> list[Sublayer]:
    """Return the sub-layers of a profile.

    Parameters
    ----------
    run : SheetRun
        The computation.

    Returns
    -------
    rows : list of Sublayer
        Two to four of about equal thickness in a clay layer, two in a granular one; their limits are
        limits of cells.
    """
    points = run.state.ground.points
    rows: list[Sublayer] = []
    for index, form in enumerate(run.site.layers):
        mine = np.flatnonzero(points.layer == index)
        thickness = points.thickness[0, mine]
        edge = points.boundary[0, index] + np.concatenate([[0.0], np.cumsum(thickness)])
        wanted = 1 + round(float(edge[-1] - edge[0]))
        count = min(max(wanted, 2), _MOST) if form.is_clay else _GRANULAR
        inner = np.linspace(edge[0], edge[-1], count + 1)[1:-1]
        cuts = np.unique(np.abs(edge[1:-1, None] - inner).argmin(axis=0)) + 1
        for first, last in zip([0, *cuts], [*cuts, mine.size], strict=True):
            own = mine[first:last]
            top, bottom = float(edge[first]), float(edge[last])
            away = np.abs(points.depth[0, own] - 0.5 * (top + bottom))
            nearest = int(own[int(away.argmin())])
            rows.append(
                Sublayer(
                    number=len(rows) + 1, layer=index, points=own, nearest=nearest, top=top, bottom=bottom
                )
            )
    return rows


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class PointState:
    """Every point of the profile before loading, at the horizon and once no excess pressure is left.

    Attributes
    ----------
    clay : ndarray of bool, shape (n_point,), [-]
        Which points are clay cells.
    thickness : ndarray, shape (n_point,), [m]
        Thickness that each stands for.
    total, pore, initial, preconsolidation : ndarray, shape (n_point,), [kPa]
        Stresses before loading; ``pore`` is that at rest or in steady seepage.
    underway : ndarray, shape (n_point,), [kPa]
        Excess pore pressure before loading.
    added, relief : ndarray, shape (n_point,), [kPa]
        Stress from the load at the horizon, and what submergence takes off it.
    excess, final, largest : ndarray, shape (n_point,), [kPa]
        Excess pore pressure, effective stress and the largest effective stress so far, at the horizon.
    done, largest_done : ndarray, shape (n_point,), [kPa]
        Effective stress and the largest so far when the excess pore pressure has gone.
    shortening, shortening_done : ndarray, shape (n_point,), [m]
        Primary settlement that the point stands for, at the horizon and when done.
    per_decade : ndarray, shape (n_point,), [m]
        Secondary compression in a tenfold of time after the last stage.
    secondary : ndarray, shape (n_point,), [m]
        Secondary compression at the horizon.
    spells : tuple of CreepSpell
        Secondary compression from stage to stage.
    """

    clay: BoolArray
    thickness: FloatArray
    total: FloatArray
    pore: FloatArray
    initial: FloatArray
    preconsolidation: FloatArray
    underway: FloatArray
    added: FloatArray
    relief: FloatArray
    excess: FloatArray
    final: FloatArray
    largest: FloatArray
    done: FloatArray
    largest_done: FloatArray
    shortening: FloatArray
    shortening_done: FloatArray
    per_decade: FloatArray
    secondary: FloatArray
    spells: tuple[CreepSpell, ...]


def point_state(run: SheetRun) -> PointState:
    """Return the stresses and settlement of every point.

    Parameters
    ----------
    run : SheetRun
        The computation.

    Returns
    -------
    state : PointState
        Arrays over the points of the profile.
    """
    ground, result = run.state.ground, run.state.consolidation
    points, clay = ground.points, ground.clay
    initial = points.stress[0]
    added, relief = run.added(run.site.horizon)
    underway = np.zeros(initial.size) if points.excess is None else points.excess[0]
    done = initial + np.where(clay, added - relief, added) + underway
    final, largest = done.copy(), done.copy()
    final[clay] = result.stress[0, -1]
    largest[clay] = np.maximum(result.yield_stress[0, -1], final[clay])
    largest_done = largest.copy()
    largest_done[clay] = np.maximum(result.yield_stress[0, -1], done[clay])
    per_decade, secondary = np.zeros(initial.size), np.zeros(initial.size)
    spells = creep_spells(run.site, run.values, ground, result)
    if spells:
        per_decade[clay] = spells[-1].per_cell[0]
        secondary[clay] = secondary_by_cell(run.site, spells, run.site.horizon)[0]
    shape = _Line.of(run)
    return PointState(
        clay=clay,
        thickness=points.thickness[0],
        total=overburden(run)[1].sum(axis=0),
        pore=points.pore[0],
        initial=initial,
        preconsolidation=ground.yield_stress[0],
        underway=underway,
        added=added,
        relief=np.where(clay, relief, 0.0),
        excess=np.where(np.abs(done - final) > _NO_PRESSURE, done - final, 0.0),
        final=final,
        largest=largest,
        done=done,
        largest_done=largest_done,
        shortening=shape.shortening(run, added, final, largest),
        shortening_done=shape.shortening(run, added, done, largest_done),
        per_decade=per_decade,
        secondary=secondary,
        spells=tuple(spells),
    )


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class _Line:
    """Compression line of every point; numbers of granular points mean nothing."""

    lam: FloatArray
    kap: FloatArray
    void_ratio: FloatArray

    @classmethod
    def of(cls, run: SheetRun) -> "_Line":
        columns, layer = run.state.ground.columns, run.state.ground.points.layer
        return cls(
            lam=columns.lam[0, layer], kap=columns.kap[0, layer], void_ratio=columns.void_ratio[0, layer]
        )

    def shortening(
        self, run: SheetRun, added: FloatArray, stress: FloatArray, largest: FloatArray
    ) -> FloatArray:
        ground = run.state.ground
        start, past = ground.points.stress[0], ground.yield_stress[0]
        lost = (
            self.kap * np.log(past / start)
            + self.lam * np.log(largest / past)
            - self.kap * np.log(largest / stress)
        )
        thickness = ground.points.thickness[0]
        elastic = added * thickness / _moduli(run.site, run.values, ground.points.layer)
        return np.asarray(np.where(ground.clay, thickness / (1.0 + self.void_ratio) * lost, elastic))


def _moduli(site: SiteModel, values: Values, layer: IntArray) -> FloatArray:
    """Return the constrained modulus of every point, 1 in clay, [kPa]."""
    modulus = [
        1.0 if form.is_clay else float(column(values, f"{form.name}.constrained_modulus", 1)[0])
        for form in site.layers
    ]
    return np.array(modulus)[layer]


def overburden(run: SheetRun) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return the parts of the total stress in situ at every point.

    Parameters
    ----------
    run : SheetRun
        The computation.

    Returns
    -------
    thickness : ndarray, shape (2 n_layer, n_point), [m]
        What of every layer lies over the point, above and below the water table in turn.
    stress : ndarray, shape (2 n_layer, n_point), [kPa]
        Its weight.
    unit_weight : ndarray, shape (2 n_layer,), [kN/m3]
        Unit weight of the same.
    """
    points, water = run.state.ground.points, run.at["site.water_table"]
    depth, boundary = points.depth[0], points.boundary[0]
    parts, weights = [], []
    for index, form in enumerate(run.site.layers):
        top = boundary[index]
        within = np.clip(depth, top, boundary[index + 1]) - top
        above = np.clip(np.minimum(depth, water), top, boundary[index + 1]) - top
        parts += [above, within - above]
        moist = "unit_weight_above" if form.weight_above else "unit_weight"
        weights += [run.layer_value(index, moist), run.layer_value(index, "unit_weight")]
    thickness, unit_weight = np.stack(parts), np.array(weights)
    return thickness, thickness * unit_weight[:, None], unit_weight


def sublayer_rows(run: SheetRun, rows: list[Sublayer], state: PointState) -> list[dict[str, Any]]:
    """Return the numbers of every sub-layer.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of Sublayer
        The sub-layers.
    state : PointState
        Stresses and settlement of every point.

    Returns
    -------
    rows : list of dict
        One per sub-layer, [m], [kPa] and [-]; None where a number does not apply.
    """
    return [_row(run, row, state) for row in rows]


def _row(run: SheetRun, row: Sublayer, state: PointState) -> dict[str, Any]:
    here, form = row.nearest, run.site.layers[row.layer]
    topped = run.fill_weight * run.fill_added(run.site.horizon)
    surface = run.surface_pressure(run.site.horizon) - topped
    further = float(run.further(run.site.horizon)[:, here].sum())
    by_stages = float(state.added[here] - topped * run.state.ground.load.spread[0, here]) - further
    height = row.bottom - row.top
    at_point = {
        "depth": float(run.state.ground.points.depth[0, here]),
        "total_stress": float(state.total[here]),
        "pore_pressure": float(state.pore[here]),
        "initial_excess": float(state.underway[here]),
        "initial_stress": float(state.initial[here]),
        "preconsolidation": float(state.preconsolidation[here]) if form.is_clay else None,
        "influence": None if surface == 0.0 else by_stages / surface,
        "further_stress": further,
        "stress_increase": float(state.added[here]),
        "relief": float(state.relief[here]),
        "excess_pore_pressure": float(state.excess[here]),
        "final_stress": float(state.final[here]),
    }
    return {
        "number": row.number,
        "layer": form.name,
        "soil": "clay" if form.is_clay else "granular",
        "top": row.top,
        "bottom": row.bottom,
        "cells": int(row.points.size),
        **at_point,
        **(_clay_means(run, row, state) if form.is_clay else _granular_means(row, state)),
        "strain": float(state.shortening[row.points].sum()) / height,
        "settlement": float(state.shortening[row.points].sum()),
        "settlement_when_done": float(state.shortening_done[row.points].sum()),
        "creep_per_decade": float(state.per_decade[row.points].sum()),
        "creep_reduction": _creep_reduction(run, row, state),
    }


def _creep_reduction(run: SheetRun, row: Sublayer, state: PointState) -> float | None:
    """Return what an overconsolidation leaves of creep, the mean over the cells by thickness."""
    if not run.site.layers[row.layer].creeps:
        return None
    columns = run.state.ground.columns
    ratio = float(columns.kap[0, row.layer] / columns.lam[0, row.layer])
    left = creep_reduction(state.largest_done[row.points] / state.done[row.points], ratio)
    return float(np.average(left, weights=state.thickness[row.points]))


def _clay_means(run: SheetRun, row: Sublayer, state: PointState) -> dict[str, Any]:
    share = state.thickness[row.points] / state.thickness[row.points].sum()

    def mean(stress: FloatArray) -> float:
        return float(np.exp((share * np.log(stress[row.points])).sum()))

    void_ratio = float(run.state.ground.columns.void_ratio[0, row.layer])
    per_height = (1.0 + void_ratio) / (row.bottom - row.top)
    return {
        "mean_initial_stress": mean(state.initial),
        "mean_preconsolidation": mean(state.preconsolidation),
        "mean_largest_stress": mean(state.largest),
        "mean_final_stress": mean(state.final),
        "mean_largest_stress_when_done": mean(state.largest_done),
        "mean_stress_when_done": mean(state.done),
        "mean_stress_increase": None,
        "void_ratio": void_ratio,
        "void_ratio_change": float(state.shortening[row.points].sum()) * per_height,
        "void_ratio_change_when_done": float(state.shortening_done[row.points].sum()) * per_height,
    }


def _granular_means(row: Sublayer, state: PointState) -> dict[str, Any]:
    share = state.thickness[row.points] / state.thickness[row.points].sum()
    names = ("initial_stress", "preconsolidation", "largest_stress", "final_stress")
    return {
        **{f"mean_{name}": None for name in names},
        "mean_largest_stress_when_done": None,
        "mean_stress_when_done": None,
        "mean_stress_increase": float((share * state.added[row.points]).sum()),
        "void_ratio": None,
        "void_ratio_change": None,
        "void_ratio_change_when_done": None,
    }


def cell_rows(run: SheetRun, rows: list[Sublayer], state: PointState) -> list[dict[str, Any]]:
    """Return the program's own cells, for whoever wants to form the means of a sub-layer again.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of Sublayer
        The sub-layers.
    state : PointState
        Stresses and settlement of every point.

    Returns
    -------
    rows : list of dict
        Number of the sub-layer, depth and thickness [m], stresses [kPa] and settlement [m] of each.
    """
    depth = run.state.ground.points.depth[0]
    shown = {
        "depth": depth,
        "thickness": state.thickness,
        "initial_stress": state.initial,
        "preconsolidation": state.preconsolidation,
        "stress_increase": state.added,
        "largest_stress": state.largest,
        "final_stress": state.final,
        "settlement": state.shortening,
    }
    return [
        {"sublayer": row.number, **{name: float(values[point]) for name, values in shown.items()}}
        for row in rows
        for point in row.points
    ]
