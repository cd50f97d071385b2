"""Distributions: their means and shares against scipy, and the tables they are read from."""

import math

import pytest
from scipy import stats

from probsoil.scenario import Beta, Constant, Lognormal, Normal, Triangular, TruncatedNormal, Uniform
from probsoil.scenario.distribution_tables import read_distribution

SIGMA = 0.4
PAIRS = {
    "normal": (Normal(mean=3.0, sd=0.7), stats.norm(3.0, 0.7)),
    "lognormal": (Lognormal(median=2.0, log_sd=SIGMA), stats.lognorm(SIGMA, scale=2.0)),
    "uniform": (Uniform(low=1.0, high=5.0), stats.uniform(1.0, 4.0)),
    "triangular": (Triangular(low=1.0, mode=2.0, high=5.0), stats.triang(0.25, 1.0, 4.0)),
    "triangular, mode at the bound": (Triangular(low=1.0, mode=1.0, high=5.0), stats.triang(0.0, 1.0, 4.0)),
    "truncated normal": (
        TruncatedNormal(mean=3.0, sd=1.5, low=2.0, high=7.0),
        stats.truncnorm(-1.0 / 1.5, 4.0 / 1.5, 3.0, 1.5),
    ),
    "truncated normal, far tail": (
        TruncatedNormal(mean=0.0, sd=1.0, low=8.0, high=9.0),
        stats.truncnorm(8.0, 9.0),
    ),
    "beta": (Beta(alpha=2.0, beta=3.5, low=1.0, high=6.0), stats.beta(2.0, 3.5, 1.0, 5.0)),
}


@pytest.mark.parametrize("name", PAIRS)
def test_mean_agrees_with_scipy(name):
    own, theirs = PAIRS[name]
    assert own.expectation == pytest.approx(theirs.mean(), rel=1e-9)


@pytest.mark.parametrize("name", PAIRS)
@pytest.mark.parametrize(("low", "high"), [(2.5, 4.0), (-1.0, 3.0), (2.2, 100.0), (0.0, 8.3)])
def test_share_outside_agrees_with_scipy(name, low, high):
    own, theirs = PAIRS[name]
    expected = 1.0 - (theirs.cdf(high) - theirs.cdf(low))
    assert own.probability_outside(low, high) == pytest.approx(expected, rel=1e-9, abs=1e-12)


def test_constant_is_inside_or_outside():
    assert Constant(value=2.0).probability_outside(2.0, 3.0) == 0.0
    assert Constant(value=2.0).probability_outside(2.1, 3.0) == 1.0
    assert Constant(value=2.0).expectation == 2.0


@pytest.mark.parametrize(
    ("table", "mean", "sd"),
    [
        ({"dist": "normal", "mean": 3.0, "cov": 0.2}, 3.0, 0.6),
        ({"dist": "normal", "mean": "300 cm", "sd": "60 cm"}, 3.0, 0.6),
        ({"dist": "lognormal", "mean": 3.0, "cov": "20 %"}, 3.0, 0.6),
        ({"dist": "lognormal", "mean": 3.0, "sd": 0.6}, 3.0, 0.6),
        ({"dist": "beta", "mean": 3.0, "sd": 0.6, "low": 1.0, "high": 6.0}, 3.0, 0.6),
        ({"dist": "beta", "mean": 3.0, "cov": 0.2, "low": 1.0, "high": 6.0}, 3.0, 0.6),
    ],
)
def test_tables_give_the_mean_and_spread_they_state(table, mean, sd):
    distribution = read_distribution(table, "length", spatial=False)
    assert distribution.expectation == pytest.approx(mean, rel=1e-12)
    spread = {
        "normal": lambda d: d.sd,
        "lognormal": lambda d: stats.lognorm(d.log_sd, scale=d.median).std(),
        "beta": lambda d: stats.beta(d.alpha, d.beta, d.low, d.high - d.low).std(),
    }[distribution.kind]
    assert spread(distribution) == pytest.approx(sd, rel=1e-9)


