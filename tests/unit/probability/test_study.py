"""One door: the pilot, the choice, the estimates and what they share."""

import numpy as np
import pytest
from scipy.special import ndtr

from probsoil.errors import ParameterError
from probsoil.probability import Allowance, QuantityLimit, TrueRuns, exceedance_study
from probsoil.probability.study import PILOT_RUNS


def two_quantities(u):
    return np.column_stack([u[:, 0] + 0.5 * u[:, 1], 2.0 - u[:, 1]])


LIMITS = [
    QuantityLimit(threshold=1.0, name="often"),
    QuantityLimit(threshold=3.5, name="seldom", target=1e-3),
    QuantityLimit(threshold=-1.0, sense="not less than", quantity=1, name="safety", target=1e-3),
]
EXACT = ndtr(-np.array([1.0 / np.sqrt(1.25), 3.5 / np.sqrt(1.25), 3.0]))
SCORES = {0: {"known": lambda u: u[:, 0] + 0.4 * u[:, 1]}}


@pytest.fixture(scope="module")
def study():
    return exceedance_study(
        TrueRuns(two_quantities, dimension=2, seed=9), LIMITS, Allowance(runs=6000), given=SCORES
    )


def test_each_limit_has_its_estimator(study):
    assert [one.method for one in study.choices] == [
        "monte carlo",
        "stratified by score",
        "stratified by score",
    ]
    assert study.scores[0] is None
    assert study.scores[1].name == "known"
    assert study.scores[2].training_runs == 100


def test_each_estimate_is_right_within_four_standard_errors(study):
    for one, exact in zip(study.estimates, EXACT, strict=True):
        assert one.reached <= 0.2
        assert abs(one.probability - exact) < 2.0 * one.reached * one.probability


def test_runs_and_pairs_are_told(study):
    assert study.model_runs <= 6000
    assert study.together.model_runs == study.estimates[0].model_runs
    assert study.together.names == ("often", "seldom", "safety")
    assert study.together.both[0, 0] == study.estimates[0].exceeding
    frame = study.to_frame()
    assert frame["limit"].tolist() == ["often", "seldom", "safety"]
    assert (frame["guaranteed_low"] <= frame["probability"]).all()
    assert frame["guaranteed_high"][0] == frame["high"][0]
    assert frame["guaranteed_high"][1] > frame["high"][1]


def test_a_second_study_makes_only_what_is_new():
    runs = TrueRuns(two_quantities, dimension=2, seed=9)
    first = exceedance_study(runs, LIMITS, Allowance(runs=6000), given=SCORES)
    again = exceedance_study(runs, LIMITS, Allowance(runs=6000), given=SCORES)
    assert again.model_runs == first.model_runs
    finer = exceedance_study(runs, LIMITS[1:2], Allowance(runs=8000, within=0.1), given=SCORES)
    assert finer.estimates[0].reached <= 0.1
    assert finer.model_runs - again.model_runs < finer.estimates[0].pool_runs  # the larger pool begins alike


def test_the_estimator_may_be_asked_for():
    runs = TrueRuns(two_quantities, dimension=2, seed=9)
    asked = exceedance_study(runs, LIMITS[1:2], Allowance(runs=3000), method="monte carlo")
    assert asked.choices[0].reason == "As asked."
    assert asked.estimates[0].model_runs == 3000 == runs.n_runs
    assert not asked.estimates[0].stopped
    ranked = exceedance_study(runs, LIMITS[:1], Allowance(runs=3000), method="stratified by score")
    assert ranked.estimates[0].basis == "all strata"
    assert ranked.together.model_runs == PILOT_RUNS


def test_no_limits_are_refused():
    with pytest.raises(ParameterError, match="at least one limit is needed; got none"):
        exceedance_study(TrueRuns(two_quantities, dimension=2, seed=9), [], Allowance(runs=3000))


def test_too_few_runs_for_the_pilot_are_refused():
    runs = TrueRuns(two_quantities, dimension=2, seed=9)
    with pytest.raises(ParameterError, match="at least 256 runs are needed for the pilot; got 100"):
        exceedance_study(runs, LIMITS[:1], Allowance(runs=100))
    assert runs.n_runs == 0


def test_too_few_runs_for_what_was_asked_are_refused():
    runs = TrueRuns(two_quantities, dimension=2, seed=9)
    with pytest.raises(ParameterError, match="do not cover a pilot"):
        exceedance_study(runs, LIMITS[1:2], Allowance(runs=400), method="stratified by score")


def linear(u):
    return u.sum(axis=1) / np.sqrt(u.shape[1])


def finished_study(threshold, n, allowed, **keys):
    runs = TrueRuns(linear, dimension=4, seed=3)
    runs.keep(0, linear(runs.points(0, np.arange(n)))[:, np.newaxis])
    limits = [QuantityLimit(threshold=threshold)] * keys.pop("limits", 1)
    return exceedance_study(runs, limits, Allowance(runs=allowed), finished=n, **keys)


def test_finished_realisations_are_the_first_look_and_cost_nothing():
    found = finished_study(2.0, 3000, 9000)
    one = found.estimates[0]
    assert one.look_runs[:2].tolist() == [3000, 4024]
    assert found.model_runs == one.model_runs - 3000
    assert one.interval[0] < ndtr(-2.0) < one.interval[1]


def test_finished_realisations_choose_strata_where_they_saw_nothing():
    found = finished_study(4.0, 3000, 3000)
    assert found.choices[0].method == "stratified by score"
    assert found.estimates[0].interval[0] < ndtr(-4.0) < found.estimates[0].interval[1]
    assert found.estimates[0].path[-1, 0] == found.estimates[0].pool_runs
    assert found.model_runs <= 3000


def test_too_few_runs_for_strata_are_left_to_plain_monte_carlo():
    found = finished_study(4.0, 3000, 600)
    assert found.choices[0].method == "monte carlo"
    assert "600 runs besides those at hand do not cover strata" in found.choices[0].reason
    assert found.model_runs == 600


def test_runs_are_taken_over_once():
    runs = TrueRuns(linear, dimension=4, seed=3)
    runs.outcomes(0, np.arange(5))
    with pytest.raises(ParameterError, match="points of stage 0 have been run already"):
        runs.keep(0, np.zeros((3, 1)))
