"""Checks of the further loads and of the stages that name them."""

from typing import Any

from probsoil.scenario.checks.common import repeated_names
from probsoil.scenario.loads import Stage
from probsoil.scenario.slips import Slip, did_you_mean


def further_load_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the further loads.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    loads = scenario.further_loads
    names = [load.name for load in loads if isinstance(getattr(load, "name", None), str)]
    slips = list(repeated_names(loads, "further_loads", "further load"))
    named = [(place, one) for place, one in enumerate(scenario.stages) if isinstance(one, Stage)]
    for position, stage in named:
        if stage.load is not None and stage.load not in names and len(names) == len(loads):
            slips.append(_unknown(position, stage.load, names))
    used = {stage.load for _, stage in named}
    if len(named) < len(scenario.stages):
        return slips
    if None not in used and named:
        message = "no stage belongs to [load]: every one names a further load"
        slips.append(Slip(path=("stages",), message=message, allowed="at least one stage without load"))
    for position, load in enumerate(loads):
        if isinstance(getattr(load, "name", None), str) and load.name not in used:
            message = f'no stage belongs to the load "{load.name}"'
            path = ("further_loads", position, "name")
            slips.append(Slip(path=path, message=message, allowed=f'a stage with load = "{load.name}"'))
    return slips


def _unknown(position: int, given: str, names: list[str]) -> Slip:
    if not names:
        message, allowed = (
            "the scenario has no further loads",
            "leave load out, or [[further_loads]] with that name",
        )
        return Slip(path=("stages", position, "load"), message=message, allowed=allowed)
    return Slip(
        path=("stages", position, "load"),
        message="there is no further load of that name",
        allowed="one of " + ", ".join(names) + "; left out for [load]",
        hint=did_you_mean(given, names),
    )
