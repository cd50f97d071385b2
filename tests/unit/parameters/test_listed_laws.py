"""Laws given by lists, against numpy's and scipy's own, by quadrature, and what a copula does to them."""

from itertools import pairwise

import numpy as np
import pytest
from scipy import integrate, interpolate, stats
from scipy.special import ndtr, ndtri

from probsoil.parameters import marginal
from probsoil.parameters.listed_laws import InterpolatedLaw, PercentileLaw, StepLaw
from probsoil.parameters.plain_laws import plain_law
from probsoil.scenario import Discrete, Empirical, Percentiles

VALUES = (1.0, 2.5, 2.5, 3.0, 7.0)
Z = np.linspace(-5.0, 5.0, 997)
FITS = [
    Percentiles(percent=(5.0, 50.0, 95.0), values=(0.2, 0.3, 0.5)),
    Percentiles(percent=(5.0, 50.0, 95.0), values=(0.2, 0.3, 0.5), fit="logarithm"),
    Percentiles(percent=(10.0, 25.0, 60.0, 90.0), values=(1.0, 1.02, 4.0, 4.1), low=0.5, high=5.0),
    Percentiles(percent=(10.0, 25.0, 90.0), values=(1.0, 3.0, 4.0), low=0.5, fit="logarithm"),
    Percentiles(percent=(1.0, 99.0), values=(-4.0, 4.0), high=4.5),
]


class Given:
    averaging_length, unit, meaning, in_series, address = 3.0, "-", "property", False, "clay.property"

    def __init__(self, distribution, low=-np.inf, high=np.inf):
        self.distribution, self.low, self.high = distribution, low, high


def test_steps_are_those_of_scipys_discrete_law():
    law = plain_law(Discrete(values=(1.0, 2.0, 4.0), probabilities=(0.2, 0.3, 0.5)))
    theirs = stats.rv_discrete(values=((1, 2, 4), (0.2, 0.3, 0.5)))
    assert np.array_equal(law.quantile(Z), theirs.ppf(ndtr(Z)))
    assert law.mean == pytest.approx(theirs.mean(), rel=1e-12)
    assert law.sd == pytest.approx(theirs.std(), rel=1e-12)
    assert [law.score(value) for value in (0.5, 5.0)] == [-np.inf, np.inf]
    assert law.score(1.7) == pytest.approx(ndtri(0.2), rel=1e-12)
    assert law.score(2.0) == pytest.approx(ndtri(0.2 + 0.15), rel=1e-12)


def test_a_step_far_out_keeps_its_digits():
    law = plain_law(Discrete(values=(0.0, 1.0), probabilities=(1.0 - 1e-9, 1e-9)))
    assert law.quantile(np.array([5.99, 6.0]))[1] == 1.0  # 1 - Phi(5.998) is 1e-9
    assert law.score(1.0) == pytest.approx(stats.norm.isf(0.5e-9), rel=1e-12)


def test_score_of_found_values_is_scipys_average_rank():
    for smoothing, ranks in (
        ("none", (stats.rankdata(VALUES) - 0.5) / 5.0),
        ("linear", (stats.rankdata(VALUES) - 1.0) / 4.0),
    ):
        law = plain_law(Empirical(values=VALUES, smoothing=smoothing))
        np.testing.assert_allclose(
            ndtr([law.score(value) for value in VALUES]), ranks, rtol=1e-12, atol=1e-15
        )


def test_linear_smoothing_is_numpys_quantile():
    law = plain_law(Empirical(values=VALUES, smoothing="linear"))
    np.testing.assert_allclose(law.quantile(Z), np.quantile(VALUES, ndtr(Z)), rtol=1e-12)
    # equal values make a step that a histogram cannot have, so moments are compared without them
    different = np.unique(VALUES)
    theirs = stats.rv_histogram((np.ones(different.size - 1), different), density=False)
    law = InterpolatedLaw(different)
    assert law.mean == pytest.approx(theirs.mean(), rel=1e-12)
    assert law.sd == pytest.approx(theirs.std(), rel=1e-12)
    for value in (1.7, 2.9, 6.0):
        assert ndtr(law.score(value)) == pytest.approx(theirs.cdf(value), rel=1e-12)
    assert [law.score(value) for value in (0.5, 1.0, 7.0, 9.0)] == [-np.inf, -np.inf, np.inf, np.inf]


