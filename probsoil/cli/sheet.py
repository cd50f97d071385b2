"""`probsoil sheet`: one deterministic calculation, layer by layer."""

from collections.abc import Mapping
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from probsoil.cli._options import one_of, words_of

if TYPE_CHECKING:
    from rich.console import Console


class Values(StrEnum):
    """Where in its distribution every parameter is put."""

    mean = "mean"
    median = "median"


def sheet(  # noqa: PLR0913 - one option each
    file: Annotated[Path, typer.Argument(metavar="FILE", help="Scenario file.")],
    at: Annotated[
        Values,
        typer.Option(
            parser=one_of(Values),
            metavar="[mean|median]",
            autocompletion=words_of(Values),
            help="Value of every uncertain parameter.",
        ),
    ] = Values.mean,
    station: Annotated[
        str | None,
        typer.Option(
            "--station", metavar="NAME", help="Calculate at this station, not below the centreline or centre."
        ),
    ] = None,
    load: Annotated[
        str | None,
        typer.Option("--load", metavar="NAME", help="Calculate this further load, as if it were [load]."),
    ] = None,
    json: Annotated[bool, typer.Option("--json", help="Print the sheet as JSON.")] = False,
    csv: Annotated[bool, typer.Option("--csv", help="Print every table as CSV, one after another.")] = False,
    page: Annotated[
        Path | None,
        typer.Option(
            "--page", metavar="PAGE", help="Write the sheet as an HTML page to print, formulas included."
        ),
    ] = None,
) -> None:
    """Calculate once, every parameter at its mean or median, and show how, row by row."""
    if json and csv:
        raise typer.BadParameter("choose one of --json and --csv", param_hint="--csv")
    from probsoil.assessment import sheet as calculated
    from probsoil.cli._output import answer_console, answering, print_json
    from probsoil.report.sheet_columns import sheet_tables
    from probsoil.report.sheet_tables import tables_csv
    from probsoil.scenario import read_scenario

    content = calculated(read_scenario(file), at=at.value, station=station, load=load).to_dict()
    if page is not None:
        from probsoil.report.sheet_page import write_sheet

        write_sheet(page, content)
    with answering():
        if json:
            print_json(content)
        elif csv:
            typer.echo(tables_csv(sheet_tables(content)), nl=False)
        elif page is not None:
            typer.echo(f"Wrote {page}")
        else:
            _print_sheet(answer_console(), content)


def _print_sheet(console: "Console", content: Mapping[str, Any]) -> None:
    from probsoil.cli._output import counted, number, print_table
    from probsoil.report.sheet_columns import sheet_tables

    tests = counted(content["tests"], "test result")
    console.print(f"All parameters at their {content['at']}{f', after {tests}' if content['tests'] else ''}.")
    horizon = counted(content["times"][-1], "year")
    place = content.get("station", "centreline")
    console.print(f"Settlement at {horizon} {number(content['final_settlement'], '.3f')} m, at the {place}\n")
    for table in sheet_tables(content):
        if table.brief:
            print_table(console, table.title, table.headings, table.texts())
