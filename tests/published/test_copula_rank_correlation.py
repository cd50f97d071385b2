"""Rank correlation of a Gaussian copula.

K. Pearson, 1907 (recalled, not opened): rho_S = (6 / pi) arcsin(r / 2).
"""

from dataclasses import dataclass

import numpy as np
import pytest
from scipy.stats import spearmanr

from probsoil.parameters import design, parameter_space
from probsoil.scenario.distributions import Beta, Lognormal

N = 40_000


@dataclass(frozen=True)
class Given:
    address: str
    distribution: object
    low: float = 0.0
    high: float = np.inf
    averaging_length: float | None = None
    in_series: bool = False
    unit: str = "-"
    meaning: str = "property"


@pytest.mark.parametrize("name", ["monte carlo", "latin hypercube", "sobol"])
@pytest.mark.parametrize("rho", [-0.8, 0.0, 0.3, 0.6, 0.95])
def test_sample_has_the_rank_correlation_asked_for(name, rho):
    """The values, skew as they are, and not the normals behind them."""
    space = parameter_space(
        [
            Given("clay.lambda", Lognormal(median=0.3, log_sd=0.8)),
            Given("clay.kappa", Beta(alpha=0.7, beta=3.0, low=0.01, high=0.2)),
        ],
        [("clay.lambda", "clay.kappa", rho)],
    )
    plan = design(name, seed=12, n=N, dimension=2)
    z = space.correlated(np.concatenate([plan.chunk(i) for i in range(plan.n_chunks)]))
    values = space.values(z)
    found = spearmanr(values["clay.lambda"], values["clay.kappa"]).statistic
    # standard error of Spearman's coefficient under independence, an upper bound here; 4 of them: 1 in 16,000
    assert abs(found - rho) < 4.0 / np.sqrt(plan.n - 1)
    assert space.correlation[0, 1] == pytest.approx(2.0 * np.sin(np.pi * rho / 6.0), abs=1e-15)


def test_product_moment_correlation_would_be_told_apart():
    """At 0.6 the latent correlation is 0.618: taking one for the other is outside the band above."""
    assert 2.0 * np.sin(np.pi * 0.1) - 0.6 > 0.9 * 4.0 / np.sqrt(N - 1)
