"""A footing from the scenario to results, warnings, report and sheet."""

import re

import numpy as np
import pytest

from probsoil.assessment import assess, sheet
from probsoil.assessment.bearing_formulas import bearing_formulas
from probsoil.assessment.statements import assumptions
from probsoil.ground.bearing_capacity import strength_growth_factor
from probsoil.ground.site_model import site_model
from probsoil.report import render_report
from probsoil.scenario import Scenario, parse_scenario, starter_text

N = 256


@pytest.fixture(scope="module")
def footing() -> Scenario:
    text = starter_text("footing")
    return parse_scenario(re.sub(r"realisations = \d+", f"realisations = {N}", text))


@pytest.fixture(scope="module")
def results(footing: Scenario) -> dict:
    return assess(footing, workers=1).results


def test_results_hold_the_bearing_of_every_stage(results: dict) -> None:
    rows = results["bearing"]
    assert [row["stage"] for row in rows] == ["frame", "finishes and use"]
    assert [row["pressure"] for row in rows] == [50.0, 83.0]
    assert all(row["fill_height"] == 0.0 for row in rows)
    assert rows[1]["mean"] < rows[0]["mean"]
    assert results["slip"] == []
    assert results["settlement"]["station"] == "centre"
    assert "2.5 m wide, 3 m long, base 1.2 m below ground level" in results["ground"]["load"]["text"]
    assert 0.0 <= results["discretisation"]["bearing_error_share"] < 0.01


def test_limit_on_bearing_is_the_least_of_the_stages(footing: Scenario) -> None:
    found = assess(footing, workers=1)
    place = [limit.quantity for limit in footing.limits].index("bearing_safety")
    assert found.sample.quantity[:, place] == pytest.approx(found.sample.bearing.min(axis=1))
    assert found.sample.bearing.shape == (N, 2)


def test_a_foundation_that_is_loaded_too_much_fails(footing: Scenario) -> None:
    heavy = parse_scenario(
        starter_text("footing")
        .replace("pressure = 33", "pressure = 250")
        .replace("realisations = 20000", "realisations = 64")
    )
    results = assess(heavy, workers=1).results
    assert results["bearing"][1]["probability_below_one"] > 0.5
    limit = next(limit for limit in results["limits"] if limit["quantity"] == "bearing_safety")
    assert limit["verdict"] == "beyond target"
    assert assess(footing, workers=1).results["bearing"][1]["probability_below_one"] == 0.0


def test_report_shows_shape_stages_and_assumptions(results: dict) -> None:
    page = " ".join(re.sub(r"<[^>]+>", " ", render_report(results)).split())
    assert "Safety against bearing failure, stage by stage" in page
    assert "Safety against slip" not in page
    assert "83.0 kPa" in page
    assert "the least factor of safety against bearing failure over the stages" in page
    assert "Davis and Booker" in page
    assert "The factor of safety against bearing failure differed by at most" in page


def test_assumptions_follow_the_load(footing: Scenario) -> None:
    said = " ".join(assumptions(site_model(footing)))
    assert "uniform pressure" in said
    assert "net" in said
    assert "circles" not in said


def test_sheet_shows_every_number_of_the_bearing(footing: Scenario) -> None:
    """Each row by a pocket calculator: strip, factors, capacity, pressure, safety; the least of a stage."""
    content = sheet(footing).to_dict()
    rows = content["bearing"]
    assert {row["layer"] for row in rows} == {"crust", "clay"}
    for row in rows:
        rise = row["growth"] * row["width"]
        line = row["growth_factor"] * ((2.0 + np.pi) * row["strength"] + 0.25 * rise)
        assert row["strip_capacity"] == pytest.approx(line * row["crust_factor"])
        assert row["growth_ratio"] == pytest.approx(rise / row["strength"])
        assert row["growth_factor"] == pytest.approx(float(strength_growth_factor(row["growth_ratio"])))
        product = row["strip_capacity"] * row["shape_factor"] * row["depth_factor"]
        assert row["capacity"] == pytest.approx(product)
        assert row["safety"] == pytest.approx(row["capacity"] / row["pressure"])
        assert row["depth_factor"] == pytest.approx(1.0 + 0.2 * 1.2 / row["width"])
    by_stage = {row["stage"] for row in rows}
    least = {stage: min(row["safety"] for row in rows if row["stage"] == stage) for stage in by_stage}
    assert content["bearing_safety"] == pytest.approx(least)
    assert content["station"] == "centre"
    base = [row for row in rows if row["depth"] == pytest.approx(1.2)]
    assert [row["pressure"] for row in base] == pytest.approx([50.0, 83.0])


