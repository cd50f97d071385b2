"""Whether rank correlations can hold together, and the nearest set that can."""

from collections.abc import Collection, Mapping

import numpy as np

from probsoil._typing import ArrayLike, BoolArray, FloatArray

Pair = tuple[str, str]
# Below this the smallest eigenvalue is lost in rounding and a Cholesky factor is noise.
LEAST_EIGENVALUE = 1e-8
_ROUNDS = 10_000
_TOLERANCE = 1e-10


def latent_correlation(rank_correlation: ArrayLike) -> FloatArray:
    r"""Return the correlation of the latent normals that gives a rank correlation.

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
    """Return the rank correlation of two normals: the inverse of `latent_correlation`.

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


def impossible_sets(ranks: Mapping[Pair, float]) -> list[dict[Pair, float]]:
    """Return every connected set of correlations that cannot hold together, mended.

    Parameters
    ----------
    ranks : mapping
        Rank correlation of each pair; pairs not given are uncorrelated.

    Returns
    -------
    sets : list of dict
        For each set, its pairs with the nearest rank correlations that can hold.
    """
    found = []
    for component in _components(list(ranks)):
        given = {pair: ranks[pair] for pair in component}
        names = list(dict.fromkeys(name for pair in component for name in pair))
        matrix = _matrix(given, names)
        if np.linalg.eigvalsh(matrix)[0] < LEAST_EIGENVALUE:
            found.append(_mended(matrix, given, names))
    return found


def parts_correlation(correlation: FloatArray, local: ArrayLike) -> FloatArray:
    r"""Return the correlation that knowledge and local parts must both have to give one at every station.

    Parameters
    ----------
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals at one station.
    local : array_like, shape (d,), [-]
        Share :math:`\beta^2` of each variance that differs from place to place.

    Returns
    -------
    parts : ndarray, shape (d, d), [-]
        :math:`c_{pq} = R_{pq} / (\alpha_p \alpha_q + \beta_p \beta_q)` with
        :math:`\alpha^2 = 1 - \beta^2`; ones on the diagonal. Not positive definite, or beyond one, where
        no split into the two parts gives R.

    Notes
    -----
    With :math:`z_p = \alpha_p K_p + \beta_p E_p`, K and E independent and each of correlation c, z has the
    correlation R. For two parameters such a split exists whenever any does: the greatest correlation that
    two parts of given shares allow is :math:`\alpha_p \alpha_q + \beta_p \beta_q`.
    """
    share = np.asarray(local, dtype=np.float64)
    alpha, beta = np.sqrt(1.0 - share), np.sqrt(share)
    parts = correlation / (np.outer(alpha, alpha) + np.outer(beta, beta))
    np.fill_diagonal(parts, 1.0)
    return np.asarray(parts, dtype=np.float64)


def impossible_parts(
    ranks: Mapping[Pair, float], local: Mapping[str, float], rigid: Collection[str] = ()
) -> list[dict[Pair, float]]:
    """Return every connected set of correlations that cannot hold at each of several stations.

    Parameters
    ----------
    ranks : mapping
        Rank correlation of each pair; pairs not given are uncorrelated.
    local : mapping of str to float, [-]
        Share of each number's variance that differs from place to place; 0 where not given.
    rigid : collection of str
        Numbers that are the same at all stations. Others follow those they are correlated with.

    Returns
    -------
    sets : list of dict
        For each set that could hold at one station but not at several, its pairs that clash, with the
        greatest rank correlation, by size, that the shares allow each pair on its own.
    """
    fixed = {name for pair in ranks for name in pair if local.get(name, 0.0) > 0.0 or name in rigid}
    clashing = {pair: rank for pair, rank in ranks.items() if fixed.issuperset(pair)}
    found = []
    for component in _components(list(clashing)):
        given = {pair: clashing[pair] for pair in component}
        names = list(dict.fromkeys(name for pair in component for name in pair))
        matrix = _matrix(given, names)
        if np.linalg.eigvalsh(matrix)[0] < LEAST_EIGENVALUE:
            continue  # refused already for one station
        parts = parts_correlation(matrix, [local.get(name, 0.0) for name in names])
        if np.linalg.eigvalsh(parts)[0] < LEAST_EIGENVALUE:
            found.append({pair: _greatest(*(local.get(name, 0.0) for name in pair)) for pair in given})
    return found


