"""`probsoil check`: every mistake in a scenario, or what was understood of it."""

from pathlib import Path
from typing import Annotated

import typer


def check(file: Annotated[Path, typer.Argument(metavar="FILE", help="Scenario file.")]) -> None:
    """Read a scenario, name every mistake in it, and print what was understood."""
    from probsoil.assessment.evaluation import space_of
    from probsoil.cli._output import answer_console, answering
    from probsoil.cli._understood import print_scenario
    from probsoil.parameters.range_remarks import range_remarks
    from probsoil.scenario import read_scenario, remarks

    scenario = read_scenario(file)
    space = space_of(scenario)
    with answering():
        console = answer_console()
        console.print(f"{file}: no mistakes found", soft_wrap=True)
        print_scenario(console, scenario, space)
        for remark in (*remarks(scenario), *range_remarks(scenario)):
            console.print(f"Look again: {remark}")
