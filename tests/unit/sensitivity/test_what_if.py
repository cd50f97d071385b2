"""Changes of one parameter on a linear limit, where every answer is known."""

import numpy as np
import pytest
from scipy.special import ndtr, ndtri

from probsoil.errors import ParameterError, ShapeError
from probsoil.sensitivity import (
    halved_knowledge,
    probability_at_values,
    reweighted_halving,
    trials,
    turning_value,
    what_if_frame,
)
from probsoil.sensitivity.changes import paired_difference

CORRELATION = np.array(
    [[1.0, 0.6, 0.0, 0.3], [0.6, 1.0, 0.0, 0.0], [0.0, 0.0, 1.0, -0.4], [0.3, 0.0, -0.4, 1.0]]
)
WEIGHT = np.array([1.0, 0.5, -0.8, 0.0])  # the last parameter is inert but tied to others
LIMIT = 3.0
SURE = 1.0 - 2.0 * ndtr(-4.0)  # four standard errors: by chance 1 in 16,000 for each number
PARAMETERS = {"a": [0], "b": [1], "c": [2], "inert": [3], "a and c": [0, 2]}


def exceeded(z):
    return z @ WEIGHT > LIMIT


def linear_trials(others="keep", *, n=40_000, seed=1, confidence=SURE):
    return trials(exceeded, CORRELATION, PARAMETERS, draws=(n, seed), others=others, confidence=confidence)


def moved_law(own, factor, shift, others):
    """Mean and covariance after the change, from conditional normals and not from moved samples."""
    d = len(CORRELATION)
    rest = [i for i in range(d) if i not in own]
    mean, covariance = np.zeros(d), CORRELATION.copy()
    inner = CORRELATION[np.ix_(own, own)]
    covariance[np.ix_(own, own)] = factor**2 * inner
    mean[own] = shift
    slope = CORRELATION[np.ix_(rest, own)] @ np.linalg.inv(inner)
    if others == "follow":
        left = CORRELATION[np.ix_(rest, rest)] - slope @ inner @ slope.T
        covariance[np.ix_(rest, rest)] = left + factor**2 * slope @ inner @ slope.T
        covariance[np.ix_(rest, own)] = factor**2 * slope @ inner
        mean[rest] = slope @ mean[own]
    else:
        covariance[np.ix_(rest, own)] = factor * CORRELATION[np.ix_(rest, own)]
    covariance[np.ix_(own, rest)] = covariance[np.ix_(rest, own)].T
    return mean, covariance


def exact(own, factor, shift, others):
    mean, covariance = moved_law(own, factor, shift, others)
    return ndtr((WEIGHT @ mean - LIMIT) / np.sqrt(WEIGHT @ covariance @ WEIGHT))


@pytest.mark.parametrize("others", ["keep", "follow"])
def test_halved_knowledge_of_a_linear_limit(others):
    found = halved_knowledge(linear_trials(others))
    before = exact([0], 1.0, 0.0, others)
    for row in found:
        after = exact(PARAMETERS[row.name], 0.5, 0.0, others)
        assert row.others == others
        assert row.interval[0] <= after <= row.interval[1], row
        assert row.difference_interval[0] <= after - before <= row.difference_interval[1], row
        assert row.difference == pytest.approx(row.probability - row.before, abs=1e-15)
    inert = next(row for row in found if row.name == "inert")
    assert (inert.difference == 0.0) == (others == "keep")


@pytest.mark.parametrize("others", ["keep", "follow"])
def test_known_values_of_a_linear_limit(others):
    found = probability_at_values(linear_trials(others), levels=(0.1, 0.9))
    assert len(found) == 2 * len(PARAMETERS)
    for row, level in zip(found, [0.1, 0.9] * len(PARAMETERS), strict=True):
        after = exact(PARAMETERS[row.name], 0.0, float(ndtri(level)), others)
        assert row.interval[0] <= after <= row.interval[1], row
        assert row.change == f"at its {100 * level:.0f} % value"


