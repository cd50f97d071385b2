"""A formula, and the same formula with the numbers of one row put in."""

import math
import re
from collections.abc import Mapping
from dataclasses import asdict, dataclass
from typing import Any

DIGITS = 5
"""Significant digits of a number put into a formula, [-]."""

Symbol = tuple[float, str, str]  # value, meaning, unit


@dataclass(frozen=True, slots=True, kw_only=True)
class Worked:
    """One line of a calculation.

    Attributes
    ----------
    topic, name : str
        What it belongs to, and what is worked out.
    row : str
        Whose numbers are put in.
    formula, numbers : str
        In symbols, and its right-hand side with the numbers in their places.
    result : float, [`unit`]
        As the program computed it, not as the numbers shown would give it.
    unit : str
        Unit of the result, ``-`` for none.
    symbols : tuple of dict
        Symbol, meaning, unit and value of every number put in.
    """

    topic: str
    name: str
    row: str
    formula: str
    numbers: str
    result: float
    unit: str
    symbols: tuple[dict[str, Any], ...]

    def to_dict(self) -> dict[str, Any]:
        """Return the line for JSON.

        Returns
        -------
        record : dict
            The attributes by name.
        """
        return {**asdict(self), "symbols": list(self.symbols), "written": digits(self.result)}


def worked(
    topic: str, name: str, formula: str, result: tuple[float, str], symbols: Mapping[str, Symbol], *, row: str
) -> Worked:
    """Put numbers into a formula.

    Parameters
    ----------
    topic, name : str
        What it belongs to, and what is worked out.
    formula : str
        ``left = right`` in the symbols.
    result : tuple of float and str, [unit given with it]
        Number that the program computed, and its unit.
    symbols : mapping of str to tuple
        Value, meaning and unit of every symbol on the right.
    row : str
        Whose numbers they are.

    Returns
    -------
    line : Worked
        Formula and numbers.
    """
    right = formula.partition(" = ")[2]
    names = "|".join(re.escape(one) for one in sorted(symbols, key=len, reverse=True))
    pattern = re.compile(rf"(?<![\w'∞])(?:{names})(?![\w'∞])")

    def number(found: re.Match[str]) -> str:
        text = digits(symbols[found[0]][0])
        return f"({text})" if text.startswith("−") or "^" in text else text

    return Worked(
        topic=topic,
        name=name,
        row=row,
        formula=formula,
        numbers=pattern.sub(number, right),
        result=float(result[0]),
        unit=result[1],
        symbols=tuple(
            {"symbol": symbol, "meaning": meaning, "unit": unit, "value": float(value)}
            for symbol, (value, meaning, unit) in symbols.items()
        ),
    )


def digits(value: float, significant: int = DIGITS) -> str:
    """Write a number as it is typed into a pocket calculator.

    Parameters
    ----------
    value : float, [any]
        Number, in any unit.
    significant : int, [-]
        Digits that count.

    Returns
    -------
    text : str
        Without idle zeros; powers of ten as ``1.2 · 10^(−9)``.
    """
    if value == 0.0 or not math.isfinite(value):
        return "0" if value == 0.0 else str(value)
    mantissa, _, power = f"{abs(value):.{significant - 1}e}".partition("e")
    sign, exponent = "−" if value < 0.0 else "", int(power)
    if -4 <= exponent < 7:
        text = f"{abs(value):.{max(significant - 1 - exponent, 0)}f}"
        return sign + (text.rstrip("0").rstrip(".") if "." in text else text)
    shown = mantissa.rstrip("0").rstrip(".")
    return f"{sign}{shown} · 10^({'−' if exponent < 0 else ''}{abs(exponent)})"
