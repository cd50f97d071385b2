"""Formulas of time, drains, creep, strength and slip on a calculation sheet, with numbers put in."""

from typing import Any

from probsoil.assessment.sheet_run import SheetRun
from probsoil.assessment.sheet_sublayers import Sublayer
from probsoil.assessment.worked import Symbol, Worked, worked
from probsoil.ground.undrained_strength import m_from_friction_angle, sine_of_friction_angle

Record = dict[str, Any]
TIME, DRAINS, CREEP = "consolidation", "vertical drains", "secondary compression"
STRENGTH, SLIP = "undrained strength", "slip"
_SLOPE_SHARE = "stress under the slope over that under the crest"
_SLOPE_GAIN = _SLOPE_SHARE + ", both with the initial excess pressure added"
_GRID = {"triangular": 1.05, "square": 1.13}


def degree_formulas(rows: list[Record]) -> list[Worked]:
    """Return the degree of consolidation at one time.

    Parameters
    ----------
    rows : list of dict
        Times of the sheet.

    Returns
    -------
    lines : list of Worked
        The first time at which the degree is over one half, or the last.
    """
    known = [row for row in rows if row["degree"] is not None and row["clay_when_done"] > 0.0]
    if not known:
        return []
    row = next((one for one in known if one["degree"] > 0.5), known[-1])
    symbols: dict[str, Symbol] = {
        "sc": (row["clay"], "settlement of the clay", "m"),
        "s∞": (row["clay_when_done"], "the same once the excess pressure under that load has gone", "m"),
    }
    formula, result = "U = min(sc/s∞, 1)", (row["degree"], "-")
    return [worked(TIME, "degree of consolidation", formula, result, symbols, row=f"{row['time']:.4g} years")]


def drain_formulas(record: Record | None) -> list[Worked]:
    """Return the factor mu of vertical drains.

    Parameters
    ----------
    record : dict or None
        Drains of the sheet.

    Returns
    -------
    lines : list of Worked
        Diameter of influence, spacing ratio, mu and the resistance of the drain at the deepest row.
    """
    if record is None:
        return []
    place, part = "all drains", "diameter of the soil that one drain serves"
    size: Symbol = (record["influence_diameter"], part, "m")
    n: Symbol = (record["spacing_ratio"], "ratio of the diameters", "-")
    grid: Symbol = (_GRID[record["pattern"]], f"of a {record['pattern']} grid", "-")
    smear: Symbol = (record["smear_ratio"], "diameter of the smear zone over that of the drain", "-")
    loss: Symbol = (record["smear_permeability_ratio"], "permeability of the soil over that in it", "-")
    lines = [
        worked(
            DRAINS,
            part,
            "De = g · d",
            (size[0], "m"),
            {"g": grid, "d": (record["spacing"], "spacing", "m")},
            row=place,
        ),
        worked(
            DRAINS,
            "ratio of the diameters",
            "n = De/dw",
            (n[0], "-"),
            {"De": size, "dw": (record["diameter"], "equivalent diameter of a drain", "m")},
            row=place,
        ),
        worked(
            DRAINS,
            "factor of spacing and smear",
            "μ = (n^2 · (ln(n/s) + q · ln(s) − 3/4) + s^2 · (1 − s^2/(4 · n^2))"
            " + q · (1 − s^2 + (s^4 − 1)/(4 · n^2)))/(n^2 − 1)",
            (record["factor"], "-"),
            {"n": n, "s": smear, "q": loss},
            row=place,
        ),
    ]
    if record["discharge_capacity"] is not None and record["rows"]:
        row = record["rows"][-1]
        symbols: dict[str, Symbol] = {
            "z": (min(row["depth"], record["bottom"]), "depth, not below the drain's end", "m"),
            "l": (record["bottom"], "length of the drain", "m"),
            "kh": (row["permeability"], "horizontal permeability in situ", "m/year"),
            "qw": (record["discharge_capacity"], "discharge capacity", "m3/year"),
        }
        result = (row["resistance"], "-")
        place = f"sub-layer {row['sublayer']}, at {row['depth']:.3f} m"
        formula = "μw = π · z · (2 · l − z) · kh/qw"
        lines.append(
            worked(DRAINS, "added by the drain's own resistance", formula, result, symbols, row=place)
        )
    return lines


def creep_formulas(run: SheetRun, rows: list[Record], segments: list[Record]) -> list[Worked]:
    """Return the secondary compression of one sub-layer and of one segment.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of dict
        Sub-layers of the sheet.
    segments : list of dict
        Drainage segments of the sheet.

    Returns
    -------
    lines : list of Worked
        Settlement per decade and at the horizon; none where nothing creeps.
    """
    creeping = [row for row in rows if row["creep_per_decade"] > 0.0]
    if not creeping:
        return []
    row = max(creeping, key=lambda one: one["creep_per_decade"])
    layer = next(index for index, form in enumerate(run.site.layers) if form.name == row["layer"])
    creep, index = _creep_index(run, layer)
    symbols: dict[str, Symbol] = {
        "Rm": (row["creep_reduction"], "mean of what is left of creep after unloading", "-"),
        **index,
        "e0": (row["void_ratio"], "void ratio in situ", "-"),
        "h": (row["bottom"] - row["top"], "thickness of the sub-layer", "m"),
    }
    place = f"sub-layer {row['number']}, {row['layer']}"
    formula = f"s10 = Rm · {creep} · h/(1 + e0)"
    result = (row["creep_per_decade"], "m")
    lines = [worked(CREEP, "settlement in a tenfold of time", formula, result, symbols, row=place)]
    most = max(segments, key=lambda segment: segment["secondary"])
    return lines + [_spell_formula(most["segment"], spell) for spell in most["creep"]]


