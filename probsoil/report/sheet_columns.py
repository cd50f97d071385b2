"""Which columns every table of a calculation sheet has, in which units and with how many decimals."""

from collections.abc import Callable, Iterable, Mapping
from typing import Any

from probsoil.report.sheet_safety_columns import bearing_tables, slip_tables, strength_tables
from probsoil.report.sheet_tables import PLAIN, SheetTable, sheet_table


def sheet_tables(content: Mapping[str, Any]) -> list[SheetTable]:
    """Return the tables of a sheet in the order in which it is followed.

    Parameters
    ----------
    content : mapping
        A sheet as in its JSON.

    Returns
    -------
    tables : list of SheetTable
        Those that have rows.
    """
    makers: tuple[Callable[[Mapping[str, Any]], Iterable[SheetTable]], ...] = (
        _layers,
        _stations,
        _sublayers,
        _through_time,
        _drains,
        strength_tables,
        slip_tables,
        bearing_tables,
        _annex,
    )
    return [table for maker in makers for table in maker(content) if table.rows]


def _layers(content: Mapping[str, Any]) -> list[SheetTable]:
    columns = [
        ("layer", "name"),
        ("soil", "soil"),
        ("top [m]", "top", ".2f"),
        ("bottom [m]", "bottom", ".2f"),
        ("initial stress [kPa]", "initial_stress", ".1f"),
        ("preconsolidation [kPa]", "preconsolidation", ".1f"),
        ("stress increase [kPa]", "stress_increase", ".1f"),
        ("void ratio [-]", "void_ratio", ".3f"),
        ("strain [-]", "strain", ".4f"),
        ("settlement [m]", "settlement", ".3f"),
    ]
    if any(row.get("secondary") for row in content["layers"]):
        columns.append(("secondary [m]", "secondary", ".3f"))
    if content.get("distortion"):
        columns.append(("distortion [m]", "distortion", ".4f"))
    return [sheet_table("layers", "Layers; stresses at the middle of each", content["layers"], columns)]


def _stations(content: Mapping[str, Any]) -> list[SheetTable]:
    return [
        sheet_table(
            "stations",
            "Stations",
            content.get("stations", ()),
            [
                ("station", "station"),
                ("x [m]", "x", ".2f"),
                ("y [m]", "y", ".2f"),
                ("settlement after the last stage [m]", "after_last_stage", ".4f"),
                ("at the horizon [m]", "settlement", ".4f"),
            ],
        ),
        sheet_table(
            "station pairs",
            "Differences between stations at the horizon",
            content.get("station_pairs", ()),
            [
                ("station", "station"),
                ("and", "other"),
                ("distance [m]", "distance", ".2f"),
                ("difference [m]", "difference", ".4f"),
                ("distortion [-]", "distortion", ".6f"),
            ],
        ),
    ]


