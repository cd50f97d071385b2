"""What is said of a chance: its margin, the verdict on it and what exceeding costs, for page and terminal.

Where no realisation or every one exceeds, the one-sided bound is what is said; the two-sided interval
stands in tables only, as an interval.
"""

from typing import Any

from probsoil.report.numerals import (
    count_text,
    list_text,
    money_text,
    realisations_text,
    rough_money_text,
)
from probsoil.report.percentages import (
    bound_text,
    interval_text,
    odds_text,
    percent_text,
    plain_percent,
    probability_text,
    unseen_bound,
)
from probsoil.report.text import event_text, quantity_text, threshold_text

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
CERTAIN = "nothing is uncertain"


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


def is_certain(limit: dict[str, Any]) -> bool:
    """Tell whether a chance has no interval because nothing in the scenario is uncertain.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.

    Returns
    -------
    certain : bool
        True where both ends of the interval are the same, which no estimate has.
    """
    low, high = limit["interval"]
    return bool(low == high)


def margin_text(probability: float, interval: list[float], n: int, confidence: float) -> str:
    """Write how far a chance could lie from its estimate.

    Parameters
    ----------
    probability : float, [-]
        Exceedance probability.
    interval : list of float, [-]
        The two ends of its interval.
    n : int, [-]
        Realisations it was counted from.
    confidence : float, [-]
        Confidence of interval and bound.

    Returns
    -------
    text : str
        For example ``11.9 to 12.9 %``; the one-sided bound, ``below 0.015 %`` or ``above 99.985 %``, where
        none or all exceeded; ``nothing is uncertain`` where that is so.
    """
    if interval[0] == interval[1]:
        return CERTAIN
    if 0 < probability < 1:
        return interval_text(probability, *interval)
    return bound_text(probability, unseen_bound(n, confidence))


def limit_margin(limit: dict[str, Any], results: dict[str, Any]) -> str:
    """Write how far the chance of exceeding a limit could lie from its estimate.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    text : str
        As by `margin_text`.
    """
    n, confidence = realisations_of(limit, results), confidence_of(limit, results)
    return margin_text(limit["probability"], limit["interval"], n, confidence)


def chance_text(limit: dict[str, Any], results: dict[str, Any]) -> str:
    """Write the exceedance probability of a limit with its margin.

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
        ``none of 20,000 realisations (below 0.015 % with 95 % confidence)``.
    """
    probability, n = limit["probability"], realisations_of(limit, results)
    confidence, margin = confidence_of(limit, results), limit_margin(limit, results)
    if not 0 < probability < 1 and not is_certain(limit):
        margin += f" with {plain_percent(confidence)} confidence"
    return f"{probability_text(probability, n)} ({margin})"


def cost_text(limit: dict[str, Any], results: dict[str, Any]) -> str:
    """Say what exceeding a limit costs, and what that comes to times its chance.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    text : str
        For example ``EUR 900,000 if exceeded; times the chance, EUR 203,000 (198,000 to 208,000)``; empty
        without a cost.
    """
    cost, currency = limit.get("cost_if_exceeded"), str(results.get("currency") or "")
    if cost is None:
        return ""
    probability, n = limit["probability"], realisations_of(limit, results)
    whole = f"{money_text(cost, currency)} if exceeded"
    if is_certain(limit):
        return f"{whole}, which it is" if probability > 0 else f"{whole}, which it is not"
    if 0 < probability < 1:
        ends = limit.get("expected_cost_interval") or [cost * end for end in limit["interval"]]
        low, high = (rough_money_text(end, "") for end in ends)
        return (
            f"{whole}; times the chance, {rough_money_text(cost * probability, currency)} ({low} to {high})"
        )
    confidence = confidence_of(limit, results)
    bound, none = cost * unseen_bound(n, confidence), probability <= 0
    said = rough_money_text(bound if none else cost - bound, currency, up=none, down=not none)
    word = "below" if none else "above"
    return f"{whole}; times the chance, {word} {said} with {plain_percent(confidence)} confidence"


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
    probability, n = limit["probability"], realisations_of(limit, results)
    if is_certain(limit):
        says = event_text(limit)
        if probability <= 0:
            says = f"{quantity_text(limit)} is {limit['sense']} {threshold_text(limit)}"
        return f"nothing in this scenario is uncertain, and with its values {says}"
    if 0 < probability < 1:
        odds = odds_text(probability)
        return (
            f"the chance that {event_text(limit)} is {percent_text(probability)}{f', {odds}' if odds else ''}"
        )
    seen = probability_text(probability, n)
    confidence, bound = confidence_of(limit, results), limit_margin(limit, results)
    return (
        f"{event_text(limit)} in {seen}, so the chance is {bound} with {plain_percent(confidence)} confidence"
    )


def _doubt(limit: dict[str, Any]) -> str:
    if limit.get("verdict") != "not conclusive":
        return ""
    seen = 0 < limit["probability"] < 1
    where = "the interval lies on both sides of" if seen else "the bound lies beyond"
    return f"; {where} the target, so more realisations are needed to decide"


def counted_text(limit: dict[str, Any], results: dict[str, Any]) -> str:
    """Say how many realisations exceed a limit and what margin that leaves.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    text : str
        For example ``2,480 of 20,000 realisations exceed the limit; 95 % interval of the chance 11.9 to
        12.9 %``.
    """
    n, probability = realisations_of(limit, results), limit["probability"]
    confidence, margin = confidence_of(limit, results), limit_margin(limit, results)
    verb = "exceeds" if limit["exceeding"] == 1 else "exceed"
    said = f"{count_text(limit['exceeding'])} of {realisations_text(n)} {verb} the limit"
    if is_certain(limit):
        return f"{said}; every one is the same calculation"
    if 0 < probability < 1:
        return f"{said}; {plain_percent(confidence)} interval of the chance {margin}"
    return f"{said}; with {plain_percent(confidence)} confidence the chance is {margin}"
