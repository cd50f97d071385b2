"""Undrained distortion of clay on a calculation sheet: rows, and the formulas with numbers put in."""

from typing import Any

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.sheet_run import SheetRun
from probsoil.assessment.sheet_sublayers import Sublayer
from probsoil.assessment.worked import Symbol, Worked, worked
from probsoil.ground.foundation import Foundation
from probsoil.ground.undrained_distortion import (
    below_base,
    displacement_of,
    distortion_by_point,
    undrained_modulus,
)
from probsoil.ground.undrained_strength import undrained_shear_strength

Record = dict[str, Any]
DISTORTION = "undrained distortion"
_STRIP = "f = −3/(4 · π) · (a · ln(a^2 + z^2) + b · ln(b^2 + z^2))"
_FILL = "f = −3/(4 · π) · ((a^2 + z^2) · (ln(a^2 + z^2) − 1) − (b^2 + z^2) · (ln(b^2 + z^2) − 1))/(a − b)"
_CENTRE = "f = 3/2 · R^2/sqrt(R^2 + z^2)"
_ARSINH = "ln({b}/sqrt({a}^2 + z^2) + sqrt(1 + {b}^2/({a}^2 + z^2)))"


def distortion_at_horizon(run: SheetRun) -> FloatArray:
    """Return the undrained distortion of every point at the horizon.

    Parameters
    ----------
    run : SheetRun
        The computation.

    Returns
    -------
    settlement : ndarray, shape (n_point,), [m]
        Zero where none is computed.
    """
    if not run.site.distorts:
        return np.zeros(run.state.ground.clay.size)
    return np.asarray(distortion_by_point(run.site, run.values, run.state.ground)[-1, 0])


def distortion_rows(run: SheetRun, rows: list[Sublayer]) -> list[Record]:
    """Return what the undrained distortion of every sub-layer comes from.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of Sublayer
        The sub-layers.

    Returns
    -------
    rows : list of dict
        One for each sub-layer of clay that has an undrained modulus and lies below the load: depths of its
        top and bottom below it [m], displacement there times modulus over pressure [m], pressure [kPa],
        modulus (that of which the sub-layer as a whole distorts as much as its cells do) and, where it is
        given by its ratio, modulus and strength of the cell nearest to the middle [kPa], settlement [m].
    """
    if not run.site.distorts:
        return []
    by_point = distortion_at_horizon(run)
    modulus = undrained_modulus(run.site, run.values, run.state.ground)[0]
    top, bottom = (edge[0] for edge in below_base(run.site, run.state.ground))
    height, pressure = float(run.site.fill_height(run.site.horizon)), run.surface_pressure(run.site.horizon)
    curve, per_pressure = displacement_of(run.site, height), 1.0
    if run.site.embankment is not None:
        per_pressure = 1.0 / height if height > 0.0 else 0.0
    found = []
    for row in rows:
        above, below = float(top[row.points[0]]), float(bottom[row.points[-1]])
        if not np.isfinite(modulus[row.nearest]) or below <= above:
            continue
        ends = [float(curve(np.array([depth]))[0]) * per_pressure for depth in (above, below)]
        settlement = float(by_point[row.points].sum())
        drop = curve(top[row.points]) - curve(bottom[row.points])
        mean = float(drop.sum() / (drop / modulus[row.points]).sum())
        found.append(
            {
                "sublayer": row.number,
                "layer": run.site.layers[row.layer].name,
                "top_below_load": above,
                "bottom_below_load": below,
                "displacement_at_top": ends[0],
                "displacement_at_bottom": ends[1],
                "pressure": pressure,
                "modulus": mean,
                **_at_middle(run, row, float(modulus[row.nearest])),
                "settlement": settlement,
            }
        )
    return found


def _at_middle(run: SheetRun, row: Sublayer, modulus: float) -> Record:
    """Return modulus and strength of the cell nearest to the middle; nothing where Eu is given."""
    if run.site.layers[row.layer].modulus != "Eu_su":
        return {"depth": None, "modulus_at_depth": None, "strength_at_depth": None}
    ground, here = run.state.ground, row.nearest
    columns = ground.columns
    strength = undrained_shear_strength(
        ground.points.stress[0, here],
        ground.yield_stress[0, here],
        columns.strength_ratio[0, row.layer],
        columns.strength_exponent[0, row.layer],
    )
    return {
        "depth": float(ground.points.depth[0, here]),
        "modulus_at_depth": modulus,
        "strength_at_depth": float(strength),
    }


