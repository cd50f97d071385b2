"""Stresses in the ground with everything at its mean: enough to find mistakes before anything is computed."""

import math
from dataclasses import dataclass
from typing import Any

from probsoil.scenario.distributions import Distribution
from probsoil.scenario.groundwater import controlled_boundaries, excess_runs, piezometric_levels
from probsoil.scenario.layers import ClayLayer

WATER_UNIT_WEIGHT, SECONDS_PER_YEAR = 9.81, 365.25 * 86400.0
"""As in the ground models, which this room cannot see [kN/m3], [s]."""

VIRGIN = {"lambda_": "lambda", "Cc": "Cc", "CR": "CR"}
"""Attributes of virgin compression and their keys in the file."""

RELOADING = {"kappa": "kappa", "Cs": "Cs", "RR": "RR"}
"""Attributes of unloading and reloading and their keys in the file."""


@dataclass(frozen=True, slots=True, kw_only=True)
class MeanColumn:
    """The ground at its means.

    Attributes
    ----------
    depth : tuple of float, [m]
        Ground level and the bottom of every layer.
    total, pore : tuple of float, [kPa]
        Total stress and pore pressure of the steady state there.
    level : tuple of float, [m]
        Piezometric level at the same boundaries, as depth below ground level.
    resistance : tuple of float, [year]
        Thickness of every layer below the water table over its permeability.
    """

    depth: tuple[float, ...]
    total: tuple[float, ...]
    pore: tuple[float, ...]
    level: tuple[float, ...]
    resistance: tuple[float, ...]


def mean_stress(scenario: Any, column: MeanColumn, index: int, share: float = 0.5) -> tuple[float, float]:
    """Return effective stress in the steady state, and what of it excess pore pressure takes, at one depth.

    Parameters
    ----------
    scenario : Scenario
        As `mean_column` took it.
    column : MeanColumn
        Its column.
    index : int, [-]
        Layer.
    share : float, [-]
        Depth below the top of the layer as a share of its thickness.

    Returns
    -------
    effective : float, [kPa]
        Total stress less the pore pressure of the steady state.
    excess : float, [kPa]
        Initial excess pore pressure.
    """
    water = scenario.site.water_table.expectation
    top, bottom = column.depth[index : index + 2]
    depth = top + share * (bottom - top)
    wet_top = min(max(top, water), bottom)
    part = (depth - wet_top) / (bottom - wet_top) if bottom > wet_top else 0.0
    level = column.level[index] + max(part, 0.0) * (column.level[index + 1] - column.level[index])
    pore = WATER_UNIT_WEIGHT * max(depth - level, 0.0)
    total = mean_total_stress(scenario, column, index, share)
    return total - pore, _excess(scenario, column, index, depth)


def mean_total_stress(scenario: Any, column: MeanColumn, index: int, share: float) -> float:
    """Return the total vertical stress at one depth.

    Parameters
    ----------
    scenario : Scenario
        As `mean_column` took it.
    column : MeanColumn
        Its column.
    index : int, [-]
        Layer.
    share : float, [-]
        Depth below the top of the layer as a share of its thickness.

    Returns
    -------
    stress : float, [kPa]
        Weight of the ground above.
    """
    top, bottom = column.depth[index : index + 2]
    water = scenario.site.water_table.expectation
    return column.total[index] + _weight(scenario.layers[index], top, top + share * (bottom - top), water)


def _excess(scenario: Any, column: MeanColumn, index: int, depth: float) -> float:
    given = getattr(scenario.layers[index], "initial_excess", None)
    if given is None:
        return 0.0
    first, last, closed = excess_runs(
        [getattr(layer, "initial_excess", None) is not None for layer in scenario.layers],
        base_drained=scenario.site.base == "drained",
    )[index]
    place = (depth - column.depth[first]) / (column.depth[last + 1] - column.depth[first])
    arch = math.sin((0.5 if closed else 1.0) * math.pi * place)
    if given.pressure is None:  # the first term of Terzaghi's series, near enough
        return float(
            given.load.expectation * min(1.0, 0.5 * math.pi * (1.0 - given.degree.expectation)) * arch
        )
    return float(
        given.pressure.expectation * {"sine": arch, "uniform": 1.0, "triangular": place}[given.shape]
    )