def _creep_index(run: SheetRun, layer: int) -> tuple[str, dict[str, Symbol]]:
    """Return the secondary compression index as written in a formula, and its symbols."""
    if run.site.layers[layer].creep == "C_alpha":
        return "Cα", {"Cα": (run.layer_value(layer, "C_alpha"), "secondary compression index", "-")}
    return "r · λ · ln(10)", {
        "r": (run.layer_value(layer, "C_alpha_ratio"), "C_alpha over Cc", "-"),
        "λ": (float(run.state.ground.columns.lam[0, layer]), "slope in virgin compression", "-"),
    }


def _spell_formula(segment: int, spell: Record) -> Worked:
    """Return the secondary compression of one segment in one spell."""
    symbols: dict[str, Symbol] = {
        "S10": (spell["creep_per_decade"], "sum over the segment's sub-layers", "m"),
        "t": (spell["until"], "end of the spell", "years"),
        "t0": (spell["origin"], "from when the clay's age counts", "years"),
        "tp": (spell["begin"], "from when it creeps", "years"),
    }
    formula, result = "sα = S10 · log10((t − t0)/(tp − t0))", (spell["secondary"], "m")
    place = f"segment {segment}, after {spell['after']}, to {spell['until']:g} years"
    return worked(CREEP, "secondary compression", formula, result, symbols, row=place)


def strength_formulas(run: SheetRun, sublayer: Sublayer, rows: list[Record]) -> list[Worked]:
    """Return the undrained strength at one depth, before loading and at the end of the last stage.

    Parameters
    ----------
    run : SheetRun
        The computation.
    sublayer : Sublayer
        The sub-layer of the example.
    rows : list of dict
        Strength of the sheet.

    Returns
    -------
    lines : list of Worked
        S where it follows from M, and the strength.
    """
    if not rows:  # a station beside the section
        return []
    row = next(one for one in rows if one["sublayer"] == sublayer.number)
    place = f"sub-layer {sublayer.number}, {row['layer']}, at {row['depth']:.3f} m"
    law: dict[str, Symbol] = {
        "μm": (row["mode_factor"], "mode factor", "-"),
        "S": (row["strength_ratio"], "su over stress, normally consolidated", "-"),
        "m": (row["exponent"], "exponent of the overconsolidation ratio", "-"),
    }
    formula = "su = μm · S · σ' · (σ'p/σ')^m"
    stresses: dict[str, Symbol] = {
        "σ'": (row["initial_stress"], "effective stress in situ", "kPa"),
        "σ'p": (row["preconsolidation"], "preconsolidation stress in situ", "kPa"),
    }
    before = worked(STRENGTH, "strength before", formula, (row["before"], "kPa"), law | stresses, row=place)
    name, after = list(row["at_end_of_stage"].items())[-1]
    stresses = {
        "σ'": (after["stress"], "effective stress then", "kPa"),
        "σ'p": (after["preconsolidation"], "preconsolidation stress then", "kPa"),
    }
    then = worked(
        STRENGTH,
        "strength under the load after",
        formula,
        (after["under_crest"], "kPa"),
        law | stresses,
        row=f"{place}, end of {name}",
    )
    beside: dict[str, Symbol] = {
        "c": (after["slope_gain"], _SLOPE_GAIN if row["initial_excess"] else _SLOPE_SHARE, "-"),
        "σ'0": (row["initial_stress"], "effective stress in situ", "kPa"),
        "σ'": stresses["σ'"],
    }
    slope = worked(
        STRENGTH,
        "stress under the slope after",
        "σ's = σ'0 + c · (σ' − σ'0)",
        (after["stress_under_slope"], "kPa"),
        beside,
        row=f"{place}, end of {name}",
    )
    beside_load = [] if run.site.embankment is None else [slope]
    return [*_ratio_formulas(run, sublayer, row), before, then, *beside_load]


