"""Sheets of a workbook are the same tables as CSV files."""

import csv
import datetime as dt
import io
import zipfile
from pathlib import Path

import numpy as np
import pytest
import xlsxwriter
from sheet_samples import SITE, refused, write

from probsoil.errors import SheetError
from probsoil.laboratory import workbooks
from probsoil.laboratory.reading import read_sheets


def book(path: Path, tables: dict[str, list[list[object]]]) -> Path:
    with xlsxwriter.Workbook(path) as file:
        for name, rows in tables.items():
            sheet = file.add_worksheet(name)
            form = file.add_format({"num_format": "yyyy-mm-dd"})
            for place, row in enumerate(rows):
                for column, cell in enumerate(row):
                    if isinstance(cell, dt.date):
                        sheet.write_datetime(place, column, cell, form)
                    else:
                        sheet.write(place, column, cell)
    return path


def rows_of(text: str) -> list[list[object]]:
    def cell(written: str) -> object:
        try:
            return float(written)
        except ValueError:
            return written

    return [[cell(one) for one in row] for row in csv.reader(io.StringIO(text))]


def tables() -> dict[str, list[list[object]]]:
    return {name.replace("_", " ").title(): rows_of(text) for name, text in SITE.items()}


def test_workbook_and_csv_files_give_the_same_sheets(tmp_path: Path) -> None:
    from_book = read_sheets(book(tmp_path / "site.xlsx", tables()))
    from_text = read_sheets(write(tmp_path / "csv"))
    assert from_book.remarks == ()
    for name in ("stress", "void_ratio", "reported_cv"):
        np.testing.assert_array_equal(
            getattr(from_book.oedometers[0], name), getattr(from_text.oedometers[0], name)
        )
    assert from_book.oedometers[0].place == from_text.oedometers[0].place
    for name in ("axial_strain", "deviator", "pore_pressure_change"):
        np.testing.assert_array_equal(
            getattr(from_book.triaxials[0], name), getattr(from_text.triaxials[0], name)
        )
    np.testing.assert_array_equal(from_book.vanes[0].strength, from_text.vanes[0].strength)
    np.testing.assert_array_equal(from_book.cones[0].cone_resistance, from_text.cones[0].cone_resistance)
    assert str(from_book.oedometers[0].origin) == f"{tmp_path / 'site.xlsx'} [Oedometer Specimens], row 2"


def test_mistake_names_sheet_row_and_column(tmp_path: Path) -> None:
    spoilt = tables()
    spoilt["Vane"] = [["note"], [], *spoilt["Vane"]]
    spoilt["Vane"][0] = ["# ours"]
    spoilt["Vane"][4][2] = "soft"
    (fault,) = refused(book(tmp_path / "site.xlsx", spoilt))
    assert str(fault).startswith(f"{tmp_path / 'site.xlsx'} [Vane]:5:3: strength (kPa): this is not a number")


def test_number_that_became_a_date_is_told(tmp_path: Path) -> None:
    spoilt = tables()
    spoilt["Vane"][1][2] = dt.datetime(2024, 3, 12)
    (fault,) = refused(book(tmp_path / "site.xlsx", spoilt))
    assert fault.line == 2
    assert fault.hint is not None
    assert "the workbook may have made one of the number" in fault.hint


def test_test_with_a_number_for_a_name(tmp_path: Path) -> None:
    named = {"Vane": [["hole", "depth (m)", "strength (kPa)"], [7, 2, 11.5]]}
    assert read_sheets(book(tmp_path / "v.xlsx", named)).vanes[0].test == "7 vane"


def test_true_and_false_are_not_numbers(tmp_path: Path) -> None:
    named = {"Vane": [["hole", "depth (m)", "strength (kPa)"], ["A", 2, True]]}
    (fault,) = refused(book(tmp_path / "v.xlsx", named))
    assert fault.message == "this is not a number"


def test_sheet_of_another_name_is_told(tmp_path: Path) -> None:
    site = read_sheets(book(tmp_path / "v.xlsx", tables() | {"Cover": [["Laboratory report"]]}))
    assert site.remarks == (f'{tmp_path / "v.xlsx"}: the sheet "Cover" is not one that is read',)
    with pytest.raises(SheetError, match="no sheet has the name of a table"):
        read_sheets(book(tmp_path / "w.xlsx", {"Cover": [["Laboratory report"]]}))


def test_workbook_too_large_unpacked_is_refused_before_it_is_read(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "vane.xlsx"
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as packed:
        packed.writestr("xl/worksheets/sheet1.xml", b" " * 3_000_000)
    assert path.stat().st_size < 10_000
    monkeypatch.setattr(workbooks, "GREATEST_SIZE", 2_000_000)
    with pytest.raises(
        SheetError, match=r"holds 3 MB unpacked; up to 2 MB are read\n.*save its sheets as CSV"
    ):
        read_sheets(path)


def test_zip_that_is_no_workbook(tmp_path: Path) -> None:
    path = tmp_path / "vane.xlsx"
    with zipfile.ZipFile(path, "w") as packed:
        packed.writestr("hello.txt", "hello")
    with pytest.raises(SheetError, match=r"vane\.xlsx: the workbook cannot be read"):
        read_sheets(path)
