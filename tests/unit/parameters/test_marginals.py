"""Marginals of representative values within physical bounds."""

from dataclasses import dataclass

import numpy as np
import pytest
from scipy import stats
from scipy.special import ndtr

from probsoil.errors import ParameterError
from probsoil.parameters import marginal
from probsoil.parameters.marginals import representative_law
from probsoil.parameters.truncation import Truncation
from probsoil.scenario.distributions import (
    Beta,
    Constant,
    Lognormal,
    Normal,
    Triangular,
    TruncatedNormal,
    Uniform,
)

Z = np.linspace(-6.0, 6.0, 121)


@dataclass(frozen=True)
class Given:
    """A quantity as the scenario room describes one."""

    distribution: object
    low: float = -np.inf
    high: float = np.inf
    averaging_length: float | None = None
    in_series: bool = False
    address: str = "clay.lambda"
    unit: str = "-"
    meaning: str = "compression index"


def test_uncut_normal_and_lognormal_are_in_closed_form():
    assert np.array_equal(marginal(Given(Normal(mean=2.0, sd=0.1), 0.0)).quantile(Z), 2.0 + 0.1 * Z)
    lognormal = marginal(Given(Lognormal(median=2.0, log_sd=0.3), 0.0))
    assert np.array_equal(lognormal.quantile(Z), 2.0 * np.exp(0.3 * Z))
    assert lognormal.cut_share == 0.0
    assert lognormal.truncation is None


@pytest.mark.parametrize(
    ("low", "high"),
    [(0.0, np.inf), (-np.inf, 2.0), (0.0, 2.5), (0.7, 1.4)],
    ids=["left", "right", "both", "tight"],
)
def test_cut_normal_is_the_conditioned_one(low, high):
    """Clipping instead of conditioning, or a wrong tail, shows here."""
    law = marginal(Given(Normal(mean=1.0, sd=0.5), low, high))
    a, b = (low - 1.0) / 0.5, (high - 1.0) / 0.5
    reference = stats.truncnorm(a, b, loc=1.0, scale=0.5)
    # through the tail probabilities, since scipy's own inverse loses a few digits far out; the absolute
    # tolerance is the rounding of a value that lies next to its bound
    np.testing.assert_allclose(reference.cdf(law.quantile(Z[Z <= 0])), ndtr(Z[Z <= 0]), rtol=1e-9, atol=1e-15)
    np.testing.assert_allclose(reference.sf(law.quantile(Z[Z > 0])), ndtr(-Z[Z > 0]), rtol=1e-9, atol=1e-15)
    assert law.mean == pytest.approx(reference.mean(), rel=1e-9)
    assert law.sd == pytest.approx(reference.std(), rel=1e-8)
    assert law.cut_share == pytest.approx(ndtr(a) + ndtr(-b), rel=1e-10)


def test_cut_lognormal_stays_inside_and_reports_its_share():
    law = marginal(Given(Lognormal(median=1.0, log_sd=0.5), 0.2, 2.0))
    free = stats.lognorm(0.5)
    assert law.cut_share == pytest.approx(free.cdf(0.2) + free.sf(2.0), rel=1e-10)
    value = law.quantile(np.linspace(-9.0, 9.0, 500))
    assert value.min() >= 0.2
    assert value.max() <= 2.0
    inner = np.array([0.3, 0.7, 1.1, 1.9])
    below = (free.cdf(inner) - free.cdf(0.2)) / (1.0 - law.cut_share)
    np.testing.assert_allclose(law.percentile(below), inner, rtol=1e-12)


