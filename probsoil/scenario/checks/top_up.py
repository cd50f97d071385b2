"""Checks of fill that is topped up so that its level stays."""

from typing import Any

from probsoil.scenario.base import UNREAD
from probsoil.scenario.checks.common import years_text
from probsoil.scenario.slips import Slip


def top_up_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the time until which the level of the fill is held.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    until = getattr(scenario.load, "hold_level_until", None)
    if not isinstance(until, float):
        return []
    path = ("load", "hold_level_until")
    own = [stage for stage in scenario.stages if getattr(stage, "load", None) is None]
    raised = [getattr(stage, "height", UNREAD) for stage in own]
    if all(height is None for height in raised):
        message = "no stage lays fill whose level could be held"
        return [Slip(path=path, message=message, allowed="stages with height, or leave it out")]
    start = getattr(own[0], "start", UNREAD) if own else UNREAD
    if isinstance(start, float) and until <= start:
        message = f"nothing is laid before {years_text(start)}, so there is no level to hold"
        return [Slip(path=path, message=message, allowed="later than the start of the first stage")]
    if isinstance(scenario.horizon, float) and until > scenario.horizon:
        message = f"{years_text(until)} is beyond the horizon"
        allowed = f"at most {years_text(scenario.horizon, digits=6)}"
        return [Slip(path=path, message=message, allowed=allowed, hint="raise horizon")]
    return []