def test_other_forms():
    assert read_distribution({"dist": "lognormal", "median": 2, "log_sd": 0.4}, "number", spatial=False) == (
        Lognormal(median=2.0, log_sd=0.4)
    )
    table = {"dist": "normal", "mean": 2, "sd": 1, "inherent_cov": 0.2, "vertical_scale": "50 cm"}
    assert read_distribution(table, "number", spatial=True) == Normal(
        mean=2.0, sd=1.0, inherent_cov=0.2, vertical_scale=0.5
    )


@pytest.mark.parametrize(
    ("table", "path", "message"),
    [
        ({"dist": "normal", "mean": 1, "sd": 0}, ("sd",), "sd is 0"),
        ({"dist": "normal", "mean": -1, "cov": 0.1}, ("mean",), "needs a mean above 0"),
        ({"dist": "lognormal", "mean": -1, "sd": 0.1}, ("mean",), "is never negative"),
        ({"dist": "lognormal", "mean": -1, "cov": 0.1}, ("mean",), "is never negative"),
        ({"dist": "lognormal", "mean": 1, "sd": 100}, ("sd",), "too large for this mean"),
        ({"dist": "lognormal", "median": 1, "log_sd": 4}, ("log_sd",), "log_sd is 4"),
        ({"dist": "uniform", "low": 2, "high": 2}, ("high",), "high is 2 and low is 2"),
        ({"dist": "triangular", "low": 1, "mode": 4, "high": 3}, ("mode",), "mode is 4"),
        ({"dist": "truncated_normal", "mean": 4, "sd": 1, "low": 1, "high": 3}, ("mean",), "mean is 4"),
        ({"dist": "beta", "mean": 2, "sd": 1, "low": 1, "high": 3}, ("sd",), "too large for these bounds"),
        ({"dist": "beta", "alpha": 0, "beta": 1, "low": 1, "high": 3}, ("alpha",), "alpha is 0"),
        ({"dist": "uniform", "mean": 2, "low": 1, "high": 3}, ("mean",), "does not belong to a uniform"),
        ({"dist": "normal", "mean": [1], "sd": 1}, ("mean",), "not a number"),
        ({"dist": 3}, ("dist",), "unknown distribution"),
        ({"dist": "lognormal", "mean": 1, "sd": 1e-200}, (), "too far apart"),
        ({"dist": "truncated_normal", "mean": 1, "sd": 1e300, "low": 0, "high": 2}, (), "too far apart"),
        (
            {"dist": "normal", "mean": 1, "sd": 1, "vertical_scale": 2},
            ("vertical_scale",),
            "says nothing without inherent_cov",
        ),
    ],
)
def test_what_is_said_of_a_bad_table(table, path, message):
    (slip,) = read_distribution(table, "number", spatial=True)
    assert slip.path == path
    assert message in slip.message


@pytest.mark.parametrize(
    ("distribution", "unit", "text"),
    [
        (Constant(value=25e3), "kPa", "fixed at 25,000 kPa"),
        (Normal(mean=7.0, sd=0.6), "m", "normal, mean 7 m, standard deviation 0.6 m"),
        (Lognormal(median=1.0, log_sd=math.sqrt(math.log(1.04))), "-", "lognormal, mean 1.02, cov 0.2"),
        (
            Normal(mean=1.0, sd=0.1, inherent_cov=0.2, vertical_scale=1.5),
            "-",
            "normal, mean 1, standard deviation 0.1; point-to-point cov 0.2, "
            "vertical scale of fluctuation 1.5 m",
        ),
        (Uniform(low=2.0, high=5.0), "m", "uniform from 2 to 5 m"),
        (Triangular(low=2.0, mode=3.0, high=5.0), "m", "triangular from 2 to 5 m, most likely 3"),
        (
            TruncatedNormal(mean=3.0, sd=1.0, low=2.0, high=5.0),
            "m",
            "normal, mean 3 m, standard deviation 1 m, cut at 2 and 5 m",
        ),
        (Beta(alpha=2.0, beta=2.0, low=2.0, high=4.0), "m", "beta from 2 to 4 m, mean 3, shapes 2 and 2"),
    ],
)
def test_distributions_in_words(distribution, unit, text):
    assert distribution.describe(unit) == text