@pytest.mark.parametrize("others", ["keep", "follow"])
def test_weights_give_the_same_without_a_run(others):
    calls = []

    def counted(z):
        calls.append(len(z))
        return exceeded(z)

    run = trials(counted, CORRELATION, PARAMETERS, draws=(40_000, 2), others=others, confidence=SURE)
    spent = len(calls)
    before = exact([0], 1.0, 0.0, others)
    for row in reweighted_halving(run):
        after = exact(PARAMETERS[row.name], 0.5, 0.0, others)
        assert row.interval[0] <= after <= row.interval[1], row
        assert row.difference_interval[0] <= after - before <= row.difference_interval[1], row
        if others == "follow" and row.name != "a and c":
            # mean squared weight (1/h²)/sqrt(2/h² - 1) = 4/sqrt(7); its own error is below 1 %
            assert row.realisations == pytest.approx(40_000 * np.sqrt(7.0) / 4.0, rel=0.03)
    assert len(calls) == spent


def test_weights_without_a_finite_variance_are_refused():
    tied = np.array([[1.0, 0.95], [0.95, 1.0]])
    run = trials(lambda z: z.sum(axis=1) > 3.0, tied, ["a", "b"], draws=(2000, 1))
    row = reweighted_halving(run, ["a"])[0]
    assert np.isnan(row.probability)
    assert "not finite" in row.note
    following = trials(lambda z: z.sum(axis=1) > 3.0, tied, ["a", "b"], draws=(2000, 1), others="follow")
    assert np.isfinite(reweighted_halving(following, ["a"])[0].probability)


def test_limits_of_the_difference_cover():
    """Four hundred repeats of 1,500 realisations, some 40 exceeding; 3.5 standard errors below 95 %."""
    truth = exact([0], 0.5, 0.0, "keep") - exact([0], 1.0, 0.0, "keep")
    weak = exact([1], 0.5, 0.0, "keep") - exact([1], 1.0, 0.0, "keep")
    covered = np.zeros(2)
    for seed in range(400):
        rows = halved_knowledge(linear_trials(n=1500, seed=seed, confidence=0.95), ["a", "b"])
        for i, (row, value) in enumerate(zip(rows, (truth, weak), strict=True)):
            low, high = row.difference_interval
            covered[i] += low <= value <= high
    assert (covered / 400 > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / 400)).all(), covered / 400


def turning_exact(own, target, others):
    """Latent value at which the linear limit meets the target."""
    _, covariance = moved_law(own, 0.0, 0.0, others)
    slope = WEIGHT @ moved_law(own, 0.0, 1.0, others)[0]
    return (LIMIT + ndtri(target) * np.sqrt(WEIGHT @ covariance @ WEIGHT)) / slope


@pytest.mark.parametrize("others", ["keep", "follow"])
@pytest.mark.parametrize(("name", "side"), [("a", "below"), ("c", "above")])
def test_turning_value_of_a_linear_limit(name, side, others):
    found = turning_value(linear_trials(others), name, 0.05)
    value = turning_exact(PARAMETERS[name], 0.05, others)
    assert found.interval[0] <= value <= found.interval[1]
    assert found.interval[0] <= found.latent <= found.interval[1]
    assert found.interval[1] - found.interval[0] < 0.6
    assert found.within_target == side
    assert found.level == pytest.approx(ndtr(found.latent))


def test_limits_of_the_turning_value_cover():
    value = turning_exact([0], 0.05, "keep")
    covered = 0
    for seed in range(100):
        low, high = turning_value(linear_trials(n=1000, seed=seed, confidence=0.95), "a", 0.05).interval
        covered += low <= value <= high
    assert covered / 100 > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / 100)


def test_verdict_that_does_not_turn_or_turns_twice():
    run = linear_trials(n=2000)
    inert = turning_value(run, "inert", 0.2)
    assert (inert.latent, inert.level, inert.within_target) == (None, None, "everywhere")
    assert "does not meet" in inert.note
    assert turning_value(run, "inert", 0.001).within_target == "nowhere"
    twice = trials(lambda z: z[:, 0] ** 2 + 0.1 * z[:, 1] > 2.1, np.eye(2), ["a", "b"], draws=(2000, 1))
    found = turning_value(twice, "a", 0.3)
    assert "more than once" in found.note


