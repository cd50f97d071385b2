"""Drivers from strata against closed forms of a linear limit, and coverage of their limits."""

import numpy as np
import pytest
from scipy.special import ndtri

from probsoil.errors import ParameterError, ShapeError
from probsoil.sensitivity import (
    Strata,
    case_sums,
    driver_sums,
    drivers,
    stratified_drivers,
    stratified_group_elasticities,
)
from probsoil.sensitivity.stratified import stratified_mean

CORRELATION = np.array(
    [[1.0, 0.6, 0.0, 0.3], [0.6, 1.0, 0.0, 0.0], [0.0, 0.0, 1.0, -0.4], [0.3, 0.0, -0.4, 1.0]]
)
INVERSE = np.linalg.inv(CORRELATION)
TRIANGLE = np.linalg.cholesky(CORRELATION)
WEIGHT = np.array([1.0, 0.5, -0.8, 0.0])
NAMES = ["a", "b", "c", "bystander"]
GROUPS = {"top": [0, 1], "base": [2, 3]}
SCALE = np.sqrt(WEIGHT @ CORRELATION @ WEIGHT)
EDGES = (0.005, 0.02, 0.1)  # shares of the pool above each threshold of the score


def closed_form(probability):
    beta = -ndtri(probability)
    hazard = np.exp(-0.5 * beta**2) / np.sqrt(2.0 * np.pi) / probability
    return (
        hazard * beta * WEIGHT * (CORRELATION @ WEIGHT) / SCALE**2,
        hazard * WEIGHT / SCALE,
    )


def stratified(probability, seed, runs=(60, 60, 60, 60), pool=20_000):
    """Points of each stratum of a pool ranked by a score that is only alike the quantity."""
    random = np.random.default_rng(seed)
    z = random.standard_normal((pool, 4)) @ TRIANGLE.T
    score = z @ [1.0, 0.4, -0.7, 0.1]
    order = np.argsort(-score)
    cuts = np.rint(np.array([0.0, *EDGES, 1.0]) * pool).astype(int)
    parts = []
    for first, last, n in zip(cuts[:-1], cuts[1:], runs, strict=True):
        chosen = z[random.choice(order[first:last], n, replace=False)]
        parts.append((chosen, chosen @ WEIGHT, chosen @ WEIGHT > -ndtri(probability) * SCALE))
    return parts, Strata(share=np.diff(cuts) / pool, pool=pool)


def sums_of(parts):
    return [driver_sums(z, INVERSE, quantity, flag) for z, quantity, flag in parts]


def test_drivers_from_strata_match_the_closed_form():
    parts, strata = stratified(0.003, 1, runs=(1000, 400, 400, 400), pool=400_000)
    found = stratified_drivers(sums_of(parts), strata, CORRELATION, NAMES, confidence=0.99994)
    rows = {row.parameter: row for row in found.rows}
    for i, name in enumerate(NAMES):
        spread, mean = (value[i] for value in closed_form(0.003))
        assert rows[name].spread_interval[0] <= spread <= rows[name].spread_interval[1]
        assert rows[name].mean_interval[0] <= mean <= rows[name].mean_interval[1]
    assert found.ranked_by == "spread"
    assert rows["a"].rank == 1
    assert rows["bystander"].rank is None
    assert found.realisations == 2200
    assert found.r_squared == pytest.approx(1.0)  # weights change nothing of an exact fit
    # with as many plain realisations seven would exceed
    assert found.exceeding > 200


def test_limits_cover_at_about_a_hundred_exceedances():
    """Two hundred repeats with pools counted anew; 3.5 standard errors below 95 %, 8 numbers."""
    exact = np.stack(closed_form(0.01))
    covered, exceeding = np.zeros((2, 4)), []
    for seed in range(200):
        parts, strata = stratified(0.01, seed, runs=(60, 80, 80, 80))
        found = stratified_drivers(sums_of(parts), strata, CORRELATION, NAMES)
        exceeding.append(found.exceeding)
        for row in found.rows:
            i = NAMES.index(row.parameter)
            limits = (row.spread_interval, row.mean_interval)
            covered[:, i] += [low <= exact[k, i] <= high for k, (low, high) in enumerate(limits)]
    assert 80 < np.mean(exceeding) < 120
    assert (covered / 200 > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / 200)).all(), covered / 200


