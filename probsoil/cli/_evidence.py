"""Tests in hand as they were understood, in a terminal."""

from typing import TYPE_CHECKING, Any

from probsoil.cli._output import print_table
from probsoil.report.text import number_text, percent_text, value_text

if TYPE_CHECKING:
    from rich.console import Console

    from probsoil.parameters import ParameterSpace
    from probsoil.scenario import Scenario


def print_evidence(console: "Console", scenario: "Scenario", space: "ParameterSpace") -> None:
    """Print the tests used, those left out and why, and what they change.

    Parameters
    ----------
    console : Console
        Where to.
    scenario : Scenario
        What was read.
    space : ParameterSpace
        Its parameters after the tests.
    """
    from probsoil.assessment.evidence_record import conflicts, evidence_record

    found: dict[str, Any] = evidence_record(space, scenario)
    record = found.get("evidence")
    if not record:
        return
    headings = ("test", "measured", "layer", "value", "error, bias (cov)", "informs")
    rows = [
        (
            row["test"],
            f"{row['kind']} {row['parameter']}",
            row["layer"],
            value_text(row["value"], row["unit"]),
            f"{percent_text(row['error_cov'])}, {percent_text(row['bias_cov'])}",
            ", ".join(row["informs"]),
        )
        for row in record["tests"]
    ]
    print_table(console, "Tests in hand", headings, rows)
    if record["unused"]:
        left = [(row["test"], f"{row['kind']} {row['parameter']}", row["reason"]) for row in record["unused"]]
        print_table(console, "Tests not used", ("test", "measured", "why not"), left)
    changed = [
        (row["name"], _spread(row["before"]), _spread(row["after"]), str(row["tests"]))
        for row in record["parameters"]
    ]
    titles = ("parameter", "before: median (5 to 95 %)", "after", "tests")
    print_table(console, "What the tests change", titles, changed)
    for _, message in conflicts(space):
        console.print(f"Look again: {message}\n")


def _spread(numbers: dict[str, float]) -> str:
    low, middle, high = (number_text(numbers[key]) for key in ("p05", "p50", "p95"))
    return f"{middle} ({low} to {high})"
