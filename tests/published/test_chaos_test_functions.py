"""Polynomial chaos against functions with known shares, closed coefficients, and chaospy.

The functions are recalled, not opened: T. Ishigami and T. Homma, 1990; I. M. Sobol' and Y. L. Levitan
(the product of absolute values). Their shares are worked out from their definitions here.
"""

import chaospy
import numpy as np
import pytest

from probsoil.probability import (
    chaos_shares,
    distribution_basis,
    hermite_basis,
    multi_indices,
    polynomial_chaos,
    quantile_basis,
)
from probsoil.probability.matching_pursuit import least_squares
from probsoil.probability.multi_indices import term_values


def uniform_points(n, d, low, high, seed=1):
    return np.random.default_rng(seed).uniform(low, high, (n, d))


def test_ishigami():
    a, b = 7.0, 0.1
    x = uniform_points(3000, 3, -np.pi, np.pi)
    values = np.sin(x[:, 0]) + a * np.sin(x[:, 1]) ** 2 + b * x[:, 2] ** 4 * np.sin(x[:, 0])
    basis = distribution_basis([chaospy.Uniform(-np.pi, np.pi) for _ in range(3)], 16)
    chaos = polynomial_chaos(x, values, basis=basis, candidates=[(16, 1.0, 2)])
    # series of sines end at degree 16 with a squared rest below 1e-6 of the variance
    assert chaos.hold_out_error[0] < 1e-5
    variance = a**2 / 8 + b * np.pi**4 / 5 + b**2 * np.pi**8 / 18 + 0.5
    assert variance == pytest.approx(13.84459, abs=5e-6)
    assert chaos.mean[0] == pytest.approx(a / 2, rel=1e-4)
    assert chaos.variance[0] == pytest.approx(variance, rel=1e-4)
    shares = chaos_shares(chaos)
    np.testing.assert_allclose(shares.first[:, 0], [0.31391, 0.44241, 0.0], atol=1e-4)
    np.testing.assert_allclose(shares.total[:, 0], [0.55759, 0.44241, 0.24368], atol=1e-4)
    # what is shared by a pair belongs to both alike (Shapley effects of independent variables)
    halved = shares.first[:, 0] + 0.5 * shares.pair[:, :, 0].sum(axis=1)
    np.testing.assert_allclose(halved, [0.43575, 0.44241, 0.12184], atol=1e-4)


def test_product_of_absolute_values():
    """Edge at the middle of each variable: even polynomials to degree 20 leave below 0.1 % of |t|."""
    a = np.array([0.0, 1.0, 4.5, 9.0, 99.0, 99.0, 99.0, 99.0])
    x = uniform_points(4000, 8, 0.0, 1.0)
    values = ((np.abs(4.0 * x - 2.0) + a) / (1.0 + a)).prod(axis=1)
    part = 1.0 / (3.0 * (1.0 + a) ** 2)
    variance = (1.0 + part).prod() - 1.0
    assert variance == pytest.approx(0.465424, abs=5e-7)
    basis = distribution_basis([chaospy.Uniform(0, 1) for _ in range(8)], 20)
    chaos = polynomial_chaos(x, values, basis=basis, candidates=[(20, 0.5, 2)])
    shares = chaos_shares(chaos)
    np.testing.assert_allclose(shares.first[:4, 0], [0.71619, 0.17905, 0.02368, 0.00716], atol=0.01)
    np.testing.assert_allclose(shares.total[:4, 0], [0.78714, 0.24220, 0.03432, 0.01046], atol=0.015)
    assert chaos.variance[0] == pytest.approx(variance, rel=0.03)


PRINTED = [1.38403, 0.69202, 0.24466, 0.07063, 0.01766]


def test_lognormal_coefficients():
    r"""exp(mu + s z) has coefficients exp(mu + s^2/2) s^n / sqrt(n!); the fit stops at degree 12."""
    u = np.random.default_rng(5).standard_normal((400, 1))
    chaos = polynomial_chaos(u, np.exp(0.2 + 0.5 * u[:, 0]), candidates=[(12, 1.0, None)])
    np.testing.assert_allclose(chaos.coefficients[:5, 0], PRINTED, atol=5.1e-6)
    assert chaos.variance[0] == pytest.approx(0.544062, abs=5.1e-7)


def test_lognormal_coefficients_by_quadrature_of_chaospy():
    nodes, weights = chaospy.generate_quadrature(30, chaospy.Normal(0, 1), rule="gaussian")
    tables = hermite_basis(1, 4).tables(nodes.T, 4)[0]
    np.testing.assert_allclose(tables @ (weights * np.exp(0.2 + 0.5 * nodes[0])), PRINTED, atol=5.1e-6)


