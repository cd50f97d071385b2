"""Uncertain works, added fill as a limit and replaced ground, from scenario to results, report and sheet."""

import re
from typing import Any

import numpy as np
import pytest

from probsoil.assessment import assess, sheet
from probsoil.assessment.evaluation import prepare
from probsoil.assessment.run import Assessment
from probsoil.assessment.statements import assumptions
from probsoil.ground.site_model import site_model
from probsoil.report import render_report
from probsoil.scenario import Scenario, parse_scenario

N = 96
TEXT = """
format = 1
title = "Bank of uncertain height"
seed = 7
realisations = {n}
horizon = 10

[site]
water_table = 0.8
base = "drained"

[[layers]]
name = "clay"
soil = "clay"
thickness = 4
unit_weight = 16
void_ratio = 1.6
lambda = {{ dist = "lognormal", mean = 0.28, cov = 0.1 }}
kappa = 0.04
preconsolidation = {{ pop = 20 }}
M = 1.0
permeability = {{ cv = 3 }}

[load]
shape = "embankment"
crest_width = {{ dist = "normal", mean = 9, sd = 0.4 }}
side_slope = 2
fill_unit_weight = 19
fill_phi = 33
hold_level_until = 2

[[stages]]
name = "fill"
height = {{ dist = "normal", mean = 1.5, sd = 0.12 }}
start = 0
end = 0.2

[[stages]]
name = "trim"
height = {{ dist = "normal", mean = -1.3, sd = 0.1 }}
start = 3
end = 3.1

[[limits]]
name = "settlement"
quantity = "settlement"
at = 2
not_more_than = 0.15

[[limits]]
name = "slip"
quantity = "slip_safety"
not_less_than = 1.6

[[limits]]
name = "top-up"
quantity = "added_fill"
not_more_than = "2 m3/m"
"""


@pytest.fixture(scope="module")
def bank() -> Scenario:
    return parse_scenario(TEXT.format(n=N))


@pytest.fixture(scope="module")
def found(bank: Scenario) -> Assessment:
    return assess(bank, workers=1)


@pytest.fixture(scope="module")
def results(found: Assessment) -> dict[str, Any]:
    return found.results


def test_heights_and_widths_are_parameters_and_drivers(results: dict[str, Any]) -> None:
    addresses = {"stages.fill.height", "stages.trim.height", "load.crest_width"}
    assert addresses <= {row["name"] for row in results["parameters"]}
    drivers = {row["parameter"]: row for row in results["drivers"] if row["limit"] == "settlement"}
    assert drivers["stages.fill.height"]["share"] > 0.3  # a spread of 8 % in the load against 10 % in lambda
    slip = {row["parameter"]: row for row in results["drivers"] if row["limit"] == "slip"}
    assert slip["stages.fill.height"]["direction"] != "lowers"
    assert "load.side_slope" not in drivers


def test_added_fill_is_a_limit_with_its_unit(found: Assessment, results: dict[str, Any]) -> None:
    row = next(row for row in results["limits"] if row["name"] == "top-up")
    assert (row["unit"], row["threshold"], row["time"], row["time_text"]) == ("m3/m", 2.0, {}, "in all")
    (added,) = results["added_fill"]
    assert added["width_varies"] is True
    assert added["volume"]["mean"] == pytest.approx(row["summary"]["mean"], rel=1e-12)
    np.testing.assert_allclose(found.sample.quantity[:, 2], found.sample.volume_added, rtol=1e-12)
    page = " ".join(re.sub("<[^>]*>", " ", render_report(results)).replace("&nbsp;", " ").split())
    assert "the volume of added fill in all is more than 2.00 m3/m" in page
    assert "in each realisation its own" in page


def test_a_removal_of_more_than_is_there_is_told(found: Assessment, results: dict[str, Any]) -> None:
    (row,) = [row for row in results["warnings"] if row["code"] == "overdrawn"]
    assert row["share"] == pytest.approx(found.sample.overdrawn.mean())
    assert 0.0 < row["share"] < 0.3  # by hand: 0.2 m over a spread of 0.156 m, 10 %