def _sublayers(content: Mapping[str, Any]) -> list[SheetTable]:
    rows = content.get("sublayers", ())
    clay = [row for row in rows if row["soil"] == "clay"]
    granular = [row for row in rows if row["soil"] == "granular"]
    place = (("no.", "number"), ("layer", "layer"))
    excess = [("excess ui [kPa]", "initial_excess", ".2f")] if any(map(_has_excess, rows)) else []
    beside = any(row.get("further_stress") for row in rows)
    further = [("of further loads Δσn [kPa]", "further_stress", ".2f")] if beside else []
    return [
        sheet_table(
            "seepage",
            "Steady seepage before loading; levels of water as depths below ground level",
            content.get("seepage", ()),
            [
                ("layer", "layer"),
                ("top [m]", "top", ".2f"),
                ("bottom [m]", "bottom", ".2f"),
                ("permeability [m/year]", "permeability", PLAIN),
                ("resistance R [years]", "resistance", PLAIN),
                ("level at top [m]", "level_at_top", ".3f"),
                ("level at bottom [m]", "level_at_bottom", ".3f"),
                ("pore at top [kPa]", "pore_pressure_at_top", ".2f"),
                ("pore at bottom [kPa]", "pore_pressure_at_bottom", ".2f"),
            ],
        ),
        sheet_table(
            "stress in situ",
            "Stress in situ, at the cell nearest to the middle of each sub-layer",
            rows,
            [
                *place,
                ("top [m]", "top", ".3f"),
                ("bottom [m]", "bottom", ".3f"),
                ("point [m]", "depth", ".3f"),
                ("total σv [kPa]", "total_stress", ".2f"),
                ("pore u0 [kPa]", "pore_pressure", ".2f"),
                *excess,
                ("effective σ'0 [kPa]", "initial_stress", ".2f"),
                ("preconsolidation σ'p [kPa]", "preconsolidation", ".2f"),
            ],
        ),
        sheet_table(
            "stress at the horizon",
            "Stress from the load at the horizon, at the same points",
            rows,
            [
                *place,
                ("point [m]", "depth", ".3f"),
                ("influence I [-]", "influence", ".4f"),
                *further,
                ("increase Δσ [kPa]", "stress_increase", ".2f"),
                ("submergence δ [kPa]", "relief", ".2f"),
                ("excess u [kPa]", "excess_pore_pressure", ".2f"),
                ("effective σ' [kPa]", "final_stress", ".2f"),
            ],
        ),
        sheet_table(
            "compression",
            "Compression of clay at the horizon; stresses are means of logarithms over the cells",
            clay,
            [
                *place,
                ("cells", "cells", "d"),
                ("σ'0m [kPa]", "mean_initial_stress", ".2f"),
                ("σ'pm [kPa]", "mean_preconsolidation", ".2f"),
                ("largest σ'ym [kPa]", "mean_largest_stress", ".2f"),
                ("σ'm [kPa]", "mean_final_stress", ".2f"),
                ("e0 [-]", "void_ratio", ".3f"),
                ("Δe [-]", "void_ratio_change", ".5f"),
                ("strain ε [-]", "strain", ".5f"),
                ("settlement s [m]", "settlement", ".5f"),
            ],
        ),
        sheet_table(
            "compression when done",
            "Compression of clay once all excess pore pressure has gone",
            clay,
            [
                *place,
                ("largest σ'ym [kPa]", "mean_largest_stress_when_done", ".2f"),
                ("σ'm [kPa]", "mean_stress_when_done", ".2f"),
                ("Δe [-]", "void_ratio_change_when_done", ".5f"),
                ("settlement s∞ [m]", "settlement_when_done", ".5f"),
            ],
            brief=False,
        ),
        sheet_table(
            "compression, granular",
            "Compression of granular layers",
            granular,
            [
                *place,
                ("mean increase Δσm [kPa]", "mean_stress_increase", ".2f"),
                ("strain [-]", "strain", ".5f"),
                ("settlement s [m]", "settlement", ".5f"),
            ],
        ),
        sheet_table(
            "undrained distortion",
            "Undrained distortion of clay at the horizon, at once with the load",
            content.get("distortion", ()),
            [
                ("no.", "sublayer"),
                ("layer", "layer"),
                ("top below load [m]", "top_below_load", ".3f"),
                ("bottom below load [m]", "bottom_below_load", ".3f"),
                ("ft at top [m]", "displacement_at_top", ".4f"),
                ("fb at bottom [m]", "displacement_at_bottom", ".4f"),
                ("pressure q [kPa]", "pressure", ".2f"),
                ("Eu [kPa]", "modulus", ".0f"),
                ("settlement [m]", "settlement", ".5f"),
            ],
        ),
    ]


def _has_excess(row: Mapping[str, Any]) -> bool:
    return bool(row.get("initial_excess"))


