"""Variance of a layer average."""

import numpy as np
import pytest
from scipy.integrate import dblquad

from probsoil.errors import ParameterError
from probsoil.parameters import averaged_variance, variance_function
from probsoil.parameters.marginals import representative_law
from probsoil.scenario.distributions import Lognormal

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


@pytest.mark.parametrize(("inherent", "length", "scale"), [(0.5, 6.0, 2.0), (0.8, 3.0, 1.0)])
def test_average_of_a_permeability_is_that_of_layers_in_series(
    inherent: float, length: float, scale: float
) -> None:
    """Fields drawn on a fine grid, harmonic average over the layer, against the law's mean."""
    rng = np.random.default_rng(20)
    n_point, n_field = 120, 4000
    depth = (np.arange(n_point) + 0.5) * length / n_point
    correlation = np.exp(-2.0 * np.abs(depth[:, None] - depth[None, :]) / scale)
    log_sd = np.sqrt(np.log1p(inherent**2))
    field = rng.standard_normal((n_field, n_point)) @ np.linalg.cholesky(correlation).T
    point = np.exp(log_sd * field - 0.5 * log_sd**2)  # mean 1
    harmonic = 1.0 / (1.0 / point).mean(axis=1)
    law = representative_law(
        Lognormal(median=1.0, log_sd=1e-6, inherent_cov=inherent, vertical_scale=scale),
        length,
        in_series=True,
    )
    # the law takes the average as lognormal with the variance of the geometric one: exact for thin and
    # for thick layers, and between them within a few per cent
    assert law.mean == pytest.approx(harmonic.mean(), rel=0.05)
    arithmetic = representative_law(
        Lognormal(median=1.0, log_sd=1e-6, inherent_cov=inherent, vertical_scale=scale), length
    )
    assert arithmetic.mean == pytest.approx(1.0, rel=1e-6)
