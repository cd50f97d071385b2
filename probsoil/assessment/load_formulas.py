"""Formulas of the stress that loads add, on a calculation sheet, each with the numbers of one row put in."""

from typing import Any

import numpy as np

from probsoil.assessment.pore_pressure_formulas import GAMMA_W
from probsoil.assessment.sheet_formulas import LOAD, place_of
from probsoil.assessment.sheet_run import SheetRun
from probsoil.assessment.worked import Symbol, Worked, worked
from probsoil.ground.excavation import stress_dug_out

Record = dict[str, Any]
FULL = "influence of the load at its full height"
"""Meaning of I0."""
ADDED = "fill added to hold the level"
"""Meaning of ha."""


def load_formulas(run: SheetRun, row: Record) -> list[Worked]:
    """Return what leads from the load to the final effective stress.

    Parameters
    ----------
    run : SheetRun
        The computation.
    row : dict
        Numbers of the sub-layer of the example.

    Returns
    -------
    lines : list of Worked
        Stress increase, what submergence takes off, and the effective stress at the horizon.
    """
    place = f"{place_of(row)}, at {row['depth']:.3f} m and {run.site.horizon:g} years"
    lines = _further(run, row, place)
    if row["influence"] is not None:
        lines.append(_increase(run, row, place))
    if run.site.submergence:
        lines.append(_submerged(run, row, place))
    symbols: dict[str, Symbol] = {
        "σ'0": (row["initial_stress"], "effective stress in situ", "kPa"),
        "Δσ": (row["stress_increase"], "stress increase", "kPa"),
        "δ": (row["relief"], "taken off by submergence", "kPa"),
        "u": (row["excess_pore_pressure"], "excess pore pressure left, from the consolidation", "kPa"),
    }
    formula = "σ' = σ'0 + Δσ − δ − u"
    if row["initial_excess"]:
        symbols["ui"] = _excess(row)
        formula = "σ' = σ'0 + ui + Δσ − δ − u"
    final = (row["final_stress"], "kPa")
    return [*lines, worked(LOAD, "effective stress", formula, final, symbols, row=place)]


def _excess(row: Record) -> Symbol:
    return row["initial_excess"], "initial excess pore pressure", "kPa"


def _increase(run: SheetRun, row: Record, place: str) -> Worked:
    time, formula = run.site.horizon, "Δσ = I · (γf · h + p)"
    symbols: dict[str, Symbol] = {
        "I": (row["influence"], "influence of the load", "-"),
        "γf": (run.fill_weight, "unit weight of the fill", "kN/m3"),
        "h": (float(run.site.fill_height(time)), "height of fill", "m"),
        "p": (float(run.site.pressure(time)), "pressure besides the fill", "kPa"),
    }
    if run.site.excavates:
        formula, symbols = "Δσ = I · (γf · h + p − w − r)", symbols | _dug_out(run, time)
    if run.site.hold_level_until is not None:
        spread = float(run.state.ground.load.spread[0, _point(run, row)])
        symbols |= {"I0": (spread, FULL, "-"), "ha": (run.fill_added(time), ADDED, "m")}
        formula += " + I0 · γf · ha"
    if run.site.further_loads:
        symbols["Δσn"] = (row["further_stress"], "stress of the further loads", "kPa")
        formula += " + Δσn"
    return worked(LOAD, "stress increase", formula, (row["stress_increase"], "kPa"), symbols, row=place)


def _submerged(run: SheetRun, row: Record, place: str) -> Worked:
    time, clay = run.site.horizon, float(run.state.consolidation.settlement[0, -1])
    symbols: dict[str, Symbol] = {
        "γw": GAMMA_W,
        "sc": (max(clay, 0.0), "settlement of the clay", "m"),
        "zw": (run.at["site.water_table"], "depth of the water table", "m"),
        "h": (float(run.site.greatest_fill_height(time)), "height of fill", "m"),
        "I0": (float(run.state.ground.load.spread_of_all[0, _point(run, row)]), FULL, "-"),
        "Δσ": (row["stress_increase"], "stress increase", "kPa"),
    }
    sunk, most = "zw + h", "max(Δσ, 0)" if run.site.excavates else "Δσ"
    if row["initial_excess"]:
        symbols["ui"], most = _excess(row), "max(Δσ + ui, 0)"
    if run.site.hold_level_until is not None:
        symbols["ha"], sunk = (run.fill_added(time), ADDED, "m"), "zw + h + ha"
    formula = f"δ = min(γw · min(sc, {sunk}) · I0, {most})"
    return worked(LOAD, "taken off by submergence", formula, (row["relief"], "kPa"), symbols, row=place)


def _dug_out(run: SheetRun, time: float) -> dict[str, Symbol]:
    """Return the water under the base, as far as it carries, and the effective weight of the soil dug out."""
    total, pore = stress_dug_out(run.site, run.values, 1, run.site.dug(time))
    placed = float(run.fill_weight * run.site.fill_height(time) + run.site.pressure(time))
    return {
        "w": (min(placed, float(pore[0])), "water under the base", "kPa"),
        "r": (float(total[0] - pore[0]), "effective weight of the soil dug out", "kPa"),
    }


def _further(run: SheetRun, row: Record, place: str) -> list[Worked]:
    """Return the stress of each further load, and their sum."""
    time, point = run.site.horizon, _point(run, row)
    stresses = run.further(time)[:, point].tolist()
    lines, parts = [], {}
    for number, (one, stress) in enumerate(zip(run.site.further_loads, stresses, strict=True), start=1):
        weight = float(run.at.get(f"{one.address}.fill_unit_weight", 0.0))
        height = float(run.site.fill_height(time, one.name))
        pressure = float(run.site.pressure(time, one.name))
        surface = weight * height + pressure
        parts[f"Δσ{number}"] = (stress, f"stress of {one.name}", "kPa")
        symbols: dict[str, Symbol] = {
            "I": (stress / surface if surface else 0.0, f"influence of {one.name}", "-"),
            "γf": (weight, "unit weight of its fill", "kN/m3"),
            "h": (height, "height of its fill", "m"),
            "p": (pressure, "its pressure besides", "kPa"),
        }
        formula = f"Δσ{number} = I · (γf · h + p)"
        lines.append(worked(LOAD, f"stress of {one.name}", formula, (stress, "kPa"), symbols, row=place))
    if parts:
        total = (sum(stresses), "kPa")
        formula = f"Δσn = {' + '.join(parts)}"
        lines.append(worked(LOAD, "stress of the further loads", formula, total, parts, row=place))
    return lines


def _point(run: SheetRun, row: Record) -> int:
    return int(np.abs(run.state.ground.points.depth[0] - row["depth"]).argmin())
