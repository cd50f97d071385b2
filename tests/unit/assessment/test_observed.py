"""What a test observes is what the ground models compute at its point; what tells nothing is named."""

import math

import numpy as np
import pytest

from probsoil.assessment.evaluation import space_of
from probsoil.assessment.evidence_record import conflicts, evidence_record
from probsoil.assessment.observed import observations_of
from probsoil.ground.undrained_strength import (
    m_from_friction_angle,
    normally_consolidated_strength_ratio,
    plastic_volumetric_ratio,
    undrained_shear_strength,
)
from probsoil.scenario import parse_scenario

CLAY = """format = 1
title = "Tests"
seed = 1
realisations = 200
horizon = 10

[site]
water_table = 0.0
base = "drained"

[[layers]]
name = "clay"
soil = "clay"
thickness = 6.0
unit_weight = 15.81
void_ratio = {{ dist = "normal", mean = 2.0, sd = 0.1 }}
{virgin}
{reloading}
preconsolidation = {{ {history} }}
{friction}
permeability = {{ {flow} }}
{creep}
{more}

[load]
shape = "area"
fill_unit_weight = 19.0

[[stages]]
name = "fill"
height = 1.0
start = 0.0
end = 0.1

[[limits]]
name = "settlement"
quantity = "settlement"
at = 10
not_more_than = 0.3

[[evidence]]
kind = "{kind}"
layer = "clay"
depth = 4.0
{result}
"""
LAW = '{{ dist = "lognormal", mean = {0}, cov = 0.2 }}'
USUAL = {
    "virgin": "lambda = " + LAW.format(0.36),
    "reloading": "kappa = " + LAW.format(0.05),
    "history": "ocr = " + LAW.format(1.5),
    "friction": "M = " + LAW.format(1.0),
    "flow": "cv = " + LAW.format(1.0),
    "creep": "C_alpha_ratio = 0.04",
    "more": "",
}
STRESS = 4.0 * (15.81 - 9.81)
YEAR = 365.25 * 86400.0
DRAWN = {
    "clay.lambda": 0.4,
    "clay.kappa": 0.04,
    "clay.Cc": 0.9,
    "clay.Cs": 0.1,
    "clay.CR": 0.3,
    "clay.RR": 0.03,
    "clay.void_ratio": 1.9,
    "clay.preconsolidation": 50.0,
    "clay.ocr": 1.7,
    "clay.pop": 20.0,
    "clay.M": 1.1,
    "clay.phi": 27.0,
    "clay.cv": 1.5,
    "clay.k": 1e-9,
    "clay.C_alpha_ratio": 0.05,
    "clay.C_alpha": 0.03,
    "clay.strength_S": 0.3,
    "clay.strength_m": 0.8,
    "site.mode_factor": 0.75,
}


def scenario_text(kind: str, result: str, **given: str) -> str:
    return CLAY.format(kind=kind, result=result, **{**USUAL, **given})


def observed(kind: str, result: str, **given: str) -> tuple[float, tuple[str, ...]]:
    """What the test would give at the drawn values, and what decides it."""
    (one,), unused = observations_of(parse_scenario(scenario_text(kind, result, **given)))
    assert not unused
    values = [np.array([DRAWN[address]]) for address in one.addresses]
    found = one.factor * values[0] if one.model is None else one.model(values)
    return float(found[0]), one.addresses


def strength(ratio: float, exponent: float, history: float) -> float:
    return float(undrained_shear_strength(STRESS, history, ratio, exponent))


EXPONENT = float(plastic_volumetric_ratio(0.4, 0.04))
RATIO = float(normally_consolidated_strength_ratio(1.1, EXPONENT))
SU = strength(RATIO, EXPONENT, 1.7 * STRESS)
OUTRIGHT = "strength = { S = " + LAW.format(0.25) + ", m = " + LAW.format(0.8) + " }"


