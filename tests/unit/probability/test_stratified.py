"""The stratified estimator: coverage by repeating it, honesty without a good score, sharing of runs."""

import numpy as np
import pytest
from scipy.special import ndtr, ndtri

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import (
    QuantityLimit,
    StratifiedPlan,
    TrueRuns,
    strata_by_score,
    stratified_exceedance,
)
from probsoil.probability.true_runs import POOL_STAGE

WEIGHT = np.array([0.8, 0.6, 0.0])
REPEATS = 100
# fixed before the first run: 3.5 standard errors below 0.95
LEAST = 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / REPEATS)
HIDDEN = 0.004


def performance(u):
    """Lognormal; the third parameter has no influence."""
    return np.exp(u @ WEIGHT)


def with_a_hidden_mode(u):
    return performance(u) + 1e6 * (u[:, 2] > -ndtri(HIDDEN))


def with_a_smaller_one(u):
    return performance(u) + 1e6 * (u[:, 2] > -ndtri(HIDDEN / 4.0))


def close_score(u):
    """Rank correlation of 0.98 with the performance."""
    return u @ WEIGHT + 0.2 * u[:, 2]


def useless_score(u):
    return u[:, 2]


def limit_at(probability, **keys):
    return QuantityLimit(threshold=float(np.exp(-ndtri(probability))), **keys)


def estimate(function, score, probability, seed, **keys):
    runs = TrueRuns(function, dimension=3, seed=seed)
    n_pool = 1 << 15 if probability > 5e-3 else 1 << 17
    plan = StratifiedPlan(**{"most_runs": 2000, **keys})
    return stratified_exceedance(runs, limit_at(probability), strata_by_score(runs, score, n_pool), plan)


@pytest.mark.parametrize("probability", [0.1, 0.01, 0.001])
def test_the_interval_covers_with_a_close_score(probability):
    found = [estimate(performance, close_score, probability, seed, within=0.4) for seed in range(REPEATS)]
    covered = np.mean([one.interval[0] <= probability <= one.interval[1] for one in found])
    assert covered > LEAST
    assert np.mean([one.reached <= 0.4 for one in found]) > 0.95
    assert np.mean([one.pool_runs for one in found]) < 1000


@pytest.mark.parametrize("probability", [0.1, 0.01])
def test_the_interval_covers_with_a_useless_score(probability):
    found = [estimate(performance, useless_score, probability, seed) for seed in range(REPEATS)]
    assert np.mean([one.interval[0] <= probability <= one.interval[1] for one in found]) > LEAST
    assert all(one.basis == "all strata" for one in found)
    told = ["the score does not rank this limit" in " ".join(one.warnings) for one in found]
    assert np.mean(told) > 0.95  # seven of the first 24 runs may exceed by chance: once in a hundred at 0.1


def test_the_guaranteed_limits_cover_with_a_hidden_mode():
    probability = 0.001 + 0.999 * HIDDEN / 4.0
    found = [estimate(with_a_smaller_one, close_score, 0.001, seed, within=0.4) for seed in range(REPEATS)]
    assert np.mean([one.guaranteed[0] <= probability <= one.guaranteed[1] for one in found]) > LEAST
    # the interval that supposes no hidden mode must miss often, or the case would show nothing
    assert np.mean([one.interval[0] <= probability <= one.interval[1] for one in found]) < 0.9


def test_a_surprise_is_told_with_its_point():
    found = [estimate(with_a_hidden_mode, close_score, 0.001, seed) for seed in range(20)]
    told = [one for one in found if len(one.surprises)]
    assert len(told) > 5  # 300 runs far from the limit meet a mode of 0.004 seven times in ten
    for one in told:
        assert (one.surprises[:, 2] > -ndtri(HIDDEN)).all()
        assert any("a way of failing that the score does not see" in words for words in one.warnings)
        assert one.basis == "all strata" or one.far.any()


def test_where_nothing_exceeds_only_a_limit_is_given():
    found = estimate(performance, close_score, 1e-12, 1, most_runs=600)
    assert (found.probability, found.exceeding, found.reached) == (0.0, 0, np.inf)
    assert found.interval == found.guaranteed
    assert found.interval[0] == 0.0
    weight = found.size / found.size.sum()
    assert found.interval[1] == pytest.approx(-np.log(0.025) * (weight / found.runs).max())
    assert found.warnings == ("no run exceeds: only an upper limit is known",)


