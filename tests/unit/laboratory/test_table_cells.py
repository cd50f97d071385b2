"""Headings and cells one at a time."""

import math
from pathlib import Path

import pytest

from probsoil.errors import ShapeError
from probsoil.laboratory.ags_tables import GREATEST_PARENTS
from probsoil.laboratory.cells import (
    CellError,
    factor_to_sheet,
    likely_unit,
    number_in,
    parts_of_heading,
    range_text,
    shown,
    text_in,
)
from probsoil.laboratory.collection import GREATEST_REMARKS, Collection
from probsoil.laboratory.columns import Column
from probsoil.laboratory.layout import LAYOUTS, layout_of
from probsoil.laboratory.reading import read_sheets
from probsoil.laboratory.sheets import OedometerSheet, Origin, Place

STRESS = Column(name="stress", meaning="", kind="pressure", unit="kPa", positive=True, typical=(20.0, 2e4))
STRAIN = Column(name="strain", meaning="", kind="number", unit="-", low=-0.6, high=0.6)
COUNT = Column(name="number", meaning="", kind="whole number")
NOTE = Column(name="note", meaning="", kind="text", required=False)


@pytest.mark.parametrize(
    ("text", "name", "unit"),
    [
        ("Stress (kPa)", "stress", "kPa"),
        (" axial_strain [ % ] ", "axial strain", "%"),
        ("void  ratio", "void ratio", None),
        ("stress ()", "stress", ""),
        ("stress (effective) (kPa)", "stress (effective)", "kPa"),
        ("stress (kPa) at end", "stress (kpa) at end", None),
        ("", "", None),
    ],
)
def test_parts_of_heading(text: str, name: str, unit: str | None) -> None:
    assert parts_of_heading(text) == (name, unit)


@pytest.mark.parametrize(
    ("column", "unit", "factor"),
    [
        (STRESS, "kPa", 1.0),
        (STRESS, "MPa", 1000.0),
        (STRESS, "bar", 100.0),
        (STRAIN, "%", 0.01),
        (STRAIN, "-", 1.0),
        (STRAIN, "", 1.0),
        (COUNT, None, 1.0),
        (COUNT, "-", 1.0),
    ],
)
def test_factor_to_sheet(column: Column, unit: str | None, factor: float) -> None:
    assert factor_to_sheet(column, unit) == pytest.approx(factor, rel=1e-15)


def test_unit_beyond_the_table_is_left_to_the_library_of_units() -> None:
    assert factor_to_sheet(STRESS, "atm") == pytest.approx(101.325, rel=1e-12)


def test_unit_of_a_strain_is_asked_for() -> None:
    with pytest.raises(CellError, match="the heading has no unit") as told:
        factor_to_sheet(STRAIN, None)
    assert told.value.allowed == "- or %"


def test_empty_cells() -> None:
    assert math.isnan(number_in("", Column(name="a", meaning="", kind="number", required=False), 1.0))
    assert text_in(None, NOTE) == ""
    assert shown(None) == ""
    with pytest.raises(CellError, match="the cell is empty"):
        number_in(None, STRESS, 1.0)


def test_numbers_of_text_and_workbooks() -> None:
    assert number_in("1e2", STRESS, 10.0) == 1000.0
    assert number_in(3, COUNT, 1.0) == 3.0
    assert (shown(7.0), shown(7.5), shown("x")) == ("7", "7.5", "x")
    for wrong in ("1,200", "inf", "--", "0x10"):
        with pytest.raises(CellError, match="not a number"):
            number_in(wrong, STRESS, 1.0)
    for wrong in (0.0, -1.0, math.inf, math.nan, "1e308"):
        with pytest.raises(CellError, match="the number is out of range"):
            number_in(wrong, STRESS, 10.0)


def test_likely_unit() -> None:
    assert likely_unit(STRESS, 0.8) == "MPa"
    assert likely_unit(STRESS, 1e-9) is None
    assert likely_unit(NOTE, 1.0) is None
    assert range_text(STRAIN) == "a number from -0.6 up to 0.6"


@pytest.mark.parametrize(
    ("name", "found"),
    [
        ("Oedometer_Increments", "oedometer increments"),
        ("site 3 VANE", "vane"),
        ("cone-2", "cone"),
        ("boreholes", None),
        ("vane and cone", None),
        ("oedometer", None),
    ],
)
def test_table_is_told_by_its_name(name: str, found: str | None) -> None:
    layout = layout_of(name)
    assert (layout.name if layout else None) == found


def test_every_layout_is_found_by_its_own_name_and_keys_are_columns() -> None:
    for layout in LAYOUTS:
        assert layout_of(layout.name) is layout
        assert set(layout.key) <= {column.name for column in layout.columns}


def test_remarks_have_an_end() -> None:
    collection = Collection()
    for number in range(GREATEST_REMARKS + 20):
        collection.remark(f"remark {number}")
    assert len(collection.remarks) == GREATEST_REMARKS + 1
    assert "further remarks are not listed" in collection.remarks


def test_too_many_parents_are_told_once(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("probsoil.laboratory.ags_tables.GREATEST_PARENTS", 2)
    assert GREATEST_PARENTS == 100_000
    rows = "".join(f'"DATA","C{number}","1"\r\n' for number in range(5))
    path = tmp_path / "site.ags"
    path.write_text(
        f'"GROUP","SCPG"\r\n"HEADING","LOCA_ID","SCPG_TESN"\r\n"UNIT","",""\r\n{rows}'
        '"GROUP","IVAN"\r\n"HEADING","LOCA_ID","IVAN_DPTH","IVAN_IVAN"\r\n"UNIT","","m","kPa"\r\n'
        '"DATA","BH1","3","12"\r\n',
        encoding="utf-8",
    )
    (remark,) = read_sheets(path, keep_good_rows=True).remarks
    assert "row 6, LOCA_ID: more than 2 rows of SCPG" in remark


def test_sheets_hold_columns_of_one_length() -> None:
    common = {
        "test": "A",
        "place": Place(hole="B", depth=1.0),
        "origin": Origin(file="f", row=2),
        "initial_void_ratio": 2.0,
        "initial_height": 20.0,
        "stress": [1.0, 2.0],
        "reported_cv": [1.0, 1.0],
    }
    with pytest.raises(ShapeError, match=r"void_ratio: \(1,\) is not \(2,\), that of stress"):
        OedometerSheet(**common, void_ratio=[1.0])  # type: ignore[arg-type]
    with pytest.raises(ShapeError, match="time_readings: 1 for 2 increments"):
        OedometerSheet(**common, void_ratio=[1.0, 0.9], time_readings=(None,))  # type: ignore[arg-type]
    assert str(Origin(file="f", row=2)) == "f, row 2"
