"""Shapley effects of a chaos under a copula, for parameters and for groups."""

from itertools import combinations, permutations, product
from math import exp, factorial

import numpy as np
import pytest

import probsoil.sensitivity.players as module
from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import chaos_shares, hermite_basis, polynomial_chaos, quantile_basis
from probsoil.sensitivity import Gathering, driver_sums, linear_shapley, shapley_shares, shares
from probsoil.sensitivity.players import membership, permanent, player_effects

CORRELATION = np.array([[1.0, 0.6, 0.3], [0.6, 1.0, -0.2], [0.3, -0.2, 1.0]])


def random_correlation(d, seed):
    factor = np.random.default_rng(seed).standard_normal((d, d + 2))
    covariance = factor @ factor.T
    scale = np.sqrt(np.diag(covariance))
    return covariance / np.outer(scale, scale)


def enumerated(worth, players):
    """Shapley effects of players (tuples of variables) from the worth of a set of variables."""
    n = len(players)
    effects = np.zeros(n)
    for i in range(n):
        for size in range(n):
            weight = factorial(size) * factorial(n - size - 1) / factorial(n)
            for others in combinations([j for j in range(n) if j != i], size):
                held = sorted(v for j in others for v in players[j])
                effects[i] += weight * (worth(sorted([*held, *players[i]])) - worth(held))
    return effects


def linear_worth(b, correlation):
    def worth(held):
        outer = (correlation @ b)[held]
        return float(outer @ np.linalg.inv(correlation[np.ix_(held, held)]) @ outer) if held else 0.0

    return worth


def one_each(d):
    return {f"x{i}": [i] for i in range(d)}


def chaos_of(function, correlation, n=400, candidates=None, seed=1):
    u = np.random.default_rng(seed).standard_normal((n, len(correlation)))
    z = u @ np.linalg.cholesky(correlation).T
    return polynomial_chaos(u, function(z), candidates=candidates), (u, function(z))


def test_random_eight_by_the_matrix_formula():
    b, correlation = np.random.default_rng(4).standard_normal(8), random_correlation(8, 5)
    turned = (np.linalg.cholesky(correlation).T @ b)[:, np.newaxis]
    effects, error = player_effects(
        np.eye(8, dtype=np.int64), turned, correlation, membership(one_each(8), 8)
    )
    np.testing.assert_allclose(
        effects[:, 0], enumerated(linear_worth(b, correlation), [(i,) for i in range(8)]), rtol=1e-10
    )
    np.testing.assert_allclose(effects, linear_shapley(b[:, np.newaxis], correlation)[0], rtol=1e-10)
    assert (error == 0.0).all()


def test_groups_as_players_by_enumeration():
    """Groups that cut across the blocks of correlation, where sums of members are something else."""
    correlation = np.eye(6)
    correlation[:3, :3], correlation[3:5, 3:5] = random_correlation(3, 1), random_correlation(2, 2)
    b = np.random.default_rng(5).standard_normal(6)
    players = {"one": [0, 3], "two": [1, 2], "three": [4], "four": [5]}
    turned = (np.linalg.cholesky(correlation).T @ b)[:, np.newaxis]
    effects, _ = player_effects(np.eye(6, dtype=np.int64), turned, correlation, membership(players, 6))
    exact = enumerated(linear_worth(b, correlation), list(players.values()))
    np.testing.assert_allclose(effects[:, 0], exact, rtol=1e-11)
    alone = linear_shapley(b[:, np.newaxis], correlation)[0][:, 0]
    assert abs(alone[[0, 3]].sum() - exact[0]) > 1e-6 * exact.sum()  # far beyond what would pass above


def cubic(z):
    return z[..., 0] ** 2 * z[..., 1] - z[..., 1] * z[..., 2] + 0.5 * z[..., 2] ** 3 + 0.4 * z[..., 0]


def conditional_variance(held, correlation):
    """Var E[cubic | z_held] by product quadrature: two copies that share z_held, independent otherwise."""
    d = len(correlation)
    free = [i for i in range(d) if i not in held]
    order = [*held, *free]
    factor = np.linalg.cholesky(correlation[np.ix_(order, order)])
    nodes, weights = np.polynomial.hermite_e.hermegauss(5)  # exact to degree 9 in each normal
    weights = weights / weights.sum()
    k, m = len(held), len(free)
    grid = np.array(list(product(range(5), repeat=d + m)))
    x, w = nodes[grid], weights[grid].prod(axis=1)
    values = []
    for own in (x[:, k : k + m], x[:, k + m :]):
        z = np.empty((len(grid), d))
        z[:, order] = np.concatenate([x[:, :k], own], axis=1) @ factor.T
        values.append(cubic(z))
    return w @ (values[0] * values[1]) - (w @ values[0]) ** 2