@pytest.mark.parametrize(
    ("kind", "result", "given", "expected"),
    [
        ("oedometer", "lambda = 0.4", {}, 0.4),
        ("oedometer", "lambda = 0.4", {"virgin": "Cc = " + LAW.format(0.8)}, 0.9 / math.log(10)),
        ("oedometer", "lambda = 0.4", {"virgin": "CR = " + LAW.format(0.25)}, 0.3 * 2.9 / math.log(10)),
        ("oedometer", "kappa = 0.04", {"reloading": "Cs = " + LAW.format(0.1)}, 0.1 / math.log(10)),
        ("oedometer", "kappa = 0.04", {"reloading": "RR = " + LAW.format(0.03)}, 0.03 * 2.9 / math.log(10)),
        ("oedometer", "preconsolidation_stress = 40", {}, 1.7 * STRESS),
        ("oedometer", "preconsolidation_stress = 40", {"history": "stress = " + LAW.format(50)}, 50.0),
        ("oedometer", "preconsolidation_stress = 40", {"history": "pop = " + LAW.format(15)}, STRESS + 20.0),
        ("oedometer", "cv = 1", {}, 1.5),
        ("oedometer", "k = 1e-9", {}, 1.5 * 9.81 * 0.4 / (2.9 * 1.7 * STRESS) / YEAR),
        (
            "oedometer",
            "cv = 1",
            {"flow": "k = " + LAW.format(1e-9) + ", ck = 0.9"},
            1e-9 * YEAR * 2.9 * 1.7 * STRESS / (9.81 * 0.4),
        ),
        ("oedometer", "k = 1e-9", {"flow": "k = " + LAW.format(1e-9) + ", ck = 0.9"}, 1e-9),
        ("oedometer", "C_alpha_ratio = 0.05", {"creep": "C_alpha_ratio = " + LAW.format(0.04)}, 0.05),
        (
            "oedometer",
            "C_alpha_ratio = 0.05",
            {"creep": "C_alpha = " + LAW.format(0.03)},
            0.03 / (0.4 * math.log(10)),
        ),
        ("oedometer", "void_ratio = 2", {}, 1.9),
        ("triaxial", "M = 1", {}, 1.1),
        ("triaxial", "M = 1", {"friction": "phi = " + LAW.format(25)}, float(m_from_friction_angle(27.0))),
        ("triaxial", "su = 12", {}, SU),
        ("triaxial", "su = 12", {"more": OUTRIGHT}, strength(0.3, 0.8, 1.7 * STRESS)),
        ("triaxial", "su_ratio = 0.3", {}, RATIO),
        ("triaxial", "su_ratio = 0.3", {"more": OUTRIGHT}, 0.3),
        ("triaxial", "Lambda = 0.9", {}, EXPONENT),
        ("triaxial", "Lambda = 0.9", {"more": OUTRIGHT}, 0.8),
        ("vane", "su = 10", {}, 0.75 * SU),
        ("cone", "q_net = 150", {}, 12.7 * SU),
        (
            "cone",
            "q_net = 150",
            {"more": '\n[[test_errors]]\nkind = "cone"\nparameter = "q_net"\nfactor = 15\n'},
            15 * SU,
        ),
    ],
)
def test_what_a_test_observes(kind: str, result: str, given: dict[str, str], expected: float) -> None:
    found, _ = observed(kind, result, **given)
    assert found == pytest.approx(expected, rel=1e-12)


def test_strength_never_below_that_of_the_stress_in_situ() -> None:
    given = {"history": "ocr = " + LAW.format(1.5)}
    (one,), _ = observations_of(parse_scenario(scenario_text("triaxial", "su = 12", **given)))
    values = [np.array([{**DRAWN, "clay.ocr": 0.7}[address]]) for address in one.addresses]
    assert one.model is not None
    assert float(one.model(values)[0]) == pytest.approx(strength(RATIO, EXPONENT, STRESS), rel=1e-12)


def test_errors_are_defaults_unless_given() -> None:
    more = '\n[[test_errors]]\nkind = "oedometer"\nparameter = "lambda"\nerror_cov = 0.07\n'
    (one,), _ = observations_of(parse_scenario(scenario_text("oedometer", "lambda = 0.4", more=more)))
    assert (one.error, one.bias) == (0.07, 0.06)
    assert one.below_top == 4.0


@pytest.mark.parametrize(
    ("kind", "result", "more", "reason"),
    [
        ("oedometer", "C_alpha_ratio = 0.05", "", "fixed in the scenario"),
        ("oedometer", "C_alpha_ratio = 0.05", "no creep", "left out of the scenario"),
        ("cone", "q_net = 150\nsu = 12", "", "cone resistance it was made from"),
        ("triaxial", "su = 12\nsu_ratio = 0.3", "", "single specimens"),
        ("oedometer", "cv = 1.0\nk = 1e-9", "", "the cv of the same test"),
    ],
)
def test_results_that_tell_nothing_new_are_named(kind: str, result: str, more: str, reason: str) -> None:
    text = scenario_text(kind, result)
    if more == "no creep":
        text = text.replace(USUAL["creep"], "")
    _, unused = observations_of(parse_scenario(text))
    (one,) = unused
    assert reason in one.reason


def test_strengths_of_the_same_specimens_in_another_layer_count_once() -> None:
    text = scenario_text("triaxial", 'test = "a + b"\nsu_ratio = 0.3')
    start, end = text.index("[[layers]]"), text.index("[load]")
    deeper = text[start:end].replace('name = "clay"', 'name = "below"')
    for other, reasons in (("b", 1), ("c", 0)):
        more = f'\n[[evidence]]\nkind = "triaxial"\nlayer = "below"\ndepth = 8.0\ntest = "{other}"\nsu = 20\n'
        _, unused = observations_of(parse_scenario(text[:end] + deeper + text[end:] + more))
        assert len(unused) == reasons
        assert all("single specimens" in one.reason for one in unused)


def test_record_and_conflict() -> None:
    near = parse_scenario(scenario_text("oedometer", "lambda = 0.4\nC_alpha_ratio = 0.05"))
    record = evidence_record(space_of(near), near)["evidence"]
    assert [row["name"] for row in record["parameters"]] == ["clay.lambda"]
    row = record["parameters"][0]
    assert row["tests"] == 1
    assert row["after"]["sd"] < row["before"]["sd"]
    assert row["data"][0]["value"] == 0.4
    for when in ("before", "after"):
        values, density = np.array(row["density"]["value"]), np.array(row["density"][when])
        assert np.trapezoid(density, values) == pytest.approx(1.0, abs=0.01)
        assert np.trapezoid(values * density, values) == pytest.approx(row[when]["mean"], rel=0.01)
    assert len(record["unused"]) == 1
    assert conflicts(space_of(near)) == []
    far = parse_scenario(scenario_text("oedometer", "lambda = 1.4"))
    assert [code for code, _ in conflicts(space_of(far))] == [
        "evidence_far_from_prior",
        "test_far_from_prior",
    ]
    assert evidence_record(space_of(far), far)["evidence"]["conflict"]["far"]
