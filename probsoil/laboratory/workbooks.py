"""Workbooks: each sheet whose name tells a table is read as one."""

import zipfile
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

from probsoil.laboratory.cells import Cell
from probsoil.laboratory.collection import Collection
from probsoil.laboratory.layout import layout_of
from probsoil.laboratory.table_files import read_rows

if TYPE_CHECKING:
    import pandas as pd

GREATEST_SIZE = (
    200_000_000  # bytes of a workbook once unpacked; a longer table belongs in CSV, which is streamed
)


def read_workbook(collection: Collection, path: Path, file: str) -> None:
    """Read every sheet of a workbook that holds a table.

    Parameters
    ----------
    collection : Collection
        Where rows and mistakes go.
    path : Path
        The workbook.
    file : str
        As the user named it.
    """
    if not _is_bearable(collection, path, file):
        return
    sheets = _sheets_of(collection, path, file)
    found = False
    for name, frame in sheets.items():
        layout = layout_of(name)
        if layout is None:
            collection.remark(f'{file}: the sheet "{name}" is not one that is read')
        else:
            found = True
            read_rows(collection, layout, f"{file} [{name}]", _rows_of(frame))
    if sheets and not found:
        collection.unreadable(
            file,
            "no sheet has the name of a table",
            "name the sheets as the template does: probsoil template --excel",
        )


def _is_bearable(collection: Collection, path: Path, file: str) -> bool:
    try:
        size = path.stat().st_size
        if zipfile.is_zipfile(path):
            with zipfile.ZipFile(path) as packed:
                size = sum(member.file_size for member in packed.infolist())
    except FileNotFoundError:
        collection.unreadable(file, "there is no such file")
        return False
    except (OSError, zipfile.BadZipFile) as error:
        collection.unreadable(file, f"the workbook cannot be read ({error})")
        return False
    if size > GREATEST_SIZE:
        collection.unreadable(
            file,
            f"the workbook holds {size / 1e6:.0f} MB unpacked; up to {GREATEST_SIZE / 1e6:.0f} MB are read",
            "save its sheets as CSV files, which are read row by row",
        )
        return False
    return True


def _sheets_of(collection: Collection, path: Path, file: str) -> "dict[str, pd.DataFrame]":
    import pandas as pd
    from python_calamine import CalamineError

    try:
        return pd.read_excel(
            path, sheet_name=None, header=None, dtype=object, engine="calamine", na_filter=False
        )
    except (CalamineError, ValueError, OSError) as error:
        collection.unreadable(file, f"the workbook cannot be read ({error})", "save it again as .xlsx")
        return {}


def _rows_of(frame: "pd.DataFrame") -> Iterator[tuple[int, list[Cell]]]:
    for row, cells in enumerate(frame.itertuples(index=False, name=None), 1):
        yield row, [cell if isinstance(cell, str | int | float) else str(cell) for cell in cells]
