"""Files of values beside a scenario: what is read, and what is said of a bad one."""

import pytest

from probsoil.errors import ScenarioError
from probsoil.scenario import Empirical, read_scenario
from probsoil.scenario.value_files import GREATEST_COUNT, files_relative_to, read_values


@pytest.fixture
def folder(tmp_path):
    with files_relative_to(tmp_path):
        yield tmp_path


def test_values_of_a_column_with_units_blank_rows_and_a_byte_order_mark(folder):
    (folder / "a.csv").write_text("\ufeffhole, thickness\nB1,3.5\n\nB2, 250 cm\n ,4\n", encoding="utf-8")
    assert read_values("a.csv", "thickness", "length") == (3.5, 2.5, 4.0)


def test_the_only_column_needs_no_name(folder):
    (folder / "sub").mkdir()
    (folder / "sub" / "a.csv").write_text("lambda\r\n0.3\r\n0.35\r\n")
    assert read_values("sub/a.csv", None, "number") == (0.3, 0.35)


@pytest.mark.parametrize(
    ("content", "column", "path", "message"),
    [
        ("", None, "file", r"a\.csv has no heading row"),
        ("0.3\n0.4\n", None, "file", r"a\.csv has no heading row"),
        ("a,b\n1,2\n3,4\n", None, "file", r"a\.csv has 2 columns"),
        ("alpha,beta\n1,2\n3,4\n", "bta", "column", r'a\.csv has no column "bta"'),
        ("a\n1\nx\n", None, "file", r'a\.csv, row 3, column "a": "x": '),
        ("a\n1\n3 kPa\n", None, "file", r'a\.csv, row 3, column "a": "3 kPa": '),
        ("a\n1\nnan\n", None, "file", r'a\.csv, row 3, column "a": "nan": '),
        ("a,b\n1,2\n3\n", "b", "file", r'a\.csv, row 3, column "b": there is no value'),
        ("a\n1\n", None, "file", r"a\.csv has 1 values"),
        ("a\n" + "1\n" * (GREATEST_COUNT + 1), None, "file", rf"a\.csv has {GREATEST_COUNT + 1} values"),
        ('a\n"' + "1" * 200_000 + '"\n', None, "file", r"a\.csv cannot be read \(field larger"),
    ],
)
def test_what_is_said_of_a_bad_file(folder, content, column, path, message):
    import re

    (folder / "a.csv").write_text(content)
    slip = read_values("a.csv", column, "length")
    assert slip.path == (path,)
    assert re.match(message, slip.message)


def test_files_that_cannot_be_opened(folder):
    (folder / "latin.csv").write_bytes("a\nß1\n".encode("latin-1"))
    (folder / "huge.csv").write_bytes(b"a\n" + b"1\n" * 10_000_001)
    assert read_values("latin.csv", None, "number").message == "latin.csv is not in UTF-8"
    assert "larger than 20000000 bytes" in read_values("huge.csv", None, "number").message
    assert "cannot be read" in read_values(".", None, "number").message
    assert "cannot be read" in read_values("a\0b", None, "number").message
    assert read_values("none.csv", None, "number").message == "there is no file none.csv"


def test_a_scenario_finds_its_file_beside_itself(tmp_path, monkeypatch, base_text):
    text = base_text.replace(
        'lambda = { dist = "lognormal", mean = 0.12, cov = 0.20 }',
        'lambda = { dist = "empirical", file = "data/lambda.csv", column = "lambda" }',
    )
    assert text != base_text
    (tmp_path / "data").mkdir()
    (tmp_path / "data" / "lambda.csv").write_text("hole,lambda\nA,0.14\nB,0.11\n")
    file = tmp_path / "case.toml"
    file.write_text(text, encoding="utf-8")
    monkeypatch.chdir("/")
    assert read_scenario(file).layers[0].lambda_ == Empirical(values=(0.11, 0.14), source="data/lambda.csv")
    (tmp_path / "data" / "lambda.csv").write_text("hole,lambda\nA,0.14\nB,0.11 m\n")
    with pytest.raises(ScenarioError, match=r'data/lambda\.csv, row 3, column "lambda": "0\.11 m"'):
        read_scenario(file)
    (tmp_path / "data" / "lambda.csv").write_text("hole,lambda\nA,0.14\nB,11\n")
    with pytest.raises(ScenarioError, match="the distribution leaves its physical range: 50 %"):
        read_scenario(file)