@pytest.mark.parametrize(
    ("dimension", "degree", "norm"), [(1, 8, 1.0), (3, 4, 1.0), (5, 3, 0.7), (6, 4, 0.5)]
)
def test_basis_of_normals_is_that_of_chaospy(dimension, degree, norm):
    law = chaospy.J(*[chaospy.Normal(0, 1) for _ in range(dimension)])
    theirs = chaospy.generate_expansion(degree, law, normed=True, cross_truncation=norm)
    u = np.random.default_rng(6).standard_normal((50, dimension))
    indices = multi_indices(dimension, degree, norm)
    ours = term_values(hermite_basis(dimension, degree).tables(u, degree), indices)
    _same_rows(ours, theirs(*u.T))


LAWS = {
    "uniform": lambda: chaospy.Uniform(-1.0, 1.0),
    "beta": lambda: chaospy.Beta(2.0, 3.5, 0.0, 1.0),
    "lognormal": lambda: chaospy.LogNormal(0.0, 0.5),
    "normal": lambda: chaospy.Normal(0.0, 2.0),
}


@pytest.mark.parametrize("name", LAWS)
def test_basis_of_a_law_is_that_of_chaospy(name):
    theirs = chaospy.generate_expansion(3, LAWS[name](), normed=True)
    x = np.quantile(LAWS[name]().sample(400, rule="hammersley"), np.linspace(0.02, 0.98, 40))
    ours = distribution_basis([LAWS[name]()], 3).tables(x[:, np.newaxis], 3)[0]
    np.testing.assert_allclose(ours, theirs(x), rtol=1e-12, atol=1e-12)


def test_basis_of_several_laws_is_that_of_chaospy():
    theirs = chaospy.generate_expansion(3, chaospy.J(*[law() for law in LAWS.values()]), normed=True)
    x = np.random.default_rng(8).uniform(0.1, 0.9, (50, 4))
    basis = distribution_basis([law() for law in LAWS.values()], 3)
    _same_rows(term_values(basis.tables(x, 3), multi_indices(4, 3)), theirs(*x.T))


def test_basis_from_quantiles_is_that_of_the_law():
    z_law = chaospy.LogNormal(-1.0, 0.3)
    from_law = distribution_basis([z_law], 4)
    from_quantile = quantile_basis([lambda z: np.exp(-1.0 + 0.3 * z)], 4)
    np.testing.assert_allclose(from_quantile.centre, from_law.centre, rtol=1e-12)
    np.testing.assert_allclose(from_quantile.square, from_law.square, rtol=1e-12)


def test_fit_and_shares_are_those_of_chaospy():
    law = chaospy.J(*[chaospy.Normal(0, 1) for _ in range(3)])
    expansion, norms = chaospy.generate_expansion(3, law, normed=True, retall=True)
    u = np.random.default_rng(7).standard_normal((300, 3))
    values = np.exp(0.3 * u[:, 0]) * (1.0 + 0.5 * u[:, 1]) + 0.1 * np.abs(u[:, 2])
    _, theirs = chaospy.fit_regression(expansion, u.T, values, retall=1)
    chaos = polynomial_chaos(u, values, candidates=[(3, 1.0, None)])
    indices = multi_indices(3, 3)
    ours = least_squares(term_values(hermite_basis(3, 3).tables(u, 3), indices), values)
    np.testing.assert_allclose(np.sort(np.abs(ours)), np.sort(np.abs(theirs)), rtol=1e-10, atol=1e-13)
    # the shares of our sparse chaos, by chaospy from the same coefficients
    polynomial = dict(zip(map(tuple, chaos.indices.tolist()), chaos.coefficients[:, 0], strict=True))
    exponents = [_leading(one) for one in expansion]
    coefficients = np.array([polynomial.get(one, 0.0) for one in exponents])
    first = chaospy.FirstOrderSobol(expansion, coefficients)
    total = chaospy.TotalOrderSobol(expansion, coefficients)
    shares = chaos_shares(chaos)
    np.testing.assert_allclose(shares.first[:, 0], np.ravel(first), atol=1e-12)
    np.testing.assert_allclose(shares.total[:, 0], np.ravel(total), atol=1e-12)
    np.testing.assert_allclose(norms, 1.0, rtol=1e-12)


def _leading(polynomial):
    """Exponents of the term of highest degree."""
    rows = np.asarray(polynomial.exponents)
    rows = np.pad(rows, ((0, 0), (0, 3 - rows.shape[1]))) if rows.shape[1] < 3 else rows
    names = [str(name) for name in polynomial.names]
    full = np.zeros((len(rows), 3), dtype=int)
    for column, name in enumerate(names):
        full[:, int(name.removeprefix("q"))] = rows[:, column]
    return tuple(full[full.sum(axis=1).argmax()].tolist())


def _same_rows(ours, theirs):
    assert ours.shape == theirs.shape
    scale = np.abs(theirs).max(axis=1, keepdims=True)
    # the order of the terms differs: each of ours is one of theirs
    for row in ours:
        assert (np.abs(theirs - row) <= 1e-12 * scale).all(axis=1).sum() == 1