def test_open_side_where_a_limit_never_meets_the_target():
    few = trials(lambda z: z[:, 0] + 0.5 * z[:, 1] > 3.5, np.eye(2), ["a", "b"], draws=(60, 3))
    found = turning_value(few, "a", 0.15)
    assert found.interval[1] == np.inf


def test_nothing_that_changes_sides_leaves_a_width():
    run = trials(lambda z: z[:, 0] > 99.0, np.eye(1), ["a"], draws=np.zeros((500, 1)))
    row = halved_knowledge(run)[0]
    assert row.difference == 0.0
    assert row.difference_interval[0] < 0.0 < row.difference_interval[1]


def test_table_and_other_factors():
    run = linear_trials(n=500)
    frame = what_if_frame(halved_knowledge(run, ["a"], factor=0.25) + reweighted_halving(run, ["b"]))
    assert frame["change"].tolist() == ["spread times 0.25", "halved, by weights"]
    assert frame["others"].tolist() == ["keep", "keep"]
    assert "by weights" in reweighted_halving(run, ["a"], factor=0.8)[0].change


def test_same_seed_same_bits_and_blocks_do_not_matter(monkeypatch):
    import probsoil.sensitivity.changes as module

    first = halved_knowledge(linear_trials("follow", n=3000))
    monkeypatch.setattr(module, "_ROWS", 7)
    assert halved_knowledge(linear_trials("follow", n=3000)) == first


def test_wrong_arguments():
    run = linear_trials(n=100)
    with pytest.raises(ParameterError, match="unknown parameters: z"):
        halved_knowledge(run, ["z"])
    with pytest.raises(ParameterError, match="factor must lie"):
        halved_knowledge(run, factor=1.5)
    with pytest.raises(ParameterError, match="no weights"):
        reweighted_halving(run, factor=0.0)
    with pytest.raises(ParameterError, match="levels must lie"):
        probability_at_values(run, levels=(0.0,))
    with pytest.raises(ParameterError, match="target probability"):
        turning_value(run, "a", 1.0)
    with pytest.raises(ParameterError, match="at least 1"):
        trials(exceeded, CORRELATION, PARAMETERS, draws=(0, 1))
    with pytest.raises(ParameterError, match="others must be"):
        trials(exceeded, CORRELATION, PARAMETERS, draws=(10, 1), others="move")
    with pytest.raises(ParameterError, match="confidence must lie"):
        trials(exceeded, CORRELATION, PARAMETERS, draws=(10, 1), confidence=1.0)
    with pytest.raises(ParameterError, match="must name latent normals"):
        trials(exceeded, CORRELATION, {"a": [4]}, draws=(10, 1))
    with pytest.raises(ParameterError, match="true or false"):
        trials(lambda z: z[:, 0], CORRELATION, PARAMETERS, draws=(10, 1))
    with pytest.raises(ShapeError, match="exceeded must return shape"):
        trials(lambda z: z > 0.0, CORRELATION, PARAMETERS, draws=(10, 1))
    with pytest.raises(ShapeError, match="latent normals must have shape"):
        trials(lambda z: z[:, 0] > 0.0, CORRELATION, PARAMETERS, draws=np.zeros((5, 3)))
    with pytest.raises(ShapeError, match="correlation must have shape"):
        trials(lambda z: z[:, 0] > 0.0, np.zeros((2, 3)), ["a"], draws=np.zeros((5, 2)))


def test_limits_of_a_difference_by_hand():
    """Of 100, three join and one leaves: 4/102 and 2/102 with one added to each and two to all."""
    before, after = np.zeros(100, dtype=bool), np.zeros(100, dtype=bool)
    before[:3], after[1:6] = True, True
    difference, (low, high) = paired_difference(before, after, 0.95)
    assert difference == pytest.approx(0.02)
    reach = 1.959964 * np.sqrt((6.0 / 102.0 - (2.0 / 102.0) ** 2) / 102.0)
    assert (low, high) == pytest.approx((2.0 / 102.0 - reach, 2.0 / 102.0 + reach), rel=1e-6)
