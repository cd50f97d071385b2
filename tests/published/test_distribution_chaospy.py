"""Marginals of all smooth kinds that it has against chaospy, an independent library of distributions."""

from dataclasses import dataclass

import chaospy
import numpy as np
import pytest
from scipy.special import ndtr

from probsoil.parameters import marginal
from probsoil.scenario.distributions import Beta, Lognormal, Normal, Triangular, TruncatedNormal, Uniform
from probsoil.scenario.skewed_distributions import Gamma, Gumbel


@dataclass(frozen=True)
class Given:
    distribution: object
    low: float = -np.inf
    high: float = np.inf
    averaging_length: float | None = None
    in_series: bool = False
    address: str = "clay.property"
    unit: str = "-"
    meaning: str = "property"


PAIRS = [
    (Normal(mean=15.8, sd=0.47), chaospy.Normal(15.8, 0.47)),
    (Lognormal(median=0.36, log_sd=0.12), chaospy.LogNormal(np.log(0.36), 0.12)),
    (Uniform(low=2.0, high=5.0), chaospy.Uniform(2.0, 5.0)),
    (Triangular(low=1.0, mode=1.2, high=2.0), chaospy.Triangle(1.0, 1.2, 2.0)),
    (TruncatedNormal(mean=0.8, sd=0.3, low=0.5, high=1.2), chaospy.TruncNormal(0.5, 1.2, 0.8, 0.3)),
    (Gamma(shape=6.25, scale=0.5), chaospy.Gamma(6.25, 0.5)),
    (Gumbel(mode=3.0, scale=0.8), chaospy.LogWeibull(0.8, 3.0)),
    (Beta(alpha=2.0, beta=3.5, low=1.0, high=4.0), chaospy.Beta(2.0, 3.5, 1.0, 4.0)),
]


@pytest.mark.parametrize(("distribution", "reference"), PAIRS, ids=[given.kind for given, _ in PAIRS])
def test_distribution_function_and_mean_agree(distribution, reference):
    law = marginal(Given(distribution))
    z = np.linspace(-3.5, 3.5, 57)
    # the tolerance is eight digits of a probability: the table of the beta law is held to 2e-8 elsewhere
    np.testing.assert_allclose(reference.cdf(law.quantile(z)), ndtr(z), atol=1e-8)
    assert law.percentile(0.5) == pytest.approx(float(reference.inv(0.5)), rel=1e-6)
    if distribution.kind != "truncated_normal":  # chaospy has no closed-form mean for this one
        assert law.mean == pytest.approx(float(chaospy.E(reference)), rel=1e-8)
        assert law.sd == pytest.approx(float(chaospy.Std(reference)), rel=1e-8)
