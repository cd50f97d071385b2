"""Triaxial tests, vane profiles and cone soundings with what was read off them."""

from typing import TYPE_CHECKING

import numpy as np

from probsoil.laboratory.cone import ConeResult
from probsoil.laboratory.triaxial import TriaxialResult
from probsoil.laboratory.vane import VaneResult
from probsoil.report.palette import LIGHT

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_DASHED, _DOTTED = (0, (5, 2)), (0, (1, 1.2))


def plot_triaxial(figure: "Figure", result: TriaxialResult) -> None:
    """Draw deviator against strain and the stress path, with failure by both definitions.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    result : TriaxialResult
        The test.
    """
    sheet = result.sheet
    path = bool(np.isfinite(result.mean_stress).any())
    axes = figure.subplots(1, 2 if path else 1, sharey=True, squeeze=False)[0]
    strain = 100.0 * sheet.axial_strain
    axes[0].plot(strain, sheet.deviator, color=LIGHT["ink"], lw=1.2, marker="o", ms=3)
    axes[0].set_xlabel("axial strain [%]")
    axes[0].set_ylabel("deviator q [kPa]")
    if path:
        axes[1].plot(result.mean_stress, sheet.deviator, color=LIGHT["ink"], lw=1.2, marker="o", ms=3)
        axes[1].set_xlabel("mean effective stress p' [kPa]")
    for failure, label, marker, colour in (
        (result.peak, "largest deviator", "s", LIGHT["mark"]),
        (result.greatest_ratio, "greatest stress ratio", "D", LIGHT["main"]),
    ):
        if failure is None:
            continue
        axes[0].plot(
            [100.0 * failure.strain], [failure.deviator], marker, ms=7, color=colour, ls="", label=label
        )
        if path and failure.ratio is not None:
            ratio = np.copysign(failure.ratio.value, failure.deviator)
            reach = np.array([0.0, 1.1 * failure.mean_stress])
            axes[1].plot(
                reach,
                reach * ratio,
                color=colour,
                lw=1.2,
                ls=_DASHED if marker == "s" else _DOTTED,
                label=f"q/p' = {ratio:.3f}",
            )
            axes[1].plot([failure.mean_stress], [failure.deviator], marker, ms=7, color=colour, ls="")
    for axis in axes:
        axis.grid(visible=True)
        if axis.get_legend_handles_labels()[0]:
            axis.legend(loc="best", frameon=False, fontsize=9)


def plot_vane(figure: "Figure", result: VaneResult) -> None:
    """Draw strength as measured and corrected against depth.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    result : VaneResult
        The profile.
    """
    figure.set_figheight(4.6)
    axis, sheet = figure.subplots(), result.sheet
    axis.plot(sheet.strength, sheet.depth, "o", ms=5, mfc="none", color=LIGHT["muted"], label="as given")
    if np.isfinite(result.strength).any():
        error = np.where(np.isfinite(result.standard_error), 1.645 * result.standard_error, 0.0)
        axis.errorbar(
            result.strength,
            sheet.depth,
            xerr=error,
            fmt="D",
            ms=5,
            color=LIGHT["main"],
            elinewidth=1.0,
            label=result.corrected_by,
        )
    if np.isfinite(sheet.remoulded).any():
        axis.plot(sheet.remoulded, sheet.depth, "x", ms=5, color=LIGHT["mark"], label="remoulded")
    _downward(axis, "undrained strength [kPa]")
    axis.legend(loc="best", frameon=False, fontsize=9)


def plot_cone(figure: "Figure", result: ConeResult) -> None:
    """Draw cone resistance, net resistance and its averages against depth.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    result : ConeResult
        The sounding.
    """
    figure.set_figheight(5.0)
    axis, sheet = figure.subplots(), result.sheet
    axis.plot(sheet.cone_resistance, sheet.depth, color=LIGHT["muted"], lw=0.8, label="q_c as measured")
    axis.plot(sheet.pore_pressure, sheet.depth, color=LIGHT["mark"], lw=0.8, ls=_DASHED, label="u_2")
    if np.isfinite(result.net_resistance).any():
        axis.plot(result.net_resistance, sheet.depth, color=LIGHT["ink"], lw=1.0, label="q_net")
    for place, one in enumerate(result.averages):
        axis.plot(
            [one.net_resistance] * 2,
            [one.top, one.bottom],
            color=LIGHT["main"],
            lw=3.0,
            label="average of q_net" if place == 0 else None,
        )
        axis.annotate(
            f"{one.net_resistance:.0f} kPa",
            (one.net_resistance, 0.5 * (one.top + one.bottom)),
            xytext=(6, 0),
            textcoords="offset points",
            fontsize=9,
            color=LIGHT["main"],
        )
    _downward(axis, "resistance, pressure [kPa]")
    axis.legend(loc="best", frameon=False, fontsize=9)


def _downward(axis: "Axes", label: str) -> None:
    axis.grid(visible=True)
    axis.set_xlim(0.0, None)
    axis.set_ylim(axis.get_ylim()[::-1] if axis.get_ylim()[0] < axis.get_ylim()[1] else axis.get_ylim())
    axis.set_xlabel(label)
    axis.set_ylabel("depth below ground level [m]")
