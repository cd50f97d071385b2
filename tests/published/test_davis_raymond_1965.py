"""Consolidation of a clay that is linear in the logarithm of stress, with a constant cv.

Source: E. H. Davis and G. P. Raymond, A non-linear theory of consolidation, Geotechnique 15(2),
1965 (from memory; the paper was not opened). The theory in brief: with a constant cv the
logarithm of effective stress obeys the linear diffusion equation, so after a sudden load from s0 to
R s0, and with B the linear isochrone u/u0,

- the degree of settlement equals Terzaghi's for every R;
- the excess pressure is u = R s0 (1 - R**-B), larger than in the linear theory.

A solver that treats stress, stiffness and permeability inconsistently cannot meet both.
"""

import numpy as np
import pytest
from reference_solutions import (
    DEFAULT_ALLOWANCE,
    FINE_ALLOWANCE,
    SUDDEN,
    clay_column,
    constant_cv,
    degree_uniform,
    final_settlement,
    isochrone,
    loaded,
)

RATIOS = (2.0, 4.0, 8.0, 16.0)
TIMES = np.array([0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.8, 1.0, 1.2])
STRESS = 50.0
# u/u0 at the impermeable face for R = 4, worked out again from the closed form
AT_BASE = [0.99855, 0.97573, 0.87629, 0.75841, 0.64267, 0.53587, 0.44102, 0.28993, 0.18536, 0.11644]
# average dissipation of pore pressure at T = 0.3, by integration of the closed form over depth
DISSIPATED = {2.0: 0.54280, 4.0: 0.47419, 8.0: 0.41054, 16.0: 0.35388}


def pressure_left(ratio, linear):
    """Excess over initial excess pressure where the linear theory has `linear`."""
    return ratio * (1.0 - ratio**-linear) / (ratio - 1.0)


def run(ratio, grid):
    column = clay_column(stress=STRESS, lam=(1e-5,), grid=grid)
    added = (ratio - 1.0) * STRESS
    settled, result = loaded(column, constant_cv(column, 1.0), added, end=SUDDEN, wanted=TIMES, grid=grid)
    left = (ratio * STRESS - result.stress[0]) / added
    return column, settled / final_settlement(column, added), left


@pytest.mark.parametrize(("grid", "allowance"), [(1, DEFAULT_ALLOWANCE), (4, FINE_ALLOWANCE)])
@pytest.mark.parametrize("ratio", RATIOS)
def test_settlement_is_terzaghis_and_pressure_is_not(ratio, grid, allowance):
    column, degree, left = run(ratio, grid)
    assert degree == pytest.approx(degree_uniform(TIMES), abs=allowance)
    linear = np.stack([isochrone(column.depth, time) for time in TIMES])
    expected = pressure_left(ratio, linear)
    # the steepest change of u/u0 with B is R ln R / (R - 1), so an error of B grows by as much
    assert left == pytest.approx(expected, abs=allowance * ratio * np.log(ratio) / (ratio - 1.0))
    base = left[3, -1]  # T = 0.3
    assert base - linear[3, -1] > 0.04  # R = 2 differs by 0.08 already


def test_closed_form_at_the_impermeable_face():
    linear = np.array([float(isochrone(1.0, time)) for time in TIMES])
    assert pressure_left(4.0, linear) == pytest.approx(AT_BASE, abs=1e-5)


@pytest.mark.parametrize("ratio", RATIOS)
def test_average_dissipation_lags_behind_settlement(ratio):
    column, degree, left = run(ratio, 4)
    dissipated = 1.0 - (left[3] * column.state.thickness[0]).sum()
    assert dissipated == pytest.approx(DISSIPATED[ratio], abs=2.0 * FINE_ALLOWANCE)
    assert degree[3] - dissipated > 0.06
