"""Whether results are what their format says, key by key, before anything is drawn from them.

`RESULTS` is the format as data. A rule is one of the words in `_CHECKS`; a list of one rule, for a list of
such items; a table of rules by key, for an object; or a tuple of rules, any of which will do. A key
that ends in a question mark came to the format later and may be absent. Keys not named are let
through: a format may be added to.
"""

import math
from collections.abc import Callable, Iterator
from typing import Any

from probsoil.errors import ResultsError
from probsoil.report.probability_rules import PRECISION, TOGETHER

FORMAT = 1


def _is_number(value: object) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool) and math.isfinite(value)


def _is_count(value: object) -> bool:
    return isinstance(value, int) and not isinstance(value, bool) and value >= 0


def _is_share(value: Any) -> bool:
    return _is_number(value) and 0.0 <= value <= 1.0


_CHECKS: dict[str, tuple[str, Callable[[Any], bool]]] = {
    "null": ("null", lambda value: value is None),
    "text": ("text", lambda value: isinstance(value, str)),
    "flag": ("true or false", lambda value: isinstance(value, bool)),
    "number": ("a finite number", _is_number),
    "count": ("a whole number, 0 or more", _is_count),
    "positive count": ("a whole number, 1 or more", lambda value: _is_count(value) and value > 0),
    "share": ("a number from 0 to 1", _is_share),
    "object": ("an object", lambda value: isinstance(value, dict)),
    "pair": (
        "two numbers, the lower first, either null",
        lambda value: isinstance(value, list) and _is_pair(value),
    ),
    "share pair": (
        "two numbers from 0 to 1, the lower first",
        lambda value: isinstance(value, list) and all(map(_is_share, value)) and _is_pair(value),
    ),
}


def _is_pair(value: list[Any]) -> bool:
    known = [end for end in value if end is not None]
    return len(value) == 2 and all(map(_is_number, known)) and known == sorted(known)


