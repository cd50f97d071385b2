"""The results arranged for the page: every number already in words, nothing left to compute or to format."""

from typing import Any

from probsoil.report import chance, text
from probsoil.report.added_fill import added_fill_sentences
from probsoil.report.curve import curve_view
from probsoil.report.drivers import drivers_view
from probsoil.report.evidence import evidence_view
from probsoil.report.further import precision_text, precision_view
from probsoil.report.record import draws_text, metres_text, record_view, slip_share, stage_view
from probsoil.report.section import section_view
from probsoil.report.stations import is_marked, stations_view
from probsoil.report.together import together_view

_MARKS = {"within target": "within", "beyond target": "beyond", "not conclusive": "open"}
_LEVELS = ("0.05", "0.25", "0.5", "0.75", "0.95")
_SLIP = {
    "key": "slip",
    "heading": "Safety against slip, stage by stage",
    "nav": "Slip",
    "sentence": "Least factor of safety of the undrained slip circles examined at the end of each stage. "
    "Below 1 the fill slips. The clay gains strength as it consolidates between stages.",
    "mark": "slip",
    "table": "Least factor of safety against slip [-]",
    "load": "Fill height [m]",
}
_BEARING = {
    "key": "bearing",
    "heading": "Safety against bearing failure, stage by stage",
    "nav": "Bearing",
    "sentence": "Undrained net bearing capacity over net pressure at the end of each stage. Below 1 the "
    "foundation fails. The clay gains strength as it consolidates between stages.",
    "mark": "failure",
    "table": "Factor of safety against bearing failure [-]",
    "load": "Load",
}
_TABLE_TIMES = 18


def page_view(results: dict[str, Any]) -> dict[str, Any]:
    """Arrange a whole assessment for the page.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    view : dict
        Everything the template asks for.
    """
    numbered = list(enumerate(results["limits"], start=1))
    curves = (curve_view(number, limit, results) for number, limit in numbered)
    return {
        "title": results["title"],
        "block": _title_block(results),
        "overall": chance.overall_sentence(results),
        "confidence": text.plain_percent(results["confidence"]),
        "costs": sum(limit.get("cost_if_exceeded") is not None for limit in results["limits"]) > 1,
        "certain": all(chance.is_certain(limit) for limit in results["limits"]),
        "one_sided": any(
            not 0 < limit["probability"] < 1 and not chance.is_certain(limit) for limit in results["limits"]
        ),
        "total": text.realisations_text(results["realisations"]),
        "tails": results["realisations"] >= text.LEAST_FOR_TAILS,
        "limits": [_limit(number, limit, results) for number, limit in numbered],
        "together": together_view(results),
        "precision": precision_view(results),
        "settlement": _settlement(results.get("settlement") or {}, results),
        "stations": stations_view(results),
        "added_fill": added_fill_sentences(results),
        "curves": [view for view in curves if view is not None],
        "drivers": [view for number, limit in numbered if (view := drivers_view(number, limit, results))],
        "stability": _stability(results),
        "evidence": evidence_view(results),
    } | record_view(results)


def _title_block(results: dict[str, Any]) -> list[tuple[str, str]]:
    origin = results.get("provenance") or {}
    rows = [
        ("Scenario file", origin.get("scenario_file")),
        ("Run on", str(origin.get("started") or "").replace("T", " ")[:16] or None),
        ("Realisations", f"{text.count_text(results['realisations'])}, {draws_text(results)}"),
        ("Seed", results.get("seed")),
        ("Program", f"probsoil {origin['version']}" if origin.get("version") else None),
    ]
    return [(label, str(value)) for label, value in rows if value is not None]


def _limit(number: int, limit: dict[str, Any], results: dict[str, Any]) -> dict[str, Any]:
    target = limit.get("target_probability")
    return {
        "number": number,
        "name": limit["name"],
        "mark": _MARKS.get(limit.get("verdict") or "", "none"),
        "label": chance.verdict_label(limit),
        "sentence": chance.verdict_sentence(limit, results),
        "evidence": _evidence(limit, results),
        "quantity": text.quantity_text(limit),
        "allowed": f"{limit['sense']} {text.threshold_text(limit)}{text.slope_text(limit)}",
        "chance": text.probability_text(limit["probability"], chance.realisations_of(limit, results)),
        "interval": text.interval_text(limit["probability"], *limit["interval"]),
        "target": "none" if target is None else text.plain_percent(target),
        "reliability": _reliability(limit),
        "median": _median(limit),
    }


def _median(limit: dict[str, Any]) -> str:
    quantiles = (limit.get("summary") or {}).get("quantiles") or {}
    if "0.5" not in quantiles:
        return text.MISSING
    beyond = text.uncomputed_text(limit["quantity"])
    return text.quantile_text(quantiles["0.5"], limit.get("unit", "-"), beyond)


def _reliability(limit: dict[str, Any]) -> str:
    index = limit.get("reliability_index")
    ends = text.pair_text(limit.get("reliability_interval"))
    if index is None:
        return ends
    return f"{text.rounded(index, 2)} ({ends})"


def _evidence(limit: dict[str, Any], results: dict[str, Any]) -> list[tuple[str, str]]:
    rows = [
        ("Counted", chance.counted_text(limit, results)),
        ("To the precision asked", precision_text(limit["name"], results)),
        ("The quantity itself", _spread(limit, results)),
        ("Creep in it", _part(limit, "secondary")),
        ("Undrained distortion in it", _part(limit, "distortion")),
        ("Cost", chance.cost_text(limit, results)),
        ("Not reached", _never(limit)),
        ("Not converged", _not_converged(limit)),
    ]
    return [(label, value) for label, value in rows if value and value != text.MISSING]