def test_the_bound_on_what_was_not_seen_is_told_where_it_is_the_greater():
    found = estimate(performance, close_score, 0.001, 3)
    assert found.basis == "strata near the limit"
    assert found.unseen_bound == pytest.approx(3.0 / 300, rel=0.1)
    assert found.guaranteed[1] > found.interval[1] + found.unseen_bound
    assert found.guaranteed[0] == found.interval[0]
    assert any(words.startswith("the runs cannot exclude a way of failing") for words in found.warnings)


def test_a_pool_too_small_for_the_precision_is_told():
    found = estimate(performance, close_score, 0.01, 3, within=0.05)
    assert any(words.startswith("the pool of 32,768 points is too small for 5 %") for words in found.warnings)


def test_strata_are_a_table_and_arrays_their_own():
    found = estimate(performance, close_score, 0.01, 3)
    frame = found.to_frame()
    assert frame["weight"].sum() == pytest.approx(1.0)
    assert frame["runs"].sum() == found.pool_runs
    assert frame["exceeding"].sum() == found.exceeding
    assert (frame["weight"] * frame["exceeding"] / frame["runs"]).sum() == pytest.approx(found.probability)
    assert frame["far"].tolist() == found.far.tolist()
    with pytest.raises(ValueError, match="read-only"):
        found.hits[0] = 1


def test_it_stops_at_what_is_allowed():
    found = estimate(performance, close_score, 0.001, 3, within=0.01, most_runs=700)
    assert 600 < found.pool_runs <= 700
    assert found.reached > 0.01
    assert found.unseen_bound < 0.03


def test_limits_share_their_runs_and_a_longer_design_keeps_them():
    runs = TrueRuns(performance, dimension=3, seed=6)
    strata = strata_by_score(runs, close_score, 1 << 17)
    first = stratified_exceedance(runs, limit_at(0.01), strata)
    made = runs.n_runs
    second = stratified_exceedance(runs, limit_at(0.02), strata)
    assert (second.runs >= first.runs).all()
    assert runs.n_runs == second.pool_runs
    assert runs.n_runs - made < 0.5 * made
    again = stratified_exceedance(runs, limit_at(0.01), strata, StratifiedPlan(within=0.1, most_runs=5000))
    assert (again.runs >= second.runs).all()
    assert again.reached <= 0.1
    assert runs.n_runs == again.pool_runs


def test_the_same_seed_gives_the_same_bits():
    one, other = (estimate(performance, close_score, 0.01, 8) for _ in range(2))
    assert (one.interval, one.guaranteed, one.runs.tolist()) == (
        other.interval,
        other.guaranteed,
        other.runs.tolist(),
    )


def test_a_limit_from_below_and_runs_without_a_number():
    def safety(u):
        return np.where(u[:, 0] > 2.5, np.nan, 2.0 - u[:, 0])

    runs = TrueRuns(safety, dimension=1, seed=1)
    strata = strata_by_score(runs, lambda u: u[:, 0], 1 << 15)
    found = stratified_exceedance(runs, QuantityLimit(threshold=0.0, sense="not less than"), strata)
    exact = float(ndtr(-2.0))
    assert abs(found.probability - exact) < 2.0 * found.reached * found.probability
    numbers = runs.outcomes(
        POOL_STAGE, np.concatenate([d[:n] for d, n in zip(strata.drawn, found.runs, strict=True)])
    )
    assert found.not_converged == np.isnan(numbers).sum() > 0


@pytest.mark.parametrize(
    ("keys", "message"),
    [
        ({"within": 1.0}, "precision must lie between 0 and 1; got 1"),
        ({"confidence": 0.0}, "confidence must lie between 0 and 1; got 0"),
        ({"pilot": 1}, "at least 2 pilot runs and 1 far run are needed; got 1 and 300"),
        ({"far_runs": 0}, "at least 2 pilot runs and 1 far run are needed; got 8 and 0"),
    ],
)
def test_a_plan_that_cannot_be_is_refused(keys, message):
    with pytest.raises(ParameterError, match=message):
        StratifiedPlan(**keys)


def test_too_few_runs_for_the_pilot_are_refused():
    with pytest.raises(ParameterError, match="100 runs do not cover a pilot of 8 in each of 14 strata"):
        estimate(performance, close_score, 0.1, 1, most_runs=100)


def test_a_quantity_that_is_not_there_is_refused():
    runs = TrueRuns(performance, dimension=3, seed=6)
    strata = strata_by_score(runs, close_score, 1 << 12)
    with pytest.raises(ShapeError, match="watches quantity 2"):
        stratified_exceedance(runs, QuantityLimit(threshold=1.0, quantity=2), strata)
