"""Every kind of mistake in a sheet: named with file, row, column, value, rule and remedy, all at once."""

import csv
import re
from pathlib import Path

import pytest
from sheet_samples import SITE, kept, refused, the_fault, write

from probsoil.errors import ScenarioError, SheetError
from probsoil.laboratory.collection import GREATEST_FAULTS
from probsoil.laboratory.reading import read_sheets

with (Path(__file__).parent / "sheet_mistakes.csv").open(encoding="utf-8", newline="") as stream:
    MISTAKES = list(csv.DictReader(stream))  # table, what is replaced by what, and the answer; empty: any


def spoilt(folder: Path, case: dict[str, str]) -> Path:
    return write(folder, **{case["table"]: (case["old"], case["new"])})


@pytest.mark.parametrize("case", MISTAKES, ids=lambda case: case["head"].split(": ", 1)[0])
def test_mistake_is_named_with_place_rule_and_remedy(tmp_path: Path, case: dict[str, str]) -> None:
    folder = spoilt(tmp_path, case)
    faults = refused(folder)
    assert len(faults) == 1, [
        str(one) for one in faults
    ]  # one slip is told once, without what follows from it
    (fault,) = faults
    assert str(fault).startswith(str(folder / case["head"]))
    assert case["given"] in ("", fault.given)
    assert case["allowed"] in (fault.allowed or "")
    assert case["hint"] in (fault.hint or "")


@pytest.mark.parametrize("case", MISTAKES, ids=lambda case: case["head"].split(": ", 1)[0])
def test_good_rows_are_kept_only_when_asked_for(tmp_path: Path, case: dict[str, str]) -> None:
    site = kept(spoilt(tmp_path, case))
    assert any(f"{case['table']}.csv" in remark and remark.endswith("left out") for remark in site.remarks)
    others = {
        "oedometer": site.oedometers,
        "triaxial": site.triaxials,
        "vane": site.vanes,
        "cone": site.cones,
    }
    hurt = case["table"].split("_")[0]
    assert all(sheets for kind, sheets in others.items() if kind != hurt)


def test_all_mistakes_of_all_files_are_told_in_order(tmp_path: Path) -> None:
    folder = write(
        tmp_path,
        vane=SITE["vane"].replace("12", "a").replace("13.5", "b"),
        cone=("0.26", "c"),
        oedometer_increments=SITE["oedometer_increments"].replace("void ratio", "e"),
    )
    faults = refused(folder)
    places = [(Path(fault.file).name, fault.line) for fault in faults]
    assert places == [("cone.csv", 3), ("oedometer_increments.csv", 1), ("vane.csv", 2), ("vane.csv", 3)]
    with pytest.raises(SheetError, match=r"^4 mistakes in the test sheets"):
        read_sheets(folder)


def test_many_mistakes_are_counted_after_the_first(tmp_path: Path) -> None:
    rows = "".join(f"BH1,{depth / 100},x\n" for depth in range(1, GREATEST_FAULTS + 51))
    faults = refused(write(tmp_path, vane="hole,depth (m),strength (kPa)\n" + rows))
    assert len(faults) == GREATEST_FAULTS + 1
    assert "and 50 more mistakes that are not listed" in faults[-1].message


def test_small_rise_of_void_ratio_is_reading_error(tmp_path: Path) -> None:
    site = read_sheets(write(tmp_path, oedometer_increments=("25,2.050", "25,2.085")))
    assert site.oedometers[0].void_ratio[1] == 2.085


def test_swelling_on_unloading_is_no_mistake(tmp_path: Path) -> None:
    assert read_sheets(write(tmp_path)).oedometers[0].void_ratio[-1] == 1.79


def test_slip_is_not_told_again_for_what_hangs_on_it(tmp_path: Path) -> None:
    fault = the_fault(write(tmp_path, oedometer_specimens=("2.1,20", "x,20")))
    assert fault.key == "initial void ratio"
    fault = the_fault(write(tmp_path / "b", oedometer_increments=("O1,3,50,1.960", "O1,3,50,x")))
    assert fault.line == 4
    fault = the_fault(write(tmp_path / "c", oedometer_specimens=("initial height (mm)", "height (mm)")))
    assert fault.message == "the heading is missing"
    fault = the_fault(write(tmp_path / "d", holes=("BH1,10,20,12", "BH1,10,20,deep")))
    assert fault.given == "deep m"


