"""Helpers of the checks."""

from collections.abc import Iterator, Sequence
from typing import Any

from probsoil.scenario.base import RESERVED_NAMES
from probsoil.scenario.slips import Slip


def repeated_names(tables: Sequence[Any], key: str, what: str) -> Iterator[Slip]:
    """Yield a slip for every name that was given before.

    Parameters
    ----------
    tables : sequence of Table
        Layers, stages or limits.
    key : str
        Key of the list in the file.
    what : str
        What one of them is called.

    Yields
    ------
    slip : Slip
        At the later of the two.
    """
    first: dict[str, int] = {}
    for position, table in enumerate(tables):
        name = getattr(table, "name", None)
        if not isinstance(name, str):
            continue
        if name in first:
            yield Slip(
                path=(key, position, "name"),
                message=f'{what} {first[name] + 1} is already named "{name}"',
                allowed=f"a different name for every {what}",
            )
        else:
            first[name] = position


def reserved_names(tables: Sequence[Any], key: str) -> Iterator[Slip]:
    """Yield a slip for every name that an address could confuse with a table.

    Parameters
    ----------
    tables : sequence of Table
        Layers or stages.
    key : str
        Key of the list in the file.

    Yields
    ------
    slip : Slip
        At the name.
    """
    for position, table in enumerate(tables):
        name = getattr(table, "name", None)
        if name in RESERVED_NAMES:
            yield Slip(
                path=(key, position, "name"),
                message=f'"{name}" is the name of a table of the scenario',
                allowed=f"any name but {', '.join(RESERVED_NAMES)}",
            )


def years_text(time: float, *, digits: int = 4) -> str:
    """Return a time in words.

    Parameters
    ----------
    time : float, [year]
        Time.
    digits : int, [-]
        Significant digits.

    Returns
    -------
    text : str
        Such as ``30 years`` or ``1 year``.
    """
    shown = f"{time:.{digits}g}"
    return f"{shown} year" if shown == "1" else f"{shown} years"


def exactly_one(table: Any, keys: dict[str, str], what: str) -> list[Slip]:
    """Return what is wrong where one of several keys is due.

    Parameters
    ----------
    table : Table
        Table that should have one of them.
    keys : dict of str to str
        Attribute and key in the file.
    what : str
        What the keys describe.

    Returns
    -------
    slips : list of Slip
        Paths start at the table.
    """
    given = [attribute for attribute in keys if getattr(table, attribute) is not None]
    names = ", ".join(keys.values())
    if not given:
        return [
            Slip(
                path=(), message=f"{what} is missing", allowed=f"one of {names}", wanting=tuple(keys.values())
            )
        ]
    written = " and ".join(keys[attribute] for attribute in given)
    return [
        Slip(
            path=(keys[attribute],),
            message=f"{what} is given more than once, as {written}",
            allowed=f"one of {names}",
            at_key=True,
        )
        for attribute in given[1:]
    ]
