"""What results.json says of stations: their settlement, the differences, and where limits look."""

from collections import Counter

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.description import Row, numbers, quantiles
from probsoil.assessment.evaluation import Study
from probsoil.ground.station_layout import StationLayout, station_layout
from probsoil.ground.station_quantities import compared
from probsoil.ground.stations import station_times
from probsoil.scenario import Scenario
from probsoil.scenario.limits import (
    ON_SETTLEMENT,
    AngularDistortionLimit,
    DifferentialSettlementLimit,
    Limit,
    OnSettlement,
)
from probsoil.scenario.stations import ANY, NEIGHBOURS

_LISTED = 5  # stations or pairs that decide a limit, by how often they do
_WORDS = {
    ANY: "between the two stations for which it is greatest",
    NEIGHBOURS: "between the two neighbouring stations for which it is greatest",
}


def station_record(study: Study, station: FloatArray) -> Row:
    """Return the settlement of every station and the differences between them.

    Parameters
    ----------
    study : Study
        Scenario and stations.
    station : ndarray, shape (n_band, n_station, n_when), [m]
        Settlement of the first realisations, model error included.

    Returns
    -------
    record : dict
        Ready for JSON: ``station_times``, ``stations`` and ``pairs``, empty without stations.
    """
    if not study.stations:
        return {"station_times": [], "stations": [], "pairs": []}
    layout = station_layout(study.scenario.all_stations)
    settled = station.astype(np.float64)
    return {
        "station_times": station_times(study.scenario).tolist(),
        "stations": _station_rows(study.scenario, layout, settled),
        "pairs": _pair_rows(layout, settled),
    }


def _station_rows(scenario: Scenario, layout: StationLayout, settled: FloatArray) -> list[Row]:
    order = layout.order
    return [
        {
            "name": station.name,
            "x": station.x,
            "y": station.y,
            "along": None if order is None else layout.distance(order[0], place),
            "thickness": dict(station.thickness),
        }
        | _summary(settled[:, place])
        for place, station in enumerate(scenario.all_stations)
    ]


def _pair_rows(layout: StationLayout, settled: FloatArray) -> list[Row]:
    """Return the differences between the pairs of stations that a reader is shown."""
    rows: list[Row] = []
    for first, second in layout.shown_pairs:
        distance = layout.distance(first, second)
        difference = np.abs(settled[:, second] - settled[:, first])
        rows.append(
            {
                "stations": [layout.names[first], layout.names[second]],
                "distance": distance,
                "difference": _summary(difference),
                "distortion": _summary(difference / distance),
            }
        )
    return rows


def _summary(values: FloatArray) -> Row:
    return {"mean": numbers(values.mean(axis=0)), "quantiles": quantiles(values, worst=np.inf)}


def place_record(study: Study, limit: Limit, station: FloatArray) -> Row:
    """Return where a limit on settlement looks, and which stations decide it how often.

    Parameters
    ----------
    study : Study
        Scenario and stations.
    limit : limit
        One of the scenario's.
    station : ndarray, shape (n_band, n_station, n_when), [m]
        Settlement of the first realisations.

    Returns
    -------
    record : dict
        ``place``, ``place_text`` and ``decided_by``; nothing to say without stations, or of other limits,
        save in words which further load a limit looks at.
    """
    if not study.stations or not isinstance(limit, ON_SETTLEMENT) or getattr(limit, "load", None) is not None:
        return {"place": None, "place_text": place_text(study.scenario, limit), "decided_by": []}
    layout = station_layout(study.scenario.all_stations)
    place, words = limit_place(study.scenario, limit)
    several = isinstance(next(iter(place.values())), str) and place.get("station", ANY) == ANY
    decided = _decided_by(study.scenario, limit, layout, station) if several else []
    return {"place": place, "place_text": words, "decided_by": decided}


def place_text(scenario: Scenario, limit: Limit) -> str:
    """Return where a limit looks, in words.

    Parameters
    ----------
    scenario : Scenario
        As read.
    limit : limit
        One of its own.

    Returns
    -------
    words : str
        Such as ``at station pier`` or ``of tank B``; empty where there is only one place.
    """
    load = getattr(limit, "load", None)
    if load is not None:
        return f"of {load}"
    if isinstance(limit, ON_SETTLEMENT) and scenario.all_stations:
        return limit_place(scenario, limit)[1]
    return ""


def limit_place(scenario: Scenario, limit: OnSettlement) -> tuple[Row, str]:
    """Return which stations a limit on settlement looks at, also in words.

    Parameters
    ----------
    scenario : Scenario
        With stations.
    limit : limit on settlement
        One of its own.

    Returns
    -------
    place : dict
        ``{"station": name}`` or ``{"stations": [name, name] or word}``.
    words : str
        Such as ``at station pier``.
    """
    if isinstance(limit, DifferentialSettlementLimit | AngularDistortionLimit):
        if isinstance(limit.stations, str):
            return {"stations": limit.stations}, _WORDS[limit.stations]
        first, second = limit.stations
        return {"stations": [first, second]}, f"between stations {first} and {second}"
    if limit.station == ANY:
        return {"station": ANY}, "at the station that settles most"
    name = limit.station or scenario.all_stations[0].name
    return {"station": name}, f"at station {name}"


def _decided_by(
    scenario: Scenario, limit: OnSettlement, layout: StationLayout, station: FloatArray
) -> list[Row]:
    """Return the stations or pairs that are the worst, with the share of realisations in which they are."""
    settled = _settled(scenario, limit, station)
    settled = settled[np.isfinite(settled).all(axis=1)]
    if not len(settled):
        return []
    if isinstance(limit, DifferentialSettlementLimit | AngularDistortionLimit):
        worst = compared(limit, settled, layout).argmax(axis=1)
        named = [
            [layout.names[first], layout.names[second]] for first, second in layout.pairs(limit.stations)
        ]
    else:
        worst = settled.argmax(axis=1)
        named = [[name] for name in layout.names]
    most = Counter(worst.tolist()).most_common(_LISTED)
    return [{"stations": named[place], "share": count / len(settled)} for place, count in most]


def _settled(scenario: Scenario, limit: OnSettlement, station: FloatArray) -> FloatArray:
    times = station_times(scenario)

    def by(time: float) -> FloatArray:
        when = int(np.searchsorted(times, time))
        return station[:, :, when].astype(np.float64) if time > 0.0 else np.zeros(station.shape[:2])

    start, end = (0.0, limit.at or 0.0) if limit.between is None else limit.between
    return by(end) - by(start)
