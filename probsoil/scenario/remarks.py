"""What is no mistake in a scenario but deserves a second look."""

from probsoil.scenario.layers import ClayLayer, Layer
from probsoil.scenario.models import Scenario

WATER_UNIT_WEIGHT = 9.81
"""As in the ground models, which this room cannot see [kN/m3]."""


def remarks(scenario: Scenario) -> tuple[str, ...]:
    """Return what a user should look at again.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    remarks : tuple of str
        One sentence each; empty where there is nothing to say.
    """
    measured = [
        layer.name for layer in scenario.layers if isinstance(layer, ClayLayer) and layer.strength is not None
    ]
    found = []
    if measured and "mode_factor" not in scenario.site.model_fields_set:
        found.append(
            f"the undrained strength of {', '.join(measured)} is given outright, and the default mode factor "
            "of 0.80 for triaxial compression is applied to it; if it stems from another test, give "
            "site.mode_factor (1.0 for a strength that already is an average along a slip surface)"
        )
    return (*found, *_dry(scenario), *_under_their_own_weight(scenario))


def _dry(scenario: Scenario) -> list[str]:
    """Remark on a water table below everything that is described."""
    water = scenario.site.water_table.expectation
    bottom = sum(layer.thickness.expectation for layer in scenario.layers)
    if water <= bottom:
        return []
    return [
        f"the water table lies at {water:.4g} m (mean), below the last layer, which ends at {bottom:.4g} m: "
        "every layer is taken as dry and without pore pressure"
    ]


def _under_their_own_weight(scenario: Scenario) -> list[str]:
    """Remark on a preconsolidation stress that the ground exceeds by its own weight, at the means."""
    found = []
    for layer, in_situ in zip(scenario.layers, _middle_stresses(scenario), strict=True):
        given = layer.preconsolidation.stress if isinstance(layer, ClayLayer) else None
        if given is not None and given.expectation < in_situ:
            found.append(
                f"the preconsolidation stress of {layer.name}, {given.expectation:.4g} kPa (mean), is less "
                f"than the effective stress in situ at the middle of the layer, {in_situ:.4g} kPa at the "
                "means: it is raised to that stress wherever it lies below"
            )
    return found


def _middle_stresses(scenario: Scenario) -> list[float]:
    """Return the effective vertical stress at the middle of each layer, everything at its mean [kPa]."""
    water = scenario.site.water_table.expectation
    top, total, stresses = 0.0, 0.0, []
    for layer in scenario.layers:
        thickness = layer.thickness.expectation
        middle = top + 0.5 * thickness
        pressure = WATER_UNIT_WEIGHT * max(middle - water, 0.0)
        stresses.append(total + _weight(layer, top, middle, water) - pressure)
        total += _weight(layer, top, top + thickness, water)
        top += thickness
    return stresses


def _weight(layer: Layer, top: float, bottom: float, water: float) -> float:
    """Return what a layer weighs between two depths [kPa]."""
    wet = layer.unit_weight.expectation
    moist = wet if layer.unit_weight_above is None else layer.unit_weight_above.expectation
    above = min(max(water - top, 0.0), bottom - top)
    return moist * above + wet * (bottom - top - above)
