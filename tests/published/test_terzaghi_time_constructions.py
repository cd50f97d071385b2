"""Log-time and root-time constructions on curves of Terzaghi's theory, with and without creep.

The series is worked out here. The constructions are exact in theory but for the small error of their factors
(0.197 and 0.848 have three digits) and of readings that double in time: 2 % was allowed beforehand.
"""

import numpy as np
import pytest

from probsoil.laboratory.sheets import TimeReadings
from probsoil.laboratory.time_curve import MM2_PER_MINUTE, TimeCurve, log_time, root_time, time_curve

PATH = 9.5
USUAL = np.array([0.1, 0.25, 0.5, 1, 2, 4, 8, 15, 30, 60, 120, 240, 480, 1440])
ALLOWED = 0.02


def degree(factor: np.ndarray) -> np.ndarray:
    modes = (2 * np.arange(4000) + 1) * np.pi / 2
    return 1.0 - (2.0 / modes**2 * np.exp(-(modes**2) * factor[:, None])).sum(axis=1)


def curve(cv: float, time: np.ndarray = USUAL, initial: float = 0.05) -> np.ndarray:
    return initial + 1.2 * degree(cv / MM2_PER_MINUTE * time / PATH**2)


def interpreted(cv: float, time: np.ndarray = USUAL) -> TimeCurve:
    return time_curve(TimeReadings(time=time, compression=curve(cv, time)), PATH)


@pytest.mark.parametrize("cv", [0.3, 0.6, 1.0, 2.0, 3.0])
@pytest.mark.parametrize("time", [USUAL, np.geomspace(0.05, 3000.0, 60)], ids=["usual", "dense"])
def test_cv_comes_back(cv: float, time: np.ndarray) -> None:
    found = interpreted(cv, time)
    assert found.cv_log_time is not None
    assert found.cv_root_time is not None
    assert found.cv_log_time.value == pytest.approx(cv, rel=ALLOWED)
    assert found.cv_root_time.value == pytest.approx(cv, rel=ALLOWED)


def test_ends_of_primary_consolidation_come_back() -> None:
    by_log, by_root = (make(USUAL, curve(1.0)) for make in (log_time, root_time))
    assert by_log.start == pytest.approx(0.05, abs=ALLOWED * 1.2)
    assert by_log.end == pytest.approx(1.25, abs=ALLOWED * 1.2)
    assert by_root.start == pytest.approx(0.05, abs=ALLOWED * 1.2)
    assert by_root.end == pytest.approx(1.25, abs=ALLOWED * 1.2)


def test_slope_of_creep_comes_back() -> None:
    time = np.geomspace(0.1, 1e5, 40)
    creeping = curve(1.0, time) + 0.03 * np.log10(1.0 + time / 60.0)
    found = time_curve(TimeReadings(time=time, compression=creeping), PATH)
    assert found.creep is not None
    assert found.creep.value == pytest.approx(0.03, rel=0.05)
