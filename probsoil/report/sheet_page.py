"""The calculation sheet as a page to print: tables, and every formula with its numbers put in."""

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from probsoil.errors import ResultsError
from probsoil.report import text
from probsoil.report.sheet_columns import sheet_tables
from probsoil.report.sheet_tables import SheetTable
from probsoil.report.templating import content_hash, page_environment, page_style, replace_file

_SECTIONS = (
    ("ground", "Stress in situ", "stress in situ", ("stress in situ",)),
    ("load", "Stress from the load", "stress from the load", ("stress at the horizon",)),
    (
        "compression",
        "Compression",
        "compression",
        ("compression", "compression, granular", "compression when done", "layers"),
    ),
    ("time", "Consolidation in time", "consolidation", ("through time", "segments")),
    ("drains", "Vertical drains", "vertical drains", ("drains", "drains by sub-layer")),
    (
        "creep",
        "Secondary compression",
        "secondary compression",
        ("secondary compression", "secondary compression by sub-layer"),
    ),
    ("strength", "Undrained strength", "undrained strength", ("strength",)),
    ("slip", "Slip", "slip", ("critical circles", "arcs", "moments", "slip safety")),
    (
        "bearing",
        "Bearing",
        "bearing",
        ("bearing strength", "bearing points", "bearing capacity", "bearing safety", "squeezing safety"),
    ),
)
_WORDS = {
    "load": "At the same points. The excess pore pressure that is left is the answer of the consolidation "
    "equation, solved step by step through time; it cannot be worked out by hand.",
    "compression": "Void ratio depends on the logarithm of stress, and slopes and initial void ratio are the "
    "same over a layer. The means below are means of logarithms over the cells of a sub-layer, weighted by "
    "thickness: the change of void ratio they give is exactly the mean of the cells' own, and the "
    "sub-layers add up to the computed settlement without a remainder. They differ a little from the "
    "stresses at the points above. The cells are listed at the end.",
    "time": "The degree is the settlement of the clay so far over the settlement that the load then present "
    "reaches once its excess pressure has gone. The settlement of the clay at a time is the answer of the "
    "consolidation equation.",
    "strength": "At the points of the sub-layers, with the mode factor. After a stage the present stresses "
    "take the place of those in situ.",
    "creep": "Each drainage segment creeps while it has reached 95 % of its consolidation under the load of "
    "the time, from tp on. Its age counts from the middle of the first stage; a stage that takes the clay "
    "beyond the largest stress it knew makes it younger. Rm is the mean over the cells, by thickness, of "
    "what an unloading leaves of the creep in the end: 1 where the clay is at the largest stress it has "
    "carried.",
    "drains": "Every cell that drains reach loses water to them at 8 kh u/(γw (μ + μw) De²), besides what "
    "flows up and down.",
    "slip": "The circle with the least factor of safety. Strength changes along the arc; its mean over the "
    "length in a zone times that length and the radius is the moment. K and V are the form of the circle in "
    "the fill: K the sum of h cos²α R² Δθ over the arc in the fill, V the sum of h (x − xc) Δx over the fill "
    "inside the circle.",
    "bearing": "The line c0 + ρ min(z, B) is nowhere above the strength below the edge down to two "
    "widths, and of such lines the one that carries most. The crust is what of the strength above it never "
    "grows with depth. Arc: what the circle carries per unit of strength there, with depths of 0.9 z. The "
    "points are those below the level where the factor is least; the strength at the level itself is carried "
    "on from the two points below it.",
}


def write_sheet(path: Path, content: Mapping[str, Any]) -> None:
    """Write a calculation sheet as a page.

    Parameters
    ----------
    path : Path
        File to write.
    content : mapping
        The sheet as in its JSON.

    Raises
    ------
    ResultsError
        If the file cannot be written.
    """
    page = render_sheet(content)
    try:
        replace_file(Path(path), page)
    except OSError as error:
        raise ResultsError(f"the sheet cannot be written to {path}: {error}") from error


def render_sheet(content: Mapping[str, Any]) -> str:
    """Render a calculation sheet.

    Parameters
    ----------
    content : mapping
        The sheet as in its JSON.

    Returns
    -------
    page : str
        HTML document without scripts and without a request to anywhere; the same sheet gives the same
        bytes.
    """
    from markupsafe import Markup

    tables = {table.name: table for table in sheet_tables(content)}
    style = page_style("sheet.css")
    return (
        page_environment()
        .get_template("sheet.html")
        .render(
            title=content["title"] or "Calculation sheet",
            at=content["at"],
            block=_block(content),
            sections=_sections(content, tables),
            quantities=_view(tables["quantities"]) if "quantities" in tables else None,
            cells=_view(tables["cells"]) if "cells" in tables else None,
            assumptions=content["assumptions"],
            cautions=content["cautions"],
            style=Markup(style),
            style_hash=content_hash(style),
        )
    )


def _block(content: Mapping[str, Any]) -> list[tuple[str, str]]:
    horizon = content["times"][-1]
    rows = [
        ("Parameters", f"all at their {content['at']}"),
        (
            f"Settlement at {horizon:g} years, {content['station']}",
            text.value_text(content["final_settlement"], "m"),
        ),
    ]
    for key, label in (("slip", "slip"), ("bearing", "bearing failure")):
        factors = content.get(f"{key}_safety") or {}
        if factors:
            stage = min(factors, key=factors.__getitem__)
            words = f"{factors[stage]:.2f}, end of {stage}"
            rows.append((f"Least factor of safety against {label}", words))
    return rows


def _sections(content: Mapping[str, Any], tables: Mapping[str, SheetTable]) -> list[dict[str, Any]]:
    sections = []
    for name, title, topic, wanted in _SECTIONS:
        mine = [table for table in tables.values() if table.name in wanted or _of_stage(table, wanted)]
        lines = [line for line in content["formulas"] if line["topic"] == topic]
        if mine or lines:
            sections.append(
                {
                    "id": name,
                    "title": title,
                    "words": _WORDS.get(name, ""),
                    "formulas": lines,
                    "tables": [_view(table) for table in mine],
                }
            )
    return sections


def _of_stage(table: SheetTable, wanted: tuple[str, ...]) -> bool:
    return any(table.name.startswith(f"{name} ") for name in wanted if name == "strength")


def _view(table: SheetTable) -> dict[str, Any]:
    numeric = [bool(column.form) for column in table.columns]
    return {
        "title": table.title,
        "headings": list(zip(table.headings, numeric, strict=True)),
        "rows": [list(zip(row, numeric, strict=True)) for row in table.texts()],
    }
