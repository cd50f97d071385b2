"""What is no mistake in a scenario but deserves a second look."""

from probsoil.scenario.layers import ClayLayer, GranularLayer
from probsoil.scenario.mean_column import mean_column, mean_stress
from probsoil.scenario.models import Scenario


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
    makers = (_dry, _under_their_own_weight, _seepage_and_drains, _still_consolidating)
    return (*found, *(text for maker in makers for text in maker(scenario)))


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
    found: list[str] = []
    column = mean_column(scenario)
    for index, layer in enumerate(scenario.layers):
        given = layer.preconsolidation.stress if isinstance(layer, ClayLayer) else None
        if given is None or column is None:
            continue
        effective, excess = mean_stress(scenario, column, index)
        if given.expectation < effective - excess:
            found.append(
                f"the preconsolidation stress of {layer.name}, {given.expectation:.4g} kPa (mean), is less "
                f"than the effective stress in situ at the middle of the layer, {effective - excess:.4g} kPa "
                "at the means: it is raised to that stress wherever it lies below"
            )
    return found


def _seepage_and_drains(scenario: Scenario) -> list[str]:
    """Remark on drains through ground in which water moves before they are installed."""
    heads = [layer.head for layer in scenario.layers if isinstance(layer, GranularLayer)]
    if scenario.drains is None or not any([scenario.site.base_head, *heads]):
        return []
    return [
        "vertical drains change the seepage between the levels of water that are given, and one that reaches "
        "a layer under artesian pressure lets it flow out; the steady pore pressure is taken as it was before"
    ]


def _still_consolidating(scenario: Scenario) -> list[str]:
    """Remark on a preconsolidation stress beyond what a clay still consolidating has ever carried."""
    names = [
        layer.name
        for layer in scenario.layers
        if isinstance(layer, ClayLayer) and layer.initial_excess is not None and _overconsolidated(layer)
    ]
    if not names:
        return []
    return [
        f"{', '.join(names)} still holds excess pore pressure and yet has a preconsolidation stress above "
        "its present effective stress, to which ocr and pop refer: part of that pressure then dissipates in "
        "reloading; a clay that has never carried more than now has pop = 0"
    ]


def _overconsolidated(layer: ClayLayer) -> bool:
    ocr, pop = layer.preconsolidation.ocr, layer.preconsolidation.pop
    return (ocr is not None and ocr.expectation > 1.0) or (pop is not None and pop.expectation > 0.0)
