"""Checks of stages that dig soil out."""

from typing import Any

from probsoil.scenario.amounts import known
from probsoil.scenario.loads import FOUNDATIONS, Stage
from probsoil.scenario.slips import Slip

_ROUNDING = 1e-9  # m; sums of depths carry rounding


def excavation_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with stages that dig soil out.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    stages = list(enumerate(scenario.stages))
    digging = [(place, one) for place, one in stages if isinstance(getattr(one, "excavate", None), float)]
    slips = [slip for place, one in digging for slip in _misplaced(place, one, scenario.load)]
    if slips or not digging or not all(isinstance(one, Stage) for _, one in stages):
        return slips
    own = [(place, one) for place, one in stages if one.load is None]
    return _order(own) or _depth([one for _, one in digging], digging[-1][0], scenario.load)


def _misplaced(place: int, stage: Any, load: Any) -> list[Slip]:
    path = ("stages", place, "excavate")
    if stage.load is not None:
        message = "soil is dug out for [load] only, not for a further load"
        return [Slip(path=path, message=message, allowed="height or pressure", at_key=True)]
    if not isinstance(load, FOUNDATIONS):
        message = "soil is dug out for a foundation with a depth"
        allowed = '[load] with shape = "strip", "rectangle" or "circle"'
        return [Slip(path=path, message=message, allowed=allowed, at_key=True)]
    return []


def _order(own: list[tuple[int, Any]]) -> list[Slip]:
    """Refuse digging under what already stands, and a hole in which nothing is placed."""
    placed = [place for place, one in own if one.excavate is None]
    late = [place for place, one in own if one.excavate is not None and placed and place > placed[0]]
    if late:
        message = f'soil is dug out after stage {placed[0] + 1} "{dict(own)[placed[0]].name}" has loaded it'
        allowed = "stages that dig before all others of [load]"
        return [Slip(path=("stages", late[0], "excavate"), message=message, allowed=allowed)]
    if not placed:
        message = "nothing is placed in the excavation"
        return [Slip(path=("stages",), message=message, allowed="a stage with height or pressure after it")]
    return []


def _depth(digging: list[Any], last: int, load: Any) -> list[Slip]:
    total, base = sum(stage.excavate for stage in digging), known(load.depth)
    if base is None or abs(total - base) < _ROUNDING:
        return []
    message = f"{total:.4g} m are dug out in all, but the base lies {base:.4g} m below ground level"
    allowed = f"{base:.4g} m in all, as depth in [load]"
    return [Slip(path=("stages", last, "excavate"), message=message, allowed=allowed)]
