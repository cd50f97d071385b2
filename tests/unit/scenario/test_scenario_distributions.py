"""Distributions: their means and shares against scipy, and the tables they are read from."""

import math

import numpy as np
import pytest
from scipy import stats

from probsoil.scenario import (
    Beta,
    Constant,
    Discrete,
    Empirical,
    Gamma,
    Gumbel,
    Lognormal,
    Normal,
    Percentiles,
    Triangular,
    TruncatedNormal,
    Uniform,
)
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
    "gamma": (Gamma(shape=6.25, scale=0.5), stats.gamma(6.25, scale=0.5)),
    "gamma, J-shaped": (Gamma(shape=0.5, scale=4.0), stats.gamma(0.5, scale=4.0)),
    "Gumbel": (Gumbel(mode=3.0, scale=0.8), stats.gumbel_r(3.0, 0.8)),
    "empirical, linear": (
        Empirical(values=(1.0, 2.0, 2.6, 7.0), smoothing="linear"),
        stats.rv_histogram((np.array([1, 1, 1]), np.array([1.0, 2.0, 2.6, 7.0])), density=False),
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


def discrete(values, probabilities):
    return {"dist": "discrete", "values": values, "probabilities": probabilities}


def percentiles(percent, values, **more):
    return {"dist": "percentiles", "percent": percent, "values": values, **more}


def test_lists_are_read_in_base_units_and_put_in_order():
    table = discrete(["200 cm", 1], [0.25, "75 %"])
    assert read_distribution(table, "length", spatial=False) == Discrete(
        values=(1.0, 2.0), probabilities=(0.75, 0.25)
    )
    table = {"dist": "empirical", "values": ["3 m", 1, 2], "smoothing": "linear"}
    assert read_distribution(table, "length", spatial=False) == Empirical(
        values=(1.0, 2.0, 3.0), smoothing="linear"
    )
    table = percentiles([5, 95], [1, "200 cm"], low="50 cm", fit="logarithm")
    assert read_distribution(table, "length", spatial=False) == Percentiles(
        percent=(5.0, 95.0), values=(1.0, 2.0), low=0.5, fit="logarithm"
    )
    table = {"dist": "gamma", "mean": 3, "cov": 0.2}
    assert read_distribution(table, "number", spatial=False).sd == pytest.approx(0.6, rel=1e-12)
    table = {"dist": "gamma", "shape": 4, "scale": "50 cm"}
    assert read_distribution(table, "length", spatial=False) == Gamma(shape=4.0, scale=0.5)
    table = {"dist": "gumbel", "mean": 3, "cov": 0.2}
    assert read_distribution(table, "number", spatial=False).sd == pytest.approx(0.6, rel=1e-12)


def test_every_mistake_of_a_table_of_lists_at_once():
    table = percentiles([0, 60, 50], [1, 1, "3 kPa"], fit="none")
    slips = read_distribution(table, "length", spatial=False)
    assert {slip.path for slip in slips} == {("values", 2), ("fit",)}
    table = percentiles([0, 60, 50], [1, 1, 3])
    slips = read_distribution(table, "length", spatial=False)
    assert [slip.path for slip in slips] == [("percent", 0), ("percent", 2), ("values", 1)]
    assert slips[0].hint == "give the least value as low"


@pytest.mark.parametrize(
    ("distribution", "low", "high", "share"),
    [
        (Discrete(values=(0.0, 2.0, 5.0), probabilities=(0.2, 0.3, 0.5)), 0.0, 5.0, 0.0),
        (Discrete(values=(0.0, 2.0, 5.0), probabilities=(0.2, 0.3, 0.5)), 0.1, 4.9, 0.7),
        (Empirical(values=(1.0, 2.0, 2.0, 5.0)), 2.0, 2.0, 0.5),
        (Empirical(values=(1.0, 2.0, 2.0, 5.0), smoothing="linear"), 2.0, 5.0, 1.0 / 3.0),
        (Empirical(values=(1.0, 2.0, 2.0, 5.0), smoothing="linear"), 1.0, 2.0, 1.0 / 3.0),
        (Percentiles(percent=(5.0, 95.0), values=(1.0, 2.0)), 1.0, 2.0, 0.1),
        (Percentiles(percent=(5.0, 95.0), values=(1.0, 2.0), low=0.5, high=3.0), 0.5, 3.0, 0.0),
    ],
)
def test_share_outside_with_values_on_the_bounds(distribution, low, high, share):
    assert distribution.probability_outside(low, high) == pytest.approx(share, abs=1e-12)


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
        ({"dist": "gamma", "mean": -1, "sd": 0.1}, ("mean",), "a gamma variable is never negative"),
        ({"dist": "gamma", "shape": 0, "scale": 1}, ("shape",), "shape is 0"),
        ({"dist": "gamma", "mean": 1, "sd": 1000}, ("sd",), "sd is 1000, out of what a gamma"),
        ({"dist": "gamma", "mean": 1, "cov": 1e-5}, ("cov",), "cov is 1e-05, out of what a gamma"),
        ({"dist": "gamma", "shape": 0.01, "scale": 1}, ("shape",), "shape is 0.01, out of what a gamma"),
        ({"dist": "gumbel", "mode": 1, "scale": -1}, ("scale",), "scale is -1"),
        ({"dist": "gumbel", "mean": -1, "cov": 0.1}, ("mean",), "needs a mean above 0"),
        ({"dist": "empirical", "low": 1, "values": [1, 2]}, ("low",), "does not belong to an empirical"),
        ({"dist": "empirical"}, (), "an empirical distribution needs values or file; given: none of them"),
        ({"dist": "empirical", "values": 3}, ("values",), "not a list"),
        ({"dist": "empirical", "values": [3]}, ("values",), "the list has 1 entry"),
        ({"dist": "empirical", "values": [3, 3]}, ("values",), "all values are the same"),
        ({"dist": "empirical", "values": [3, []]}, ("values", 1), "not a number"),
        ({"dist": "empirical", "values": [1, 2], "column": "a"}, ("column",), "nothing without file"),
        ({"dist": "empirical", "values": [1, 2], "smoothing": "lin"}, ("smoothing",), "unknown smoothing"),
        ({"dist": "empirical", "file": 3}, ("file",), "not text"),
        (discrete([1, 2], [0.5]), ("probabilities",), "the list has 1 entry"),
        (discrete([1, 2], [0.5, 0.2, 0.3]), ("probabilities",), "there are 3 probabilities for 2 values"),
        (discrete([1, 2], [0.5, 0.4]), ("probabilities",), "the probabilities add up to 0.9"),
        (discrete([1, 2], [50, 50]), ("probabilities",), "the probabilities add up to 100"),
        (discrete([1, 2], [0, 1]), ("probabilities", 0), "the probability is 0"),
        (discrete([1, 2, 1], [0.3, 0.3, 0.4]), ("values", 2), "the value 1 stands here a second time"),
        (percentiles([5, 50, 95], [1, 2]), ("percent",), "there are 3 percent for 2 values"),
        (percentiles([0, 50], [1, 2]), ("percent", 0), "the percentage is 0"),
        (percentiles([50, 5], [1, 2]), ("percent", 1), "5 follows 50"),
        (percentiles([5, 95], [2, 2]), ("values", 1), "2 follows 2"),
        (percentiles([5, 95], [1, 2], low=1), ("low",), "low is 1"),
        (percentiles([5, 95], [1, 2], high=2), ("high",), "high is 2"),
        (percentiles([5, 95], [0, 2], fit="logarithm"), ("values", 0), "no logarithm"),
        (percentiles([5, 95], [1, 2], low=0, fit="logarithm"), ("low",), "no logarithm"),
        (percentiles([5, 95], [1, 2], fit="log"), ("fit",), "unknown fit"),
        (percentiles([49, 51], [1, 2], fit="logarithm"), (), "too far apart"),
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
        (Gamma(shape=25.0, scale=0.2), "m", "gamma, mean 5 m, cov 0.2, shape 25"),
        (
            Gumbel(mode=3.0, scale=math.sqrt(6.0) / math.pi),
            "kPa",
            "Gumbel (of largest values), mean 3.45 kPa, standard deviation 1 kPa",
        ),
        (
            Discrete(values=(2.0, 5.0), probabilities=(0.25, 0.75)),
            "m",
            "one of 2 m (0.25), 5 m (0.75)",
        ),
        (
            Discrete(values=tuple(range(1, 7)), probabilities=(1.0 / 6.0,) * 6),
            "-",
            "one of 6 values from 1 to 6, mean 3.5",
        ),
        (
            Empirical(values=(1.0, 2.0, 6.0), source="site.csv"),
            "m",
            "empirical, 3 values of site.csv from 1 to 6 m, mean 3, as they are",
        ),
        (
            Empirical(values=(1.0, 2.0, 6.0), smoothing="linear"),
            "-",
            "empirical, 3 values from 1 to 6, mean 2.75, linear between them",
        ),
        (
            Percentiles(percent=(5.0, 95.0), values=(20.0, 40.0), low=0.0, fit="value"),
            "kPa",
            "percentiles 20 at 5 %, 40 at 95 % kPa, fit of the value, down to 0 kPa",
        ),
        (Beta(alpha=2.0, beta=2.0, low=2.0, high=4.0), "m", "beta from 2 to 4 m, mean 3, shapes 2 and 2"),
    ],
)
def test_distributions_in_words(distribution, unit, text):
    assert distribution.describe(unit) == text
