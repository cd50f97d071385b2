"""Where the critical circles lie, in the results of a whole assessment."""

import json
from typing import Any

import numpy as np
import pytest

from probsoil.assessment import Assessment, assess
from probsoil.report.validation import check_results
from probsoil.scenario import Scenario
from probsoil.scenario.distributions import Constant


@pytest.fixture(scope="module")
def whole(scenario: Scenario) -> Assessment:
    return assess(scenario, workers=1)


def circles(found: Assessment) -> list[dict[str, Any]]:
    return [row["circle"] for row in found.results["slip"]]


def test_every_check_says_where_its_circle_lies(whole: Assessment) -> None:
    for row in circles(whole):
        assert row["realisations"] == 2048
        for key in ("touch_depth", "exit", "entry"):
            levels = list(row[key].values())
            assert levels == sorted(levels)
        assert row["touch_depth"]["0.05"] >= 0.2 - 1e-6  # fill without cohesion: into the ground
        assert row["exit"]["0.95"] < row["entry"]["0.05"]
        assert 1 <= len(row["others"]) <= 60


def test_circle_at_the_medians_passes_through_its_ends_and_touches_its_depth(whole: Assessment) -> None:
    for row in circles(whole):
        one = row["at_medians"]
        x, y = one["centre"]
        assert one["radius"] - y == pytest.approx(one["touch_depth"])
        for end in (one["exit"], one["entry"]):
            assert np.hypot(end[0] - x, end[1] - y) == pytest.approx(one["radius"])
        outline = np.array(row["outline"])
        assert one["entry"][1] == pytest.approx(np.interp(one["entry"][0], outline[:, 0], outline[:, 1]))


def test_factor_at_the_medians_lies_among_the_factors(whole: Assessment) -> None:
    for row in whole.results["slip"]:
        assert row["quantiles"]["0.25"] < row["circle"]["at_medians"]["factor"] < row["quantiles"]["0.75"]


def test_berms_traffic_and_cohesion_go_through_to_the_words(scenario: Scenario) -> None:
    more = {
        "berm_width": 4.0,
        "berm_height": 0.8,
        "traffic": Constant(value=10.0),
        "traffic_from": 2.0,
        "fill_cohesion": Constant(value=3.0),
    }
    case = scenario.model_copy(update={"load": scenario.load.model_copy(update=more)})
    found = assess(case, realisations=64)
    assert check_results(json.loads(json.dumps(found.results)), "here")
    assert [row["stage"] for row in found.results["slip"]] == ["fill", "trim", "traffic"]
    assert len(circles(found)[0]["outline"]) == 8
    text = found.results["ground"]["load"]["text"]
    assert "berm 4 m wide and 0.8 m high on each side; traffic on the top" in text
    said = " ".join(found.results["assumptions"])
    assert "Berms rise with the fill" in said
    assert "It counts from 2 years on." in said
