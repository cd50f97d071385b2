"""Scores: what they rank exactly, how one is chosen, what they refuse."""

import numpy as np
import pytest
from scipy.stats import spearmanr

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import QuantityLimit, TrueRuns, score_of
from probsoil.probability.ranking import TAIL_RUNS, training_runs
from probsoil.probability.scores import (
    PolynomialScore,
    chosen_score,
    fitted_scores,
    severity,
    worst_predicted,
)

POINTS = np.random.default_rng(3).standard_normal((300, 4))
WEIGHT = np.array([1.0, -0.5, 0.3, 0.0])


def test_severity_turns_and_puts_what_did_not_converge_on_top():
    values = np.array([1.0, np.nan, -np.inf, np.inf])
    assert severity(values, "not more than").tolist() == [1.0, np.inf, -np.inf, np.inf]
    assert severity(values, "not less than").tolist() == [-1.0, np.inf, np.inf, -np.inf]


def test_a_polynomial_score_is_the_polynomial():
    quadratic = np.array([[1.0, 2.0], [0.0, -3.0]])
    score = PolynomialScore(linear=np.array([0.5, 4.0]), quadratic=quadratic)
    u = np.array([[1.0, 2.0], [-1.0, 0.5]])
    assert score(u) == pytest.approx([0.5 + 8.0 + 1.0 + 4.0 - 12.0, -0.5 + 2.0 + 1.0 - 1.0 - 0.75])


def test_fit_finds_a_polynomial_of_second_degree():
    """The penalty leaves a bias; a thousandth of the spread is allowed for it."""
    worse = POINTS @ WEIGHT + POINTS[:, 0] * POINTS[:, 1] - 0.4 * POINTS[:, 2] ** 2
    score = fitted_scores(POINTS, worse)["quadratic"]
    found = score(POINTS)
    assert np.std(found - found.mean() - worse + worse.mean()) < 1e-3 * np.std(worse)


def test_linear_fit_to_ranks_orders_a_product_of_lognormals():
    worse = np.exp(2.0 * POINTS @ WEIGHT)
    new = np.random.default_rng(4).standard_normal((500, 4))
    correlation = spearmanr(fitted_scores(POINTS, worse)["linear"](new), new @ WEIGHT).statistic
    assert correlation > 0.999


def test_fits_take_what_never_ends_and_did_not_converge():
    worse = POINTS @ WEIGHT
    worse[:5] = np.inf
    worse[5] = -np.inf
    for score in fitted_scores(POINTS, worse).values():
        assert np.isfinite(score(POINTS)).all()
    none = fitted_scores(POINTS, np.full(len(POINTS), np.inf))
    assert all(np.isfinite(score(POINTS)).all() for score in none.values())


def test_too_few_points_or_unlike_ones_are_refused():
    with pytest.raises(ShapeError, match="at least 8 points"):
        fitted_scores(POINTS[:7], POINTS[:7, 0])
    with pytest.raises(ShapeError, match="at least 8 points"):
        fitted_scores(POINTS, POINTS[:9, 0])


def test_the_candidate_that_ranks_the_tail_wins():
    candidates = {"first": lambda u: u[:, 0], "all": lambda u: u @ WEIGHT, "wrong": lambda u: -u[:, 0]}
    choice = chosen_score(candidates, POINTS, POINTS @ WEIGHT, training_runs=7)
    assert choice.name == "all"
    assert choice.correlation["all"] == pytest.approx(1.0)
    assert choice.correlation["first"] == pytest.approx(-choice.correlation["wrong"])
    expected = spearmanr(POINTS[:, 0], POINTS @ WEIGHT).statistic
    assert choice.correlation["first"] == pytest.approx(expected, abs=1e-12)
    frame = choice.to_frame()
    assert frame["chosen"].tolist() == [False, True, False]
    assert (choice.tail_runs, choice.training_runs) == (len(POINTS), 7)


def test_rank_correlation_with_ties_is_that_of_scipy():
    score, worse = np.round(POINTS[:, 0]), np.round(2.0 * POINTS @ WEIGHT)
    found = chosen_score({"one": lambda _: score}, POINTS, worse, training_runs=0).correlation["one"]
    assert found == pytest.approx(spearmanr(score, worse).statistic, abs=1e-12)


def test_a_constant_score_correlates_with_nothing():
    choice = chosen_score({"flat": lambda u: np.zeros(len(u))}, POINTS, POINTS[:, 0], training_runs=0)
    assert choice.correlation["flat"] == 0.0


def test_no_candidate_is_refused():
    with pytest.raises(ParameterError, match="at least one candidate score is needed; got none"):
        chosen_score({}, POINTS, POINTS[:, 0], training_runs=0)
    runs = TrueRuns(lambda u: u[:, 0], dimension=2, seed=1)
    with pytest.raises(ParameterError, match="give one or allow fitting"):
        score_of(runs, QuantityLimit(threshold=1.0), fit=False)


def test_worst_predicted_are_the_highest():
    u = np.arange(10.0).reshape(-1, 1)
    assert worst_predicted({"one": lambda v: v[:, 0]}, u, 3).tolist() == [9, 8, 7]


def test_a_single_given_score_costs_no_runs():
    runs = TrueRuns(lambda u: u[:, 0], dimension=2, seed=1)
    choice = score_of(runs, QuantityLimit(threshold=1.0), {"closed form": lambda u: u[:, 0]}, fit=False)
    assert (choice.name, runs.n_runs, choice.correlation) == ("closed form", 0, {})
    assert choice.to_frame()["candidate"].tolist() == ["closed form"]


def test_given_and_fitted_scores_compete_on_runs_that_nothing_was_fitted_to():
    runs = TrueRuns(lambda u: np.exp(u @ WEIGHT), dimension=4, seed=1)
    limit = QuantityLimit(threshold=1.0)
    choice = score_of(runs, limit, {"exact": lambda u: u @ WEIGHT, "useless": lambda u: u[:, 3]})
    assert choice.name == "exact"
    assert runs.n_runs == training_runs(4) + TAIL_RUNS == 300
    assert set(choice.correlation) == {"exact", "useless", "linear", "quadratic", "quadratic of ranks"}
    score_of(runs, limit)
    assert runs.n_runs <= 400  # the fitted ones may pick other tail points, the training runs are kept


def test_several_given_scores_need_tail_runs_only():
    runs = TrueRuns(lambda u: u[:, 0] ** 3, dimension=2, seed=1)
    given = {"useless": lambda u: u[:, 1], "good": lambda u: u[:, 0]}
    choice = score_of(runs, QuantityLimit(threshold=1.0), given, fit=False)
    assert (choice.name, runs.n_runs, choice.training_runs) == ("good", TAIL_RUNS, 0)


def test_the_lower_side_is_ranked_for_a_limit_from_below():
    runs = TrueRuns(lambda u: 3.0 + u @ WEIGHT, dimension=4, seed=1)
    choice = score_of(runs, QuantityLimit(threshold=1.0, sense="not less than"))
    assert spearmanr(choice.score(POINTS), -POINTS @ WEIGHT).statistic > 0.99


def test_a_quantity_that_is_not_there_is_refused():
    runs = TrueRuns(lambda u: u[:, 0], dimension=2, seed=1)
    with pytest.raises(ShapeError, match="watches quantity 1"):
        score_of(runs, QuantityLimit(threshold=1.0, quantity=1))
