"""What holds for every sample and every limit."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from probsoil.probability import clopper_pearson, exceedance, exceedance_curve, probability_interval

REPEATABLE = settings(derandomize=True, deadline=None, max_examples=60)
number = st.floats(-1e6, 1e6) | st.sampled_from([np.nan, np.inf])
samples = arrays(np.float64, st.integers(1, 80), elements=number)
senses = st.sampled_from(["not more than", "not less than"])


@REPEATABLE
@given(samples, st.floats(-1e6, 1e6), senses)
def test_estimate_lies_in_its_interval_and_the_rest_agrees(values, threshold, sense):
    found = exceedance(values, threshold, sense, target=0.1)
    low, high = found.interval
    assert 0.0 <= low <= found.probability <= high <= 1.0
    assert low < high
    assert found.not_converged <= found.exceeding <= found.model_runs
    assert (found.unseen_bound is None) == (0 < found.exceeding < found.model_runs)
    most = found.unseen_bound if found.exceeding == 0 else high
    assert (found.verdict == "within target") == (most <= 0.1)


@REPEATABLE
@given(samples, st.floats(-1e6, 1e6), senses, st.integers(2, 5))
def test_curve_is_monotone_and_meets_the_headline(values, threshold, sense, replicates):
    replicate = np.arange(values.size) % replicates
    curve = exceedance_curve(values, sense, through=threshold, replicate=replicate)
    rises = np.diff(curve.exceeding)
    assert (rises <= 0).all() if sense == "not more than" else (rises >= 0).all()
    assert len(curve.threshold) <= 403
    place = int(np.flatnonzero(curve.threshold == threshold)[0])
    headline = exceedance(values, threshold, sense, replicate=replicate)
    assert headline.interval == (curve.low[place], curve.high[place])


@REPEATABLE
@given(st.integers(1, 10**7), st.data(), st.floats(0.5, 0.999))
def test_binomial_limits_rise_with_the_count_and_mirror(n, data, confidence):
    k = data.draw(st.integers(0, n - 1))
    low, high = clopper_pearson([k, k + 1, n - k], n, confidence)
    assert low[0] < low[1]
    assert high[0] < high[1]
    # failures are to trials as successes are: 1 - (limits of n - k) are the limits of k
    np.testing.assert_allclose([1.0 - high[2], 1.0 - low[2]], [low[0], high[0]], rtol=1e-6, atol=1e-14)


@REPEATABLE
@given(arrays(np.int64, (16, 3), elements=st.integers(0, 50)))
def test_replicated_limits_enclose_the_estimate_and_few_cases_are_never_narrower_than_binomial(counts):
    found = probability_interval(counts, np.full(16, 50))
    total = counts.sum(axis=0)
    assert (found.low <= total / 800).all()
    assert (total / 800 <= found.high).all()
    low, high = clopper_pearson(total, 800)
    few = np.minimum(total, 800 - total) < 100
    assert (found.low[few] <= low[few]).all()
    assert (found.high[few] >= high[few]).all()
