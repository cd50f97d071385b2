"""Files of values that a scenario refers to, by a path relative to its own folder."""

import csv
from collections.abc import Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from pathlib import Path

from probsoil.scenario.slips import Slip, did_you_mean
from probsoil.units import Kind, UnitError, to_base

GREATEST_SIZE = 20_000_000  # bytes
GREATEST_COUNT = 100_000  # values

_FOLDER: ContextVar[Path] = ContextVar("folder", default=Path())
_LAYOUT = "comma-separated text in UTF-8 with a heading row and one value in each row below"


@contextmanager
def files_relative_to(folder: Path) -> Iterator[None]:
    """Take relative paths in a scenario from a folder for the time being.

    Parameters
    ----------
    folder : Path
        Of the scenario file.

    Yields
    ------
    None
        Nothing.
    """
    token = _FOLDER.set(folder)
    try:
        yield
    finally:
        _FOLDER.reset(token)


def read_values(file: str, column: str | None, kind: Kind) -> tuple[float, ...] | Slip:
    """Return the values in one column of a file.

    Parameters
    ----------
    file : str
        Path, relative to the folder of the scenario.
    column : str or None
        Heading of the column; None for the only one.
    kind : str
        Kind of quantity.

    Returns
    -------
    values : tuple of float or Slip, [base unit]
        Values in the order of the file; a slip that names file, row and column where they cannot be read.
    """
    rows = beside_scenario(file)
    return rows if isinstance(rows, Slip) else _column_values(file, rows, column, kind)


def beside_scenario(file: str, *, greatest_size: int = GREATEST_SIZE) -> list[list[str]] | Slip:
    """Return the rows of a file of comma-separated values.

    Parameters
    ----------
    file : str
        Path, relative to the folder of the scenario.
    greatest_size : int, [-]
        Bytes beyond which it is refused.

    Returns
    -------
    rows : list of list of str, or Slip
        Cells as they stand; a slip where the file cannot be read.
    """
    try:
        path = _FOLDER.get() / file
        if path.stat().st_size > greatest_size:
            return _slip(f"{file} is larger than {greatest_size} bytes", hint="is it a table of values?")
        with path.open(encoding="utf-8-sig", newline="") as stream:
            return list(csv.reader(stream))
    except FileNotFoundError:
        return _slip(f"there is no file {file}", allowed="a path relative to the folder of the scenario")
    except UnicodeDecodeError:
        return _slip(f"{file} is not in UTF-8", hint="save it as CSV in UTF-8")
    except csv.Error as error:
        return _slip(f"{file} cannot be read ({error})")
    except (OSError, ValueError) as error:
        return _slip(f"{file} cannot be read ({getattr(error, 'strerror', None) or error})")


def _column_values(
    file: str, rows: list[list[str]], column: str | None, kind: Kind
) -> tuple[float, ...] | Slip:
    heading = [cell.strip() for cell in rows[0]] if rows else []
    place = _place(file, heading, column)
    if isinstance(place, Slip):
        return place
    values: list[float] = []
    for number, row in enumerate(rows[1:], start=2):
        if not any(cell.strip() for cell in row):
            continue
        cell = row[place].strip() if place < len(row) else ""
        value = _value(cell, kind)
        if isinstance(value, str):
            return _slip(f'{file}, row {number}, column "{heading[place]}": {value}', allowed=_LAYOUT)
        values.append(value)
    if not 2 <= len(values) <= GREATEST_COUNT:
        return _slip(f"{file} has {len(values)} values", allowed=f"2 to {GREATEST_COUNT:,d}")
    return tuple(values)


def _place(file: str, heading: list[str], column: str | None) -> int | Slip:
    """Return which column is meant."""
    if not heading or any(_is_number(cell) for cell in heading):
        return _slip(f"{file} has no heading row", allowed=_LAYOUT)
    if column is None:
        if len(heading) == 1:
            return 0
        return _slip(f"{file} has {len(heading)} columns", allowed="column = one of " + ", ".join(heading))
    if column in heading:
        return heading.index(column)
    message = f'{file} has no column "{column}"'
    return Slip(
        path=("column",), message=message, allowed=", ".join(heading), hint=did_you_mean(column, heading)
    )


def _value(cell: str, kind: Kind) -> float | str:
    """Return the value of a cell, or what is wrong with it."""
    if not cell:
        return "there is no value"
    try:
        return to_base(float(cell) if _is_number(cell) else cell, kind)
    except UnitError as error:
        return f'"{cell}": {error.message}'


def _is_number(cell: str) -> bool:
    try:
        float(cell)
    except ValueError:
        return False
    return True


def _slip(message: str, *, allowed: str | None = None, hint: str | None = None) -> Slip:
    return Slip(path=("file",), message=message, allowed=allowed, hint=hint)
