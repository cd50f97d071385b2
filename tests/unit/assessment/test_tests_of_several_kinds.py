"""Tests that disagree, of several kinds, and below other loads: answered by the formula, told, or refused."""

import numpy as np
import pytest
from test_observed import scenario_text
from test_other_load import two_tanks

from probsoil.assessment import sheet
from probsoil.assessment.evaluation import space_of
from probsoil.assessment.evidence_record import conflicts
from probsoil.assessment.observed import observations_of
from probsoil.errors import ScenarioError
from probsoil.scenario import parse_scenario


def log_sd(cov: float) -> float:
    return float(np.sqrt(np.log1p(cov**2)))


def more(kind: str, result: str, test: str, depth: float = 4.0) -> str:
    return f'\n[[evidence]]\nkind = "{kind}"\nlayer = "clay"\ndepth = {depth}\ntest = "{test}"\n{result}\n'


def test_two_kinds_that_disagree_are_weighed_with_their_biases() -> None:
    """One preconsolidation stress by oedometer and thirty by cone: a cone's bias does not average out."""
    stress = 4.0 * 6.0  # kPa, in situ
    text = scenario_text("oedometer", f"preconsolidation_stress = {1.25 * stress}")
    text += "".join(more("cone", f"preconsolidation_stress = {2.29 * stress}", f"C{n}") for n in range(30))
    scenario = parse_scenario(text)
    space = space_of(scenario)
    prior, spread = np.log(1.5 / np.sqrt(1.04)), log_sd(0.2)
    noise = np.array([log_sd(0.12) ** 2 + log_sd(0.10) ** 2, log_sd(0.05) ** 2 / 30 + log_sd(0.30) ** 2])
    data = np.log([1.25, 2.29])
    precision = 1.0 / spread**2 + np.sum(1.0 / noise)
    median = np.exp((prior / spread**2 + np.sum(data / noise)) / precision)
    assert space.at("median")["clay.ocr"] == pytest.approx(median, rel=1e-3)


def test_results_that_contradict_each_other_are_told() -> None:
    text = scenario_text("triaxial", "M = 0.6") + more("triaxial", "M = 1.7", "T2")
    scenario = parse_scenario(text)
    assert conflicts(space_of(scenario))
    agreeing = parse_scenario(text.replace("M = 1.7", "M = 0.62"))
    assert len(conflicts(space_of(agreeing))) < len(conflicts(space_of(scenario)))


def test_strength_and_preconsolidation_of_one_cone_reading_count_once() -> None:
    text = scenario_text("cone", 'test = "C1"\nsu = 9.0\npreconsolidation_stress = 40.0')
    used, unused = observations_of(parse_scenario(text))
    assert [one.parameter for one in used] == ["su"]
    assert "same reading" in unused[0].reason


EVIDENCE = """
[[evidence]]
kind = "oedometer"
layer = "soft clay"
depth = 5.0
x = 0
y = 0
lambda = 0.2
"""


def test_tests_below_one_load_need_stations_to_tell_of_another() -> None:
    with pytest.raises(ScenarioError, match="must be told from that below") as caught:
        parse_scenario(two_tanks() + EVIDENCE)
    assert caught.value.faults[0].key.startswith("limits[6].load")


def test_sheet_of_a_further_load_stands_on_the_parameters_after_the_tests() -> None:
    text = two_tanks() + EVIDENCE
    text = text[: text.index('[[limits]]\nname = "settlement east"')] + text[text.index("[[evidence]]") :]
    scenario = parse_scenario(text)
    values = space_of(scenario).at("median")
    assert (
        values["soft clay.lambda"]
        < 0.9 * space_of(parse_scenario(two_tanks())).at("median")["soft clay.lambda"]
    )
    shown = sheet(scenario, "median", load="east tank")
    assert shown.values["soft clay.lambda"] == pytest.approx(values["soft clay.lambda"], rel=1e-12)