def test_cubic_function_of_three_correlated_against_quadrature():
    chaos, _ = chaos_of(cubic, CORRELATION, candidates=[(3, 1.0, None)])
    assert chaos.hold_out_error[0] < 1e-20
    found = shapley_shares(chaos, CORRELATION, one_each(3))
    exact = enumerated(lambda held: conditional_variance(held, CORRELATION), [(0,), (1,), (2,)])
    np.testing.assert_allclose(found.share, exact / exact.sum(), rtol=1e-9)
    pair = shapley_shares(chaos, CORRELATION, {"ends": [0, 2], "middle": [1]})
    exact = enumerated(lambda held: conditional_variance(held, CORRELATION), [(0, 2), (1,)])
    np.testing.assert_allclose(pair.share, exact / exact.sum(), rtol=1e-9)
    assert found.share.sum() == pytest.approx(1.0, rel=1e-12)


B = np.array([0.3, -0.2, 0.25])


def lognormal_shares():
    """Var E[exp(b'z) | z_u] = E² (exp(v_u) - 1), v_u the variance of the linear function explained by u."""
    linear = linear_worth(B, CORRELATION)
    exact = enumerated(lambda held: exp(linear(held)) - 1.0, [(0,), (1,), (2,)])
    return exact / exact.sum()


def test_lognormal_function_in_closed_form():
    chaos, _ = chaos_of(lambda z: np.exp(z @ B), CORRELATION, n=2000, candidates=[(6, 1.0, None)])
    # the series ends at degree 6; its rest is v^7/7! over v with v = b'Rb near 0.1: below 1e-8
    np.testing.assert_allclose(
        shapley_shares(chaos, CORRELATION, one_each(3)).share, lognormal_shares(), atol=1e-5
    )


def test_limits_of_shares_cover():
    """One hundred repeats with a degree that leaves little out; 3.5 standard errors below 95 %."""
    exact = lognormal_shares()
    covered = np.zeros(3)
    for seed in range(100):
        chaos, runs = chaos_of(
            lambda z: np.exp(z @ B), CORRELATION, n=300, candidates=[(2, 1.0, None)], seed=seed
        )
        found = shapley_shares(chaos, CORRELATION, one_each(3), runs=runs)
        covered += (found.low <= exact) & (exact <= found.high)
    assert (covered / 100 > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / 100)).all(), covered


def test_independent_variables_halve_what_a_pair_shares():
    chaos, _ = chaos_of(lambda z: z[:, 0] + 2.0 * z[:, 0] * z[:, 1] + z[:, 2] ** 2, np.eye(3))
    sobol = chaos_shares(chaos)
    expected = sobol.first[:, 0] + 0.5 * sobol.pair[:, :, 0].sum(axis=1)
    np.testing.assert_allclose(shapley_shares(chaos, np.eye(3), one_each(3)).share, expected, atol=1e-12)


def test_inert_parameter_gets_exactly_zero_and_a_duplicated_one_an_equal_share():
    correlation = np.eye(4)
    correlation[0, 1] = correlation[1, 0] = 0.999
    chaos, _ = chaos_of(
        lambda z: np.exp(0.2 * (z[:, 0] + z[:, 1])) + 0.3 * z[:, 2], correlation, candidates=[(4, 1.0, 3)]
    )
    share = shapley_shares(chaos, correlation, one_each(4)).share
    kept = chaos.indices[chaos.coefficients[:, 0] != 0.0]
    assert not kept[:, 3].any()
    assert share[3] == 0.0
    assert share[0] == pytest.approx(share[1], abs=1e-4)


def test_random_orders_agree_with_all_subsets(monkeypatch):
    correlation = random_correlation(5, 8)
    chaos, _ = chaos_of(lambda z: (z @ [0.4, 0.3, -0.5, 0.2, 0.1]) ** 3 + z[:, 0], correlation)
    exact = shapley_shares(chaos, correlation, one_each(5))
    monkeypatch.setattr(module, "LARGEST_EXACT_GAME", 3)
    found = shapley_shares(chaos, correlation, one_each(5))
    assert (found.error > 0.0).all()
    assert (np.abs(found.share - exact.share) < 4.5 * found.error).all()
    assert found.share.sum() == pytest.approx(1.0, rel=1e-12)