_NUMBER = ("number", "null")
_APART = ("stages", "station_times", "stations", "pairs")  # lists with lengths of their own
_LEVELS = ("0.05", "0.25", "0.5", "0.75", "0.95")
_QUANTILES = dict.fromkeys(_LEVELS, _NUMBER)
_STAGE = {"name": "text", "start": "number", "end": "number"}
_LIMIT = {
    "name": "text",
    "quantity": "text",
    "unit": "text",
    "sense": "text",
    "threshold": "number",
    "time": "object",
    "time_text": "text",
    "probability": "share",
    "interval": "share pair",
    "confidence": "share",
    "exceeding": "count",
    "not_converged": "count",
    "never_reached": "count",
    "reliability_index": _NUMBER,
    "reliability_interval": "pair",
    "method": "text",
    "model_runs": "positive count",
    "unseen_bound": ("share", "null"),
    "target_probability": ("share", "null"),
    "verdict": ("text", "null"),
    "cost_if_exceeded": _NUMBER,
    "expected_cost": _NUMBER,
    "expected_cost_interval?": ("pair", "null"),
    "summary": {"mean": _NUMBER, "sd": _NUMBER, "quantiles": _QUANTILES, "median_interval?": "pair"},
    "load?": ("text", "null"),
    "place?": ("object", "null"),
    "place_text?": "text",
    "decided_by?": [{"stations": ["text"], "share": "share"}],
    "curve": {
        "step": "number",
        "threshold": ["number"],
        "exceeding": ["count"],
        "probability": ["share"],
        "low": ["share"],
        "high": ["share"],
        "band_low?": ["share"],
        "band_high?": ["share"],
    },
}
_DRIVER = {
    "limit": "text",
    "parameter": "text",
    "rank": ("count", "null"),
    "spread_elasticity": _NUMBER,
    "spread_interval": "pair",
    "spread_clear": ("flag", "null"),
    "mean_elasticity": _NUMBER,
    "mean_interval": "pair",
    "mean_clear": ("flag", "null"),
    "share": ("share", "null"),
    "share_interval": "pair",
    "direction": "text",
}
_FACTOR: dict[str, Any] = {
    "stage": "text",
    "time": "number",
    "fill_height": _NUMBER,
    "mean": _NUMBER,
    "quantiles": _QUANTILES,
    "probability_below_one": "share",
    "interval_below_one?": "share pair",
}
_CIRCLE = {
    **dict.fromkeys(("touch_depth", "exit", "entry"), _QUANTILES),
    "realisations": "count",
    "at_medians": ("object", "null"),
    "others": [{"centre": ["number"], **dict.fromkeys(("radius", "exit_x", "entry_x"), "number")}],
    "outline": [["number"]],
}
_SUMMARY = dict.fromkeys(("mean", "sd", "p05", "p50", "p95"), "number")
_SOURCES = dict.fromkeys(("knowledge", "inherent", "measurement", "bias"), "number")
_RESULT = {
    **dict.fromkeys(("test", "kind", "parameter", "layer", "hole", "unit"), "text"),
    "value": "number",
}
_EVIDENCE = {
    "tests": [
        {
            **_RESULT,
            **dict.fromkeys(("below_top", "standard_error", "error_cov", "bias_cov", "deviation"), "number"),
            "informs": ["text"],
        }
    ],
    "unused": [{**_RESULT, "reason": "text"}],
    "parameters": [
        {
            **dict.fromkeys(("name", "unit", "meaning"), "text"),
            "tests": "count",
            "kinds": ["text"],
            "before": _SUMMARY,
            "after": _SUMMARY,
            "sources_before": _SOURCES,
            "sources_after": _SOURCES,
            "data": [{"test": "text", "kind": "text", "value": "number"}],
            "density": {key: ["number"] for key in ("value", "before", "after")},
        }
    ],
    "conflict": {"chance": "share", "far": "flag"},
    "curvature": "number",
}
_GROUND = {
    "water_table": "text",
    "base": "text",
    "base_head?": ("text", "null"),
    "layers": [
        {
            "name": "text",
            "soil": "text",
            "top": "number",
            "bottom": "number",
            "properties": [{"symbol": "text", "meaning": "text", "text": "text", "unit": "text"}],
        }
    ],
    "load": {"shape": "text", "text": "text"},
    "further_loads?": [{"name": "text", "text": "text"}],
    "stages": [_STAGE | {"change_text": "text", "height_after": _NUMBER, "pressure_after": _NUMBER}],
    "profile": {
        "depth": ["number"],
        "initial_stress": ["number"],
        "preconsolidation": [_NUMBER],
        "final_stress": ["number"],
    },
}
_SERIES = {"mean": [_NUMBER], "quantiles": {level: [_NUMBER] for level in _LEVELS}}
_STATIONS = {
    "station_times?": ["number"],
    "stations?": [
        {"name": "text", "x": "number", "y": "number", "along": _NUMBER, "thickness": "object"} | _SERIES
    ],
    "pairs?": [{"stations": ["text"], "distance": "number", "difference": _SERIES, "distortion": _SERIES}],
}
_MEAN_AND_QUANTILES = {"mean": _NUMBER, "quantiles": _QUANTILES}
_ADDED_FILL = {
    "until": "number",
    "unit": "text",
    "mean_width": _NUMBER,
    "width_varies?": "flag",
    "thickness": _MEAN_AND_QUANTILES,
    "volume": _MEAN_AND_QUANTILES,
}
RESULTS: dict[str, Any] = {
    "title": "text",
    "seed": "count",
    "realisations": "positive count",
    "draws": "text",
    "confidence": "share",
    "currency": "text",
    "limits": [_LIMIT],
    "together?": TOGETHER,
    "precision?": PRECISION,
    "settlement": {
        "station": "text",
        "times": ["number"],
        "mean": [_NUMBER],
        "quantiles": {level: [_NUMBER] for level in _LEVELS},
        "realisations": "positive count",
        "stages": [_STAGE],
        "final": {"mean": _NUMBER, "quantiles": _QUANTILES},
    }
    | _STATIONS,
    "slip": [_FACTOR | {"circle?": _CIRCLE}],
    "bearing?": [_FACTOR | {"pressure": _NUMBER}],
    "added_fill?": [_ADDED_FILL],
    "drivers": [_DRIVER],
    "driver_quality": [
        {
            "limit": "text",
            "ranked_by": "text",
            "exceeding": "count",
            "r_squared": ("share", "null"),
            "note": ("text", "null"),
        }
    ],
    "ground": _GROUND,
    "parameters": [
        dict.fromkeys(("name", "unit", "meaning", "text"), "text")
        | dict.fromkeys(("mean", "sd", "p05", "p50", "p95", "low", "high"), _NUMBER)
        | {"cut_share": "share", "local_share?": "share"}
    ],
    "evidence?": _EVIDENCE,
    "dependence": [{"between": ["text"], "rank_correlation": "number", "latent_correlation": "number"}],
    "discretisation": {
        "realisations": "positive count",
        "cells": "count",
        "steps": "count",
        "settlement_error": "number",
        "settlement_error_share": "number",
        "slip_error_share": _NUMBER,
        "bearing_error_share?": _NUMBER,
    },
    "warnings": [{"code": "text", "message": "text", "share": _NUMBER, "share_of?": ("text", "null")}],
    "assumptions": ["text"],
    "cautions": ["text"],
    "provenance": {
        **dict.fromkeys(("version", "scenario_sha256", "python", "platform"), "text"),
        "scenario_file": ("text", "null"),
        "packages": "object",
        "cpu_features": ["text"],
        "started": "text",
        "seconds": "object",
        "workers": "count",
        "command": ("text", "null"),
        "chunks": "count",
    },
}


