"""Shapley effects against plain enumeration of every subset."""

from itertools import combinations
from math import factorial

import numpy as np
import pytest

import probsoil.sensitivity.shapley as module
from probsoil.errors import ShapeError
from probsoil.sensitivity import linear_shapley


def explained(members, b, correlation):
    """Variance of the conditional mean of b'z given some of the variables: regression, term by term."""
    if not members:
        return 0.0
    inner = correlation[np.ix_(members, members)]
    outer = (correlation @ b)[members]
    return float(outer @ np.linalg.inv(inner) @ outer)


def enumerated(b, correlation):
    d = len(b)
    effects = np.zeros(d)
    for i in range(d):
        others = [j for j in range(d) if j != i]
        for size in range(d):
            weight = factorial(size) * factorial(d - size - 1) / factorial(d)
            for members in combinations(others, size):
                rise = explained([*members, i], b, correlation) - explained(list(members), b, correlation)
                effects[i] += weight * rise
    return effects


def random_correlation(d, seed):
    factor = np.random.default_rng(seed).standard_normal((d, d + 2))
    covariance = factor @ factor.T
    scale = np.sqrt(np.diag(covariance))
    return covariance / np.outer(scale, scale)


def test_six_inputs_against_enumeration():
    b, correlation = np.random.default_rng(2).standard_normal(6), random_correlation(6, 3)
    effects, error = linear_shapley(b[:, np.newaxis], correlation)
    np.testing.assert_allclose(effects[:, 0], enumerated(b, correlation), rtol=1e-11)
    assert effects.sum() == pytest.approx(b @ correlation @ b, rel=1e-12)
    assert (error == 0.0).all()


def test_blocks_give_what_the_whole_would():
    """Two blocks and a lone input, in scattered order, worked out apart and together."""
    order = [3, 0, 5, 1, 4, 2]
    whole = np.eye(6)
    whole[:3, :3], whole[3:5, 3:5] = random_correlation(3, 1), random_correlation(2, 2)
    whole = whole[np.ix_(order, order)]
    b = np.random.default_rng(5).standard_normal((6, 3))
    effects, _ = linear_shapley(b, whole)
    for column in range(3):
        np.testing.assert_allclose(effects[:, column], enumerated(b[:, column], whole), rtol=1e-11)


def test_independent_inputs_keep_their_squares():
    effects, _ = linear_shapley(np.array([[1.0], [-2.0], [0.0]]), np.eye(3))
    np.testing.assert_allclose(effects[:, 0], [1.0, 4.0, 0.0])


def test_large_blocks_by_permutations_agree_with_subsets(monkeypatch):
    b, correlation = np.random.default_rng(2).standard_normal((9, 1)), random_correlation(9, 8)
    exact, _ = linear_shapley(b, correlation)
    monkeypatch.setattr(module, "LARGEST_EXACT_BLOCK", 8)
    sampled, error = linear_shapley(b, correlation)
    assert (error > 0.0).all()
    assert (np.abs(sampled - exact) < 4.0 * error).all()  # 4 s.e. for 9 values: 1 in 1,700
    assert sampled.sum() == pytest.approx(exact.sum(), rel=1e-12)  # every order shares out all of it
    np.testing.assert_array_equal(linear_shapley(b, correlation)[0], sampled)


def test_thirty_tied_inputs_are_shared_out_whole():
    b, correlation = np.random.default_rng(2).standard_normal((30, 2)), random_correlation(30, 8)
    effects, _ = linear_shapley(b, correlation)
    assert (effects >= 0.0).all()
    np.testing.assert_allclose(effects.sum(axis=0), [c @ correlation @ c for c in b.T], rtol=1e-12)


def test_shapes_must_match():
    with pytest.raises(ShapeError, match=r"coefficients \(3, 1\) do not match correlation \(2, 2\)"):
        linear_shapley(np.ones((3, 1)), np.eye(2))
