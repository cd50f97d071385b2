"""`probsoil interpret`: from test sheets to evidence, with every construction drawn."""

from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from probsoil.cli._options import one_of, words_of

if TYPE_CHECKING:
    from probsoil.assessment.site_back_check import SiteBackChecks
    from probsoil.laboratory.interpretation import Interpretation


class FailureAt(StrEnum):
    """Definition of failure at which M is taken."""

    stress_ratio = "stress-ratio"
    peak_deviator = "peak-deviator"


def interpret(  # noqa: PLR0913 - one argument for each option of the command
    context: typer.Context,
    data: Annotated[list[Path], typer.Argument(metavar="DATA...", help="Files of test sheets.")],
    layers: Annotated[
        Path | None,
        typer.Option(metavar="FILE", help="Scenario file whose layers the tests are put into."),
    ] = None,
    out: Annotated[
        Path, typer.Option(metavar="DIR", help="Folder to write to.", show_default="results/interpretation")
    ] = Path("results", "interpretation"),
    keep_good_rows: Annotated[
        bool, typer.Option("--keep-good-rows", help="Go on with the good rows of files with mistakes.")
    ] = False,
    vane_corrected: Annotated[
        bool | None,
        typer.Option(
            "--vane-corrected/--vane-as-measured",
            help="Whether vane strengths already carry a correction.",
            show_default="as each sheet says",
        ),
    ] = None,
    failure: Annotated[
        FailureAt,
        typer.Option(
            parser=one_of(FailureAt),
            metavar="[stress-ratio|peak-deviator]",
            autocompletion=words_of(FailureAt),
            help="Where M is taken: at the greatest stress ratio or the peak deviator.",
        ),
    ] = FailureAt.stress_ratio,
    unit_weight: Annotated[
        float | None,
        typer.Option(metavar="G", help="Unit weight of the ground in kN/m3 where no layers are given."),
    ] = None,
    water_table: Annotated[
        float | None,
        typer.Option(metavar="Z", help="Depth of the water table in m that goes with it.", show_default="0"),
    ] = None,
    force: Annotated[
        bool, typer.Option("--force", help="Replace files that are not an earlier interpretation's.")
    ] = False,
    quiet: Annotated[bool, typer.Option("--quiet", "-q", help="Print nothing but errors.")] = False,
) -> None:
    """Interpret laboratory and field tests; write evidence, tables, figures and a page."""
    if layers is not None and (unit_weight is not None or water_table is not None):
        raise typer.BadParameter(
            "the layers say what the ground weighs; leave out --unit-weight and --water-table",
            param_hint="--layers",
        )
    if water_table is not None and unit_weight is None:
        raise typer.BadParameter("give --unit-weight too", param_hint="--water-table")
    from probsoil.assessment.site_back_check import site_back_checks
    from probsoil.campaign import locked_folder
    from probsoil.cli._log import logged_run
    from probsoil.cli._output import answering
    from probsoil.laboratory import interpretation as rooms
    from probsoil.report.interpretation_page import require_own_folder, write_interpretation

    if not force:
        require_own_folder(out)
    choices = rooms.Choices(
        vane_corrected=vane_corrected,
        failure="stress ratio" if failure is FailureAt.stress_ratio else "peak deviator",
        unit_weight=unit_weight,
        water_table=water_table or 0.0,
    )
    with logged_run(out, context.obj["command"], quiet=quiet) as log:
        done = rooms.interpret(data, layers=layers, keep_good_rows=keep_good_rows, choices=choices)
        checks = site_back_checks(done)
        with locked_folder(out):
            log.begin()
            _log_remarks((*done.remarks, *checks.remarks))
            page = write_interpretation(done, out, checks)
        with answering():
            if not quiet:
                _print_gist(done, checks, page)


def _log_remarks(remarks: tuple[str, ...]) -> None:
    import logging

    for words in remarks:
        logging.getLogger("probsoil").info("%s", words)


def _print_gist(done: "Interpretation", checks: "SiteBackChecks", page: Path) -> None:
    from probsoil.cli._output import answer_console, counted, print_table
    from probsoil.report.interpretation_tables import gist_rows

    console = answer_console()
    headings, rows = gist_rows(done)
    print_table(console, f"{counted(len(done.observations), 'observed number')}", headings, rows)
    doubtful = [one for one in done.observations if one.flag]
    for one in doubtful:
        console.print(f"Doubtful: {one.test}, {one.parameter}, {one.depth:g} m: {one.flag}")
    for check in checks.checks:
        if check.words:
            console.print(f"Back-check: {check.test}: {check.words[-1]}")
    for words in (*done.remarks, *checks.remarks):
        console.print(f"Remark: {words}")
    console.print(f"Evidence: {page.with_name('evidence.csv')}", soft_wrap=True)
    console.print(f"Page: {page}", soft_wrap=True)
