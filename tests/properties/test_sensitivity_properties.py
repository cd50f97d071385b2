"""What holds for the drivers of every limit."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.sensitivity import driver_sums, drivers, linear_shapley, merge

REPEATABLE = settings(derandomize=True, deadline=None, max_examples=40)
seeds = st.integers(0, 2**31)
DRAWN = 4000  # enough for about half of the cases to rank a parameter


def correlation_of(d, seed):
    factor = np.random.default_rng(seed).standard_normal((d, d + 1))
    covariance = factor @ factor.T
    scale = np.sqrt(np.diag(covariance))
    return covariance / np.outer(scale, scale)


@REPEATABLE
@given(st.integers(1, 8), seeds)
def test_effects_are_shared_out_whole_and_none_is_negative(d, seed):
    correlation = correlation_of(d, seed)
    b = np.random.default_rng(seed + 1).standard_normal((d, 1))
    effects, _ = linear_shapley(b, correlation)
    assert effects.sum() == pytest.approx(float(b[:, 0] @ correlation @ b[:, 0]), rel=1e-8)
    assert (effects >= -1e-9 * effects.sum()).all()


@REPEATABLE
@given(st.integers(2, 6), seeds, st.randoms(use_true_random=False))
def test_order_and_unit_do_not_matter(d, seed, random):
    correlation = correlation_of(d, seed)
    b = np.random.default_rng(seed + 1).standard_normal((d, 1))
    order = list(range(d))
    random.shuffle(order)
    effects, _ = linear_shapley(b, correlation)
    moved, _ = linear_shapley(1000.0 * b[order], correlation[np.ix_(order, order)])
    np.testing.assert_allclose(moved, 1e6 * effects[order], rtol=1e-7, atol=1e-6 * effects.max())


@REPEATABLE
@given(st.integers(1, 5), seeds, st.floats(-2.0, 2.0), st.integers(1, DRAWN - 1))
def test_drivers_are_sound_for_any_cut_into_chunks(d, seed, threshold, cut):
    generator = np.random.default_rng(seed)
    correlation = correlation_of(d, seed)
    z = generator.standard_normal((DRAWN, d)) @ np.linalg.cholesky(correlation).T
    quantity = z @ generator.standard_normal(d) + 0.1 * generator.standard_normal(DRAWN)
    inverse, flag = np.linalg.inv(correlation), quantity > threshold
    parts = [driver_sums(z[s], inverse, quantity[s], flag[s]) for s in (slice(0, cut), slice(cut, DRAWN))]
    result = drivers(merge(*parts), correlation, [f"p{i}" for i in range(d)])
    assert result.realisations == DRAWN
    assert result.exceeding == flag.sum()
    assert 0.0 <= result.r_squared <= 1.0
    assert sum(row.share for row in result.rows) == pytest.approx(1.0, abs=1e-9)
    ranks = [row.rank for row in result.rows if row.rank is not None]
    assert ranks == list(range(1, len(ranks) + 1))
    for row in result.rows:
        assert 0.0 <= row.share_interval[0] <= row.share + 1e-12
        assert row.share - 1e-12 <= row.share_interval[1] <= 1.0
        if row.rank is not None:
            low, high = row.mean_interval if result.ranked_by == "mean" else row.spread_interval
            assert low * high > 0.0
            assert result.ranked_by == "mean" or (low > 0.0) == (2 * result.exceeding <= DRAWN)
