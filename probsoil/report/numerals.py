"""Plain numbers and money in words.

Everything is rounded half up in decimal arithmetic, so that 12.45 % reads the same wherever it
is printed; bounds are rounded outwards in their last digit, so that a printed bound is never better
than the one computed.
"""

import math
from collections.abc import Sequence
from decimal import ROUND_CEILING, ROUND_FLOOR, ROUND_HALF_UP, Decimal
from typing import TypeGuard

MISSING = "not available"
_SUPERSCRIPT = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_LEAST_LENGTH = 0.001  # metres; lengths are written to the millimetre


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
    return fixed_text(exact, decimals, rounding)


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
    return f"{fixed_text(mantissa, significant - 1, ROUND_HALF_UP)} × 10{str(power).translate(_SUPERSCRIPT)}"


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
        For example ``0.412 m``, ``less than 0.001 m`` or ``1.37``.
    """
    if not is_number(value):
        return MISSING
    if unit == "m" and 0.0 < value < 0.5 * _LEAST_LENGTH:
        return f"less than {rounded(_LEAST_LENGTH, 3)} m"
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


def realisations_text(n: int) -> str:
    """Write a number of realisations.

    Parameters
    ----------
    n : int, [-]
        The number.

    Returns
    -------
    text : str
        For example ``20,000 realisations`` or ``1 realisation``.
    """
    return f"{count_text(n)} realisation{'' if n == 1 else 's'}"


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


def rough_money_text(amount: float | None, currency: str, *, up: bool = False, down: bool = False) -> str:
    """Write an amount of money to three figures and in whole units.

    Parameters
    ----------
    amount : float or None, [`currency`]
        Amount.
    currency : str
        Currency code or name; nothing for the number alone.
    up, down : bool
        Whether to round up or down instead of to the nearest.

    Returns
    -------
    text : str
        For example ``EUR 203,000``.
    """
    if not is_number(amount):
        return MISSING
    exact = Decimal(repr(float(amount)))
    mode = ROUND_CEILING if up else ROUND_FLOOR if down else ROUND_HALF_UP
    step = max(0, exact.adjusted() - 2)
    whole = exact.scaleb(-step).quantize(Decimal(1), mode).scaleb(step)
    return f"{currency} {fixed_text(whole, 0, mode)}".strip()


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


def fixed_text(exact: Decimal, decimals: int, rounding: str = ROUND_HALF_UP) -> str:
    """Write an exact number with a fixed count of decimals and comma-grouped thousands.

    Parameters
    ----------
    exact : Decimal, [any]
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
    text = f"{exact.quantize(Decimal(1).scaleb(-decimals), rounding):,f}"
    return text.lstrip("-") if not text.strip("-0.,") else text