def test_moments_of_found_values_are_those_of_the_sample():
    law = plain_law(Empirical(values=VALUES))
    assert isinstance(law, StepLaw)
    assert (law.mean, law.sd) == (pytest.approx(np.mean(VALUES)), pytest.approx(np.std(VALUES)))
    smooth = plain_law(Empirical(values=VALUES, smoothing="linear"))
    points = np.quantile(VALUES, (np.arange(400_000) + 0.5) / 400_000)
    assert smooth.mean == pytest.approx(points.mean(), rel=1e-9)
    assert smooth.sd == pytest.approx(points.std(), rel=1e-9)


@pytest.mark.parametrize(
    ("low", "high", "kept"), [(2.5, 3.0, [2.5, 3.0]), (2.0, 9.0, [2.5, 3.0, 7.0]), (0.0, 2.5, [1.0, 2.5])]
)
def test_bounds_keep_a_value_whole_or_not_at_all(low, high, kept):
    """Scores of middle rank at a bound would cut half of the value that lies on it."""
    law = marginal(Given(Empirical(values=VALUES), low, high))
    inside = [value for value in VALUES if low <= value <= high]
    drawn = law.quantile(ndtri((np.arange(3000) + 0.5) / 3000))
    assert sorted(set(drawn)) == kept
    for value in kept:
        assert (drawn == value).mean() == pytest.approx(inside.count(value) / len(inside), abs=1.0 / 3000)
    assert law.cut_share == pytest.approx(1.0 - len(inside) / 5.0, abs=1e-12)


def test_bounds_on_values_of_a_linear_law_cut_nothing_that_lies_on_them():
    whole = marginal(Given(Empirical(values=(1.0, 1.0, 2.0, 3.0, 3.0), smoothing="linear"), 1.0, 3.0))
    assert whole.cut_share == 0.0
    assert whole.truncation is None
    part = marginal(Given(Empirical(values=VALUES, smoothing="linear"), 2.5, 3.0))
    assert part.cut_share == pytest.approx(0.5, abs=1e-12)  # a quarter below 2.5 and one above 3
    np.testing.assert_allclose(part.percentile([0.25, 0.75]), [2.5, 2.75], rtol=1e-12)


@pytest.mark.parametrize("given", FITS)
def test_a_fit_is_scipys_monotone_cubic_with_the_chord_at_either_end(given):
    """Slopes inside are taken from scipy's own, the pieces from another of its routines."""
    bend, back = (np.log, np.exp) if given.fit == "logarithm" else (np.asarray, np.asarray)
    knots, y = ndtri(np.array(given.percent) / 100.0), bend(np.array(given.values))
    chord = np.diff(y) / np.diff(knots)
    slope = np.array(
        [chord[0], *interpolate.PchipInterpolator(knots, y).derivative()(knots[1:-1]), chord[-1]]
    )
    inside = np.linspace(knots[0], knots[-1], 501)
    theirs = back(interpolate.CubicHermiteSpline(knots, y, slope)(inside))
    np.testing.assert_allclose(plain_law(given).quantile(inside), theirs, rtol=1e-12, atol=1e-13)


@pytest.mark.parametrize("given", FITS)
def test_moments_of_a_fit_by_adaptive_quadrature(given):
    law = plain_law(given)
    knots = ndtri(np.array(given.percent) / 100.0)

    def expected(power):
        def integrand(z):
            return float(law.quantile(z)) ** power * stats.norm.pdf(z)

        ends = [-14.0, *knots, 14.0]
        return sum(
            integrate.quad(integrand, a, b, epsabs=1e-12, epsrel=1e-12, limit=200)[0]
            for a, b in pairwise(ends)
        )

    mean = expected(1)
    assert law.mean == pytest.approx(mean, rel=1e-9, abs=1e-11)
    assert law.sd == pytest.approx(np.sqrt(expected(2) - mean**2), rel=1e-8)
    assert given.expectation == law.mean


