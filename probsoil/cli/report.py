"""`probsoil report`: the report again from stored results."""

from pathlib import Path
from typing import Annotated

import typer

from probsoil.cli._output import answering


def report(
    folder: Annotated[
        Path,
        typer.Argument(metavar="DIR", help="Results folder of an earlier run.", exists=True, file_okay=False),
    ],
    quiet: Annotated[bool, typer.Option("--quiet", "-q", help="Print nothing but errors.")] = False,
) -> None:
    """Write report and tables again from stored results, without calculating."""
    from probsoil.campaign.lock import locked_folder
    from probsoil.report import write_report, write_tables
    from probsoil.report.page import read_results

    with locked_folder(folder):
        write_tables(read_results(folder / "results.json"), folder)
        write_report(folder)
    if not quiet:
        with answering():
            typer.echo(f"Wrote {folder / 'report.html'}")
