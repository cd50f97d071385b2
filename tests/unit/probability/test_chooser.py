"""Which estimator is chosen, and that the runs it foresees are about right."""

import numpy as np
import pytest

from probsoil.errors import ParameterError
from probsoil.probability import Allowance, Pilot, chosen_method, clopper_pearson
from probsoil.probability.chooser import expected_probability, monte_carlo_runs, ranked_runs

PILOT = Pilot(runs=256, exceeding=0, seconds_per_run=0.001)


@pytest.mark.parametrize("probability", [0.3, 0.05, 1e-3, 1e-5])
@pytest.mark.parametrize("within", [0.05, 0.2, 0.5])
def test_runs_foreseen_give_the_precision(probability, within):
    """The expansion of the arm stops after its second term: 3 % of the precision is allowed for the rest."""
    n = monte_carlo_runs(probability, within)
    k = n * probability
    high = float(clopper_pearson(round(k), n)[1])
    assert high / (round(k) / n) - 1.0 == pytest.approx(within, rel=0.03 + 1.0 / k)


def test_plain_monte_carlo_where_it_reaches():
    choice = chosen_method(PILOT, Allowance(runs=200_000), dimension=15, target=1e-3)
    assert choice.method == "monte carlo"
    assert (choice.most_runs, choice.expected_within, choice.probability) == (200_000, 0.2, 1e-3)
    assert choice.runs_needed < 200_000
    assert "Plain Monte Carlo: for a probability of about 0.001, 114,567 realisations" in choice.reason


def test_strata_where_it_does_not():
    choice = chosen_method(PILOT, Allowance(runs=2500), dimension=35, target=1e-4)
    assert choice.method == "stratified by score"
    assert choice.runs_needed > 1_000_000
    assert "2,500 are allowed; strata need some 2,325" in choice.reason


def test_the_rest_by_plain_monte_carlo():
    few = chosen_method(PILOT, Allowance(runs=1000), dimension=35, target=1e-2)
    assert few.method == "monte carlo"
    assert few.expected_within == pytest.approx(float(clopper_pearson(10, 1000)[1]) * 100 - 1)
    assert "expect the probability within some 83 %" in few.reason
    none = chosen_method(PILOT, Allowance(runs=1000), dimension=35, target=1e-4)
    assert none.expected_within == np.inf
    assert "an upper limit of the probability" in none.reason


def test_a_score_known_beforehand_saves_its_runs():
    assert ranked_runs(35, 0.2) - ranked_runs(35, 0.2, has_score=True) == 625
    assert ranked_runs(3, 0.2) - ranked_runs(3, 0.2, has_score=True) == 300
    assert ranked_runs(3, 0.1, has_score=True) == 4 * ranked_runs(3, 0.2, has_score=True)
    assert ranked_runs(3, 0.5, has_score=True) == ranked_runs(3, 0.2, has_score=True)
    budget = Allowance(runs=1900)
    assert chosen_method(PILOT, budget, dimension=35, target=1e-4).method == "monte carlo"
    known = chosen_method(PILOT, budget, dimension=35, target=1e-4, has_score=True)
    assert known.method == "stratified by score"


def test_time_is_turned_into_runs():
    assert chosen_method(PILOT, Allowance(seconds=30.0), dimension=2).most_runs == 30_000
    assert chosen_method(PILOT, Allowance(seconds=30.0, runs=500), dimension=2).most_runs == 500
    free = Pilot(runs=10, exceeding=0, seconds_per_run=0.0)
    assert chosen_method(free, Allowance(seconds=1.0), dimension=2).most_runs == 10**12


def test_what_the_pilot_saw_comes_before_the_target():
    assert expected_probability(Pilot(runs=256, exceeding=64, seconds_per_run=0.0), 1e-3) == 0.25
    assert expected_probability(Pilot(runs=256, exceeding=9, seconds_per_run=0.0), 1e-3) == 1e-3
    assert expected_probability(Pilot(runs=256, exceeding=3, seconds_per_run=0.0), None) == 1e-3
    high = float(clopper_pearson(0, 256)[1])
    assert expected_probability(Pilot(runs=256, exceeding=0, seconds_per_run=0.0), 0.4) == high
    assert expected_probability(Pilot(runs=20, exceeding=20, seconds_per_run=0.0), 0.4) == 0.4


def test_the_choice_is_a_table():
    frame = chosen_method(PILOT, Allowance(runs=1000), dimension=2).to_frame()
    assert frame["method"].tolist() == ["monte carlo"]


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: Pilot(runs=0, exceeding=0, seconds_per_run=0.0), "0 to n exceedances in n of at least 1"),
        (lambda: Pilot(runs=5, exceeding=6, seconds_per_run=0.0), "got 6 in 5"),
        (lambda: Pilot(runs=5, exceeding=0, seconds_per_run=-1.0), "time of a run must be 0 or more"),
        (lambda: Allowance(), "a number of runs or a time must be allowed"),
        (lambda: Allowance(runs=0), "what is allowed must be above 0"),
        (lambda: Allowance(seconds=0.0), "what is allowed must be above 0"),
        (lambda: Allowance(runs=5, within=1.0), "precision must lie between 0 and 1"),
        (lambda: chosen_method(PILOT, Allowance(runs=5), dimension=0), "number of parameters must be at"),
        (lambda: chosen_method(PILOT, Allowance(runs=5), dimension=1, target=0.0), "target probability"),
    ],
)
def test_what_cannot_be_is_refused(make, message):
    with pytest.raises(ParameterError, match=message):
        make()
