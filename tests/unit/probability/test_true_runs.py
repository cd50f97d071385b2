"""Runs of a performance function are made once, whoever asks for them."""

import numpy as np
import pytest

from probsoil.errors import ParameterError, ShapeError
from probsoil.parameters import MonteCarlo
from probsoil.probability import QuantityLimit, TrueRuns
from probsoil.probability.true_runs import POOL_STAGE, TRAINING_STAGE, monte_carlo_outcomes


class Counting:
    """A performance function that remembers the points it was run at."""

    def __init__(self):
        self.seen = []

    def __call__(self, u):
        self.seen.append(u.copy())
        return u.sum(axis=1)


def test_points_of_monte_carlo_are_those_of_the_design():
    runs = TrueRuns(lambda u: u[:, :2], dimension=3, seed=5)
    plan = MonteCarlo(5, 1500, 3)
    expected = np.concatenate([plan.chunk(0), plan.chunk(1)])
    assert (monte_carlo_outcomes(runs, 1500) == expected[:, :2]).all()


def test_a_longer_design_keeps_the_runs_of_a_shorter_one():
    performance = Counting()
    runs = TrueRuns(performance, dimension=2, seed=1)
    short = monte_carlo_outcomes(runs, 100)
    long = monte_carlo_outcomes(runs, 1100)
    assert (long[:100] == short).all()
    assert runs.n_runs == 1100 == sum(len(u) for u in performance.seen)
    assert len(np.unique(np.concatenate(performance.seen), axis=0)) == 1100


def test_a_run_is_made_once_in_any_order_and_repeated_for_free():
    performance = Counting()
    runs = TrueRuns(performance, dimension=2, seed=1)
    index = np.array([5000, 3, 1024, 3, 7])
    first = runs.outcomes(POOL_STAGE, index)
    assert runs.n_runs == 4
    assert first[1] == first[3]
    assert (first[:, 0] == runs.points(POOL_STAGE, index).sum(axis=1)).all()
    assert (runs.outcomes(POOL_STAGE, index[::-1]) == first[::-1]).all()
    assert runs.n_runs == 4
    assert runs.is_kept(POOL_STAGE, np.array([3, 4])).tolist() == [True, False]
    assert not runs.is_kept(TRAINING_STAGE, np.array([3])).any()
    assert runs.seconds > 0.0


def test_stages_have_points_of_their_own():
    runs = TrueRuns(lambda u: u[:, 0], dimension=2, seed=1)
    index = np.arange(3)
    assert (runs.points(POOL_STAGE, index) != runs.points(TRAINING_STAGE, index)).all()


def test_no_points_no_runs():
    runs = TrueRuns(lambda u: u[:, 0], dimension=2, seed=1)
    assert len(runs.outcomes(POOL_STAGE, np.array([], dtype=np.int64))) == 0
    assert runs.n_runs == 0


@pytest.mark.parametrize(
    "answer", [lambda u: u[:2, 0], lambda u: u[:, :, np.newaxis], lambda _: np.array(1.0)]
)
def test_an_answer_of_the_wrong_shape_is_refused(answer):
    with pytest.raises(ShapeError, match=r"must give shape \(n,\) or \(n, n_quantity\)"):
        monte_carlo_outcomes(TrueRuns(answer, dimension=2, seed=1), 5)


def test_bad_dimension_and_seed_are_refused():
    with pytest.raises(ParameterError, match="number of parameters must be at least 1; got 0"):
        TrueRuns(np.sum, dimension=0, seed=1)
    with pytest.raises(ParameterError, match="seed must be 0 or more; got -1"):
        TrueRuns(np.sum, dimension=1, seed=-1)


def test_a_limit_counts_what_did_not_converge():
    limit = QuantityLimit(threshold=1.0, quantity=1)
    assert limit.exceeded(np.array([[0.0, 2.0], [0.0, 1.0], [5.0, np.nan]])).tolist() == [True, False, True]


@pytest.mark.parametrize(
    ("keys", "message"),
    [
        ({"threshold": np.nan}, "threshold must be a number"),
        ({"threshold": 1.0, "sense": "below"}, "sense must be"),
        ({"threshold": 1.0, "quantity": -1}, "column of a quantity must be 0 or more; got -1"),
        ({"threshold": 1.0, "target": 1.0}, "target probability must lie between 0 and 1; got 1"),
    ],
)
def test_a_limit_that_cannot_be_is_refused(keys, message):
    with pytest.raises(ParameterError, match=message):
        QuantityLimit(**keys)


def test_a_quantity_that_is_not_there_is_refused():
    with pytest.raises(ShapeError, match="bearing watches quantity 2, but there are only 1"):
        QuantityLimit(threshold=1.0, quantity=2, name="bearing").exceeded(np.zeros((3, 1)))
