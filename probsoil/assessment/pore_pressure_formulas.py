"""Pore pressure in situ on a calculation sheet: seepage and excess, as formulas with their numbers put in."""

from typing import Any

import numpy as np

from probsoil.assessment.sheet_run import SheetRun
from probsoil.assessment.sheet_sublayers import Sublayer
from probsoil.assessment.worked import Symbol, Worked, worked
from probsoil.ground.constants import WATER_UNIT_WEIGHT
from probsoil.ground.pore_pressure import Seepage, layer_seepage, time_factor
from probsoil.ground.profile import LEAST_STRESS
from probsoil.scenario.groundwater import controlled_boundaries, excess_runs

Record = dict[str, Any]
IN_SITU = "stress in situ"
GAMMA_W: Symbol = (WATER_UNIT_WEIGHT, "unit weight of water", "kN/m3")
_VANISHED = 1e-8  # of a term of Terzaghi's series, left out


def seepage_of(run: SheetRun) -> Seepage | None:
    """Return the steady seepage of a sheet's computation.

    Parameters
    ----------
    run : SheetRun
        The computation.

    Returns
    -------
    seepage : Seepage or None
        One realisation; None where the water is at rest.
    """
    if not run.site.seeps:
        return None
    values, layers = run.values, run.site.layers

    def per_layer(keys: list[str]) -> np.ndarray:
        return np.array([[run.layer_value(index, key) for index, key in enumerate(keys)]])

    weights = {
        "unit_weight": per_layer(["unit_weight"] * len(layers)),
        "unit_weight_above": per_layer(
            ["unit_weight_above" if form.weight_above else "unit_weight" for form in layers]
        ),
        "water_table": np.array([run.at["site.water_table"]]),
    }
    return layer_seepage(run.site, values, run.state.ground.points.boundary, weights)


def seepage_rows(run: SheetRun) -> list[Record]:
    """Return how the loss of head is shared by the layers.

    Parameters
    ----------
    run : SheetRun
        The computation.

    Returns
    -------
    rows : list of dict
        One per layer: depths [m], permeability [m/year] (None where granular), resistance [years], levels at
        top and bottom as depths below ground level [m] and pore pressures there [kPa]; empty where the water
        is at rest.
    """
    seepage = seepage_of(run)
    if seepage is None:
        return []
    pore = seepage.at_boundaries()[0]
    rows = []
    for index, form in enumerate(run.site.layers):
        boundary, level = seepage.boundary[0], seepage.level[0]
        rows.append(
            {
                "layer": form.name,
                "top": float(boundary[index]),
                "bottom": float(boundary[index + 1]),
                "permeability": float(seepage.permeability[0, index]) if form.is_clay else None,
                "resistance": float(seepage.resistance[0, index]),
                "level_at_top": float(level[index]),
                "level_at_bottom": float(level[index + 1]),
                "pore_pressure_at_top": float(pore[index]),
                "pore_pressure_at_bottom": float(pore[index + 1]),
            }
        )
    return rows


def pore_pressure_formulas(run: SheetRun, sublayer: Sublayer, row: Record, place: str) -> list[Worked]:
    """Return the steady pore pressure at the point of a sub-layer.

    Parameters
    ----------
    run : SheetRun
        The computation.
    sublayer : Sublayer
        The sub-layer of the example, of clay.
    row : dict
        Its numbers.
    place : str
        Sub-layer and depth in words.

    Returns
    -------
    lines : list of Worked
        Pore pressure at rest; or, in seepage, also the levels at the bottom of the layer and at the point.
    """
    depth: Symbol = (row["depth"], "depth", "m")
    water: Symbol = (run.at["site.water_table"], "depth of the water table", "m")
    result = (row["pore_pressure"], "kPa")
    seepage = seepage_of(run)
    if seepage is None:
        formula = "u0 = γw · max(z − zw, 0)"
        return [
            worked(
                IN_SITU, "pore pressure", formula, result, {"γw": GAMMA_W, "z": depth, "zw": water}, row=place
            )
        ]
    index, here = sublayer.layer, np.array([[row["depth"]]])
    level = float(seepage.level_at(here, np.array([index]))[0, 0])
    boundary, levels = seepage.boundary[0], seepage.level[0]
    symbols: dict[str, Symbol] = {
        "Dt": (float(levels[index]), "level at the top of the layer, or of the water table in it", "m"),
        "Db": (float(levels[index + 1]), "level at its bottom", "m"),
        "z": depth,
        "zt": (float(max(boundary[index], water[0])), "depth of that top", "m"),
        "zb": (float(boundary[index + 1]), "depth of that bottom", "m"),
    }
    wet = row["depth"] > symbols["zt"][0]
    formula = "D = Dt + (Db − Dt) · (z − zt)/(zb − zt)"
    inner = [worked(IN_SITU, "level of water", formula, (level, "m"), symbols, row=place)] if wet else []
    symbols = {"γw": GAMMA_W, "z": depth, "D": (level, "level of water, below ground level", "m")}
    formula = "u0 = γw · max(z − D, 0)"
    pore = worked(IN_SITU, "pore pressure in seepage", formula, result, symbols, row=place)
    above = _shared_loss(run, seepage, index - 1) if index else []
    return [*above, *_shared_loss(run, seepage, index), *inner, pore]


