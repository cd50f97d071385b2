"""Further runs of an assessment: what they add, that they change nothing else, and what is refused."""

import re

import numpy as np
import pytest
from small_site import TEXT

from probsoil.assessment import Assessment, assess
from probsoil.assessment.evaluation import prepare
from probsoil.assessment.further import NO_TIME, SUFFICIENT, Precision, _contradiction
from probsoil.errors import ParameterError
from probsoil.probability import QuantityLimit, TrueRuns, monte_carlo_exceedance
from probsoil.report.page import render_report
from probsoil.report.tables import tables
from probsoil.report.validation import check_results
from probsoil.scenario import Scenario, parse_scenario

# a slip that the realisations hardly see, and a settlement that needs another look
RARE = TEXT.replace("not_less_than = 0.8\ntarget_probability = 0.01", "not_less_than = 0.5")


@pytest.fixture(scope="module")
def rare() -> Scenario:
    return parse_scenario(RARE)


@pytest.fixture(scope="module")
def plain(rare: Scenario) -> Assessment:
    return assess(rare, realisations=2048, workers=1)


@pytest.fixture(scope="module")
def further(rare: Scenario) -> Assessment:
    return assess(rare, realisations=2048, workers=2, within=0.25)


def test_everything_else_is_as_without(plain: Assessment, further: Assessment) -> None:
    skipped = {"precision", "provenance"}
    for key in plain.results.keys() | further.results.keys() - skipped:
        if key not in skipped:
            assert plain.results[key] == further.results[key], key


def test_enough_realisations_get_no_further_runs(further: Assessment) -> None:
    rows = {row["limit"]: row for row in further.results["precision"]["limits"]}
    for row in further.results["limits"]:
        found = rows[row["name"]]
        longer = max(row["interval"][1] - row["probability"], row["probability"] - row["interval"][0])
        assert (found["reason"] == SUFFICIENT) == (longer <= 0.25 * row["probability"])
        if found["reason"] == SUFFICIENT:
            assert (found["probability"], found["model_runs"]) == (row["probability"], 2048)
            assert found["interval"] == pytest.approx(row["interval"], rel=1e-8)


def test_rare_limit_agrees_with_many_plain_realisations(rare: Scenario, further: Assessment) -> None:
    row = further.results["precision"]["limits"][2]
    assert row["method"] == "stratified by score"
    assert row["probability"] > 0.0
    many = assess(rare, realisations=16_384, seed=99, workers=2).results["limits"][2]
    assert row["interval"][0] <= many["interval"][1]
    assert row["interval"][1] >= many["interval"][0]
    assert row["interval"][1] < many["interval"][1]  # and sharper, from an eighth of the runs


def test_budget_is_kept_and_the_way_told(further: Assessment) -> None:
    precision = further.results["precision"]
    assert precision["allowed_runs"] == 2048
    assert 0 < precision["further_runs"] <= 2048
    row = precision["limits"][2]
    assert [step["runs"] for step in row["path"]] == sorted({step["runs"] for step in row["path"]})
    assert row["path"][-1]["probability"] == row["probability"]
    assert row["score"] in ("linear", "quadratic", "quadratic of ranks")
    assert row["unseen_bound"] > 0.0


def test_any_number_of_workers_gives_the_same(rare: Scenario) -> None:
    slip = rare.model_copy(update={"limits": rare.limits[2:3]})
    one, two = (assess(slip, realisations=1100, workers=k, within=0.3).results for k in (1, 2))
    assert one["precision"]["limits"][0]["method"] == "stratified by score"
    assert one["precision"] == two["precision"]


def test_points_at_hand_are_those_of_the_further_runs(rare: Scenario) -> None:
    """Plain Monte Carlo goes on where the campaign ended: its outcome is that of a longer campaign."""
    study = prepare(rare.model_copy(update={"realisations": 300}))
    u = TrueRuns(lambda u: u[:, 0], dimension=study.space.dimension, seed=rare.seed).points(0, np.arange(300))
    expected = np.asarray(study(0)["quantity"])
    assert np.array_equal(study.latent(0), study.space.correlated(u))
    np.testing.assert_array_equal(study.at(study.space.correlated(u[100:200]))["quantity"], expected[100:200])


def test_report_table_and_check_take_it(further: Assessment) -> None:
    check_results(further.results, "the results")
    page = render_report(further.results)
    assert "on the condition that the score misses no way of exceeding" in page
    assert 'aria-label="Figure: convergence of limit 3"' in page
    frame = tables(further.results)["precision"]
    last = frame[frame["limit"] == "slip"].iloc[-1]
    assert last["probability [-]"] == further.results["precision"]["limits"][2]["probability"]
    assert all(re.search(r"\[.+\]$", name) for name in frame.select_dtypes("number").columns)


def test_time_that_is_over_leaves_no_further_runs(rare: Scenario) -> None:
    results = assess(rare, realisations=128, workers=1, time_limit=1e-6).results
    assert results["precision"]["further_runs"] == 0
    assert results["precision"]["within"] == Precision().within == 0.2
    reasons = {row["met"]: row["reason"] for row in results["precision"]["limits"]}
    assert reasons[False] == NO_TIME
    assert "no time was left" in render_report(results)


def test_time_is_turned_into_runs(rare: Scenario) -> None:
    one = rare.model_copy(update={"limits": rare.limits[1:2]})  # exceeded in a fifth of all realisations
    precision = assess(one, realisations=64, workers=1, time_limit=600.0, within=0.4).results["precision"]
    assert precision["allowed_runs"] > 64  # more than without a time
    assert 200 <= precision["further_runs"] < precision["allowed_runs"]  # 200 measure the time of a run
    assert precision["limits"][0]["met"]


def test_nothing_uncertain_asks_for_no_runs(fixed_scenario: Scenario) -> None:
    assert "precision" not in assess(fixed_scenario, realisations=64, workers=1, within=0.2).results


def test_contradiction_is_told() -> None:
    runs = TrueRuns(lambda u: u[:, 0], dimension=1, seed=1)
    often, seldom = monte_carlo_exceedance(runs, [QuantityLimit(threshold=0.0), QuantityLimit(threshold=2.5)])
    assert "go by them" in _contradiction(seldom, often)[0]
    assert _contradiction(often, often) == []


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"within": 1.5}, "the precision must lie between 0 and 100 %; got 150 %"),
        ({"within": 0.0}, "the precision must lie between 0 and 100 %; got 0 %"),
        ({"time_limit": 0.0}, "the time limit must be above 0; got 0 s"),
        ({"within": 0.2, "draws": "sobol"}, "draws are 'sobol': use 'monte carlo' draws"),
    ],
)
def test_what_cannot_be_asked_is_refused(rare: Scenario, options: dict, message: str) -> None:
    with pytest.raises(ParameterError, match=re.escape(message)):
        assess(rare, realisations=64, workers=1, **options)
