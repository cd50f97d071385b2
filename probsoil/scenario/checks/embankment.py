"""Checks of the berms and the traffic of an embankment."""

from collections.abc import Sequence
from typing import Any

from probsoil.scenario.amounts import known
from probsoil.scenario.base import UNREAD
from probsoil.scenario.checks.common import years_text
from probsoil.scenario.distributions import Constant
from probsoil.scenario.further_loads import FurtherEmbankment
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
    slips = []
    if isinstance(scenario.load, EmbankmentLoad):
        slips += [slip.below(("load",)) for slip in _of_one(scenario.load, scenario, None)]
    for position, load in enumerate(scenario.further_loads):
        if isinstance(load, FurtherEmbankment):
            found = _of_one(load, scenario, load.name)
            slips += [slip.below(("further_loads", position)) for slip in found]
    return slips


def _of_one(load: Any, scenario: Any, name: Any) -> list[Slip]:
    own = [stage for stage in scenario.stages if getattr(stage, "load", None) == name]
    return _berm_slips(load, own) + _traffic_slips(load, scenario.horizon)


def _berm_slips(load: Any, own: Sequence[Any]) -> list[Slip]:
    given = {key: getattr(load, key) for key in ("berm_width", "berm_height")}
    missing = [key for key, value in given.items() if value is None]
    if len(missing) == 1:
        message = f"a berm needs both its width and its height; {missing[0]} is missing"
        return [Slip(path=(), message=message, allowed="berm_width and berm_height", wanting=(missing[0],))]
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
