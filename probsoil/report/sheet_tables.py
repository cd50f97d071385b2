"""Tables of a calculation sheet, the same for the terminal, the CSV and the page."""

import csv
import io
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from probsoil.assessment.worked import digits

Row = Mapping[str, Any]
_NOTHING = "-"
PLAIN = "plain"
"""Format of a number of any size: five significant digits without idle zeros."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column.

    Attributes
    ----------
    heading : str
        With the unit in brackets.
    key : str
        Key of the row, dots between levels; empty for the whole row.
    form : str
        Format of its numbers for reading; empty for text.
    """

    heading: str
    key: str
    form: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class SheetTable:
    """One table.

    Attributes
    ----------
    name : str
        Of its section in the CSV.
    title : str
        For the reader.
    columns : tuple of Column
        In order.
    rows : tuple of mapping
        Rows as in the JSON.
    brief : bool
        Whether the terminal shows it too.
    """

    name: str
    title: str
    columns: tuple[Column, ...]
    rows: tuple[Row, ...]
    brief: bool = True

    @property
    def headings(self) -> tuple[str, ...]:
        """Headings of the columns."""
        return tuple(column.heading for column in self.columns)

    def values(self) -> list[list[Any]]:
        """Return the cells as they are.

        Returns
        -------
        rows : list of list
            None where a number does not apply; lists of words joined.
        """
        return [[_value(row, column.key) for column in self.columns] for row in self.rows]

    def texts(self) -> list[list[str]]:
        """Return the cells written out.

        Returns
        -------
        rows : list of list of str
            Numbers in the format of their column, a dash where there is none.
        """
        forms = [column.form for column in self.columns]
        return [[_text(cell, form) for cell, form in zip(row, forms, strict=True)] for row in self.values()]


def _value(row: Row, key: str) -> Any:
    value: Any = row
    for part in key.split("/"):
        value = value.get(part) if isinstance(value, Mapping) else None
    return ", ".join(value) if isinstance(value, list | tuple) else value


def _text(value: Any, form: str) -> str:
    if isinstance(value, int | float) and form == PLAIN:
        return digits(value)
    if isinstance(value, int | float) and form:
        text = format(value, form)
        return text.lstrip("-") if not text.strip("-0.") else text
    return _NOTHING if value is None else str(value)


def sheet_table(
    name: str,
    title: str,
    rows: Iterable[Row],
    columns: Iterable[Sequence[str]],
    *,
    brief: bool = True,
) -> SheetTable:
    """Return a table.

    Parameters
    ----------
    name, title : str
        Of its section in the CSV, and for the reader.
    rows : iterable of mapping
        Rows as in the JSON.
    columns : iterable of sequence of str
        Heading, key and, for numbers, format.
    brief : bool
        Whether the terminal shows it too.

    Returns
    -------
    table : SheetTable
        Rows and columns.
    """
    made = tuple(Column(heading=one[0], key=one[1], form="".join(one[2:])) for one in columns)
    return SheetTable(name=name, title=title, columns=made, rows=tuple(rows), brief=brief)


def tables_csv(tables: Iterable[SheetTable]) -> str:
    """Return tables as comma-separated values.

    Parameters
    ----------
    tables : iterable of SheetTable
        In order.

    Returns
    -------
    text : str
        One section per table: its name alone on a line, a line of headings with units, the rows, an
        empty line. Numbers are not rounded.
    """
    page = io.StringIO()
    writer = csv.writer(page, lineterminator="\n")
    for table in tables:
        writer.writerow([table.name])
        writer.writerow(table.headings)
        writer.writerows(table.values())
        page.write("\n")
    return page.getvalue()
