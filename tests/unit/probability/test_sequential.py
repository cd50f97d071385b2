"""Monte Carlo that may stop: its coverage is worked out outcome by outcome, not sampled."""

import numpy as np
import pytest
from scipy.stats import binom

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import (
    MonteCarloPlan,
    QuantityLimit,
    TrueRuns,
    clopper_pearson,
    monte_carlo_exceedance,
    sequential_limits,
    unseen_bound,
)
from probsoil.probability.sequential import at_most, look_schedule, stopping_counts

LOOKS = np.array([20, 40, 80])
STOPS = np.array([6, 8, 81])
PROBABILITIES = np.linspace(0.004, 0.6, 150)


def outcomes(probability: float) -> dict[tuple[int, int], float]:
    """Chance of every end of the run, carried on by a plain loop: (look, exceedances)."""
    found, going, before = {}, {0: 1.0}, 0
    for look, (n, stop) in enumerate(zip(LOOKS, STOPS, strict=True)):
        after: dict[int, float] = {}
        new = binom.pmf(np.arange(n - before + 1), n - before, probability).tolist()
        for k, chance in going.items():
            for more, part in enumerate(new):
                after[k + more] = after.get(k + more, 0.0) + chance * part
        last = look == len(LOOKS) - 1
        found |= {(look, k): chance for k, chance in after.items() if last or k >= stop}
        going = {k: chance for k, chance in after.items() if not last and k < stop}
        before = n
    return found


@pytest.fixture(scope="module")
def limits() -> dict[tuple[int, int], tuple[float, float]]:
    ends = outcomes(0.3)
    return {(i, k): sequential_limits(k, LOOKS[: i + 1], STOPS[: i + 1]) for i, k in ends}


def test_it_covers_at_every_probability(limits):
    for probability in PROBABILITIES:
        ends = outcomes(probability)
        missed = sum(c for end, c in ends.items() if not limits[end][0] <= probability <= limits[end][1])
        assert missed <= 0.05 + 1e-9


def test_plain_binomial_limits_would_not():
    plain, worst = [clopper_pearson(np.arange(n + 1), n) for n in LOOKS], 0.0
    for probability in PROBABILITIES:
        missed = 0.0
        for (i, k), chance in outcomes(probability).items():
            missed += chance * (not plain[i][0][k] <= probability <= plain[i][1][k])
        worst = max(worst, missed)
    assert worst > 0.05


def test_chance_of_going_on_is_that_of_the_plain_loop():
    ends = outcomes(0.21)
    direct = sum(chance for (look, k), chance in ends.items() if look == 2 and k <= 15)
    assert at_most(15, LOOKS, STOPS, 0.21) == pytest.approx(direct, abs=1e-12)


@pytest.mark.parametrize("exceeding", [0, 1, 17, 999, 1000])
def test_one_look_gives_the_binomial_limits(exceeding):
    found = sequential_limits(exceeding, np.array([1000]), np.array([1001]))
    low, high = clopper_pearson(exceeding, 1000)
    assert found == pytest.approx((float(low), float(high)), rel=1e-9)


def test_looks_double_up_to_what_is_allowed():
    assert look_schedule(5000).tolist() == [1024, 2048, 4096, 5000]
    assert look_schedule(2048).tolist() == [1024, 2048]
    assert look_schedule(300).tolist() == [300]


def test_the_stopping_count_is_the_first_that_is_precise():
    looks = np.array([1024, 65_536])
    for n, count in zip(looks, stopping_counts(looks, 0.2, 0.95), strict=True):
        for k, precise in ((count, True), (count - 1, False)):
            low, high = clopper_pearson(k, n)
            assert (max(high - k / n, k / n - low) <= 0.2 * k / n) == precise
    assert stopping_counts(np.array([20]), 0.001, 0.95).tolist() == [21]


def test_each_limit_stops_by_its_own_counts():
    runs = TrueRuns(lambda u: np.column_stack([u[:, 0], -u[:, 1]]), dimension=2, seed=2)
    limits = [
        QuantityLimit(threshold=0.5),
        QuantityLimit(threshold=-1.9, sense="not less than", quantity=1),
        QuantityLimit(threshold=9.0),
    ]
    often, seldom, never = monte_carlo_exceedance(runs, limits, MonteCarloPlan(most_runs=10_000))
    assert (often.model_runs, often.stopped) == (1024, True)
    assert (seldom.model_runs, seldom.stopped) == (4096, True)
    assert (never.model_runs, never.stopped, never.exceeding) == (10_000, False, 0)
    assert runs.n_runs == 10_000
    assert seldom.interval[0] < 0.0287 < seldom.interval[1]  # Phi(-1.9)
    assert never.unseen_bound == unseen_bound(10_000)
    assert often.unseen_bound is None
    assert never.reached == np.inf
    (alone,) = monte_carlo_exceedance(runs, limits[1:2], MonteCarloPlan(most_runs=10_000))
    assert (alone.interval, alone.exceeding) == (seldom.interval, seldom.exceeding)
    assert runs.n_runs == 10_000


def test_the_looks_are_a_table():
    runs = TrueRuns(lambda u: u[:, 0], dimension=1, seed=2)
    (found,) = monte_carlo_exceedance(runs, [QuantityLimit(threshold=2.0)])
    frame = found.to_frame()
    assert frame["runs"].tolist() == look_schedule(found.model_runs).tolist()
    assert frame["exceeding"].iloc[-1] == found.exceeding >= frame["stops_at"].iloc[-1]
    assert (frame["exceeding"].iloc[:-1] < frame["stops_at"].iloc[:-1]).all()
    with pytest.raises(ValueError, match="read-only"):
        found.look_runs[0] = 1


def test_runs_without_a_number_exceed_and_are_told():
    runs = TrueRuns(lambda u: np.where(u[:, 0] > 1.0, np.nan, 0.0), dimension=1, seed=2)
    (found,) = monte_carlo_exceedance(runs, [QuantityLimit(threshold=2.0)])
    assert found.exceeding == found.not_converged > 100


@pytest.mark.parametrize(
    ("keys", "message"),
    [
        ({"within": 0.0}, "precision must lie between 0 and 1; got 0"),
        ({"confidence": 1.0}, "confidence must lie between 0 and 1; got 1"),
        ({"most_runs": 0}, "at least 1 run is needed; got 0"),
    ],
)
def test_a_plan_that_cannot_be_is_refused(keys, message):
    with pytest.raises(ParameterError, match=message):
        MonteCarloPlan(**keys)


def test_limits_that_cannot_be_are_refused():
    with pytest.raises(ParameterError, match="confidence must lie between 0 and 1; got 0"):
        sequential_limits(1, LOOKS, STOPS, 0.0)
    with pytest.raises(ParameterError, match="count must lie between 0"):
        sequential_limits(81, LOOKS, STOPS)
    runs = TrueRuns(lambda u: u[:, 0], dimension=1, seed=2)
    with pytest.raises(ShapeError, match="watches quantity 3"):
        monte_carlo_exceedance(runs, [QuantityLimit(threshold=1.0, quantity=3)])
