"""Degree of consolidation under a load that rises at a constant rate.

Source: R. E. Olson, Consolidation under time-dependent loading, J. Geotech. Eng. Div. ASCE
103(GT1), 1977 (the series, from memory; the paper was not opened). The series is set here against
Duhamel's integral of Terzaghi's series, so only the name rests on memory.
"""

import numpy as np
import pytest
from reference_solutions import (
    DEFAULT_ALLOWANCE,
    FINE_ALLOWANCE,
    clay_column,
    constant_cv,
    degree_ramp,
    degree_uniform,
    final_settlement,
    loaded,
)
from scipy.integrate import quad

ENDS = (0.05, 0.10, 0.20, 0.50, 1.00)  # time factor at the end of the ramp
TIMES = np.array([0.02, 0.05, 0.1, 0.2, 0.3, 0.5, 0.848, 1.0, 1.5])
SMALL_LOAD = (
    5e-4  # the load is a thousandth of the stress in situ, so the theory is off by about half of that
)


@pytest.mark.parametrize("end", ENDS)
def test_series_equals_the_integral_of_sudden_loads(end):
    for time in TIMES:
        last = min(time, end)
        total, _ = quad(lambda begun, t=time: float(degree_uniform(t - begun)) / end, 0.0, last, epsabs=1e-9)
        # 400 terms leave the sudden series wrong by 1/(pi^2 400) in the last instant before `time`
        assert float(degree_ramp(time, end)) == pytest.approx(total, abs=2e-6)


@pytest.mark.parametrize(("grid", "allowance"), [(1, DEFAULT_ALLOWANCE), (4, FINE_ALLOWANCE)])
@pytest.mark.parametrize("end", ENDS)
def test_kernel_follows_the_ramp(end, grid, allowance):
    column = clay_column(grid=grid)
    settled, _ = loaded(column, constant_cv(column, 1.0), 0.1, end=end, wanted=[*TIMES, end], grid=grid)
    times = np.unique([*TIMES, end])
    degree = settled / final_settlement(column, 0.1)
    assert degree == pytest.approx(degree_ramp(times, end), abs=allowance + SMALL_LOAD)
