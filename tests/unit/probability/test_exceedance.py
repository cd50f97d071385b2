"""Exceedance of one limit: counts, verdict, and what is said when little was seen."""

import numpy as np
import pytest

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import (
    clopper_pearson,
    exceedance,
    exceedance_curve,
    exceeding_counts,
    exceeds,
    probability_interval,
    reliability_index,
)

SAMPLE = np.random.default_rng(4).lognormal(0.0, 0.5, 5000)


def test_counts_and_limits_of_independent_points():
    result = exceedance(SAMPLE, 2.0, "not more than", target=0.05)
    count = sum(value > 2.0 for value in SAMPLE)
    assert result.exceeding == count
    assert result.probability == count / 5000
    assert result.interval == pytest.approx([float(limit) for limit in clopper_pearson(count, 5000)])
    assert result.model_runs == 5000
    assert result.unseen_bound is None
    assert result.verdict == "beyond target"
    assert result.method == "monte carlo; exact binomial limits (Clopper-Pearson)"
    low, high = result.reliability_interval
    assert low < result.reliability_index < high


def test_the_sense_decides_and_equality_meets_the_limit():
    values = [1.0, 2.0, 3.0]
    assert exceeds(values, 2.0, "not more than").tolist() == [False, False, True]
    assert exceeds(values, 2.0, "not less than").tolist() == [True, False, False]
    assert exceedance(values, 2.0, "not less than").exceeding == 1


def test_what_did_not_converge_exceeds_and_infinite_values_compare_as_they_stand():
    values = np.array([np.nan, np.inf, 1.0, 5.0])
    more = exceedance(values, 3.0, "not more than")
    assert (more.exceeding, more.not_converged, more.never_reached) == (3, 1, 1)
    less = exceedance(values, 3.0, "not less than")
    assert (less.exceeding, less.not_converged, less.never_reached) == (2, 1, 1)


def test_no_failure_seen_is_a_bound_and_never_zero():
    result = exceedance(SAMPLE, 1e9, "not more than", target=1e-3)
    assert result.probability == 0.0
    assert result.interval == (0.0, pytest.approx(1.0 - 0.025 ** (1 / 5000)))
    assert result.unseen_bound == pytest.approx(3.0 / 5000, rel=2e-3)
    assert result.reliability_index is None
    assert result.reliability_interval[0] is not None
    assert result.reliability_interval[1] is None
    assert result.verdict == "within target"
    assert exceedance(SAMPLE, 1e9, "not more than", target=1e-4).verdict == "not conclusive"


def test_every_realisation_exceeds():
    result = exceedance(SAMPLE, 0.0, "not more than", target=0.5)
    assert result.interval[1] == 1.0
    assert result.reliability_index is None
    assert result.reliability_interval[0] is None
    assert result.verdict == "beyond target"
    assert result.unseen_bound == pytest.approx(0.05 ** (1 / 5000))


def test_one_bound_decides_where_none_or_all_were_seen():
    """Between the one-sided bound and the end of the two-sided interval, what is said in words counts."""
    none = exceedance(np.zeros(1000), 1.0, "not more than", target=0.0033)
    assert none.unseen_bound < 0.0033 < none.interval[1]
    assert none.verdict == "within target"
    every = exceedance(np.full(1000, 2.0), 1.0, "not more than", target=0.9967)
    assert every.interval[0] < 0.9967 < every.unseen_bound
    assert every.verdict == "beyond target"


@pytest.mark.parametrize(
    ("value", "probability", "verdict"), [(0.0, 0.0, "within target"), (2.0, 1.0, "beyond target")]
)
def test_where_nothing_is_uncertain_there_is_no_interval(value, probability, verdict):
    values = np.full(50, value)
    result = exceedance(values, 1.0, "not more than", target=0.01, method="Monte Carlo", certain=True)
    assert result.interval == (probability, probability)
    assert result.reliability_interval == (None, None)
    assert result.unseen_bound is None
    assert result.verdict == verdict
    assert result.method.startswith("Monte Carlo; no interval, because nothing is uncertain")
    curve = exceedance_curve(values, "not more than", through=1.0, certain=True)
    assert curve.low.tolist() == curve.high.tolist() == curve.probability.tolist()


def test_replicated_points_never_put_the_limit_at_nought_or_one_where_both_were_seen():
    """Two cases in sixteen replicates: t alone reaches below nought, where it knows nothing."""
    counts = np.zeros((16, 3), dtype=np.int64)
    counts[:2, 0] = 1
    counts[:, 1] = 1000 - counts[:, 0]
    counts[0, 2] = 900  # many cases, all in one replicate
    found = probability_interval(counts, np.full(16, 1000))
    low, high = clopper_pearson(counts.sum(axis=0), 16_000)
    assert found.low[0] == low[0] > 0.0
    assert found.high[1] == high[1] < 1.0
    assert found.low[2] == low[2] > 0.0
    assert found.method.tolist() == [2, 2, 1]


