"""`probsoil new`: a starter scenario with comments."""

import shlex
from pathlib import Path
from typing import Annotated

import typer

from probsoil.cli._output import answering
from probsoil.errors import ResultsError


def new(
    file: Annotated[Path, typer.Argument(metavar="FILE", help="Scenario file to write.")],
    like: Annotated[
        str, typer.Option(help="Kind of works to begin from: embankment, footing or tank.")
    ] = "embankment",
    force: Annotated[bool, typer.Option("--force", help="Replace the file if there is one.")] = False,
) -> None:
    """Write a starter scenario with comments."""
    from probsoil.scenario import starter_text

    text = starter_text(like)
    try:
        with file.open("w" if force else "x", encoding="utf-8") as stream:
            stream.write(text)
    except FileExistsError:
        raise typer.BadParameter(
            f"'{file}' is there already; --force replaces it", param_hint="FILE"
        ) from None
    except OSError as fault:
        raise ResultsError(f"'{file}' cannot be written: {fault.strerror}") from fault
    with answering():
        typer.echo(f"Wrote {file}. Edit it, then: probsoil check {shlex.quote(str(file))}")
