"""Formulas of stress and settlement on a calculation sheet, each with the numbers of one row put in."""

from typing import Any

import numpy as np

from probsoil.assessment.pore_pressure_formulas import (
    IN_SITU,
    excess_formulas,
    pore_pressure_formulas,
)
from probsoil.assessment.sheet_run import SheetRun
from probsoil.assessment.sheet_sublayers import Sublayer, overburden
from probsoil.assessment.worked import Symbol, Worked, worked
from probsoil.ground.profile import LEAST_STRESS

Record = dict[str, Any]
LOAD, COMPRESSION = "stress from the load", "compression"


def example_of(rows: list[Record]) -> Record:
    """Return the sub-layer whose numbers are put into the formulas.

    Parameters
    ----------
    rows : list of dict
        Sub-layers of the sheet.

    Returns
    -------
    row : dict
        The clay row that settles most.
    """
    return max((row for row in rows if row["soil"] == "clay"), key=lambda row: abs(row["settlement"]))


def place_of(row: Record) -> str:
    """Return a sub-layer in words.

    Parameters
    ----------
    row : dict
        One of the sheet.

    Returns
    -------
    text : str
        Number and layer.
    """
    return f"sub-layer {row['number']}, {row['layer']}"


def in_situ_formulas(run: SheetRun, sublayer: Sublayer, row: Record) -> list[Worked]:
    """Return the stresses before loading.

    Parameters
    ----------
    run : SheetRun
        The computation.
    sublayer : Sublayer
        The sub-layer of the example.
    row : dict
        Its numbers.

    Returns
    -------
    lines : list of Worked
        Total stress, pore pressure, effective stress and preconsolidation stress.
    """
    place = f"{place_of(row)}, at {row['depth']:.3f} m"
    total: Symbol = (row["total_stress"], "total stress", "kPa")
    pore: Symbol = (row["pore_pressure"], "pore pressure", "kPa")
    least: Symbol = (LEAST_STRESS, "least effective stress that is used", "kPa")
    effective: Symbol = (row["initial_stress"], "effective stress in situ", "kPa")
    stresses: dict[str, Symbol] = {"σv": total, "u0": pore}
    formula = "σ'0 = max(σv − u0, σmin)"
    if row["initial_excess"]:
        stresses["ui"] = (row["initial_excess"], "initial excess pore pressure", "kPa")
        formula = "σ'0 = max(σv − u0 − ui, σmin)"
    lines = [
        _total_stress(run, sublayer, row, place),
        *pore_pressure_formulas(run, sublayer, row, place),
        *excess_formulas(run, sublayer, row, place),
        worked(
            IN_SITU,
            "effective stress",
            formula,
            (row["initial_stress"], "kPa"),
            stresses | {"σmin": least},
            row=place,
        ),
    ]
    formula, symbol, meaning, unit = {
        "pop": ("σ'p = max(σ'0 + POP, σ'0)", "POP", "preconsolidation stress less the stress in situ", "kPa"),
        "ocr": ("σ'p = max(OCR · σ'0, σ'0)", "OCR", "overconsolidation ratio", "-"),
        "preconsolidation": ("σ'p = max(σ'g, σ'0)", "σ'g", "preconsolidation stress given", "kPa"),
    }[run.site.layers[sublayer.layer].yielding]
    given = run.layer_value(sublayer.layer, run.site.layers[sublayer.layer].yielding)
    symbols: dict[str, Symbol] = {symbol: (given, meaning, unit), "σ'0": effective}
    return [
        *lines,
        worked(
            IN_SITU,
            "preconsolidation stress",
            formula,
            (row["preconsolidation"], "kPa"),
            symbols,
            row=place,
        ),
    ]


