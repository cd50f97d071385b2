"""Checks of stages that dig soil out."""

from itertools import accumulate
from typing import Any

from probsoil.scenario.amounts import known
from probsoil.scenario.limits import SlipSafetyLimit
from probsoil.scenario.loads import FOUNDATIONS, EmbankmentLoad, Stage
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
    slips = [slip for place, one in digging for slip in _misplaced(place, one)]
    if slips or not digging or not all(isinstance(one, Stage) for _, one in stages):
        return slips
    own = [(place, one) for place, one in stages if one.load is None]
    dug = sum(one.excavate for _, one in digging)
    return _order(own) or _depth(dug, digging[-1][0], scenario) or _no_slip(scenario)


def _misplaced(place: int, stage: Any) -> list[Slip]:
    if stage.load is None:
        return []
    message = "soil is dug out for [load] only, not for a further load"
    return [
        Slip(path=("stages", place, "excavate"), message=message, allowed="height or pressure", at_key=True)
    ]


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


def _depth(total: float, last: int, scenario: Any) -> list[Slip]:
    """Refuse a pit that does not end at the base of a foundation, or at which nothing is left to load."""
    path = ("stages", last, "excavate")
    if isinstance(scenario.load, FOUNDATIONS):
        base = known(scenario.load.depth)
        if base is None or abs(total - base) < _ROUNDING:
            return []
        message = f"{total:.4g} m are dug out in all, but the base lies {base:.4g} m below ground level"
        return [Slip(path=path, message=message, allowed=f"{base:.4g} m in all, as depth in [load]")]
    depths = [known(getattr(layer, "thickness", None)) for layer in scenario.layers]
    bottom = sum(depth for depth in depths if depth is not None)
    if None not in depths and total >= bottom - _ROUNDING:
        message = f"{total:.4g} m are dug out in all, and the ground described ends at {bottom:.4g} m"
        return [Slip(path=path, message=message, allowed=f"less than {bottom:.4g} m in all")]
    return _too_low(total, scenario) if isinstance(scenario.load, EmbankmentLoad) else []


def _too_low(dug: float, scenario: Any) -> list[Slip]:
    """Refuse an embankment that nowhere stands above ground level, or not above its berms."""
    heights = [known(stage.height) or 0.0 for stage in scenario.stages if stage.load is None]
    greatest = max(accumulate(heights))
    above = getattr(scenario.load, "berm_height", None)
    above = above if isinstance(above, float) else 0.0
    if greatest - dug > above + _ROUNDING:
        return []
    over = "ground level" if above == 0.0 else f"the berms, {above:.4g} m high"
    message = (
        f"{greatest:.4g} m of fill in {dug:.4g} m of ground dug out do not rise above {over}: heights "
        "are those of all that is placed on the bottom"
    )
    return [Slip(path=("stages",), message=message, allowed=f"more than {dug + above:.4g} m of fill")]


def _no_slip(scenario: Any) -> list[Slip]:
    """Refuse a limit on slip: the surface would run through ground that is not what the layers say."""
    if not isinstance(scenario.load, EmbankmentLoad):
        return []
    message = "a slip through ground that is dug out and replaced is not computed in this version"
    return [
        Slip(
            path=("limits", position, "quantity"),
            message=message,
            allowed="no limit on slip_safety with a stage that excavates",
            hint="for the slip, describe the fill in the pit as a granular layer in place of the soil, in a "
            "scenario without excavation",
        )
        for position, limit in enumerate(scenario.limits)
        if isinstance(limit, SlipSafetyLimit)
    ]
