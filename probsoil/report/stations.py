"""Settlement at several stations arranged for the page: profile, differences, what decides a limit."""

from typing import Any

from probsoil.report import text
from probsoil.report.alttext import Words

LEVELS = ("0.05", "0.25", "0.5", "0.75", "0.95")


def stations_view(results: dict[str, Any]) -> dict[str, Any] | None:
    """Arrange the settlement of the stations and the differences between them.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    view : dict or None
        None where there are fewer than two stations.
    """
    data, n = results.get("settlement") or {}, _count(results)
    stations, pairs = data.get("stations") or [], data.get("pairs") or []
    if len(stations) < 2:
        return None
    return {
        "time": text.trimmed_text(data["station_times"][-1]),
        "total": text.realisations_text(n),
        "tails": n >= text.LEAST_FOR_TAILS,
        "on_line": on_line(stations),
        "sentence": _sentence(stations, pairs, data["station_times"][-1]),
        "rows": [_station_row(station, n) for station in stations],
        "thickness": any(station.get("thickness") for station in stations),
        "pairs": [_pair_row(pair, n) for pair in pairs],
        "decided": _decided(results),
    }


def on_line(stations: list[dict[str, Any]]) -> bool:
    """Tell whether stations lie on one line.

    Parameters
    ----------
    stations : list of dict
        Entries of ``stations`` of the settlement.

    Returns
    -------
    on_line : bool
        True if each has its distance along it.
    """
    return all(text.is_number(station.get("along")) for station in stations)


def is_marked(limit: dict[str, Any], settlement: dict[str, Any]) -> bool:
    """Tell whether a limit is marked on the band of settlement through time.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    settlement : dict
        ``settlement`` of the results.

    Returns
    -------
    marked : bool
        True for a limit on settlement at one time, at the station the band belongs to where there are
        stations.
    """
    if limit["quantity"] != "settlement" or not text.is_number((limit.get("time") or {}).get("at")):
        return False
    place = limit.get("place")
    return place is None or settlement.get("station") == f"station {place['station']}"


def in_order(stations: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Put stations in the order in which a profile shows them.

    Parameters
    ----------
    stations : list of dict
        Entries of ``stations`` of the settlement.

    Returns
    -------
    ordered : list of dict
        Along their line, or as they stand where there is none.
    """
    return sorted(stations, key=lambda station: station["along"]) if on_line(stations) else stations


def ratio_text(value: float | None) -> str:
    """Write a distortion as one over a whole number.

    Parameters
    ----------
    value : float or None, [-]
        Distortion.

    Returns
    -------
    text : str
        For example ``1/480``; to three figures.
    """
    if not text.is_number(value) or value <= 0.0:
        return "none" if value == 0.0 else text.UNCOMPUTED
    return f"1/{text.rounded(float(f'{1.0 / value:.3g}'), 0)}"


def stations_words(results: dict[str, Any]) -> Words:
    """Describe the settlement profile over the stations.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    words : Words
        Title and description.
    """
    data, n = results["settlement"], _count(results)
    parts = []
    for station in in_order(data["stations"]):
        quantiles = at_horizon(station)
        tails = [text.at_level(quantiles, level, "m", n) for level in ("0.05", "0.95")]
        spread = "" if n < text.LEAST_FOR_TAILS else f", 5 to 95 % {tails[0]} to {tails[1]}"
        parts.append(f"{station['name']}: median {text.quantile_text(quantiles['0.5'], 'm')}{spread}")
    time = text.trimmed_text(data["station_times"][-1])
    return Words(
        title=f"Settlement of the stations after {time} years",
        description=f"{len(parts)} stations, settlement downwards. {'; '.join(parts)}.",
    )


def at_horizon(row: dict[str, Any]) -> dict[str, Any]:
    """Return the quantiles of a station or pair at the last time.

    Parameters
    ----------
    row : dict
        With ``quantiles`` of one value per time.

    Returns
    -------
    quantiles : dict
        One value by level.
    """
    return {level: values[-1] for level, values in row["quantiles"].items()}


def _count(results: dict[str, Any]) -> int:
    return int((results.get("settlement") or {}).get("realisations") or results["realisations"])


def _station_row(station: dict[str, Any], n: int) -> list[str]:
    quantiles, mean = at_horizon(station), station["mean"][-1]
    thickness = [f"{name} {text.number_text(value)} m" for name, value in station["thickness"].items()]
    return [
        station["name"],
        text.trimmed_text(station["x"]),
        text.trimmed_text(station["y"]),
        *(text.at_level(quantiles, level, "m", n).removesuffix(" m") for level in LEVELS),
        text.UNCOMPUTED if mean is None else text.rounded(mean, 3),
        text.list_text(thickness) or "as the layers say",
    ]


def _pair_row(pair: dict[str, Any], n: int) -> list[str]:
    difference, distortion = at_horizon(pair["difference"]), at_horizon(pair["distortion"])
    tail = distortion["0.95"] if n >= text.LEAST_FOR_TAILS else None
    return [
        " and ".join(pair["stations"]),
        text.trimmed_text(pair["distance"]),
        *(text.at_level(difference, level, "m", n).removesuffix(" m") for level in LEVELS),
        ratio_text(distortion["0.5"]),
        text.WITHHELD if n < text.LEAST_FOR_TAILS else ratio_text(tail),
    ]


def _sentence(stations: list[dict[str, Any]], pairs: list[dict[str, Any]], time: float) -> str:
    known = [one for one in stations if text.is_number(at_horizon(one)["0.5"])]
    if not known:
        return f"After {text.trimmed_text(time)} years {text.UNCOMPUTED}."
    least, most = (chosen(known, key=lambda one: float(at_horizon(one)["0.5"])) for chosen in (min, max))
    said = (
        f"After {text.trimmed_text(time)} years the median settlement lies between "
        f"{text.value_text(at_horizon(least)['0.5'], 'm')} at {least['name']} and "
        f"{text.value_text(at_horizon(most)['0.5'], 'm')} at {most['name']}."
    )
    known = [pair for pair in pairs if text.is_number(at_horizon(pair["difference"])["0.5"])]
    if not known:
        return said
    worst = max(known, key=lambda pair: float(at_horizon(pair["distortion"])["0.5"]))
    difference, distortion = at_horizon(worst["difference"]), at_horizon(worst["distortion"])
    what = "between neighbours" if on_line(stations) else "from the first station to another"
    return (
        f"{said} The steepest median difference {what} is "
        f"{text.value_text(difference['0.5'], 'm')} over {text.trimmed_text(worst['distance'])} m "
        f"({ratio_text(distortion['0.5'])}), between {worst['stations'][0]} and {worst['stations'][1]}."
    )


def _decided(results: dict[str, Any]) -> list[str]:
    """Say which stations or pairs are most often the worst, for each limit that takes the worst."""
    sentences = []
    for number, limit in enumerate(results["limits"], start=1):
        rows = limit.get("decided_by") or []
        if rows:
            parts = [f"{' and '.join(row['stations'])} in {text.percent_text(row['share'])}" for row in rows]
            sentences.append(f"Limit {number}, {limit['name']}: decided by {text.list_text(parts)}.")
    return sentences
