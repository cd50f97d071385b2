"""The results arranged for the page: every number already in words, nothing left to compute or to format."""

from typing import Any

from probsoil.report import text
from probsoil.report.curve import curve_view
from probsoil.report.drivers import drivers_view
from probsoil.report.record import draws_text, metres_text, record_view, share_text, stage_view

_MARKS = {"within target": "within", "beyond target": "beyond", "not conclusive": "open"}
_LEVELS = ("0.05", "0.25", "0.5", "0.75", "0.95")
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
        "overall": text.overall_sentence(results) if numbered else "The scenario sets no limits.",
        "limits": [_limit(number, limit, results) for number, limit in numbered],
        "settlement": _settlement(results.get("settlement") or {}),
        "curves": [view for view in curves if view is not None],
        "drivers": [view for number, limit in numbered if (view := drivers_view(number, limit, results))],
        "slip": [_slip(row) for row in results.get("slip") or []],
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
        "label": text.verdict_label(limit),
        "sentence": text.verdict_sentence(limit, results),
        "evidence": _evidence(limit, results),
        "quantity": text.quantity_text(limit),
        "allowed": f"{limit['sense']} {text.threshold_text(limit)}",
        "chance": text.probability_text(limit["probability"], text.realisations_of(limit, results)),
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
    n = text.count_text(text.realisations_of(limit, results))
    confidence = text.plain_percent(text.confidence_of(limit, results))
    rows = [
        (
            "Counted",
            f"{text.count_text(limit['exceeding'])} of {n} realisations exceed the limit; {confidence} "
            f"interval of the chance {text.interval_text(limit['probability'], *limit['interval'])}",
        ),
        ("Reliability index", _reliability(limit)),
        ("The quantity itself", _spread(limit)),
        ("Cost", _cost(limit, results.get("currency") or "")),
        ("Not reached", _never(limit)),
        ("Not converged", _not_converged(limit)),
        ("One-sided bound", _unseen(limit, confidence)),
        ("Estimated by", limit.get("method") or ""),
    ]
    return [(label, value) for label, value in rows if value and value != text.MISSING]


def _spread(limit: dict[str, Any]) -> str:
    quantiles, unit = (limit.get("summary") or {}).get("quantiles") or {}, limit.get("unit", "-")
    if not quantiles:
        return ""
    low, high = (quantiles.get(level) for level in ("0.05", "0.95"))
    beyond = text.uncomputed_text(limit["quantity"])
    return f"median {_median(limit)}; {text.range_text(low, high, unit, beyond)}"


def _cost(limit: dict[str, Any], currency: str) -> str:
    if limit.get("cost_if_exceeded") is None:
        return ""
    cost = text.money_text(limit["cost_if_exceeded"], currency)
    expected = text.money_text(limit.get("expected_cost"), currency)
    return f"{cost} if exceeded; times the chance, {expected}"


def _never(limit: dict[str, Any]) -> str:
    count = limit.get("never_reached") or 0
    if not count:
        return ""
    return f"in {text.count_text(count)} realisations not within the time computed; counted as exceeding"


def _not_converged(limit: dict[str, Any]) -> str:
    count = limit.get("not_converged") or 0
    return f"{text.count_text(count)} realisations, counted as exceeding" if count else ""


def _unseen(limit: dict[str, Any], confidence: str) -> str:
    bound = limit.get("unseen_bound")
    if bound is None:
        return ""
    return (
        f"none was seen, so with {confidence} confidence the chance is at most {text.upper_bound_text(bound)}"
    )


def _settlement(data: dict[str, Any]) -> dict[str, Any] | None:
    times = data.get("times") or []
    if not times:
        return None
    ends = [stage["end"] for stage in data.get("stages") or []]
    every = max(1, len(times) // _TABLE_TIMES)
    kept = {*range(0, len(times), every), len(times) - 1}
    kept |= {min(range(len(times)), key=lambda i: abs(times[i] - end)) for end in ends}
    columns = [data["quantiles"][level] for level in _LEVELS]
    rows = [
        [
            text.trimmed_text(times[i]),
            *(_metres(column[i]) for column in columns),
            _metres(data["mean"][i]),
        ]
        for i in sorted(kept)
    ]
    final = data.get("final") or {}
    if final.get("quantiles"):
        rows.append(
            [
                "final",
                *(_metres(final["quantiles"].get(level)) for level in _LEVELS),
                _metres(final.get("mean")),
            ]
        )
    return {
        "station": data.get("station", "centreline"),
        "rows": rows,
        "stages": [
            stage_view(number, stage) for number, stage in enumerate(data.get("stages") or [], start=1)
        ],
        "sentence": _settlement_sentence(data, ends),
    }


def _metres(value: float | None) -> str:
    return text.UNCOMPUTED if value is None else metres_text(value)


def _settlement_sentence(data: dict[str, Any], ends: list[float]) -> str:
    def at(place: int) -> str:
        median, low, high = (data["quantiles"][level][place] for level in ("0.5", "0.05", "0.95"))
        return f"{text.quantile_text(median, 'm')} ({text.range_text(low, high, 'm')})"

    times = data["times"]
    last = f"after {text.trimmed_text(times[-1])} years the median settlement is {at(-1)}"
    if not ends:
        return f"{last[0].upper()}{last[1:]}."
    built = min(range(len(times)), key=lambda i: abs(times[i] - max(ends)))
    return f"When the last stage ends the median settlement is {at(built)}; {last}."


def _slip(row: dict[str, Any]) -> list[str]:
    quantiles = row["quantiles"]
    return [
        row["stage"],
        text.trimmed_text(row["time"]),
        text.number_text(row.get("fill_height")),
        *(text.quantile_text(quantiles.get(level), "-") for level in _LEVELS),
        text.quantile_text(row.get("mean"), "-"),
        share_text(row.get("probability_below_one")),
    ]
