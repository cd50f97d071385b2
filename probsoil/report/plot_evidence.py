"""One parameter before and after the tests, with what was measured."""

from typing import TYPE_CHECKING, Any

from probsoil.report.palette import LIGHT

if TYPE_CHECKING:
    from matplotlib.figure import Figure


def plot_evidence(figure: "Figure", row: dict[str, Any]) -> None:
    """Draw the densities before and after the tests and the results of tests of the parameter alone.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    row : dict
        One entry of ``parameters`` of ``evidence`` of the results.
    """
    figure.set_figheight(2.6)
    axis = figure.subplots()
    density = row["density"]
    axis.plot(
        density["value"],
        density["before"],
        color=LIGHT["muted"],
        lw=1.4,
        ls=(0, (5, 2)),
        label="before the tests",
    )
    axis.fill_between(density["value"], density["after"], color=LIGHT["haze"], lw=0.0)
    axis.plot(density["value"], density["after"], color=LIGHT["main"], lw=1.8, label="after")
    data = [one["value"] for one in row["data"]]
    if data:
        axis.plot(
            data, [0.0] * len(data), color=LIGHT["mark"], marker="|", ms=16, mew=1.6, ls="", clip_on=False,
            label="measured",
        )  # fmt: skip
    axis.set_ylim(0.0, None)
    axis.set_yticks([])
    axis.spines["left"].set_visible(False)
    unit = "" if row["unit"] == "-" else f" [{row['unit']}]"
    axis.set_xlabel(f"{row['name']}{unit}")
    axis.legend(frameon=False, fontsize=9)
