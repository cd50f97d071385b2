"""Layers and stresses in situ at the depth of a test: from a scenario, or from one assumed unit weight."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from probsoil.errors import ParameterError
from probsoil.scenario.layers import GranularLayer
from probsoil.scenario.mean_column import (
    WATER_UNIT_WEIGHT,
    mean_column,
    mean_stress,
    mean_total_stress,
)

if TYPE_CHECKING:
    from probsoil.scenario import Scenario


@dataclass(frozen=True, slots=True, kw_only=True)
class GroundColumn:
    """What is known of the ground before it is tested.

    Attributes
    ----------
    layers : tuple of tuple of str, float and float, [m]
        Name, top and bottom of each layer from ground level down; none with an assumed unit weight.
    total_stress : callable
        Of a depth [m], the total vertical stress [kPa].
    effective_stress : callable
        Of a depth [m], the effective vertical stress [kPa].
    source : str
        Where both come from, in words.
    granular : tuple of str
        Names of the layers that are no clay.
    """

    layers: tuple[tuple[str, float, float], ...]
    total_stress: Callable[[float], float]
    effective_stress: Callable[[float], float]
    source: str
    granular: tuple[str, ...] = ()

    def layer_at(self, depth: float) -> str:
        """Return the layer at a depth.

        Parameters
        ----------
        depth : float, [m]
            Below ground level.

        Returns
        -------
        name : str
            Empty below the last layer, above ground and where layers are not known.
        """
        return next((name for name, top, bottom in self.layers if top <= depth < bottom), "")

    def stress_at(self, depth: float) -> float | None:
        """Return the effective vertical stress in situ where it is known and above zero.

        Parameters
        ----------
        depth : float, [m]
            Below ground level.

        Returns
        -------
        stress : float or None, [kPa]
            None below the last layer, above ground, and where water carries all the weight.
        """
        if depth <= 0.0 or (self.layers and not self.layer_at(depth)):
            return None
        stress = self.effective_stress(depth)
        return stress if stress > 0.0 else None


def scenario_column(scenario: "Scenario") -> GroundColumn:
    """Return the ground of a scenario, everything at its mean.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    column : GroundColumn
        Layers and stresses; below the last layer stresses as at its bottom and not beyond.
    """
    column = mean_column(scenario)
    if column is None:  # a scenario read in full has a column
        raise ParameterError("the scenario does not say enough to compute stresses in situ")
    tops = column.depth

    def place(depth: float) -> tuple[int, float]:
        inside = min(max(depth, 0.0), tops[-1])
        index = max(k for k in range(len(tops) - 1) if tops[k] <= inside)
        return index, (inside - tops[index]) / (tops[index + 1] - tops[index])

    def effective(depth: float) -> float:
        index, share = place(depth)
        steady, excess = mean_stress(scenario, column, index, share)
        return steady - excess

    def total(depth: float) -> float:
        return mean_total_stress(scenario, column, *place(depth))

    return GroundColumn(
        layers=tuple((layer.name, tops[k], tops[k + 1]) for k, layer in enumerate(scenario.layers)),
        total_stress=total,
        effective_stress=effective,
        source="the layers of the scenario, everything at its mean",
        granular=tuple(layer.name for layer in scenario.layers if isinstance(layer, GranularLayer)),
    )


def assumed_column(unit_weight: float, water_table: float) -> GroundColumn:
    """Return ground of one unit weight with still water.

    Parameters
    ----------
    unit_weight : float, [kN/m3]
        Bulk unit weight, above and below the water table.
    water_table : float, [m]
        Depth of the water table.

    Returns
    -------
    column : GroundColumn
        Without layers.

    Raises
    ------
    ParameterError
        If the unit weight is no more than that of water or above 25, or the water table above ground level.
    """
    if not WATER_UNIT_WEIGHT < unit_weight <= 25.0:
        raise ParameterError(
            f"unit weight of the ground must lie between 9.81 and 25 kN/m3, got {unit_weight:g}"
        )
    if not 0.0 <= water_table <= 100.0:
        raise ParameterError(f"the water table must lie 0 to 100 m below ground level, got {water_table:g}")
    return GroundColumn(
        layers=(),
        total_stress=lambda depth: unit_weight * depth,
        effective_stress=lambda depth: (
            unit_weight * depth - WATER_UNIT_WEIGHT * max(depth - water_table, 0.0)
        ),
        source=f"an assumed unit weight of {unit_weight:g} kN/m3 and water at {water_table:g} m",
    )
