"""Checks of what is not computed together."""

from typing import Any

from probsoil.scenario.base import UNREAD
from probsoil.scenario.layers import ClayLayer, GranularLayer
from probsoil.scenario.loads import EmbankmentLoad, Stage
from probsoil.scenario.slips import Path, Slip
from probsoil.scenario.stations import Station, StationLine


def combination_slips(scenario: Any) -> list[Slip]:
    """Return keys that are given together but are not computed together.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    return [
        *_distortion_slips(scenario),
        *_pit_slips(scenario),
        *_level_slips(scenario),
        *_other_load_slips(scenario),
    ]


def _distortion_slips(scenario: Any) -> list[Slip]:
    """Refuse them with undrained distortion, which is that of the load as its own stages place it."""
    paths = [
        ("layers", position, "undrained_modulus")
        for position, layer in enumerate(scenario.layers)
        if isinstance(layer, ClayLayer) and _given(layer.undrained_modulus)
    ]
    others = {
        "further_loads": bool(scenario.further_loads),
        "hold_level_until": isinstance(getattr(scenario.load, "hold_level_until", None), float),
        "a stage that excavates": bool(_pits(scenario)),
    }
    return [
        _together(path, "undrained distortion", other)
        for path in paths
        for other, given in others.items()
        if given
    ]


def _pit_slips(scenario: Any) -> list[Slip]:
    """Refuse them with a pit: the water in it and below it is taken to be at rest."""
    if not _pits(scenario):
        return []
    paths: list[Path] = []
    if _given(getattr(scenario.site, "base_head", None)):
        paths.append(("site", "base_head"))
    for position, layer in enumerate(scenario.layers):
        if isinstance(layer, GranularLayer) and _given(layer.head):
            paths.append(("layers", position, "head"))
        if isinstance(layer, ClayLayer) and _given(layer.initial_excess):
            paths.append(("layers", position, "initial_excess"))
    return [_together(path, "pore pressure that is not at rest", "a stage that excavates") for path in paths]


def _level_slips(scenario: Any) -> list[Slip]:
    """Refuse stations where the fill added, which follows the centreline, is not known."""
    load = scenario.load
    if not isinstance(load, EmbankmentLoad) or not isinstance(load.hold_level_until, float):
        return []
    found = [
        _together(("stations", position, "x"), "a station off the centreline", "hold_level_until")
        for position, station in enumerate(scenario.stations)
        if isinstance(station, Station) and station.x not in (0.0, UNREAD)
    ]
    line = scenario.station_line
    if isinstance(line, StationLine) and line.x not in (0.0, UNREAD):
        found.append(_together(("station_line", "x"), "a station off the centreline", "hold_level_until"))
    return found


def _other_load_slips(scenario: Any) -> list[Slip]:
    """Refuse limits on a further load beside what is known of [load] alone, and at two places at once."""
    named = [
        (place, limit)
        for place, limit in enumerate(scenario.limits)
        if isinstance(getattr(limit, "load", None), str)
    ]
    others = {
        "hold_level_until": isinstance(getattr(scenario.load, "hold_level_until", None), float),
        "a stage that excavates": bool(_pits(scenario)),
    }
    found = [
        _together(("limits", place, "load"), "a limit on a further load", other)
        for place, _ in named
        for other, given in others.items()
        if given
    ]
    if _given(scenario.evidence) and scenario.evidence and _few_stations(scenario):
        found += [
            Slip(
                path=("limits", place, "load"),
                message="with tests the ground below a further load must be told from that below [load]",
                allowed="stations, such as one at the centre of either load",
                hint="tests then count at each by the distance and horizontal_scale",
            )
            for place, _ in named
        ]
    return found + [
        Slip(
            path=("limits", place, "station"),
            at_key=True,
            message="a limit looks at a further load or at a station, not at both",
            allowed="one of the two",
            hint="a station may stand anywhere, also under a further load",
        )
        for place, limit in named
        if getattr(limit, "station", None) is not None
    ]


def _few_stations(scenario: Any) -> bool:
    """Whether there is at most one station, so that one average stands for the whole site."""
    return scenario.station_line is None and len(scenario.stations) < 2


def _pits(scenario: Any) -> list[Stage]:
    return [
        stage for stage in scenario.stages if isinstance(stage, Stage) and isinstance(stage.excavate, float)
    ]


def _given(value: object) -> bool:
    return value is not None and value is not UNREAD


def _together(path: Path, what: str, other: str) -> Slip:
    return Slip(
        path=path,
        at_key=True,
        message=f"{what} and {other} are not computed together in this version",
        allowed="one of the two",
        hint="leave one out, and allow for it in model_error.settlement",
    )
