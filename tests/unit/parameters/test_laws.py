"""Laws read through a latent standard normal, against scipy and against themselves."""

import numpy as np
import pytest
from scipy import stats
from scipy.special import ndtr

from probsoil.parameters.laws import BetaLaw, LognormalLaw, NormalLaw, TriangularLaw, UniformLaw
from probsoil.parameters.skewed_laws import GammaLaw, GumbelLaw

Z = np.linspace(-6.0, 6.0, 241)
BETAS = [(2.0, 3.0), (0.6, 0.8), (5.0, 1.2), (1.0, 1.0), (0.3, 4.0), (60.0, 25.0)]


@pytest.mark.parametrize(
    ("law", "reference"),
    [
        (NormalLaw(3.0, 0.5), stats.norm(3.0, 0.5)),
        (LognormalLaw(2.0, 0.4), stats.lognorm(0.4, scale=2.0)),
        (UniformLaw(-1.0, 4.0), stats.uniform(-1.0, 5.0)),
        (TriangularLaw(1.0, 2.0, 5.0), stats.triang(0.25, loc=1.0, scale=4.0)),
        (TriangularLaw(1.0, 1.0, 5.0), stats.triang(0.0, loc=1.0, scale=4.0)),
        (TriangularLaw(1.0, 5.0, 5.0), stats.triang(1.0, loc=1.0, scale=4.0)),
        (GammaLaw(6.25, 0.5), stats.gamma(6.25, scale=0.5)),
        (GammaLaw(0.45, 2.0), stats.gamma(0.45, scale=2.0)),
        (GammaLaw(4e4, 1e-3), stats.gamma(4e4, scale=1e-3)),
        (GumbelLaw(3.0, 0.8), stats.gumbel_r(3.0, 0.8)),
        (BetaLaw(2.0, 3.0, 10.0, 30.0), stats.beta(2.0, 3.0, loc=10.0, scale=20.0)),
    ],
)
def test_quantile_mean_and_sd_match_scipy(law, reference):
    low, high = Z[Z <= 0.0], Z[Z > 0.0]
    np.testing.assert_allclose(law.quantile(low), reference.ppf(ndtr(low)), rtol=1e-8, atol=1e-9)
    np.testing.assert_allclose(law.quantile(high), reference.isf(ndtr(-high)), rtol=1e-8)
    assert law.mean == pytest.approx(reference.mean(), rel=1e-12)
    assert law.sd == pytest.approx(reference.std(), rel=1e-9)


@pytest.mark.parametrize(("alpha", "beta"), BETAS)
def test_beta_table_keeps_its_digits_at_both_ends(alpha, beta):
    """A table in the probability, or one without slopes, would lose the tails."""
    law = BetaLaw(alpha, beta, 0.0, 1.0)
    mirrored = BetaLaw(beta, alpha, 0.0, 1.0)
    z = np.linspace(-7.0, 7.0, 1999)  # no multiple of the table's spacing
    exact = stats.beta(alpha, beta).ppf(ndtr(z[z < 0.0]))
    np.testing.assert_allclose(law.quantile(z[z < 0.0]), exact, rtol=2e-8)
    exact = stats.beta(beta, alpha).ppf(ndtr(-z[z > 0.0]))  # the distance to the upper end
    np.testing.assert_allclose(mirrored.quantile(-z[z > 0.0]), exact, rtol=2e-8)
    np.testing.assert_allclose(1.0 - law.quantile(z[z > 0.0]), exact, rtol=2e-8, atol=3e-16)


@pytest.mark.parametrize("shape", [0.11, 0.45, 1.0, 6.25, 400.0, 9e5])
def test_gamma_table_keeps_its_digits_at_both_ends(shape):
    """The same bound as for the beta law."""
    law = GammaLaw(shape, 2.0)
    z = np.linspace(-7.0, 7.0, 1999)
    exact = stats.gamma(shape, scale=2.0)
    np.testing.assert_allclose(law.quantile(z[z < 0.0]), exact.ppf(ndtr(z[z < 0.0])), rtol=2e-8)
    np.testing.assert_allclose(law.quantile(z[z > 0.0]), exact.isf(ndtr(-z[z > 0.0])), rtol=2e-8)


def test_beta_of_tiny_shape_underflows_to_its_bound_and_not_to_nan():
    value = BetaLaw(0.02, 0.5, 0.0, 1.0).quantile(np.array([-8.0, -2.0, 0.0, 8.0]))
    assert np.isfinite(value).all()
    assert (np.diff(value) >= 0.0).all()
    assert value[0] == pytest.approx(0.0, abs=1e-300)
    assert value[2] == pytest.approx(stats.beta(0.02, 0.5).ppf(0.5), rel=1e-6)


@pytest.mark.parametrize(
    "law",
    [
        NormalLaw(3.0, 0.5),
        LognormalLaw(2.0, 0.4),
        UniformLaw(-1.0, 4.0),
        TriangularLaw(1.0, 2.0, 5.0),
        BetaLaw(2.0, 3.0, 10.0, 30.0),
        GammaLaw(6.25, 0.5),
        GammaLaw(0.45, 2.0),
        GumbelLaw(3.0, 0.8),
    ],
)
def test_score_undoes_quantile(law):
    for z in (-4.0, -1.3, 0.0, 0.4, 3.5):
        assert law.score(float(law.quantile(np.array(z)))) == pytest.approx(z, abs=1e-6)


def test_scores_beyond_the_ends_are_infinite():
    assert LognormalLaw(2.0, 0.4).score(0.0) == -np.inf
    assert LognormalLaw(2.0, 0.4).score(-1.0) == -np.inf
    assert GammaLaw(2.0, 0.4).score(0.0) == -np.inf
    assert GammaLaw(2.0, 0.4).score(-1.0) == -np.inf
    for law in (UniformLaw(1.0, 5.0), TriangularLaw(1.0, 2.0, 5.0), BetaLaw(2.0, 3.0, 1.0, 5.0)):
        assert law.score(0.5) == -np.inf
        assert law.score(6.0) == np.inf
