"""A pocket calculator for the formulas of a calculation sheet: it sees the digits shown and no others."""

import math
import re

DIGITS = 5
_NUMBER = re.compile(r"(?<![\w.])\d+(?:\.\d+)?")
_WORDS = {
    "ln": math.log,
    "log10": math.log10,
    "sqrt": math.sqrt,
    "exp": math.exp,
    "arctan": math.atan,
    "sin": lambda angle: math.sin(math.radians(angle)),
    "tan": lambda angle: math.tan(math.radians(angle)),
    "min": min,
    "max": max,
    "pi": math.pi,
}


def evaluated(text: str) -> float:
    """Return what the keys give."""
    for shown, key in (("·", "*"), ("−", "-"), ("^", "**"), ("π", "pi")):
        text = text.replace(shown, key)
    return float(eval(text, {"__builtins__": {}}, _WORDS))  # our own formulas


def half_digit(number: str, digits: int = DIGITS) -> float:
    """Return half a unit of the last digit that a number shown can carry; trailing zeros are dropped."""
    value = abs(float(number))
    return 0.5 * 10.0 ** (math.floor(math.log10(value)) - digits + 1) if value else 0.0


def allowance(text: str) -> float:
    """Return how far rounding of the numbers shown can move the result, to first order."""
    plain, total = evaluated(text), 0.0
    for found in _NUMBER.finditer(text):
        step = half_digit(found[0])
        moved = [
            evaluated(f"{text[: found.start()]}({float(found[0]) + side * step!r}){text[found.end() :]}")
            for side in (-1.0, 1.0)
        ]
        total += max(abs(one - plain) for one in moved)
    return total
