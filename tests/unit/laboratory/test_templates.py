"""Templates: every column explained, examples never read, and readable once they are filled in."""

import builtins
import csv
import io
import json
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pandas as pd
import pytest

from probsoil.cli import main
from probsoil.errors import MissingExtraError, ParameterError, ResultsError, SheetError
from probsoil.laboratory.layout import LAYOUTS
from probsoil.laboratory.reading import read_sheets
from probsoil.laboratory.templates import EXAMPLE, KINDS, WORKBOOK, template_rows, write_templates


def taken_as_data(folder: Path) -> Path:
    """Make the examples of CSV templates data."""
    for file in folder.glob("*.csv"):
        text = file.read_text(encoding="utf-8-sig")
        assert EXAMPLE in text
        file.write_text(text.replace(EXAMPLE, ""), encoding="utf-8")
    return folder


def test_examples_are_a_readable_site(tmp_path: Path) -> None:
    write_templates("all", tmp_path)
    site = read_sheets(taken_as_data(tmp_path))
    assert [len(kind) for kind in (site.oedometers, site.triaxials, site.vanes, site.cones)] == [1, 1, 1, 1]
    assert site.remarks == ()
    assert site.oedometers[0].stress.tolist() == [25.0, 50.0, 100.0, 25.0]
    assert site.cones[0].cone_resistance.tolist() == [210.0, 214.0]


def test_template_says_that_the_whole_prefix_is_taken_away() -> None:
    for layout in LAYOUTS:
        told = [str(row[0]) for row in template_rows(layout)]
        assert (
            '# Rows that begin with "# invented: " are examples; to use one, take that away with its #.'
            in told
        )
        assert [row for row in told if row.startswith(EXAMPLE)]


@pytest.mark.parametrize("excel", [False, True])
def test_examples_left_in_are_never_read(tmp_path: Path, excel: bool) -> None:
    write_templates("all", tmp_path, excel=excel)
    with pytest.raises(SheetError, match=r"^1 mistake in the test sheets\n\n.*no test is left to be read"):
        read_sheets(tmp_path)


def test_every_column_is_a_heading_with_an_explanation(tmp_path: Path) -> None:
    files = write_templates("all", tmp_path)
    assert [file.stem.replace("_", " ") for file in files] == [layout.name for layout in LAYOUTS]
    for file, layout in zip(files, LAYOUTS, strict=True):
        rows = list(csv.reader(io.StringIO(file.read_text(encoding="utf-8-sig"))))
        heads = next(row for row in rows if not row[0].startswith("#"))
        assert heads == [column.heading for column in layout.columns]
        told = "\n".join(row[0] for row in rows)
        for column in layout.columns:
            assert f"# {column.heading}: {column.meaning}" in told


def test_workbook_has_the_same_rows(tmp_path: Path) -> None:
    (book,) = write_templates("oedometer", tmp_path, excel=True)
    assert book.name == WORKBOOK
    sheets = pd.read_excel(book, sheet_name=None, header=None, engine="calamine", na_filter=False)
    assert list(sheets) == ["oedometer specimens", "oedometer increments", "oedometer readings"]
    heads = {str(cell) for cell in sheets["oedometer increments"].to_numpy().ravel()}
    assert {"stress (kPa)", "void ratio", "cv (m2/year)"} <= heads


def test_kinds_are_those_of_the_layout(tmp_path: Path) -> None:
    assert KINDS == ("all", "ground", "oedometer", "triaxial", "vane", "cone")
    assert [file.name for file in write_templates("vane", tmp_path)] == ["vane.csv"]
    with pytest.raises(ParameterError, match="no table of 'sieve'; allowed: all, ground, oedometer"):
        write_templates("sieve", tmp_path)


def test_nothing_is_replaced_unasked(tmp_path: Path) -> None:
    (tmp_path / "oedometer_readings.csv").write_text("mine", encoding="utf-8")
    with pytest.raises(ParameterError, match=r"oedometer_readings\.csv: there already"):
        write_templates("oedometer", tmp_path)
    assert [file.name for file in tmp_path.iterdir()] == ["oedometer_readings.csv"]
    write_templates("oedometer", tmp_path, replace=True)
    assert "mine" not in (tmp_path / "oedometer_readings.csv").read_text(encoding="utf-8")


def test_folder_that_cannot_be_made(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    with pytest.raises(ResultsError, match="cannot be written to"):
        write_templates("vane", tmp_path / "file")


def without(name: str) -> Callable[..., object]:
    real = builtins.__import__

    def importing(wanted: str, *rest: object, **more: object) -> object:
        if wanted == name:
            raise ImportError(name)
        return real(wanted, *rest, **more)  # type: ignore[arg-type]

    return importing


def test_missing_extra_is_named(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(builtins, "__import__", without("xlsxwriter"))
    with pytest.raises(
        MissingExtraError, match=r"needs the extra \"excel\": pip install 'probsoil\[excel\]'"
    ) as told:
        write_templates("vane", tmp_path, excel=True)
    assert told.value.extra == "excel"
    assert isinstance(told.value, ImportError)
    assert list(tmp_path.iterdir()) == []


def test_command_writes_and_names_the_files(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    assert main(["template", "triaxial"]) == 0
    said = capsys.readouterr().out.splitlines()
    assert said == [
        f"Wrote {Path('sheets') / name}.csv" for name in ("triaxial_specimens", "triaxial_readings")
    ]
    assert main(["template", "triaxial"]) == 2
    assert "there already; --force replaces" in capsys.readouterr().err
    assert main(["template", "triaxial", "--force"]) == 0
    assert main(["template", "--excel", "--out", "book"]) == 0
    assert (tmp_path / "book" / WORKBOOK).exists()
    assert main(["template", "sieve"]) == 2


def test_readers_start_without_pandas() -> None:
    code = (
        "import sys, json\n"
        "import probsoil.laboratory.reading, probsoil.laboratory.templates\n"
        "slow = ('pandas', 'python_calamine', 'xlsxwriter', 'pint', 'matplotlib', 'scipy')\n"
        "print(json.dumps([name for name in slow if name in sys.modules]))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert json.loads(done.stdout) == []
