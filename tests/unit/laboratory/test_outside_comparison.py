"""The comparison with the standard's own library finds a difference where there is one.

The library itself runs in an environment of its own (`.ci/run`); here a dump in its form is made by hand.
"""

import importlib.util
import json
from pathlib import Path
from types import ModuleType

import pytest

from probsoil.laboratory.reading import read_sheets

ROOT = Path(__file__).parents[3]
FILE = Path(__file__).parent / "odd_cells.ags"


@pytest.fixture(scope="module")
def compare() -> ModuleType:
    spec = importlib.util.spec_from_file_location("ags_compare", ROOT / ".ci" / "ags_compare.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def dump(compare: ModuleType, **checker: str) -> dict[str, object]:
    columns = {
        name: {"HEADING": ["UNIT", "TYPE"], **group, "line_number": ["0", "0", *group["line_number"]]}
        for name, group in compare.our_groups(str(FILE)).items()
    }
    return {"files": {str(FILE): {"columns": columns, "headings": {}}}, "checker": checker}


def answer(compare: ModuleType, folder: Path, said: object) -> int:
    path = folder / "dump.json"
    path.write_text(json.dumps(said), encoding="utf-8")
    code: int = compare.main(str(path))
    return code


def test_odd_cells_are_what_the_file_says(compare: ModuleType) -> None:
    groups = compare.our_groups(str(FILE))
    assert groups["LOCA"]["LOCA_REM"] == ["", "X", 'He said "soft", then wrote: mud, silt', ""]
    assert groups["IVAN"]["IVAN_IVAN"] == ["kPa", "XN", ">110", "14"]
    assert groups["CPTT"]["line_number"] == ["45", "46"]


def test_equal_readings_pass(compare: ModuleType, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert answer(compare, tmp_path, dump(compare)) == 0
    assert "7 groups" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("group", "heading", "place"),
    [
        ("IVAN", "IVAN_IVAN", 2),
        ("CONS", "CONS_INCF", 0),
        ("CONS", "CONS_INCF", 1),
        ("LOCA", "line_number", 3),
    ],
)
def test_one_altered_cell_is_found(
    compare: ModuleType,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    group: str,
    heading: str,
    place: int,
) -> None:
    said = dump(compare)
    said["files"][str(FILE)]["columns"][group][heading][place] = "7"  # type: ignore[index]
    assert answer(compare, tmp_path, said) == 1
    assert f"{group}, {heading}: ours" in capsys.readouterr().out


def test_missing_group_and_error_of_the_checker_are_found(
    compare: ModuleType, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    said = dump(compare, rule="8")
    del said["files"][str(FILE)]["columns"]["CPTT"]  # type: ignore[attr-defined]
    assert answer(compare, tmp_path, said) == 1
    told = capsys.readouterr().out
    assert "group CPTT is read by one of the two only" in told
    assert "the library's checker: rule: 8" in told


def test_odd_cells_make_sheets() -> None:
    site = read_sheets(FILE)
    assert site.oedometers[0].void_ratio.tolist() == [1.84, 1.79, 1.64]
    assert site.vanes[0].strength.tolist() == [110.0, 14.0]
    assert site.vanes[0].corrected is False
    assert site.cones[0].pore_pressure[0] == 21.0
    told = [
        remark.split("row ")[1].split(" is read as")[0] for remark in site.remarks if " is read as" in remark
    ]
    assert told == ['32: IVAN_IVAN ">110"', '32: IVAN_IVAR "#20"', '33: IVAN_IVAR "<2"']
