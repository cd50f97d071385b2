"""Headings and cells: what a written cell means, and what is wrong with it."""

import math
import re
from dataclasses import dataclass
from difflib import get_close_matches
from typing import cast

from probsoil.laboratory.columns import Column
from probsoil.units import Kind, UnitError, to_base, usual_units

_UNIT = re.compile(r"[(\[]([^()\[\]]*)[)\]]\s*")
_BARE = {"", "-", "1"}
_DECIMAL_COMMA = re.compile(r"[+-]?\d*,\d+")
Cell = str | float | bool | None


class CellError(ValueError):
    """A heading or a cell cannot be read.

    Attributes
    ----------
    message, allowed : str
        What is wrong, and the rule.
    hint : str or None
        Remedy.
    """

    def __init__(self, message: str, *, allowed: str, hint: str | None = None) -> None:
        super().__init__(message)
        self.message = message
        self.allowed = allowed
        self.hint = hint


@dataclass(frozen=True, slots=True, kw_only=True)
class Heading:
    """A heading as it was found.

    Attributes
    ----------
    position : int, [-]
        Column counted from 1.
    text : str
        As written.
    unit : str
        Unit as written.
    factor : float, [-]
        Turns a written number into the unit of the layout.
    """

    position: int
    text: str
    unit: str
    factor: float


def parts_of_heading(text: str) -> tuple[str, str | None]:
    """Return the name and the unit of a heading.

    Parameters
    ----------
    text : str
        Such as ``Stress (kPa)``.

    Returns
    -------
    name : str
        Small letters, single blanks.
    unit : str or None
        None where the heading has no brackets.
    """
    *_, match = (None, *_UNIT.finditer(text))
    if match is None or match.end() != len(text):
        return _plain(text), None
    return _plain(text[: match.start()]), match[1].strip()


def _plain(name: str) -> str:
    return " ".join(name.replace("_", " ").casefold().split())


def factor_to_sheet(column: Column, unit: str | None) -> float:
    """Return what turns a number in a written unit into the unit of the layout.

    Parameters
    ----------
    column : Column
        Column of the layout.
    unit : str or None
        Unit as written, None where there is none.

    Returns
    -------
    factor : float, [-]
        Exactly 1 where the units are the same.

    Raises
    ------
    CellError
        If the unit is missing, unknown or of another kind.
    """
    if column.kind in ("text", "whole number"):
        return _of_plain(column, unit)
    if unit is None or (not unit and column.kind != "number"):
        if column.bare:
            return 1.0
        raise CellError(
            "the heading has no unit",
            allowed=_units_text(column),
            hint=f'write "{column.heading}", or the unit the numbers are in',
        )
    if unit == column.unit:
        return 1.0
    return _size(column, unit) / _size(column, column.unit)


def number_in(cell: Cell, column: Column, factor: float) -> float:
    """Return the number of a cell in the unit of the layout.

    Parameters
    ----------
    cell : str, float, bool or None, [as written]
        Content of the cell.
    column : Column
        Column of the layout.
    factor : float, [-]
        Of the heading.

    Returns
    -------
    number : float, [unit of the layout]
        Not a number where the cell is empty and may be.

    Raises
    ------
    CellError
        If it is no number, or outside the range of the column.
    """
    if cell is None or cell == "":
        if column.required:
            raise CellError("the cell is empty", allowed="a number", hint="fill it in, or remove the row")
        return math.nan
    if isinstance(cell, bool) or not isinstance(cell, int | float):
        cell = _number_of_text(str(cell))
    number = cell * factor
    if not _fits(number, column):
        raise CellError("the number is out of range", allowed=range_text(column))
    return number


