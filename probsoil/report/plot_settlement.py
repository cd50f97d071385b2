"""The band of settlement through time: even time while building, logarithmic time afterwards."""

from typing import TYPE_CHECKING, Any

import numpy as np

from probsoil._typing import FloatArray
from probsoil.report.palette import LIGHT
from probsoil.report.plot_parts import numbers_array
from probsoil.report.stations import is_marked
from probsoil.report.text import list_text

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_WEEKS_PER_YEAR = 365.25 / 7.0
_LABEL_ROOM = 0.065  # height of a label as a part of the axis


def plot_settlement(figure: "Figure", results: dict[str, Any]) -> None:
    """Draw the band of settlement, stages and limits on it.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    results : dict
        The results of an assessment.
    """
    data = results["settlement"]
    stages = data.get("stages") or []
    times = numbers_array(data["times"])
    built = max((stage["end"] for stage in stages), default=0.0)
    split = 1.12 * built
    two = bool(stages) and times[-1] > 2.0 * split
    axes = figure.subplots(
        1, 2 if two else 1, sharey=True, squeeze=False, width_ratios=[1.0, 0.85][: 1 + two]
    )[0]
    in_weeks = two and split < 3.0
    factor = _WEEKS_PER_YEAR if in_weeks else 1.0
    for axis, scale in zip(axes, (factor, 1.0), strict=False):
        _band(axis, scale * times, data)
        axis.grid(visible=True)
    early = axes[0]
    _mark_stages(early, stages, factor)
    early.set_xlim(0.0, (split if two else times[-1]) * factor)
    early.set_xlabel("weeks from the start, while building" if in_weeks else "years from the start")
    early.set_ylabel("settlement [m], downwards")
    early.set_ylim(*_depth_range(data))
    if two:
        _late_axis(axes[1], split, times[-1])
    marked = {number: one for number, one in enumerate(results["limits"], 1) if is_marked(one, data)}
    _mark_limits(axes, marked, split if two else times[-1], factor)
    early.legend(loc="lower left", frameon=False, fontsize=9)


def _band(axis: "Axes", times: FloatArray, data: dict[str, Any]) -> None:
    quantiles = {key: numbers_array(values) for key, values in data["quantiles"].items()}
    if np.isfinite(quantiles["0.05"]).any():  # withheld with few realisations
        axis.fill_between(
            times, quantiles["0.05"], quantiles["0.95"], color=LIGHT["haze"], lw=0, label="5 to 95 %"
        )
    axis.fill_between(
        times, quantiles["0.25"], quantiles["0.75"], color=LIGHT["band"], lw=0, label="25 to 75 %"
    )
    axis.plot(times, quantiles["0.5"], color=LIGHT["main"], lw=2.0, label="median")
    axis.plot(times, numbers_array(data["mean"]), color=LIGHT["ink"], lw=1.0, ls=(0, (4, 2)), label="mean")


def _depth_range(data: dict[str, Any]) -> tuple[float, float]:
    drawn = np.concatenate([numbers_array(values) for values in data["quantiles"].values()])
    drawn = drawn[np.isfinite(drawn)]
    deep, high = drawn.max(initial=1e-3), drawn.min(initial=0.0)
    room = 0.12 * (deep - high)
    return float(deep + room), float(high - room)


def _mark_stages(axis: "Axes", stages: list[dict[str, Any]], factor: float) -> None:
    for number, stage in enumerate(stages, start=1):
        axis.axvspan(
            factor * stage["start"], factor * stage["end"], color=LIGHT["fill"], alpha=0.55, lw=0, zorder=0
        )
        axis.annotate(
            f"S{number}",
            (factor * 0.5 * (stage["start"] + stage["end"]), 1.0),
            xycoords=("data", "axes fraction"),
            xytext=(0, 3),
            textcoords="offset points",
            ha="center",
            fontsize=9,
            color=LIGHT["muted"],
        )


def _late_axis(axis: "Axes", start: float, end: float) -> None:
    from matplotlib.ticker import FuncFormatter, LogLocator, NullLocator

    axis.set_xscale("log")
    axis.set_xlim(start, end)
    axis.xaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
    axis.xaxis.set_minor_locator(NullLocator())
    axis.xaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
    axis.set_xlabel("years from the start, afterwards (logarithmic)")
    axis.spines["left"].set_linestyle((0, (2, 2)))
    axis.tick_params(axis="y", length=0)


def _mark_limits(
    axes: "np.ndarray[Any, Any]", limits: dict[int, dict[str, Any]], split: float, factor: float
) -> None:
    marks: dict[tuple[float, float], list[int]] = {}
    for number, limit in limits.items():
        marks.setdefault((float(limit["time"]["at"]), float(limit["threshold"])), []).append(number)
    deepest = axes[0].get_ylim()[0]
    taken: dict[float, float] = {}  # by time, where the last label stands, from the bottom up
    for (at, threshold), numbers in sorted(marks.items(), reverse=True):
        late = len(axes) > 1 and at > split
        axis, place = (axes[1], at) if late else (axes[0], at * factor)
        inside = threshold <= deepest
        height = threshold if inside else deepest
        label_at = min(height, taken.get(at, np.inf) - _LABEL_ROOM * abs(np.diff(axis.get_ylim())[0]))
        taken[at] = label_at
        axis.plot([place], [height], marker="D", ms=6, color=LIGHT["mark"], ls="", clip_on=False, zorder=5)
        axis.annotate(
            _mark_text(numbers, inside=inside),
            (place, label_at),
            xytext=(-8, 0),
            textcoords="offset points",
            ha="right",
            va="center" if inside else "bottom",
            fontsize=9,
            color=LIGHT["mark"],
        )


def _mark_text(numbers: list[int], *, inside: bool) -> str:
    one = len(numbers) == 1
    name = f"limit{'' if one else 's'} {list_text([str(number) for number in numbers])}"
    return name if inside else f"{name} {'is' if one else 'are'} deeper"
