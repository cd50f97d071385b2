"""Checks of the stations, of what they need from the ground and of the limits that name them."""

import math
from collections.abc import Iterator, Sequence
from typing import Any

from pydantic import BaseModel

from probsoil.scenario.base import RESERVED_NAMES, UNREAD
from probsoil.scenario.checks.common import exactly_one
from probsoil.scenario.distributions import Lognormal, Normal
from probsoil.scenario.limits import AngularDistortionLimit, DifferentialSettlementLimit, SettlementLimit
from probsoil.scenario.loads import FOUNDATIONS
from probsoil.scenario.quantities import quantities_of
from probsoil.scenario.slips import Path, Slip, did_you_mean
from probsoil.scenario.stations import (
    ANY,
    GREATEST_COUNT,
    LEAST_APART,
    NEIGHBOURS,
    Station,
    StationLine,
    along_line,
)

_WHOLE = 1e-6  # of a spacing; the ends of a line are given to the millimetre at best
_AT_CENTRE = (0.0, (0.0, 0.0))


def station_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the stations and what they need.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    slips = _line_slips(scenario.station_line)
    known, whole = _known_stations(scenario, sound_line=not slips)
    slips += [*_name_slips(known), *_place_slips(known), *_thickness_slips(scenario)]
    if len(known) > GREATEST_COUNT:
        message = f"there are {len(known)} stations"
        slips.append(Slip(path=known[-1][0], message=message, allowed=f"at most {GREATEST_COUNT}"))
    if known:
        slips += _point_slips(scenario.load)
    if len(known) > 1:
        slips += [*_scale_slips(scenario), *_correlation_slips(scenario)]
    if slips or not whole:
        return slips
    return _limit_slips(scenario, [station for _, station in known])


def _line_slips(line: Any) -> list[Slip]:
    if not isinstance(line, StationLine):
        return []
    found = exactly_one(line, {"number": "number", "spacing": "spacing"}, "how many stations the line has")
    if isinstance(line.from_, float) and isinstance(line.to, float):
        if line.to - line.from_ < LEAST_APART:
            message = f"the line ends at {line.to:g} m and begins at {line.from_:g} m"
            found.append(Slip(path=("to",), message=message, allowed="above from"))
        elif isinstance(line.spacing, float) and not found and not _goes_in(line.count):
            message = f"a spacing of {line.spacing:g} m does not go into {line.to - line.from_:g} m"
            fitting = (line.to - line.from_) / max(round(line.count - 1.0), 1)
            found.append(
                Slip(
                    path=("spacing",),
                    message=message,
                    allowed=f"a whole number of times, at most {GREATEST_COUNT} stations",
                    hint=f"{fitting:.4g} m would fit",
                )
            )
    return [slip.below(("station_line",)) for slip in found]


def _goes_in(count: float) -> bool:
    return abs(count - round(count)) <= _WHOLE and 2 <= round(count) <= GREATEST_COUNT


def _known_stations(scenario: Any, *, sound_line: bool) -> tuple[list[tuple[Path, Station]], bool]:
    """Return the stations that could be read, each with its place in the file, and whether that is all."""
    found: list[tuple[Path, Station]] = [
        (("stations", position), station)
        for position, station in enumerate(scenario.stations)
        if isinstance(station, Station) and _read_in_full(station)
    ]
    line, whole = scenario.station_line, len(found) == len(scenario.stations)
    if line is None:
        return found, whole
    if not isinstance(line, StationLine) or not _read_in_full(line) or not sound_line:
        return found, False
    return found + [(("station_line",), one) for one in line.stations()], whole


def _read_in_full(table: BaseModel) -> bool:
    return all(getattr(table, attribute) is not UNREAD for attribute in type(table).model_fields)


def _name_slips(known: Sequence[tuple[Path, Station]]) -> Iterator[Slip]:
    names: set[str] = set()
    for path, station in known:
        at = (*path, "name") if path[0] == "stations" else path
        if station.name in (ANY, NEIGHBOURS):
            allowed = f'any name but "{ANY}" and "{NEIGHBOURS}", by which limits mean several stations'
            yield Slip(path=at, message=f'a station is named "{station.name}"', allowed=allowed)
        elif station.name in names:
            message = f'a station before it is already named "{station.name}"'
            yield Slip(path=at, message=message, allowed="a different name for every station")
        names.add(station.name)


def _place_slips(known: Sequence[tuple[Path, Station]]) -> Iterator[Slip]:
    for place, (path, station) in enumerate(known):
        for _, other in known[:place]:
            if math.dist((station.x, station.y), (other.x, other.y)) < LEAST_APART:
                message = f'station "{station.name}" stands where "{other.name}" does'
                yield Slip(path=path, message=message, allowed=f"at least {LEAST_APART:g} m from any other")
                break


def _thickness_slips(scenario: Any) -> Iterator[Slip]:
    names = [layer.name for layer in scenario.layers if isinstance(getattr(layer, "name", None), str)]
    if len(names) < len(scenario.layers):
        return
    for position, station in enumerate(scenario.stations):
        given: Any = getattr(station, "thickness", UNREAD)
        for name in () if given is UNREAD else dict(given):
            if name not in names:
                yield Slip(
                    path=("stations", position, "thickness", name),
                    at_key=True,
                    message=f'no layer is named "{name}"',
                    allowed=", ".join(names),
                    hint=did_you_mean(name, names),
                )


def _point_slips(load: Any) -> list[Slip]:
    at: Any = getattr(load, "at", UNREAD)
    if not isinstance(load, FOUNDATIONS) or at is UNREAD or at in _AT_CENTRE:
        return []
    message = "where settlement is reported is said by the stations"
    return [Slip(path=("load", "at"), message=message, allowed="a station there instead", at_key=True)]


