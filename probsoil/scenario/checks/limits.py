"""Checks of the limits against the horizon and the load."""

from typing import Any

from probsoil.scenario.base import UNREAD
from probsoil.scenario.checks.common import exactly_one, repeated_names, years_text
from probsoil.scenario.further_loads import (
    FurtherArea,
    FurtherCircle,
    FurtherEmbankment,
    FurtherRectangle,
    FurtherStrip,
)
from probsoil.scenario.limits import (
    ON_SETTLEMENT,
    AddedFillLimit,
    BearingSafetyLimit,
    ConsolidationLimit,
    ConsolidationTimeLimit,
    SlipSafetyLimit,
)
from probsoil.scenario.loads import FOUNDATIONS, AreaLoad, EmbankmentLoad
from probsoil.scenario.slips import Slip

_AREAS = (AreaLoad, FurtherArea)
_FOUNDATIONS = (*FOUNDATIONS, FurtherStrip, FurtherRectangle, FurtherCircle)


def limit_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the limits.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    slips = list(repeated_names(scenario.limits, "limits", "limit"))
    for position, limit in enumerate(scenario.limits):
        found: list[Slip] = []
        if isinstance(limit, ON_SETTLEMENT):
            found += exactly_one(limit, {"at": "at", "between": "between"}, "the time of the settlement")
            found += _reversed(limit)
        found += _out_of_place(limit, _load_of(limit, scenario))
        found += _before_loading(limit, scenario.stages)
        found += _beyond_horizon(limit, scenario.horizon)
        slips += [slip.below(("limits", position)) for slip in found]
    return slips


def _load_of(limit: Any, scenario: Any) -> Any:
    """Return the load that a limit looks at; None where there is none of that name."""
    name = getattr(limit, "load", None)
    if name is None:
        return scenario.load
    return next((load for load in scenario.further_loads if getattr(load, "name", UNREAD) == name), None)


def _out_of_place(limit: Any, load: Any) -> list[Slip]:
    """Refuse a way of failing, or a volume of fill, that the load does not have."""
    if isinstance(limit, AddedFillLimit):
        return _no_added_fill(load)
    if isinstance(limit, SlipSafetyLimit) and isinstance(load, _AREAS):
        message, shapes = "a slip needs the edge of an embankment; an area load has none", '"embankment"'
    elif isinstance(limit, SlipSafetyLimit) and isinstance(load, _FOUNDATIONS):
        message = "slip circles are for an embankment; a foundation fails in bearing"
        return [Slip(path=("quantity",), message=message, allowed='quantity = "bearing_safety"')]
    elif isinstance(limit, BearingSafetyLimit) and isinstance(
        load, (*_AREAS, EmbankmentLoad, FurtherEmbankment)
    ):
        message = f"bearing failure is for a foundation; the load is of shape {load.shape}"
        shapes = '"strip", "rectangle" or "circle"'
    else:
        return []
    return [Slip(path=("quantity",), message=message, allowed=f"[load] with shape = {shapes}")]


def _no_added_fill(load: Any) -> list[Slip]:
    message, allowed, hint = "", '[load] with shape = "embankment" and hold_level_until', None
    if isinstance(load, AreaLoad):
        message = "the volume of fill added is that per metre run of an embankment"
        hint = "over a wide area what is added is as thick as the settlement: limit that at hold_level_until"
    elif isinstance(load, FOUNDATIONS):
        message = "no fill is added to hold the level of a foundation"
    elif isinstance(load, EmbankmentLoad) and load.hold_level_until is None:
        message, allowed = "no fill is added: the level is not held", "hold_level_until in [load]"
    return [Slip(path=("quantity",), message=message, allowed=allowed, hint=hint)] if message else []


def _reversed(limit: Any) -> list[Slip]:
    if not isinstance(limit.between, tuple) or limit.between[0] < limit.between[1]:
        return []
    first, second = limit.between
    if first == second:
        message = f"the two times are equal, {years_text(first)}, and nothing settles between them"
        return [Slip(path=("between",), message=message, allowed="two times, the earlier first")]
    message = f"the times are not in order: {first:.4g} and {second:.4g} years"
    return [Slip(path=("between",), message=message, allowed="the earlier time first, then the later")]


def _before_loading(limit: Any, stages: Any) -> list[Slip]:
    """Refuse a degree of consolidation at a time when there is nothing yet to consolidate under."""
    start = getattr(stages[0], "start", UNREAD) if stages else UNREAD
    if not isinstance(limit, ConsolidationLimit) or not isinstance(start, float):
        return []
    if not isinstance(limit.at, float) or limit.at > start:
        return []
    message = f"nothing is loaded before {years_text(start)}, so nothing can have consolidated by then"
    return [Slip(path=("at",), message=message, allowed="later than the start of the first stage")]


def _beyond_horizon(limit: Any, horizon: Any) -> list[Slip]:
    if horizon is UNREAD or limit is UNREAD:
        return []
    times: list[tuple[tuple[str | int, ...], object]] = [(("at",), getattr(limit, "at", None))]
    between = getattr(limit, "between", None)
    if isinstance(between, tuple):
        times += [(("between", place), time) for place, time in enumerate(between)]
    if isinstance(limit, ConsolidationTimeLimit):
        times.append((("not_more_than",), limit.not_more_than))
    return [
        Slip(
            path=path,
            message=f"{years_text(time)} is beyond the horizon",
            allowed=f"0 to {years_text(horizon, digits=6)}",
            hint="raise horizon, or take an earlier time",
        )
        for path, time in times
        if isinstance(time, float) and time > horizon
    ]