def test_replicates_give_a_t_interval():
    replicate = np.repeat(np.arange(16), 500)
    values = np.random.default_rng(1).standard_normal(8000)
    result = exceedance(values, 0.5, "not more than", replicate=replicate, method="sobol")
    shares = np.array([(values[replicate == r] > 0.5).mean() for r in range(16)])
    reach = 2.131450 * shares.std(ddof=1) / 4.0  # t table, 15 degrees of freedom, 97.5 %
    assert result.interval == pytest.approx([shares.mean() - reach, shares.mean() + reach], rel=1e-6)
    assert result.method == "sobol; t interval over the replicates"


def test_few_cases_take_the_wider_of_both():
    counts = np.full((16, 2), 3)
    counts[0, 0], counts[1, 0] = 4, 2  # nearly alike: t alone would be far too narrow
    counts[0, 1], counts[1:5, 1] = 30, 0  # very unlike: binomial alone would be too narrow
    counts[:, 1] = np.minimum(counts[:, 1], 30)
    sizes = np.full(16, 1000)
    found = probability_interval(counts, sizes)
    low, high = clopper_pearson(counts.sum(axis=0), 16_000)
    assert (found.low[0], found.high[0]) == (low[0], high[0])
    assert found.low[1] < low[1]
    assert found.high[1] > high[1]
    assert found.method.tolist() == [2, 2]


def test_few_realisations_that_meet_the_limit_are_few_cases_too():
    counts = np.full((16, 1), 997)
    counts[0, 0] = 996
    assert probability_interval(counts, np.full(16, 1000)).method.tolist() == [2]


@pytest.mark.parametrize(
    ("counts", "sizes", "wording"),
    [
        ([5] * 16, [10] * 16, "because the replicates do not differ"),
        ([0] * 16, [10] * 16, "exact binomial limits (Clopper-Pearson)"),
        ([5] * 15 + [3], [10] * 15 + [7], "because the replicates are not of one size"),
    ],
)
def test_fallbacks_use_binomial_limits_and_say_so(counts, sizes, wording):
    values = np.concatenate([np.r_[np.ones(k), np.zeros(n - k)] for k, n in zip(counts, sizes, strict=True)])
    replicate = np.repeat(np.arange(16), sizes)
    result = exceedance(values, 0.5, "not more than", replicate=replicate, method="latin hypercube")
    low, high = clopper_pearson(sum(counts), sum(sizes))
    assert result.interval == (low, high)
    assert result.method.endswith(wording)


def test_the_spread_of_whole_counts_is_never_taken_below_half_a_count():
    """One replicate of sixteen differing by one case does not pin the probability down."""
    counts = np.full((16, 1), 500)
    counts[0, 0] = 501
    found = probability_interval(counts, np.full(16, 1000))
    centre = counts.mean() / 1000
    assert float(found.high[0]) - centre == pytest.approx(2.131450 * 0.5 / 4.0 / 1000, rel=1e-6)


def test_counts_by_replicate_add_up():
    replicate = np.arange(5000) % 7
    thresholds = np.array([0.5, 1.0, 2.0, np.inf])
    by_replicate = exceeding_counts(SAMPLE, thresholds, "not less than", replicate)
    assert by_replicate.shape == (7, 4)
    np.testing.assert_array_equal(
        by_replicate.sum(axis=0), [(threshold > SAMPLE).sum() for threshold in thresholds]
    )


def test_table_has_one_row():
    frame = exceedance(SAMPLE, 2.0, "not more than").to_frame()
    assert len(frame) == 1
    assert frame.loc[0, "low"] < frame.loc[0, "probability"] < frame.loc[0, "high"]


def test_faults_are_named():
    with pytest.raises(ParameterError, match="sense must be 'not more than' or 'not less than'; got 'above'"):
        exceedance(SAMPLE, 1.0, "above")
    with pytest.raises(ParameterError, match="threshold must be a number; got nan"):
        exceedance(SAMPLE, np.nan, "not more than")
    with pytest.raises(ParameterError, match="target probability must lie between 0 and 1; got 5"):
        exceedance(SAMPLE, 1.0, "not more than", target=5.0)
    with pytest.raises(ShapeError, match=r"values must have shape \(n,\) with n at least 1; got \(0,\)"):
        exceedance([], 1.0, "not more than")
    with pytest.raises(ShapeError, match=r"replicate must have the shape of values, \(5000,\); got \(2,\)"):
        exceedance(SAMPLE, 1.0, "not more than", replicate=[0, 1])
    with pytest.raises(ParameterError, match="replicate numbers must be 0 or more; got -1"):
        exceedance([1.0, 2.0], 1.0, "not more than", replicate=[-1, 0])
    with pytest.raises(ParameterError, match=r"probability must lie between 0 and 1; got 1\.5"):
        reliability_index(1.5)
