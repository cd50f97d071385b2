"""Rows of cells of one CSV file or sheet: headings are matched, rows are read, comments are passed over."""

from collections.abc import Iterable, Sequence
from difflib import get_close_matches

from probsoil.errors import Fault
from probsoil.laboratory.cells import Cell, CellError, Heading, factor_to_sheet, parts_of_heading, shown
from probsoil.laboratory.collection import Collection, RowReader
from probsoil.laboratory.columns import TableLayout
from probsoil.laboratory.tables import Source, TooManyRowsError

COMMENT = "#"


def read_rows(
    collection: Collection,
    layout: TableLayout,
    file: str,
    rows: Iterable[tuple[int, Sequence[Cell]]],
    *,
    decimal_commas: bool = False,
) -> None:
    """Read one table: the first row that is neither empty nor a comment holds the headings.

    Parameters
    ----------
    collection : Collection
        Where rows and mistakes go.
    layout : TableLayout
        Which table it is.
    file : str
        As the user named it.
    rows : iterable of tuple
        Place of each row, counted from 1, and its cells.
    decimal_commas : bool
        Whether a comma in a number is its decimal sign.
    """
    pointed = {column.name for column in layout.columns if decimal_commas and not column.is_text}
    reader: RowReader | None = None
    headings: dict[str, Heading] = {}
    for row, cells in rows:
        if _is_idle(cells):
            continue
        if reader is None:
            source = _source_of(collection, layout, file, row, cells)
            if source is None:
                collection.tables[layout.name].whole = False
                return
            reader = RowReader(collection, collection.tables[layout.name], source)
            headings = source.headings
            continue
        try:
            reader.take(
                row,
                {
                    name: (_cell(cells, under, commas=name in pointed), under)
                    for name, under in headings.items()
                },
            )
        except TooManyRowsError as full:
            collection.fault(full_table(file, full))
            return
    if reader is None:
        collection.fault(
            Fault(file=file, message="there are no headings", hint=f"begin with: {_all_headings(layout)}")
        )
        collection.tables[layout.name].whole = False


def full_table(file: str, full: TooManyRowsError) -> Fault:
    """Return the mistake of a table with more rows than one site can have.

    Parameters
    ----------
    file : str
        As the user named it.
    full : TooManyRowsError
        Which table, and from which row on.

    Returns
    -------
    fault : Fault
        With its place.
    """
    return Fault(
        file=file,
        line=full.row,
        message=f"the table {full.layout.name} has too many rows; what follows was not looked at",
        allowed=f"up to {full.row_limit:,d} rows of a kind in one reading",
        hint="give the files of one site only, or thin the readings",
    )


def _cell(cells: Sequence[Cell], heading: Heading, *, commas: bool) -> Cell:
    cell = cells[heading.position - 1] if heading.position <= len(cells) else None
    if not isinstance(cell, str):
        return cell
    return cell.strip().replace(",", ".") if commas else cell.strip()


def _is_idle(cells: Sequence[Cell]) -> bool:
    first = next((cell for cell in cells if cell not in (None, "")), None)
    return first is None or shown(first).lstrip().startswith(COMMENT) or not shown(first).strip()


def _source_of(
    collection: Collection, layout: TableLayout, file: str, row: int, cells: Sequence[Cell]
) -> Source | None:
    """Match headings with columns; None where a needed one is missing or has the wrong unit."""
    written = {
        position: (shown(cell), *parts_of_heading(shown(cell)))
        for position, cell in enumerate(cells, 1)
        if shown(cell).strip()
    }
    headings: dict[str, Heading] = {}
    others: list[tuple[int, str, str]] = []
    sound = True
    known = {column.name: column for column in layout.columns}
    for position, (text, name, unit) in written.items():
        place = Fault(file=file, line=row, column=position, key=text.strip(), message="")
        if name not in known:
            others.append((position, text.strip(), name))
        elif name in headings:
            sound = False
            collection.fault(
                _told(place, "the heading is there twice", hint="remove or rename one of the columns")
            )
        else:
            try:
                factor = factor_to_sheet(known[name], unit)
            except CellError as error:
                sound = False
                factor = 1.0
                collection.fault(_told(place, error.message, allowed=error.allowed, hint=error.hint))
            headings[name] = Heading(position=position, text=text.strip(), unit=unit or "", factor=factor)
    sound = _report_missing(collection, layout, file, row, headings, others) and sound
    for _, text, name in others:
        if name:
            collection.remark(f'{file}, row {row}: the column "{text}" is not one that is read')
    return Source(file=file, headings=headings) if sound else None


def _report_missing(
    collection: Collection,
    layout: TableLayout,
    file: str,
    row: int,
    headings: dict[str, Heading],
    others: list[tuple[int, str, str]],
) -> bool:
    missing = [column for column in layout.columns if column.required and column.name not in headings]
    for column in missing:
        near = get_close_matches(column.name, [name for _, _, name in others], n=1)
        hint = next((text for _, text, name in others if near and name == near[0]), None)
        collection.fault(
            Fault(
                file=file,
                line=row,
                key=column.heading,
                message="the heading is missing",
                allowed=f"needed in the table {layout.name}: {_all_headings(layout)}",
                hint=f'is it the column "{hint}"? write "{column.heading}"' if hint else None,
            )
        )
    return not missing


def _all_headings(layout: TableLayout) -> str:
    return ", ".join(column.heading for column in layout.columns if column.required)


def _told(place: Fault, message: str, *, allowed: str | None = None, hint: str | None = None) -> Fault:
    return Fault(
        file=place.file,
        line=place.line,
        column=place.column,
        key=place.key,
        message=message,
        given=place.key,
        allowed=allowed,
        hint=hint,
    )
