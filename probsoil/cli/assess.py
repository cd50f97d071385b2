"""`probsoil assess`: the main job, from a scenario to probabilities, drivers and a report."""

from enum import StrEnum
from pathlib import Path
from typing import Annotated

import typer


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
        int | None, typer.Option(min=1, help="Number of realisations.", show_default="as in the scenario")
    ] = None,
    draws: Annotated[
        Draws | None, typer.Option(help="How to draw them.", show_default="as in the scenario")
    ] = None,
    seed: Annotated[
        int | None, typer.Option(min=0, help="Seed of the draws.", show_default="as in the scenario")
    ] = None,
    workers: Annotated[
        int | None, typer.Option(min=1, help="Number of workers.", show_default="every core")
    ] = None,
    resume: Annotated[bool, typer.Option("--resume", help="Go on from an interrupted run.")] = False,
    json: Annotated[bool, typer.Option("--json", help="Print the results as JSON and nothing else.")] = False,
    quiet: Annotated[bool, typer.Option("--quiet", "-q", help="Print nothing but errors.")] = False,
) -> None:
    """Find the chance that each limit is exceeded and what drives it; write a report."""
    from probsoil.assessment import assess as assessed
    from probsoil.cli._log import logged_run
    from probsoil.cli._output import print_json
    from probsoil.cli._progress import shown_progress
    from probsoil.cli._summary import print_summary
    from probsoil.report import write_report, write_tables
    from probsoil.scenario import read_scenario

    scenario = read_scenario(file)
    folder = Path("results", file.stem) if out is None else out
    command = context.obj["command"]
    with logged_run(folder, command, quiet=quiet):
        with shown_progress(quiet=quiet) as progress:
            assessment = assessed(
                scenario,
                out=folder,
                realisations=realisations,
                draws=None if draws is None else draws.value.replace("-", " "),
                seed=seed,
                workers=workers,
                resume=resume,
                progress=progress,
                command=command,
                source=file,
            )
            write_tables(assessment.results, folder)
            write_report(folder)
        if json:
            print_json(assessment.results)
        elif not quiet:
            print_summary(assessment.results, folder)
