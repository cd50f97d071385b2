"""Exact binomial limits."""

import numpy as np
import pytest
from scipy.stats import binom

from probsoil.errors import ParameterError
from probsoil.probability import clopper_pearson, unseen_bound


@pytest.mark.parametrize(("k", "n"), [(1, 10), (37, 20_000), (500, 1000), (999_950, 1_000_000)])
def test_each_limit_leaves_half_the_doubt_in_its_tail(k, n):
    """The definition itself, by the binomial distribution and not by the beta function."""
    low, high = clopper_pearson(k, n, 0.9)
    assert binom.sf(k - 1, n, low) == pytest.approx(0.05, rel=1e-8)
    assert binom.cdf(k, n, high) == pytest.approx(0.05, rel=1e-8)


def test_ends_and_arrays():
    low, high = clopper_pearson([0, 3, 8], 8)
    assert low[0] == 0.0
    assert high[2] == 1.0
    assert high[0] == pytest.approx(1.0 - 0.025 ** (1 / 8))
    assert low[2] == pytest.approx(0.025 ** (1 / 8))
    assert low[1] < 3 / 8 < high[1]


def test_unseen_bound_is_about_three_over_n():
    for n in (1, 20, 20_000, 10**9):
        assert (1.0 - unseen_bound(n)) ** n == pytest.approx(0.05, rel=1e-6)
    assert unseen_bound(20_000) == pytest.approx(3.0 / 20_000, rel=2e-3)


def test_no_coverage_below_the_confidence():
    """Summed exactly over all counts, for probabilities across the range; never less than promised."""
    k = np.arange(41)
    low, high = clopper_pearson(k, 40)
    for p in np.linspace(0.001, 0.999, 333):
        assert binom.pmf(k[(low <= p) & (p <= high)], 40, p).sum() >= 0.95 - 1e-12


def test_faults_are_named():
    with pytest.raises(ParameterError, match="confidence must lie between 0 and 1; got 1"):
        clopper_pearson(1, 2, 1.0)
    with pytest.raises(ParameterError, match="number of trials must be at least 1; got 0"):
        unseen_bound(0)
    with pytest.raises(ParameterError, match="a count must lie between 0 and the number of trials"):
        clopper_pearson([1, 5], 4)
