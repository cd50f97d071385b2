"""Strip load on clay of one strength: the best circle gives Nc = 5.52.

Source: W. Fellenius, Erdstatische Berechnungen, Berlin: Ernst, 1927 (the number 5.52, from memory,
not opened; it is worked out here). A circle through the far edge of a strip of width B, centred
y above its near edge, has Nc = 4 [1 + (y/B)^2] arctan(B/y). The least of it exceeds the exact
2 + pi of Prandtl (1921), as any circle must.
"""

import numpy as np
import pytest
from scipy.optimize import minimize_scalar
from slopes_of_clay import ARC_ALLOWANCE, DENSITY_ALLOWANCE, STRENGTH, WEIGHT, Slope, computed_factor


def bearing_number(height):
    return 4.0 * (1.0 + height**2) * np.arctan(1.0 / height)


def test_best_circle_of_theory():
    best = minimize_scalar(bearing_number, bounds=(0.05, 3.0), method="bounded", options={"xatol": 1e-9})
    assert best.fun == pytest.approx(5.52, abs=0.005)
    assert best.x == pytest.approx(0.429, abs=0.0005)
    assert best.fun > 2.0 + np.pi


@pytest.mark.parametrize("depth", [4.0, 12.0])
def test_family_finds_it_under_a_thin_vertical_fill(depth):
    # thin against the shallowest circle too, or the fill, which has no strength here, slips by itself
    fill_height = 1e-4 * depth
    slope = Slope(run=0.0, depth=depth, height=fill_height)
    factor = computed_factor(slope, width=20.0 * depth, fill_strength=0.0)
    bearing = factor * WEIGHT * fill_height / STRENGTH
    exact = minimize_scalar(bearing_number, bounds=(0.05, 3.0), method="bounded").fun
    assert exact * (1.0 - ARC_ALLOWANCE) <= bearing <= exact * (1.0 + DENSITY_ALLOWANCE)
