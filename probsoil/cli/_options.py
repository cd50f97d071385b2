"""Readers of option values, so that a mistake is answered in the words of this program."""

import re
from collections.abc import Callable
from enum import StrEnum
from typing import TypeVar

import typer

Choice = TypeVar("Choice", bound=StrEnum)


def whole_number(low: int, high: int | None = None) -> Callable[[str], int]:
    """Return a reader of whole numbers within a range.

    Parameters
    ----------
    low : int, [-]
        Least number.
    high : int or None, [-]
        Greatest number; None for no bound.

    Returns
    -------
    callable
        Reads text; raises `typer.BadParameter` where it is no such number.
    """
    allowed = f"from {low:,d} up" if high is None else f"from {low:,d} to {high:,d}"

    def read(text: str) -> int:
        try:
            number = int(text)
        except ValueError:
            raise typer.BadParameter(
                f"'{text}' is not a whole number; allowed: a whole number {allowed}"
            ) from None
        if number < low or (high is not None and number > high):
            side = "small" if number < low else "large"
            raise typer.BadParameter(f"{number:,d} is too {side}; allowed: a whole number {allowed}")
        return number

    return read


def one_of(choices: type[Choice]) -> Callable[[str], Choice]:
    """Return a reader of one word among several.

    Parameters
    ----------
    choices : type of StrEnum
        The words.

    Returns
    -------
    callable
        Reads text; raises `typer.BadParameter` where it is none of them.
    """

    def read(text: str) -> Choice:
        from difflib import get_close_matches

        words = [choice.value for choice in choices]
        if text in words:
            return choices(text)
        near = get_close_matches(text, words, n=1, cutoff=0.4)
        hint = f"; did you mean '{near[0]}'?" if near else ""
        raise typer.BadParameter(f"'{text}' is none of the choices; allowed: {', '.join(words)}{hint}")

    return read


def words_of(choices: type[StrEnum]) -> Callable[[], list[str]]:
    """Return what the shell completes an option with.

    Parameters
    ----------
    choices : type of StrEnum
        The words.

    Returns
    -------
    callable
        Returns the words.
    """
    return lambda: [choice.value for choice in choices]


def share(text: str) -> float:
    """Read a share between 0 and 100 %.

    Parameters
    ----------
    text : str
        Such as ``20%`` or ``0.2``.

    Returns
    -------
    share : float, [-]
        Above 0 and below 1.

    Raises
    ------
    typer.BadParameter
        Where it is no such share.
    """
    number = text.strip()
    try:
        value = float(number.removesuffix("%")) / (100.0 if number.endswith("%") else 1.0)
    except ValueError:
        raise typer.BadParameter(f"'{text}' is not a share; allowed: such as 20% or 0.2") from None
    if not 0.0 < value < 1.0:
        raise typer.BadParameter(f"{text} is out of range; allowed: above 0 and below 100 %, such as 20%")
    return value


_SECONDS = {"s": 1.0, "second": 1.0, "min": 60.0, "minute": 60.0, "h": 3600.0, "hour": 3600.0}


def duration(text: str) -> float:
    """Read a time with its unit.

    Parameters
    ----------
    text : str
        Such as ``5 minutes``.

    Returns
    -------
    seconds : float, [s]
        Above 0.

    Raises
    ------
    typer.BadParameter
        Where it is no such time.
    """
    found = re.fullmatch(r"\s*([0-9.]+)\s*([a-z]+)\s*", text)
    unit = None if found is None else found[2] if found[2] in _SECONDS else found[2].removesuffix("s")
    try:
        value = 0.0 if found is None or unit is None else float(found[1]) * _SECONDS[unit]
    except (KeyError, ValueError):
        value = 0.0
    if not 0.0 < value < float("inf"):
        raise typer.BadParameter(
            f"'{text}' is not a time; allowed: a number above 0 with seconds, minutes or hours, such as"
            ' "5 minutes"'
        )
    return value
