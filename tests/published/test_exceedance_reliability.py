"""Exceedance probabilities with a closed form, some of them printed in the literature.

Printed values are recalled, not opened: J. M. Duncan, "Factors of safety and reliability in geotechnical
engineering", 2000; G. B. Baecher and J. T. Christian, "Reliability and statistics in geotechnical
engineering", 2003 (vertical cut); D. V. Griffiths and G. A. Fenton, "Probabilistic slope stability analysis
by finite elements", 2004. Each agrees with its closed form to the digits recalled, which is checked here too.
"""

import numpy as np
import pytest
from scipy.special import ndtr

from probsoil.parameters import design, parameter_space, rank_correlation
from probsoil.probability import exceedance, reliability_index
from probsoil.scenario.distributions import Lognormal, Normal

N = 200_000
CONFIDENCE = 0.9999  # fixed seeds: each interval misses the exact value by chance once in 10,000

RELIABILITY = {  # index: probability, to the digits given
    1.0: "0.15866",
    1.5: "0.06681",
    2.0: "0.02275",
    2.5: "0.006210",
    3.0: "1.3499e-3",
    3.5: "2.326e-4",
    4.0: "3.167e-5",
    4.5: "3.398e-6",
    5.0: "2.867e-7",
}
FACTOR_OF_SAFETY = [  # most likely value, coefficient of variation, printed per cent, half of its last digit
    (1.17, 0.16, 18.0, 0.5),
    (1.50, 0.17, 1.0, 0.5),
    (1.05, 0.02, 0.8, 0.05),
    (1.05, 0.04, 12.0, 0.5),
    (1.05, 0.06, 22.0, 0.5),
    (1.05, 0.08, 28.0, 0.5),
    (1.05, 0.10, 33.0, 0.5),
]


class Given:
    """A quantity without physical bounds."""

    low, high, averaging_length, unit, meaning = -np.inf, np.inf, None, "-", "quantity"
    in_series = False

    def __init__(self, address, distribution):
        self.address, self.distribution = address, distribution


def drawn(quantities, dependence=(), name="monte carlo"):
    space = parameter_space(quantities, dependence)
    plan = design(name, seed=2000, n=N, dimension=space.dimension)
    u = np.concatenate([plan.chunk(i) for i in range(plan.n_chunks)])
    replicate = np.concatenate([plan.replicate_index(i) for i in range(plan.n_chunks)])
    return space.values(space.correlated(u)), replicate


@pytest.mark.parametrize("beta", RELIABILITY)
def test_reliability_index_table(beta):
    printed = RELIABILITY[beta]
    mantissa, _, exponent = printed.partition("e")
    digits = len(mantissa.split(".")[1])
    half = 0.5 * 10.0 ** (int(exponent or 0) - digits)
    low, high = reliability_index(float(printed) + half), reliability_index(float(printed) - half)
    assert low <= beta <= high


@pytest.mark.parametrize(("most_likely", "cov", "printed", "half"), FACTOR_OF_SAFETY)
def test_lognormal_factor_of_safety(most_likely, cov, printed, half):
    log_sd = np.sqrt(np.log1p(cov**2))
    median = most_likely / np.sqrt(1.0 + cov**2)
    exact = ndtr(-np.log(median) / log_sd)
    assert abs(100.0 * exact - printed) <= half
    values, _ = drawn([Given("factor", Lognormal(median=median, log_sd=log_sd))])
    low, high = exceedance(values["factor"], 1.0, "not less than", confidence=CONFIDENCE).interval
    assert low <= exact <= high
    assert high - low < 0.02


@pytest.mark.parametrize("name", ["monte carlo", "latin hypercube", "sobol"])
def test_lognormal_limit_with_every_design(name):
    """Griffiths and Fenton's input: c / (gamma H) of mean 0.25 and cov 0.5, below 0.17 (0.2809)."""
    log_sd = np.sqrt(np.log1p(0.25))
    median = 0.25 / np.sqrt(1.25)
    exact = ndtr(np.log(0.17 / median) / log_sd)
    assert exact == pytest.approx(0.2809, abs=5e-5)
    values, replicate = drawn([Given("clay.strength", Lognormal(median=median, log_sd=log_sd))], name=name)
    found = exceedance(
        values["clay.strength"],
        0.17,
        "not less than",
        replicate=replicate,
        method=name,
        confidence=CONFIDENCE,
    )
    assert found.interval[0] <= exact <= found.interval[1]
    assert found.method.startswith(name)


@pytest.mark.parametrize(("rho", "beta", "printed"), [(0.0, 1.64, 0.050), (0.5, 1.80, 0.036)])
def test_vertical_cut_with_correlated_strength_and_weight(rho, beta, printed):
    """M = c - gamma H / 4, H = 10 m, c normal (100, 30) kPa, gamma normal (20, 2) kN/m3."""
    mean = 100.0 - 20.0 * 2.5
    sd = np.sqrt(30.0**2 + 5.0**2 - 2.0 * rho * 30.0 * 5.0)
    assert mean / sd == pytest.approx(beta, abs=0.005)
    assert ndtr(-mean / sd) == pytest.approx(printed, abs=0.0005)
    quantities = [Given("c", Normal(mean=100.0, sd=30.0)), Given("gamma", Normal(mean=20.0, sd=2.0))]
    values, _ = drawn(quantities, [("c", "gamma", float(rank_correlation(rho)))])
    margin = values["c"] - 2.5 * values["gamma"]
    low, high = exceedance(margin, 0.0, "not less than", confidence=CONFIDENCE).interval
    assert low <= ndtr(-mean / sd) <= high
