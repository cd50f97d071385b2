"""Plain numbers, percentages and intervals in words.

Everything is rounded half up in decimal arithmetic, so that 12.45 % reads the same wherever it
is printed; bounds are rounded outwards, so that a printed bound is never better than the one computed.
"""

import math
from collections.abc import Sequence
from decimal import ROUND_CEILING, ROUND_FLOOR, ROUND_HALF_UP, Decimal
from typing import TypeGuard

MISSING = "not available"
_SUPERSCRIPT = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_MAX_DECIMALS = 9


def is_number(value: object) -> TypeGuard[float]:
    """Tell whether a value read from a results file is a finite number.

    Parameters
    ----------
    value : object
        Anything a results file may hold.

    Returns
    -------
    finite : bool
        True for a finite int or float, False for None, text, infinity and not-a-number.
    """
    return isinstance(value, int | float) and not isinstance(value, bool) and math.isfinite(value)


def rounded(value: float, decimals: int, *, rounding: str = ROUND_HALF_UP) -> str:
    """Write a number with a fixed count of decimals and comma-grouped thousands.

    Parameters
    ----------
    value : float, [any]
        Number, in any unit.
    decimals : int, [-]
        Decimals to keep, zero or more.
    rounding : str
        Rounding mode of the `decimal` module; half up if not told.

    Returns
    -------
    text : str
        The number, ``-0`` written as ``0``.
    """
    exact = Decimal(repr(float(value)))
    return _fixed(exact, decimals, rounding)


def number_text(value: float | None, significant: int = 3) -> str:
    """Write a number with so many significant digits, in powers of ten when very small or large.

    Parameters
    ----------
    value : float or None, [any]
        Number, in any unit; None where the results hold none.
    significant : int, [-]
        Digits that count; digits before the decimal point are always kept.

    Returns
    -------
    text : str
        For example ``0.412``, ``1,234`` or ``1.20 × 10⁻⁹``.
    """
    if not is_number(value):
        return MISSING
    if value == 0:
        return "0"
    # The power of ten after rounding, so that 0.9996 has the decimals of 1.00 and not of 0.999.
    power = Decimal(f"{value:.{significant - 1}e}").adjusted()
    if -4 <= power < 7:
        return rounded(value, max(0, significant - 1 - power))
    mantissa = Decimal(repr(float(value))).scaleb(-power)
    return f"{_fixed(mantissa, significant - 1, ROUND_HALF_UP)} × 10{str(power).translate(_SUPERSCRIPT)}"


def with_unit(text: str, unit: str) -> str:
    """Put a unit after a number already written.

    Parameters
    ----------
    text : str
        The number in words or digits.
    unit : str
        Unit; ``-`` or nothing for a pure number.

    Returns
    -------
    text : str
        For example ``0.41 m``; the number alone where it has no unit or is missing.
    """
    return text if unit in ("", "-") or text == MISSING else f"{text} {unit}"


def trimmed_text(value: float | None) -> str:
    """Write a number with three significant digits and no idle zeros.

    Parameters
    ----------
    value : float or None, [any]
        Number, in any unit.

    Returns
    -------
    text : str
        For example ``30``, ``1.17`` or ``0.077``.
    """
    text = number_text(value)
    return text.rstrip("0").rstrip(".") if "." in text and "×" not in text else text


def value_text(value: float | None, unit: str) -> str:
    """Write a number of the results with its unit: lengths to the millimetre, the rest to 3 digits.

    Parameters
    ----------
    value : float or None, [`unit`]
        Number.
    unit : str
        Its unit, ``-`` for none.

    Returns
    -------
    text : str
        For example ``0.412 m`` or ``1.37``.
    """
    if not is_number(value):
        return MISSING
    return with_unit(rounded(value, 3) if unit == "m" else number_text(value), unit)


def count_text(count: int | None) -> str:
    """Write a whole number with comma-grouped thousands.

    Parameters
    ----------
    count : int or None, [-]
        A count.

    Returns
    -------
    text : str
        For example ``20,000``.
    """
    return MISSING if count is None else f"{count:,d}"