def _total_stress(run: SheetRun, sublayer: Sublayer, row: Record, place: str) -> Worked:
    thickness, _, weight = overburden(run)
    symbols: dict[str, Symbol] = {}
    terms: list[str] = []
    for part in np.flatnonzero(thickness[:, sublayer.nearest] > 0.0):
        name, number = run.site.layers[part // 2].name, len(terms) + 1
        side = "above" if part % 2 == 0 else "below"
        symbols[f"γ{number}"] = (
            float(weight[part]),
            f"unit weight of {name}, {side} the water table",
            "kN/m3",
        )
        symbols[f"h{number}"] = (
            float(thickness[part, sublayer.nearest]),
            f"thickness of {name}, {side} it and above the point",
            "m",
        )
        terms.append(f"γ{number} · h{number}")
    return worked(
        IN_SITU,
        "total stress",
        f"σv = {' + '.join(terms)}",
        (row["total_stress"], "kPa"),
        symbols,
        row=place,
    )


def compression_formulas(run: SheetRun, sublayer: Sublayer, row: Record) -> list[Worked]:
    """Return what leads from stresses to the settlement of a clay sub-layer.

    Parameters
    ----------
    run : SheetRun
        The computation.
    sublayer : Sublayer
        The sub-layer of the example.
    row : dict
        Its numbers.

    Returns
    -------
    lines : list of Worked
        Slopes of the compression line where they are given in another form, change of void ratio, strain
        and settlement, at the horizon and once all excess pressure has gone.
    """
    place, columns = place_of(row), run.state.ground.columns
    slopes: dict[str, Symbol] = {
        "λ": (float(columns.lam[0, sublayer.layer]), "slope in virgin compression", "-"),
        "κ": (float(columns.kap[0, sublayer.layer]), "slope in reloading", "-"),
    }
    height: Symbol = (row["bottom"] - row["top"], "thickness of the sub-layer", "m")
    void_ratio: Symbol = (row["void_ratio"], "void ratio in situ", "-")
    stresses: dict[str, Symbol] = {
        "σ'0m": (row["mean_initial_stress"], "mean of the stress in situ, by logarithms", "kPa"),
        "σ'pm": (row["mean_preconsolidation"], "mean of the preconsolidation stress, likewise", "kPa"),
        "σ'ym": (row["mean_largest_stress"], "mean of the largest stress so far, likewise", "kPa"),
        "σ'm": (row["mean_final_stress"], "mean of the effective stress, likewise", "kPa"),
    }
    lines = _slope_formulas(run, sublayer, row)
    lines.append(
        worked(
            COMPRESSION,
            "change of void ratio",
            "Δe = κ · ln(σ'pm/σ'0m) + λ · ln(σ'ym/σ'pm) − κ · ln(σ'ym/σ'm)",
            (row["void_ratio_change"], "-"),
            slopes | stresses,
            row=place,
        )
    )
    change: Symbol = (row["void_ratio_change"], "change of void ratio", "-")
    lines.append(
        worked(
            COMPRESSION,
            "strain",
            "ε = Δe/(1 + e0)",
            (row["strain"], "-"),
            {"Δe": change, "e0": void_ratio},
            row=place,
        )
    )
    lines.append(
        worked(
            COMPRESSION,
            "settlement",
            "s = ε · h",
            (row["settlement"], "m"),
            {"ε": (row["strain"], "strain", "-"), "h": height},
            row=place,
        )
    )
    done = stresses | {
        "σ'ym": (
            row["mean_largest_stress_when_done"],
            "mean of the largest stress so far when done, likewise",
            "kPa",
        ),
        "σ'm": (row["mean_stress_when_done"], "mean of the effective stress when done, likewise", "kPa"),
    }
    lines.append(
        worked(
            COMPRESSION,
            "settlement once all excess pressure has gone",
            "s∞ = h/(1 + e0) · (κ · ln(σ'pm/σ'0m) + λ · ln(σ'ym/σ'pm) − κ · ln(σ'ym/σ'm))",
            (row["settlement_when_done"], "m"),
            {"h": height, "e0": void_ratio} | slopes | done,
            row=place,
        )
    )
    return lines


def _slope_formulas(run: SheetRun, sublayer: Sublayer, row: Record) -> list[Worked]:
    form, columns = run.site.layers[sublayer.layer], run.state.ground.columns
    meanings = {
        "Cc": "compression index",
        "Cs": "swelling index",
        "CR": "compression ratio",
        "RR": "recompression ratio",
    }
    lines = []
    for symbol, key, value in (
        ("λ", form.compression, columns.lam),
        ("κ", form.swelling, columns.kap),
    ):
        if key not in meanings or (symbol == "κ" and columns.kappa_clipped[0, sublayer.layer]):
            continue
        symbols: dict[str, Symbol] = {key: (run.layer_value(sublayer.layer, key), meanings[key], "-")}
        formula = f"{symbol} = {key}/ln(10)"
        if key in ("CR", "RR"):
            symbols["e0"] = (row["void_ratio"], "void ratio in situ", "-")
            formula = f"{symbol} = {key} · (1 + e0)/ln(10)"
        result = (float(value[0, sublayer.layer]), "-")
        lines.append(
            worked(COMPRESSION, f"slope {symbol}", formula, result, symbols, row=f"layer {form.name}")
        )
    return lines


def granular_formulas(run: SheetRun, rows: list[Record]) -> list[Worked]:
    """Return the settlement of a granular sub-layer.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of dict
        All sub-layers.

    Returns
    -------
    lines : list of Worked
        One line; none where there is no granular layer.
    """
    granular = [row for row in rows if row["soil"] == "granular"]
    if not granular:
        return []
    row = max(granular, key=lambda one: abs(one["settlement"]))
    symbols: dict[str, Symbol] = {
        "Δσm": (row["mean_stress_increase"], "mean stress increase", "kPa"),
        "h": (row["bottom"] - row["top"], "thickness of the sub-layer", "m"),
        "E": (run.at[f"{row['layer']}.constrained_modulus"], "constrained modulus", "kPa"),
    }
    result = (row["settlement"], "m")
    return [worked(COMPRESSION, "settlement, granular", "s = Δσm · h/E", result, symbols, row=place_of(row))]


def sum_formula(run: SheetRun, rows: list[Record]) -> list[Worked]:
    """Return the sum of the sub-layers, of secondary compression and of undrained distortion.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of dict
        All sub-layers.

    Returns
    -------
    lines : list of Worked
        Settlement at the horizon.
    """
    symbols: dict[str, Symbol] = {
        f"s{row['number']}": (row["settlement"], f"settlement of {place_of(row)}", "m") for row in rows
    }
    secondary = float(run.state.response.secondary[0, -1])
    if secondary:
        symbols["sα"] = (secondary, "secondary compression", "m")
    if run.site.distorts:
        symbols["sd"] = (float(run.state.response.distortion[0, -1]), "undrained distortion", "m")
    result = (float(run.state.response.settlement[0, -1]), "m")
    formula = f"s = {' + '.join(symbols)}"
    place = f"all sub-layers, {run.site.horizon:g} years"
    return [worked(COMPRESSION, "settlement of ground level", formula, result, symbols, row=place)]
