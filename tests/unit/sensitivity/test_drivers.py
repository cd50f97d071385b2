"""Drivers from sums over chunks: merging, shares, ranks and what is said when little was seen."""

from functools import reduce

import numpy as np
import pytest
from scipy.stats import norm

from probsoil.errors import ParameterError, ShapeError
from probsoil.sensitivity import GROUPS, driver_sums, drivers, merge, shares

NAMES = ("clay.lambda", "clay.kappa", "clay.pop", "load.fill_phi")
CORRELATION = np.eye(4)
CORRELATION[0, 1] = CORRELATION[1, 0] = 0.6
TRIANGLE, INVERSE = np.linalg.cholesky(CORRELATION), np.linalg.inv(CORRELATION)


def chunks(n, seed=1, size=1024):
    u = np.random.default_rng(seed).standard_normal((n, 4))
    z = u @ TRIANGLE.T
    return [z[start : start + size] for start in range(0, n, size)]


def quantity(z):
    return 2.0 + z[:, 0] - 0.7 * z[:, 2] + 0.05 * z[:, 0] ** 2


def sums_of(parts, threshold, function=quantity):
    each = [driver_sums(z, INVERSE, function(z), function(z) > threshold) for z in parts]
    return reduce(merge, each)


def test_merged_sums_equal_those_of_the_whole_and_repeat_bit_for_bit():
    parts = chunks(5000, size=1000)  # a multiple of the groups, so that rows are dealt alike
    merged, again = sums_of(parts, 3.5), sums_of(parts, 3.5)
    whole = sums_of([np.concatenate(parts)], 3.5)
    for name in merged.__dataclass_fields__:
        np.testing.assert_array_equal(getattr(merged, name), getattr(again, name))
        np.testing.assert_allclose(getattr(merged, name), getattr(whole, name), rtol=1e-11, atol=1e-9)


def test_size_of_the_sums_does_not_grow():
    few, many = sums_of(chunks(1024), 3.5), sums_of(chunks(20_480), 3.5)
    assert all(getattr(few, n).nbytes == getattr(many, n).nbytes for n in few.__dataclass_fields__)


def test_ranking_directions_and_shares():
    result = drivers(sums_of(chunks(20_000), 4.0), CORRELATION, NAMES)
    rows = {row.parameter: row for row in result.rows}
    assert [row.parameter for row in result.rows[:2]] == ["clay.lambda", "clay.pop"]
    assert [row.rank for row in result.rows] == [1, 2, None, None]
    assert rows["clay.lambda"].direction == "raises"
    assert rows["clay.pop"].direction == "lowers"
    assert rows["load.fill_phi"].direction == "unclear"
    assert sum(row.share for row in result.rows) == pytest.approx(1.0, abs=1e-12)
    assert result.realisations == result.fitted == 20_000
    assert result.r_squared > 0.98
    assert result.note is None
    assert result.ranked_by == "spread"


@pytest.mark.parametrize("probability", [0.99, 0.8, 0.5, 0.2, 0.01])
def test_linear_limit_is_ranked_right_on_either_side_of_one_half(probability):
    """q = z1 + 0.6 z2 + 0.1 z3 with an inert fourth, against the closed form (intervals of 4 s.e.).

    With q = s N(0, 1), P = Phi(-beta) and h = phi(beta)/P the elasticities are h beta b^2/s^2 to the spread
    and h b/s to the mean; by spread the third is about as strong as its standard error.
    """
    b = np.array([1.0, 0.6, 0.1, 0.0])
    length = np.linalg.norm(b)
    beta = -norm.ppf(probability)
    hazard = norm.pdf(beta) / probability
    z = np.random.default_rng(11).standard_normal((100_000, 4))
    quantity = z @ b
    sums = driver_sums(z, np.eye(4), quantity, quantity > beta * length)
    result = drivers(sums, np.eye(4), ("first", "second", "third", "inert"), confidence=0.99994)
    rows = {row.parameter: row for row in result.rows}
    by_mean = probability == 0.5
    assert result.ranked_by == ("mean" if by_mean else "spread")
    assert (rows["first"].rank, rows["second"].rank, rows["inert"].rank) == (1, 2, None)
    assert rows["third"].rank in ({3} if by_mean else {3, None})
    exact_spread, exact_mean = hazard * beta * (b / length) ** 2, hazard * b / length
    for i, row in enumerate(rows[name] for name in ("first", "second", "third", "inert")):
        for value, (low, high), exact in (
            (row.spread_elasticity, row.spread_interval, exact_spread[i]),
            (row.mean_elasticity, row.mean_interval, exact_mean[i]),
        ):
            assert low < exact < high
            assert low < value < high
    assert rows["first"].spread_clear is (probability != 0.5)
    assert rows["first"].mean_clear
    assert not rows["inert"].spread_clear
    assert not rows["inert"].mean_clear


