"""An oedometer test: its curve with branches and constructions, and each increment against time."""

from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import FloatArray
from probsoil.laboratory.increments import Increment
from probsoil.laboratory.oedometer import OedometerResult
from probsoil.laboratory.sheets import TimeReadings
from probsoil.laboratory.time_curve import ROOT_TIME_SLOPE, LogTime, RootTime
from probsoil.report.palette import LIGHT
from probsoil.report.plot_parts import logarithmic_across

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from probsoil.laboratory.preconsolidation import Construction

_DASHED, _DOTTED = (0, (5, 2)), (0, (1, 1.2))


def plot_oedometer(figure: "Figure", result: OedometerResult) -> None:
    """Draw a compression curve, its branches and the constructions of the preconsolidation stress.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    result : OedometerResult
        The test.
    """
    others = [one for one in result.constructions if one.method != "Casagrande"]
    if not others:
        figure.set_figheight(4.4)
        _curve(figure.subplots(), result)
        return
    figure.set_figheight(7.0)
    axes = figure.subplot_mosaic(
        [["curve"] * len(others), [one.method for one in others]], height_ratios=[1.5, 1]
    )
    _curve(axes["curve"], result)
    for one in others:
        _two_lines(axes[one.method], one)


def _curve(axis: "Axes", result: OedometerResult) -> None:
    sheet, first = result.sheet, result.branches.first
    loaded = sheet.stress > 0.0
    axis.plot(
        sheet.stress[loaded], sheet.void_ratio[loaded], color=LIGHT["muted"], lw=0.8, marker="o", ms=3.5
    )
    axis.plot(
        sheet.stress[first], sheet.void_ratio[first], "o", ms=5.5, color=LIGHT["ink"], label="first loading"
    )
    if result.fit is not None:
        fine = np.geomspace(sheet.stress[first[0]], sheet.stress[first[-1]], 200)
        axis.plot(fine, result.fit.void_ratio(fine), color=LIGHT["main"], lw=2.0, label="two branches")
    for construction in result.constructions:
        if construction.method == "Casagrande" and construction.stress is not None:
            for line in construction.lines[:-1]:
                axis.plot(*line.T, color=LIGHT["mark"], lw=1.0, ls=_DASHED)
            axis.axvline(
                construction.stress, color=LIGHT["mark"], lw=1.0, ls=_DASHED,
                label=f"Casagrande, {construction.stress:.0f} kPa",
            )  # fmt: skip
    if result.preconsolidation is not None:
        stress, error = result.preconsolidation.value, 1.645 * result.preconsolidation.standard_error
        axis.axvspan(stress - error, stress + error, color=LIGHT["haze"], lw=0, zorder=0)
        axis.axvline(stress, color=LIGHT["main"], lw=1.3, label=f"where the branches meet, {stress:.0f} kPa")
    if result.in_situ_stress is not None:
        axis.axvline(
            result.in_situ_stress, color=LIGHT["ink"], lw=1.3, ls=_DOTTED,
            label=f"in situ, {result.in_situ_stress:.0f} kPa",
        )  # fmt: skip
    logarithmic_across(axis)
    axis.grid(visible=True)
    axis.set_xlabel("effective vertical stress [kPa], logarithmic")
    axis.set_ylabel("void ratio [-]")
    axis.legend(loc="upper right", frameon=False, fontsize=9)


def _two_lines(axis: "Axes", construction: "Construction") -> None:
    axis.plot(*construction.points.T, "o", ms=4, color=LIGHT["ink"])
    for line in construction.lines:
        axis.plot(*line.T, color=LIGHT["mark"], lw=1.2, ls=_DASHED)
    words = "not to be made" if construction.stress is None else f"{construction.stress:.0f} kPa"
    if construction.method == "work" and construction.stress is not None:  # the bend lies near the origin
        shown = min(5.0 * construction.stress, float(construction.points[-1, 0]))
        axis.set_xlim(-0.03 * shown, shown)
        axis.set_ylim(None, 1.1 * float(np.interp(shown, *construction.points.T)))
    axis.set_title(f"{construction.method}: {words}", fontsize=10, loc="left")
    axis.set_xlabel(construction.axes[0], fontsize=9)
    axis.set_ylabel(construction.axes[1], fontsize=9)
    axis.grid(visible=True)


def plot_time_curve(figure: "Figure", data: tuple[TimeReadings, Increment]) -> None:
    """Draw the log-time and the root-time construction of one increment.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    data : tuple of TimeReadings and Increment
        Readings, and what was made of them.
    """
    readings, increment = data
    figure.set_figheight(3.6)
    left, right = figure.subplots(1, 2, sharey=True)
    after = readings.time > 0.0
    left.plot(readings.time[after], readings.compression[after], "o", ms=4, color=LIGHT["ink"])
    right.plot(np.sqrt(readings.time), readings.compression, "o", ms=4, color=LIGHT["ink"])
    top, bottom = float(readings.compression.min()), float(readings.compression.max())
    if increment.curve.log_time is not None:
        _log_time(left, increment.curve.log_time, readings.time[after])
    if increment.curve.root_time is not None:
        _root_time(right, increment.curve.root_time, readings.time[after])
    logarithmic_across(left)
    room = 0.08 * (bottom - top)
    left.set_ylim(bottom + room, top - room)
    for axis in (left, right):
        axis.grid(visible=True)
    left.set_xlabel("time [min], logarithmic")
    right.set_xlabel("root of time [min^0.5]")
    left.set_ylabel("compression [mm]")


def _log_time(axis: "Axes", made: LogTime, time: FloatArray) -> None:
    ends = np.array([0.15 * made.crossing, 3.0 * made.crossing])
    axis.plot(
        ends, made.tangent[0] + made.tangent[1] * np.log10(ends), color=LIGHT["mark"], lw=1.1, ls=_DASHED
    )
    ends = np.array([0.4 * made.crossing, time[-1]])
    axis.plot(ends, made.tail[0] + made.tail[1] * np.log10(ends), color=LIGHT["mark"], lw=1.1, ls=_DASHED)
    for level, name in ((made.start, "0 %"), (made.middle, "50 %"), (made.end, "100 %")):
        axis.axhline(level, color=LIGHT["muted"], lw=0.8, ls=_DOTTED)
        axis.annotate(name, (time[0], level), xytext=(0, 2), textcoords="offset points", fontsize=8)
    axis.plot([made.time], [made.middle], "D", ms=6, color=LIGHT["main"])
    axis.set_title(f"log-time: t50 = {made.time:.3g} min", fontsize=10, loc="left")


def _root_time(axis: "Axes", made: RootTime, time: FloatArray) -> None:
    reach = np.array([0.0, 1.25 * (made.end - made.start) / made.slope])
    axis.plot(reach, made.start + made.slope * reach, color=LIGHT["mark"], lw=1.1, ls=_DASHED)
    flatter = reach * ROOT_TIME_SLOPE
    axis.plot(
        flatter, made.start + made.slope / ROOT_TIME_SLOPE * flatter, color=LIGHT["mark"], lw=1.1, ls=_DOTTED
    )
    axis.plot([np.sqrt(made.time)], [made.at_90], "D", ms=6, color=LIGHT["main"])
    axis.set_xlim(0.0, min(3.5 * np.sqrt(made.time), 1.03 * np.sqrt(time[-1])))
    axis.set_title(f"root-time: t90 = {made.time:.3g} min", fontsize=10, loc="left")
