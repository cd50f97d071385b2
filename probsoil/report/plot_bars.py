"""The bars of safety by stage and of the drivers of a limit."""

from typing import TYPE_CHECKING, Any

from probsoil.report.palette import LIGHT
from probsoil.report.plot_parts import short
from probsoil.report.ranking import SHIFT
from probsoil.report.text import UNCOMPUTED, is_number

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure


_BARS = {
    "spread": (1.0, "change of the chance [%] for 1 % more spread of the parameter"),
    "mean": (100.0 * SHIFT, "change of the chance [%] when the mean moves up by 0.1 standard deviations"),
}


def plot_factors(figure: "Figure", rows: list[dict[str, Any]], failure: str = "slip") -> None:
    """Draw the range of the factor of safety at the end of each stage.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    rows : list of dict
        Entries of ``slip`` or ``bearing`` of the results.
    failure : str
        Which of the two.
    """
    figure.set_figheight(1.1 + 0.48 * len(rows))
    axis = figure.subplots()
    for place, row in enumerate(rows):
        quantiles = row["quantiles"]
        _segment(axis, place, (quantiles["0.05"], quantiles["0.95"]), width=5.0, colour=LIGHT["haze"])
        _segment(axis, place, (quantiles["0.25"], quantiles["0.75"]), width=9.0, colour=LIGHT["band"])
        if is_number(quantiles["0.5"]):
            axis.plot([quantiles["0.5"]], [place], marker="o", ms=6, color=LIGHT["main"], ls="")
        else:
            axis.annotate(
                f"median {UNCOMPUTED}", (0.5, place), xycoords=("axes fraction", "data"), ha="center",
                va="center", fontsize=9, color=LIGHT["muted"],
            )  # fmt: skip
    axis.axvline(1.0, color=LIGHT["mark"], lw=1.6, ls=(0, (5, 2)))
    mark = "slip" if failure == "slip" else "failure"
    axis.annotate(
        mark, (1.0, 1.0), xycoords=("data", "axes fraction"), xytext=(0, 3), textcoords="offset points",
        ha="center", fontsize=9, color=LIGHT["mark"],
    )  # fmt: skip
    axis.set_yticks(
        range(len(rows)), [f"S{n}  {short(row['stage'], 24)}" for n, row in enumerate(rows, start=1)]
    )
    axis.set_ylim(len(rows) - 0.4, -0.6)
    axis.set_xlim(min(0.9, axis.get_xlim()[0]), None)
    axis.grid(visible=True, axis="x")
    what = "slip" if failure == "slip" else "bearing failure"
    axis.set_xlabel(f"least factor of safety against {what} at the end of the stage [-]")


def plot_drivers(figure: "Figure", rows: list[dict[str, Any]], measure: str = "spread") -> None:
    """Draw what each parameter does to the chance, with its interval.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    rows : list of dict
        Entries of ``drivers`` of one limit, in order.
    measure : str
        ``spread`` for the spread elasticity, ``mean`` for the effect of a small shift of the mean.
    """
    scale, label = _BARS[measure]
    figure.set_figheight(1.0 + 0.34 * len(rows))
    axis = figure.subplots()
    for place, row in enumerate(rows):
        ranked = row.get("rank") is not None
        axis.barh(
            place,
            scale * row[f"{measure}_elasticity"],
            height=0.62,
            color=LIGHT["band"] if ranked else "none",
            edgecolor=LIGHT["main"] if ranked else LIGHT["muted"],
            linewidth=0.9,
            linestyle="-" if ranked else (0, (2, 2)),
        )
        low, high = (
            None if end is None else scale * end for end in row.get(f"{measure}_interval") or (None, None)
        )
        _segment(axis, place, (low, high), width=1.6, colour=LIGHT["ink"])
    axis.axvline(0.0, color=LIGHT["muted"], lw=1.0)
    labels = [f"{_rank_mark(row)}{short(row['parameter'], 32)}" for row in rows]
    axis.set_yticks(range(len(rows)), labels)
    axis.set_ylim(len(rows) - 0.4, -0.6)
    axis.grid(visible=True, axis="x")
    axis.set_xlabel(label)


def _segment(
    axis: "Axes", place: float, ends: tuple[float | None, float | None], *, width: float, colour: str
) -> None:
    low, high = ends
    if low is not None and high is not None:
        axis.plot([low, high], [place, place], color=colour, lw=width, solid_capstyle="butt")


def _rank_mark(row: dict[str, Any]) -> str:
    return "" if row.get("rank") is None else f"{row['rank']}  "