def text_in(cell: Cell, column: Column) -> str:
    """Return the words of a cell.

    Parameters
    ----------
    cell : str, float, bool or None, [as written]
        Content of the cell.
    column : Column
        Column of the layout.

    Returns
    -------
    text : str
        Trimmed; as the layout writes it where there are choices; empty where the cell is empty and may be.

    Raises
    ------
    CellError
        If it is empty and must not be, or none of the choices.
    """
    text = shown(cell).strip()
    if not text and column.required:
        raise CellError("the cell is empty", allowed="a name", hint="fill it in, or remove the row")
    if not text or not column.choices:
        return text
    by_plain = {choice.casefold(): choice for choice in column.choices}
    if text.casefold() in by_plain:
        return by_plain[text.casefold()]
    near = get_close_matches(text.casefold(), by_plain, n=1)
    raise CellError(
        "the word is none of the choices",
        allowed=", ".join(column.choices),
        hint=f'did you mean "{by_plain[near[0]]}"?' if near else None,
    )


def shown(cell: Cell) -> str:
    """Return a cell as a person reads it.

    Parameters
    ----------
    cell : str, float, bool or None, [as written]
        Content of the cell.

    Returns
    -------
    text : str
        Whole numbers without a decimal point, as a workbook shows them.
    """
    if cell is None:
        return ""
    if isinstance(cell, float) and cell.is_integer() and abs(cell) < 1e15:
        return str(int(cell))
    return str(cell)


def range_text(column: Column) -> str:
    """Return in words which numbers a cell may hold.

    Parameters
    ----------
    column : Column
        Column of the layout.

    Returns
    -------
    text : str
        With the unit of the layout.
    """
    if column.kind == "whole number":
        return "a whole number from 1 up"
    low = "above 0" if column.positive else "" if column.low is None else f"from {column.low:g}"
    high = "" if column.high is None else f"up to {column.high:g}"
    unit = "" if column.unit == "-" or not (low or high) else column.unit
    return " ".join(part for part in ("a number", low, high, unit) if part)


def likely_unit(column: Column, number: float) -> str | None:
    """Return the unit in which a number would be of the usual size.

    Parameters
    ----------
    column : Column
        Column of the layout, with a typical range.
    number : float, [as written]
        As it stands in the file.

    Returns
    -------
    unit : str or None
        None where no usual unit will do.
    """
    if column.typical is None or column.kind in ("text", "whole number"):
        return None
    low, high = column.typical
    kind = cast(Kind, column.kind)
    for unit in ("-", "%") if kind == "number" else usual_units(kind):
        if low <= abs(number) * factor_to_sheet(column, unit) <= high:
            return unit
    return None


def _of_plain(column: Column, unit: str | None) -> float:
    if unit is None or unit in _BARE:
        return 1.0
    raise CellError(
        f'the heading has a unit, "{unit}", where there is none',
        allowed=f'"{column.name}"',
        hint="take the brackets out of the heading",
    )


def _size(column: Column, unit: str) -> float:
    """Return how many base units are in one of a unit."""
    if column.kind == "number" and unit in _BARE:
        return 1.0
    try:
        return to_base(f"1 {unit}", cast(Kind, column.kind))
    except UnitError as error:
        raise CellError(error.message, allowed=_units_text(column), hint=error.hint) from None


def _units_text(column: Column) -> str:
    if column.kind == "number":
        return "- or %"
    units = dict.fromkeys((column.unit, *usual_units(cast(Kind, column.kind))))
    return f"a unit of {column.kind}: {', '.join(units)}, ..."


def _number_of_text(text: str) -> float:
    text = text.strip()
    try:
        number = math.nan if "_" in text else float(text)
    except ValueError:
        number = math.nan
    if math.isfinite(number):
        return number
    hint = None
    if _DECIMAL_COMMA.fullmatch(text):
        hint = "use a decimal point and no comma"
    elif re.match(r"\d{4}-\d\d-\d\d", text):
        hint = "this is a date: the workbook may have made one of the number; format the cell as a number"
    elif text[:1] in "<>#~":
        hint = "give the number alone; a bound is not a reading"
    raise CellError("this is not a number", allowed="a number with a decimal point, nothing else", hint=hint)


def _fits(number: float, column: Column) -> bool:
    if column.kind == "whole number":
        return 1.0 <= number < 1e9 and number == math.floor(number)
    return (
        math.isfinite(number)
        and (not column.positive or number > 0.0)
        and (column.low is None or number >= column.low)
        and (column.high is None or number <= column.high)
    )