def test_test_of_two_files_is_told_with_both(tmp_path: Path) -> None:
    write(tmp_path)
    (tmp_path / "second_oedometer_specimens.csv").write_text(SITE["oedometer_specimens"], encoding="utf-8")
    fault = the_fault(tmp_path)
    assert Path(fault.file).name == "second_oedometer_specimens.csv"
    assert re.search(r"the row repeats row 2 of .*oedometer_specimens\.csv$", fault.message)


def test_name_shared_by_two_kinds_of_test_is_a_mistake(tmp_path: Path) -> None:
    readings = SITE["triaxial_readings"].replace("T1", "O1")
    fault = the_fault(write(tmp_path, triaxial_specimens=("T1,BH1", "O1,BH1"), triaxial_readings=readings))
    assert (fault.line, fault.column, fault.given) == (2, 1, "O1")
    assert 'the test "O1" is in the table oedometer specimens too' in fault.message
    assert fault.hint == "add the kind of test to the name"


def test_nearest_name_is_offered_for_an_orphan(tmp_path: Path) -> None:
    specimens = SITE["oedometer_specimens"].replace("O1", "BH1-P3")
    increments = SITE["oedometer_increments"].replace("O1", "BH1-P4")
    faults = refused(write(tmp_path, oedometer_specimens=specimens, oedometer_increments=increments))
    assert faults[0].hint == 'did you mean "BH1-P3"?'
    assert "(5 rows of it)" in faults[0].message


def test_profile_of_two_holes_is_a_mistake(tmp_path: Path) -> None:
    text = "hole,test,depth (m),strength (kPa)\nBH1,V,3,12\nC1,V,4,13\n"
    assert the_fault(write(tmp_path, vane=text)).message.startswith("hole is not that of row 2")


def test_area_ratio_is_one_of_a_sounding(tmp_path: Path) -> None:
    text = "hole,depth (m),cone resistance (MPa),area ratio\nC1,1,0.2,0.8\nC1,2,0.2,\nC1,3,0.2,0.75\n"
    fault = the_fault(write(tmp_path, cone=text))
    assert (fault.line, fault.column, fault.given) == (4, 4, "0.75")


@pytest.mark.parametrize(
    ("name", "content", "match"),
    [
        ("nothing.csv", None, "nothing.csv: the name of the file does not tell which table it is"),
        ("vane.csv", None, "vane.csv: there is no such file"),
        ("notes.pdf", b"x", "notes.pdf: this is not a CSV file, a workbook or an AGS file"),
        ("vane.csv", b"\xff\xfeh\0", "vane.csv: row 1: the file is in UTF-16"),
        ("vane.csv", b"hole,depth (m),strength (kPa)\nPK\0\1\n", "vane.csv: row 2: this is a binary file"),
        ("vane.csv", b"x" * 1_000_001, "vane.csv: row 1: the line is longer than 1,000,000 bytes"),
        ("vane.csv", b"", "vane.csv: there are no headings"),
        ("vane.csv", b"# nothing\n\n", "vane.csv: there are no headings"),
        (
            "vane.csv",
            b'hole,depth (m),strength (kPa)\nB,1,1\nB,2,"3\n',
            "vane.csv:3: the row cannot be parted",
        ),
        ("vane_cone.csv", b"hole", "does not tell which table"),
        ("vane.xlsx", None, "vane.xlsx: there is no such file"),
        ("vane.xlsx", b"not a workbook", "vane.xlsx: the workbook cannot be read"),
        ("site.ags", None, "site.ags: there is no such file"),
    ],
)
def test_file_that_cannot_be_read(tmp_path: Path, name: str, content: bytes | None, match: str) -> None:
    path = tmp_path / name
    if content is not None:
        path.write_bytes(content)
    with pytest.raises(SheetError, match=re.escape(match)):
        read_sheets(path)


def test_unreadable_file_is_refused_even_when_good_rows_are_kept(tmp_path: Path) -> None:
    folder = write(tmp_path)
    with pytest.raises(SheetError, match="there is no such file"):
        read_sheets([folder, tmp_path / "more" / "vane.csv"], keep_good_rows=True)


def test_folder_tells_what_it_does_not_read(tmp_path: Path) -> None:
    (tmp_path / "empty").mkdir()
    with pytest.raises(SheetError, match="the folder holds no test sheets"):
        read_sheets(tmp_path / "empty")
    write(tmp_path)
    (tmp_path / "letter.txt").write_text("Dear all", encoding="utf-8")
    (tmp_path / ".hidden").write_text("", encoding="utf-8")
    (remark,) = read_sheets(tmp_path).remarks
    assert remark == f"{tmp_path / 'letter.txt'}: not a file that is read"


def test_mistakes_in_sheets_are_not_those_of_a_scenario() -> None:
    assert not issubclass(SheetError, ScenarioError)
