"""Further loads and excavation from the scenario to results, report and sheet."""

import re

import pytest

from probsoil.assessment import assess, sheet
from probsoil.assessment.statements import assumptions
from probsoil.ground.site_model import site_model
from probsoil.report import render_report
from probsoil.scenario import Scenario, parse_scenario, starter_text

N = 64


def uncommented(text: str, first: str, last: str) -> str:
    """Take the # off every line from the first that holds `first` to the one before that holds `last`."""
    head = text.partition(first)[0]
    start = head.rindex("\n") + 1
    end = start + text[start:].index(last)
    return text[:start] + re.sub(r"^# ?", "", text[start:end], flags=re.MULTILINE) + text[end:]


def few(text: str) -> Scenario:
    return parse_scenario(re.sub(r"realisations = [\d_]+", f"realisations = {N}", text))


@pytest.fixture(scope="module")
def tanks() -> Scenario:
    text = uncommented(starter_text("tank"), "[[further_loads]]", "# Stages give a pressure")
    text = uncommented(text, "[[stages]]", '[[stages]]\nname = "water test, half full"')
    fill = 'fill_unit_weight = { dist = "normal", mean = 8.5, cov = 0.1 }\nx = 24'
    return few(re.sub(r"^x = 24", fill, text, flags=re.MULTILINE).replace("pressure = 60", "height = 7"))


@pytest.fixture(scope="module")
def footing() -> Scenario:
    text = uncommented(starter_text("footing"), "[[stages]]", '[[stages]]\nname = "frame"')
    return few(text.replace('start = "0 weeks"\nend = "20 weeks"', 'start = "2 weeks"\nend = "20 weeks"'))


def test_starters_with_their_remarks_taken_off_are_sound(tanks: Scenario, footing: Scenario) -> None:
    assert [load.name for load in tanks.further_loads] == ["old tank"]
    assert [stage.excavate for stage in footing.stages] == [1.2, None, None]


def test_further_loads_are_in_results_report_and_statements(tanks: Scenario) -> None:
    results = assess(tanks, workers=1).results
    (row,) = results["ground"]["further_loads"]
    assert (row["name"], row["text"].partition(",")[0]) == ("old tank", "circle")
    assert "centre 24 m across and 0 m along" in row["text"]
    stages = {stage["name"]: stage for stage in results["ground"]["stages"]}
    assert stages["old tank refilled"]["change_text"] == "7 m of fill laid on old tank"
    assert stages["old tank refilled"]["height_after"] == 0.0
    address = "further_loads.old tank.fill_unit_weight"
    assert address in {parameter["name"] for parameter in results["parameters"]}
    assert address in {driver["parameter"] for driver in results["drivers"]}
    assert "further load old tank: circle" in render_report(results)
    assert any("Further loads add their stress" in one for one in assumptions(site_model(tanks)))
    assert [row["stage"] for row in results["bearing"]][:2] == ["steelwork", "old tank refilled"]


def test_sheet_adds_up_the_stress_of_further_loads(tanks: Scenario) -> None:
    shown = sheet(tanks).to_dict()
    names = [line["name"] for line in shown["formulas"]]
    assert "stress of old tank" in names
    assert all(row["further_stress"] > 0.0 for row in shown["sublayers"] if row["depth"] > 1.0)
    alone = sheet(few(starter_text("tank"))).to_dict()
    assert all(row["further_stress"] == 0.0 for row in alone["sublayers"])


def test_excavation_is_in_results_report_and_statements(footing: Scenario) -> None:
    found = assess(footing, workers=1)
    results = found.results
    assert results["ground"]["stages"][0]["change_text"] == "1.2 m of soil dug out"
    assert found.sample.settlement.min() < 0.0
    assert "of soil dug out" in render_report(results).replace("&nbsp;", " ").replace("\u00a0", " ")
    said = assumptions(site_model(footing))
    assert any("Heave is settlement below zero" in one for one in said)
    assert not any("removal is not computed" in one for one in said)
    plain = assumptions(site_model(few(starter_text("footing"))))
    assert any("removal is not computed" in one for one in plain)
    assert [row["stage"] for row in results["bearing"]] == ["frame", "finishes and use"]


def test_sheet_takes_off_what_was_dug_out(footing: Scenario) -> None:
    shown = sheet(footing).to_dict()
    line = next(line for line in shown["formulas"] if line["name"] == "stress increase")
    assert line["formula"].startswith("Δσ = I · (γf · h + p − w − r)")
    rows = {row["time"]: row for row in shown["through_time"]}
    first = rows[min(time for time in rows if time > 0.0)]
    assert first["surface_pressure"] < 0.0
    assert first["settlement"] < 0.0