def check_results(results: object, where: str) -> dict[str, Any]:
    """Refuse results that are not what their format says.

    Parameters
    ----------
    results : object
        What a results file held.
    where : str
        What to call it.

    Returns
    -------
    results : dict
        The same.

    Raises
    ------
    ResultsError
        Naming the first key that is missing or holds what it must not.
    """
    if not isinstance(results, dict) or results.get("kind") != "assess" or results.get("format") != FORMAT:
        raise ResultsError(f"{where}: not the results of an assessment in format {FORMAT}")
    for fault in _faults(results, RESULTS, ""):
        raise ResultsError(f"{where}: {fault}")
    for fault in _contradictions(results):
        raise ResultsError(f"{where}: {fault}")
    return results


def _faults(value: Any, rule: Any, key: str) -> Iterator[str]:
    """Say what is wrong with a value by its rule, depth first in the order of the rules."""
    if isinstance(rule, dict):
        yield from _object_faults(value, rule, key)
    elif isinstance(rule, list):
        if not isinstance(value, list):
            yield f"{key} must be a list; got {_shown(value)}"
            return
        for place, item in enumerate(value):
            yield from _faults(item, rule[0], f"{key}[{place}]")
    else:
        wanted = rule if isinstance(rule, tuple) else (rule,)
        if not any(_CHECKS[name][1](value) for name in wanted):
            yield f"{key} must be {' or '.join(_CHECKS[name][0] for name in wanted)}; got {_shown(value)}"


def _object_faults(value: Any, rules: dict[str, Any], key: str) -> Iterator[str]:
    if not isinstance(value, dict):
        yield f"{key} must be an object; got {_shown(value)}"
        return
    for name, rule in rules.items():
        inner = name.removesuffix("?")
        path = f"{key}.{inner}" if key else inner
        if inner in value:
            yield from _faults(value[inner], rule, path)
        elif inner == name:
            yield f"{path} is missing"


def _contradictions(results: dict[str, Any]) -> Iterator[str]:
    """Say where parts that are each as they should be do not go together."""
    if not results["limits"]:
        yield "limits must name at least one limit"
    for place, limit in enumerate(results["limits"]):
        low, high = limit["interval"]
        if not low <= limit["probability"] <= high:
            yield f"limits[{place}].interval must hold the probability, {limit['probability']:g}"
        if limit["exceeding"] > limit["model_runs"]:
            yield f"limits[{place}].exceeding must not be more than the model runs, {limit['model_runs']}"
        yield from _lengths(limit["curve"], "threshold", f"limits[{place}].curve")
    settlement = results["settlement"]
    yield from _lengths(settlement, "times", "settlement")
    yield from _lengths(
        {"times": settlement["times"], **settlement["quantiles"]}, "times", "settlement.quantiles"
    )
    yield from _station_lengths(settlement)
    yield from _lengths(results["ground"]["profile"], "depth", "ground.profile")
    names = {limit["name"] for limit in results["limits"]}
    named = {part: results[part] for part in ("drivers", "driver_quality")}
    named["precision.limits"] = (results.get("precision") or {"limits": []})["limits"]
    for part, rows in named.items():
        for place, row in enumerate(rows):
            if row["limit"] not in names:
                yield f"{part}[{place}].limit must be the name of a limit; got {_shown(row['limit'])}"


def _station_lengths(settlement: dict[str, Any]) -> Iterator[str]:
    times = {"station_times": settlement.get("station_times") or []}
    for place, row in enumerate(settlement.get("stations") or []):
        key = f"settlement.stations[{place}]"
        yield from _lengths(times | {"mean": row["mean"]} | row["quantiles"], "station_times", key)
    for place, row in enumerate(settlement.get("pairs") or []):
        for part in ("difference", "distortion"):
            key = f"settlement.pairs[{place}].{part}"
            yield from _lengths(times | row[part]["quantiles"], "station_times", key)


def _lengths(columns: dict[str, Any], first: str, key: str) -> Iterator[str]:
    wanted = len(columns[first])
    for name, values in columns.items():
        if isinstance(values, list) and name not in _APART and len(values) != wanted:
            yield f"{key}.{name} must have as many values as {first}, {wanted}; got {len(values)}"


def _shown(value: object) -> str:
    shown = repr(value)
    return shown if len(shown) <= 60 else f"{shown[:57]}..."
