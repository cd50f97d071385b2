"""Exact Shapley effects of a linear function of correlated normals."""

from itertools import combinations
from math import factorial

import numpy as np
from scipy.sparse.csgraph import connected_components

from probsoil._typing import FloatArray
from probsoil.errors import ShapeError

LARGEST_EXACT_BLOCK = 14
PERMUTATION_PAIRS = 1000
_SEED = 20_011


def linear_shapley(coefficients: FloatArray, correlation: FloatArray) -> tuple[FloatArray, FloatArray]:
    r"""Shapley effects of linear functions of correlated standard normals.

    Parameters
    ----------
    coefficients : ndarray, shape (d, n_function), [any]
        Coefficients b of each linear function b'z, in the unit of the quantity.
    correlation : ndarray, shape (d, d), [-]
        Correlation R of z.

    Returns
    -------
    effects : ndarray, shape (d, n_function), [any]
        Part of the variance of each function that belongs to each variable, unit squared; none is
        negative, and they add up to the variance b'Rb.
    error : ndarray, shape (d, n_function), [any]
        Standard error; zero but for variables in groups of more than 14 tied to each other.

    Raises
    ------
    ShapeError
        If the shapes do not match.

    Notes
    -----
    The worth of a set u of variables is what they explain together,
    :math:`V_u = \mathrm{var}\, E[b'z | z_u] = c_u' R_{uu}^{-1} c_u` with :math:`c = R b`; a variable's
    effect is the rise of V when it joins, averaged over all orders of joining. Groups of variables
    with no correlation between them add up, so each is worked out by itself: over all subsets up to 14
    variables, beyond that over 1000 random orders and their reverses with a fixed seed. For one order the
    rises are the squares of :math:`L' b`, L being the Cholesky factor of R in that order.

    References
    ----------
    .. [1] A. B. Owen and C. Prieur, "On Shapley value for measuring importance of dependent inputs",
       SIAM/ASA Journal on Uncertainty Quantification, 5, 2017 (recalled; not opened).
    .. [2] B. Iooss and C. Prieur, "Shapley effects for sensitivity analysis with correlated inputs:
       comparisons with Sobol' indices, numerical estimation and applications", International Journal for
       Uncertainty Quantification, 9, 2019 (recalled; not opened).
    """
    if coefficients.ndim != 2 or correlation.shape != (len(coefficients), len(coefficients)):
        raise ShapeError(f"coefficients {coefficients.shape} do not match correlation {correlation.shape}")
    effects, error = np.zeros(coefficients.shape), np.zeros(coefficients.shape)
    count, label = connected_components(correlation != 0.0, directed=False)
    for number in range(count):
        block = np.flatnonzero(label == number)
        own = correlation[np.ix_(block, block)]
        if len(block) <= LARGEST_EXACT_BLOCK:
            effects[block] = _over_subsets(coefficients[block], own)
        else:
            effects[block], error[block] = _over_orders(coefficients[block], own)
    return effects, error


def _over_subsets(coefficients: FloatArray, correlation: FloatArray) -> FloatArray:
    size, functions = coefficients.shape
    worth = np.zeros((1 << size, functions))
    covariance = correlation @ coefficients
    for count in range(1, size + 1):
        subsets = np.array(list(combinations(range(size), count)))
        masks = (1 << subsets).sum(axis=1)
        inner = correlation[subsets[:, :, np.newaxis], subsets[:, np.newaxis, :]]
        outer = covariance[subsets]
        worth[masks] = (outer * np.linalg.solve(inner, outer)).sum(axis=1)
    return effects_of_worth(worth)


def effects_of_worth(worth: FloatArray) -> FloatArray:
    """Shapley effects from the worth of every subset.

    Parameters
    ----------
    worth : ndarray, shape (2^size, n_function), [any]
        Worth of each subset; the bits of its number say who belongs to it.

    Returns
    -------
    effects : ndarray, shape (size, n_function), [any]
        Rise of the worth when each joins, averaged over all orders of joining.
    """
    size = len(worth).bit_length() - 1
    every = np.arange(1 << size)
    members = np.array([int(mask).bit_count() for mask in every])
    weight = np.array([factorial(s) * factorial(size - s - 1) / factorial(size) for s in range(size)])
    effects = np.empty((size, worth.shape[1]))
    for variable in range(size):
        without = every[(every >> variable) & 1 == 0]
        rise = worth[without | (1 << variable)] - worth[without]
        effects[variable] = weight[members[without]] @ rise
    return effects


def _over_orders(coefficients: FloatArray, correlation: FloatArray) -> tuple[FloatArray, FloatArray]:
    size = len(coefficients)
    generator = np.random.default_rng(np.random.SeedSequence(_SEED))
    forward = generator.permuted(np.tile(np.arange(size), (PERMUTATION_PAIRS, 1)), axis=1)
    average = np.zeros((PERMUTATION_PAIRS, *coefficients.shape))
    rows = np.arange(PERMUTATION_PAIRS)[:, np.newaxis]
    for order in (forward, forward[:, ::-1]):
        triangle = np.linalg.cholesky(correlation[order[:, :, np.newaxis], order[:, np.newaxis, :]])
        rise = np.einsum("pji,pjk->pik", triangle, coefficients[order]) ** 2
        average[rows, order] += 0.5 * rise
    return average.mean(axis=0), average.std(axis=0, ddof=1) / np.sqrt(PERMUTATION_PAIRS)
