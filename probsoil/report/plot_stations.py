"""The settlement profile over the stations."""

from typing import TYPE_CHECKING, Any

import numpy as np

from probsoil._typing import FloatArray
from probsoil.report.palette import LIGHT
from probsoil.report.plot_parts import numbers_array, short
from probsoil.report.stations import LEVELS, in_order, on_line
from probsoil.report.text import UNCOMPUTED, rounded, trimmed_text

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_MOST_NAMES = 12  # on the axis above the profile


def plot_stations(figure: "Figure", settlement: dict[str, Any]) -> None:
    """Draw the band of settlement over the stations at the last time, and the median before it.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    settlement : dict
        ``settlement`` of the results, with stations.
    """
    stations, times = in_order(settlement["stations"]), settlement["station_times"]
    along = on_line(stations)
    place = numbers_array([one["along"] for one in stations]) if along else np.arange(float(len(stations)))
    figure.set_figheight(3.6)
    axis = figure.subplots()
    last = {level: _at(stations, level, -1) for level in LEVELS}
    draw = _bands if along else _bars
    draw(axis, place, last)
    label = f"median after {_years(times[-1])}"
    axis.plot(
        place, last["0.5"], color=LIGHT["main"], lw=2.0 if along else 0.0, marker="o", ms=5, label=label
    )
    if len(times) > 1:
        axis.plot(
            place,
            _at(stations, "0.5", 0),
            color=LIGHT["ink"],
            lw=1.0 if along else 0.0,
            ls=(0, (4, 2)),
            marker="_" if not along else None,
            label=f"median after {_years(times[0])}",
        )
    _names(axis, place, [one["name"] for one in stations], along=along)
    axis.set_ylabel("settlement [m], downwards")
    low, high = axis.get_ylim()
    axis.set_ylim(max(low, high) * 1.08, min(0.0, low, high))
    if along:
        _differences(axis, place, stations, settlement["pairs"])
    axis.grid(visible=True)
    figure.legend(loc="outside lower center", ncols=4, frameon=False, fontsize=9)


def _years(time: float) -> str:
    written = trimmed_text(time)
    return f"{written} year" if written == "1" else f"{written} years"


def _differences(
    axis: "Axes", place: FloatArray, stations: list[dict[str, Any]], pairs: list[dict[str, Any]]
) -> None:
    """Write the median difference between neighbours at the foot of the profile."""
    if len(stations) > _MOST_NAMES:
        return
    where = {station["name"]: float(at) for station, at in zip(stations, place, strict=True)}
    for pair in pairs:
        median = pair["difference"]["quantiles"]["0.5"][-1]
        axis.annotate(
            UNCOMPUTED if median is None else f"\N{GREEK CAPITAL LETTER DELTA} {rounded(median, 3)}",
            (0.5 * sum(where[name] for name in pair["stations"]), 0.0),
            xycoords=("data", "axes fraction"),
            xytext=(0, 3),
            textcoords="offset points",
            ha="center",
            fontsize=8,
            color=LIGHT["mark"],
        )


def _at(stations: list[dict[str, Any]], level: str, when: int) -> FloatArray:
    return numbers_array([one["quantiles"][level][when] for one in stations])


def _bands(axis: "Axes", place: FloatArray, last: dict[str, FloatArray]) -> None:
    if np.isfinite(last["0.05"]).any():  # withheld with few realisations
        axis.fill_between(place, last["0.05"], last["0.95"], color=LIGHT["haze"], lw=0, label="5 to 95 %")
    axis.fill_between(place, last["0.25"], last["0.75"], color=LIGHT["band"], lw=0, label="25 to 75 %")


def _bars(axis: "Axes", place: FloatArray, last: dict[str, FloatArray]) -> None:
    for levels, colour, width, label in (
        (("0.05", "0.95"), "haze", 5.0, "5 to 95 %"),
        (("0.25", "0.75"), "band", 9.0, "25 to 75 %"),
    ):
        low, high = (last[level] for level in levels)
        if np.isfinite(low).any():
            axis.vlines(place, low, high, color=LIGHT[colour], lw=width, label=label)


def _names(axis: "Axes", place: FloatArray, names: list[str], *, along: bool) -> None:
    if not along:
        axis.set_xticks(place, [short(name, 14) for name in names], rotation=30, ha="right")
        axis.set_xlim(-0.5, len(names) - 0.5)
        return
    axis.set_xlabel("distance along the line of stations [m]")
    axis.set_xlim(place[0], place[-1])
    every = -(-len(names) // _MOST_NAMES)
    for number in range(0, len(names), every):
        axis.annotate(
            short(names[number], 12),
            (place[number], 1.0),
            xycoords=("data", "axes fraction"),
            xytext=(0, 3),
            textcoords="offset points",
            ha="left",
            rotation=25,
            fontsize=8,
            color=LIGHT["muted"],
        )
