"""The calculation sheet against a pocket calculator."""

import math

import pytest

from probsoil.assessment import sheet
from probsoil.scenario import Scenario, parse_scenario

BY_HAND = """
format = 1
title = "By hand"
seed = 1
horizon = 500

[site]
water_table = 0
base = "drained"

[[layers]]
name = "sand"
soil = "granular"
thickness = 2
unit_weight = 19.81
constrained_modulus = 10000
phi = 33

[[layers]]
name = "clay"
soil = "clay"
thickness = 1
unit_weight = 16.81
void_ratio = 1.5
lambda = 0.3
kappa = 0.03
preconsolidation = { ocr = 1.5 }
M = 1.0
permeability = { k = 1e-8, ck = 1.0 }

[load]
shape = "area"
submergence = false

[[stages]]
name = "tank pad"
pressure = 40
start = 0
end = 0.1

[[limits]]
name = "settlement"
quantity = "settlement"
at = 500
not_more_than = 0.2
"""


def mean_of_log(low: float, high: float) -> float:
    """Return the mean of ln s for s spread evenly from low to high."""
    return (high * math.log(high) - low * math.log(low)) / (high - low) - 1.0


def test_layers_by_hand() -> None:
    found = sheet(parse_scenario(BY_HAND))
    sand, clay = found.layers
    # 2 m of 10 kN/m3 net, then 0.5 m of 7 kN/m3 net to the middle of the clay
    assert sand["initial_stress"] == pytest.approx(10.0)
    assert clay["initial_stress"] == pytest.approx(23.5)
    assert clay["preconsolidation"] == pytest.approx(35.25)
    assert sand["settlement"] == pytest.approx(40.0 * 2.0 / 10000.0)
    # recompression by a factor of 1.5, then virgin from 1.5 s to s + 40 kPa for s from 20 to 27 kPa
    mean_log = mean_of_log(60.0, 67.0) - mean_of_log(30.0, 40.5)
    strain = (0.03 * math.log(1.5) + 0.3 * mean_log) / 2.5
    # the sum over the cells stands for the integral; a tenth of a per cent is allowed for that
    assert clay["strain"] == pytest.approx(strain, rel=1e-3)
    assert found.final_settlement == pytest.approx(sand["settlement"] + clay["settlement"], rel=1e-6)
    assert found.slip_safety == {}


def test_layers_sum_to_the_final_settlement(scenario: Scenario) -> None:
    found = sheet(scenario, at="median")
    assert sum(layer["settlement"] for layer in found.layers) == pytest.approx(
        found.final_settlement, rel=1e-6
    )
    assert found.settlement[-1] == found.final_settlement
    assert found.settlement[0] == 0.0
    assert set(found.slip_safety) == {"fill", "trim"}


def test_strength_grows_under_the_fill(scenario: Scenario) -> None:
    for row in sheet(scenario).strength:
        assert row["at_end_of_stage"]["trim"] > row["before"]
        assert row["layer"] == "clay"


def test_median_and_mean_differ_where_the_law_is_skewed(scenario: Scenario) -> None:
    mean, median = sheet(scenario, at="mean"), sheet(scenario, at="median")
    assert median.values["clay.k"] < mean.values["clay.k"]
    assert median.to_dict()["at"] == "median"
    assert list(mean.to_frame()["name"]) == ["clay", "sand"]
