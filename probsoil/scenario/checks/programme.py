"""Checks of the load and its stages."""

from collections.abc import Sequence
from typing import Any

from probsoil.scenario.amounts import known, varies
from probsoil.scenario.base import UNREAD
from probsoil.scenario.checks.common import exactly_one, repeated_names, reserved_names, years_text
from probsoil.scenario.distributions import BOUNDED, Constant, Distribution
from probsoil.scenario.fields import GREATEST_SHARE_OUTSIDE
from probsoil.scenario.further_loads import (
    FurtherArea,
    FurtherCircle,
    FurtherEmbankment,
    FurtherRectangle,
    FurtherStrip,
)
from probsoil.scenario.loads import FOUNDATIONS, AreaLoad, EmbankmentLoad, Stage
from probsoil.scenario.slips import Slip

PRESSED = (AreaLoad, *FOUNDATIONS, FurtherArea, FurtherStrip, FurtherRectangle, FurtherCircle)
"""Loads whose stages may give a pressure."""
_EMBANKMENTS = (EmbankmentLoad, FurtherEmbankment)

# Heights are given to the millimetre at best; sums of them carry rounding.
_ROUNDING = 1e-9
_BEYOND = 1e6  # m or kPa; more than any range allows


def programme_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the stages seen together and with the load.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    stages = scenario.stages
    slips = [*repeated_names(stages, "stages", "stage"), *reserved_names(stages, "stages")]
    for position, stage in enumerate(stages):
        if isinstance(stage, Stage):
            load = load_of(stage, scenario)
            found = _time_slips(stage, scenario.horizon)
            found += [] if load is None else _amount_slips(stage, load)
            slips += [slip.below(("stages", position)) for slip in found]
    slips += _order_slips(stages)
    for name, load in [(None, scenario.load), *_named(scenario.further_loads)]:
        own = [(place, one) for place, one in enumerate(stages) if getattr(one, "load", None) == name]
        slips += _overlap_slips(own) + _removal_slips(own, "height", "m")
        if isinstance(load, PRESSED):
            slips += _removal_slips(own, "pressure", "kPa")
    return slips


def load_of(stage: Any, scenario: Any) -> Any:
    """Return the load that a stage belongs to.

    Parameters
    ----------
    stage : Stage
        Its key `load`.
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    load : Table or None
        None where there is none of that name.
    """
    return scenario.load if stage.load is None else dict(_named(scenario.further_loads)).get(stage.load)


def _named(loads: Sequence[Any]) -> list[tuple[str, Any]]:
    return [(one.name, one) for one in loads if isinstance(getattr(one, "name", None), str)]


def _amount_slips(stage: Any, load: Any) -> list[Slip]:
    if getattr(stage, "excavate", None) is not None and stage.load is not None:
        return []  # refused where excavation is looked at
    slips = []
    if isinstance(load, _EMBANKMENTS) and stage.pressure is not None:
        message = "an embankment is raised by a height of fill, not by a pressure"
        slips.append(Slip(path=("pressure",), message=message, allowed="height", at_key=True))
    elif isinstance(load, _EMBANKMENTS) and stage.height is None and stage.excavate is None:
        slips.append(
            Slip(path=(), message="height is missing", allowed="height of fill", wanting=("height",))
        )
    else:
        keys = {"height": "height", "pressure": "pressure"}
        keys |= {"excavate": "excavate"} if stage.load is None else {}
        slips += exactly_one(stage, keys, "what the stage adds")
    needs = isinstance(load, (*PRESSED, FurtherEmbankment)) and load.fill_unit_weight is None
    if needs and stage.height is not None:
        where = "[load]" if stage.load is None else f'the load "{stage.load}"'
        instead = "" if isinstance(load, _EMBANKMENTS) else ", or pressure here"
        message = "a height of fill needs the unit weight of the fill"
        slips.append(Slip(path=("height",), message=message, allowed=f"fill_unit_weight in {where}{instead}"))
    for key in ("height", "pressure"):
        if getattr(stage, key) == Constant(value=0.0):
            slips.append(Slip(path=(key,), message="the stage changes nothing", allowed="above or below 0"))
        elif isinstance(amount := getattr(stage, key), Distribution) and varies(amount):
            slips += [slip.below((key,)) for slip in _sign_slips(amount)]
    return slips


