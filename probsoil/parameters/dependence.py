"""Dependence between parameters: rank correlations held by a Gaussian copula."""

from collections.abc import Sequence

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import DependenceError

LEAST_EIGENVALUE = 1e-8
_MARGINS = (0.01, 0.03, 0.1, 0.3)  # least eigenvalue asked of the set offered instead
_ITERATIONS = 500

Dependence = tuple[str, str, float]


def latent_correlation(rank_correlation: ArrayLike) -> FloatArray:
    r"""Correlation of the latent normals that gives a rank correlation.

    Parameters
    ----------
    rank_correlation : array_like, shape (...,), [-]
        Spearman's rank correlation.

    Returns
    -------
    correlation : ndarray, shape (...,), [-]
        Product-moment correlation of the two standard normals.

    Notes
    -----
    For a bivariate normal :math:`\rho = 2 \sin(\pi \rho_S / 6)`, exactly; it carries over to any
    continuous marginals because ranks do not change under rising functions.

    References
    ----------
    .. [1] K. Pearson, On further methods of determining correlation, Drapers' Company Research
       Memoirs, Biometric Series IV, 1907 (recalled; not opened).
    """
    return 2.0 * np.sin(np.pi / 6.0 * np.asarray(rank_correlation, dtype=np.float64))


def rank_correlation(correlation: ArrayLike) -> FloatArray:
    """Rank correlation of two normals: the inverse of `latent_correlation`.

    Parameters
    ----------
    correlation : array_like, shape (...,), [-]
        Product-moment correlation of two standard normals.

    Returns
    -------
    rank_correlation : ndarray, shape (...,), [-]
        Spearman's rank correlation.
    """
    return 6.0 / np.pi * np.arcsin(0.5 * np.asarray(correlation, dtype=np.float64))


def correlation_matrix(names: Sequence[str], dependence: Sequence[Dependence]) -> FloatArray:
    """Correlation matrix of the latent normals.

    Parameters
    ----------
    names : sequence of str
        Uncertain parameters, in order.
    dependence : sequence of (str, str, float)
        Pairs of parameters with their rank correlation [-].

    Returns
    -------
    correlation : ndarray, shape (d, d), [-]
        Positive definite matrix with ones on its diagonal; zero for pairs not named.

    Raises
    ------
    DependenceError
        If a parameter is unknown or not uncertain, a pair is named twice or with itself, a
        correlation does not lie between -1 and 1, or the set cannot hold together; in the last case the
        message names the pairs and the nearest set that can.
    """
    place = {name: index for index, name in enumerate(names)}
    matrix = np.eye(len(place))
    named: set[tuple[int, int]] = set()
    for first, second, rho in dependence:
        _check_pair(place, (first, second, rho))
        i, j = place[first], place[second]
        if (i, j) in named:
            raise DependenceError(f"the dependence between {first} and {second} is given twice")
        named |= {(i, j), (j, i)}
        matrix[i, j] = matrix[j, i] = float(latent_correlation(rho))
    for block in correlation_blocks(matrix):
        least = float(np.linalg.eigvalsh(matrix[np.ix_(block, block)])[0])
        if least < LEAST_EIGENVALUE:
            raise DependenceError(_refusal(names, matrix, block, least))
    return matrix


def correlation_blocks(correlation: FloatArray) -> list[list[int]]:
    """Find the groups of parameters that are tied to each other and to no other.

    Parameters
    ----------
    correlation : ndarray, shape (d, d), [-]
        Correlation matrix.

    Returns
    -------
    blocks : list of list of int
        Indices of each group, rising.
    """
    from scipy.sparse.csgraph import connected_components  # deferred: nothing else here needs it

    if len(correlation) == 0:
        return []
    count, label = connected_components(correlation != 0.0, directed=False)
    return [np.flatnonzero(label == number).tolist() for number in range(count)]


def _check_pair(place: dict[str, int], pair: Dependence) -> None:
    first, second, rho = pair
    for name in (first, second):
        if name not in place:
            raise DependenceError(f"{name} is not an uncertain parameter, so nothing can depend on it")
    if first == second:
        raise DependenceError(f"{first} cannot depend on itself; name two different parameters")
    if not -1.0 < rho < 1.0:
        raise DependenceError(
            f"the rank correlation of {first} and {second} must lie between -1 and 1; got {rho:g}"
        )


def _refusal(names: Sequence[str], matrix: FloatArray, block: list[int], least: float) -> str:
    pairs = [(i, j) for i in block for j in block if i < j and matrix[i, j] != 0.0]
    given = rank_correlation(matrix)
    nearest = _nearest_ranks(matrix, block)
    lines = [
        f"{names[i]} and {names[j]}: {given[i, j]:.2f} given, {nearest[i, j]:.2f} can hold" for i, j in pairs
    ]
    return (
        f"these {len(pairs)} rank correlations cannot hold together (least eigenvalue {least:.3g}, must be "
        f"above zero); nearest set that can:\n  " + "\n  ".join(lines)
    )


def _nearest_ranks(matrix: FloatArray, block: list[int]) -> FloatArray:
    """Nearest rank correlations, to two decimals, on the pairs named that can hold together."""
    where = np.ix_(block, block)
    result = rank_correlation(matrix)
    tried = (np.round(rank_correlation(_nearest(matrix[where], margin)), 2) for margin in _MARGINS)
    result[where] = next((ranks for ranks in tried if _holds(ranks)), np.eye(len(block)))
    return result


def _holds(ranks: FloatArray) -> bool:
    return bool(np.linalg.eigvalsh(latent_correlation(ranks))[0] > LEAST_EIGENVALUE)


def _nearest(block: FloatArray, margin: float) -> FloatArray:
    """Nearest matrix (Frobenius) with eigenvalues above `margin`, ones and zeros kept (Dykstra)."""
    named = (block != 0.0) & ~np.eye(len(block), dtype=bool)
    matrix, correction = block.copy(), np.zeros_like(block)
    for _ in range(_ITERATIONS):
        values, vectors = np.linalg.eigh(matrix - correction)
        positive = (vectors * np.maximum(values, margin)) @ vectors.T
        correction = positive - (matrix - correction)
        matrix = np.where(named, positive, np.eye(len(block)))
    return matrix
