"""The results as tables for a spreadsheet, units in the column names."""

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

from probsoil.report.chance import realisations_of
from probsoil.report.evidence import parameter_rows, test_rows
from probsoil.report.further import precision_rows
from probsoil.report.ranking import ranked_by
from probsoil.report.text import LEAST_FOR_TAILS, UNCOMPUTED, WITHHELD, uncomputed_text
from probsoil.report.together import together_rows

if TYPE_CHECKING:
    import pandas as pd

_LEVELS = ("0.05", "0.25", "0.5", "0.75", "0.95")


def write_tables(results: dict[str, Any], folder: Path) -> list[Path]:
    """Write ``limits.csv``, ``curves.csv``, ``drivers.csv``, ``settlement.csv`` and ``parameters.csv``.

    With several limits also ``together.csv``; with a precision asked ``precision.csv``; with stations
    ``stations.csv`` and ``station_pairs.csv``; with tests in hand ``tests.csv`` and
    ``updated_parameters.csv``; ``added_fill.csv`` where fill is added to hold its level.

    Where the rows of a column differ in unit its name says ``[unit]`` and the column ``unit`` gives it. A
    mean or quantile without a number reads ``not reached`` (a time), ``beyond the computation``, or
    ``too few realisations`` (the 5 % and the 95 % point of fewer than 40).

    Parameters
    ----------
    results : dict
        The results of an assessment.
    folder : Path
        Folder that exists.

    Returns
    -------
    paths : list of Path
        The files written.
    """
    paths = []
    for name, frame in tables(results).items():
        path = folder / f"{name}.csv"
        temporary = path.with_name(path.name + ".part")
        frame.to_csv(temporary, index=False, encoding="utf-8", lineterminator="\n")
        paths.append(temporary.replace(path))
    return paths


def tables(results: dict[str, Any]) -> "dict[str, pd.DataFrame]":
    """Arrange the results as tables.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    frames : dict of str to DataFrame
        ``limits``, ``curves``, ``drivers``, ``settlement`` and ``parameters``; parts the results lack give
        tables without rows. The others as by `write_tables`.
    """
    import pandas as pd

    rows = {
        "limits": [_limit_row(limit, results) for limit in results["limits"]],
        "curves": [row for limit in results["limits"] for row in _curve_rows(limit)],
        "drivers": [
            _driver_row(row, ranked_by(results, row["limit"])) for row in results.get("drivers") or []
        ],
        "settlement": _settlement_rows(results.get("settlement") or {}, results),
        "parameters": [_parameter_row(row) for row in results.get("parameters") or []],
    }
    if results.get("together"):
        rows["together"] = together_rows(results["together"])
    if results.get("precision"):
        rows["precision"] = precision_rows(results["precision"])
    settlement = results.get("settlement") or {}
    if settlement.get("stations"):
        rows["stations"] = list(_station_rows(settlement, results))
        rows["station_pairs"] = list(_pair_rows(settlement, results))
    if results.get("evidence"):
        rows["tests"] = test_rows(results["evidence"])
        rows["updated_parameters"] = parameter_rows(results["evidence"])
    if results.get("added_fill"):
        rows["added_fill"] = _added_fill_rows(results)
    frames = {name: pd.DataFrame(part) for name, part in rows.items()}
    if len(frames["drivers"]):
        whole = {"rank [-]": "Int64", "spread clear": "boolean", "mean clear": "boolean"}
        frames["drivers"] = frames["drivers"].astype(whole)
    return frames


def _limit_row(limit: dict[str, Any], results: dict[str, Any]) -> dict[str, Any]:
    currency, n = results.get("currency") or "currency", realisations_of(limit, results)
    low, high = limit["interval"]
    cost_low, cost_high = limit.get("expected_cost_interval") or (None, None)
    beta_low, beta_high = limit.get("reliability_interval") or (None, None)
    summary = limit.get("summary") or {}
    beyond = uncomputed_text(limit["quantity"])
    return {
        "limit": limit["name"],
        "quantity": limit["quantity"],
        "time": limit.get("time_text"),
        **({"place": limit["place_text"]} if limit.get("place_text") else {}),
        "sense": limit["sense"],
        "unit": limit.get("unit"),
        "threshold [unit]": limit["threshold"],
        "probability [-]": limit["probability"],
        "probability low [-]": low,
        "probability high [-]": high,
        "confidence [-]": limit.get("confidence"),
        "exceeding [realisations]": limit["exceeding"],
        "not converged [realisations]": limit.get("not_converged"),
        "never reached [realisations]": limit.get("never_reached"),
        "model runs [realisations]": limit.get("model_runs"),
        "reliability index [-]": limit.get("reliability_index"),
        "reliability index low [-]": beta_low,
        "reliability index high [-]": beta_high,
        "unseen bound [-]": limit.get("unseen_bound"),
        "target probability [-]": limit.get("target_probability"),
        "verdict": limit.get("verdict"),
        f"cost if exceeded [{currency}]": limit.get("cost_if_exceeded"),
        f"expected cost [{currency}]": limit.get("expected_cost"),
        f"expected cost low [{currency}]": cost_low,
        f"expected cost high [{currency}]": cost_high,
        "mean [unit]": _or(beyond, summary, "mean"),
        "sd [unit]": _or(beyond, summary, "sd"),
        **_quantile_columns(summary.get("quantiles") or {}, "unit", n, beyond),
        **_median_columns(summary.get("median_interval"), beyond),
        "method": limit.get("method"),
    }