def _sign_slips(amount: Distribution) -> list[Slip]:
    """Refuse an amount of which it is not clear whether the stage adds it or takes it off."""
    adds = amount.expectation > 0.0
    share = amount.probability_outside(*((0.0, _BEYOND) if adds else (-_BEYOND, 0.0)))
    if share <= (0.0 if isinstance(amount, BOUNDED) else GREATEST_SHARE_OUTSIDE):
        return []
    what, side = ("adds", "above") if adds else ("removes", "below")
    message = f"on average the stage {what}, but with a chance of {100.0 * share:.2g} % it does not"
    most = f"{100.0 * GREATEST_SHARE_OUTSIDE:g} %"
    allowed = f"a distribution {side} 0; where it has no bounds at most {most} beyond, which is cut"
    return [Slip(path=(), message=message, allowed=allowed)]


def _time_slips(stage: Any, horizon: Any) -> list[Slip]:
    slips = []
    if stage.start is not UNREAD and stage.end is not UNREAD and stage.end <= stage.start:
        message = (
            f"the stage ends at {years_text(stage.end)}, not after its start at {years_text(stage.start)}"
        )
        slips.append(Slip(path=("end",), message=message, allowed="later than start"))
    if horizon is not UNREAD and stage.end is not UNREAD and stage.end > horizon:
        message = f"the stage ends at {years_text(stage.end)}, beyond the horizon"
        slips.append(
            Slip(
                path=("end",),
                message=message,
                allowed=f"at most {years_text(horizon, digits=6)}",
                hint="raise horizon",
            )
        )
    return slips


def _order_slips(stages: Sequence[Any]) -> list[Slip]:
    """Refuse a stage that starts before the one above it."""
    slips = []
    latest: tuple[int, float] | None = None
    for position, stage in enumerate(stages):
        start = getattr(stage, "start", UNREAD)
        if start is UNREAD:
            continue
        if latest is not None and start < latest[1] - _ROUNDING and stages[latest[0]].load != stage.load:
            above = f'stage {latest[0] + 1} "{stages[latest[0]].name}"'
            message = f"the stage starts at {years_text(start)}, before {above} at {years_text(latest[1])}"
            allowed = "stages in the order in which they start"
            slips.append(Slip(path=("stages", position, "start"), message=message, allowed=allowed))
        latest = (position, start)
    return slips


def _overlap_slips(stages: Sequence[tuple[int, Any]]) -> list[Slip]:
    """Refuse a stage that starts before another of the same load has ended."""
    slips = []
    latest: tuple[int, str, float] | None = None
    for position, stage in stages:
        start, end = getattr(stage, "start", UNREAD), getattr(stage, "end", UNREAD)
        if latest is not None and start is not UNREAD and start < latest[2] - _ROUNDING:
            message = (
                f"the stage starts at {years_text(start)}, before stage {latest[0] + 1} "
                f'"{latest[1]}" ends at {years_text(latest[2])}'
            )
            allowed = "stages in order of time, none starting before the one above it ends"
            slips.append(Slip(path=("stages", position, "start"), message=message, allowed=allowed))
        if end is not UNREAD:
            latest = (position, stage.name, end)
    return slips


def _removal_slips(stages: Sequence[tuple[int, Any]], key: str, unit: str) -> list[Slip]:
    placed = 0.0
    for position, stage in stages:
        given = getattr(stage, key, UNREAD)
        if given is UNREAD:
            return []
        if (change := known(given)) is None:
            continue
        if placed + change < -_ROUNDING:
            message = f"{-change:.4g} {unit} is removed but only {placed:.4g} {unit} is there"
            return [
                Slip(
                    path=("stages", position, key),
                    message=message,
                    allowed=f"at least {-placed or 0.0:.4g} {unit}",
                )
            ]
        placed += change
    return []
