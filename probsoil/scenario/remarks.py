"""What is no mistake in a scenario but deserves a second look."""

from probsoil.scenario.layers import ClayLayer
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
    return tuple(found)
