"""Checks of the further loads and of the stages that name them."""

from typing import Any

from probsoil.scenario.checks.common import repeated_names
from probsoil.scenario.further_loads import FurtherEmbankment
from probsoil.scenario.limits import SlipSafetyLimit
from probsoil.scenario.loads import Stage
from probsoil.scenario.slips import Path, Slip, did_you_mean


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
    slips += [
        slip
        for position, limit in enumerate(scenario.limits)
        for slip in _limit_slips(position, limit, loads)
    ]
    named = [(place, one) for place, one in enumerate(scenario.stages) if isinstance(one, Stage)]
    for position, stage in named:
        if stage.load is not None and stage.load not in names and len(names) == len(loads):
            slips.append(_unknown(("stages", position, "load"), stage.load, names))
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


def _limit_slips(position: int, limit: Any, loads: Any) -> list[Slip]:
    """Refuse a limit on a load that does not exist, or that the load has no strength for."""
    given = getattr(limit, "load", None)
    if not isinstance(given, str):
        return []
    known = {
        load.name: place for place, load in enumerate(loads) if isinstance(getattr(load, "name", None), str)
    }
    if given not in known:
        return (
            [_unknown(("limits", position, "load"), given, list(known))] if len(known) == len(loads) else []
        )
    load = loads[known[given]]
    if isinstance(limit, SlipSafetyLimit) and isinstance(load, FurtherEmbankment) and load.fill_phi is None:
        return [
            Slip(
                path=("further_loads", known[given]),
                message=f'the limit "{limit.name}" looks at its slip; the friction of its fill is missing',
                allowed="fill_phi",
                wanting=("fill_phi",),
            )
        ]
    return []


def _unknown(path: Path, given: str, names: list[str]) -> Slip:
    if not names:
        message, allowed = (
            "the scenario has no further loads",
            "leave load out, or [[further_loads]] with that name",
        )
        return Slip(path=path, message=message, allowed=allowed)
    return Slip(
        path=path,
        message="there is no further load of that name",
        allowed="one of " + ", ".join(names) + "; left out for [load]",
        hint=did_you_mean(given, names),
    )