def list_text(items: Sequence[str]) -> str:
    """Join words as in a sentence.

    Parameters
    ----------
    items : sequence of str
        The words.

    Returns
    -------
    text : str
        For example ``a, b and c``.
    """
    return " and ".join([*([", ".join(items[:-1])] if len(items) > 1 else []), *items[-1:]])


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
    return f"{_fixed(Decimal(repr(float(share))) * 100, keep, ROUND_HALF_UP)} %"


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
        return f"none of {count_text(n)} realisations"
    if probability >= 1:
        return f"all of {count_text(n)} realisations"
    return percent_text(probability)


def interval_text(probability: float, low: float, high: float) -> str:
    """Write the interval of an exceedance probability, with the decimals of the probability.

    Parameters
    ----------
    probability, low, high : float, [-]
        Exceedance probability and the two ends of its interval.

    Returns
    -------
    text : str
        For example ``11.9 to 12.9 %``; ``below 0.019 %`` where none and ``above 99.98 %`` where all exceeded.
    """
    if probability <= 0:
        return f"below {_bound_text(high, ROUND_CEILING)}"
    if probability >= 1:
        return f"above {_bound_text(low, ROUND_FLOOR)}"
    keep = percent_decimals(probability)
    ends = [_fixed(Decimal(repr(float(end))) * 100, keep, ROUND_HALF_UP) for end in (low, high)]
    return f"{ends[0]} to {ends[1]} %"


def upper_bound_text(share: float) -> str:
    """Write an upper bound of a probability, rounded up.

    Parameters
    ----------
    share : float, [-]
        From 0 to 1.

    Returns
    -------
    text : str
        For example ``0.015 %``.
    """
    return _bound_text(share, ROUND_CEILING)


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


def decimals_of(value: float, most: int = 6) -> int:
    """Count the decimals a number was written with.

    Parameters
    ----------
    value : float, [any]
        Number, in any unit.
    most : int, [-]
        Cap.

    Returns
    -------
    decimals : int, [-]
        Decimals of the shortest decimal text that gives this float, at most `most`.
    """
    exponent = Decimal(repr(float(value))).normalize().as_tuple().exponent
    return min(most, max(0, -int(exponent)))


def money_text(amount: float | None, currency: str) -> str:
    """Write an amount of money in whole units.

    Parameters
    ----------
    amount : float or None, [`currency`]
        Amount.
    currency : str
        Currency code or name.

    Returns
    -------
    text : str
        For example ``EUR 900,000``.
    """
    return f"{currency} {rounded(amount, 0)}" if is_number(amount) else MISSING


def pair_text(ends: Sequence[float | None] | None, decimals: int = 2) -> str:
    """Write the two ends of an interval of a plain number.

    Parameters
    ----------
    ends : sequence of float or None, [any]
        Low and high end, in any unit; either, or the whole pair, may be missing.
    decimals : int, [-]
        Decimals to keep.

    Returns
    -------
    text : str
        For example ``1.13 to 1.18``, ``above 3.54`` or ``not available``.
    """
    low, high = ends if ends else (None, None)
    if low is not None and high is not None:
        return f"{rounded(low, decimals)} to {rounded(high, decimals)}"
    if low is not None:
        return f"above {rounded(low, decimals, rounding=ROUND_FLOOR)}"
    if high is not None:
        return f"below {rounded(high, decimals, rounding=ROUND_CEILING)}"
    return MISSING


def _fixed(exact: Decimal, decimals: int, rounding: str) -> str:
    text = f"{exact.quantize(Decimal(1).scaleb(-decimals), rounding):,f}"
    return text.lstrip("-") if not text.strip("-0.,") else text


def _bound_text(share: float, rounding: str) -> str:
    exact = Decimal(repr(float(share)))
    return f"{_fixed(exact * 100, percent_decimals(share), rounding)} %"
