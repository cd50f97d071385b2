"""Strata of a pool and limits from counts in them."""

from itertools import pairwise

import numpy as np
import pytest
from scipy.optimize import linprog
from scipy.special import ndtri
from scipy.stats import hypergeom

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import TrueRuns, clopper_pearson, pool_size, strata_by_score
from probsoil.probability.strata import (
    combined_limits,
    falling_share,
    stratum_limits,
    stratum_sizes,
    unseen_mass,
    wanted_runs,
)
from probsoil.probability.true_runs import POOL_STAGE

RUNS = TrueRuns(lambda u: u[:, 0], dimension=2, seed=4)
SIZE = np.array([64, 100, 1000, 100_000])


def test_sizes_grow_by_a_constant_ratio():
    size = stratum_sizes(1 << 20)
    assert size.sum() == 1 << 20
    total = np.cumsum(size)
    assert total[1:] / total[:-1] == pytest.approx(1.6, rel=0.02)  # whole numbers from 64 on
    assert 64 <= size[0] <= 1.6 * 64


def test_strata_hold_what_their_scores_say():
    strata = strata_by_score(RUNS, lambda u: u[:, 0], 4096)
    assert strata.n_pool == 4096
    assert strata.weight.sum() == pytest.approx(1.0)
    assert strata.reach[0] == 0.0
    every = np.concatenate(strata.drawn)
    assert np.sort(every).tolist() == list(range(4096))
    score = [RUNS.points(POOL_STAGE, one)[:, 0] for one in strata.drawn]
    for higher, lower in pairwise(score):
        assert higher.min() > lower.max()
    assert all((np.diff(one) > 0).all() for one in strata.drawn)  # in the order of the pool


def test_equal_scores_stay_together():
    strata = strata_by_score(RUNS, lambda u: np.round(u[:, 0]), 2048)
    for one in strata.drawn:
        inside = np.round(RUNS.points(POOL_STAGE, one)[:, 0])
        outside = np.setdiff1d(np.arange(2048), one)
        assert not np.isin(np.round(RUNS.points(POOL_STAGE, outside)[:, 0]), inside).any()
    assert strata.n_pool == 2048
    flat = strata_by_score(RUNS, lambda u: np.zeros(len(u)), 2048)
    assert flat.size.tolist() == [2048]


def test_a_score_without_a_number_ranks_first():
    strata = strata_by_score(RUNS, lambda u: np.where(u[:, 0] > 1.0, np.nan, u[:, 0]), 2048)
    assert (RUNS.points(POOL_STAGE, strata.drawn[0])[:, 0] > 1.0).all()


def test_a_score_of_the_wrong_shape_is_refused():
    with pytest.raises(ShapeError, match=r"a score must give shape \(n,\)"):
        strata_by_score(RUNS, lambda u: u, 2048)


def test_a_pool_too_small_is_refused():
    with pytest.raises(ParameterError, match="at least 128 points; got 127"):
        stratum_sizes(127)


def test_pool_holds_four_hundred_cases():
    assert pool_size(1e-3) == 1 << 19
    assert (pool_size(0.5), pool_size(1e-6)) == (1 << 17, 1 << 22)
    assert pool_size(1e-3, 0.1) == 1 << 21
    for bad in ((0.0, 0.2), (0.1, 1.0)):
        with pytest.raises(ParameterError, match="probability and precision must lie between 0 and 1"):
            pool_size(*bad)


def test_limits_of_a_stratum_cover_without_replacement():
    """Every number of points that exceed in a stratum of 60, 25 of them run: worked out, not sampled."""
    k = np.arange(26)
    low, high = stratum_limits(k, np.full(26, 25), np.full(26, 60), 0.95)
    for exceeding in range(61):
        chance = hypergeom.pmf(k, 60, exceeding, 25)
        missed = chance[(low > exceeding / 60 + 1e-12) | (high < exceeding / 60 - 1e-12)].sum()
        assert missed <= 0.05 + 1e-12
    low, high = stratum_limits(np.array([7]), np.array([60]), np.array([60]), 0.95)
    assert low == pytest.approx(7 / 60)
    assert high == pytest.approx(7 / 60)


def test_one_dense_stratum_is_the_binomial_with_the_pool():
    found = combined_limits(np.array([40]), np.array([100]), np.array([1 << 20]), near=1, confidence=0.95)
    low, high = clopper_pearson(40, 100)
    pool = ndtri(0.975) ** 2 * 0.4 * 0.6 / (1 << 20)
    assert found.probability == pytest.approx(0.4)
    assert found.low == pytest.approx(0.4 - np.sqrt((0.4 - low) ** 2 + pool))
    assert found.high == pytest.approx(0.4 + np.sqrt((high - 0.4) ** 2 + pool))
    assert found.half_width == pytest.approx(found.high - 0.4)


