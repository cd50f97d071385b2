"""Everything read so far and every mistake met, and the reader that fills both from rows of cells."""

from collections.abc import Mapping
from dataclasses import dataclass, field

from probsoil.errors import Fault
from probsoil.laboratory.cells import Cell, CellError, Heading, number_in, shown, text_in
from probsoil.laboratory.layout import LAYOUTS
from probsoil.laboratory.tables import Names, Source, Table

GREATEST_FAULTS = 200  # listed one by one; beyond, they are counted
GREATEST_REMARKS = 500
_LONGEST_GIVEN = 60


@dataclass(slots=True)
class Collection:
    """Everything read so far, and everything wrong with it.

    Attributes
    ----------
    names : Names
        All names.
    tables : dict of str to Table
        By name of the layout.
    faults : dict of Fault to None
        Mistakes in the order met, at most `GREATEST_FAULTS` of them.
    uncounted : int, [-]
        Further mistakes.
    fatal : bool
        Whether a file could not be read at all.
    remarks : dict of str to None
        What was let pass, in the order met.
    """

    names: Names = field(default_factory=Names)
    tables: dict[str, Table] = field(init=False)
    faults: dict[Fault, None] = field(default_factory=dict)
    uncounted: int = 0
    fatal: bool = False
    remarks: dict[str, None] = field(default_factory=dict)

    def __post_init__(self) -> None:
        self.tables = {layout.name: Table(layout, self.names) for layout in LAYOUTS}

    def fault(self, fault: Fault) -> None:
        """Note a mistake; the same one once.

        Parameters
        ----------
        fault : Fault
            With its place.
        """
        if fault not in self.faults and len(self.faults) >= GREATEST_FAULTS:
            self.uncounted += 1
        else:
            self.faults.setdefault(fault)

    def unreadable(self, file: str, message: str, hint: str | None = None) -> None:
        """Note that a file cannot be read at all.

        Parameters
        ----------
        file : str
            As the user named it.
        message : str
            Why.
        hint : str or None
            Remedy.
        """
        self.fatal = True
        self.fault(Fault(file=file, message=message, hint=hint))

    def remark(self, text: str) -> None:
        """Note what was let pass; the same remark once.

        Parameters
        ----------
        text : str
            With file and row.
        """
        if len(self.remarks) < GREATEST_REMARKS:
            self.remarks.setdefault(text)
        else:
            self.remarks.setdefault("further remarks are not listed")


class RowReader:
    """Turns rows of cells of one source into rows of its table, or into mistakes.

    Parameters
    ----------
    collection : Collection
        Where rows and mistakes go.
    table : Table
        Table of the source.
    source : Source
        Headings and file.
    """

    def __init__(self, collection: Collection, table: Table, source: Source) -> None:
        self._collection = collection
        self._table = table
        self._file = source.file
        table.begin(source)

    def take(self, row: int, cells: Mapping[str, tuple[Cell, Heading]]) -> None:
        """Read one row.

        Parameters
        ----------
        row : int, [-]
            Where it stands.
        cells : mapping of str to tuple
            By name of the column: the cell and the heading it stands under.

        Raises
        ------
        TooManyRowsError
            If the table is full.
        """
        read: dict[str, float | str] = {}
        for column in self._table.layout.columns:
            if column.name not in cells:
                continue
            cell, heading = cells[column.name]
            try:
                read[column.name] = (
                    text_in(cell, column) if column.is_text else number_in(cell, column, heading.factor)
                )
            except CellError as error:
                self._refuse(row, heading, cell, error)
        if len(read) == len(cells):
            self._table.add(row, read)
        else:
            head = [
                str(read[column.name]) for column in self._table.layout.columns[:2] if column.name in read
            ]
            self._table.refused |= {tuple(head[:1]), tuple(head)}

    def _refuse(self, row: int, heading: Heading, cell: Cell, error: CellError) -> None:
        self._collection.fault(
            Fault(
                file=self._file,
                line=row,
                column=heading.position,
                key=heading.text,
                message=error.message,
                given=f"{shown(cell)[:_LONGEST_GIVEN]} {heading.unit}".strip() or None,
                allowed=error.allowed,
                hint=error.hint,
            )
        )
