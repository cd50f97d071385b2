"""Latent normals that count together as one parameter."""

from itertools import permutations

import numpy as np
import pytest

from probsoil.sensitivity import Gathering, driver_sums, drivers, shares
from probsoil.sensitivity.accumulate import DriverSums

# two shared parts correlated by 0.4, and for each a local part at three places, correlated place by place
C = np.array([[1.0, 0.4], [0.4, 1.0]])
R = np.zeros((8, 8))
R[:2, :2] = C
R[2:, 2:] = np.kron(C, np.eye(3))
MEMBER = np.array([0, 1, 2, 2, 2, 3, 3, 3])
NAMES = ("a", "b", "a (local)", "b (local)")
SLOPES = np.array([1.0, -0.5, 0.6, 0.3, -0.8, 0.2, 0.0, 0.7])


def sums(n: int = 4000) -> tuple[DriverSums, Gathering, np.ndarray]:
    gathering = Gathering(member=MEMBER, shift=np.ones(8))
    z = np.random.default_rng(4).standard_normal((n, 8)) @ np.linalg.cholesky(R).T
    quantity = z @ SLOPES
    return (
        driver_sums(z, np.linalg.inv(R), quantity, quantity > 1.5, gathering=gathering),
        gathering,
        z,
    )


def group_shapley() -> np.ndarray:
    """Shapley effects of the four groups by their definition, over all orders of joining."""
    covariance = R @ SLOPES

    def worth(groups: tuple[int, ...]) -> float:
        mine = np.flatnonzero(np.isin(MEMBER, groups))
        inner = np.linalg.solve(R[np.ix_(mine, mine)], covariance[mine]) if mine.size else np.zeros(0)
        return float(covariance[mine] @ inner)

    effect = np.zeros(4)
    orders = list(permutations(range(4)))
    for order in orders:
        for place, group in enumerate(order):
            effect[group] += worth(order[: place + 1]) - worth(order[:place])
    return effect / len(orders) / (SLOPES @ R @ SLOPES)


def test_shares_are_the_shapley_effects_of_the_groups() -> None:
    """The quantity is linear, so the fit is exact and the shares are too (1e-9)."""
    total, gathering, _ = sums()
    found = shares(total, R, gathering=gathering)
    np.testing.assert_allclose(found.share, group_shapley(), atol=1e-9)
    assert found.share.sum() == pytest.approx(1.0, abs=1e-12)


def test_scores_of_a_group_are_sums_over_its_members() -> None:
    total, _, z = sums()
    w = z @ np.linalg.inv(R)
    flag = z @ SLOPES > 1.5
    assert total.mean_score[1, 2] == pytest.approx(w[flag][:, 2:5].sum(), rel=1e-9)
    assert total.spread_score[1, 3] == pytest.approx((z * w - 1.0)[flag][:, 5:].sum(), rel=1e-9)
    assert (total.dimension, total.mean_score.shape) == (8, (2, 4))


def test_a_shift_moves_every_member_by_its_own_amount() -> None:
    z = np.random.default_rng(4).standard_normal((50, 8))
    gathering = Gathering(member=MEMBER, shift=np.arange(8.0))
    found = driver_sums(z, np.eye(8), z[:, 0], z[:, 0] > 0.0, gathering=gathering)
    assert found.mean_score[1, 3] == pytest.approx((z[z[:, 0] > 0.0][:, 5:] * [5.0, 6.0, 7.0]).sum())


def test_drivers_are_told_by_group() -> None:
    total, gathering, _ = sums()
    found = drivers(total, R, NAMES, gathering=gathering)
    assert {row.parameter for row in found.rows} == set(NAMES)
    assert sum(row.share for row in found.rows) == pytest.approx(1.0, abs=1e-12)
    with pytest.raises(ValueError, match="sums over 4 parameters match neither 8 names"):
        drivers(total, R, [str(place) for place in range(8)], gathering=gathering)