def mean_column(scenario: Any) -> MeanColumn | None:
    """Return the stresses in situ with everything at its mean.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    column : MeanColumn or None
        None where something that it takes could not be read.
    """
    try:
        return _column(scenario)
    except AttributeError:  # of what could not be read
        return None


def _column(scenario: Any) -> MeanColumn:
    layers, water = scenario.layers, scenario.site.water_table.expectation
    depth, total = [0.0], [0.0]
    for layer in layers:
        bottom = depth[-1] + layer.thickness.expectation
        total.append(total[-1] + _weight(layer, depth[-1], bottom, water))
        depth.append(bottom)
    resistance = []
    for index, layer in enumerate(layers):
        middle = 0.5 * (depth[index] + depth[index + 1])
        at_rest = total[index] + _weight(layer, depth[index], middle, water)
        at_rest -= WATER_UNIT_WEIGHT * max(middle - water, 0.0)
        saturated = max(depth[index + 1] - max(depth[index], water), 0.0)
        resistance.append(_resistance(layer, saturated, at_rest))
    level = _levels(scenario, depth, resistance)
    pore = [WATER_UNIT_WEIGHT * max(z - d, 0.0) for z, d in zip(depth, level, strict=True)]
    return MeanColumn(
        depth=tuple(depth),
        total=tuple(total),
        pore=tuple(pore),
        level=tuple(level),
        resistance=tuple(resistance),
    )


def _levels(scenario: Any, depth: list[float], resistance: list[float]) -> list[float]:
    water = scenario.site.water_table.expectation
    heads: list[Any] = [getattr(layer, "head", None) for layer in scenario.layers]
    base = scenario.site.base_head
    if base is None and all(head is None for head in heads):
        return [water] * len(depth)
    base_level = water if base is None else base.expectation
    controls = {
        boundary: min(base_level if owner is None else heads[owner].expectation, depth[boundary])
        for boundary, owner in controlled_boundaries(
            [head is not None for head in heads], base_drained=scenario.site.base == "drained"
        ).items()
    }
    return piezometric_levels(water, resistance, controls)


def _weight(layer: Any, top: float, bottom: float, water: float) -> float:
    """Return what a layer weighs between two depths [kPa]."""
    wet = layer.unit_weight.expectation
    moist = wet if layer.unit_weight_above is None else layer.unit_weight_above.expectation
    above = min(max(water - top, 0.0), bottom - top)
    return float(moist * above + wet * (bottom - top - above))


def _resistance(layer: Any, thickness: float, stress: float) -> float:
    """Return what a layer offers to steady flow, as the ground models do [year]."""
    if not isinstance(layer, ClayLayer):
        return 0.0
    flow: Any = layer.permeability
    if flow.cv is None:
        return float(thickness / (flow.k.expectation * SECONDS_PER_YEAR))
    table: Any = layer.preconsolidation
    slope = mean_slope(layer, VIRGIN)
    if slope is None:
        raise AttributeError("lambda could not be read")
    given = {
        "stress": lambda value: value,
        "ocr": lambda value: value * stress,
        "pop": lambda value: stress + value,
    }
    key = next((key for key in given if getattr(table, key) is not None), "stress")
    yielding = max(given[key](getattr(table, key).expectation), stress)
    compressibility = slope[1] / ((1.0 + layer.void_ratio.expectation) * max(yielding, 1.0))
    return float(thickness / (flow.cv.expectation * WATER_UNIT_WEIGHT * compressibility))


def mean_slope(layer: Any, keys: dict[str, str]) -> tuple[str, float] | None:
    """Return a slope of the compression line per unit of natural logarithm, at the means.

    Parameters
    ----------
    layer : ClayLayer
        Read in full or in part.
    keys : dict of str to str
        Attributes that may give it and their keys in the file.

    Returns
    -------
    slope : tuple of str and float, or None, [-]
        Key in the file and mean [-]; None where they cannot be known.
    """
    given = [attribute for attribute in keys if getattr(layer, attribute) is not None]
    if len(given) != 1 or not isinstance(getattr(layer, given[0]), Distribution):
        return None
    attribute = given[0]
    mean = getattr(layer, attribute).expectation
    if attribute in ("lambda_", "kappa"):
        return keys[attribute], mean
    if attribute in ("Cc", "Cs"):
        return keys[attribute], mean / math.log(10.0)
    if not isinstance(layer.void_ratio, Distribution):
        return None
    return keys[attribute], mean * (1.0 + layer.void_ratio.expectation) / math.log(10.0)
