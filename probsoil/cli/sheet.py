"""`probsoil sheet`: one deterministic calculation, layer by layer."""

from collections.abc import Iterable, Mapping, Sequence
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

if TYPE_CHECKING:
    from rich.console import Console


class Values(StrEnum):
    """Where in its distribution every parameter is put."""

    mean = "mean"
    median = "median"


def sheet(
    file: Annotated[Path, typer.Argument(metavar="FILE", help="Scenario file.")],
    at: Annotated[Values, typer.Option(help="Value of every uncertain parameter.")] = Values.mean,
    json: Annotated[bool, typer.Option("--json", help="Print the sheet as JSON.")] = False,
    csv: Annotated[bool, typer.Option("--csv", help="Print the layers as CSV.")] = False,
) -> None:
    """Calculate once, every parameter at its mean or median, and show each layer."""
    if json and csv:
        raise typer.BadParameter("choose one of --json and --csv", param_hint="--csv")
    from probsoil.assessment import sheet as calculated
    from probsoil.cli._output import answer_console, print_json
    from probsoil.scenario import read_scenario

    result = calculated(read_scenario(file), at=at.value)
    if json:
        print_json(result.to_dict())
    elif csv:
        typer.echo(result.to_frame().to_csv(index=False), nl=False)
    else:
        _print_sheet(answer_console(), result.to_dict())


def _print_sheet(console: "Console", content: Mapping[str, Any]) -> None:
    from probsoil.cli._output import number, print_table

    console.print(f"All parameters at their {content['at']}. Stresses are at the middle of each layer.")
    _print_layers(console, content["layers"])
    console.print(
        f"Settlement at {content['times'][-1]:g} years {number(content['final_settlement'], '.3f')} m\n"
    )
    times = zip(content["times"], content["settlement"], strict=True)
    print_table(
        console,
        "Settlement in time",
        ("time [years]", "settlement [m]"),
        ((number(time, ".2f"), number(value, ".3f")) for time, value in times),
    )
    _print_strength(console, content["strength"])
    if content["slip_safety"]:
        print_table(
            console,
            "Least factor of safety against undrained slip",
            ("at the end of stage", "factor [-]"),
            ((stage, number(value, ".2f")) for stage, value in content["slip_safety"].items()),
        )


def _print_layers(console: "Console", layers: Sequence[Mapping[str, Any]]) -> None:
    from probsoil.cli._output import number, print_table

    print_table(
        console,
        "Stresses",
        (
            "layer",
            "top [m]",
            "bottom [m]",
            "initial stress [kPa]",
            "preconsolidation [kPa]",
            "stress increase [kPa]",
        ),
        (
            (
                layer["name"],
                *(number(layer[key], ".2f") for key in ("top", "bottom")),
                *(
                    number(layer[key], ".1f")
                    for key in ("initial_stress", "preconsolidation", "stress_increase")
                ),
            )
            for layer in layers
        ),
    )
    print_table(
        console,
        "Compression",
        ("layer", "soil", "initial void ratio [-]", "strain [-]", "settlement [m]"),
        (
            (
                layer["name"],
                layer["soil"],
                number(layer["void_ratio"], ".3f"),
                number(layer["strain"], ".4f"),
                number(layer["settlement"], ".3f"),
            )
            for layer in layers
        ),
    )


def _print_strength(console: "Console", rows: Iterable[Mapping[str, Any]]) -> None:
    from probsoil.cli._output import number, print_table

    rows = list(rows)
    if not rows:
        return
    stages = list(rows[0]["at_end_of_stage"])
    print_table(
        console,
        "Undrained shear strength",
        ("layer", "depth [m]", "before [kPa]", *(f"{stage} [kPa]" for stage in stages)),
        (
            (
                row["layer"],
                number(row["depth"], ".2f"),
                number(row["before"], ".1f"),
                *(number(row["at_end_of_stage"][stage], ".1f") for stage in stages),
            )
            for row in rows
        ),
    )