def test_rare_cases_of_like_strata_are_one_poisson_count():
    """Where every stratum has the same size and runs, the gamma limits are the exact ones of the total."""
    from scipy.stats import chi2

    hits, n, size = np.array([3, 0, 1, 2]), np.full(4, 500), np.full(4, 1 << 20)
    found = combined_limits(hits, n, size, near=4, confidence=0.95)
    unit, pool = 0.25 / 500, ndtri(0.975) ** 2 * found.probability / (4 << 20)
    exact_low, exact_high = chi2.ppf(0.025, 12) / 2.0, chi2.ppf(0.975, 14) / 2.0
    assert found.probability == pytest.approx(6 * unit)
    assert found.low == pytest.approx(6 * unit - np.hypot(unit * (6 - exact_low), np.sqrt(pool)), rel=1e-3)
    assert found.high == pytest.approx(6 * unit + np.hypot(unit * (exact_high - 6), np.sqrt(pool)), rel=1e-3)


def test_no_hits_give_the_bound_on_what_was_not_seen():
    n, size = np.array([10, 10, 40, 2000]), SIZE
    found = combined_limits(np.zeros(4, dtype=np.int64), n, size, near=4, confidence=0.95)
    assert found.low == 0.0
    assert found.high == pytest.approx(unseen_mass(n, size, near=0, confidence=0.975), rel=1e-9)


def test_all_hits_mirror_no_hits():
    n, size = np.array([10, 10, 40, 2000]), SIZE
    none = combined_limits(np.zeros(4, dtype=np.int64), n, size, near=4, confidence=0.95)
    every = combined_limits(n, n, size, near=4, confidence=0.95)
    assert every.low == pytest.approx(1.0 - none.high)
    assert every.high == 1.0


def test_a_stratum_run_to_the_end_adds_no_width():
    hits, n, size = np.array([30]), np.array([64]), np.array([64])
    found = combined_limits(hits, n, size, near=1, confidence=0.95)
    pool = ndtri(0.975) * np.sqrt(30 / 64 * 34 / 64 / 64)
    assert found.high - found.probability == pytest.approx(pool)


def test_unseen_mass_is_the_most_that_no_hit_allows():
    """Against a linear programme: the greatest sum of W p with the sum of n p at most -ln 0.05."""
    n, size = np.array([8, 9, 30, 350]), SIZE
    weight = size / size.sum()
    best = linprog(-weight, A_ub=[n], b_ub=[-np.log(0.05)], bounds=[(0.0, None)] * 4)
    assert unseen_mass(n, size, near=0, confidence=0.95) == pytest.approx(-best.fun)
    assert unseen_mass(n, size, near=4, confidence=0.95) == 0.0
    assert unseen_mass(np.array([1, 1, 1, 1]), size, near=1, confidence=0.95) == pytest.approx(1 - weight[0])


def test_a_bound_on_the_far_strata_chosen_by_the_last_hit_holds():
    """The far strata are those after the last hit; nested sets of them cost no confidence."""
    generator, repeats, held = np.random.default_rng(5), 4000, 0
    weight, n = np.array([0.1, 0.2, 0.3, 0.4]), np.array([40, 60, 80, 120])
    chance = np.array([0.02, 0.015, 0.01, 0.008])
    for hits in generator.binomial(n, chance, size=(repeats, 4)):
        last = np.flatnonzero(hits)
        near = int(last[-1]) + 1 if last.size else 0
        bound = unseen_mass(n, (weight * 1e6).astype(np.int64), near=near, confidence=0.95)
        held += bound >= (weight * chance)[near:].sum()
    assert held / repeats > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / repeats)


def test_further_runs_go_where_the_interval_is_wide():
    hits, n = np.array([8, 4, 0, 0]), np.array([8, 8, 8, 8])
    size = np.array([1000, 1500, 2000, 100_000])
    more = wanted_runs(hits, n, size, size, near=3, batch=100)
    assert more.sum() <= 100
    assert more[3] == 0  # far
    assert (more[:3] > 0).all()
    assert more[2] == more.max()
    larger = wanted_runs(hits, n, SIZE, SIZE, near=3, batch=100)
    assert larger[2] > 90  # ten times the others in size
    assert wanted_runs(hits, n, SIZE, n, near=4, batch=100).tolist() == [0, 0, 0, 0]
    few = wanted_runs(hits, n, SIZE, np.array([9, 9, 9, 9]), near=4, batch=100)
    assert (few <= 1).all()


def test_falling_share_pools_neighbours_out_of_order():
    share = falling_share(np.array([9, 1, 3, 0, 1]), np.array([10, 20, 20, 40, 10]))
    assert share == pytest.approx([0.9, 0.1, 0.1, 0.02, 0.02])


def test_luck_in_one_of_two_like_strata_draws_no_runs():
    """Else the sum comes out low: what hit by luck is run until it is average, what did not is left."""
    size, n = np.array([64, 40_000, 40_000, 40_000]), np.array([8, 100, 100, 100])
    more = wanted_runs(np.array([8, 0, 2, 0]), n, size, size, near=4, batch=300)
    assert more[1] == more[2]
    assert 0 < more[3] < more[2]  # beyond the last hit the share may be less, but is not nothing


def test_counts_that_do_not_match_are_refused():
    with pytest.raises(ShapeError, match="one count per stratum is needed"):
        combined_limits(np.zeros(2, dtype=np.int64), np.ones(3), SIZE, near=1, confidence=0.95)
