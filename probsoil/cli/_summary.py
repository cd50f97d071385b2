"""The answer of `probsoil assess` in a terminal."""

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from probsoil.cli._output import answer_console, counted, print_table
from probsoil.report.chance import chance_text, verdict_label
from probsoil.report.further import precision_lines
from probsoil.report.percentages import percent_text, plain_percent
from probsoil.report.ranking import basis_text, none_ranked_text, ranked_by
from probsoil.report.text import event_text, is_number, pair_text, rounded, warning_share
from probsoil.report.together import any_text

if TYPE_CHECKING:
    from rich.console import Console

DRIVERS_SHOWN = 3  # of each limit; the report has them all
CAUTION = (
    "An aid to judgement: it answers for its models and for the values given to it, no more. "
    "Local codes and a licensed engineer decide."
)

ELASTICITY = (
    "Elasticity: change of the chance, as a part of itself, for a small change of a parameter's spread (as a "
    "part of that) or of its mean (in standard deviations); ranks go by it, with its interval in brackets."
)


def print_summary(results: dict[str, Any], folder: Path) -> None:
    """Print what a reader must know first: chances, verdicts, drivers, warnings, where the report is.

    Parameters
    ----------
    results : dict
        Content of ``results.json``.
    folder : Path
        Results folder.
    """
    console = answer_console()
    count = counted(results["realisations"], "realisation")
    console.print(f"{results['title']}: {count} ({results['draws']}), seed {results['seed']}\n")
    _print_limits(console, results)
    if results.get("together"):
        console.print(f"Any of the {len(results['limits'])} limits exceeded: {any_text(results)}\n")
    _print_precision(console, results)
    _print_drivers(console, results)
    for warning in results["warnings"]:
        console.print(f"Warning: {warning['message']}{warning_share(warning)}")
    console.print(f"Report: {folder / 'report.html'}", soft_wrap=True)
    console.print(CAUTION)


def _print_limits(console: "Console", results: dict[str, Any]) -> None:
    print_table(
        console,
        "Chance that each limit is exceeded",
        (
            "limit",
            "exceeded when",
            f"chance ({plain_percent(results['confidence'])} interval)",
            "target",
            "verdict",
        ),
        (
            (
                limit["name"],
                event_text(limit),
                chance_text(limit, results),
                "-" if limit["target_probability"] is None else plain_percent(limit["target_probability"]),
                verdict_label(limit),
            )
            for limit in results["limits"]
        ),
    )


def _print_precision(console: "Console", results: dict[str, Any]) -> None:
    rows = precision_lines(results)
    if rows:
        print_table(
            console,
            f"Chances within {plain_percent(results['precision']['within'])}, where runs allowed it",
            ("limit", "chance (interval)", "within", "method", "runs"),
            rows,
        )


def _print_drivers(console: "Console", results: dict[str, Any]) -> None:
    rows = []
    for limit in results["limits"]:
        measure = ranked_by(results, limit["name"])
        drivers = [driver for driver in results["drivers"] if driver["limit"] == limit["name"]]
        rows += [_driver_row(driver, measure) for driver in _foremost(drivers, measure)]
    if rows:
        print_table(
            console,
            "Foremost drivers",
            (
                "limit",
                "rank",
                "parameter",
                "elasticity of the chance",
                "share of the spread",
                "a larger value",
            ),
            rows,
        )
        console.print(ELASTICITY)
    notes = {quality["limit"]: quality["note"] for quality in results["driver_quality"]}
    for limit in results["limits"]:
        said = [_ranking(limit, results), notes.get(limit["name"])]
        if any(said):
            console.print(f"Drivers of {limit['name']}: {'; '.join(part for part in said if part)}")


def _ranking(limit: dict[str, Any], results: dict[str, Any]) -> str | None:
    """Say what the ranks go by; nothing where the note says why there are none."""
    drivers = [driver for driver in results["drivers"] if driver["limit"] == limit["name"]]
    measure = ranked_by(results, limit["name"])
    if any(driver["rank"] for driver in drivers):
        return basis_text(limit, measure)
    judged = any(driver.get("spread_clear") is not None for driver in drivers)
    return none_ranked_text(limit, measure, drivers) if judged else None


def _foremost(drivers: Sequence[Mapping[str, Any]], measure: str) -> list[Mapping[str, Any]]:
    """Return the first by rank, and after them those of the largest share; none where nothing can be said.

    Without an elasticity, as where nothing or everything exceeds, nothing is known of the chance.
    """
    known = [driver for driver in drivers if is_number(driver[f"{measure}_elasticity"])]
    ranked = sorted((driver for driver in known if driver["rank"]), key=lambda driver: int(driver["rank"]))
    others = [driver for driver in known if not driver["rank"] and driver["share"] is not None]
    return (ranked + sorted(others, key=lambda driver: -float(driver["share"])))[:DRIVERS_SHOWN]


def _driver_row(driver: Mapping[str, Any], measure: str) -> tuple[str, str, str, str, str, str]:
    direction = driver["direction"]
    elasticity = rounded(driver[f"{measure}_elasticity"], 2)
    return (
        driver["limit"],
        str(driver["rank"] or "not ranked"),
        driver["parameter"],
        f"{measure} {elasticity} ({pair_text(driver[f'{measure}_interval'])})",
        _share_text(driver),
        "unclear" if direction == "unclear" else f"{direction} the chance",
    )


def _share_text(driver: Mapping[str, Any]) -> str:
    if driver["share"] is None:
        return "not available"
    low, high = (percent_text(share, 0) for share in driver["share_interval"])
    return f"{percent_text(driver['share'], 0)} ({low.removesuffix(' %')} to {high.removesuffix(' %')})"
