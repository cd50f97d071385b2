"""A measured curve on the band of its back-check."""

from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import BoolArray
from probsoil.assessment.back_check import BackCheck
from probsoil.assessment.measured_bands import BandCurve
from probsoil.report.alttext import Words
from probsoil.report.palette import LIGHT
from probsoil.report.plot_parts import logarithmic_across

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_LABELS = {
    "void_ratio": "void ratio [-]",
    "deviator": "deviator [kPa]",
    "pore_pressure_change": "change of pore pressure [kPa]",
    "volumetric_strain": "volumetric strain [%]",
}


def back_check_words(check: BackCheck) -> Words:
    """Say what a back-check shows.

    Parameters
    ----------
    check : BackCheck
        The check.

    Returns
    -------
    words : Words
        Title and description.
    """
    counted = sum(int(curve.counted.sum()) for curve in check.curves)
    share = (
        f"{100.0 * check.share_inside:.0f} % of {counted} readings within the band"
        if counted
        else "no reading to hold against the band"
    )
    return Words(title=f"Back-check of {check.kind} test {check.test}", description=f"{share}.")


def plot_back_check(figure: "Figure", check: BackCheck) -> None:
    """Draw the readings of a test on the band that its parameters predict.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    check : BackCheck
        The check.
    """
    figure.set_figheight(4.2)
    axes = figure.subplots(1, max(len(check.curves), 1), squeeze=False)[0]
    for axis, curve in zip(axes, check.curves, strict=False):
        _draw(axis, curve)
    labels = dict(zip(*reversed(axes[0].get_legend_handles_labels()), strict=True))
    for axis in axes[1:]:
        labels |= dict(zip(*reversed(axis.get_legend_handles_labels()), strict=True))
    figure.legend(
        labels.values(), labels.keys(), loc="outside lower center", ncols=4, frameon=False, fontsize=9
    )


def _draw(axis: "Axes", curve: BandCurve) -> None:
    oedometer = curve.quantity == "void_ratio"
    across = curve.at if oedometer else 100.0 * curve.at
    up = 100.0 if curve.quantity == "volumetric_strain" else 1.0
    filled = _filled(curve)
    axis.fill_between(
        across[filled],
        up * curve.low[filled],
        up * curve.high[filled],
        color=LIGHT["haze"],
        lw=0,
        label="5 to 95 %",
    )
    back = ~filled
    if back.any():
        axis.vlines(
            across[back], up * curve.low[back], up * curve.high[back],
            color=LIGHT["band"], lw=3.0, label="the same, unloaded or reloaded",
        )  # fmt: skip
    axis.plot(across, up * curve.median, color=LIGHT["main"], lw=1.6, label="median")
    outside = curve.counted & ~curve.inside
    rest = ~outside
    axis.plot(across[rest], up * curve.measured[rest], "o", ms=4.5, color=LIGHT["ink"], label="measured")
    if outside.any():
        axis.plot(
            across[outside], up * curve.measured[outside], "X", ms=6.5, color=LIGHT["mark"], label="outside"
        )
    if oedometer:
        logarithmic_across(axis)
    axis.set_xlabel("effective vertical stress [kPa], logarithmic" if oedometer else "axial strain [%]")
    axis.set_ylabel(_LABELS[curve.quantity])
    axis.grid(visible=True)


def _filled(curve: BandCurve) -> BoolArray:
    """Choose the readings between which the band is filled: of an oedometer those of first loading."""
    if curve.quantity != "void_ratio":
        return np.ones(curve.at.size, dtype=bool)
    greatest = np.maximum.accumulate(curve.at)
    return np.concatenate([[True], curve.at[1:] > greatest[:-1]])
