"""Test functions of sensitivity analysis with known answers, on the model itself and from its chaos.

The functions are recalled, not opened: T. Ishigami and T. Homma, 1990; the g-function of I. M. Sobol', as
used by A. Saltelli and others. Their indices are worked out from their definitions here.
"""

import numpy as np
import pytest
from scipy.special import ndtr

from probsoil.probability import polynomial_chaos
from probsoil.probability.first_order import first_order
from probsoil.probability.limit_state import LimitState
from probsoil.sensitivity import (
    driver_sums,
    elasticities,
    linear_shapley,
    model_shares,
    shapley_shares,
    strongest_pairs,
)


def ishigami(z):
    x = np.pi * (2.0 * ndtr(z) - 1.0)
    return np.sin(x[:, 0]) + 7.0 * np.sin(x[:, 1]) ** 2 + 0.1 * x[:, 2] ** 4 * np.sin(x[:, 0])


A = np.array([0.0, 1.0, 4.5, 9.0, 99.0])


def g_function(z):
    return ((np.abs(4.0 * ndtr(z) - 2.0) + A) / (1.0 + A)).prod(axis=1)


def within(found, reach, exact):
    """Four standard errors of SALib's bootstrap; the floor is for an inert input, which has none."""
    return np.abs(found - exact) < 4.0 * reach / 1.96 + 1e-6


def test_ishigami_on_the_model():
    found = model_shares(ishigami, np.eye(3), ["x1", "x2", "x3"], n=4096)
    variance = 49.0 / 8.0 + 0.1 * np.pi**4 / 5.0 + 0.01 * np.pi**8 / 18.0 + 0.5
    first = np.array([0.5 * (1.0 + 0.1 * np.pi**4 / 5.0) ** 2, 49.0 / 8.0, 0.0]) / variance
    pair = 0.01 * np.pi**8 * (1.0 / 18.0 - 1.0 / 50.0) / variance
    np.testing.assert_allclose(first, [0.3139, 0.4424, 0.0], atol=5e-5)
    assert within(found.first, found.first_reach, first).all()
    assert within(found.total, found.total_reach, first + np.array([pair, 0.0, pair])).all()
    expected = np.zeros((3, 3))
    expected[0, 2] = expected[2, 0] = pair
    assert within(found.pair, found.pair_reach, expected).all()
    assert found.first_reach.max() < 0.1
    assert found.runs == 4096 * 8


def test_g_function_on_the_model():
    found = model_shares(g_function, np.eye(5), list("abcde"), n=4096, seed=3)
    part = 1.0 / (3.0 * (1.0 + A) ** 2)
    variance = (1.0 + part).prod() - 1.0
    first = part / variance
    total = part * (1.0 + part).prod() / (1.0 + part) / variance
    assert within(found.first, found.first_reach, first).all()
    assert within(found.total, found.total_reach, total).all()
    expected = np.outer(part, part) / variance
    np.fill_diagonal(expected, 0.0)
    assert within(found.pair, found.pair_reach, expected).all()
    assert found.to_frame()["block"].tolist() == list("abcde")


CORRELATION = np.eye(5)
CORRELATION[0, 3] = CORRELATION[3, 0] = 0.6


def bilinear(z):
    return z[:, 0] + z[:, 1] * z[:, 3] + 0.5 * z[:, 2] * z[:, 4] + 0.3 * z[:, 4]


def test_strongest_pairs_of_the_chaos_against_the_model():
    """Variance 1 + 1 + 0.25 + 0.09: the pairs are products of independent factors, so exact."""
    u = np.random.default_rng(1).standard_normal((500, 5))
    chaos = polynomial_chaos(u, bilinear(u @ np.linalg.cholesky(CORRELATION).T))
    pairs = strongest_pairs(chaos, CORRELATION, list("abcde"))
    assert [(pair.first, pair.second) for pair in pairs] == [("a + d", "b"), ("c", "e")]
    assert [pair.share for pair in pairs] == pytest.approx([1.0 / 2.34, 0.25 / 2.34], rel=1e-9)
    found = model_shares(bilinear, CORRELATION, list("abcde"), n=2048)
    assert found.block == ("a + d", "b", "c", "e")
    expected = np.zeros((4, 4))
    expected[0, 1] = expected[1, 0] = pairs[0].share
    expected[2, 3] = expected[3, 2] = pairs[1].share
    assert within(found.pair, found.pair_reach, expected).all()
    assert within(found.first, found.first_reach, np.array([1.0, 0.0, 0.0, 0.09]) / 2.34).all()
    assert strongest_pairs(chaos, CORRELATION, list("abcde"), count=1) == pairs[:1]


def players(d):
    return {f"x{i}": [i] for i in range(d)}


@pytest.mark.parametrize("r", [-0.9, 0.0, 0.5, 0.99])
def test_two_and_three_linear_inputs_from_the_chaos(r):
    """Owen and Prieur 2017, Iooss and Prieur 2019 (recalled, not opened)."""
    u = np.random.default_rng(1).standard_normal((100, 3))
    correlation = np.eye(3)
    correlation[1, 2] = correlation[2, 1] = r
    for b in ([0.0, 1.0, 2.0], [1.0, 1.0, 2.0]):
        b = np.array(b)
        chaos = polynomial_chaos(u, u @ np.linalg.cholesky(correlation).T @ b)
        share = shapley_shares(chaos, correlation, players(3)).share
        variance = b @ correlation @ b
        first = (b[1] ** 2 * (1.0 - r**2 / 2.0) + r * b[1] * b[2] + b[2] ** 2 * r**2 / 2.0) / variance
        assert share[1] == pytest.approx(first, rel=1e-10)
        assert share[0] == pytest.approx(b[0] ** 2 / variance, abs=1e-12)
        effects = linear_shapley(b[:, np.newaxis], correlation)[0][:, 0]
        np.testing.assert_allclose(share, effects / variance, atol=1e-10)


def test_direction_factors_of_a_linear_limit():
    """Independent inputs: mean elasticities lie along direction factors, spread ones along squares."""
    weight = np.array([1.0, -2.0, 0.5, 0.0])
    limit = LimitState(performance=lambda u: u @ weight, dimension=4, threshold=4.0, sense="not more than")
    factors = weight / np.linalg.norm(weight)
    np.testing.assert_allclose(first_order(limit).direction[0], factors, atol=1e-6)
    z = np.random.default_rng(2).standard_normal((400_000, 4))
    spread, mean = elasticities(driver_sums(z, np.eye(4), z @ weight, z @ weight > 4.0))
    beta = 4.0 / np.linalg.norm(weight)
    hazard = np.exp(-0.5 * beta**2) / np.sqrt(2.0 * np.pi) / ndtr(-beta)
    assert (np.abs(mean.value - hazard * factors) < 4.0 * mean.error).all()
    assert (np.abs(spread.value - hazard * beta * factors**2) < 4.0 * spread.error).all()
