"""Sheets from CSV files: what is read, in which unit, and what is tolerated."""

from pathlib import Path

import numpy as np
import pytest
from sheet_samples import SITE, kept, refused, the_fault, write

from probsoil.errors import SheetError
from probsoil.laboratory.reading import read_sheets


def test_site_is_read_with_places_and_ground(tmp_path: Path) -> None:
    site = read_sheets(write(tmp_path))
    (oedometer,), (triaxial,), (vane,), (cone,) = site.oedometers, site.triaxials, site.vanes, site.cones
    assert site.remarks == ()
    assert (oedometer.test, oedometer.place.hole, oedometer.place.depth) == ("O1", "BH1", 3.4)
    assert (oedometer.place.x, oedometer.place.y, oedometer.place.stratum) == (10.0, 20.0, "soft clay")
    assert (oedometer.origin.file, oedometer.origin.row) == (str(tmp_path / "oedometer_specimens.csv"), 2)
    assert oedometer.stress.tolist() == [12.5, 25.0, 50.0, 100.0, 25.0]
    assert oedometer.void_ratio.tolist() == [2.08, 2.05, 1.96, 1.74, 1.79]
    np.testing.assert_array_equal(oedometer.reported_cv, [np.nan, 6.0, 1.2, 1.0, np.nan])
    assert [bool(one) for one in oedometer.time_readings] == [False, False, True, False, False]
    timed = oedometer.time_readings[2]
    assert timed is not None
    assert timed.time.tolist() == [0.25, 15.0, 1440.0]
    assert timed.compression.tolist() == [0.1, 0.3, 0.58]
    assert oedometer.two_way
    assert oedometer.reading_sd == 0.0
    assert oedometer.reported_preconsolidation is None
    assert (triaxial.kind, triaxial.axial_stress, triaxial.radial_stress) == ("CAUC", 40.0, 25.0)
    np.testing.assert_allclose(triaxial.axial_strain, [0.0, 0.005, 0.04], rtol=1e-15)
    assert np.isnan(triaxial.volumetric_strain).all()
    assert (vane.test, vane.corrected) == ("BH1 vane", False)
    assert vane.plasticity_index.tolist() == [45.0, 45.0]  # the index test within 1 m
    assert (cone.test, cone.area_ratio, cone.place.depth) == ("C1 cone", None, 1.0)
    assert cone.cone_resistance.tolist() == [250.0, 260.0]


@pytest.mark.parametrize(
    ("old", "new", "factor"),
    [
        ("stress (kPa)", "stress (MPa)", 1000.0),
        ("stress (kPa)", "Stress [kN/m2]", 1.0),
        ("stress (kPa)", "stress (psi)", 6.894757293168361),
        ("stress (kPa)", "stress (kgf / cm2)", 98.0665),
    ],
)
def test_unit_is_that_of_the_heading(tmp_path: Path, old: str, new: str, factor: float) -> None:
    text = SITE["oedometer_increments"].replace(old, new)
    for written in ("12.5", "25", "50", "100"):
        text = text.replace(f",{written},", f",{float(written) / factor!r},")
    site = read_sheets(write(tmp_path, oedometer_increments=text))
    np.testing.assert_allclose(site.oedometers[0].stress, [12.5, 25.0, 50.0, 100.0, 25.0], rtol=1e-12)


def test_other_units_of_time_and_length(tmp_path: Path) -> None:
    folder = write(
        tmp_path,
        oedometer_readings="test,increment,time (s),compression (cm)\nO1,3,15,0.01\nO1,3,900,0.03\n",
        oedometer_specimens=(
            "initial height (mm)\nO1,BH1,3.4,2.1,20",
            "initial height (in)\nO1,BH1,3.4,2.1,0.75",
        ),
    )
    (sheet,) = read_sheets(folder).oedometers
    timed = sheet.time_readings[2]
    assert timed is not None
    np.testing.assert_allclose(timed.time, [0.25, 15.0], rtol=1e-12)
    np.testing.assert_allclose(timed.compression, [0.1, 0.3], rtol=1e-12)
    assert sheet.initial_height == pytest.approx(19.05, rel=1e-12)