def _ratio_formulas(run: SheetRun, sublayer: Sublayer, row: Record) -> list[Worked]:
    form, columns = run.site.layers[sublayer.layer], run.state.ground.columns
    if form.strength_given:
        return []
    place = f"layer {form.name}"
    given = run.layer_value(sublayer.layer, form.friction)
    lam, kap = float(columns.lam[0, sublayer.layer]), float(columns.kap[0, sublayer.layer])
    lines = [
        worked(
            STRENGTH,
            "exponent",
            "m = 1 − κ/λ",
            (row["exponent"], "-"),
            {"κ": (kap, "slope in reloading", "-"), "λ": (lam, "slope in virgin compression", "-")},
            row=place,
        )
    ]
    m = given if form.friction == "M" else float(m_from_friction_angle(given))
    sine = float(sine_of_friction_angle(m))
    symbols: dict[str, Symbol] = {"M": (m, "slope of the critical state line", "-")}
    formula = "sinφ = 3 · M/(6 + M)"
    if form.friction == "phi":
        symbols, formula = {"φ": (given, "friction angle", "degrees")}, "sinφ = sin(φ)"
    lines.append(worked(STRENGTH, "sine of the friction angle", formula, (sine, "-"), symbols, row=place))
    a = (3.0 - sine) / (2.0 * (3.0 - 2.0 * sine))
    friction: Symbol = (sine, "sine of the friction angle", "-")
    lines.append(
        worked(
            STRENGTH,
            "stress ratio at rest over M",
            "a = (3 − sinφ)/(2 · (3 − 2 · sinφ))",
            (a, "-"),
            {"sinφ": friction},
            row=place,
        )
    )
    symbols = {
        "sinφ": friction,
        "a": (a, "stress ratio at rest over M", "-"),
        "m": (row["exponent"], "exponent", "-"),
    }
    formula, result = "S = sinφ/(2 · a) · ((a^2 + 1)/2)^m", (row["strength_ratio"], "-")
    lines.append(worked(STRENGTH, "strength ratio", formula, result, symbols, row=place))
    return lines


def slip_formulas(run: SheetRun, rows: list[Record]) -> list[Worked]:
    """Return the factor of safety of one stage.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of dict
        Slip of the sheet.

    Returns
    -------
    lines : list of Worked
        Resisting and driving moment and their ratio where the factor is least; none without slip.
    """
    if not rows:
        return []
    row = min(rows, key=lambda one: one["factor"])
    place = f"end of {row['stage']}"
    zone = max(row["clay_moment"], key=row["clay_moment"].get)
    fill: Symbol = (run.at["load.fill_unit_weight"], "unit weight of the fill", "kN/m3")
    symbols: dict[str, Symbol] = {
        "R": (row["radius"], "radius", "m"),
        "L": (row["clay_length"][zone], "length of the arc in clay", "m"),
        "su": (row["clay_strength"][zone], "mean strength along it", "kPa"),
    }
    moment = (row["clay_moment"][zone], "kNm/m")
    lines = [
        worked(SLIP, f"moment of the clay {zone_text(zone)}", "Mz = R · L · su", moment, symbols, row=place)
    ]
    symbols = {
        "γf": fill,
        "φf": (run.at["load.fill_phi"], "friction angle of the fill", "degrees"),
        "K": (row["fill_friction_form"], "form of the circle, friction in the fill", "m3"),
    }
    formula = "Mf = γf · tan(φf) · K"
    if row["traffic_friction_form"]:
        symbols["p"] = (run.at["load.traffic"], "pressure of traffic", "kPa")
        symbols["Kt"] = (row["traffic_friction_form"], "form of the circle, friction below traffic", "m2")
        formula = "Mf = tan(φf) · (γf · K + p · Kt)"
    moment = (row["fill_friction_moment"], "kNm/m")
    lines.append(worked(SLIP, "moment of friction in the fill", formula, moment, symbols, row=place))
    symbols = {"γf": fill, "V": (row["driving_form"], "moment of the fill inside the circle", "m3")}
    formula = "Md = γf · V"
    if row["heavier"] != 1.0:
        symbols["w"] = (row["heavier"], "weight with the fill that was added over that without", "-")
        formula = "Md = w · γf · V"
    if row["traffic_moment"]:
        symbols["p"] = (run.at["load.traffic"], "pressure of traffic", "kPa")
        symbols["Vt"] = (row["traffic_form"], "moment of a unit pressure on the top", "m2")
        formula += " + p · Vt"
    moment = (row["driving_moment"], "kNm/m")
    lines.append(worked(SLIP, "driving moment", formula, moment, symbols, row=place))
    return [*lines, _factor(row, place)]


def _factor(row: Record, place: str) -> Worked:
    parts = {
        f"M{number}": (moment, f"clay {zone_text(zone)}", "kNm/m")
        for number, (zone, moment) in enumerate(row["clay_moment"].items(), start=1)
    }
    parts |= {
        "Ms": (row["granular_moment"], "granular layers", "kNm/m"),
        "Mf": (row["fill_friction_moment"], "friction in the fill", "kNm/m"),
        "Mc": (row["fill_cohesion_moment"], "cohesion of the fill", "kNm/m"),
    }
    formula = f"F = ({' + '.join(parts)})/Md"
    symbols = parts | {"Md": (row["driving_moment"], "driving moment", "kNm/m")}
    return worked(SLIP, "factor of safety", formula, (row["factor"], "-"), symbols, row=place)


def zone_text(zone: str) -> str:
    """Return a zone of strength in words.

    Parameters
    ----------
    zone : str
        Such as ``under_slope``.

    Returns
    -------
    text : str
        Such as ``under the slope``.
    """
    return zone.replace("_", " the ")