@pytest.mark.parametrize("kind", ["footing", "tank"])
def test_points_of_the_sheet_give_line_and_crust(kind: str) -> None:
    """Every column of the table by hand: the line, what is above it and never grows, and the arcs."""
    content = sheet(parse_scenario(starter_text(kind))).to_dict()
    row = min(content["bearing"], key=lambda one: one["safety"])
    points, last = content["bearing_points"], np.inf
    level, first, second = points[:3]
    rise = (second["strength"] - first["strength"]) / (second["below"] - first["below"])
    assert level["strength"] == pytest.approx(first["strength"] - max(rise, 0.0) * first["below"])
    assert (level["below"], level["arc"]) == (0.0, 0.0)
    assert len(points) > 10
    for point in points:
        line = row["strength"] + row["growth"] * min(point["below"], row["width"])
        assert point["line"] == pytest.approx(line)
        assert point["strength"] >= line * (1.0 - 1e-9)
        last = min(last, point["strength"] - line)
        assert point["excess"] == pytest.approx(last, abs=1e-9)
        assert point["depth"] == pytest.approx(row["depth"] + point["below"])
    lines = {line["name"]: line for line in content["formulas"] if line["topic"] == "bearing"}
    numbers = {one["symbol"]: one["value"] for one in lines["crust factor"]["symbols"]}
    assert sum(one["excess"] * one["arc"] for one in points) == pytest.approx(numbers["Qe"])
    even = lines["a circle on strength 1"]["result"]
    assert sum(one["arc"] for one in points) == pytest.approx(even)


def test_thin_clay_below_an_embankment_is_checked_for_squeezing() -> None:
    thick = starter_text("embankment")
    thin = thick.replace("thickness = 1.5", "thickness = 0.5").replace(
        'thickness = { dist = "normal", mean = 6.0, sd = 0.5 }', "thickness = 1.5"
    )
    assert thin != thick
    assert sheet(parse_scenario(thick)).squeezing_safety == {}
    found = sheet(parse_scenario(thin)).squeezing_safety
    assert set(found) <= {"first lift", "second lift", "surcharge off"}
    assert "second lift" in found
    assert found["second lift"] > 0.5


PLAIN = """
format = 1
title = "no crust"
seed = 1
horizon = 5
[site]
water_table = 0
base = "undrained"
[[layers]]
name = "clay"
soil = "clay"
thickness = 12
unit_weight = 16
void_ratio = 1.8
lambda = 0.3
kappa = 0.05
preconsolidation = { ocr = 1.3 }
M = 1.0
permeability = { cv = 0.01 }
[load]
shape = "strip"
width = 6
submergence = false
[[stages]]
name = "all"
start = 0
end = 0.01
pressure = 5
[[limits]]
name = "end"
quantity = "settlement"
at = 5
not_more_than = 1
"""


def test_sheet_of_strength_that_grows_from_the_surface_has_no_crust() -> None:
    content = sheet(parse_scenario(PLAIN)).to_dict()
    lines = {line["name"]: line for line in content["formulas"] if line["topic"] == "bearing"}
    assert "crust factor" not in lines
    (row,) = content["bearing"]
    assert row["crust_factor"] == 1.0
    assert row["growth_ratio"] > 10.0
    start = lines["strength at the level, of the line that touches the profile"]
    values = {one["symbol"]: one["value"] for one in start["symbols"]}
    touched = next(one for one in content["bearing_points"] if one["below"] == values["z"])
    assert touched["strength"] == pytest.approx(touched["line"], rel=1e-9)
    assert all(point["excess"] == 0.0 for point in content["bearing_points"])


def test_line_that_touches_at_the_level_is_worked_from_two_points() -> None:
    """10 kPa at 0.5 m and 12 at 1.5 m: 9 kPa at the level, by the straight line."""
    row = {
        "stage": "all",
        "depth": 0.0,
        "width": 4.0,
        "strength": 9.0,
        "growth": 1.8,
        "growth_ratio": 0.8,
        "growth_factor": 1.18,
        "crust_factor": 1.0,
        "strip_capacity": 56.73,
        "shape_factor": 1.0,
        "depth_factor": 1.0,
        "capacity": 56.73,
        "pressure": 10.0,
        "safety": 5.673,
    }
    profile = ((0.0, 9.0, 9.0), (0.5, 10.0, 9.9), (1.5, 12.0, 11.7))
    points = [dict(zip(("below", "strength", "line"), point, strict=True)) for point in profile]
    lines = bearing_formulas({"row": row, "circle": None, "points": points})
    assert [line.name for line in lines] == [
        "strength at the level, where the line touches the profile",
        "growth of the line",
        "capacity of a strip",
        "bearing capacity",
        "factor of safety",
    ]
    assert lines[0].numbers == "10 − max((12 − 10)/(1.5 − 0.5), 0) · 0.5"
    assert lines[0].result == 9.0