def test_two_percentiles_make_a_normal_or_a_lognormal_law():
    spread = 2.0 * ndtri(0.95)
    normal = plain_law(Percentiles(percent=(5.0, 95.0), values=(1.0, 3.0)))
    np.testing.assert_allclose(normal.quantile(Z), 2.0 + 2.0 / spread * Z, rtol=1e-12, atol=1e-13)
    assert (normal.mean, normal.sd) == (pytest.approx(2.0, rel=1e-10), pytest.approx(2.0 / spread, rel=1e-10))
    theirs = stats.lognorm(np.log(3.0) / spread, scale=np.sqrt(3.0))
    lognormal = plain_law(Percentiles(percent=(5.0, 95.0), values=(1.0, 3.0), fit="logarithm"))
    np.testing.assert_allclose(lognormal.quantile(Z), theirs.ppf(ndtr(Z)), rtol=1e-9)
    assert (lognormal.mean, lognormal.sd) == (
        pytest.approx(theirs.mean(), rel=1e-10),
        pytest.approx(theirs.std(), rel=1e-10),
    )


def test_tails_are_closed_where_the_ends_are_stated():
    law = plain_law(Percentiles(percent=(10.0, 90.0), values=(1.0, 2.0), low=0.9, high=2.3))
    assert isinstance(law, PercentileLaw)
    slope, beyond = 1.0 / (2.0 * ndtri(0.9)), 3.0 - ndtri(0.9)
    far = law.quantile(np.array([-3.0, 3.0]))
    assert far[0] == pytest.approx(0.9 + 0.1 * np.exp(-slope * beyond / 0.1), rel=1e-12)
    assert far[1] == pytest.approx(2.3 - 0.3 * np.exp(-slope * beyond / 0.3), rel=1e-12)
    law = plain_law(FITS[2])
    assert [law.score(value) for value in (0.4, 0.5, 5.0, 5.1)] == [-np.inf, -np.inf, np.inf, np.inf]
    step = 1e-7  # where a tail begins it has the slope of what comes before it
    for knot in ndtri([0.1, 0.9]):
        around = law.quantile(np.array([knot - step, knot, knot + step]))
        assert around[1] - around[0] == pytest.approx(around[2] - around[1], rel=1e-4)
    assert plain_law(FITS[1]).score(-0.1) == -np.inf


@pytest.mark.parametrize("given", FITS)
def test_score_undoes_a_fit(given):
    law = plain_law(given)
    for z in (-3.0, -1.9, -0.4, 0.0, 0.7, 1.9, 3.0):
        assert law.score(float(law.quantile(np.array(z)))) == pytest.approx(z, abs=1e-7)


def test_a_rank_correlation_is_weaker_between_values_of_few_steps():
    """Two even two-valued laws: the correlation of the values is 2/pi arcsin of that of the scores."""
    coin = marginal(Given(Discrete(values=(0.0, 1.0), probabilities=(0.5, 0.5))))
    wanted, n = 0.6, 200_000
    latent = 2.0 * np.sin(np.pi * wanted / 6.0)
    z = np.random.default_rng(5).multivariate_normal([0.0, 0.0], [[1.0, latent], [latent, 1.0]], size=n)
    drawn = np.column_stack([coin.quantile(z[:, 0]), coin.quantile(z[:, 1])])
    found = stats.spearmanr(drawn).statistic
    # four standard errors of a correlation: false alarm 1 in 16,000
    assert abs(found - 2.0 / np.pi * np.arcsin(latent)) < 4.0 / np.sqrt(n)
    assert found == pytest.approx(0.424, abs=0.01)
