"""The command `probsoil`: its subcommands, and what each ending means to the shell.

Exit codes: 0 done, 1 failed, 2 mistake in what was asked for (options, scenario, or a results folder
that does not go with them), 3 stopped early with partial results kept. Standard output carries the
answer only; the rest goes to standard error.
"""

import io
import shlex
import sys
from collections.abc import Sequence
from typing import Annotated

import typer
from typer.main import get_command

from probsoil.cli._output import answering
from probsoil.cli.assess import assess
from probsoil.cli.check import check
from probsoil.cli.interpret import interpret
from probsoil.cli.new import new
from probsoil.cli.report import report
from probsoil.cli.schema import schema
from probsoil.cli.sheet import sheet
from probsoil.cli.template import template
from probsoil.errors import FaultyInputError, ParameterError, ProbsoilError, StoppedEarly, UnfitFolderError

DONE, FAILED, MISTAKE, STOPPED = 0, 1, 2, 3
_HELP = {"-h", "--help", "--version"}
_INTERRUPTED = 130  # how typer ends when interrupted outside a campaign

app = typer.Typer(
    name="probsoil",
    help="How likely is it that works on soft clay settle too much or slip, and what drives it?",
    epilog="Begin with: probsoil new my-site.toml",
    no_args_is_help=True,
    pretty_exceptions_enable=False,
    context_settings={"help_option_names": ["-h", "--help"]},
)
for command in (new, check, sheet, assess, interpret, report, schema, template):
    app.command()(command)


def _print_version(asked: bool) -> None:
    if asked:
        import probsoil

        typer.echo(f"probsoil {probsoil.__version__}")
        raise typer.Exit


@app.callback()
def _common(
    version: Annotated[
        bool, typer.Option("--version", help="Print the version.", callback=_print_version, is_eager=True)
    ] = False,
) -> None:
    """How likely is it that works on soft clay settle too much or slip, and what drives it?"""  # noqa: D400


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line and return its exit code.

    Parameters
    ----------
    arguments : sequence of str or None
        Command line without the program's name; None for that of the process.

    Returns
    -------
    int, [-]
        0 done, 1 failed, 2 mistake in what was asked for, 3 stopped early with partial results kept.
    """
    given = list(sys.argv[1:] if arguments is None else arguments)
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):  # an odd character is no reason to lose an answer
            stream.reconfigure(errors="backslashreplace")
    try:
        code = _run(given)
        with answering():  # what is still on its way
            pass
    except ProbsoilError as fault:
        typer.echo(_message(fault), err=True)
        return _code(fault)
    except BaseException as fault:
        if _interrupted(fault):
            typer.echo("Interrupted; nothing is kept.", err=True)
            return FAILED
        if not isinstance(fault, Exception):
            raise
        typer.echo(f"probsoil failed unexpectedly: {type(fault).__name__}: {fault}", err=True)
        typer.echo(f"The details are in {_write_details(fault)}; please report them.", err=True)
        return FAILED
    return code


def _run(given: list[str]) -> int:
    """Hand the command line to its command and return the exit code of an ordinary ending."""
    try:
        get_command(app).main(
            args=given, prog_name="probsoil", obj={"command": shlex.join(["probsoil", *given])}
        )
    except SystemExit as end:
        code = end.code if isinstance(end.code, int) else DONE if end.code is None else FAILED
        if code == _INTERRUPTED:
            raise KeyboardInterrupt from None
        return code
    except OSError:
        if _HELP & set(given):  # no command ran: only the printing can have failed
            with answering():
                raise
        raise
    return DONE


def _interrupted(fault: BaseException) -> bool:
    from probsoil.campaign.interruption import is_interrupt

    return is_interrupt(fault)


def _code(fault: ProbsoilError) -> int:
    if isinstance(fault, StoppedEarly):
        return STOPPED if fault.kept else FAILED
    return MISTAKE if isinstance(fault, FaultyInputError | ParameterError | UnfitFolderError) else FAILED


def _message(fault: ProbsoilError) -> str:
    return str(fault) if isinstance(fault, FaultyInputError | StoppedEarly) else f"Error: {fault}"


def _write_details(fault: BaseException) -> str:
    """Write the traceback to the log of the run, or to a file of its own; return its path."""
    import tempfile
    import traceback

    log = getattr(fault, "log", None)
    if log is not None:  # the run had a log, and it has the traceback
        return str(log)
    with tempfile.NamedTemporaryFile(
        "w", prefix="probsoil-", suffix=".log", delete=False, encoding="utf-8"
    ) as file:
        traceback.print_exception(fault, file=file)
    return file.name
