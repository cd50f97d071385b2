"""Checks of the berms and the traffic of an embankment."""

from collections.abc import Sequence
from typing import Any

from probsoil.scenario.amounts import known
from probsoil.scenario.base import UNREAD
from probsoil.scenario.checks.common import years_text
from probsoil.scenario.distributions import Constant
from probsoil.scenario.loads import EmbankmentLoad
from probsoil.scenario.slips import Slip

_ROUNDING = 1e-9  # heights are given to the millimetre at best; sums of them carry rounding


def embankment_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with berms and traffic.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    load = scenario.load
    if not isinstance(load, EmbankmentLoad):
        return []
    found = _berm_slips(load, scenario.stages) + _traffic_slips(load, scenario.horizon)
    return [slip.below(("load",)) for slip in found]


def _berm_slips(load: Any, stages: Sequence[Any]) -> list[Slip]:
    given = {key: getattr(load, key) for key in ("berm_width", "berm_height")}
    missing = [key for key, value in given.items() if value is None]
    if len(missing) == 1:
        message = f"a berm needs both its width and its height; {missing[0]} is missing"
        return [Slip(path=(), message=message, allowed="berm_width and berm_height", wanting=(missing[0],))]
    own = [stage for stage in stages if getattr(stage, "load", None) is None]
    raised = [getattr(stage, "height", UNREAD) for stage in own if getattr(stage, "excavate", None) is None]
    heights = [one for one in map(known, raised) if one is not None]
    if not isinstance(load.berm_height, float) or len(heights) < len(raised):
        return []
    greatest = max((sum(heights[: place + 1]) for place in range(len(heights))), default=0.0)
    if load.berm_height < greatest - _ROUNDING:
        return []
    message = f"the berms are {load.berm_height:g} m high, the fill beside them at most {greatest:.4g} m"
    return [Slip(path=("berm_height",), message=message, allowed="below the greatest height of the fill")]


def _traffic_slips(load: Any, horizon: Any) -> list[Slip]:
    if not isinstance(load.traffic_from, float):
        return []
    if load.traffic == Constant(value=0.0):
        message = "there is no traffic that could begin then"
        return [Slip(path=("traffic_from",), message=message, allowed="traffic above 0, or leave it out")]
    if isinstance(horizon, float) and load.traffic_from > horizon:
        message = f"{years_text(load.traffic_from)} is beyond the horizon"
        return [Slip(path=("traffic_from",), message=message, allowed=f"at most {years_text(horizon)}")]
    return []
