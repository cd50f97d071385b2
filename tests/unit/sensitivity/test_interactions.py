"""Mistakes that shares by blocks refuse; the answers are checked among the published functions."""

import numpy as np
import pytest

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import polynomial_chaos
from probsoil.sensitivity import model_shares, strongest_pairs
from probsoil.sensitivity.interactions import block_names

U = np.random.default_rng(1).standard_normal((100, 2))


def test_blocks_are_named_by_their_members():
    correlation = np.eye(4)
    correlation[0, 2] = correlation[2, 0] = 0.1
    assert block_names(correlation, list("abcd")) == ("a + c", "b", "d")


def test_pairs_of_what_has_none():
    chaos = polynomial_chaos(U, np.full(100, 2.0))
    assert strongest_pairs(chaos, np.eye(2), ["a", "b"]) == ()
    tied = np.array([[1.0, 0.5], [0.5, 1.0]])
    assert strongest_pairs(polynomial_chaos(U, U[:, 0] * U[:, 1]), tied, ["a", "b"]) == ()


def test_same_seed_same_shares():
    found = [model_shares(lambda z: z[:, 0] + z[:, 1] ** 2, np.eye(2), ["a", "b"], n=64) for _ in range(2)]
    np.testing.assert_array_equal(found[0].first, found[1].first)
    np.testing.assert_array_equal(found[0].total_reach, found[1].total_reach)


def test_wrong_arguments():
    chaos = polynomial_chaos(U, U[:, 0])
    with pytest.raises(ShapeError, match="does not match 2 names"):
        strongest_pairs(chaos, np.eye(3), ["a", "b"])
    with pytest.raises(ShapeError, match="chaos of 2 variables"):
        strongest_pairs(chaos, np.eye(3), ["a", "b", "c"])
    with pytest.raises(ParameterError, match="one block"):
        model_shares(lambda z: z[:, 0], np.array([[1.0, 0.5], [0.5, 1.0]]), ["a", "b"])
    with pytest.raises(ParameterError, match="power of two"):
        model_shares(lambda z: z[:, 0], np.eye(2), ["a", "b"], n=100)
    with pytest.raises(ShapeError, match="performance must return"):
        model_shares(lambda z: z, np.eye(2), ["a", "b"], n=8)
    with pytest.raises(ParameterError, match="must be finite"):
        model_shares(lambda z: np.full(len(z), np.inf), np.eye(2), ["a", "b"], n=8)
