"""Variance of a layer average."""

import numpy as np
import pytest
from scipy.integrate import dblquad

from probsoil.errors import ParameterError
from probsoil.parameters import averaged_variance, variance_function

CHECKED = {0.5: 0.73576, 1.0: 0.56767, 2.0: 0.37729, 5.0: 0.18, 10.0: 0.095}  # to five printed digits


@pytest.mark.parametrize("ratio", CHECKED)
def test_variance_function_matches_the_check_numbers(ratio):
    assert float(variance_function(ratio)) == pytest.approx(CHECKED[ratio], abs=5e-6)


@pytest.mark.parametrize("ratio", [0.05, 0.24, 0.26, 3.0])
def test_variance_function_is_the_mean_correlation_of_two_points(ratio):
    mean, _ = dblquad(lambda x, y: 2.0 * np.exp(-2.0 * ratio * (y - x)), 0.0, 1.0, 0.0, lambda y: y)
    assert float(variance_function(ratio)) == pytest.approx(mean, rel=1e-9)


def test_series_and_closed_form_meet_and_the_thin_end_is_smooth():
    below, above = variance_function([0.25 - 1e-12, 0.25])
    assert below == pytest.approx(above, rel=1e-11)
    tiny = variance_function([0.0, 1e-9, 1e-6])
    np.testing.assert_allclose(tiny, [1.0, 1.0 - 2e-9 / 3.0, 1.0 - 2e-6 / 3.0], rtol=1e-12)


def test_averaged_variance():
    assert averaged_variance(4.0, scale=2.0, length=2.0) == pytest.approx(4.0 * 0.56767, abs=2e-5)
    with pytest.raises(ParameterError, match=r"scale of fluctuation must be above zero; got 0 m"):
        averaged_variance(1.0, scale=0.0, length=2.0)
    with pytest.raises(ParameterError, match=r"ratio must be >= 0; got -1 \(1 of 2 values\)"):
        variance_function([-1.0, 2.0])
