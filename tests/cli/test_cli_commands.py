"""The smaller commands: new, check, sheet, report, schema, and what all share."""

import csv
import io
import json
import re
import tomllib
from pathlib import Path

import cli_fakes
import pytest

from probsoil.cli import main


def squeezed(text: str) -> str:
    return re.sub(r"[\s│]+", " ", text)


@pytest.mark.parametrize("kind", ["embankment", "footing", "tank"])
def test_new_writes_a_scenario_that_check_accepts(
    kind: str, desk: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["new", "fresh.toml", "--like", kind]) == 0
    assert "Wrote fresh.toml" in capsys.readouterr().out
    assert tomllib.loads((desk / "fresh.toml").read_text(encoding="utf-8"))["format"] == 1
    assert main(["check", "fresh.toml"]) == 0


def test_new_names_the_next_command_as_a_shell_reads_it(
    desk: Path,  # noqa: ARG001
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert main(["new", "x y.toml"]) == 0
    assert capsys.readouterr().out.endswith("probsoil check 'x y.toml'\n")


def test_one_is_not_plural(desk: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (desk / "yard.toml").write_text(
        AREA.replace("horizon = 10", "horizon = 1\nrealisations = 1").replace(
            "more_than = 5", "more_than = 1"
        )
    )
    assert main(["check", "yard.toml"]) == 0
    assert "1 realisation (monte carlo), seed 1, to 1 year\n" in capsys.readouterr().out
    (desk / "yard.toml").write_text(
        (desk / "yard.toml").read_text().replace("more_than = 1", "more_than = 2")
    )
    assert main(["check", "yard.toml"]) == 2
    assert "allowed: 0 to 1 year\n" in capsys.readouterr().err


def test_new_spares_a_file_unless_forced(desk: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (desk / "mine.toml").write_text("a year of work")
    assert main(["new", "mine.toml"]) == 2
    assert "'mine.toml' is there already; --force replaces it" in squeezed(capsys.readouterr().err)
    assert (desk / "mine.toml").read_text() == "a year of work"
    assert main(["new", "mine.toml", "--force"]) == 0
    assert "format = 1" in (desk / "mine.toml").read_text(encoding="utf-8")


def test_new_refuses_a_kind_it_does_not_know_and_writes_nothing(
    desk: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["new", "fresh.toml", "--like", "castle"]) == 2
    assert 'no starter "castle"; choose from: embankment' in capsys.readouterr().err
    assert not (desk / "fresh.toml").exists()


@pytest.mark.parametrize("path", ["site.toml/below.toml", "no/such/folder.toml"])
def test_new_where_it_cannot_write(
    desk: Path,  # noqa: ARG001
    capsys: pytest.CaptureFixture[str],
    path: str,
) -> None:
    assert main(["new", path]) == 1
    assert f"Error: '{path}' cannot be written" in capsys.readouterr().err


def test_check_prints_what_was_understood(desk: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (desk / "tail.toml").write_text(
        (desk / "site.toml").read_text(encoding="utf-8").replace("base =", "mode_factor = 0.8\nbase =", 1)
    )
    written = tomllib.loads((desk / "site.toml").read_text(encoding="utf-8"))
    assert main(["check", "site.toml"]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    assert out.startswith("site.toml: no mistakes found")
    assert written["title"] in out
    words = squeezed(out)
    for table in ("layers", "stages", "limits"):
        for entry in written[table]:
            assert entry["name"] in words
    for rule in written["dependence"]:
        assert f"{rule['between'][0]} {rule['between'][1]} {rule['rank_correlation']:g}" in words
    assert "site.mode_factor normal, mean 0.8" in words
    first, second = written["layers"][:2]
    assert f"{first['name']} clay 0.00 {first['thickness']:.2f}" in words
    assert f"{second['name']} clay {first['thickness']:.2f}" in words
    assert main(["check", "tail.toml"]) == 0
    assert "site.mode_factor fixed at 0.8" in squeezed(capsys.readouterr().out)


def test_check_names_what_lies_outside_the_published_ranges(
    desk: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["check", "site.toml"]) == 0
    assert "published" not in capsys.readouterr().out
    text = (desk / "site.toml").read_text(encoding="utf-8")
    (desk / "odd.toml").write_text(text.replace('soil = "clay"', 'soil = "clay"\nkh_kv = 9', 1))
    assert main(["check", "odd.toml"]) == 0
    said = squeezed(capsys.readouterr().out)
    assert "Look again: crust.kh_kv: a mean kh/kv of 9 lies above what is published, 1 to 5" in said


AREA = """
format = 1
title = "Yard"
seed = 1
horizon = 10
[site]
water_table = 1.0
base = "undrained"
[[layers]]
name = "clay"
soil = "clay"
thickness = 4.0
unit_weight = 16.0
void_ratio = 1.5
lambda = 0.3
kappa = 0.03
preconsolidation = { ocr = 1.3 }
M = 1.0
permeability = { cv = { dist = "normal", mean = 2.0, sd = 1.0 } }
[load]
shape = "area"
[[stages]]
name = "stack"
pressure = 30
start = 0
end = "2 weeks"
[[limits]]
name = "90 % in time"
quantity = "time_to_consolidation"
not_more_than = 5
[[limits]]
name = "half in a year"
quantity = "degree_of_consolidation"
at = 0.9
not_less_than = 0.5
"""


def test_check_of_an_area_load_and_of_a_distribution_that_is_cut(
    desk: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (desk / "yard.toml").write_text(AREA)
    assert main(["check", "yard.toml"]) == 0
    words = squeezed(capsys.readouterr().out)
    assert "Load: over a wide area" in words
    assert "stack +30 kPa 0.000 0.038" in words
    # a normal variable is below zero, two standard deviations below its mean, with probability 2.275 %
    assert "clay.cv normal, mean 2 m2/year, standard deviation 1 m2/year; 2.3 % cut at its physical" in words
    assert "the time to 90 % consolidation is more than 5 years" in words
    assert re.search(r"the degree of consolidation at 0\.90? years? is less than 0\.50", words)
    assert "Correlations" not in words


def test_check_tells_every_mistake(desk: Path, capsys: pytest.CaptureFixture[str]) -> None:
    before = sorted(desk.rglob("*"))
    assert main(["check", "bad.toml"]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert re.match(r"\d+ mistakes in the scenario\n", err)
    assert "sede" in err
    assert "kapa" in err
    assert sorted(desk.rglob("*")) == before


@pytest.mark.parametrize("content", [b"", b"\x00\x01\x02", b"\xff\xfe\x41", b"a = [", b"format = 1\n"])
@pytest.mark.parametrize("command", ["check", "sheet", "assess"])
def test_no_file_makes_a_traceback(
    desk: Path,
    calculation: cli_fakes.Calculation,
    capsys: pytest.CaptureFixture[str],
    command: str,
    content: bytes,
) -> None:
    (desk / "odd.toml").write_bytes(content)
    assert main([command, "odd.toml"]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert "odd.toml" in err
    assert "Traceback" not in err
    assert calculation.calls == []


def test_sheet_prints_each_part(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert main(["sheet", "site.toml"]) == 0
    out = capsys.readouterr().out
    assert calculation.calls[0]["at"] == "mean"
    words = squeezed(out)
    assert "soft clay clay 0.00 7.25 30.1 48.0 55.5 1.900 0.0712 0.501" in words
    assert "sand granular 7.25 9.00 60.0 - 50.0 - 0.0010 0.002" in words
    assert "Settlement at 30 years 0.501 m" in words
    assert "30.00 0.457" in words
    assert "first lift [kPa]" in words
    assert "soft clay 3.50 12.3 15.7" in words
    assert "first lift 1.23" in words


def test_sheet_without_slip_leaves_its_tables_out(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setattr(cli_fakes, "SHEET", {**cli_fakes.SHEET, "strength": [], "slip_safety": {}})
    assert main(["sheet", "site.toml", "--at", "median"]) == 0
    out = capsys.readouterr().out
    assert "Undrained shear strength" not in out
    assert "factor of safety" not in out


def test_sheet_as_json_and_as_csv(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert main(["sheet", "site.toml", "--at", "median", "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == cli_fakes.SHEET
    assert calculation.calls[0]["at"] == "median"
    assert main(["sheet", "site.toml", "--csv"]) == 0
    sections = capsys.readouterr().out.split("\n\n")
    assert [section.partition("\n")[0] for section in sections] == [
        "layers",
        "through time",
        "strength",
        "slip safety",
        "",
    ]
    rows = list(csv.DictReader(io.StringIO(sections[0].partition("\n")[2])))
    assert [row["layer"] for row in rows] == ["soft clay", "sand"]
    assert [row["settlement [m]"] for row in rows] == ["0.5012", "0.002"]
    assert main(["sheet", "site.toml", "--csv", "--json"]) == 2
    assert "choose one of --json and --csv" in squeezed(capsys.readouterr().err)
    assert main(["sheet", "site.toml", "--at", "mode"]) == 2


def test_report_is_written_again(
    desk: Path,
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    capsys: pytest.CaptureFixture[str],
) -> None:
    (desk / "old").mkdir()
    (desk / "old" / "results.json").write_text(json.dumps(cli_fakes.results()))
    assert main(["report", "old"]) == 0
    assert f"Wrote {Path('old', 'report.html')}" in capsys.readouterr().out
    names = {path.name for path in (desk / "old").iterdir()}
    assert names == {"results.json", "report.html", "limits.csv"}
    assert main(["report", "old", "--quiet"]) == 0
    assert capsys.readouterr() == ("", "")
    assert main(["report", "nosuch"]) == 2
    assert main(["report", "site.toml"]) == 2


def test_report_of_a_folder_without_results(desk: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (desk / "empty").mkdir()
    assert main(["report", "empty"]) == 1
    err = capsys.readouterr().err
    assert err.startswith("Error: ")
    assert "results.json" in err
    assert list((desk / "empty").iterdir()) == []


def test_schema_is_one_json_object(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["schema"]) == 0
    schema = json.loads(capsys.readouterr().out)
    assert schema["$schema"].startswith("https://json-schema.org/")
    assert "layers" in schema["properties"]


def test_version_and_help(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["--version"]) == 0
    assert capsys.readouterr().out.startswith("probsoil ")
    assert main(["--help"]) == 0
    out = capsys.readouterr().out
    for command in ("new", "check", "sheet", "assess", "report", "schema"):
        assert command in out
    assert main([]) == 2


def test_no_colour_where_it_is_not_wanted(
    desk: Path,  # noqa: ARG001
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setenv("NO_COLOR", "1")
    monkeypatch.setenv("TERM", "xterm-256color")
    monkeypatch.setattr("sys.stdout.isatty", lambda: True)
    assert main(["check", "site.toml"]) == 0
    assert not re.search(r"\x1b\[[0-9;]*3\d", capsys.readouterr().out)


STATIONS = """
[[stations]]
name = "west"

[[stations]]
name = "east"
y = 12

[[limits]]
name = "evenness"
quantity = "angular_distortion"
at = 10
not_more_than = "1/300"
"""


def test_check_prints_stations_and_what_limits_compare(
    desk: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (desk / "yard.toml").write_text(AREA + STATIONS, encoding="utf-8")
    assert main(["check", "yard.toml"]) == 0
    said = squeezed(capsys.readouterr().out)
    assert "Stations; limits look at the first unless they say otherwise" in said
    assert "east 0 12 -" in said
    assert "between the two stations for which it is greatest is more than 0.003333 (1/300)" in said


def test_sheet_of_a_further_load(desk: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = AREA.replace(
        "[[stages]]",
        '[[further_loads]]\nname = "pad"\nshape = "area"\n\n'
        '[[stages]]\nname = "stock"\nload = "pad"\npressure = 20\nstart = 0\nend = 0.1\n\n[[stages]]',
        1,
    )
    (desk / "two.toml").write_text(text)
    assert main(["sheet", "two.toml", "--load", "pad"]) == 0
    assert "of pad" in squeezed(capsys.readouterr().out)
    assert main(["sheet", "two.toml", "--load", "yard"]) == 2
    assert 'there is no further load "yard": there are pad' in squeezed(capsys.readouterr().err)
    assert main(["sheet", "two.toml", "--load", "pad", "--station", "east"]) == 2


def test_sheet_of_a_station(desk: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (desk / "yard.toml").write_text(AREA + STATIONS, encoding="utf-8")
    assert main(["sheet", "yard.toml", "--station", "east"]) == 0
    said = squeezed(capsys.readouterr().out)
    assert "at the station east" in said
    assert "Differences between stations at the horizon" in said
    assert main(["sheet", "yard.toml", "--station", "north"]) == 2
    assert 'there is no station "north": there are west, east' in squeezed(capsys.readouterr().err)


@pytest.mark.usefixtures("desk", "calculation")
def test_sheet_says_how_many_tests_it_stands_on(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setitem(cli_fakes.SHEET, "tests", 3)
    assert main(["sheet", "site.toml"]) == 0
    assert "All parameters at their mean, after 3 test results." in capsys.readouterr().out


@pytest.mark.usefixtures("desk")
def test_check_prints_what_tests_were_understood_and_what_they_change(
    desk: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    text = (desk / "site.toml").read_text(encoding="utf-8")
    layer = next(one for one in tomllib.loads(text)["layers"] if one["soil"] == "clay")
    test = f"""
[[evidence]]
kind = "oedometer"
layer = "{layer["name"]}"
depth = 1.0
test = "BH1-3"
lambda = 0.60
C_alpha_ratio = 0.05
"""
    (desk / "tested.toml").write_text(text + test, encoding="utf-8")
    assert main(["check", "tested.toml"]) == 0
    words = squeezed(capsys.readouterr().out)
    assert "Tests in hand" in words
    assert "BH1-3 oedometer lambda" in words
