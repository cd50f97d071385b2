"""Dependence between parameters: rank correlations held by a Gaussian copula."""

from collections.abc import Sequence

import numpy as np

from probsoil._typing import FloatArray
from probsoil.errors import DependenceError
from probsoil.scenario.correlation import LEAST_EIGENVALUE, impossible_sets, latent_correlation

Dependence = tuple[str, str, float]


def correlation_matrix(names: Sequence[str], dependence: Sequence[Dependence]) -> FloatArray:
    """Correlation matrix of the latent normals.

    Parameters
    ----------
    names : sequence of str
        Uncertain parameters, in order.
    dependence : sequence of (str, str, float), [-]
        Pairs of parameters with their rank correlation.

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
            raise DependenceError(_refusal(dependence, least))
    return matrix


def correlation_blocks(correlation: FloatArray) -> list[list[int]]:
    """Find the groups of parameters that are tied to each other and to no other.

    Parameters
    ----------
    correlation : ndarray, shape (d, d), [-]
        Correlation matrix.

    Returns
    -------
    blocks : list of list of int, [-]
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


def _refusal(dependence: Sequence[Dependence], least: float) -> str:
    given = {(first, second): rho for first, second, rho in dependence}
    lines = [
        f"{first} and {second}: {given[first, second]:.2f} given, {rho:.3f} can hold"
        for mended in impossible_sets(given)
        for (first, second), rho in mended.items()
    ]
    return (
        f"these {len(lines)} rank correlations cannot hold together (least eigenvalue {least:.3g}, must be "
        f"above zero); nearest set that can:\n  " + "\n  ".join(lines)
    )
