"""The ground to scale in depth, with its stresses beside it."""

from typing import TYPE_CHECKING, Any

import numpy as np

from probsoil._typing import FloatArray
from probsoil.report.palette import LIGHT
from probsoil.report.plot_parts import numbers_array, short
from probsoil.report.text import is_number

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_COLUMN = 0.34  # width of the drawn column as a part of its axes


def plot_ground(figure: "Figure", ground: dict[str, Any]) -> None:
    """Draw the layers, the fill on them and the stress profile.

    Parameters
    ----------
    figure : Figure
        Empty figure to draw on.
    ground : dict
        ``ground`` of the results.
    """
    profile = ground.get("profile") or {}
    depth = numbers_array(profile.get("depth") or [])
    bottom = max(layer["bottom"] for layer in ground["layers"])
    figure.set_figheight(4.6)
    if depth.size:
        column, stresses = figure.subplots(1, 2, sharey=True, width_ratios=[0.8, 1.0])
        _stresses(stresses, depth, profile)
    else:
        column = figure.subplots()
    _column(column, ground)
    column.set_ylim(1.02 * bottom, -_fill_height(ground) - 0.04 * bottom)
    column.set_ylabel("depth below ground level [m]")


def _fill_height(ground: dict[str, Any]) -> float:
    heights = [stage.get("height_after") for stage in ground.get("stages") or []]
    return max((float(height) for height in heights if height is not None), default=0.0)


def _column(axis: "Axes", ground: dict[str, Any]) -> None:
    from matplotlib.patches import Rectangle

    layers = ground["layers"]
    total = max(layer["bottom"] for layer in layers)
    label_at = -np.inf
    for number, layer in enumerate(layers, start=1):
        clay = layer.get("soil") == "clay"
        size = layer["bottom"] - layer["top"]
        axis.add_patch(
            Rectangle(
                (0.0, layer["top"]),
                _COLUMN,
                size,
                facecolor=LIGHT["clay"] if clay else LIGHT["sand"],
                edgecolor=LIGHT["muted"],
                lw=0.9,
                hatch="--" if clay else None,
            )
        )
        if not clay:
            _dots(axis, layer, 0.026 * total)
        # Labels of thin layers are pushed down so that they never stand on one another.
        label_at = max(layer["top"] + 0.5 * size, label_at + 0.055 * total)
        axis.text(0.39, label_at, f"{number}  {short(layer['name'], 22)}", va="center", fontsize=10)
    fill = _fill_height(ground)
    if fill > 0.0:
        axis.add_patch(
            Rectangle((0.0, -fill), _COLUMN, fill, facecolor=LIGHT["fill"], edgecolor=LIGHT["muted"], lw=0.9)
        )
        axis.text(0.39, -0.5 * fill, f"fill, at most {fill:g} m", va="center", fontsize=10)
    water = ground.get("water_table_depth")
    if is_number(water):
        axis.plot([0.0, _COLUMN], [water, water], color=LIGHT["main"], lw=1.6)
        axis.plot([0.17], [water], marker="v", ms=8, color=LIGHT["main"], ls="")
    axis.axhline(0.0, xmax=_COLUMN + 0.02, color=LIGHT["ink"], lw=1.6)
    axis.set_xlim(0.0, 1.0)
    axis.set_xticks([])
    axis.spines["bottom"].set_visible(False)


def _stresses(axis: "Axes", depth: FloatArray, profile: dict[str, Any]) -> None:
    lines = (
        ("initial_stress", "initial", "-", LIGHT["ink"]),
        ("preconsolidation", "preconsolidation", (0, (5, 2)), LIGHT["mark"]),
        ("final_stress", "final", (0, (1, 1.2)), LIGHT["main"]),
    )
    for key, label, dashes, colour in lines:
        values = numbers_array(profile.get(key) or [])
        if values.size == depth.size:
            axis.plot(values, depth, ls=dashes, color=colour, lw=1.9, label=label)
    axis.set_xlim(0.0, None)
    axis.grid(visible=True)
    axis.set_xlabel("vertical effective stress [kPa]")
    axis.legend(loc="lower left", frameon=False, fontsize=9)


def _dots(axis: "Axes", layer: dict[str, Any], spacing: float) -> None:
    # Marks of their own: a dotted hatch would be written out curve by curve and weigh more than all the rest.
    rows = np.arange(layer["top"] + spacing / 2.0, layer["bottom"], spacing)
    columns = np.linspace(0.0, _COLUMN, 10)[1:-1]
    across, down = np.meshgrid(columns, rows)
    across[1::2] += 0.5 * (columns[1] - columns[0])
    axis.plot(across.ravel(), down.ravel(), ls="", marker="o", ms=1.6, mew=0, color=LIGHT["muted"])
