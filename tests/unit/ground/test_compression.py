"""The compression curve: branches, conversions, refusals."""

import numpy as np
import pytest

from probsoil.errors import ParameterError
from probsoil.ground.compression import (
    lambda_from_compression_index,
    lambda_from_compression_ratio,
    void_ratio_lost,
)

SLOPES = (0.3, 0.05)


def lost(stress, yielding, initial=50.0, initial_yield=80.0, slopes=SLOPES):
    return float(
        void_ratio_lost(
            stress, yielding, initial_stress=initial, initial_yield_stress=initial_yield, slopes=slopes
        )
    )


def test_a_decade_of_stress_loses_the_compression_index():
    slope = float(lambda_from_compression_index(0.7))
    assert lost(1000.0, 1000.0, 100.0, 100.0, (slope, 0.1)) == pytest.approx(0.7, rel=1e-12)


def test_a_decade_of_stress_strains_by_the_compression_ratio():
    slope = float(lambda_from_compression_ratio(0.25, 1.6))
    assert lost(1000.0, 1000.0, 100.0, 100.0, (slope, 0.1)) / 2.6 == pytest.approx(0.25, rel=1e-12)


def test_recompression_then_virgin_compression():
    assert lost(70.0, 80.0) == pytest.approx(0.05 * np.log(70 / 50), rel=1e-12)
    assert lost(120.0, 80.0) == pytest.approx(0.05 * np.log(80 / 50) + 0.3 * np.log(120 / 80), rel=1e-12)


def test_unloading_runs_along_kappa_from_the_largest_stress():
    at_most = lost(120.0, 120.0)
    assert lost(60.0, 120.0) == pytest.approx(at_most - 0.05 * np.log(2.0), rel=1e-12)
    assert lost(120.0, 120.0) == at_most  # reloading comes back to the same point


def test_swelling_below_the_stress_in_situ_is_negative():
    assert lost(25.0, 80.0) == pytest.approx(-0.05 * np.log(2.0), rel=1e-12)


def test_a_stress_beyond_the_yield_stress_becomes_it():
    assert lost(120.0, 90.0) == lost(120.0, 120.0)


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: lambda_from_compression_index(0.0), "compression_index must be finite and above 0"),
        (lambda: lambda_from_compression_ratio(-0.1, 1.0), "compression_ratio must be finite and above 0"),
        (lambda: lambda_from_compression_ratio(0.1, np.nan), "void_ratio must be finite and above 0"),
        (lambda: lost(0.0, 80.0), "^stress must be finite and above 0"),
        (lambda: lost(10.0, np.inf), "^yield_stress must be finite"),
        (lambda: lost(10.0, 80.0, 0.0), "initial_stress must be finite"),
        (lambda: lost(10.0, 80.0, 50.0, -1.0), "initial_yield_stress must be finite"),
        (lambda: lost(10.0, 80.0, slopes=(0.0, 0.1)), "lambda must be finite"),
        (lambda: lost(10.0, 80.0, slopes=(0.3, 0.0)), "kappa must be finite"),
    ],
)
def test_impossible_arguments_are_refused(call, message):
    with pytest.raises(ParameterError, match=message):
        call()