@pytest.mark.parametrize(
    "distribution",
    [
        Uniform(low=-1.0, high=3.0),
        Triangular(low=-1.0, mode=1.0, high=3.0),
        Beta(alpha=2.0, beta=3.0, low=-1.0, high=3.0),
        TruncatedNormal(mean=1.0, sd=1.0, low=-1.0, high=3.0),
    ],
    ids=lambda d: d.kind,
)
def test_bounded_laws_are_cut_by_the_physical_bounds_too(distribution):
    law = marginal(Given(distribution, 0.0, 2.5))
    free = marginal(Given(distribution))
    assert law.cut_share == pytest.approx(distribution.probability_outside(0.0, 2.5), rel=1e-9)
    for value in (0.2, 1.0, 2.2):
        inside = ndtr(free.score(value)) - ndtr(free.score(0.0))
        assert ndtr(law.score(value)) == pytest.approx(inside / (1.0 - law.cut_share), rel=1e-6)
    sample = law.quantile(np.random.default_rng(3).standard_normal(40_000))
    assert abs(sample.mean() - law.mean) < 4.0 * law.sd / np.sqrt(sample.size)  # 4 s.e.: 1 in 16,000
    assert sample.std() == pytest.approx(law.sd, rel=0.03)


def test_own_bounds_of_a_truncated_normal_are_no_cut():
    law = marginal(Given(TruncatedNormal(mean=1.0, sd=0.5, low=0.8, high=1.1), 0.0))
    assert law.cut_share == 0.0
    reference = stats.truncnorm(-0.4, 0.2, loc=1.0, scale=0.5)
    np.testing.assert_allclose(law.quantile(Z), reference.ppf(ndtr(Z)), rtol=1e-9)


def test_far_tail_of_a_truncation_keeps_its_digits():
    """With all the mass beyond 9 standard deviations, 1 - Phi is zero in plain arithmetic."""
    value = Truncation(9.0, np.inf).score(np.array([-1.0, 0.0, 1.0]))
    exact = stats.norm.isf(stats.norm.sf(9.0) * stats.norm.sf(np.array([-1.0, 0.0, 1.0])))
    np.testing.assert_allclose(value, exact, rtol=1e-12)
    np.testing.assert_allclose(
        Truncation(-np.inf, -9.0).score(np.array([1.0, 0.0, -1.0])), -exact, rtol=1e-12
    )


def test_truncation_inverse_undoes_score():
    cut = Truncation(-1.0, 0.5)
    for z in (-3.0, 0.0, 2.0):
        assert cut.inverse(float(cut.score(np.array(z)))) == pytest.approx(z, abs=1e-9)
    assert cut.inverse(-2.0) == -np.inf
    assert cut.inverse(1.0) == np.inf


def test_a_law_mostly_outside_its_bounds_is_refused():
    with pytest.raises(ParameterError, match=r"clay\.lambda: 84\.1% .* outside the physical range 0 to inf"):
        marginal(Given(Normal(mean=-1.0, sd=1.0), 0.0))
    with pytest.raises(ParameterError, match=r"100\.0% .* outside"):
        marginal(Given(Uniform(low=2.0, high=3.0), 0.0, 1.0))


def test_a_constant_has_no_marginal():
    with pytest.raises(ParameterError, match="kind 'constant' has no uncertain value"):
        representative_law(Constant(value=1.0), None)


def test_inherent_variability_is_averaged_and_added():
    """Check number: variance function 0.18000 at a layer of five scales of fluctuation."""
    normal = representative_law(Normal(mean=10.0, sd=1.0, inherent_cov=0.2, vertical_scale=1.5), 7.5)
    assert normal.mean == 10.0
    assert normal.sd**2 == pytest.approx(1.0 + 0.18 * 4.0, abs=5e-5 * 4.0)
    given = Lognormal(median=2.0, log_sd=0.3, inherent_cov=0.25, vertical_scale=1.5)
    lognormal = representative_law(given, 7.5)
    point = np.log(1.0 + 0.25**2)
    assert lognormal.log_sd**2 == pytest.approx(0.09 + 0.18 * point, abs=5e-5 * point)
    assert lognormal.mean == pytest.approx(
        given.expectation, rel=1e-12
    )  # an arithmetic average keeps the mean


def test_without_a_length_to_average_over_the_variability_stays_whole():
    law = representative_law(Normal(mean=10.0, sd=1.0, inherent_cov=0.2, vertical_scale=1.5), None)
    assert law.sd**2 == pytest.approx(5.0)
