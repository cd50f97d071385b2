"""What was read, column by column, with the place of every row.

Rows are kept as plain numbers (8 bytes each), names as numbers into one list, so that memory does not grow
with the text of a file; a table holds at most `GREATEST_ROWS` rows.
"""

from array import array
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import Fault
from probsoil.laboratory.cells import Heading
from probsoil.laboratory.columns import TableLayout

GREATEST_ROWS = 1_000_000
EMPTY = 0  # the number of the empty name


class TooManyRowsError(Exception):
    """A table is full.

    Attributes
    ----------
    row : int, [-]
        First row that found no place.
    row_limit : int, [-]
        How many rows a table holds.
    layout : TableLayout
        Of the table.
    """

    def __init__(self, row: int, layout: TableLayout) -> None:
        super().__init__(f"{layout.name} is full at row {row}")
        self.row = row
        self.row_limit = GREATEST_ROWS
        self.layout = layout


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """A file, or a sheet of a workbook, that gives rows to one table.

    Attributes
    ----------
    file : str
        As the user named it, with the sheet of a workbook in brackets.
    headings : dict of str to Heading
        By name of the column in the layout.
    """

    file: str
    headings: dict[str, Heading]


class Names:
    """Every name that was read, each once, numbered from 1; the empty name is 0."""

    def __init__(self) -> None:
        self._numbers = {"": EMPTY}
        self._texts = [""]

    def number(self, text: str) -> int:
        """Return the number of a name.

        Parameters
        ----------
        text : str
            The name.

        Returns
        -------
        number : int, [-]
            The same for the same name.
        """
        number = self._numbers.setdefault(text, len(self._texts))
        if number == len(self._texts):
            self._texts.append(text)
        return number

    def text(self, number: int) -> str:
        """Return the name of a number.

        Parameters
        ----------
        number : int, [-]
            As `number` gave it.

        Returns
        -------
        text : str
            The name.
        """
        return self._texts[number]


class Table:
    """Rows of one layout from any number of sources.

    Attributes
    ----------
    layout : TableLayout
        Its columns.
    whole : bool
        False where a source of it could not be read at all, so that rows of other tables may miss theirs.
    refused : set of tuple of str
        First cell, and first two cells, of rows that were refused: rows that hang on them are no orphans.
    """

    def __init__(self, layout: TableLayout, names: Names) -> None:
        self.layout = layout
        self.whole = True
        self.refused: set[tuple[str, ...]] = set()
        self._names = names
        self._sources: list[Source] = []
        self._cells = {column.name: array("l" if column.is_text else "d") for column in layout.columns}
        self._row = array("q")
        self._source = array("l")
        self._kept: BoolArray = np.zeros(0, dtype=bool)

    def __len__(self) -> int:
        return len(self._row)

    def begin(self, source: Source) -> None:
        """Let rows of another source follow.

        Parameters
        ----------
        source : Source
            Where they come from.
        """
        self._sources.append(source)

    def add(self, row: int, cells: Mapping[str, float | str]) -> None:
        """Take a row of the latest source.

        Parameters
        ----------
        row : int, [-]
            Where it stands.
        cells : mapping of str to float or str, [units of the layout]
            By name of the column; what is left out is empty.

        Raises
        ------
        TooManyRowsError
            If the table is full.
        """
        if len(self._row) >= GREATEST_ROWS:
            raise TooManyRowsError(row, self.layout)
        for name, stored in self._cells.items():
            cell = cells.get(name, "" if stored.typecode == "l" else np.nan)
            stored.append(self._names.number(cell) if isinstance(cell, str) else cell)  # type: ignore[arg-type]
        self._row.append(row)
        self._source.append(len(self._sources) - 1)

    def finish(self) -> None:
        """Take no more rows; from now on rows are read and dropped."""
        self._kept = np.ones(len(self._row), dtype=bool)

    def kept(self) -> IntArray:
        """Return which rows are in use.

        Returns
        -------
        rows : ndarray, shape (n,), [-]
            Rising.
        """
        return np.flatnonzero(self._kept)

    def drop(self, rows: int | IntArray | list[int]) -> None:
        """Use rows no more.

        Parameters
        ----------
        rows : int, list of int, or ndarray, shape (n,), [-]
            Counted from 0 in the table.
        """
        self._kept[rows] = False

    def numbers(self, name: str) -> FloatArray:
        """Return a column of numbers.

        Parameters
        ----------
        name : str
            Column of the layout.

        Returns
        -------
        numbers : ndarray, shape (n_row,), [unit of the layout]
            All rows, dropped ones too.
        """
        return np.frombuffer(self._cells[name], dtype=np.float64) if len(self) else np.zeros(0)

    def codes(self, name: str) -> IntArray:
        """Return a column of names as their numbers.

        Parameters
        ----------
        name : str
            Column of the layout.

        Returns
        -------
        codes : ndarray, shape (n_row,), [-]
            All rows; 0 where empty.
        """
        return np.array(self._cells[name], dtype=np.int64)

    def text(self, name: str, row: int) -> str:
        """Return one name.

        Parameters
        ----------
        name : str
            Column of the layout.
        row : int, [-]
            Counted from 0 in the table.

        Returns
        -------
        text : str
            Empty where the cell is empty.
        """
        return self._names.text(int(self._cells[name][row]))

    def file(self, row: int) -> str:
        """Return the file a row stands in.

        Parameters
        ----------
        row : int, [-]
            Counted from 0 in the table.

        Returns
        -------
        file : str
            As the user named it.
        """
        return self._sources[self._source[row]].file

    def line(self, row: int) -> int:
        """Return where a row stands in its file.

        Parameters
        ----------
        row : int, [-]
            Counted from 0 in the table.

        Returns
        -------
        line : int, [-]
            Counted from 1, headings included.
        """
        return self._row[row]

    def written(self, name: str, row: int) -> tuple[float, str]:
        """Return a number as it was written.

        Parameters
        ----------
        name : str
            Column of the layout.
        row : int, [-]
            Counted from 0 in the table.

        Returns
        -------
        number : float, [`unit`]
            In the unit of the file.
        unit : str
            That unit.
        """
        heading = self._sources[self._source[row]].headings[name]
        return float(f"{self._cells[name][row] / heading.factor:.12g}"), heading.unit

    def fault(
        self, row: int, name: str, message: str, *, allowed: str | None = None, hint: str | None = None
    ) -> Fault:
        """Return a mistake in a cell.

        Parameters
        ----------
        row : int, [-]
            Counted from 0 in the table.
        name : str
            Column of the layout.
        message : str
            What is wrong.
        allowed : str or None
            The rule.
        hint : str or None
            Remedy.

        Returns
        -------
        fault : Fault
            With its place.
        """
        heading = self._sources[self._source[row]].headings.get(name)
        column = self.layout.column(name)
        given = None
        if heading is not None:
            given = (
                self.text(name, row)
                if column.is_text
                else f"{self.written(name, row)[0]:.10g} {heading.unit}"
            )
        return Fault(
            file=self.file(row),
            line=self.line(row),
            column=heading.position if heading else None,
            key=heading.text if heading else name,
            message=message,
            given=given.strip() if given else None,
            allowed=allowed,
            hint=hint,
        )
