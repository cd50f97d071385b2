"""Columns of strength, slip and bearing on a calculation sheet."""

from collections.abc import Mapping
from typing import Any

from probsoil.report.sheet_tables import SheetTable, sheet_table


def strength_tables(content: Mapping[str, Any]) -> list[SheetTable]:
    """Return the tables of undrained strength.

    Parameters
    ----------
    content : mapping
        A sheet as in its JSON.

    Returns
    -------
    tables : list of SheetTable
        Some may be empty.
    """
    detailed = content.get("strength_in_rows", ())
    first = (detailed or content["strength"] or [{"at_end_of_stage": {}}])[0]
    stages = list(first["at_end_of_stage"])
    if not detailed:
        columns = [
            ("layer", "layer"),
            ("depth [m]", "depth", ".2f"),
            ("before [kPa]", "before", ".1f"),
            *((f"{stage} [kPa]", f"at_end_of_stage/{stage}", ".1f") for stage in stages),
        ]
        return [sheet_table("strength", "Undrained shear strength", content["strength"], columns)]
    place: list[Any] = [("no.", "sublayer"), ("layer", "layer"), ("point [m]", "depth", ".3f")]
    columns = [
        *place,
        ("S [-]", "strength_ratio", ".4f"),
        ("m [-]", "exponent", ".4f"),
        ("σ'0 [kPa]", "initial_stress", ".2f"),
        ("σ'p [kPa]", "preconsolidation", ".2f"),
        ("slope share c [-]", "slope_share", ".4f"),
        ("su before [kPa]", "before", ".2f"),
    ]
    edge = "below the edge" if content.get("bearing") else "under the slope"
    parts = [
        ("stress", "σ'"),
        ("preconsolidation", "σ'p"),
        ("under_crest", "su under the load"),
        ("stress_under_slope", f"σ' {edge}"),
        ("under_slope", f"su {edge}"),
    ]
    after = [
        sheet_table(
            f"strength after {stage}",
            f"Undrained strength at the end of {stage}",
            detailed,
            [
                *place,
                *((f"{label} [kPa]", f"at_end_of_stage/{stage}/{key}", ".2f") for key, label in parts),
            ],
        )
        for stage in stages
    ]
    return [sheet_table("strength before", "Undrained strength before loading", detailed, columns), *after]


def slip_tables(content: Mapping[str, Any]) -> list[SheetTable]:
    """Return the tables of slip.

    Parameters
    ----------
    content : mapping
        A sheet as in its JSON.

    Returns
    -------
    tables : list of SheetTable
        Some may be empty.
    """
    rows = content.get("slip", ())
    if not rows:
        return [_by_stage("slip safety", "Least factor of safety against undrained slip", content, "slip")]
    zones = [
        ("beyond the toe", "beyond_toe"),
        ("under the slope", "under_slope"),
        ("under the crest", "under_crest"),
        ("under a berm", "under_berm"),
    ]
    zones = [(label, key) for label, key in zones if key in rows[0]["clay_moment"]]
    stage = ("at the end of stage", "stage")
    return [
        sheet_table(
            "critical circles",
            "Critical circle; x from the outer toe towards the fill, y upward from ground level",
            rows,
            [
                stage,
                ("fill [m]", "fill_height", ".2f"),
                ("centre x [m]", "centre_x", ".3f"),
                ("centre y [m]", "centre_y", ".3f"),
                ("radius R [m]", "radius", ".3f"),
                ("deepest [m]", "deepest", ".3f"),
                ("leaves at x [m]", "leaves_at", ".3f"),
                ("enters at x [m]", "enters_at", ".3f"),
                ("factor F [-]", "factor", ".2f"),
            ],
        ),
        sheet_table(
            "arcs",
            "Arc in clay: length and mean strength",
            rows,
            [
                stage,
                *((f"L {label} [m]", f"clay_length/{key}", ".3f") for label, key in zones),
                *((f"su {label} [kPa]", f"clay_strength/{key}", ".2f") for label, key in zones),
            ],
            brief=False,
        ),
        sheet_table(
            "moments",
            "Moments about the centre, per metre run",
            rows,
            [
                stage,
                *((f"clay {label} [kNm/m]", f"clay_moment/{key}", ".1f") for label, key in zones),
                ("granular [kNm/m]", "granular_moment", ".1f"),
                ("fill friction [kNm/m]", "fill_friction_moment", ".1f"),
                ("fill cohesion [kNm/m]", "fill_cohesion_moment", ".1f"),
                ("resisting [kNm/m]", "resisting_moment", ".1f"),
                ("driving [kNm/m]", "driving_moment", ".1f"),
                ("factor F [-]", "factor", ".3f"),
            ],
        ),
    ]


def _by_stage(name: str, title: str, content: Mapping[str, Any], key: str) -> SheetTable:
    rows = [{"stage": stage, "factor": value} for stage, value in content.get(f"{key}_safety", {}).items()]
    return sheet_table(name, title, rows, [("at the end of stage", "stage"), ("factor [-]", "factor", ".2f")])


def bearing_tables(content: Mapping[str, Any]) -> list[SheetTable]:
    """Return the tables of bearing and squeezing.

    Parameters
    ----------
    content : mapping
        A sheet as in its JSON.

    Returns
    -------
    tables : list of SheetTable
        Some may be empty.
    """
    rows = content.get("bearing", ())
    place = (("stage", "stage"), ("level [m]", "depth", ".2f"))
    return [
        sheet_table(
            "bearing strength",
            "Strength for bearing: c0 + rho z below each level, and what a crust adds",
            rows,
            [
                *place,
                ("width [m]", "width", ".2f"),
                ("c0 [kPa]", "strength", ".2f"),
                ("rho [kPa/m]", "growth", ".2f"),
                ("rho B/c0 [-]", "growth_ratio", ".3f"),
                ("F [-]", "growth_factor", ".3f"),
                ("crust factor [-]", "crust_factor", ".3f"),
            ],
        ),
        sheet_table(
            "bearing points",
            "Strength, line and crust below the level where the factor is least",
            content.get("bearing_points", ()),
            [
                ("depth [m]", "depth", ".3f"),
                ("z below level [m]", "below", ".3f"),
                ("su [kPa]", "strength", ".2f"),
                ("line [kPa]", "line", ".2f"),
                ("crust [kPa]", "excess", ".2f"),
                ("arc [-]", "arc", ".4f"),
            ],
            brief=False,
        ),
        sheet_table(
            "bearing capacity",
            "Undrained bearing: strip x shape x depth = capacity, over the pressure there",
            rows,
            [
                *place,
                ("strip [kPa]", "strip_capacity", ".1f"),
                ("shape [-]", "shape_factor", ".3f"),
                ("depth [-]", "depth_factor", ".3f"),
                ("capacity [kPa]", "capacity", ".1f"),
                ("pressure [kPa]", "pressure", ".1f"),
                ("factor [-]", "safety", ".2f"),
            ],
        ),
        _by_stage(
            "bearing safety", "Least factor of safety against undrained bearing failure", content, "bearing"
        ),
        _by_stage(
            "squeezing safety",
            "Factor of safety against squeezing of the thin clay, a check besides",
            content,
            "squeezing",
        ),
    ]