def test_report_and_statements_say_what_is_uncertain(bank: Scenario, results: dict[str, Any]) -> None:
    text = results["ground"]["load"]["text"]
    assert text.endswith("; these are means, of crest width normal, mean 9 m, standard deviation 0.4 m")
    changes = [row["change_text"] for row in results["ground"]["stages"]]
    assert changes[0] == "about 1.5 m of fill laid (normal, mean 1.5 m, standard deviation 0.12 m)"
    assert changes[1].startswith("about 1.3 m of fill taken away (normal, mean -1.3 m")
    assert any("has one value in each realisation" in one for one in assumptions(site_model(bank)))


def test_slip_is_that_of_each_section_with_its_circle(found: Assessment, results: dict[str, Any]) -> None:
    first = results["slip"][0]
    assert first["circle"]["at_medians"]["factor"] == pytest.approx(first["quantiles"]["0.5"], rel=0.05)
    exit_x, exit_y = first["circle"]["at_medians"]["exit"]
    centre, radius = first["circle"]["at_medians"]["centre"], first["circle"]["at_medians"]["radius"]
    assert np.hypot(exit_x - centre[0], exit_y - centre[1]) == pytest.approx(radius, rel=1e-9)
    assert results["discretisation"]["realisations"] == 8
    assert results["discretisation"]["slip_error_share"] < 0.01
    gone = found.sample.slip[:, -1]
    assert np.isinf(gone).mean() == pytest.approx(found.sample.overdrawn.mean())


def test_a_chunk_is_the_same_whatever_was_computed_before(bank: Scenario, found: Assessment) -> None:
    study = prepare(bank)
    np.testing.assert_array_equal(study(0)["quantity"], found.sample.quantity)


def test_sheet_is_that_of_plain_numbers(bank: Scenario) -> None:
    plain = re.sub(
        r"(height|crest_width) = \{\{ dist = \"normal\", mean = ([-0-9.]+), sd = [0-9.]+ \}\}",
        r"\1 = \2",
        TEXT,
    )
    one, other = sheet(bank).to_dict(), sheet(parse_scenario(plain.format(n=N))).to_dict()
    assert one["settlement"] == pytest.approx(other["settlement"], rel=1e-3)  # the means of cut laws differ
    assert one["slip_safety"]["fill"] == pytest.approx(other["slip_safety"]["fill"], rel=1e-3)
    assert {"stages.fill.height", "load.crest_width"} <= {row["address"] for row in one["quantities"]}


def test_replaced_ground_is_in_results_report_and_sheet() -> None:
    pit = '[[stages]]\nname = "pit"\nexcavate = 0.8\nstart = 0\nend = 0.1\n\n[[stages]]\nname = "fill"'
    text = TEXT.replace('[[stages]]\nname = "fill"', pit).replace(
        "start = 0\nend = 0.2", "start = 0.1\nend = 0.2"
    )
    text = text.partition('[[limits]]\nname = "slip"')[0]
    case = parse_scenario(text.format(n=24))
    found = assess(case, workers=1).results
    assert found["ground"]["stages"][0]["change_text"] == "0.8 m of soil dug out"
    assert (
        "; the ground below it is dug out 0.8 m deep, and its fill stands" in found["ground"]["load"]["text"]
    )
    assert found["slip"] == []
    said = assumptions(site_model(case))
    assert any("Slip is not looked at" in one for one in said)
    assert not any("Slip surfaces are circles" in one for one in said)
    shown = sheet(case).to_dict()
    line = next(line for line in shown["formulas"] if line["name"] == "stress increase")
    assert line["formula"].startswith("Δσ = I · (γf · h + p − w − r)")
    assert "replaced by its fill" in render_report(found)
