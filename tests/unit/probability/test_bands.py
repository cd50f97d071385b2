"""Bands that hold at once: coverage over repeats, by the exact distribution function at every jump."""

import numpy as np
import pytest

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import clopper_pearson, exceedance_band, simultaneous_limits
from probsoil.probability.bands import rank_ladder

REPEATS = 1000
LEAST = 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / REPEATS)


@pytest.mark.parametrize("n", [12, 300, 2000])
def test_the_whole_curve_is_covered(n):
    """Values are uniform, so P(X > x) = 1 - x; just before and at each value are the extremes."""
    count = np.arange(n, -1, -1)
    low, high = simultaneous_limits(count, n)
    generator, held = np.random.default_rng(n), 0
    for _ in range(REPEATS):
        value = np.concatenate([[0.0], np.sort(generator.random(n)), [1.0]])
        # between value i and i + 1 there are n - i values above: P falls from 1 - x_i to 1 - x_(i+1)
        held += bool((low <= 1.0 - value[1:]).all() and (high >= 1.0 - value[:-1]).all())
    assert held / REPEATS > LEAST


def test_values_with_ties_are_covered():
    """Whole numbers from 0 to 9, each as likely; P(X > x) = 0.9, 0.8, ..."""
    generator, held = np.random.default_rng(1), 0
    for _ in range(REPEATS):
        band = exceedance_band(generator.integers(0, 10, 200), np.arange(10.0), "not more than")
        exact = 1.0 - np.arange(1, 11) / 10.0
        held += bool(((band.band_low <= exact + 1e-12) & (exact - 1e-12 <= band.band_high)).all())
    assert held / REPEATS > LEAST


def test_it_lies_outside_the_pointwise_limits_and_inside_massarts_band():
    n = 10_000
    count = np.arange(n + 1)
    low, high = simultaneous_limits(count, n)
    one_low, one_high = clopper_pearson(count, n)
    assert (low <= one_low).all()
    assert (high >= one_high).all()
    reach = np.sqrt(np.log(4.0 / 0.05) / (2.0 * n))
    assert (high <= count / n + reach + 1e-15).all()
    assert (low >= count / n - reach - 1e-15).all()
    # with 20 of 10,000 seen Massart's band says nothing below 0.017; ranks say 0.2 times to 3 times 0.002
    assert high[20] < 0.006 < 0.0168 < reach + 0.002
    assert low[20] > 0.0004


def test_limits_rise_with_the_count_and_mirror():
    low, high = simultaneous_limits(np.arange(501), 500)
    assert (np.diff(low) >= 0.0).all()
    assert (np.diff(high) >= 0.0).all()
    assert low == pytest.approx(1.0 - high[::-1], abs=1e-12)
    assert (low[0], high[-1]) == (0.0, 1.0)


@pytest.mark.parametrize("n", [1, 2, 3, 100, 12_345])
def test_ranks_are_mirrored_and_reach_both_ends(n):
    rank = rank_ladder(n)
    assert rank[0] == 1
    assert rank[-1] == n
    assert (np.sort(n + 1 - rank) == rank).all()


def test_the_band_of_a_curve_is_a_table():
    values = np.array([1.0, 2.0, 3.0, np.nan])
    band = exceedance_band(values, [0.5, 2.0], "not more than")
    assert band.exceeding.tolist() == [4, 2]
    frame = band.to_frame()
    assert frame["probability"].tolist() == [1.0, 0.5]
    assert (frame["band_low"] <= frame["low"]).all()
    with pytest.raises(ValueError, match="read-only"):
        band.low[0] = 0.0


def test_what_cannot_be_is_refused():
    with pytest.raises(ShapeError, match="thresholds must have shape"):
        exceedance_band([1.0], [[1.0]], "not more than")
    with pytest.raises(ParameterError, match="confidence must lie between 0 and 1; got 2"):
        simultaneous_limits([1], 3, 2.0)
    with pytest.raises(ParameterError, match="count must lie between 0"):
        simultaneous_limits([4], 3)
    with pytest.raises(ParameterError, match="at least 1"):
        simultaneous_limits([0], 0)
