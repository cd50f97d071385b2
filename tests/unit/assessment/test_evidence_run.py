"""An assessment with tests in hand: results, report, tables, the folder that runs again."""

import json
from pathlib import Path

import numpy as np
import pytest

from probsoil.assessment import assess, sheet
from probsoil.assessment.identity import stated_values
from probsoil.report import render_report
from probsoil.report.page import write_report
from probsoil.report.tables import tables
from probsoil.scenario import Scenario, parse_scenario, read_scenario
from probsoil.scenario.evidence_file import COLUMNS

GROUND = """format = 1
title = "Tests"
seed = 5
realisations = 400
horizon = 5

[site]
water_table = 1.0
base = "drained"

[[layers]]
name = "clay"
soil = "clay"
thickness = 4.0
unit_weight = 16.0
void_ratio = 1.9
lambda = { dist = "lognormal", mean = 0.36, cov = 0.15, VARIES, vertical_scale = 1.5, horizontal_scale = 30 }
kappa = { dist = "lognormal", mean = 0.05, cov = 0.20 }
preconsolidation = { ocr = { dist = "lognormal", mean = 1.4, cov = 0.15 } }
M = 1.0
permeability = { cv = { dist = "lognormal", mean = 2.0, cov = 0.4 } }

[load]
shape = "area"
fill_unit_weight = 19.0

[[stages]]
name = "fill"
height = 1.5
start = 0.0
end = 0.1

[[dependence]]
between = ["clay.lambda", "clay.kappa"]
rank_correlation = 0.5

[[limits]]
name = "settlement"
quantity = "settlement"
at = 5
not_more_than = 0.25
""".replace("VARIES", "inherent_cov = { low = 0.1, high = 0.35 }")
STATIONS = """
[[stations]]
name = "a"
x = 0

[[stations]]
name = "b"
x = 20
"""
FILE = '\n[[evidence]]\nfile = "laboratory/soil tests.csv"\n'
ROWS = """oedometer,T1,BH1,5,0,clay,2.0,lambda,0.50,-,0.02,
oedometer,T1,BH1,5,0,clay,2.0,preconsolidation_stress,38,kPa,3,
oedometer,T2,BH2,40,0,,3.0,lambda,0.47,-,,gap in the record
triaxial,X1,BH2,40,0,clay,3.0,M,1.05,-,,
"""


def case(folder: Path, more: str = "") -> Path:
    (folder / "laboratory").mkdir(parents=True)
    (folder / "laboratory" / "soil tests.csv").write_text(f"{','.join(COLUMNS)}\n{ROWS}", encoding="utf-8")
    path = folder / "case.toml"
    path.write_text(GROUND + FILE + more, encoding="utf-8")
    return path


def run(path: Path, out: Path | None = None, workers: int = 1):
    return assess(read_scenario(path), out=out, workers=workers, source=path)


@pytest.mark.parametrize("more", ["", STATIONS])
def test_folder_alone_is_enough_to_run_again(tmp_path: Path, more: str) -> None:
    path = case(tmp_path / "in", more)
    first = run(path, tmp_path / "out")
    assert sorted(p.name for p in (tmp_path / "out").glob("evidence_*")) == ["evidence_1.csv"]
    again = run(tmp_path / "out" / "scenario.toml", tmp_path / "again", workers=2)
    assert np.array_equal(first.sample.quantity, again.sample.quantity, equal_nan=True)
    results = json.loads((tmp_path / "out" / "results.json").read_text(encoding="utf-8"))
    assert results["evidence"] == json.loads(json.dumps(again.results["evidence"]))
    assert list(results["provenance"]["evidence_sha256"]) == ["laboratory/soil tests.csv"]
    assert (tmp_path / "out" / "scenario.toml").read_text(encoding="utf-8") == path.read_text(
        encoding="utf-8"
    ).replace("laboratory/soil tests.csv", "evidence_1.csv")
    run(path, tmp_path / "out")  # into the same folder again


def test_report_and_tables_tell_of_the_tests(tmp_path: Path) -> None:
    path = case(tmp_path / "in")
    results = run(path, tmp_path / "out").results
    page = write_report(tmp_path / "out").read_text(encoding="utf-8")
    assert page == render_report(json.loads((tmp_path / "out" / "results.json").read_text(encoding="utf-8")))
    said = (
        "What the tests say",
        "the ground&#39;s own variability",
        "evidence-1",
        "Results of tests not used",
    )
    for words in said:
        assert words in page, words
    assert "M, fixed in the scenario" in page
    frames = tables(results)
    assert len(frames["tests"]) == 4
    names = list(frames["updated_parameters"]["parameter"])
    assert names == [row["name"] for row in results["evidence"]["parameters"]]
    assert {"clay.lambda", "clay.kappa", "clay.ocr"} <= set(names)
    drivers = {row["parameter"] for row in results["drivers"]}
    assert "variability from point to point" in drivers
    texts = {row["name"]: row["text"] for row in results["parameters"]}
    assert texts["clay.lambda"].endswith("before the tests")
    assert any("updated with 3 results" in words for words in results["assumptions"])


def test_tests_move_the_answer_the_right_way(tmp_path: Path) -> None:
    after = run(case(tmp_path / "in")).results["limits"][0]["probability"]
    before = assess(parse_scenario(GROUND), workers=1).results["limits"][0]["probability"]
    assert after > before


def test_sheet_stands_on_the_tests(tmp_path: Path) -> None:
    bare, tested = parse_scenario(GROUND), read_scenario(case(tmp_path / "in"))
    one, other = sheet(bare), sheet(tested)
    assert (one.tests, other.tests) == (0, 3)
    assert other.values["clay.lambda"] > one.values["clay.lambda"]
    assert other.final_settlement > one.final_settlement
    assert "updated with 3 results" in other.assumptions[-1]


def test_what_a_file_holds_is_part_of_the_identity(tmp_path: Path) -> None:
    path = case(tmp_path / "in")
    first = stated_values(read_scenario(path))
    file = tmp_path / "in" / "laboratory" / "soil tests.csv"
    file.write_text(file.read_text(encoding="utf-8").replace("0.50", "0.51"), encoding="utf-8")
    second = stated_values(read_scenario(path))
    changed = [key for key in first if first[key] != second[key]]
    assert changed == ["evidence[1].file"]
    assert str(first[changed[0]]).startswith("4 results of digest ")


def test_seen_from_another_centre_tests_keep_their_place(tmp_path: Path) -> None:
    scenario: Scenario = read_scenario(case(tmp_path / "in"))
    moved = [one.moved((5.0, 2.0)) for one in scenario.evidence]
    rows = [row for one in moved for row in one.results(1)]
    assert [(row.x, row.y) for row in rows][:3] == [(0.0, -2.0), (0.0, -2.0), (35.0, -2.0)]
