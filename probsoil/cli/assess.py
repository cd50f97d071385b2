"""`probsoil assess`: the main job, from a scenario to probabilities, drivers and a report."""

from enum import StrEnum
from pathlib import Path
from typing import Annotated

import typer

from probsoil.cli._options import duration, one_of, share, whole_number, words_of

GREATEST_REALISATIONS = 100_000_000  # these two as in the scenario file
GREATEST_SEED = 2**63 - 1


class Draws(StrEnum):
    """How realisations are drawn."""

    monte_carlo = "monte-carlo"
    latin_hypercube = "latin-hypercube"
    sobol = "sobol"


def assess(  # noqa: PLR0913 - one argument for each option of the command
    context: typer.Context,
    file: Annotated[Path, typer.Argument(metavar="FILE", help="Scenario file.")],
    out: Annotated[
        Path | None, typer.Option(metavar="DIR", help="Results folder.", show_default="results/FILE")
    ] = None,
    realisations: Annotated[
        int | None,
        typer.Option(
            parser=whole_number(1, GREATEST_REALISATIONS),
            metavar="N",
            help="Number of realisations.",
            show_default="as in the scenario",
        ),
    ] = None,
    draws: Annotated[
        Draws | None,
        typer.Option(
            parser=one_of(Draws),
            metavar="[monte-carlo|latin-hypercube|sobol]",
            autocompletion=words_of(Draws),
            help="How to draw them.",
            show_default="as in the scenario",
        ),
    ] = None,
    seed: Annotated[
        int | None,
        typer.Option(
            parser=whole_number(0, GREATEST_SEED),
            metavar="N",
            help="Seed of the draws.",
            show_default="as in the scenario",
        ),
    ] = None,
    workers: Annotated[
        int | None,
        typer.Option(
            parser=whole_number(1), metavar="N", help="Number of workers.", show_default="every core"
        ),
    ] = None,
    within: Annotated[
        float | None,
        typer.Option(
            parser=share,
            metavar="SHARE",
            help="Go on until the interval of each chance is within this share of it, such as 20%.",
            show_default="no further runs",
        ),
    ] = None,
    time_limit: Annotated[
        float | None,
        typer.Option(
            parser=duration,
            metavar="TIME",
            help='Begin no further runs after this time, such as "5 minutes".',
            show_default="as many as realisations",
        ),
    ] = None,
    resume: Annotated[
        bool, typer.Option("--resume", help="Insist that there is an interrupted run to go on from.")
    ] = False,
    force: Annotated[
        bool,
        typer.Option(
            "--force", help="Replace what another run left unfinished, or files that are not a run's."
        ),
    ] = False,
    json: Annotated[bool, typer.Option("--json", help="Print the results as JSON and nothing else.")] = False,
    quiet: Annotated[bool, typer.Option("--quiet", "-q", help="Print nothing but errors.")] = False,
) -> None:
    """Find the chance that each limit is exceeded and what drives it; write a report.

    An interrupted run of the same scenario and settings is gone on from.
    """
    if resume and force:
        raise typer.BadParameter("choose one of --resume and --force", param_hint="--force")
    from probsoil.cli._interruption import told_interruption
    from probsoil.cli._log import logged_run
    from probsoil.cli._output import answering, print_json
    from probsoil.cli._progress import shown_progress
    from probsoil.cli._summary import print_summary

    folder = Path("results", file.stem) if out is None else out
    command = context.obj["command"]
    with told_interruption(folder), logged_run(folder, command, quiet=quiet) as log:
        from probsoil.campaign.interruption import deferred_interrupt

        with deferred_interrupt():
            from probsoil.assessment import assess as assessed
            from probsoil.assessment import claimed_folder
            from probsoil.report import write_report, write_tables
            from probsoil.scenario import read_scenario

        scenario = read_scenario(file)
        with claimed_folder(folder, source=file, force=force), shown_progress(quiet=quiet) as progress:
            log.begin()
            assessment = assessed(
                scenario,
                out=folder,
                realisations=realisations,
                draws=None if draws is None else draws.value.replace("-", " "),
                seed=seed,
                workers=workers,
                within=within,
                time_limit=time_limit,
                resume=resume,
                force=force,
                progress=progress,
                command=command,
                source=file,
            )
            write_tables(assessment.results, folder)
            write_report(folder)
        with answering():
            if json:
                print_json(assessment.results)
            elif not quiet:
                print_summary(assessment.results, folder)
