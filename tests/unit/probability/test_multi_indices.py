"""Sets of multi-indices against direct enumeration, and values of their terms."""

from itertools import product
from math import comb

import numpy as np
import pytest

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import distribution_basis, hermite_basis, multi_indices, quantile_basis
from probsoil.probability.multi_indices import term_sum, term_values


def enumerated(dimension, degree, norm, interaction):
    every = product(range(degree + 1), repeat=dimension)
    most = dimension if interaction is None else interaction
    return {
        one
        for one in every
        if sum(a**norm for a in one if a) <= degree**norm + 1e-12 and sum(a > 0 for a in one) <= most
    }


@pytest.mark.parametrize("dimension", [1, 2, 4])
@pytest.mark.parametrize("degree", [0, 1, 3, 5])
@pytest.mark.parametrize("norm", [1.0, 0.75, 0.5])
@pytest.mark.parametrize("interaction", [None, 1, 2])
def test_set_is_the_enumerated_one(dimension, degree, norm, interaction):
    found = multi_indices(dimension, degree, norm, interaction=interaction)
    rows = [tuple(row) for row in found.tolist()]
    assert len(rows) == len(set(rows))
    assert set(rows) == enumerated(dimension, degree, norm, interaction)
    totals = found.sum(axis=1)
    assert (np.diff(totals) >= 0).all()
    assert totals[0] == 0


def test_counts_of_full_sets():
    for dimension, degree in [(35, 2), (35, 3), (15, 4)]:
        assert len(multi_indices(dimension, degree)) == comb(dimension + degree, degree)


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ({"dimension": 0, "degree": 2}, "dimension"),
        ({"dimension": 2, "degree": -1}, "degree"),
        ({"dimension": 2, "degree": 2, "norm": 0.0}, "norm"),
        ({"dimension": 2, "degree": 2, "norm": 1.5}, "norm"),
        ({"dimension": 2, "degree": 2, "interaction": 0}, "interaction"),
    ],
)
def test_arguments_out_of_range(arguments, words):
    with pytest.raises(ParameterError, match=words):
        multi_indices(**arguments)


def test_terms_are_products_of_the_tables():
    basis = hermite_basis(3, 4)
    u = np.random.default_rng(1).standard_normal((7, 3))
    tables = basis.tables(u, 4)
    indices = multi_indices(3, 4)
    expected = np.array(
        [[np.prod([tables[i, a, row] for i, a in enumerate(index)]) for row in range(7)] for index in indices]
    )
    np.testing.assert_allclose(term_values(tables, indices), expected, rtol=1e-14)
    coefficients = np.random.default_rng(2).standard_normal((len(indices), 2))
    np.testing.assert_allclose(
        term_sum(tables, indices, coefficients), coefficients.T @ expected, rtol=1e-11, atol=1e-12
    )


def test_quantile_basis_is_orthonormal_under_a_law_with_a_heavy_tail():
    """Lognormal moments in closed form: E x^k = exp(k mu + k^2 s^2 / 2)."""
    basis = quantile_basis([lambda z: np.exp(0.2 + 0.5 * z)], 4)
    z = np.linspace(-20.0, 20.0, 4001)
    weight = np.exp(-0.5 * z**2)
    weight /= weight.sum()
    values = basis.tables(np.exp(0.2 + 0.5 * z)[:, np.newaxis], 4)[0]
    np.testing.assert_allclose((values * weight) @ values.T, np.eye(5), atol=1e-9)
    mean = np.exp(0.2 + 0.125)
    assert basis.centre[0, 0] == pytest.approx(mean, rel=1e-13)
    assert basis.square[0, 1] == pytest.approx(mean**2 * np.expm1(0.25), rel=1e-13)


def test_bases_refuse_what_they_cannot_do():
    basis = hermite_basis(2, 3)
    with pytest.raises(ShapeError, match=r"\(n, 2\)"):
        basis.tables(np.zeros((4, 3)), 2)
    with pytest.raises(ParameterError, match="at most 3"):
        basis.tables(np.zeros((4, 2)), 4)
    with pytest.raises(ParameterError, match="not constant"):
        quantile_basis([lambda z: 0.0 * z], 2)
    with pytest.raises(ParameterError, match="at most 20"):
        quantile_basis([lambda z: z], 21)
    with pytest.raises(ParameterError, match="one-dimensional"):
        distribution_basis([], 2)