def test_permanent_is_the_sum_over_permutations():
    matrix = np.random.default_rng(3).standard_normal((2, 4, 4))
    for one, found in zip(matrix, permanent(matrix), strict=True):
        plain = sum(np.prod([one[i, p[i]] for i in range(4)]) for p in permutations(range(4)))
        assert found == pytest.approx(plain, rel=1e-12)


def test_shares_of_groups_of_the_linear_fit():
    b, correlation = np.array([1.0, 0.5, -0.8, 0.3]), random_correlation(4, 6)
    z = np.random.default_rng(1).standard_normal((3000, 4)) @ np.linalg.cholesky(correlation).T
    players = {"top": [0, 2], "base": [1, 3]}
    sums = driver_sums(z, np.linalg.inv(correlation), z @ b, z[:, 0] > 1.0)
    found = shares(sums, correlation, players=players)
    exact = enumerated(linear_worth(b, correlation), list(players.values()))
    np.testing.assert_allclose(found.share, exact / exact.sum(), rtol=1e-9)
    one = Gathering(member=np.zeros(4, dtype=np.int64), shift=np.ones(4))
    with pytest.raises(ParameterError, match="either gathering or players"):
        shares(sums, correlation, gathering=one, players=players)


def test_shares_are_refused_where_the_chaos_does_not_fit():
    chaos, _ = chaos_of(lambda z: np.sin(9.0 * z[:, 0]) * np.sin(9.0 * z[:, 1]), np.eye(2))
    found = shapley_shares(chaos, np.eye(2), one_each(2))
    assert np.isnan(found.share).all()
    assert "unexplained at points held out" in found.note
    assert found.to_frame()["share"].isna().all()
    chaos, _ = chaos_of(lambda z: np.full(len(z), 3.0), np.eye(2))
    assert "does not vary" in shapley_shares(chaos, np.eye(2), one_each(2)).note


def test_limits_from_runs_and_their_errors():
    chaos, (u, values) = chaos_of(lambda z: np.exp(0.3 * z[:, 0] + 0.1 * z[:, 1]), np.eye(2))
    spoilt = values.copy()
    spoilt[3] = np.nan
    found = shapley_shares(chaos, np.eye(2), one_each(2), runs=(u, spoilt))
    assert ((found.low <= found.share) & (found.share <= found.high)).all()
    with pytest.raises(ParameterError, match="too few to fit"):
        shapley_shares(chaos, np.eye(2), one_each(2), runs=(u[:8], values[:8]))
    with pytest.raises(ShapeError, match="do not match the chaos"):
        shapley_shares(chaos, np.eye(2), one_each(2), runs=(u[:, :1], values))


def test_two_outputs_by_their_number():
    u = np.random.default_rng(1).standard_normal((200, 2))
    values = np.column_stack([u[:, 0], 3.0 * u[:, 1] + u[:, 0]])
    chaos = polynomial_chaos(u, values)
    found = shapley_shares(chaos, np.eye(2), one_each(2), output=1, runs=(u, values))
    np.testing.assert_allclose(found.share, [0.1, 0.9], atol=1e-12)


def test_wrong_arguments():
    chaos, _ = chaos_of(lambda z: z[:, 0], np.eye(2))
    with pytest.raises(ParameterError, match="exactly one group"):
        shapley_shares(chaos, np.eye(2), {"a": [0]})
    with pytest.raises(ParameterError, match="must lie between 0 and 1"):
        shapley_shares(chaos, np.eye(2), {"a": [0, 2]})
    with pytest.raises(ShapeError, match="correlation must have shape"):
        shapley_shares(chaos, np.eye(3), one_each(2))
    u = np.random.default_rng(1).standard_normal((50, 2))
    other = polynomial_chaos(
        np.exp(u), u[:, 0], basis=quantile_basis([np.exp, np.exp], 3), candidates=[(3, 1.0, None)]
    )
    with pytest.raises(ParameterError, match="Hermite polynomials"):
        shapley_shares(other, np.eye(2), one_each(2))
    indices, member = np.array([[9, 0]]), membership(one_each(2), 2)
    tied = np.array([[1.0, 0.5], [0.5, 1.0]])
    with pytest.raises(ParameterError, match="degree 8 at most"):
        player_effects(indices, np.ones((1, 1)), tied, member)
    with pytest.raises(ShapeError, match="do not match coefficients"):
        player_effects(indices, np.ones((2, 1)), tied, member)
    with pytest.raises(ShapeError, match="does not match terms"):
        player_effects(indices, np.ones((1, 1)), np.eye(3), member)
    assert hermite_basis(1, 2).degree == 2
