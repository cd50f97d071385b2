"""The interval of a median by order statistics: ranks, coverage, and what cannot be said."""

import numpy as np
import pytest
from scipy.stats import binom

from probsoil.errors import ParameterError
from probsoil.probability import median_interval


@pytest.mark.parametrize("n", [6, 7, 10, 41, 100, 999])
def test_ranks_are_the_tightest_that_the_binomial_allows(n):
    low, high = median_interval(np.random.default_rng(n).permutation(np.arange(1.0, n + 1.0)))
    k = round(low)
    assert high == n + 1 - k
    assert binom.cdf(k - 1, n, 0.5) <= 0.025 < binom.cdf(k, n, 0.5)


def test_covers_the_median_of_a_skewed_law():
    """2,000 repeats of 30 values; ranks 10 and 21 cover with 0.957 exactly, here within 3.5 s.e."""
    rng = np.random.default_rng(8)
    found = [median_interval(rng.lognormal(size=30)) for _ in range(2000)]
    exact = binom.cdf(20, 30, 0.5) - binom.cdf(9, 30, 0.5)
    share = np.mean([low <= 1.0 <= high for low, high in found])
    assert abs(share - exact) < 3.5 * np.sqrt(exact * (1.0 - exact) / 2000)


def test_too_few_values_have_no_limits_and_infinite_ones_sort_as_they_stand():
    assert median_interval(np.arange(5.0)) is None
    assert median_interval(np.array([])) is None
    assert median_interval(np.array([1.0, 2.0, 3.0, 4.0, 5.0, np.inf])) == (1.0, np.inf)


def test_confidence_must_be_a_share():
    with pytest.raises(ParameterError, match="confidence must lie between 0 and 1; got 95"):
        median_interval(np.arange(9.0), 95.0)