def _curve_rows(limit: dict[str, Any]) -> Iterator[dict[str, Any]]:
    curve = limit.get("curve") or {}
    columns = {
        "threshold [unit]": "threshold",
        "exceeding [realisations]": "exceeding",
        "probability [-]": "probability",
        "probability low [-]": "low",
        "probability high [-]": "high",
        "whole curve low [-]": "band_low",
        "whole curve high [-]": "band_high",
    }
    for place in range(len(curve.get("threshold") or [])):
        numbers = {name: curve[key][place] for name, key in columns.items() if key in curve}
        yield {"limit": limit["name"], "unit": limit.get("unit")} | numbers


def _driver_row(row: dict[str, Any], measure: str) -> dict[str, Any]:
    columns = {
        "limit": row["limit"],
        "parameter": row["parameter"],
        "rank [-]": row.get("rank"),
        "ranked by": measure,
    }
    for label, value, interval in (
        ("spread elasticity", "spread_elasticity", "spread_interval"),
        ("mean elasticity", "mean_elasticity", "mean_interval"),
        ("share", "share", "share_interval"),
    ):
        low, high = row.get(interval) or (None, None)
        columns |= {f"{label} [-]": row.get(value), f"{label} low [-]": low, f"{label} high [-]": high}
    clear = {"spread clear": row.get("spread_clear"), "mean clear": row.get("mean_clear")}
    return columns | clear | {"direction": row.get("direction")}


def _settlement_rows(data: dict[str, Any], results: dict[str, Any]) -> list[dict[str, Any]]:
    quantiles, n = data.get("quantiles") or {}, data.get("realisations") or results.get("realisations") or 0
    return [
        {
            "time [years]": time,
            "mean [m]": UNCOMPUTED if data["mean"][place] is None else data["mean"][place],
            **_quantile_columns(
                {level: values[place] for level, values in quantiles.items()}, "m", n, UNCOMPUTED
            ),
        }
        for place, time in enumerate(data.get("times") or [])
    ]


def _station_rows(data: dict[str, Any], results: dict[str, Any]) -> Iterator[dict[str, Any]]:
    for station in data["stations"]:
        head = {
            "station": station["name"],
            "x [m]": station["x"],
            "y [m]": station["y"],
            "along [m]": station["along"],
        }
        for row in _series_rows(station, data, results, "m"):
            yield head | row


def _pair_rows(data: dict[str, Any], results: dict[str, Any]) -> Iterator[dict[str, Any]]:
    for pair in data["pairs"]:
        first, second = pair["stations"]
        head = {"station": first, "other station": second, "distance [m]": pair["distance"]}
        for part, unit in (("difference", "m"), ("distortion", "-")):
            for row in _series_rows(pair[part], data, results, unit):
                named = {key.replace(f"[{unit}]", "[unit]"): value for key, value in row.items()}
                yield head | {"quantity": part, "unit": unit} | named


def _series_rows(
    series: dict[str, Any], data: dict[str, Any], results: dict[str, Any], unit: str
) -> Iterator[dict[str, Any]]:
    """Yield one row for each time of a station or pair."""
    n = data.get("realisations") or results["realisations"]
    for place, time in enumerate(data["station_times"]):
        mean = series["mean"][place]
        at_time = {level: values[place] for level, values in series["quantiles"].items()}
        yield {
            "time [years]": time,
            f"mean [{unit}]": UNCOMPUTED if mean is None else mean,
            **_quantile_columns(at_time, unit, n, UNCOMPUTED),
        }


def _added_fill_rows(results: dict[str, Any]) -> list[dict[str, Any]]:
    return [
        {
            "fill added": name,
            "until [years]": row["until"],
            "unit": unit,
            "mean [unit]": _or(UNCOMPUTED, row[key], "mean"),
            **_quantile_columns(row[key]["quantiles"], "unit", results["realisations"], UNCOMPUTED),
        }
        for row in results["added_fill"]
        for name, unit, key in (
            ("thickness on the centreline", "m", "thickness"),
            ("volume", row["unit"], "volume"),
        )
    ]


def _parameter_row(row: dict[str, Any]) -> dict[str, Any]:
    return {
        "parameter": row["name"],
        "meaning": row.get("meaning"),
        "distribution": row.get("text"),
        "unit": row.get("unit"),
        "mean [unit]": row.get("mean"),
        "sd [unit]": row.get("sd"),
        "p05 [unit]": row.get("p05"),
        "p50 [unit]": row.get("p50"),
        "p95 [unit]": row.get("p95"),
        "low bound [unit]": row.get("low"),
        "high bound [unit]": row.get("high"),
        "share cut [-]": row.get("cut_share"),
    } | ({"share between stations [-]": row["local_share"]} if "local_share" in row else {})


def _quantile_columns(quantiles: dict[str, Any], unit: str, n: int, beyond: str) -> dict[str, Any]:
    columns = {
        f"p{round(100 * float(level)):02d} [{unit}]": _or(beyond, quantiles, level) for level in _LEVELS
    }
    few = {f"p05 [{unit}]": WITHHELD, f"p95 [{unit}]": WITHHELD} if n < LEAST_FOR_TAILS else {}
    return columns | few


def _median_columns(ends: list[float | None] | None, beyond: str) -> dict[str, Any]:
    names = ("p50 low [unit]", "p50 high [unit]")
    if not ends:
        return dict.fromkeys(names)
    if ends == [None, None]:
        return dict.fromkeys(names, WITHHELD)
    return {name: beyond if end is None else end for name, end in zip(names, ends, strict=True)}


def _or(beyond: str, values: dict[str, Any], key: str) -> Any:
    """Return a number, the words for one that does not exist, or nothing where the results lack it."""
    return beyond if key in values and values[key] is None else values.get(key)
