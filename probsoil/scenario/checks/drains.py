"""Checks of the vertical drains."""

from typing import Any

from probsoil.scenario.amounts import known
from probsoil.scenario.drains import Drains
from probsoil.scenario.slips import Slip

_EQUIVALENT = {"triangular": 1.05, "square": 1.13}  # as in ground.vertical_drains, which this room cannot see


def drain_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the drains.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    drains = scenario.drains
    if not isinstance(drains, Drains) or not isinstance(drains.pattern, str):
        return []
    spacing, diameter, smear = (
        known(getattr(drains, key)) for key in ("spacing", "equivalent_diameter", "smear_ratio")
    )
    if spacing is None or diameter is None or smear is None or not isinstance(drains.installed, float | int):
        return []
    slips = []
    served, smeared = _EQUIVALENT[drains.pattern] * spacing, smear * diameter
    if smeared >= served:
        message = f"the smear zones, {smeared:.3g} m wide, fill the {served:.3g} m that each drain serves"
        slips.append(
            Slip(path=("drains", "smear_ratio"), message=message, allowed="smear zones that do not meet")
        )
    if isinstance(scenario.horizon, float | int) and drains.installed >= scenario.horizon:
        message = "the drains would be installed at the end of the time axis or later"
        slips.append(
            Slip(path=("drains", "installed"), message=message, allowed=f"before {scenario.horizon:g} years")
        )
    return slips