def _scale_slips(scenario: Any) -> Iterator[Slip]:
    for position, layer in enumerate(scenario.layers):
        if not isinstance(layer, BaseModel):
            continue
        for path, law in _laws(layer, ("layers", position)):
            if law.inherent_cov > 0.0 and law.horizontal_scale is None:
                yield Slip(
                    path=(*path, "inherent_cov"),
                    message="with several stations what varies from point to point needs horizontal_scale, "
                    "over which it varies in plan",
                    allowed="horizontal_scale in m",
                    hint="tens of metres are common; a small one makes stations differ more",
                    at_key=True,
                )


def _laws(table: BaseModel, path: Path) -> Iterator[tuple[Path, Normal | Lognormal]]:
    for attribute, info in type(table).model_fields.items():
        key, value = info.alias or attribute, getattr(table, attribute)
        if isinstance(value, BaseModel):
            yield from _laws(value, (*path, key))
        elif isinstance(value, Normal | Lognormal):
            yield (*path, key), value


def _correlation_slips(scenario: Any) -> list[Slip]:
    """Refuse correlations that what varies between stations does not allow."""
    pairs = {
        entry.between: (position, entry.rank_correlation)
        for position, entry in enumerate(scenario.dependence)
        if entry is not UNREAD and UNREAD not in (entry.between, entry.rank_correlation)
    }
    if not pairs:
        return []
    from probsoil.scenario.correlation import impossible_parts  # deferred: needs numpy
    from probsoil.scenario.spatial_averaging import local_share

    known = {one.address: one for one in quantities_of(scenario) if one.is_uncertain}
    shares = {name: local_share(one.distribution, one.averaging_length) for name, one in known.items()}
    slips = []
    for pair, (position, _) in pairs.items():
        scales = [
            getattr(known[name].distribution, "horizontal_scale", None) for name in pair if name in known
        ]
        if len(scales) == 2 and None not in scales and scales[0] != scales[1]:
            message = (
                f"{pair[0]} and {pair[1]} vary in plan over {scales[0]:g} m and {scales[1]:g} m, and what "
                "varies over different distances cannot stay correlated"
            )
            allowed = "the same horizontal_scale for both"
            slips.append(Slip(path=("dependence", position, "between"), message=message, allowed=allowed))
    if slips:
        return slips
    ranks = {pair: rank for pair, (_, rank) in pairs.items()}
    tables = tuple(f"{name}." for name in RESERVED_NAMES)
    rigid = [name for name in known if name.startswith(tables)]
    for impossible in impossible_parts(ranks, shares, rigid):
        given = "; ".join(f"{a} with {b}: {ranks[a, b]:g}" for a, b in impossible)
        most = "; ".join(f"{a} with {b}: {rank:.3f}" for (a, b), rank in impossible.items())
        slips.append(
            Slip(
                path=("dependence", pairs[next(iter(impossible))][0], "rank_correlation"),
                message=f"these rank correlations cannot hold at every station: {given}; what varies from "
                "place to place is not the same share of each number's variance",
                allowed=f"by size, each pair on its own, at most {most}",
                hint="give both numbers inherent_cov in like proportion to cov, or less correlation",
            )
        )
    return slips


def _limit_slips(scenario: Any, stations: Sequence[Station]) -> list[Slip]:
    names = [station.name for station in stations]
    places = [(station.x, station.y) for station in stations]
    slips: list[Slip] = []
    for position, limit in enumerate(scenario.limits):
        found: list[Slip] = []
        if isinstance(limit, SettlementLimit) and isinstance(limit.station, str) and limit.station != ANY:
            found = _unknown(limit.station, names, ("station",))
        elif isinstance(limit, DifferentialSettlementLimit | AngularDistortionLimit):
            found = _compared(limit, names, places)
        slips += [slip.below(("limits", position)) for slip in found]
    return slips


def _unknown(name: str, names: Sequence[str], path: Path) -> list[Slip]:
    if name in names:
        return []
    if not names:
        allowed = "[[stations]] or [station_line]"
        return [Slip(path=path, message=f'there is no station "{name}"; none is given', allowed=allowed)]
    return [
        Slip(
            path=path,
            message=f'there is no station "{name}"',
            allowed=", ".join(names),
            hint=did_you_mean(name, list(names)),
        )
    ]


def _compared(limit: Any, names: Sequence[str], places: Sequence[tuple[float, float]]) -> list[Slip]:
    if len(names) < 2:
        message = f"{limit.quantity.replace('_', ' ')} needs two stations; {len(names) or 'none'} given"
        return [Slip(path=("quantity",), message=message, allowed="[[stations]] or [station_line]")]
    if limit.stations is UNREAD:
        return []
    order = along_line(places)
    if limit.stations == NEIGHBOURS and order is None:
        message = "neighbours are those next to each other on a line; the stations are not on one line"
        return [Slip(path=("stations",), message=message, allowed=f'two names, or "{ANY}"')]
    if getattr(limit, "tilt", "kept") == "removed" and (order is None or len(names) < 3):
        message = "the tilt is the slope from end to end of a line of stations"
        return [Slip(path=("tilt",), message=message, allowed="at least three stations on one line")]
    if isinstance(limit.stations, str):
        return []
    first, second = limit.stations
    if first == second:
        message = f'station "{first}" is compared with itself'
        return [Slip(path=("stations", 1), message=message, allowed="two different stations")]
    return [
        slip
        for place, name in enumerate(limit.stations)
        for slip in _unknown(name, names, ("stations", place))
    ]
