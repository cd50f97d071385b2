"""Empty tables for a laboratory: headings, what each column means, and invented examples marked as such.

Explanations and examples are in rows that begin with ``#``, which are never read; so a template that is
filled in below them needs nothing removed.
"""

import csv
import io
from collections.abc import Sequence
from pathlib import Path

from probsoil.errors import MissingExtraError, ParameterError, ResultsError
from probsoil.laboratory.columns import Column, TableLayout
from probsoil.laboratory.layout import LAYOUTS

EXAMPLE = "# invented: "
WORKBOOK = "laboratory_tables.xlsx"
KINDS = ("all", *dict.fromkeys(layout.about for layout in LAYOUTS))
_EXAMPLES: dict[str, tuple[tuple[str | float, ...], ...]] = {
    "holes": (("BH1", 12.5, 40.0, 15.0), ("CPT1", 30.0, 42.0, 14.0)),
    "strata": (("BH1", 0.0, 1.2, "crust"), ("BH1", 1.2, 9.4, "soft clay")),
    "plasticity": (("BH1", 4.0, 45),),
    "oedometer specimens": (
        ("BH1-P2 oedometer", "BH1", 4.2, "soft clay", 2.05, 20.0, "both faces", 0.003, 62),
    ),
    "oedometer increments": (
        ("BH1-P2 oedometer", 1, 25, 2.01, ""),
        ("BH1-P2 oedometer", 2, 50, 1.97, 6.1),
        ("BH1-P2 oedometer", 3, 100, 1.78, 0.9),
        ("BH1-P2 oedometer", 4, 25, 1.84, ""),
    ),
    "oedometer readings": (("BH1-P2 oedometer", 3, 0.25, 0.11), ("BH1-P2 oedometer", 3, 1440, 1.25)),
    "triaxial specimens": (("BH1-P3 triaxial", "BH1", 5.4, "soft clay", "CAUC", 40, 25, 1.96),),
    "triaxial readings": (
        ("BH1-P3 triaxial", 0.5, 24.5, 6.0, ""),
        ("BH1-P3 triaxial", 4.0, 29.0, 9.5, ""),
    ),
    "vane": (("BH1", "", 3.5, 14.0, 3.5, 44, "no"),),
    "cone": (("CPT1", "", 0.10, 0.210, 4.1, 0, 0.80), ("CPT1", "", 0.15, 0.214, 4.3, 0, 0.80)),
}


def template_rows(layout: TableLayout) -> list[tuple[str | float, ...]]:
    """Return the rows of a template.

    Parameters
    ----------
    layout : TableLayout
        Which table.

    Returns
    -------
    rows : list of tuple
        Explanations, headings, examples.
    """
    rows: list[tuple[str | float, ...]] = [
        (f"# {layout.name}: {layout.meaning}.",),
        ("# Rows that begin with # are not read. The unit in a heading may be any of the same kind.",),
        (f'# Rows that begin with "{EXAMPLE}" are examples; to use one, take that away with its #.',),
        *((f"# {column.heading}: {explanation(column)}",) for column in layout.columns),
        tuple(column.heading for column in layout.columns),
    ]
    for first, *others in _EXAMPLES[layout.name]:
        rows.append((f"{EXAMPLE}{first}", *others))
    return rows


def explanation(column: Column) -> str:
    """Return what a column holds, in one line.

    Parameters
    ----------
    column : Column
        Column of a table.

    Returns
    -------
    text : str
        Meaning, choices, and whether it may be left out.
    """
    choices = f": {', '.join(column.choices)}" if column.choices else ""
    return f"{column.meaning}{choices}{'' if column.required else ' (may be left out)'}"


def write_templates(
    kind: str, folder: str | Path, *, excel: bool = False, replace: bool = False
) -> list[Path]:
    """Write templates of the tables of one kind of test, or of all.

    Parameters
    ----------
    kind : str
        One of `KINDS`.
    folder : str or Path
        Where to; made if there is none.
    excel : bool
        Whether to write one workbook instead of CSV files.
    replace : bool
        Whether to replace files that are there.

    Returns
    -------
    files : list of Path
        What was written.

    Raises
    ------
    ParameterError
        If there is no such kind, or a file is there already.
    MissingExtraError
        If a workbook is asked for and the extra ``excel`` is not installed.
    ResultsError
        If a file cannot be written.
    """
    if kind not in KINDS:
        raise ParameterError(f"there is no table of '{kind}'; allowed: {', '.join(KINDS)}")
    layouts = [layout for layout in LAYOUTS if kind in ("all", layout.about)]
    contents = _workbook(layouts) if excel else _csv_files(layouts)
    home = Path(folder)
    there = [str(home / name) for name in contents if (home / name).exists()]
    if there and not replace:
        raise ParameterError(f"{', '.join(there)}: there already; --force replaces")
    try:
        home.mkdir(parents=True, exist_ok=True)
        for name, content in contents.items():
            (home / name).write_bytes(content)
    except OSError as error:
        raise ResultsError(f"'{home}' cannot be written to: {error.strerror or error}") from error
    return [home / name for name in contents]


def _csv_files(layouts: Sequence[TableLayout]) -> dict[str, bytes]:
    files = {}
    for layout in layouts:
        text = io.StringIO()
        csv.writer(text, lineterminator="\r\n").writerows(template_rows(layout))
        # with a mark at its beginning a spreadsheet program takes the file for UTF-8
        files[f"{layout.name.replace(' ', '_')}.csv"] = text.getvalue().encode("utf-8-sig")
    return files


def _workbook(layouts: Sequence[TableLayout]) -> dict[str, bytes]:
    try:
        import xlsxwriter
    except ImportError:
        raise MissingExtraError("writing a workbook", extra="excel") from None
    content = io.BytesIO()
    with xlsxwriter.Workbook(content, {"in_memory": True}) as book:
        bold, faint = (
            book.add_format({"bold": True}),
            book.add_format({"italic": True, "font_color": "#555555"}),
        )
        for layout in layouts:
            sheet = book.add_worksheet(layout.name)
            for place, row in enumerate(template_rows(layout)):
                sheet.write_row(place, 0, row, faint if str(row[0]).startswith("#") else bold)
            sheet.set_column(0, len(layout.columns) - 1, 22)
    return {WORKBOOK: content.getvalue()}
