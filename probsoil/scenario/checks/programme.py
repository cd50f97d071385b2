"""Checks of the load and its stages."""

from collections.abc import Sequence
from typing import Any

from probsoil.scenario.base import UNREAD
from probsoil.scenario.checks.common import exactly_one, repeated_names, reserved_names, years_text
from probsoil.scenario.loads import FOUNDATIONS, AreaLoad, EmbankmentLoad, Stage
from probsoil.scenario.slips import Slip

_PRESSED = (AreaLoad, *FOUNDATIONS)  # loads whose stages may give a pressure

# Heights are given to the millimetre at best; sums of them carry rounding.
_ROUNDING = 1e-9


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
            found = _amount_slips(stage, scenario.load) + _time_slips(stage, scenario.horizon)
            slips += [slip.below(("stages", position)) for slip in found]
    slips += _order_slips(stages) + _removal_slips(stages, "height", "m")
    if isinstance(scenario.load, _PRESSED):
        slips += _removal_slips(stages, "pressure", "kPa")
    return slips


def _amount_slips(stage: Any, load: Any) -> list[Slip]:
    slips = []
    if isinstance(load, EmbankmentLoad) and stage.pressure is not None:
        message = "an embankment is raised by a height of fill, not by a pressure"
        slips.append(Slip(path=("pressure",), message=message, allowed="height", at_key=True))
    elif isinstance(load, EmbankmentLoad) and stage.height is None:
        slips.append(
            Slip(path=(), message="height is missing", allowed="height of fill", wanting=("height",))
        )
    else:
        slips += exactly_one(stage, {"height": "height", "pressure": "pressure"}, "what the stage adds")
    if isinstance(load, _PRESSED) and stage.height is not None and load.fill_unit_weight is None:
        message = "a height of fill needs the unit weight of the fill"
        slips.append(
            Slip(path=("height",), message=message, allowed="fill_unit_weight in [load], or pressure here")
        )
    for key in ("height", "pressure"):
        if getattr(stage, key) == 0.0:
            slips.append(Slip(path=(key,), message="the stage changes nothing", allowed="above or below 0"))
    return slips


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
    slips = []
    latest: tuple[int, float] | None = None
    for position, stage in enumerate(stages):
        start, end = getattr(stage, "start", UNREAD), getattr(stage, "end", UNREAD)
        if latest is not None and start is not UNREAD and start < latest[1] - _ROUNDING:
            message = (
                f"the stage starts at {years_text(start)}, before stage {latest[0] + 1} "
                f'"{stages[latest[0]].name}" ends at {years_text(latest[1])}'
            )
            slips.append(
                Slip(
                    path=("stages", position, "start"),
                    message=message,
                    allowed="stages in order of time, none starting before the one above it ends",
                )
            )
        if end is not UNREAD:
            latest = (position, end)
    return slips


def _removal_slips(stages: Sequence[Any], key: str, unit: str) -> list[Slip]:
    placed = 0.0
    for position, stage in enumerate(stages):
        change = getattr(stage, key, UNREAD)
        if change is UNREAD:
            return []
        if change is None:
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
