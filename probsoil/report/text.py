"""What the report and the terminal call things: one place that turns limits and quantities into words."""

import re
from typing import Any

from probsoil.report.numerals import (
    MISSING,
    count_text,
    decimals_of,
    is_number,
    list_text,
    number_text,
    pair_text,
    realisations_text,
    rounded,
    trimmed_text,
    value_text,
    with_unit,
)
from probsoil.report.percentages import (
    interval_text,
    percent_decimals,
    percent_text,
    plain_percent,
    probability_text,
)

_QUANTITY_NAMES = {
    "settlement": "settlement",
    "differential_settlement": "differential settlement",
    "angular_distortion": "angular distortion",
    "slip_safety": "factor of safety against slip",
    "bearing_safety": "factor of safety against bearing failure",
    "degree_of_consolidation": "degree of consolidation",
    "time_to_consolidation": "time to consolidation",
    "added_fill": "volume of added fill",
}
UNCOMPUTED = "beyond the computation"  # of a quantile that falls on realisations without a finite value
_UNREACHED = "not reached"  # the same of a time
WITHHELD = "too few realisations"
LEAST_FOR_TAILS = 40
"""Realisations below which no 5 % and 95 % point is shown, [-]; the results withhold them as well."""

_TAILS = ("0.05", "0.95")
_ERRORS = ("grid", "circles", "bearing_grid")  # warnings whose share is an error of the computation
_POWER = re.compile(r"(?<![\w.])(\d+(?:\.\d+)?)e([+-]?\d+)\b")
_DEGREES = re.compile(r"(?<=\d )degree\b")
_SUPERSCRIPT = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")

__all__ = [
    "LEAST_FOR_TAILS",
    "MISSING",
    "UNCOMPUTED",
    "WITHHELD",
    "at_level",
    "count_text",
    "decimals_of",
    "described_text",
    "event_text",
    "exceeding_word",
    "interval_text",
    "is_number",
    "list_text",
    "number_text",
    "pair_text",
    "percent_decimals",
    "percent_text",
    "plain_percent",
    "probability_text",
    "quantile_text",
    "quantity_text",
    "range_text",
    "realisations_text",
    "rounded",
    "slope_text",
    "step_decimals",
    "threshold_text",
    "trimmed_text",
    "uncomputed_text",
    "value_text",
    "warning_share",
    "warning_text",
    "with_unit",
]


def described_text(words: str) -> str:
    """Write the numbers in a description of a distribution as they are written elsewhere.

    Parameters
    ----------
    words : str
        Description, as in the results.

    Returns
    -------
    text : str
        Powers of ten written out, ``2e-09`` as ``2 × 10⁻⁹``, and degrees in the plural.
    """

    def power(found: re.Match[str]) -> str:
        return f"{found[1]} × 10{str(int(found[2])).translate(_SUPERSCRIPT)}"

    return _DEGREES.sub("degrees", _POWER.sub(power, words))


def warning_text(row: dict[str, Any]) -> str:
    """Write a warning with the share it concerns and what that is a share of.

    Parameters
    ----------
    row : dict
        One entry of ``warnings`` of the results.

    Returns
    -------
    text : str
        For example ``Realisations in which the consolidation did not converge (0.12 % of all
        realisations).``
    """
    message = row["message"].rstrip(".")
    return f"{message[:1].upper()}{message[1:]}{warning_share(row)}."


def warning_share(row: dict[str, Any]) -> str:
    """Write how much a warning concerns, and of what.

    Parameters
    ----------
    row : dict
        One entry of ``warnings`` of the results.

    Returns
    -------
    text : str
        For example `` (0.12 % of all realisations)``, or of the grid and the circles
        `` (relative error, 1.3 % of the factor of safety)``; nothing where there is no share.
    """
    if row.get("share") is None:
        return ""
    of = f" of {row['share_of']}" if row.get("share_of") else ""
    error = "relative error, " if row["code"] in _ERRORS else ""
    return f" ({error}{percent_text(row['share'])}{of})"


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
        For example ``the settlement between 1.17 and 30 years``, with stations also where.
    """
    time = limit.get("time") or {}
    quantity = limit["quantity"]
    where = limit.get("place_text") or ""
    if quantity == "time_to_consolidation":
        degree = time.get("degree")
        aim = "the stated degree of" if degree is None else plain_percent(degree)
        return " ".join(part for part in (f"the time to {aim} consolidation", where) if part)
    name = f"the {_QUANTITY_NAMES.get(quantity, quantity.replace('_', ' '))}"
    if quantity in ("slip_safety", "bearing_safety") and "at" not in time:
        name, when = f"the least {_QUANTITY_NAMES[quantity]}", "over the stages"
    else:
        when = limit.get("time_text") or _when(time)
    # a load belongs to the quantity, a station to where and when it is looked at
    order = (name, where, when) if where.startswith("of ") else (name, when, where)
    return " ".join(part for part in order if part)


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


def at_level(quantiles: dict[str, Any], level: str, unit: str, n: int, beyond: str = UNCOMPUTED) -> str:
    """Write one quantile with its unit, or why there is none.

    Parameters
    ----------
    quantiles : dict
        Quantiles by level.
    level : str
        For example ``0.05``.
    unit : str
        Unit of the quantity, ``-`` for none.
    n : int, [-]
        Realisations behind it.
    beyond : str
        What to say where the quantile falls on values that are not finite.

    Returns
    -------
    text : str
        For example ``0.412 m``, ``beyond the computation`` or ``too few realisations``.
    """
    if level in _TAILS and n < LEAST_FOR_TAILS:
        return WITHHELD
    return quantile_text(quantiles.get(level), unit, beyond)


def range_text(low: float | None, high: float | None, unit: str, n: int, beyond: str = UNCOMPUTED) -> str:
    """Write the range from the 5 % to the 95 % point of a quantity.

    Parameters
    ----------
    low, high : float or None, [`unit`]
        The two points; None where one falls on values that are not finite.
    unit : str
        Their unit, ``-`` for none.
    n : int, [-]
        Realisations behind them.
    beyond : str
        What to say without a number.

    Returns
    -------
    text : str
        For example ``nine times in ten between 0.31 m and 0.52 m`` or
        ``5 % point 1.20 years, 95 % point not reached``.
    """
    if n < LEAST_FOR_TAILS:
        return (
            f"no range from the 5 % to the 95 % point, which {realisations_text(n)} cannot give: with fewer "
            f"than {LEAST_FOR_TAILS} it would rest on one or two of them"
        )
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
    return (
        f"{quantity_text(limit)} is {exceeding_word(limit)} {threshold_text(limit)}{slope_text(limit)}{since}"
    )


def slope_text(limit: dict[str, Any]) -> str:
    """Write the threshold of an angular distortion once more as a ratio.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.

    Returns
    -------
    text : str
        For example `` (1/500)``; nothing for other quantities.
    """
    if limit["quantity"] != "angular_distortion":
        return ""
    return f" (1/{trimmed_text(1.0 / limit['threshold'])})"


def _least_decimals(limit: dict[str, Any]) -> int:
    return 0 if limit.get("unit") == "years" else 2


def _when(time: dict[str, Any]) -> str:
    if is_number(time.get("at")):
        return f"at {trimmed_text(time['at'])} years"
    if time.get("between"):
        first, last = time["between"]
        return f"between {trimmed_text(first)} and {trimmed_text(last)} years"
    return ""
