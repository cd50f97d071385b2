"""`probsoil report`: the report again from stored results."""

from pathlib import Path
from typing import Annotated

import typer


def report(
    folder: Annotated[
        Path,
        typer.Argument(metavar="DIR", help="Results folder of an earlier run.", exists=True, file_okay=False),
    ],
) -> None:
    """Write the report again from stored results, without calculating."""
    from probsoil.report import write_report

    write_report(folder)
    typer.echo(f"Wrote {folder / 'report.html'}")