def _greatest(first: float, second: float) -> float:
    """Return the greatest rank correlation of two numbers with these local shares."""
    least = np.sqrt((1.0 - first) * (1.0 - second)) + np.sqrt(first * second)
    return float(rank_correlation(least))


def nearest_correlation(matrix: FloatArray, free: BoolArray) -> FloatArray:
    """Return the correlation matrix nearest to a symmetric matrix in the Frobenius norm.

    Parameters
    ----------
    matrix : ndarray, shape (n, n), [-]
        Symmetric, with unit diagonal.
    free : ndarray of bool, shape (n, n), [-]
        Entries that may change; the others keep their value.

    Returns
    -------
    nearest : ndarray, shape (n, n), [-]
        Positive semi-definite up to the tolerance of the iteration.

    Notes
    -----
    Alternating projections with Dykstra's correction on to the positive semi-definite
    matrices and on to the matrices with the kept entries (algorithm 3.3 of [1]_, where only
    the diagonal is kept). Both sets are convex, and they meet because the identity
    matrix lies in both as long as the kept entries off the diagonal are zero.

    References
    ----------
    .. [1] N. J. Higham, "Computing the nearest correlation matrix - a problem from finance",
       IMA Journal of Numerical Analysis 22 (2002), 329-343. From memory.
    """
    kept = matrix.copy()
    current, correction = matrix.copy(), np.zeros_like(matrix)
    for _ in range(_ROUNDS):
        shifted = current - correction
        values, vectors = np.linalg.eigh(shifted)
        projected = (vectors * np.maximum(values, 0.0)) @ vectors.T
        correction = projected - shifted
        renewed = np.where(free, projected, kept)
        change = np.max(np.abs(renewed - current))
        current = renewed
        if change < _TOLERANCE:
            break
    return current


def _mended(matrix: FloatArray, given: Mapping[Pair, float], names: list[str]) -> dict[Pair, float]:
    """Nearest set, drawn towards independence until it is positive definite as printed."""
    index = {name: place for place, name in enumerate(names)}
    free = np.zeros(matrix.shape, dtype=np.bool_)
    for a, b in given:
        free[index[a], index[b]] = free[index[b], index[a]] = True
    nearest = nearest_correlation(matrix, free)
    shrink = 0.0
    while True:
        shrink += 0.001
        ranks = {
            (a, b): round(float(rank_correlation((1.0 - shrink) * nearest[index[a], index[b]])), 3)
            for a, b in given
        }
        if np.linalg.eigvalsh(_matrix(ranks, names))[0] > 10.0 * LEAST_EIGENVALUE:
            return ranks


def _matrix(ranks: Mapping[Pair, float], names: list[str]) -> FloatArray:
    matrix = np.eye(len(names))
    index = {name: place for place, name in enumerate(names)}
    for (a, b), rank in ranks.items():
        matrix[index[a], index[b]] = matrix[index[b], index[a]] = latent_correlation(rank)
    return matrix


def _components(pairs: list[Pair]) -> list[list[Pair]]:
    """Split pairs into sets that share no name."""
    groups: list[tuple[set[str], list[Pair]]] = []
    for pair in pairs:
        touching = [group for group in groups if group[0] & set(pair)]
        groups = [group for group in groups if group not in touching]
        names = set(pair).union(*(group[0] for group in touching))
        groups.append((names, [*(known for group in touching for known in group[1]), pair]))
    return [sorted(members, key=pairs.index) for _, members in groups]
