"""Sets of multi-indices: which products of one-dimensional polynomials a chaos is made of."""

from itertools import combinations, product

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.errors import ParameterError

_SLACK = 1e-12  # rounding of a norm that meets the degree exactly


def multi_indices(
    dimension: int, degree: int, norm: float = 1.0, *, interaction: int | None = None
) -> IntArray:
    r"""Multi-indices of a hyperbolic set.

    Parameters
    ----------
    dimension : int, [-]
        Number of variables d, at least 1.
    degree : int, [-]
        Greatest degree p, 0 or more.
    norm : float, [-]
        Exponent q of the norm, above 0 and at most 1; below 1 mixed terms of high degree are left out.
    interaction : int, [-], optional
        Greatest number of variables in one term; None for no bound but the norm's.

    Returns
    -------
    indices : ndarray of int, shape (n_term, d), [-]
        Degrees of each term in each variable; the constant first, then by rising total degree.

    Raises
    ------
    ParameterError
        If an argument is outside its range.

    Notes
    -----
    The set is :math:`\{\alpha : (\sum_i \alpha_i^q)^{1/q} \le p\}` [1]_. Only the terms of the set are
    ever formed: patterns of degrees first, then the variables that take them.

    References
    ----------
    .. [1] G. Blatman and B. Sudret, "Adaptive sparse polynomial chaos expansion based on least angle
       regression", Journal of Computational Physics, 230, 2011 (recalled; not opened).
    """
    _check(dimension, degree, norm, interaction)
    most = min(dimension, degree if interaction is None else min(interaction, degree))
    blocks = [np.zeros((1, dimension), dtype=np.int64)]
    for active in range(1, most + 1):
        patterns = _patterns(active, degree, norm)
        if len(patterns):
            blocks.append(_spread(patterns, dimension))
    indices = np.concatenate(blocks)
    order = np.lexsort((*(-indices[:, ::-1].T), indices.sum(axis=1)))
    return indices[order]


def _patterns(active: int, degree: int, norm: float) -> IntArray:
    """Positive degrees of `active` variables that the norm admits."""
    single = np.arange(degree + 1, dtype=np.float64) ** norm
    most = float(degree) ** norm + _SLACK
    highest = int(np.flatnonzero(single + (active - 1) <= most)[-1]) if active <= most else 0
    found = [
        pattern
        for pattern in product(range(1, highest + 1), repeat=active)
        if single[list(pattern)].sum() <= most
    ]
    return np.array(found, dtype=np.int64).reshape(-1, active)


def _spread(patterns: IntArray, dimension: int) -> IntArray:
    """Each pattern on each choice of variables."""
    active = patterns.shape[1]
    chosen = np.array(list(combinations(range(dimension), active)), dtype=np.int64)
    indices = np.zeros((len(chosen) * len(patterns), dimension), dtype=np.int64)
    rows = np.arange(len(indices))[:, np.newaxis]
    indices[rows, np.repeat(chosen, len(patterns), axis=0)] = np.tile(patterns, (len(chosen), 1))
    return indices


def _check(dimension: int, degree: int, norm: float, interaction: int | None) -> None:
    if dimension < 1:
        raise ParameterError(f"dimension must be at least 1; got {dimension}")
    if degree < 0:
        raise ParameterError(f"degree must be 0 or more; got {degree}")
    if not 0.0 < norm <= 1.0:
        raise ParameterError(f"norm must be above 0 and at most 1; got {norm:g}")
    if interaction is not None and interaction < 1:
        raise ParameterError(f"interaction must be at least 1; got {interaction}")


def term_values(tables: FloatArray, indices: IntArray) -> FloatArray:
    """Values of the terms of a chaos from tables of one-dimensional polynomials.

    Parameters
    ----------
    tables : ndarray, shape (d, degree + 1, n), [-]
        Polynomials of each variable at each point.
    indices : ndarray of int, shape (n_term, d), [-]
        Degrees of each term in each variable.

    Returns
    -------
    values : ndarray, shape (n_term, n), [-]
        Product over the variables for each term and point.
    """
    values = np.ones((len(indices), tables.shape[2]))
    active = (indices > 0).sum(axis=1)
    for count in range(1, int(active.max(initial=0)) + 1):
        rows = np.flatnonzero(active == count)
        variable = np.nonzero(indices[rows])[1].reshape(-1, count)
        for place in range(count):
            # multiplied row by row into place: a gather of all rows would double the memory
            for row, which in zip(rows, variable[:, place], strict=True):
                values[row] *= tables[which, indices[row, which]]
    return values


def term_sum(tables: FloatArray, indices: IntArray, coefficients: FloatArray) -> FloatArray:
    """Add up the terms of a chaos, each with its coefficient.

    Parameters
    ----------
    tables : ndarray, shape (d, degree + 1, n), [-]
        Polynomials of each variable at each point.
    indices : ndarray of int, shape (n_term, d), [-]
        Degrees of each term in each variable.
    coefficients : ndarray, shape (n_term, n_output), [any]
        Coefficients, in the unit of each output.

    Returns
    -------
    sums : ndarray, shape (n_output, n), [any]
        Sum for each output and point, term after term: the same bits for any number of points.
    """
    sums = np.zeros((coefficients.shape[1], tables.shape[2]))
    for index, weights in zip(indices, coefficients, strict=True):
        term = np.ones(tables.shape[2])
        for variable in np.flatnonzero(index):
            term = term * tables[variable, index[variable]]
        for output in np.flatnonzero(weights):
            sums[output] += weights[output] * term
    return sums