@pytest.mark.parametrize("delimiter", [";", "\t"])
def test_semicolons_and_tabs_part_cells_too(tmp_path: Path, delimiter: str) -> None:
    text = SITE["vane"].replace(",", delimiter)
    assert read_sheets(write(tmp_path, vane=text)).vanes[0].strength.tolist() == [12.0, 13.5]


def test_comments_blank_rows_marks_and_line_ends_are_passed_over(tmp_path: Path) -> None:
    text = "\ufeff# ours\n\n" + SITE["vane"].replace("BH1,4", '# a note, "quoted"\n,,,\nBH1,4')
    folder = write(tmp_path, vane=text.replace("\n", "\r\n"))
    (vane,) = read_sheets(folder).vanes
    assert vane.depth.tolist() == [3.0, 4.0]
    assert vane.origin.row == 4


def test_cell_in_quotes_may_hold_a_line_break_and_rows_are_counted_on(tmp_path: Path) -> None:
    text = 'hole,depth (m),strength (kPa),remarks\nBH1,3,12,"two\nlines"\nBH1,4,x,\n'
    fault = next(fault for fault in refused(write(tmp_path, vane=text)))
    assert (fault.line, fault.column, fault.key) == (4, 3, "strength (kPa)")


def test_column_that_is_not_read_is_told(tmp_path: Path) -> None:
    text = SITE["vane"].replace("corrected", "driller").replace(",no", ",Ann")
    site = read_sheets(write(tmp_path, vane=text))
    assert any('row 1: the column "driller" is not one that is read' in remark for remark in site.remarks)
    assert site.vanes[0].corrected is None


def test_rows_of_several_tests_may_be_mixed(tmp_path: Path) -> None:
    text = "hole,depth (m),strength (kPa)\nBH1,3,12\nC1,2,9\nBH1,2,10\nC1,3,11\n"
    first, second = read_sheets(write(tmp_path, vane=text)).vanes
    assert (first.test, first.depth.tolist(), first.place.depth) == ("BH1 vane", [2.0, 3.0], 2.0)
    assert (second.test, second.strength.tolist()) == ("C1 vane", [9.0, 11.0])


def test_several_profiles_of_a_hole_have_names(tmp_path: Path) -> None:
    text = "hole,test,depth (m),cone resistance (kPa),area ratio\n"
    text += "C1,C1 a,1,200,0.8\nC1,C1 b,1,300,\nC1,C1 b,2,310,0.7\n"
    first, second = read_sheets(write(tmp_path, cone=text)).cones
    assert (first.test, first.area_ratio) == ("C1 a", 0.8)
    assert (second.test, second.area_ratio) == ("C1 b", 0.7)


def test_optional_columns_of_a_specimen(tmp_path: Path) -> None:
    text = (
        "test,hole,depth (m),stratum,initial void ratio (-),initial height (mm),drainage,"
        "void ratio reading error,preconsolidation stress (kPa)\n"
        "O1,BH1,3.4,grey clay,2.1,20,One face,0.004,52\n"
    )
    (sheet,) = read_sheets(write(tmp_path, oedometer_specimens=text)).oedometers
    assert not sheet.two_way
    assert (sheet.reading_sd, sheet.reported_preconsolidation) == (0.004, 52.0)
    assert sheet.place.stratum == "grey clay"  # before the table of strata


def test_tables_of_the_ground_may_be_left_out(tmp_path: Path) -> None:
    write(tmp_path)
    for name in ("holes", "strata", "plasticity"):
        (tmp_path / f"{name}.csv").unlink()
    site = read_sheets(tmp_path)
    place = site.oedometers[0].place
    assert (place.x, place.y, place.stratum) == (None, None, None)
    assert np.isnan(site.vanes[0].plasticity_index).all()