def _shared_loss(run: SheetRun, seepage: Seepage, index: int) -> list[Worked]:
    """Return how the level at the bottom of a layer follows from the levels that are known."""
    heads = [form.has_head for form in run.site.layers]
    known = sorted(controlled_boundaries(heads, base_drained=run.site.base_drained))
    after = next((boundary for boundary in known if boundary >= index + 1), None)
    before = max((boundary for boundary in known if boundary <= index), default=0)
    if after is None or after == index + 1:
        return []
    parts = {
        f"R{number}": (
            float(seepage.resistance[0, layer]),
            f"thickness below the water table over permeability of {run.site.layers[layer].name}",
            "years",
        )
        for number, layer in enumerate(range(before, after), start=1)
    }
    passed = " + ".join(list(parts)[: index + 1 - before])
    symbols: dict[str, Symbol] = {
        "Da": (float(seepage.level[0, before]), "known level above", "m"),
        "De": (float(seepage.level[0, after]), "known level below", "m"),
        **parts,
    }
    formula = f"Db = Da + (De − Da) · ({passed})/({' + '.join(parts)})"
    result = (float(seepage.level[0, index + 1]), "m")
    place = f"bottom of {run.site.layers[index].name}"
    return [worked(IN_SITU, "level at the bottom of the layer", formula, result, symbols, row=place)]


def excess_formulas(run: SheetRun, sublayer: Sublayer, row: Record, place: str) -> list[Worked]:
    """Return the excess pore pressure before loading at the point of a sub-layer.

    Parameters
    ----------
    run : SheetRun
        The computation.
    sublayer : Sublayer
        The sub-layer of the example.
    row : dict
        Its numbers.
    place : str
        Sub-layer and depth in words.

    Returns
    -------
    lines : list of Worked
        None where there is no excess, where the least effective stress limits it, and for a degree below
        0.25, whose series takes too many terms.
    """
    layers = run.site.layers
    form = layers[sublayer.layer].excess
    if not row["initial_excess"] or row["initial_stress"] <= LEAST_STRESS:  # cut down to it
        return []
    runs = excess_runs([bool(one.excess) for one in layers], base_drained=run.site.base_drained)
    first, last, closed = runs[sublayer.layer]
    boundary = run.state.ground.points.boundary[0]
    top, bottom = float(boundary[first]), float(boundary[last + 1])
    share: dict[str, Symbol] = {
        "z": (row["depth"], "depth", "m"),
        "zt": (top, "top of the layers that still consolidate", "m"),
        "zb": (bottom, "their bottom", "m"),
    }
    z = (row["depth"] - top) / (bottom - top)
    relative = worked(IN_SITU, "relative depth", "Z = (z − zt)/(zb − zt)", (z, "-"), share, row=place)
    if form == "degree":
        line = _terzaghi(run, sublayer, row, (z, closed), place)
        return [relative, *line]
    formula = {
        "sine": f"ui = um · sin({'90' if closed else '180'} · Z)",
        "uniform": "ui = um",
        "triangular": "ui = um · Z",
    }[form]
    symbols: dict[str, Symbol] = {
        "um": (run.layer_value(sublayer.layer, "initial_excess"), "greatest initial excess pressure", "kPa")
    }
    if form != "uniform":
        symbols["Z"] = (z, "relative depth", "-")
    result = (row["initial_excess"], "kPa")
    line = [worked(IN_SITU, "initial excess pore pressure", formula, result, symbols, row=place)]
    return line if form == "uniform" else [relative, *line]


def _terzaghi(
    run: SheetRun, sublayer: Sublayer, row: Record, where: tuple[float, bool], place: str
) -> list[Worked]:
    """Return Terzaghi's isochrone with as many terms as count."""
    degree = run.layer_value(sublayer.layer, "initial_degree")
    factor = float(time_factor(degree))
    modes = (2.0 * np.arange(8) + 1.0) * np.pi / 2.0
    count = int((np.exp(-(modes**2) * factor) > _VANISHED).sum())
    if count == modes.size:
        return []
    angle = 90 if where[1] else 180
    terms = [
        f"4/({2 * n + 1} · π) · sin({(2 * n + 1) * angle} · Z) · exp(−{(2 * n + 1) ** 2} · π^2/4 · Tv)"
        for n in range(max(count, 1))
    ]
    symbols: dict[str, Symbol] = {
        "q": (run.layer_value(sublayer.layer, "initial_load"), "earlier load", "kPa"),
        "Z": (where[0], "relative depth", "-"),
        "Tv": (factor, f"Terzaghi's time factor of a degree of {degree:.4g}", "-"),
    }
    formula = f"ui = q · ({' + '.join(terms)})"
    result = (row["initial_excess"], "kPa")
    return [worked(IN_SITU, "initial excess pore pressure", formula, result, symbols, row=place)]
