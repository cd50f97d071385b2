"""The influence of a load on a calculation sheet, as a formula with its numbers put in."""

from typing import Any

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.sheet_formulas import LOAD, place_of
from probsoil.assessment.sheet_run import SheetRun
from probsoil.assessment.worked import Symbol, Worked, worked
from probsoil.ground.foundation import Foundation
from probsoil.ground.load_stress import Trapezium, embankment_influence, rectangle_influence

Record = dict[str, Any]
_NEAR = 1e-9
_VERTICAL = "I = 2/π · (arctan(a/z) + a · z/(a^2 + z^2))"
_TRAPEZIUM = "I = 2/π · (a · arctan(a/z) − b · arctan(b/z))/(a − b)"
_BESIDE = "I = ((a · arctan(a/z) − b · arctan(b/z))/(a − b) + (c · arctan(c/z) − d · arctan(d/z))/(c − d))/π"
_STRIP = "I = (arctan(a/z) + a · z/(a^2 + z^2) + arctan(b/z) + b · z/(b^2 + z^2))/π"
_CORNER = (
    "Ic = (arctan(a · b/(z · sqrt(a^2 + b^2 + z^2))) + a · b · z/sqrt(a^2 + b^2 + z^2) · "
    "(1/(a^2 + z^2) + 1/(b^2 + z^2)))/(2 · π)"
)
_CIRCLE = "I = 1 − 1/(1 + (R/z)^2)^1.5"


def influence_formulas(run: SheetRun, row: Record) -> list[Worked]:
    """Return how the load's influence at the point of a sub-layer is worked out.

    Parameters
    ----------
    run : SheetRun
        The computation.
    row : dict
        Numbers of the sub-layer.

    Returns
    -------
    lines : list of Worked
        None for a wide area, whose influence is 1; for a circle off its centre, which takes elliptic
        integrals; and where the base of a foundation cuts through the cell.
    """
    if row["influence"] is None:
        return []
    if run.site.embankment is not None and run.site.embankment.pit > 0.0:
        return []  # of two loads on the bottom of the pit
    if run.site.embankment is not None:
        return _embankment(run, row)
    if run.site.foundation is not None:
        return _foundation(run.site.foundation, row)
    return []


def _line(formula: str, row: Record, symbols: dict[str, Symbol]) -> Worked:
    place = f"{place_of(row)}, at {row['depth']:.3f} m"
    return worked(LOAD, "influence", formula, (row["influence"], "-"), symbols, row=place)


def _embankment(run: SheetRun, row: Record) -> list[Worked]:
    shape = run.site.embankment
    height = float(run.site.fill_height(run.site.horizon))
    parts = () if shape is None else shape.trapezia(height)
    if len(parts) == 1:
        return [_trapezium(parts[0], row, "influence", row["influence"], run.site.offset)]
    shares = [_trapezium_influence(part, row["depth"], run.site.offset) for part in parts]
    terms: dict[str, Symbol] = {}
    for number, (part, share) in enumerate(zip(parts, shares, strict=True), start=1):
        terms[f"I{number}"] = (share, f"influence of part {number}, from the ground up", "-")
        terms[f"h{number}"] = (float(part.height), f"height of part {number}", "m")
    terms["h"] = (height, "height of fill", "m")
    name = "influence of part 1, berms and what lies between"
    first = _trapezium(parts[0], row, name, shares[0], run.site.offset)
    return [first, _line("I = (I1 · h1 + I2 · h2)/h", row, terms)]


def _trapezium_influence(part: Trapezium, depth: float, offset: float) -> float:
    widths = {"base_width": part.base_width, "top_width": part.top_width}
    return float(embankment_influence(depth, offset, **widths))


def _trapezium(part: Trapezium, row: Record, name: str, share: float, offset: float) -> Worked:
    if offset != 0.0:
        return _beside(part, row, name, share, abs(offset))
    symbols: dict[str, Symbol] = {
        "a": (float(part.base_width) / 2.0, "half of the base's width", "m"),
        "b": (float(part.top_width) / 2.0, "half of the top's width", "m"),
        "z": (row["depth"], "depth", "m"),
    }
    formula = _TRAPEZIUM
    if part.base_width - part.top_width < _NEAR:
        del symbols["b"]
        formula = _VERTICAL
    place = f"{place_of(row)}, at {row['depth']:.3f} m"
    return worked(LOAD, name, formula, (share, "-"), symbols, row=place)


