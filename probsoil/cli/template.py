"""`probsoil template`: tables for a laboratory to fill in."""

from pathlib import Path
from typing import Annotated

import typer

from probsoil.cli._output import answering


def template(
    kind: Annotated[
        str,
        typer.Argument(metavar="[KIND]", help="all, ground, oedometer, triaxial, vane or cone."),
    ] = "all",
    out: Annotated[Path, typer.Option("--out", metavar="DIR", help="Folder to write to.")] = Path("sheets"),
    excel: Annotated[bool, typer.Option("--excel", help="One workbook instead of CSV files.")] = False,
    force: Annotated[bool, typer.Option("--force", help="Replace files that are there.")] = False,
) -> None:
    """Write tables for a laboratory to fill in, with explanations and marked examples."""
    from probsoil.laboratory.templates import write_templates

    files = write_templates(kind, out, excel=excel, replace=force)
    with answering():
        for file in files:
            typer.echo(f"Wrote {file}")