def test_files_may_be_named_one_by_one(tmp_path: Path) -> None:
    write(tmp_path)
    files = [tmp_path / "oedometer_specimens.csv", str(tmp_path / "oedometer_increments.csv")]
    assert [sheet.test for sheet in read_sheets(files).oedometers] == ["O1"]
    (tmp_path / "vane.csv").rename(tmp_path / "2024 Vane-tests.csv")
    assert read_sheets(tmp_path / "2024 Vane-tests.csv").vanes[0].strength.size == 2


def test_specimen_without_readings_is_left_out_and_told(tmp_path: Path) -> None:
    folder = write(
        tmp_path,
        oedometer_specimens=SITE["oedometer_specimens"] + "O2,BH1,6,1.9,20\n",
        triaxial_specimens=SITE["triaxial_specimens"] + "T2,BH1,6,UU,,,\n",
    )
    site = read_sheets(folder)
    assert len(site.oedometers) == len(site.triaxials) == 1
    assert any('specimens.csv, row 3: "O2" has no increments' in remark for remark in site.remarks)
    assert any('specimens.csv, row 3: "T2" has no readings' in remark for remark in site.remarks)


def test_windows_letters_are_read_and_told(tmp_path: Path) -> None:
    write(tmp_path)
    (tmp_path / "strata.csv").write_bytes(
        "hole,top (m),base (m),stratum\nBH1,0,12,grå lera\n".encode("cp1252")
    )
    site = read_sheets(tmp_path)
    assert site.oedometers[0].place.stratum == "grå lera"
    assert any("strata.csv, row 2: not in UTF-8; read as Windows-1252" in remark for remark in site.remarks)


def test_superscripts_are_units_in_either_encoding(tmp_path: Path) -> None:
    text = SITE["oedometer_increments"].replace("m2/year", "m²/year")
    folder = write(tmp_path, oedometer_increments=text)
    for encoding in ("utf-8", "cp1252"):
        (folder / "oedometer_increments.csv").write_text(text, encoding=encoding)
        assert read_sheets(folder).oedometers[0].reported_cv[1] == 6.0


def test_mixed_encodings_are_a_mistake(tmp_path: Path) -> None:
    write(tmp_path)
    lines = [b"hole,top (m),base (m),stratum", "BH1,0,2,grå".encode(), "BH1,2,12,blå".encode("cp1252")]
    (tmp_path / "strata.csv").write_bytes(b"\n".join(lines) + b"\n")
    fault = the_fault(tmp_path)
    assert fault.line == 3
    assert "encodings are mixed: this row is in Windows-1252, row 2 in UTF-8" in fault.message
    assert "blå" not in str(fault)
    assert kept(tmp_path).oedometers[0].place.stratum == "blå"


def test_nothing_is_kept_unasked_and_what_is_kept_is_told(tmp_path: Path) -> None:
    folder = write(tmp_path, oedometer_increments=("50,1.960", "50,1.9 6"))
    fault = the_fault(folder)
    assert (fault.line, fault.column, fault.given) == (4, 4, "1.9 6")
    site = kept(folder)
    assert site.oedometers[0].stress.tolist() == [12.5, 25.0, 100.0, 25.0]
    assert not any(site.oedometers[0].time_readings)  # they hung on the increment left out
    (told,) = site.remarks
    assert "row 4, void ratio: this is not a number (given: 1.9 6); left out" in told


def test_nothing_left_is_refused_even_so(tmp_path: Path) -> None:
    path = tmp_path / "vane.csv"
    path.write_text("hole,depth (m),strength (kPa)\nBH1,2,soft\n", encoding="utf-8")
    with pytest.raises(SheetError, match="no test is left to be read"):
        read_sheets(path, keep_good_rows=True)
