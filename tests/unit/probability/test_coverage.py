"""Coverage of the 95 % interval for replicated designs, by repeating it.

The rule of `probability_interval` was fixed first and measured afterwards. Measured with 400 repeats,
four functions (linear; one variable; product with a kink; sum of squares), 2,048 and 16,384 points,
p = 0.3, 0.05, 0.01, 0.002: 0.928 to 1.000 (Latin hypercube), 0.940 to 1.000 (Sobol').
"""

import numpy as np
import pytest
from scipy.special import ndtri
from scipy.stats import chi2

from probsoil.parameters import design
from probsoil.probability import exceeding_counts, probability_interval

REPEATS = 200
PROBABILITY = np.array([0.3, 0.05, 0.01, 0.002])
WEIGHT = np.array([1.0, 0.8, 0.6, 0.5, 0.3, 0.1])
FUNCTIONS = {  # with the exact thresholds of the four probabilities
    "linear": (lambda u: u @ WEIGHT, -np.sqrt(WEIGHT @ WEIGHT) * ndtri(PROBABILITY)),
    "one variable": (lambda u: u[:, 0], -ndtri(PROBABILITY)),
    "sum of squares": (lambda u: (u**2).sum(axis=1), chi2.isf(PROBABILITY, 6)),
}
# 24 cells a design: 3.5 standard errors below 0.95 is passed by chance once in 180 runs of this test
LEAST = 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / REPEATS)


@pytest.mark.parametrize("name", ["latin hypercube", "sobol"])
@pytest.mark.parametrize("n", [2048, 8192])
def test_interval_covers(name, n):
    covered = {key: np.zeros(len(PROBABILITY)) for key in FUNCTIONS}
    for seed in range(REPEATS):
        plan = design(name, seed=seed, n=n, dimension=6)
        u = np.concatenate([plan.chunk(i) for i in range(plan.n_chunks)])
        replicate = np.concatenate([plan.replicate_index(i) for i in range(plan.n_chunks)])
        for key, (function, threshold) in FUNCTIONS.items():
            counts = exceeding_counts(function(u), threshold, "not more than", replicate)
            found = probability_interval(counts, np.bincount(replicate))
            covered[key] += (found.low <= PROBABILITY) & (found.high >= PROBABILITY)
    for key, count in covered.items():
        assert (count / REPEATS > LEAST).all(), (key, count / REPEATS)


def test_interval_covers_where_t_alone_would_miss_one_in_ten():
    """About five cases in sixteen replicates: with two seen, t alone stops short of five.

    By the Poisson distribution the plain t interval, with neither of the two guards, covers 0.89; a thousand
    repeats put 0.926 at 3.5 standard errors.
    """
    probability, repeats = 5.2 / 2048, 1000
    threshold = chi2.isf(probability, 6)
    covered = 0
    for seed in range(repeats):
        plan = design("latin hypercube", seed=seed, n=2048, dimension=6)
        value = np.concatenate([(plan.chunk(i) ** 2).sum(axis=1) for i in range(plan.n_chunks)])
        counts = exceeding_counts(
            value, np.array([threshold]), "not more than", np.repeat(np.arange(16), 128)
        )
        found = probability_interval(counts, np.full(16, 128))
        covered += float(found.low[0]) <= probability <= float(found.high[0])
    assert covered / repeats > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / repeats)


def test_interval_covers_where_replicates_differ_by_one_case_at_most():
    """In one direction each Sobol' replicate counts 100 or 101 of 512, the latter with chance 0.2.

    By the binomial distribution t alone covers 0.87: with one 101 in sixteen it stops short of 100.2.
    """
    probability, repeats = 100.2 / 512, 400
    threshold = np.array([-ndtri(probability)])
    covered = 0
    for seed in range(repeats):
        plan = design("sobol", seed=seed, n=16 * 512, dimension=1)
        value = np.concatenate([plan.chunk(i)[:, 0] for i in range(plan.n_chunks)])
        counts = exceeding_counts(value, threshold, "not more than", np.repeat(np.arange(16), 512))
        assert set(counts[:, 0].tolist()) <= {100, 101}
        found = probability_interval(counts, np.full(16, 512))
        covered += float(found.low[0]) <= probability <= float(found.high[0])
    assert covered / repeats > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / repeats)


def test_binomial_limits_cover_for_independent_points():
    counts = np.random.default_rng(9).binomial(20_000, PROBABILITY, size=(2000, 4))
    covered = [
        (found.low <= PROBABILITY) & (found.high >= PROBABILITY)
        for found in (probability_interval(row[np.newaxis], np.array([20_000])) for row in counts)
    ]
    assert (np.mean(covered, axis=0) > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / 2000)).all()
