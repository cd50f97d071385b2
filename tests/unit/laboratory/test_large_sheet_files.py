"""Large files: read row by row, memory in proportion to the numbers kept, refused beyond a stated size."""

import itertools
import tracemalloc
from collections.abc import Iterator
from pathlib import Path

import pytest
from sheet_samples import the_fault

from probsoil.errors import SheetError
from probsoil.laboratory import tables
from probsoil.laboratory.reading import read_sheets


def cone_lines(n_row: int) -> Iterator[str]:
    yield "hole,depth (m),cone resistance (MPa),sleeve friction (kPa),pore pressure (kPa),remarks\n"
    for row in range(n_row):
        yield f"C{row // 2000},{(row % 2000) / 100 + 0.01:.2f},0.412,7.3,{row % 90},{'nothing to say ' * 8}\n"


def ags_lines(n_row: int) -> Iterator[str]:
    yield '"GROUP","IVAN"\r\n"HEADING","LOCA_ID","IVAN_DPTH","IVAN_IVAN"\r\n"UNIT","","m","kPa"\r\n'
    yield '"DATA","BH1","3.0","12"\r\n\r\n'
    yield '"GROUP","MOND"\r\n"HEADING","MONG_ID","MOND_RDNG","MOND_REM"\r\n"UNIT","","",""\r\n'
    for row in range(n_row):
        yield f'"DATA","P1","{row}","{"nothing to say " * 8}"\r\n'


def written(path: Path, lines: Iterator[str]) -> Path:
    with path.open("w", encoding="utf-8", newline="") as stream:
        while chunk := list(itertools.islice(lines, 10_000)):
            stream.write("".join(chunk))
    return path


def peak_of(path: Path) -> int:
    tracemalloc.start()
    try:
        read_sheets(path)
        return tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()


@pytest.mark.slow
def test_memory_follows_the_numbers_kept_not_the_text(tmp_path: Path) -> None:
    path = written(tmp_path / "cone.csv", cone_lines(40_000))
    size = path.stat().st_size
    assert size > 5_000_000
    # 7 columns and 3 places of 8 bytes a row, all held at most four times over while tables are checked and
    # grouped, and 1 MB for the rest
    assert peak_of(path) < 4 * 40_000 * 10 * 8 + 1_000_000


@pytest.mark.slow
def test_rows_of_groups_not_read_take_no_memory(tmp_path: Path) -> None:
    path = written(tmp_path / "site.ags", ags_lines(60_000))
    assert path.stat().st_size > 8_000_000
    assert peak_of(path) < 1_000_000


def test_table_beyond_the_stated_rows_is_refused_with_its_row(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(tables, "GREATEST_ROWS", 500)
    fault = the_fault(written(tmp_path / "cone.csv", cone_lines(900)))
    assert fault.line == 502
    assert fault.message == "the table cone has too many rows; what follows was not looked at"
    assert fault.allowed == "up to 500 rows of a kind in one reading"
    site = read_sheets(tmp_path / "cone.csv", keep_good_rows=True)
    assert site.cones[0].depth.size == 500


def test_group_beyond_the_stated_rows_is_refused_with_its_line(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(tables, "GREATEST_ROWS", 3)
    rows = "".join(f'"DATA","BH1","{depth}","12"\r\n' for depth in range(1, 6))
    path = tmp_path / "site.ags"
    path.write_text(
        f'"GROUP","IVAN"\r\n"HEADING","LOCA_ID","IVAN_DPTH","IVAN_IVAN"\r\n"UNIT","","m","kPa"\r\n{rows}',
        encoding="utf-8",
    )
    with pytest.raises(SheetError, match=r"site\.ags:7: the table vane has too many rows"):
        read_sheets(path)