def _through_time(content: Mapping[str, Any]) -> list[SheetTable]:
    rows = content.get("through_time") or [
        {"time": time, "settlement": value}
        for time, value in zip(content["times"], content["settlement"], strict=True)
    ]
    columns: list[Any] = [("time [years]", "time", ".2f"), ("settlement [m]", "settlement", ".3f")]
    if content.get("through_time"):
        columns = [
            ("time [years]", "time", ".3f"),
            ("fill [m]", "fill_height", ".2f"),
            *([("added [m]", "fill_added", ".3f")] if any(row.get("fill_added") for row in rows) else []),
            ("load [kPa]", "surface_pressure", ".1f"),
            ("clay [m]", "clay", ".4f"),
            ("granular [m]", "granular", ".4f"),
            ("secondary [m]", "secondary", ".4f"),
            *([("distortion [m]", "distortion", ".4f")] if content.get("distortion") else []),
            ("settlement [m]", "settlement", ".4f"),
            ("clay when done [m]", "clay_when_done", ".4f"),
            ("degree U [-]", "degree", ".3f"),
        ]
    segments = content.get("segments", ())
    place: list[Any] = [
        ("segment", "segment"),
        ("layers", "layers"),
        ("top [m]", "top", ".2f"),
        ("bottom [m]", "bottom", ".2f"),
        ("drains at", "drains_at"),
    ]
    spells = [{"segment": row["segment"], **spell} for row in segments for spell in row["creep"]]
    return [
        sheet_table("through time", "Settlement and degree of consolidation in time", rows, columns),
        sheet_table(
            "segments",
            "Drainage segments at the horizon",
            segments,
            [
                *place,
                ("clay [m]", "settlement", ".4f"),
                ("when done [m]", "settlement_when_done", ".4f"),
                ("degree [-]", "degree", ".3f"),
                ("end of primary tp [years]", "end_of_primary", ".3f"),
            ],
        ),
        sheet_table(
            "secondary compression",
            "Secondary compression up to the horizon, from the middle of a stage to that of the next",
            spells,
            [
                ("segment", "segment"),
                ("after stage", "after"),
                ("age from t0 [years]", "origin", ".3f"),
                ("creeps from tp [years]", "begin", ".3f"),
                ("until t [years]", "until", ".3f"),
                ("per decade S10 [m]", "creep_per_decade", ".5f"),
                ("decades [-]", "decades", ".4f"),
                ("secondary sα [m]", "secondary", ".5f"),
            ],
        ),
        sheet_table(
            "secondary compression by sub-layer",
            "Secondary compression of each sub-layer in a tenfold of time",
            [row for row in content.get("sublayers", ()) if row["creep_per_decade"] > 0.0],
            [
                ("no.", "number"),
                ("layer", "layer"),
                ("left by unloading Rm [-]", "creep_reduction", ".4f"),
                ("s10 [m]", "creep_per_decade", ".5f"),
            ],
            brief=False,
        ),
    ]


def _drains(content: Mapping[str, Any]) -> list[SheetTable]:
    drains = content.get("drains")
    if not drains:
        return []
    return [
        sheet_table(
            "drains",
            "Vertical drains",
            [drains],
            [
                ("grid", "pattern"),
                ("spacing [m]", "spacing", ".3f"),
                ("De [m]", "influence_diameter", ".4f"),
                ("dw [m]", "diameter", ".4f"),
                ("n [-]", "spacing_ratio", ".3f"),
                ("smear s [-]", "smear_ratio", ".3f"),
                ("kh/ks [-]", "smear_permeability_ratio", ".3f"),
                ("bottom [m]", "bottom", ".2f"),
                ("qw [m3/year]", "discharge_capacity", ".1f"),
                ("from [years]", "installed", ".3f"),
                ("μ [-]", "factor", ".4f"),
            ],
        ),
        sheet_table(
            "drains by sub-layer",
            "Factor μ of the drains with their own resistance",
            drains["rows"],
            [
                ("no.", "sublayer"),
                ("point [m]", "depth", ".3f"),
                ("reached [-]", "share_reached", ".3f"),
                ("kh/kv [-]", "permeability_ratio", ".3f"),
                ("kh in situ [m/year]", "permeability", ".5f"),
                ("added μw [-]", "resistance", ".4f"),
                ("μ + μw [-]", "factor", ".4f"),
            ],
        ),
    ]


def _annex(content: Mapping[str, Any]) -> list[SheetTable]:
    return [
        sheet_table(
            "formulas",
            "Formulas with the numbers of one row put in",
            content.get("formulas", ()),
            [
                ("topic", "topic"),
                ("what", "name"),
                ("row", "row"),
                ("formula", "formula"),
                ("numbers", "numbers"),
                ("result [unit]", "result"),
                ("unit", "unit"),
            ],
            brief=False,
        ),
        sheet_table(
            "quantities",
            "Values used",
            content.get("quantities", ()),
            [
                ("quantity", "address"),
                ("value [unit]", "value", PLAIN),
                ("unit", "unit"),
                ("meaning", "meaning"),
            ],
            brief=False,
        ),
        sheet_table(
            "cells",
            "The program's cells at the horizon",
            content.get("cells", ()),
            [
                ("sub-layer", "sublayer"),
                ("centre [m]", "depth", ".4f"),
                ("thickness [m]", "thickness", ".5f"),
                ("σ'0 [kPa]", "initial_stress", ".3f"),
                ("σ'p [kPa]", "preconsolidation", ".3f"),
                ("Δσ [kPa]", "stress_increase", ".3f"),
                ("largest σ'y [kPa]", "largest_stress", ".3f"),
                ("σ' [kPa]", "final_stress", ".3f"),
                ("settlement [m]", "settlement", ".6f"),
            ],
            brief=False,
        ),
    ]
