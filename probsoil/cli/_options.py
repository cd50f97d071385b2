"""Readers of option values, so that a mistake is answered in the words of this program."""

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
