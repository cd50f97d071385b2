"""What the report and the terminal say of a limit: one place that turns numbers into words for both."""

from typing import Any

from probsoil.report.numerals import (
    MISSING,
    count_text,
    decimals_of,
    interval_text,
    is_number,
    list_text,
    money_text,
    number_text,
    odds_text,
    pair_text,
    percent_decimals,
    percent_text,
    plain_percent,
    probability_text,
    rounded,
    trimmed_text,
    upper_bound_text,
    value_text,
    with_unit,
)

_QUANTITY_NAMES = {
    "settlement": "settlement",
    "slip_safety": "factor of safety against slip",
    "degree_of_consolidation": "degree of consolidation",
    "time_to_consolidation": "time to consolidation",
}
_VERDICTS = {
    "within target": "Within the target",
    "beyond target": "Beyond the target",
    "not conclusive": "Not conclusive",
}

_SUMMARIES: dict[str | None, tuple[str, str]] = {
    "beyond target": ("is beyond its target chance", "are beyond their target chances"),
    "not conclusive": ("is not conclusive", "are not conclusive"),
    "within target": ("is within its target chance", "are within their target chances"),
    None: ("has no target", "have no target"),
}

UNCOMPUTED = "beyond the computation"  # of a quantile that falls on realisations without a finite value
_UNREACHED = "not reached"  # the same of a time

__all__ = [
    "MISSING",
    "UNCOMPUTED",
    "chance_text",
    "confidence_of",
    "count_text",
    "decimals_of",
    "event_text",
    "exceeding_word",
    "interval_text",
    "is_number",
    "list_text",
    "money_text",
    "number_text",
    "odds_text",
    "overall_sentence",
    "pair_text",
    "percent_decimals",
    "percent_text",
    "plain_percent",
    "probability_text",
    "quantile_text",
    "quantity_text",
    "range_text",
    "realisations_of",
    "rounded",
    "step_decimals",
    "threshold_text",
    "trimmed_text",
    "uncomputed_text",
    "upper_bound_text",
    "value_text",
    "verdict_label",
    "verdict_sentence",
    "with_unit",
]


def threshold_text(limit: dict[str, Any]) -> str:
    """Write the threshold of a limit with its unit.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.

    Returns
    -------
    text : str
        For example ``0.10 m``.
    """
    decimals = max(_least_decimals(limit), decimals_of(limit["threshold"]))
    return with_unit(rounded(limit["threshold"], decimals), limit.get("unit", "-"))


def step_decimals(limit: dict[str, Any]) -> int:
    """Choose the decimals that tell the steps of a limit's exceedance curve apart.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.

    Returns
    -------
    decimals : int, [-]
        Enough for the limit's own threshold and for the step of its curve.
    """
    step = (limit.get("curve") or {}).get("step")
    fine = decimals_of(step) if is_number(step) else 0
    return max(_least_decimals(limit), fine, decimals_of(limit["threshold"]))


def quantity_text(limit: dict[str, Any]) -> str:
    """Say what a limit is about, and when.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.

    Returns
    -------
    text : str
        For example ``the settlement between 1.17 and 30 years``.
    """
    time = limit.get("time") or {}
    quantity = limit["quantity"]
    if quantity == "time_to_consolidation":
        degree = time.get("degree")
        aim = "the stated degree of" if degree is None else plain_percent(degree)
        return f"the time to {aim} consolidation"
    name = f"the {_QUANTITY_NAMES.get(quantity, quantity.replace('_', ' '))}"
    if quantity == "slip_safety" and "at" not in time:
        return "the least factor of safety against slip over the stages"
    return f"{name} {limit.get('time_text') or _when(time)}".rstrip()


def uncomputed_text(quantity: str) -> str:
    """Say what a mean or a quantile without a number is: one that falls on values that are not finite.

    Parameters
    ----------
    quantity : str
        Quantity of a limit.

    Returns
    -------
    text : str
        ``not reached`` of a time, ``beyond the computation`` of anything else.
    """
    return _UNREACHED if quantity == "time_to_consolidation" else UNCOMPUTED


def quantile_text(value: float | None, unit: str, beyond: str = UNCOMPUTED) -> str:
    """Write a mean or a quantile with its unit.

    Parameters
    ----------
    value : float or None, [`unit`]
        Number; None where it falls on values that are not finite.
    unit : str
        Its unit, ``-`` for none.
    beyond : str
        What to say without a number.

    Returns
    -------
    text : str
        For example ``0.412 m`` or ``beyond the computation``.
    """
    return value_text(value, unit) if is_number(value) else beyond


def range_text(low: float | None, high: float | None, unit: str, beyond: str = UNCOMPUTED) -> str:
    """Write the range from the 5 % to the 95 % point of a quantity.

    Parameters
    ----------
    low, high : float or None, [`unit`]
        The two points; None where one falls on values that are not finite.
    unit : str
        Their unit, ``-`` for none.
    beyond : str
        What to say without a number.

    Returns
    -------
    text : str
        For example ``nine times in ten between 0.31 m and 0.52 m`` or
        ``5 % point 1.20 years, 95 % point not reached``.
    """
    first, last = (quantile_text(value, unit, beyond) for value in (low, high))
    if is_number(low) and is_number(high):
        return f"nine times in ten between {first} and {last}"
    return f"5 % point {first}, 95 % point {last}"


