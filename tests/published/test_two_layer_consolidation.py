"""Two layers of clay: cv alone does not define the problem.

Sources: H. Gray, Simultaneous consolidation of contiguous layers of unlike compressible soils,
Trans. ASCE 110, 1945; I. C. Pyrah, One-dimensional consolidation of layered soils, Geotechnique
46(3), 1996, who set two soils of one cv but permeability and compressibility ten times apart on
each other (both from memory, not opened). The eigenfunction solution is worked out in
`reference_solutions`; no number of either paper is used.

Both layers are 1 m thick with one cv; T = cv t / (2 m)^2; drained at the top only.
"""

import numpy as np
import pytest
from reference_solutions import (
    DEFAULT_ALLOWANCE,
    FINE_ALLOWANCE,
    SUDDEN,
    Soil,
    clay_column,
    constant_cv,
    degree_two_layers,
    degree_uniform,
    final_settlement,
    loaded,
)
from scipy.optimize import brentq

POOR, RICH = Soil(1.0, 1.0, 1.0), Soil(10.0, 10.0, 1.0)  # one cv
CASES = {"poor over rich": (POOR, RICH), "rich over poor": (RICH, POOR)}
FACTORS = np.array([0.01, 0.05, 0.1, 0.2, 0.3, 0.5, 0.848, 1.0, 2.0, 4.0])
# from the roots of tan(a)^2 = k1/k2, worked out once more apart from the code below
DEGREES = {
    "poor over rich": [
        0.02052,
        0.04592,
        0.06605,
        0.10093,
        0.13405,
        0.19666,
        0.29500,
        0.33408,
        0.54242,
        0.78395,
    ],
    "rich over poor": [0.20516, 0.45835, 0.63704, 0.82640, 0.91279, 0.97655, 0.99749, 0.99905, 1.0, 1.0],
}
SMALL_LOAD = 5e-4  # load of a thousandth of the stress in situ


def kernel_degree(upper, lower, times, grid=1):
    """Degree of settlement of two layers in the linear limit of the kernel.

    There mv = lambda/[(1 + e) s'], here with (1 + e) s' = 200 kPa, and k follows from cv.
    """
    lam = (1e-4 * upper.mv, 1e-4 * lower.mv)
    column = clay_column((upper.thickness, lower.thickness), lam=lam, grid=grid)
    flow = constant_cv(column, (upper.cv, lower.cv))
    settled, _ = loaded(column, flow, 0.1, end=SUDDEN, wanted=times, grid=grid)
    return settled / final_settlement(column, 0.1)


@pytest.mark.parametrize(("grid", "allowance"), [(1, DEFAULT_ALLOWANCE), (4, FINE_ALLOWANCE)])
@pytest.mark.parametrize("case", CASES)
def test_equal_cv_does_not_mean_equal_consolidation(case, grid, allowance):
    degree = kernel_degree(*CASES[case], 4.0 * FACTORS, grid)
    assert degree == pytest.approx(DEGREES[case], abs=allowance + SMALL_LOAD)


@pytest.mark.parametrize("case", CASES)
def test_eigenfunctions_agree_with_the_closed_roots(case):
    assert degree_two_layers(*CASES[case], 4.0 * FACTORS) == pytest.approx(DEGREES[case], abs=2e-4)


def test_eigenfunctions_of_one_soil_are_terzaghis():
    half = Soil(1.0, 1.0, 0.5)
    times = np.array([0.02, 0.2, 0.848])
    assert degree_two_layers(half, half, times) == pytest.approx(degree_uniform(times), abs=1e-4)


def test_times_to_half_consolidation_are_thirty_times_apart():
    half_time = {}
    for case, layers in CASES.items():
        times = np.geomspace(0.05, 20.0, 60)
        degree = kernel_degree(*layers, times, 4)
        half_time[case] = float(np.exp(np.interp(0.5, degree, np.log(times))))
    exact = [brentq(lambda t, s=s: degree_two_layers(*s, t) - 0.5, 0.05, 20.0) for s in CASES.values()]
    # T2(U = 0.5) is 1.7637 and 0.0597; an error of U by the allowance moves each by less than 1 %
    assert half_time["poor over rich"] / half_time["rich over poor"] == pytest.approx(
        exact[0] / exact[1], rel=0.02
    )
    assert 29.0 < exact[0] / exact[1] < 30.0


@pytest.mark.parametrize(("grid", "allowance"), [(1, DEFAULT_ALLOWANCE), (4, FINE_ALLOWANCE)])
def test_unlike_layers_of_unlike_thickness(grid, allowance):
    upper, lower = Soil(4.0, 1.0, 1.0), Soil(1.0, 2.0, 2.0)
    times = np.array([0.1, 0.5, 1.0, 2.0, 5.0, 10.0])
    expected = degree_two_layers(upper, lower, times)
    assert expected == pytest.approx([0.14219, 0.29668, 0.39884, 0.53677, 0.77731, 0.93397], abs=2e-4)
    assert kernel_degree(upper, lower, times, grid) == pytest.approx(expected, abs=allowance + SMALL_LOAD)