def test_one_stratum_is_plain_monte_carlo():
    """The regression on the mean over all takes the place of its full deduction: alike within the error."""
    z = np.random.default_rng(2).standard_normal((20_000, 4)) @ TRIANGLE.T
    sums = driver_sums(z, INVERSE, z @ WEIGHT, z @ WEIGHT > 1.5 * SCALE)
    plain = drivers(sums, CORRELATION, NAMES)
    found = stratified_drivers([sums], Strata(share=np.ones(1)), CORRELATION, NAMES)
    for one, other in zip(plain.rows, found.rows, strict=True):
        half = 0.5 * (one.spread_interval[1] - one.spread_interval[0])
        assert one.parameter == other.parameter
        assert abs(one.spread_elasticity - other.spread_elasticity) < 0.5 * half
        assert 0.9 < (other.spread_interval[1] - other.spread_interval[0]) / (2.0 * half) < 1.05
        assert one.share == pytest.approx(other.share, rel=1e-9)


def test_groups_from_strata_are_sums_of_members():
    parts, strata = stratified(0.01, 5, runs=(90, 200, 200, 200))
    sums = [case_sums(z, INVERSE, flag, GROUPS | {"a": [0], "b": [1]}) for z, _, flag in parts]
    found = stratified_group_elasticities(sums, strata)
    exact = closed_form(0.01)[0]
    for i, members in enumerate([[0, 1], [2, 3], [0], [1]]):
        assert abs(found.value[i] - exact[members].sum()) < 4.0 * found.error[i]


def test_unequal_weights_are_said_and_counted():
    """Some cases in the heavy stratum: many exceed, worth few."""
    random = np.random.default_rng(1)
    parts = []
    for shift in (0.0, 4.0):
        z = random.standard_normal((200, 4))
        parts.append((z, z[:, 0] + shift, z[:, 0] + shift > 2.2))
    found = stratified_drivers(sums_of(parts), Strata(share=np.array([0.999, 0.001])), CORRELATION, NAMES)
    assert found.exceeding > 150
    assert "unequal in weight and worth" in found.note
    assert "realisations would do" in found.note
    assert all(row.rank is None for row in found.rows)


def test_nothing_exceeds_or_everything_does():
    z = np.random.default_rng(1).standard_normal((20, 4))
    for flag in (np.zeros(20, dtype=bool), np.ones(20, dtype=bool)):
        sums = [driver_sums(z, INVERSE, z[:, 0], flag)] * 2
        found = stratified_drivers(sums, Strata(share=np.array([0.5, 0.5])), CORRELATION, NAMES)
        assert np.isnan(found.rows[0].spread_elasticity)
        assert "realisation exceeds" in found.note


def test_wrong_arguments():
    z = np.random.default_rng(1).standard_normal((20, 4))
    sums = driver_sums(z, INVERSE, z[:, 0], z[:, 0] > 0.0)
    with pytest.raises(ParameterError, match="add up to one"):
        Strata(share=np.array([0.5, 0.4]))
    with pytest.raises(ParameterError, match="at least one point"):
        Strata(share=np.ones(1), pool=0)
    with pytest.raises(ShapeError, match="do not match"):
        stratified_drivers([sums], Strata(share=np.array([0.5, 0.5])), CORRELATION, NAMES)
    with pytest.raises(ShapeError, match="do not match 1 strata"):
        stratified_mean(np.ones((2, 2)), np.ones((2, 2, 1)), np.ones((2, 2, 1)), Strata(share=np.ones(1)))
    single = driver_sums(z[:1], INVERSE, z[:1, 0], np.ones(1, dtype=bool))
    with pytest.raises(ParameterError, match="at least two realisations"):
        stratified_drivers([single, sums], Strata(share=np.array([0.5, 0.5])), CORRELATION, NAMES)
