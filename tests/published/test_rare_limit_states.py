"""Small probabilities of limit states whose exact values follow from one-dimensional quadrature.

The four-branch series system and the parabola are test functions common in structural reliability (recalled,
not opened; two conventions of the branch distance k are in circulation, this is the one of k over the square
root of two). No printed value is used: each exact value is worked out here without the package.
"""

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.special import ndtr

from probsoil.probability import (
    MonteCarloPlan,
    QuantityLimit,
    StratifiedPlan,
    TrueRuns,
    monte_carlo_exceedance,
    pool_size,
    score_of,
    strata_by_score,
    stratified_exceedance,
)

CONFIDENCE = 0.9999  # fixed seeds: an exact interval misses by chance once in 10,000
MOST_RUNS = {"plane": 2500, "parabola": 2500, "four branches, 6": 8000, "four branches, 7": 8000}


def density(x):
    return np.exp(-0.5 * x * x) / np.sqrt(2.0 * np.pi)


def plane(u):
    """Safety margin at a distance of 3.5 in six parameters."""
    weight = np.array([1.0, -0.8, 0.6, 0.4, -0.2, 0.0])
    return 3.5 - u @ (weight / np.sqrt(weight @ weight))


def parabola(u):
    return 3.0 - u[:, 0] + 0.1 * u[:, 1] ** 2


def four_branches(k):
    def margin(u):
        along, across = (u[:, 0] + u[:, 1]) / np.sqrt(2.0), (u[:, 0] - u[:, 1]) / np.sqrt(2.0)
        curved = 3.0 + 0.2 * across**2
        straight = k / np.sqrt(2.0)
        return np.minimum(curved - np.abs(along), np.sqrt(2.0) * (straight / np.sqrt(2.0) - np.abs(across)))

    return margin


def parabola_probability():
    return quad(lambda x: density(x) * ndtr(-3.0 - 0.1 * x * x), -12.0, 12.0)[0]


def four_branch_probability(k):
    def safe(b):
        return density(b) * (ndtr(3.0 + 0.2 * b * b) - ndtr(-3.0 - 0.2 * b * b))

    return 1.0 - quad(safe, -0.5 * k, 0.5 * k, epsabs=1e-13)[0]


CASES = {
    "plane": (plane, 6, float(ndtr(-3.5)), 2.326e-4),
    "parabola": (parabola, 2, parabola_probability(), 1.0436e-3),
    "four branches, 6": (four_branches(6.0), 2, four_branch_probability(6.0), 4.4573e-3),
    "four branches, 7": (four_branches(7.0), 2, four_branch_probability(7.0), 2.2228e-3),
}


@pytest.mark.parametrize("name", CASES)
def test_exact_values_are_those_recalled(name):
    _, _, exact, recalled = CASES[name]
    assert f"{exact:.4g}" == f"{recalled:.4g}"


@pytest.mark.parametrize("name", CASES)
def test_strata_by_a_fitted_score(name):
    """Precise to 20 %, and right within twice the arm, four standard errors.

    The four branches fail on all sides, which a score of second degree ranks badly: they take more runs.
    """
    function, dimension, exact, _ = CASES[name]
    runs = TrueRuns(function, dimension=dimension, seed=31)
    limit = QuantityLimit(threshold=0.0, sense="not less than")
    choice = score_of(runs, limit)
    strata = strata_by_score(runs, choice.score, pool_size(exact))
    plan = StratifiedPlan(most_runs=MOST_RUNS[name] - runs.n_runs)
    found = stratified_exceedance(runs, limit, strata, plan)
    assert runs.n_runs <= MOST_RUNS[name]
    assert found.reached <= 0.2
    arm = 0.2 * found.probability
    assert abs(found.probability - exact) < 2.0 * arm
    assert found.guaranteed[0] <= exact <= found.guaranteed[1]


@pytest.mark.parametrize("name", CASES)
def test_plain_monte_carlo_with_looks(name):
    function, dimension, exact, _ = CASES[name]
    runs = TrueRuns(function, dimension=dimension, seed=32)
    limit = QuantityLimit(threshold=0.0, sense="not less than")
    plan = MonteCarloPlan(within=0.4, confidence=CONFIDENCE, most_runs=600_000)
    (found,) = monte_carlo_exceedance(runs, [limit], plan)
    assert found.stopped
    assert found.interval[0] <= exact <= found.interval[1]
