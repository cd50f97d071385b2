"""Exact binomial limits against scipy.stats.binomtest, an independent implementation of Clopper-Pearson."""

import pytest
from scipy.stats import binomtest

from probsoil.probability import clopper_pearson


@pytest.mark.parametrize("confidence", [0.90, 0.95, 0.99])
@pytest.mark.parametrize(
    ("k", "n"),
    [(0, 1), (0, 100), (1, 100), (17, 100), (100, 100), (3, 20_000), (19_999, 20_000), (500_000, 10**6)],
)
def test_limits_agree(k, n, confidence):
    reference = binomtest(k, n).proportion_ci(confidence_level=confidence, method="exact")
    low, high = clopper_pearson(k, n, confidence)
    # the reference finds its limits by bisection (brentq) to an absolute 2e-12, ours come from an inverse
    assert float(low) == pytest.approx(reference.low, rel=1e-12, abs=2e-12)
    assert float(high) == pytest.approx(reference.high, rel=1e-12, abs=2e-12)
