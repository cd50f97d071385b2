"""Several limits on the same realisations."""

import numpy as np
import pytest

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import clopper_pearson, exceedance, joint_exceedance

#                      a        b        c
ROWS = np.array([[1, 1, 0]] * 3 + [[1, 0, 0]] * 2 + [[0, 1, 0]] + [[0, 0, 0]] * 14, dtype=bool)


def test_counts_by_hand():
    found = joint_exceedance(ROWS, ["a", "b", "c"])
    assert found.number.tolist() == [14, 3, 3, 0]
    assert found.both.tolist() == [[5, 3, 0], [3, 4, 0], [0, 0, 0]]
    assert found.any_exceeded.probability == 6 / 20
    assert found.all_exceeded.probability == 0.0
    assert found.conditional[0].tolist() == [1.0, 3 / 5, 0.0]
    assert found.conditional[1].tolist() == [3 / 4, 1.0, 0.0]
    assert np.isnan(found.conditional[2]).all()
    assert found.if_unrelated[0, 1] == pytest.approx(1.0)
    assert (found.low[2].tolist(), found.high[2].tolist()) == ([0.0] * 3, [1.0] * 3)
    low, high = clopper_pearson(3, 5)
    assert (found.low[0, 1], found.high[0, 1]) == (float(low), float(high))


def test_one_limit_alone_is_its_own_exceedance():
    values = np.random.default_rng(1).standard_normal(500)
    found = joint_exceedance((values > 1.5)[:, np.newaxis], ["only"])
    alone = exceedance(values, 1.5, "not more than")
    assert found.any_exceeded.interval == alone.interval
    assert found.all_exceeded.exceeding == alone.exceeding


def test_replicates_give_the_interval_of_any():
    replicate = np.repeat(np.arange(16), 256)
    u = np.random.default_rng(2).standard_normal((4096, 2))
    found = joint_exceedance(u > 0.5, ["a", "b"], replicate=replicate, method="latin hypercube")
    expected = exceedance((u > 0.5).any(axis=1), 0.5, "not more than", replicate=replicate)
    assert found.any_exceeded.interval == expected.interval
    assert found.any_exceeded.method.startswith("latin hypercube")


def test_conditional_chances_cover():
    """Two normals of correlation 0.6: P(both > 1) / P(one > 1) = 0.451094 by quadrature, 400 repeats."""
    from scipy.integrate import quad
    from scipy.special import ndtr

    density = lambda x: np.exp(-0.5 * x * x) / np.sqrt(2.0 * np.pi)  # noqa: E731
    both = quad(lambda x: density(x) * ndtr((0.6 * x - 1.0) / 0.8), 1.0, 12.0)[0]
    exact, covered, repeats = both / ndtr(-1.0), 0, 400
    generator = np.random.default_rng(3)
    for _ in range(repeats):
        u = generator.standard_normal((400, 2))
        v = np.column_stack([u[:, 0], 0.6 * u[:, 0] + 0.8 * u[:, 1]])
        found = joint_exceedance(v > 1.0, ["a", "b"])
        covered += bool(found.low[0, 1] <= exact <= found.high[0, 1])
    assert covered / repeats > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / repeats)


def test_pairs_are_a_table():
    frame = joint_exceedance(ROWS, ["a", "b", "c"]).to_frame()
    assert len(frame) == 6
    row = frame[(frame["where"] == "a") & (frame["also"] == "b")].iloc[0]
    assert (row["where_exceeded"], row["both_exceeded"], row["conditional"]) == (5, 3, 0.6)


def test_its_arrays_are_its_own():
    found = joint_exceedance(ROWS, ["a", "b", "c"])
    with pytest.raises(ValueError, match="read-only"):
        found.both[0, 0] = 1


@pytest.mark.parametrize("table", [np.zeros(3), np.zeros((0, 2)), np.zeros((3, 3))])
def test_a_table_that_does_not_fit_is_refused(table):
    with pytest.raises(ShapeError, match="one column of realisations for each of 2 limits"):
        joint_exceedance(table, ["a", "b"])


def test_bad_confidence_is_refused():
    with pytest.raises(ParameterError, match="confidence"):
        joint_exceedance(ROWS, ["a", "b", "c"], confidence=1.0)
