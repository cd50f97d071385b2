"""Test sheets from CSV files, workbooks and AGS4 files: every mistake at once, each with its place."""

from collections.abc import Sequence
from os import PathLike
from pathlib import Path

from probsoil.errors import Fault, SheetError
from probsoil.laboratory.ags_tables import read_ags
from probsoil.laboratory.assembling import site_sheets
from probsoil.laboratory.checks import check_tests
from probsoil.laboratory.collection import Collection
from probsoil.laboratory.consistency import check_related_columns
from probsoil.laboratory.layout import LAYOUTS, layout_of
from probsoil.laboratory.relations import check_relations
from probsoil.laboratory.sheets import SiteSheets
from probsoil.laboratory.table_files import read_rows
from probsoil.laboratory.text_files import csv_rows, has_decimal_commas
from probsoil.laboratory.workbooks import read_workbook

TEXT_TABLES = (".csv", ".txt", ".tsv")
WORKBOOKS = (".xlsx", ".xlsm", ".xlsb", ".xls", ".ods")
AGS_FILES = (".ags",)
SOME_PATHS = str | PathLike[str] | Sequence[str | PathLike[str]]


def read_sheets(paths: SOME_PATHS, *, keep_good_rows: bool = False) -> SiteSheets:
    """Return the test sheets of one site.

    Parameters
    ----------
    paths : path, or sequence of paths
        CSV files, workbooks, AGS4 files, or folders of them, in the layout of `docs/laboratory_tables.md`.
        Together they make one site: a specimen may stand in one file, its readings in another.
    keep_good_rows : bool
        Whether rows without a mistake are used although others have one; the mistakes are then among the
        remarks of the answer.

    Returns
    -------
    sheets : SiteSheets
        In the order read, with remarks on what was let pass or not used.

    Raises
    ------
    SheetError
        If a file has mistakes, all of which are listed, unless good rows are to be kept; and in any case if a
        file cannot be read at all or nothing is left.
    """
    collection = Collection()
    for path in _as_paths(paths):
        _read_path(collection, path)
    for table in collection.tables.values():
        table.finish()
    check_relations(collection)
    check_tests(collection)
    check_related_columns(collection)
    faults = _all_faults(collection)
    if (faults and not keep_good_rows) or collection.fatal:
        raise SheetError(faults)
    for fault in faults:
        collection.remark(_as_remark(fault))
    sheets = site_sheets(collection)
    if not any((sheets.oedometers, sheets.triaxials, sheets.vanes, sheets.cones)):
        names = ", ".join(str(path) for path in _as_paths(paths))
        raise SheetError([*faults, Fault(file=names, message="no test is left to be read")])
    return sheets


def _as_paths(paths: SOME_PATHS) -> list[Path]:
    if isinstance(paths, str | PathLike):
        return [Path(paths)]
    return [Path(path) for path in paths]


def _read_path(collection: Collection, path: Path) -> None:
    if not path.is_dir():
        _read_file(collection, path)
        return
    files = sorted(
        file for file in path.iterdir() if file.is_file() and not file.name.startswith((".", "~$"))
    )
    readable = [file for file in files if _is_readable(file)]
    for file in files:
        if file not in readable:
            collection.remark(f"{file}: not a file that is read")
    if not readable:
        collection.unreadable(str(path), "the folder holds no test sheets", _names_hint())
    for file in readable:
        _read_file(collection, file)


def _is_readable(file: Path) -> bool:
    ending = file.suffix.lower()
    return ending in (*WORKBOOKS, *AGS_FILES) or (ending in TEXT_TABLES and layout_of(file.stem) is not None)


def _read_file(collection: Collection, path: Path) -> None:
    ending, file = path.suffix.lower(), str(path)
    layout = layout_of(path.stem)
    if ending in WORKBOOKS:
        read_workbook(collection, path, file)
    elif ending in AGS_FILES:
        read_ags(collection, path, file)
    elif ending not in TEXT_TABLES:
        collection.unreadable(
            file, "this is not a CSV file, a workbook or an AGS file", "give .csv, .xlsx or .ags"
        )
    elif layout is None:
        collection.unreadable(file, "the name of the file does not tell which table it is", _names_hint())
    else:
        commas = has_decimal_commas(path)
        if commas:
            collection.remark(f"{file}: commas in numbers are read as decimal points")
        read_rows(collection, layout, file, csv_rows(collection, path, file), decimal_commas=commas)


def _names_hint() -> str:
    names = ", ".join(layout.name.replace(" ", "_") for layout in LAYOUTS)
    return f"a name has one of these in it: {names}"


def _all_faults(collection: Collection) -> list[Fault]:
    order = {fault.file: place for place, fault in reversed(list(enumerate(collection.faults)))}
    faults = sorted(
        collection.faults, key=lambda fault: (order[fault.file], fault.line or 0, fault.column or 0)
    )
    if collection.uncounted:
        faults.append(
            Fault(
                file=faults[-1].file,
                message=f"and {collection.uncounted:,d} more mistakes that are not listed",
            )
        )
    return faults


def _as_remark(fault: Fault) -> str:
    place = fault.file if fault.line is None else f"{fault.file}, row {fault.line}"
    column = f", {fault.key}" if fault.key else ""
    given = f" (given: {fault.given})" if fault.given else ""
    return f"{place}{column}: {fault.message}{given}; left out"