def test_a_spread_that_makes_the_rare_side_rarer_is_clear_but_without_a_rank():
    """Exceeded where z1 + 2.5 exp(-z2^2) is large: near z2 = 0, so more spread of z2 lowers the chance."""

    def hump(z):
        return z[:, 0] + 2.5 * np.exp(-(z[:, 2] ** 2))

    rare = drivers(sums_of(chunks(40_000), 4.0, hump), CORRELATION, NAMES)
    (row,) = (row for row in rare.rows if row.parameter == "clay.pop")
    assert rare.exceeding < 0.1 * 40_000
    assert row.spread_interval[1] < 0.0
    assert (row.rank, row.spread_clear, row.mean_clear) == (None, True, False)
    assert rare.rows[0].parameter == "clay.lambda"
    # seen from the other side of the same limit the same parameters decide
    often = drivers(sums_of(chunks(40_000), -4.0, lambda z: -hump(z)), CORRELATION, NAMES)
    assert often.exceeding == 40_000 - rare.exceeding
    assert [row.rank for row in often.rows] == [row.rank for row in rare.rows]
    assert often.rows[0].parameter == "clay.lambda"
    (row,) = (row for row in often.rows if row.parameter == "clay.pop")
    assert row.spread_interval[0] > 0.0
    assert (row.rank, row.spread_clear) == (None, True)


@pytest.mark.parametrize(
    ("exceeding", "expected"),
    [(299, "spread"), (300, "mean"), (500, "mean"), (700, "mean"), (701, "spread"), (0, "spread")],
)
def test_the_mean_ranks_from_three_to_seven_tenths(exceeding, expected):
    z = np.random.default_rng(4).standard_normal((1000, 1))
    flag = np.argsort(np.argsort(-z[:, 0])) < exceeding
    result = drivers(driver_sums(z, np.eye(1), z[:, 0], flag), np.eye(1), ("only",))
    assert result.exceeding == exceeding
    assert result.ranked_by == expected
    assert result.rows[0].rank == (1 if exceeding else None)


def test_inert_parameters_lie_within_their_intervals_of_zero():
    """Both a lone inert parameter and one tied to the leader (4 s.e. of 4 values: 1 in 4,000)."""
    result = drivers(sums_of(chunks(40_000, seed=5), 4.0), CORRELATION, NAMES, confidence=0.99994)
    for name in ("clay.kappa", "load.fill_phi"):
        (row,) = (row for row in result.rows if row.parameter == name)
        for low, high in (row.spread_interval, row.mean_interval):
            assert low < 0.0 < high
        assert row.rank is None
    assert row.share < 1e-3
    assert row.share_interval[0] == 0.0


def test_tied_inert_parameter_takes_its_shapley_share():
    """Shapley gives half of the shared variance to a twin; here r = 0.6 and b = (1, 0)."""
    found = shares(sums_of(chunks(100_000), 9.0, lambda z: z[:, 0]), CORRELATION)
    np.testing.assert_allclose(found.share, [1.0 - 0.18, 0.18, 0.0, 0.0], atol=1e-9)
    assert found.r_squared == pytest.approx(1.0)


def test_share_intervals_cover():
    """A curved quantity, so that the fit is noisy; 200 repeats, 3.5 standard errors below 95 %."""
    b = np.array([1.0, 0.0, -0.7, 0.0])

    def curved(z):
        return z @ b + 0.4 * (z[:, 0] ** 2 - 1.0) + 0.3 * z[:, 1] * z[:, 3]  # its best line has slopes b

    exact = np.array([0.82, 0.18, 0.49, 0.0]) / 1.49
    covered = np.zeros(4)
    for seed in range(200):
        found = shares(sums_of(chunks(2000, seed=seed), 9.0, curved), CORRELATION)
        covered += (found.low <= exact + 1e-12) & (exact <= found.high)
    assert (covered[:3] / 200 > 0.95 - 3.5 * np.sqrt(0.95 * 0.05 / 200)).all(), covered / 200


def test_few_exceedances_are_not_ranked_and_the_note_says_how_many_would_do():
    result = drivers(sums_of(chunks(2000), 5.2), CORRELATION, NAMES)
    assert 0 < result.exceeding < 50
    assert all(row.rank is None for row in result.rows)
    assert all(row.spread_clear is None and row.mean_clear is None for row in result.rows)
    enough = float(f"{100 * 2000 / result.exceeding:.2g}")
    assert f"only {result.exceeding} of 2,000 realisations exceed the limit" in result.note
    assert f"about {enough:,.0f} realisations would do" in result.note
    low = drivers(sums_of(chunks(2000), -1.0), CORRELATION, NAMES)
    assert "realisations meet the limit, too few to rank" in low.note


