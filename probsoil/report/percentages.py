"""Percentages, intervals of a chance and their bounds in words.

Bounds are rounded outwards in their last digit, so that a printed bound is never better than the one
computed.
"""

import math
from decimal import ROUND_CEILING, ROUND_FLOOR, ROUND_HALF_UP, Decimal

from probsoil.report.numerals import MISSING, fixed_text, is_number, realisations_text

_MAX_DECIMALS = 9


def plain_percent(share: float) -> str:
    """Write a share that somebody chose, such as a target or a confidence, with no more digits than it has.

    Parameters
    ----------
    share : float, [-]
        From 0 to 1.

    Returns
    -------
    text : str
        For example ``5 %`` or ``0.1 %``.
    """
    exact = (Decimal(repr(float(share))) * 100).normalize()
    return f"{exact:f} %"


def percent_decimals(share: float) -> int:
    """Choose how many decimals a percentage needs: one, or more the nearer it is to 0 or 100 %.

    Parameters
    ----------
    share : float, [-]
        From 0 to 1.

    Returns
    -------
    decimals : int, [-]
        Decimals that leave two significant digits of the smaller of the share and the rest.
    """
    exact = Decimal(repr(float(share)))
    rest = min(exact, 1 - exact) * 100
    if rest <= 0:
        return 1
    return min(_MAX_DECIMALS, max(1, 1 - rest.adjusted()))


def percent_text(share: float | None, decimals: int | None = None) -> str:
    """Write a share as a percentage.

    Parameters
    ----------
    share : float or None, [-]
        From 0 to 1.
    decimals : int or None, [-]
        Decimals to keep; as `percent_decimals` if not told.

    Returns
    -------
    text : str
        For example ``12.4 %`` or ``0.034 %``.
    """
    if not is_number(share):
        return MISSING
    keep = percent_decimals(share) if decimals is None else decimals
    return f"{fixed_text(Decimal(repr(float(share))) * 100, keep, ROUND_HALF_UP)} %"


def probability_text(probability: float, n: int) -> str:
    """Write an exceedance probability; never as 0 % or 100 % when all it says is that none or all were seen.

    Parameters
    ----------
    probability : float, [-]
        Exceedance probability.
    n : int, [-]
        Realisations it was counted from.

    Returns
    -------
    text : str
        For example ``12.4 %``, ``none of 20,000 realisations`` or ``all of 20,000 realisations``.
    """
    if probability <= 0:
        return f"none of {realisations_text(n)}"
    if probability >= 1:
        return f"all of {realisations_text(n)}"
    return percent_text(probability)


def interval_text(probability: float, low: float, high: float) -> str:
    """Write the two-sided interval of an exceedance probability, with the decimals of the probability.

    An end that is neither 0 nor 100 % is never written as either, but with more decimals.

    Parameters
    ----------
    probability, low, high : float, [-]
        Exceedance probability and the two ends of its interval.

    Returns
    -------
    text : str
        For example ``11.9 to 12.9 %``, ``0 to 0.019 %`` where none exceeded, ``none`` where the ends are
        the same, since nothing is uncertain.
    """
    if low == high:
        return "none"
    if probability <= 0:
        return f"{_whole_or(low)} to {_bound_text(high, ROUND_CEILING)}"
    if probability >= 1:
        return f"{_bound_text(low, ROUND_FLOOR).removesuffix(' %')} to {_whole_or(high)} %"
    keep = percent_decimals(probability)
    return f"{_end_text(low, keep)} to {_end_text(high, keep)} %"


def bound_text(probability: float, bound: float) -> str:
    """Write the one-sided bound of a chance of which no case, or nothing but cases, was seen.

    Parameters
    ----------
    probability : float, [-]
        0 or 1.
    bound : float, [-]
        Upper bound of the chance of the outcome that was not seen.

    Returns
    -------
    text : str
        For example ``below 0.015 %`` where none and ``above 99.985 %`` where all exceeded, rounded outwards.
    """
    if probability <= 0:
        return f"below {_bound_text(bound, ROUND_CEILING)}"
    return f"above {_bound_text(1.0 - bound, ROUND_FLOOR)}"


def unseen_bound(n: int, confidence: float) -> float:
    """Give the one-sided upper bound of a chance of which no case was seen.

    As `probsoil.probability.unseen_bound`, without what that loads.

    Parameters
    ----------
    n : int, [-]
        Realisations, at least 1.
    confidence : float, [-]
        Confidence of the bound.

    Returns
    -------
    bound : float, [-]
        About 3 / n at 95 %.
    """
    return -math.expm1(math.log1p(-confidence) / n)


def odds_text(probability: float) -> str:
    """Write a probability as one chance in so many, to two digits.

    Parameters
    ----------
    probability : float, [-]
        Probability.

    Returns
    -------
    text : str
        For example ``about 1 in 8``; empty outside 0 to 1 and above one half, where it would not help.
    """
    if not 0 < probability <= 0.5:
        return ""
    one_in = Decimal(1) / Decimal(repr(float(probability)))
    step = max(0, one_in.adjusted() - 1)
    whole = int(one_in.scaleb(-step).quantize(Decimal(1), ROUND_HALF_UP)) * 10**step
    return f"about 1 in {whole:,d}"


def _bound_text(share: float, rounding: str) -> str:
    exact = Decimal(repr(float(share)))
    return f"{fixed_text(exact * 100, percent_decimals(share), rounding)} %"


def _whole_or(end: float) -> str:
    """Write an end of an interval that is 0 or 1 as it is."""
    return {0.0: "0", 1.0: "100"}.get(end) or percent_text(end).removesuffix(" %")


def _end_text(end: float, keep: int) -> str:
    """Write an end of an interval without its sign; more decimals where it would read 0 or 100 and is not."""
    if end in (0.0, 1.0):
        return _whole_or(end)
    text = fixed_text(Decimal(repr(float(end))) * 100, keep, ROUND_HALF_UP)
    return percent_text(end).removesuffix(" %") if Decimal(text) in (0, 100) else text
