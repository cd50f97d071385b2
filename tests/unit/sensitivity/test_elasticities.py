"""Elasticities against closed form, central differences and their own repeats."""

import numpy as np
import pytest
from scipy.special import ndtr, ndtri

from probsoil.parameters import design
from probsoil.sensitivity import driver_sums, elasticities, merge

CORRELATION = np.array(
    [[1.0, 0.6, 0.0, 0.3], [0.6, 1.0, 0.0, 0.0], [0.0, 0.0, 1.0, -0.4], [0.3, 0.0, -0.4, 1.0]]
)
TRIANGLE = np.linalg.cholesky(CORRELATION)
INVERSE = np.linalg.inv(CORRELATION)
WEIGHT = np.array([1.0, 0.5, -0.8, 0.0])  # the last parameter is inert but tied to others


def closed_form(probability):
    """Derivatives of P = Phi(-beta), beta = (t - b'mu) / sqrt(b' D R D b), at mu = 0 and D = I."""
    spread = WEIGHT @ CORRELATION @ WEIGHT
    beta = -ndtri(probability)
    hazard = np.exp(-0.5 * beta**2) / np.sqrt(2.0 * np.pi) / probability
    return hazard * beta * WEIGHT * (CORRELATION @ WEIGHT) / spread, hazard * WEIGHT / np.sqrt(spread)


def limit(probability):
    return -ndtri(probability) * np.sqrt(WEIGHT @ CORRELATION @ WEIGHT)


def linear_sums(u, probability, group=None):
    z = u @ TRIANGLE.T
    quantity = z @ WEIGHT
    return driver_sums(z, INVERSE, quantity, quantity > limit(probability), group)


@pytest.mark.parametrize("probability", [0.01, 0.4, 0.95])
def test_linear_limit_under_correlation_matches_its_closed_form(probability):
    """Without R^-1 the parameter that is inert but correlated would look like a driver, by far."""
    sums = linear_sums(np.random.default_rng(1).standard_normal((400_000, 4)), probability)
    for measure, exact in zip(elasticities(sums), closed_form(probability), strict=True):
        assert (np.abs(measure.value - exact) < 4.0 * measure.error).all()  # 4 s.e. for 4 values: 1 in 4,000
    shift_of_the_inert = (
        exact[0] * (CORRELATION @ WEIGHT)[3] / WEIGHT[0]
    )  # what the plain mean of z would say
    assert abs(shift_of_the_inert) > 8.0 * measure.error[3]


def curved(z):
    return np.exp(0.4 * z[:, 0] + 0.2 * z[:, 1]) * (2.0 + 0.3 * z[:, 2]) + 0.1 * z[:, 1] ** 2


def test_nonlinear_limit_matches_central_differences():
    """A million common points, each parameter's law moved and widened by a tenth either way."""
    u = np.random.default_rng(3).standard_normal((1_000_000, 4))
    z = u @ TRIANGLE.T
    threshold = 5.0
    sums = driver_sums(z, INVERSE, curved(z), curved(z) > threshold)
    probability = sums.count[1] / sums.count.sum()
    for measure, move in zip(
        elasticities(sums), (lambda z, h: z * (1.0 + h), lambda z, h: z + h), strict=True
    ):
        for i in range(4):
            share = []
            for step in (0.1, -0.1):
                moved = z.copy()
                moved[:, i] = move(z[:, i], step)
                share.append((curved(moved) > threshold).mean())
            difference = (share[0] - share[1]) / 0.2 / probability
            # common points: the error of the difference is that of the cases which change sides
            noise = np.sqrt((share[0] + share[1]) * 0.2 / len(z)) / 0.2 / probability
            curvature = 0.03 * max(abs(difference), 0.1)  # third derivative times 0.1 squared over 6
            assert abs(measure.value[i] - difference) < 4.0 * np.hypot(measure.error[i], noise) + curvature


@pytest.mark.parametrize("name", ["monte carlo", "latin hypercube", "sobol"])
def test_intervals_cover_at_about_a_hundred_exceedances(name):
    """Two hundred repeats; 3.5 standard errors below the nominal 95 %, 8 cells: by chance 1 in 500."""
    exact_spread, exact_mean = closed_form(0.03)
    covered = np.zeros((2, 4))
    for seed in range(200):
        plan = design(name, seed=seed, n=3300 if name == "monte carlo" else 4096, dimension=4)
        sums = None
        for i in range(plan.n_chunks):
            part = linear_sums(plan.chunk(i), 0.03, None if plan.replicates == 1 else plan.replicate_index(i))
            sums = part if sums is None else merge(sums, part)
        for row, (measure, exact) in enumerate(
            zip(elasticities(sums), (exact_spread, exact_mean), strict=True)
        ):
            low, high = measure.interval(0.95)
            covered[row] += (low <= exact) & (exact <= high)
    assert (covered / 200 > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / 200)).all(), covered / 200


def test_frequent_exceedance_is_read_from_both_sides():
    """The plain mean over the exceeding realisations has an error of 1 / sqrt(k) for the mean measure."""
    sums = linear_sums(np.random.default_rng(1).standard_normal((20_000, 4)), 0.95)
    _, mean = elasticities(sums)
    exceeding = sums.count[1]
    plain = np.sqrt(sums.mean_square[1] / exceeding - (sums.mean_score[1] / exceeding) ** 2) / np.sqrt(
        exceeding
    )
    assert (mean.error < 0.5 * plain).all()


def test_bonferroni_widens_the_interval():
    spread, _ = elasticities(linear_sums(np.random.default_rng(1).standard_normal((5000, 4)), 0.1))
    low, high = spread.interval(0.95)
    joint_low, joint_high = spread.interval(0.95, together=4)
    np.testing.assert_allclose((high - low) / 2.0, 1.959964 * spread.error, rtol=1e-6)
    np.testing.assert_allclose((joint_high - joint_low) / 2.0, -ndtri(0.05 / 8) * spread.error, rtol=1e-6)
    assert ndtr(ndtri(0.05 / 8)) == pytest.approx(0.05 / 8)


def test_nothing_on_one_side_gives_no_number():
    z = np.random.default_rng(1).standard_normal((100, 4))
    for flag in (np.zeros(100, dtype=bool), np.ones(100, dtype=bool)):
        spread, mean = elasticities(driver_sums(z, INVERSE, z[:, 0], flag))
        assert np.isnan([spread.value, spread.error, mean.value, mean.error]).all()
    spread, _ = elasticities(driver_sums(z, INVERSE, z[:, 0], np.arange(100) == 3))
    assert np.isfinite(spread.value).all()
    assert np.isnan(spread.error).all()