def test_no_exceedance_and_nothing_but_exceedance():
    none = drivers(sums_of(chunks(2000), 99.0), CORRELATION, NAMES)
    assert none.note == "no realisation exceeds the limit, so nothing can be said of what decides it"
    assert all(np.isnan(row.spread_elasticity) for row in none.rows)
    assert all(row.direction == "unclear" for row in none.rows)
    assert sum(row.share for row in none.rows) == pytest.approx(1.0)  # the quantity still varies
    every = drivers(sums_of(chunks(2000), -99.0), CORRELATION, NAMES)
    assert every.note.startswith("every realisation exceeds the limit")


def test_values_that_are_not_finite_leave_the_fit_and_are_counted():
    z = chunks(3000, size=3000)[0]
    value = quantity(z)
    value[:7], value[7:10] = np.nan, np.inf
    result = drivers(driver_sums(z, INVERSE, value, ~(value <= 3.5)), CORRELATION, NAMES)
    assert result.fitted == 2990
    assert result.realisations == 3000
    assert np.isfinite(result.r_squared)
    assert "10 realisations without a finite value are left out of the shares" in result.note


def test_shares_of_a_curved_quantity_carry_a_warning():
    result = drivers(sums_of(chunks(4000), 1.5, lambda z: z[:, 0] + z[:, 1] ** 2), CORRELATION, NAMES)
    assert result.r_squared < 0.9
    assert "the part of the quantity that follows the parameters in a straight line" in result.note


@pytest.mark.parametrize(
    ("function", "why"),
    [
        (lambda z: np.full(len(z), 3.0), "the quantity does not vary"),
        (lambda z: np.full(len(z), np.nan), "0 realisations with a finite value are too few"),
    ],
)
def test_a_quantity_that_does_not_vary_has_no_shares(function, why):
    result = drivers(sums_of(chunks(2000), 2.0, function), CORRELATION, NAMES)
    assert all(np.isnan(row.share) for row in result.rows)
    assert f"there are no shares: {why}" in result.note


@pytest.mark.parametrize("n", [2, 5, 6])
def test_too_few_realisations_for_the_fit_are_not_called_a_quantity_that_does_not_vary(n):
    result = drivers(sums_of(chunks(n), 2.0), CORRELATION, NAMES)
    assert np.isnan(result.r_squared)
    assert (
        f"{n} realisations with a finite value are too few for 4 parameters, which take at least 7"
        in result.note
    )


def test_the_number_said_to_be_enough_is():
    assert np.isfinite(drivers(sums_of(chunks(7), 2.0), CORRELATION, NAMES).r_squared)


def test_a_single_exceedance_is_said_in_the_singular():
    z = chunks(400)[0]
    flag = np.arange(400) == 7
    note = drivers(driver_sums(z, INVERSE, quantity(z), flag), CORRELATION, NAMES).note
    assert "only 1 of 400 realisations exceeds the limit" in note


def test_no_uncertain_parameter():
    empty = driver_sums(np.empty((10, 0)), np.empty((0, 0)), np.ones(10), np.zeros(10, dtype=bool))
    result = drivers(empty, np.empty((0, 0)), ())
    assert result.rows == ()
    assert result.note == "no parameter is uncertain"
    assert result.to_frame().empty


def test_table_has_a_row_per_parameter():
    frame = drivers(sums_of(chunks(4000), 3.5), CORRELATION, NAMES).to_frame()
    assert len(frame) == 4
    assert frame["rank"].dtype == "Int64"
    assert (frame["spread_elasticity_low"] < frame["spread_elasticity"]).all()
    assert frame.loc[frame["rank"].notna(), "spread_clear"].all()
    assert set(frame["direction"]) <= {"raises", "lowers", "unclear"}


def test_replicates_are_the_groups_of_the_jackknife():
    z = chunks(1600, size=1600)[0]
    sums = driver_sums(z, INVERSE, quantity(z), quantity(z) > 3.0, np.repeat(np.arange(16), 100))
    assert sums.fitted.tolist() == [100] * 16 + [0] * (GROUPS - 16)
    assert np.isfinite(shares(sums, CORRELATION).low).all()


def test_faults_are_named():
    z = chunks(10)[0]
    flag = np.zeros(10, dtype=bool)
    with pytest.raises(ShapeError, match=r"quantity must have shape \(10,\); got \(3,\)"):
        driver_sums(z, INVERSE, np.ones(3), flag)
    with pytest.raises(ParameterError, match="group must lie between 0 and 19; got 25 to 25"):
        driver_sums(z, INVERSE, np.ones(10), flag, np.full(10, 25))
    sums = driver_sums(z, INVERSE, np.ones(10), flag)
    with pytest.raises(ShapeError, match="sums over 4 parameters match neither 3 names"):
        drivers(sums, CORRELATION, NAMES[:3])
    other = driver_sums(z[:, :2], np.eye(2), np.ones(10), flag)
    with pytest.raises(ShapeError, match="cannot merge sums over 4 and over 2 parameters"):
        merge(sums, other)
