"""Reliability methods against exact integrals, closed forms and worked examples.

Worked examples are recalled, not opened: B. K. Low (strip footing), Baecher and Christian 2003 (vertical
cut), Ang and Tang (consolidation settlement). Their inputs were worked through again from theory, where
every digit below comes from; the first two also agree with the digits recalled (3.268; 1.64 and 1.80).
"""

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.special import ndtr

from probsoil.probability import (
    LimitState,
    first_order,
    importance_sampling,
    second_order,
    subset_simulation,
)

SURE = 0.999  # fixed seeds: an interval misses the exact value by chance once in a thousand
INDEX = {1.0: 0.15866, 2.0: 0.02275, 3.0: 1.3499e-3, 4.0: 3.167e-5, 5.0: 2.867e-7}
HALF = {1.0: 5e-6, 2.0: 5e-6, 3.0: 5e-8, 4.0: 5e-9, 5.0: 5e-11}


def exceeds(performance, dimension):
    return LimitState(performance=performance, dimension=dimension)


def lognormal(mean, cov):
    s = np.sqrt(np.log1p(cov**2))
    return lambda u: mean / np.sqrt(1.0 + cov**2) * np.exp(s * u)


def normal(mean, cov):
    return lambda u: mean * (1.0 + cov * u)


@pytest.mark.parametrize("beta", INDEX)
def test_plane(beta):
    weight = np.array([0.5, -0.5, 0.5, 0.5])
    found = first_order(exceeds(lambda u: beta + u @ weight, 4))
    assert found.beta[0] == pytest.approx(beta, abs=1e-6)
    assert abs(found.probability - INDEX[beta]) <= HALF[beta] * 1.001


def test_resistance_less_load():
    found = first_order(exceeds(lambda u: (4.0 + u[:, 0]) - (2.0 + u[:, 1]), 2))
    assert found.probability == pytest.approx(0.07865, abs=5e-6)


def test_curved_limit():
    state = exceeds(lambda u: 3.0 - u[:, 0] + 0.1 * u[:, 1] ** 2, 2)
    density = lambda v: np.exp(-0.5 * v * v) / np.sqrt(2.0 * np.pi)  # noqa: E731
    exact = quad(lambda v: density(v) * ndtr(-3.0 - 0.1 * v * v), -12.0, 12.0, epsabs=1e-14)[0]
    assert exact == pytest.approx(1.0436e-3, abs=5e-8)
    first = first_order(state)
    second = second_order(state, first)
    assert first.probability == pytest.approx(1.3499e-3, abs=5e-8)
    assert second.breitung[0] == pytest.approx(1.0672e-3, abs=5e-8)
    assert abs(second.hohenbichler_rackwitz[0] - exact) < abs(second.breitung[0] - exact)
    for method in (
        lambda c: importance_sampling(state, first, confidence=c),
        lambda c: subset_simulation(state, confidence=c),
    ):
        low, high = method(SURE).interval
        assert low <= exact <= high
        low, high = method(0.95).interval
        assert high < 2.0 * low


@pytest.mark.parametrize(("k", "printed"), [(6.0, 4.4573e-3), (7.0, 2.2228e-3)])
def test_series_system_of_four_branches(k, printed):
    """Two curved branches at 3 and two planes at k/2, each its own way to fail."""

    def performance(u):
        a, b = u[:, 0], u[:, 1]
        bent = 3.0 + 0.1 * (a - b) ** 2
        along, across = (a + b) / np.sqrt(2.0), a - b
        return np.min(
            [bent - along, bent + along, across + k / np.sqrt(2.0), k / np.sqrt(2.0) - across], axis=0
        )

    density = lambda b: np.exp(-0.5 * b * b) / np.sqrt(2.0 * np.pi)  # noqa: E731
    inside = quad(
        lambda b: density(b) * (ndtr(3.0 + 0.2 * b * b) - ndtr(-3.0 - 0.2 * b * b)),
        -k / 2,
        k / 2,
        epsabs=1e-14,
    )[0]
    exact = 1.0 - inside
    assert exact == pytest.approx(printed, abs=5e-8)
    state = exceeds(performance, 2)
    first = first_order(state)
    np.testing.assert_allclose(np.sort(first.beta), np.sort([3.0, 3.0, k / 2, k / 2]), atol=1e-4)
    assert first.probability < exact < first.any_bound
    for found in (
        importance_sampling(state, first, confidence=SURE),
        subset_simulation(state, confidence=SURE),
    ):
        assert found.interval[0] <= exact <= found.interval[1]


