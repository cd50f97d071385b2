"""Craig's oedometer test: pressure and void ratio, and one increment in time, with the answers of the book.

Craig, R.F., Soil Mechanics, worked examples of chapter 7. Readings and answers recalled; not opened. The book
reads its answers off drawings, so they are held to a tenth; what it computes, to its printed digits.
"""

import numpy as np
import pytest

from probsoil.laboratory.preconsolidation import casagrande, log_log, work
from probsoil.laboratory.sheets import TimeReadings
from probsoil.laboratory.time_curve import LOG_TIME_FACTOR, MM2_PER_MINUTE, ROOT_TIME_FACTOR, time_curve
from probsoil.laboratory.two_branches import TwoBranchFit, two_branch_fit

STRESS = np.array([54.0, 107.0, 214.0, 429.0, 858.0, 1716.0, 3432.0])
GAUGE = np.array([4.747, 4.493, 4.108, 3.449, 2.608, 1.676, 0.737])  # mm, 5.000 before, 1.480 after
WATER, DENSITY, HEIGHT = 0.198, 2.73, 19.0
TIME = np.array([0, 0.25, 0.5, 1, 2.25, 4, 9, 16, 25, 36, 49, 64, 81, 100, 200, 400, 1440])
DIAL = np.array(
    [5.00, 4.67, 4.62, 4.53, 4.41, 4.28, 4.01, 3.75, 3.49, 3.28, 3.15, 3.06, 3.00, 2.96, 2.84, 2.76, 2.61]
)
GRAPHICAL = 0.10


def void_ratio() -> np.ndarray:
    """Void ratio from gauges: water content after the test, when the gauge had come back to 1.480 mm."""
    last = WATER * DENSITY
    per_mm = (1.0 + last) / (HEIGHT - (5.000 - 1.480))
    return last + (GAUGE - 1.480) * per_mm


def test_void_ratios_are_those_known() -> None:
    known = [0.8657, 0.8404, 0.8021, 0.7365, 0.6528, 0.5601, 0.4666]
    assert void_ratio() == pytest.approx(known, abs=1e-4)


def test_preconsolidation_stress_by_constructions() -> None:
    e0 = 0.8908
    assert casagrande(STRESS, void_ratio()).stress == pytest.approx(325.0, rel=GRAPHICAL)
    for made in (work(STRESS, void_ratio(), e0), log_log(STRESS, void_ratio())):
        assert made.stress is not None
        assert 214.0 < made.stress < 429.0  # between the increments where the book's curve bends


def test_compression_index_lies_in_the_interval_of_the_fit() -> None:
    fit = two_branch_fit(STRESS, void_ratio(), 0.002)
    assert isinstance(fit, TwoBranchFit)
    index, error = np.log(10.0) * fit.lam.value, 1.645 * np.log(10.0) * fit.lam.standard_error
    assert abs(index - 0.31) < error
    assert index == pytest.approx(0.31, rel=0.05)


def test_coefficient_of_consolidation_by_both_constructions() -> None:
    path = 0.25 * (2.0 * 13.60 + 2.39)
    assert path == pytest.approx(7.40, abs=0.005)
    curve = time_curve(TimeReadings(time=TIME, compression=5.00 - DIAL), path)
    assert curve.log_time is not None
    assert curve.root_time is not None
    assert curve.cv_log_time is not None
    assert curve.cv_root_time is not None
    assert curve.log_time.time == pytest.approx(12.5, rel=GRAPHICAL)
    assert np.sqrt(curve.root_time.time) == pytest.approx(7.30, rel=GRAPHICAL)
    assert curve.cv_log_time.value == pytest.approx(0.45, rel=GRAPHICAL)
    assert curve.cv_root_time.value == pytest.approx(0.46, rel=GRAPHICAL)


def test_the_arithmetic_of_the_book_from_its_own_readings() -> None:
    assert pytest.approx(0.45, abs=0.005) == LOG_TIME_FACTOR * 7.40**2 / 12.5 * MM2_PER_MINUTE
    assert pytest.approx(0.46, abs=0.005) == ROOT_TIME_FACTOR * 7.40**2 / 7.30**2 * MM2_PER_MINUTE