def _part(limit: dict[str, Any], name: str) -> str:
    """Say what secondary compression or undrained distortion adds to a settlement, on average."""
    mean, share = limit.get(f"{name}_mean"), limit.get(f"{name}_share")
    if mean is None:
        return ""
    part = "" if share is None else f", {text.plain_percent(share)} of the mean settlement"
    return f"{text.value_text(mean, limit['unit'])} on average{part}"


def _spread(limit: dict[str, Any], results: dict[str, Any]) -> str:
    summary, unit, n = limit["summary"], limit["unit"], chance.realisations_of(limit, results)
    quantiles = summary["quantiles"]
    if chance.is_certain(limit):
        return f"{_median(limit)} in every realisation"
    low, high = (quantiles[level] for level in ("0.05", "0.95"))
    beyond = text.uncomputed_text(limit["quantity"])
    spread = text.range_text(low, high, unit, n, beyond)
    return f"median of {text.realisations_text(n)} {_median(limit)}{_median_margin(limit, results)}; {spread}"


def _median_margin(limit: dict[str, Any], results: dict[str, Any]) -> str:
    ends = limit["summary"].get("median_interval")
    if not ends or not any(map(text.is_number, ends)):
        return ""
    beyond = text.uncomputed_text(limit["quantity"])
    low, high = (text.quantile_text(end, limit["unit"], beyond) for end in ends)
    return f" ({low} to {high} with {text.plain_percent(chance.confidence_of(limit, results))} confidence)"


def _never(limit: dict[str, Any]) -> str:
    count = limit.get("never_reached") or 0
    if not count:
        return ""
    return f"in {text.realisations_text(count)} not within the time computed; counted as exceeding"


def _not_converged(limit: dict[str, Any]) -> str:
    count = limit.get("not_converged") or 0
    return f"{text.realisations_text(count)}, counted as exceeding" if count else ""


def _settlement(data: dict[str, Any], results: dict[str, Any]) -> dict[str, Any] | None:
    times, n = data.get("times") or [], data.get("realisations") or results["realisations"]
    if not times:
        return None
    ends = [stage["end"] for stage in data.get("stages") or []]
    every = max(1, len(times) // _TABLE_TIMES)
    kept = {*range(0, len(times), every), len(times) - 1}
    kept |= {min(range(len(times)), key=lambda i: abs(times[i] - end)) for end in ends}
    rows = [[text.trimmed_text(times[i]), *_settlement_cells(_at_time(data, i), n)] for i in sorted(kept)]
    every_one, final = results["realisations"], data.get("final") or {}
    if final.get("quantiles") and every_one != n:
        label = f"{text.trimmed_text(times[-1])}, all {text.realisations_text(every_one)}"
        rows.append([label, *_settlement_cells(final, every_one)])
    return {
        "station": data.get("station", "centreline"),
        "rows": rows,
        "total": text.realisations_text(n),
        "tails": n >= text.LEAST_FOR_TAILS,
        "diamonds": any(is_marked(limit, data) for limit in results["limits"]),
        "stages": [
            stage_view(number, stage) for number, stage in enumerate(data.get("stages") or [], start=1)
        ],
        "sentence": _settlement_sentence(data, ends, n),
    }


def _at_time(data: dict[str, Any], place: int) -> dict[str, Any]:
    quantiles = {level: values[place] for level, values in data["quantiles"].items()}
    return {"quantiles": quantiles, "mean": data["mean"][place]}


def _settlement_cells(row: dict[str, Any], n: int) -> list[str]:
    cells = [text.at_level(row["quantiles"], level, "m", n).removesuffix(" m") for level in _LEVELS]
    return [*cells, text.UNCOMPUTED if row.get("mean") is None else metres_text(row["mean"])]


def _settlement_sentence(data: dict[str, Any], ends: list[float], n: int) -> str:
    def at(place: int) -> str:
        median, low, high = (data["quantiles"][level][place] for level in ("0.5", "0.05", "0.95"))
        spread = f" ({text.range_text(low, high, 'm', n)})"
        if n < text.LEAST_FOR_TAILS or (text.is_number(low) and low == high):
            spread = ""
        return f"{text.quantile_text(median, 'm')}{spread}"

    times = data["times"]
    last = f"after {text.trimmed_text(times[-1])} years the median settlement is {at(-1)}"
    if not ends:
        return f"{last[0].upper()}{last[1:]}."
    built = min(range(len(times)), key=lambda i: abs(times[i] - max(ends)))
    return f"When the last stage ends the median settlement is {at(built)}; {last}."


def _stability(results: dict[str, Any]) -> list[dict[str, Any]]:
    """Arrange what there is of safety against slip and against bearing failure."""
    n = results["realisations"]
    return [
        words
        | {
            "rows": [_factor(row, n) for row in results[words["key"]]],
            "section": section_view(results) if words is _SLIP else None,
        }
        for words in (_SLIP, _BEARING)
        if results.get(words["key"])
    ]


def _load_text(row: dict[str, Any]) -> str:
    """Write the load of a stage, as far as there is any of each kind."""
    height, pressure = row.get("fill_height"), row.get("pressure")
    parts = [f"{text.number_text(height)} m of fill"] if height or not pressure else []
    return text.list_text(parts + ([f"{text.number_text(pressure)} kPa"] if pressure else []))


def _factor(row: dict[str, Any], n: int) -> list[str]:
    quantiles = row["quantiles"]
    return [
        row["stage"],
        text.trimmed_text(row["time"]),
        _load_text(row) if "pressure" in row else text.number_text(row.get("fill_height")),
        *(text.at_level(quantiles, level, "-", n) for level in _LEVELS),
        text.quantile_text(row.get("mean"), "-"),
        *slip_share(row),
    ]
