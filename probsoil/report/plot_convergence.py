"""Estimate and interval of a chance against the runs behind them."""

from typing import TYPE_CHECKING, Any

from probsoil.report.alttext import Words
from probsoil.report.palette import LIGHT
from probsoil.report.text import count_text, interval_text, percent_text

if TYPE_CHECKING:
    from matplotlib.figure import Figure


def convergence_words(row: dict[str, Any]) -> Words:
    """Describe the way to one estimate.

    Parameters
    ----------
    row : dict
        One entry of ``precision.limits`` of the results.

    Returns
    -------
    words : Words
        Title and description.
    """
    first, last = row["path"][0], row["path"][-1]
    ends = [
        f"{percent_text(step['probability'])} ({interval_text(step['probability'], *step['interval'])}) "
        f"after {count_text(step['runs'])} runs"
        for step in (first, last)
    ]
    return Words(
        title=f"Chance of {row['limit']} against runs",
        description=f"Estimate with its interval: {ends[0]}, {ends[1]}. The table below gives more steps.",
    )


def plot_convergence(figure: "Figure", row: dict[str, Any]) -> None:
    """Draw estimate and interval against runs.

    Parameters
    ----------
    figure : Figure
        Empty figure.
    row : dict
        One entry of ``precision.limits`` of the results, with two steps or more.
    """
    axes = figure.subplots()
    runs = [step["runs"] for step in row["path"]]
    low, high = ([100.0 * step["interval"][side] for step in row["path"]] for side in (0, 1))
    axes.fill_between(runs, low, high, color=LIGHT["band"], linewidth=0.0)
    axes.plot(runs, [100.0 * step["probability"] for step in row["path"]], color=LIGHT["main"], marker="o")
    axes.set_ylim(bottom=0.0)
    axes.set_xlabel("runs")
    axes.set_ylabel("chance of exceeding [%]")
    axes.grid(axis="y")
