"""Exceedance curve: round thresholds, exact counts, agreement with the headline."""

import numpy as np
import pytest

from probsoil.errors import ParameterError
from probsoil.probability import exceedance, exceedance_curve

SAMPLE = np.random.default_rng(4).lognormal(-2.0, 0.5, 20_000)
REPLICATE = np.repeat(np.arange(16), 1250)


@pytest.mark.parametrize("through", [0.10, 0.3048, 7.3, -1.0])
@pytest.mark.parametrize("replicate", [None, REPLICATE], ids=["independent", "replicated"])
def test_curve_and_headline_agree_to_the_digit(through, replicate):
    curve = exceedance_curve(SAMPLE, "not more than", through=through, replicate=replicate)
    headline = exceedance(SAMPLE, through, "not more than", replicate=replicate)
    (place,) = np.flatnonzero(curve.threshold == through)
    assert curve.exceeding[place] == headline.exceeding
    assert curve.probability[place] == headline.probability
    assert (curve.low[place], curve.high[place]) == headline.interval


@pytest.mark.parametrize("sense", ["not more than", "not less than"])
@pytest.mark.parametrize("scale", [1e-6, 0.3, 1.0, 4e5])
def test_steps_are_round_span_the_sample_and_number_about_three_hundred(scale, sense):
    values = scale * SAMPLE
    curve = exceedance_curve(values, sense, through=0.15 * scale)
    digit = curve.step / 10.0 ** np.floor(np.log10(curve.step) + 1e-9)
    assert min(abs(digit - round_digit) for round_digit in (1.0, 2.0, 5.0)) < 1e-9
    assert 150 <= len(curve.threshold) <= 403
    np.testing.assert_allclose(np.diff(curve.threshold), curve.step, rtol=1e-5)
    assert curve.threshold[0] <= values.min()
    assert curve.threshold[-1] >= values.max()
    counted = [
        int((values > t).sum() if sense == "not more than" else (values < t).sum()) for t in curve.threshold
    ]
    assert curve.exceeding.tolist() == counted
    assert (curve.low <= curve.probability).all()
    assert (curve.probability <= curve.high).all()


def test_thresholds_read_as_a_person_would_write_them():
    curve = exceedance_curve(SAMPLE, "not more than", through=0.1)
    assert all(len(repr(float(t))) <= 6 for t in curve.threshold)


def test_values_that_are_no_number_count_at_every_threshold():
    values = np.r_[np.linspace(0.0, 1.0, 97), np.nan, np.nan, np.inf]
    more = exceedance_curve(values, "not more than", through=0.5)
    assert more.exceeding[-1] == 3
    less = exceedance_curve(values, "not less than", through=0.5)
    assert less.exceeding[0] == 2
    assert less.exceeding[-1] <= 99  # the infinite value meets every limit


@pytest.mark.parametrize("values", [np.full(5, 0.2), np.full(5, np.nan), np.zeros(3)])
@pytest.mark.parametrize("through", [0.2, 0.0, 3.0])
def test_samples_without_spread_still_have_a_curve(values, through):
    curve = exceedance_curve(values, "not more than", through=through)
    assert through in curve.threshold
    assert len(curve.threshold) >= 3
    assert (np.diff(curve.threshold) > 0.0).all()


def test_columns_are_read_only_and_tabled():
    curve = exceedance_curve(SAMPLE, "not more than", through=0.1)
    with pytest.raises(ValueError, match="read-only"):
        curve.threshold[0] = 0.0
    assert list(curve.to_frame()) == ["threshold", "exceeding", "probability", "low", "high"]


def test_an_infinite_threshold_is_refused():
    with pytest.raises(ParameterError, match="threshold to pass through must be finite; got inf"):
        exceedance_curve(SAMPLE, "not more than", through=np.inf)
