"""What holds for every chaos and every design point."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.stats import ortho_group

from probsoil.probability import (
    LimitState,
    chaos_shares,
    first_order,
    inert_variables,
    multi_indices,
    polynomial_chaos,
)

REPEATABLE = settings(derandomize=True, deadline=None, max_examples=25)
FEWER = settings(derandomize=True, deadline=None, max_examples=12)


def polynomial(seed, d, used):
    """Random polynomial of degree 3 in the first `used` of d variables, and its values in them."""
    random = np.random.default_rng(seed)
    indices = multi_indices(used, 3, 0.75)
    chosen = random.choice(len(indices) - 1, size=min(8, len(indices) - 1), replace=False) + 1
    weight = random.uniform(0.5, 2.0, len(chosen)) * random.choice([-1.0, 1.0], len(chosen))

    def values(u):
        powers = u[:, np.newaxis, :used] ** indices[chosen]
        return powers.prod(axis=2) @ weight

    return values, random.standard_normal((400, d))


@REPEATABLE
@given(st.integers(0, 10**6), st.integers(1, 6))
def test_shares_add_up_mean_is_the_first_coefficient_and_idle_variables_have_nothing(seed, used):
    values, u = polynomial(seed, 8, used)
    idle = inert_variables(values, 8, seed=seed)
    assert idle[used:].all()
    chaos = polynomial_chaos(u, values(u), inert=idle)
    assert chaos.mean[0] == chaos.coefficients[0, 0]
    shares = chaos_shares(chaos)
    total = shares.first[:, 0].sum() + 0.5 * shares.pair[:, :, 0].sum() + shares.higher[0]
    np.testing.assert_allclose(total, 1.0, rtol=1e-12)
    assert (shares.first[:, 0] <= shares.total[:, 0] + 1e-15).all()
    assert (shares.total[idle, 0] == 0.0).all()
    assert shares.total[:, 0].sum() >= 1.0 - 1e-12


@REPEATABLE
@given(st.integers(0, 10**6), st.floats(0.1, 10.0), st.floats(-5.0, 5.0))
def test_chaos_follows_a_change_of_unit(seed, factor, shift):
    values, u = polynomial(seed, 5, 4)
    y = values(u)
    plain, changed = polynomial_chaos(u, y), polynomial_chaos(u, shift + factor * y)
    new = np.random.default_rng(seed + 1).standard_normal((20, 5))
    expected = shift + factor * plain.predict(new)
    np.testing.assert_allclose(changed.predict(new), expected, rtol=1e-8, atol=1e-8 * (1.0 + factor))


def bent(weight, level):
    """Limit with an edge and a curve."""

    def performance(u):
        plain = level - u @ weight[0]
        return plain + 0.5 * np.maximum(u @ weight[1], 0.0) + 0.05 * (u @ weight[2]) ** 2

    return performance


@FEWER
@given(st.integers(0, 10**6), st.integers(2, 6))
def test_index_does_not_change_when_the_space_is_turned(seed, d):
    random = np.random.default_rng(seed)
    weight = random.standard_normal((3, d))
    weight[0] /= np.linalg.norm(weight[0])
    performance = bent(weight, 2.5)
    turn = ortho_group.rvs(d, random_state=random)
    plain = first_order(LimitState(performance=performance, dimension=d))
    turned = first_order(LimitState(performance=lambda u: performance(u @ turn), dimension=d))
    np.testing.assert_allclose(turned.beta[0], plain.beta[0], atol=1e-3)
    assert plain.beta[0] >= 2.5 - 1e-6  # what is added to the plane only takes the limit farther


@FEWER
@given(st.integers(0, 10**6), st.integers(2, 5))
def test_index_rises_with_the_threshold(seed, d):
    random = np.random.default_rng(seed)
    weight = random.uniform(0.1, 0.6, d)

    def settlement(u):
        return np.exp(u @ weight) + np.maximum(u[:, 0] - 0.5, 0.0)

    beta = [
        first_order(
            LimitState(performance=settlement, dimension=d, threshold=threshold, sense="not more than")
        ).beta[0]
        for threshold in (0.5, 1.5, 3.0, 5.0)
    ]
    assert (np.diff(beta) > 0.0).all()
    assert beta[0] < 0.0 < beta[1]