def exceeding_word(limit: dict[str, Any]) -> str:
    """Say on which side of the threshold the limit is exceeded.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.

    Returns
    -------
    text : str
        ``more than`` or ``less than``.
    """
    return "more than" if limit["sense"] == "not more than" else "less than"


def event_text(limit: dict[str, Any]) -> str:
    """Say in one clause what exceeding a limit means.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.

    Returns
    -------
    text : str
        For example ``the settlement at 30 years is more than 0.40 m``.
    """
    since = " from the start" if limit["quantity"] == "time_to_consolidation" else ""
    return f"{quantity_text(limit)} is {exceeding_word(limit)} {threshold_text(limit)}{since}"


def realisations_of(limit: dict[str, Any], results: dict[str, Any]) -> int:
    """Give the number of realisations a limit's probability was counted from.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    n : int, [-]
        Model runs of the limit, or the realisations of the whole assessment.
    """
    return int(limit.get("model_runs") or results["realisations"])


def chance_text(limit: dict[str, Any], results: dict[str, Any]) -> str:
    """Write the exceedance probability of a limit with its interval.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    text : str
        For example ``12.4 % (11.9 to 12.9 %)`` or
        ``none of 20,000 realisations (below 0.019 % with 95 % confidence)``.
    """
    probability, (low, high) = limit["probability"], limit["interval"]
    interval = interval_text(probability, low, high)
    if not 0 < probability < 1:
        interval += f" with {plain_percent(confidence_of(limit, results))} confidence"
    return f"{probability_text(probability, realisations_of(limit, results))} ({interval})"


def confidence_of(limit: dict[str, Any], results: dict[str, Any]) -> float:
    """Give the confidence of a limit's interval.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    confidence : float, [-]
        For example 0.95.
    """
    return float(limit.get("confidence") or results.get("confidence") or 0.95)


def verdict_label(limit: dict[str, Any]) -> str:
    """Name the verdict on a limit.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.

    Returns
    -------
    text : str
        ``Within the target``, ``Beyond the target``, ``Not conclusive`` or ``No target set``.
    """
    return _VERDICTS.get(limit.get("verdict") or "", "No target set")


def verdict_sentence(limit: dict[str, Any], results: dict[str, Any]) -> str:
    """Give the verdict on a limit in one sentence for a reader who knows no statistics.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    text : str
        For example ``Beyond the target of 5 %: the chance that the settlement at 30 years is more than
        0.40 m is 12.4 %, about 1 in 8.``
    """
    return f"{_verdict_head(limit)}: {_chance_clause(limit, results)}{_doubt(limit)}."


def overall_sentence(results: dict[str, Any]) -> str:
    """Sum up the verdicts of all limits in one or two sentences.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    text : str
        For example ``Of 3 limits, 1 is beyond its target chance and 2 are within.``
    """
    verdicts = [limit.get("verdict") for limit in results["limits"]]
    total = len(verdicts)
    parts = []
    for verdict, (one, many) in _SUMMARIES.items():
        count = verdicts.count(verdict)
        if count:
            parts.append(f"{count} {one if count == 1 else many}")
    if total == 1:
        return f"The one limit {parts[0].removeprefix('1 ')}."
    return f"Of the {total} limits, {list_text(parts)}."


def _least_decimals(limit: dict[str, Any]) -> int:
    return 0 if limit.get("unit") == "years" else 2


def _when(time: dict[str, Any]) -> str:
    if is_number(time.get("at")):
        return f"at {trimmed_text(time['at'])} years"
    if time.get("between"):
        first, last = time["between"]
        return f"between {trimmed_text(first)} and {trimmed_text(last)} years"
    return ""


def _verdict_head(limit: dict[str, Any]) -> str:
    label, target = verdict_label(limit), limit.get("target_probability")
    if target is None or limit.get("verdict") is None:
        return label
    return (
        f"{label} against a target of {plain_percent(target)}"
        if label == _VERDICTS["not conclusive"]
        else (f"{label} of {plain_percent(target)}")
    )


def _chance_clause(limit: dict[str, Any], results: dict[str, Any]) -> str:
    probability, (low, high) = limit["probability"], limit["interval"]
    if 0 < probability < 1:
        odds = odds_text(probability)
        return (
            f"the chance that {event_text(limit)} is {percent_text(probability)}{f', {odds}' if odds else ''}"
        )
    seen = probability_text(probability, realisations_of(limit, results))
    bound = interval_text(probability, low, high)
    confidence = plain_percent(confidence_of(limit, results))
    return f"{event_text(limit)} in {seen}, so the chance is {bound} with {confidence} confidence"


def _doubt(limit: dict[str, Any]) -> str:
    if limit.get("verdict") != "not conclusive":
        return ""
    return "; the interval lies on both sides of the target, so more realisations are needed to decide"
