"""Rank correlations that cannot hold together, and the nearest set that can."""

import numpy as np
import pytest
from scipy.optimize import minimize

from probsoil.scenario.correlation import (
    impossible_sets,
    latent_correlation,
    nearest_correlation,
    rank_correlation,
)


def test_rank_and_latent_correlation_undo_each_other():
    for rank in (-0.99, -0.4, 0.0, 0.3, 0.95):
        assert rank_correlation(latent_correlation(rank)) == pytest.approx(rank, abs=1e-14)
    assert latent_correlation(1.0) == pytest.approx(1.0, abs=1e-15)


def test_sets_that_hold_are_left_alone():
    assert impossible_sets({("a", "b"): 0.9, ("b", "c"): 0.9, ("a", "c"): 0.9}) == []
    assert impossible_sets({("a", "b"): 0.9, ("c", "d"): -0.9}) == []


def test_only_the_impossible_set_is_named_and_its_mending_holds():
    given = {("a", "b"): 0.9, ("x", "y"): 0.99, ("b", "c"): 0.9, ("a", "c"): -0.9}
    (mended,) = impossible_sets(given)
    assert list(mended) == [("a", "b"), ("b", "c"), ("a", "c")]
    assert impossible_sets(mended) == []
    # Symmetric conflict: each gives way alike, and no more than needed to leave the cone.
    assert mended["a", "b"] == mended["b", "c"] == -mended["a", "c"]
    assert 0.47 < mended["a", "b"] < 0.5


def test_pairs_not_given_stay_uncorrelated():
    # a-b and b-c force a-c to be well above 0, which leaving it out denies.
    (mended,) = impossible_sets({("a", "b"): 0.9, ("b", "c"): 0.9})
    assert set(mended) == {("a", "b"), ("b", "c")}
    assert mended["a", "b"] ** 2 + mended["b", "c"] ** 2 < 1.0


def nearest_by_search(matrix: np.ndarray, *, keep_a_zero: bool) -> np.ndarray:
    """Nearest correlation matrix by a general optimiser over triangular factors with rows of length 1.

    The first row of the factor is (1, 0, ...), so entry (last, first) is kept at zero by leaving it out.
    """
    n = len(matrix)
    rows, columns = np.tril_indices(n)
    if keep_a_zero:
        kept = (rows < n - 1) | (columns > 0)
        rows, columns = rows[kept], columns[kept]

    def built(x: np.ndarray) -> np.ndarray:
        factor = np.zeros((n, n))
        factor[rows, columns] = x
        factor /= np.linalg.norm(factor, axis=1, keepdims=True)
        return factor @ factor.T

    rng = np.random.default_rng(5)
    starts = [rng.normal(size=rows.size) for _ in range(5)]
    found = [minimize(lambda x: np.sum((built(x) - matrix) ** 2), start, method="BFGS") for start in starts]
    return built(min(found, key=lambda result: result.fun).x)


@pytest.mark.parametrize("keep_a_zero", [False, True])
def test_alternating_projections_agree_with_a_general_optimiser(keep_a_zero):
    matrix = np.array(
        [[1.0, 0.9, 0.7, 0.0], [0.9, 1.0, -0.6, 0.8], [0.7, -0.6, 1.0, 0.3], [0.0, 0.8, 0.3, 1.0]]
    )
    free = ~np.eye(4, dtype=bool)
    if keep_a_zero:
        free[0, 3] = free[3, 0] = False
    own = nearest_correlation(matrix, free)
    assert np.linalg.eigvalsh(own)[0] > -1e-8
    assert np.diag(own) == pytest.approx(1.0)
    if keep_a_zero:
        assert own[0, 3] == 0.0
    theirs = nearest_by_search(matrix, keep_a_zero=keep_a_zero)
    assert np.linalg.norm(own - matrix) == pytest.approx(np.linalg.norm(theirs - matrix), rel=1e-5)
    assert own == pytest.approx(theirs, abs=1e-3)


def test_a_correlation_matrix_is_its_own_nearest():
    matrix = np.array([[1.0, 0.5, 0.2], [0.5, 1.0, -0.3], [0.2, -0.3, 1.0]])
    assert nearest_correlation(matrix, ~np.eye(3, dtype=bool)) == pytest.approx(matrix, abs=1e-12)