@pytest.mark.parametrize(("law", "beta"), [(normal, 4.2614), (lognormal, 5.2127)])
def test_plastic_moment_of_a_beam(law, beta):
    strength, modulus = law(38.0, 0.1), law(54.0, 0.05)
    found = first_order(exceeds(lambda u: strength(u[:, 0]) * modulus(u[:, 1]) - 1140.0, 2))
    assert found.beta[0] == pytest.approx(beta, abs=6e-5)


def test_strip_footing_with_correlated_strength():
    def bearing(u):
        c = 20.0 + 5.0 * u[:, 0]
        phi = np.radians(15.0 + 2.0 * (-0.5 * u[:, 0] + np.sqrt(0.75) * u[:, 1]))
        nq = np.exp(np.pi * np.tan(phi)) * np.tan(np.pi / 4 + phi / 2) ** 2
        return c * (nq - 1.0) / np.tan(phi) + 18.0 * nq + 0.5 * 1.2 * 20.0 * 2.0 * (nq + 1.0) * np.tan(phi)

    assert bearing(np.zeros((1, 2)))[0] == pytest.approx(322.25, abs=0.005)
    state = LimitState(performance=bearing, dimension=2, threshold=200.0 / 1.2)
    found = first_order(state)
    assert found.beta[0] == pytest.approx(3.2682, abs=6e-5)
    u = found.point[0]
    assert 20.0 + 5.0 * u[0] == pytest.approx(
        6.339, abs=1.5e-3
    )  # the search ends at 1e-4 of u, five units of c
    assert 15.0 + 2.0 * (-0.5 * u[0] + np.sqrt(0.75) * u[1]) == pytest.approx(14.626, abs=1.5e-3)
    sampled = importance_sampling(state, found, runs=4000, confidence=SURE)
    # three million draws gave 5.68e-4 with a standard error of 1.4e-5
    assert sampled.interval[0] - 3 * 1.4e-5 <= 5.68e-4 <= sampled.interval[1] + 3 * 1.4e-5


@pytest.mark.parametrize(("rho", "beta", "recalled"), [(0.0, 1.6440, 1.64), (0.5, 1.7961, 1.80)])
def test_vertical_cut(rho, beta, recalled):
    def margin(u):
        weight = 20.0 + 2.0 * (rho * u[:, 0] + np.sqrt(1.0 - rho**2) * u[:, 1])
        return 100.0 + 30.0 * u[:, 0] - weight * 10.0 / 4.0

    found = first_order(exceeds(margin, 2))
    assert found.beta[0] == pytest.approx(beta, abs=5e-5)
    assert found.beta[0] == pytest.approx(recalled, abs=5e-3)


@pytest.mark.parametrize(("law", "beta", "sampled"), [(normal, 1.2695, 0.0900), (lognormal, 1.3358, 0.0891)])
def test_consolidation_settlement(law, beta, sampled):
    """First order misses the normal case by 13 %: the second and the sampling methods must not."""
    laws = [
        law(*pair) for pair in ((1, 0.1), (0.396, 0.25), (1.19, 0.15), (168, 0.05), (3.72, 0.05), (0.5, 0.2))
    ]

    def settlement(u):
        n, cc, e0, h, p0, dp = (one(u[:, i]) for i, one in enumerate(laws))
        return n * cc / (1.0 + e0) * h * np.log10((p0 + dp) / p0)

    assert settlement(np.zeros((1, 6)))[0] == pytest.approx(1.6638, abs=5e-5) or law is lognormal
    state = LimitState(performance=settlement, dimension=6, threshold=2.5, sense="not more than")
    first = first_order(state)
    assert first.beta[0] == pytest.approx(beta, abs=6e-5)
    for found in (
        importance_sampling(state, first, runs=4000, confidence=SURE),
        subset_simulation(state, confidence=SURE),
    ):
        assert found.interval[0] - 3 * 0.0002 <= sampled <= found.interval[1] + 3 * 0.0002