def _beside(part: Trapezium, row: Record, name: str, share: float, offset: float) -> Worked:
    """Return the influence of a trapezium away from its centreline."""
    place = f"{place_of(row)}, at {row['depth']:.3f} m"
    base, top = float(part.base_width) / 2.0, float(part.top_width) / 2.0
    depth: Symbol = (row["depth"], "depth", "m")
    if base - top < 0.5 * _NEAR:
        sides = _sides(float(part.base_width), offset)
        return worked(LOAD, name, _STRIP, (share, "-"), {**sides, "z": depth}, row=place)
    symbols: dict[str, Symbol] = {
        "a": (base + offset, "distance from the point to the farther toe", "m"),
        "b": (top + offset, "distance from the point to the farther edge of the top", "m"),
        "c": (base - offset, "distance from the point to the nearer toe, negative beyond it", "m"),
        "d": (top - offset, "distance from the point to the nearer edge of the top, likewise", "m"),
        "z": depth,
    }
    return worked(LOAD, name, _BESIDE, (share, "-"), symbols, row=place)


def _foundation(shape: Foundation, row: Record) -> list[Worked]:
    below = row["depth"] - shape.depth
    depth: Symbol = (below, "depth below the base", "m")
    lines: list[Worked] = []
    if shape.shape == "strip":
        lines = [_line(_STRIP, row, {**_sides(float(shape.width), float(shape.at[0])), "z": depth})]
    elif shape.shape == "circle" and not shape.at[0]:
        radius: Symbol = (float(shape.width) / 2.0, "radius", "m")
        lines = [_line(_CIRCLE, row, {"R": radius, "z": depth})]
    elif shape.shape == "rectangle" and below > 0.0:
        lines = _rectangle(shape, row, depth)
    whole = (
        below > 0.0 and abs(float(shape.influence(_array(below), *shape.at)[0]) - row["influence"]) < _NEAR
    )
    return lines if whole else []


def _sides(width: float, offset: float) -> dict[str, Symbol]:
    return {
        "a": (width / 2.0 + offset, "distance from the point to one edge", "m"),
        "b": (width / 2.0 - offset, "distance from the point to the other edge", "m"),
    }


def _rectangle(shape: Foundation, row: Record, depth: Symbol) -> list[Worked]:
    width, length, (x, y) = float(shape.width), float(shape.length), map(float, shape.at)
    across = [width / 2.0 + x, width / 2.0 - x]
    along = [length / 2.0 + y, length / 2.0 - y]
    corners = [(a, b) for a in across for b in along]
    parts = [_corner(depth[0], a, b) for a, b in corners]
    symbols: dict[str, Symbol] = {
        "a": (corners[0][0], "distance from the point to an edge, across", "m"),
        "b": (corners[0][1], "distance from the point to an edge, along", "m"),
        "z": depth,
    }
    place = f"{place_of(row)}, at {row['depth']:.3f} m"
    first = worked(LOAD, "influence of a corner", _CORNER, (parts[0], "-"), symbols, row=place)
    terms: dict[str, Symbol] = {
        f"I{number}": (part, f"corner at {a:g} m across and {b:g} m along", "-")
        for number, (part, (a, b)) in enumerate(zip(parts, corners, strict=True), start=1)
    }
    return [first, _line("I = I1 + I2 + I3 + I4", row, terms)]


def _corner(below: float, a: float, b: float) -> float:
    """Return the influence of a rectangle with a corner over the point, odd in both sides, [-]."""
    if not a or not b:
        return 0.0
    size = rectangle_influence(_array(below), 0.0, 0.0, width=2.0 * abs(a), length=2.0 * abs(b))
    return float(size[0]) / 4.0 * (1.0 if a * b > 0.0 else -1.0)


def _array(value: float) -> FloatArray:
    return np.array([value])