def distortion_formulas(run: SheetRun, rows: list[Record]) -> list[Worked]:
    """Return the undrained distortion of one sub-layer.

    Parameters
    ----------
    run : SheetRun
        The computation.
    rows : list of dict
        Undrained distortion of the sheet.

    Returns
    -------
    lines : list of Worked
        Displacement at top and bottom where it can be keyed in (not for a circle off its centre, nor with
        berms), the modulus where it follows from the strength, and the settlement.
    """
    if not rows:
        return []
    row = max(rows, key=lambda one: abs(one["settlement"]))
    place = f"sub-layer {row['sublayer']}, {row['layer']}"
    lines = [*_ends(run, row, place), *_ratio(run, row, place)]
    symbols: dict[str, Symbol] = {
        "q": (row["pressure"], "pressure on the ground", "kPa"),
        "ft": (row["displacement_at_top"], "displacement at the top", "m"),
        "fb": (row["displacement_at_bottom"], "displacement at the bottom", "m"),
        "Eu": (row["modulus"], "undrained modulus, mean over the cells", "kPa"),
    }
    result = (row["settlement"], "m")
    name = "settlement by distortion"
    return [*lines, worked(DISTORTION, name, "sd = q · (ft − fb)/Eu", result, symbols, row=place)]


def _ratio(run: SheetRun, row: Record, place: str) -> list[Worked]:
    if row["modulus_at_depth"] is None:
        return []
    symbols: dict[str, Symbol] = {
        "r": (run.at[f"{row['layer']}.Eu_su"], "undrained modulus over strength", "-"),
        "c": (row["strength_at_depth"], "strength in triaxial compression before the works", "kPa"),
    }
    result, place = (row["modulus_at_depth"], "kPa"), f"{place}, at {row['depth']:.3f} m"
    return [worked(DISTORTION, "undrained modulus", "Eu = r · c", result, symbols, row=place)]


def _ends(run: SheetRun, row: Record, place: str) -> list[Worked]:
    lines = []
    for end in ("top", "bottom"):
        depth: Symbol = (row[f"{end}_below_load"], "depth below the load", "m")
        result = (row[f"displacement_at_{end}"], "m")
        formula, symbols = _displacement(run, depth)
        if formula:
            name = f"displacement at the {end}, times Eu over q"
            lines.append(worked(DISTORTION, name, formula, result, symbols, row=place))
    return lines


def _displacement(run: SheetRun, depth: Symbol) -> tuple[str, dict[str, Symbol]]:
    if run.site.foundation is not None:
        return _of_foundation(run.site.foundation, depth)
    shape = run.site.embankment
    parts = () if shape is None else shape.trapezia(run.site.fill_height(run.site.horizon))
    if len(parts) != 1 or depth[0] <= 0.0:
        return "", {}
    base, top = float(parts[0].base_width) / 2.0, float(parts[0].top_width) / 2.0
    symbols: dict[str, Symbol] = {"a": (base, "half of the base's width", "m"), "z": depth}
    if base - top < 1e-9:
        return _STRIP, symbols | {"b": (base, "half of the width on the other side", "m")}
    return _FILL, symbols | {"b": (top, "half of the top's width", "m")}


def _of_foundation(shape: Foundation, depth: Symbol) -> tuple[str, dict[str, Symbol]]:
    width, length, (x, y) = float(shape.width), float(shape.length), map(float, shape.at)
    if shape.shape == "circle":
        radius: Symbol = (width / 2.0, "radius", "m")
        return ("", {}) if x else (_CENTRE, {"R": radius, "z": depth})
    across = (width / 2.0 + x, width / 2.0 - x)
    if shape.shape == "strip":
        if not all(across) and depth[0] <= 0.0:
            return "", {}
        symbols: dict[str, Symbol] = {
            "a": (across[0], "distance from the point to one edge", "m"),
            "b": (across[1], "distance from the point to the other edge", "m"),
            "z": depth,
        }
        return _STRIP, symbols
    along = (length / 2.0 + y, length / 2.0 - y)
    if min(*across, *along) <= 0.0:
        return "", {}
    return _rectangle(across, along, depth)


def _rectangle(
    across: tuple[float, float], along: tuple[float, float], depth: Symbol
) -> tuple[str, dict[str, Symbol]]:
    """Return the displacement below a point within a rectangle: by corners, alike ones taken together."""
    symbols: dict[str, Symbol] = {"z": depth}
    terms = []
    sides = [("a", across[0]), ("b", across[1])], [("c", along[0]), ("d", along[1])]
    first, second = (one[:1] if one[0][1] == one[1][1] else one for one in sides)
    for name, value in (*first, *second):
        where = "across" if name in "ab" else "along"
        symbols[name] = (value, f"distance from the point to an edge, {where}", "m")
    for name, _ in first:
        for other, _ in second:
            terms.append(f"{name} · {_ARSINH.format(a=name, b=other)}")
            terms.append(f"{other} · {_ARSINH.format(a=other, b=name)}")
    times = 4 // (len(first) * len(second))
    return f"f = {times} · 3/(4 · π) · ({' + '.join(terms)})", symbols
