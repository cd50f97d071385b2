"""The section to scale: layers, fill, the critical circle at the medians and those of other realisations."""

from typing import TYPE_CHECKING, Any

import numpy as np

from probsoil.report.palette import LIGHT
from probsoil.report.plot_parts import short

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_WIDTH, _LEAST_HEIGHT, _MOST_HEIGHT = 6.6, 2.4, 5.2  # inches of the drawing
_ARC_POINTS = 49


def plot_section(figure: "Figure", data: tuple[dict[str, Any], dict[str, Any]]) -> None:
    """Draw the section at one check.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    data : tuple of dict
        Entry of ``slip`` of the results that is shown, and their ``ground``.
    """
    row, ground = data
    circle = row["circle"]
    outline = np.array(circle["outline"], dtype=np.float64)
    every = [*circle["others"], _plain(circle["at_medians"])]
    left = min(0.0, *(one["exit_x"] for one in every))
    right = max(outline[:, 0].max() / 2.0, *(one["entry_x"] for one in every))
    margin = 0.06 * (right - left)
    left, right = left - margin, min(right + margin, outline[:, 0].max() + margin)
    lowest = _lowest(every)
    axis = figure.subplots()
    _layers(axis, ground["layers"], left, right)
    axis.fill(
        outline[:, 0], outline[:, 1], facecolor=LIGHT["fill"], edgecolor=LIGHT["ink"], lw=1.2, clip_on=True
    )
    for one in circle["others"]:
        _arc(axis, one, color=LIGHT["main"], lw=0.8, alpha=0.3)
    _arc(axis, every[-1], color=LIGHT["mark"], lw=2.2)
    bottom, top = min(1.25 * lowest, -1.0), 1.25 * outline[:, 1].max() + 0.3
    axis.set_xlim(left, right)
    axis.set_ylim(bottom, top)
    axis.set_aspect("equal", adjustable="box")
    wanted = _WIDTH * (top - bottom) / (right - left)
    figure.set_figheight(min(max(wanted, _LEAST_HEIGHT), _MOST_HEIGHT) + 0.7)
    axis.set_xlabel("distance from the toe [m]")
    axis.set_ylabel("level [m]")


def _plain(one: dict[str, Any]) -> dict[str, Any]:
    return {
        "centre": one["centre"],
        "radius": one["radius"],
        "exit_x": one["exit"][0],
        "entry_x": one["entry"][0],
    }


def _points(one: dict[str, Any]) -> tuple[Any, Any]:
    """Return points along the arc, even in angle."""
    (x, y), radius = one["centre"], one["radius"]
    ends = np.arcsin(np.clip((np.array([one["exit_x"], one["entry_x"]]) - x) / radius, -1.0, 1.0))
    angle = np.linspace(float(ends[0]), float(ends[1]), _ARC_POINTS)
    return x + radius * np.sin(angle), y - radius * np.cos(angle)


def _lowest(circles: list[dict[str, Any]]) -> float:
    return min(float(_points(one)[1].min()) for one in circles)


def _arc(axis: "Axes", one: dict[str, Any], **style: Any) -> None:
    axis.plot(*_points(one), solid_capstyle="round", **style)


def _layers(axis: "Axes", layers: list[dict[str, Any]], left: float, right: float) -> None:
    from matplotlib.patches import Rectangle

    for layer in layers:
        size = layer["bottom"] - layer["top"]
        colour = LIGHT["clay"] if layer.get("soil") == "clay" else LIGHT["sand"]
        axis.add_patch(
            Rectangle(
                (left, -layer["bottom"]),
                right - left,
                size,
                facecolor=colour,
                edgecolor=LIGHT["muted"],
                lw=0.7,
            )
        )
        axis.annotate(
            short(layer["name"], 22),
            (right, -layer["top"]),
            xytext=(-5, -3),
            textcoords="offset points",
            ha="right",
            va="top",
            fontsize=9,
            color=LIGHT["muted"],
            annotation_clip=True,
        )
