"""Stability numbers of slopes of clay, phi = 0.

Source: D. W. Taylor, Stability of earth slopes, J. Boston Soc. Civ. Eng. 24, 1937 (the paper was not
opened; its number for clay of unlimited depth, 0.181, is from memory). The proof for clay of limited
depth is the free search in `slopes_of_clay`, which minimises over the same circles with an optimiser
and slices of its own. N = c/(F g H); D is the depth of the firm base below the top over the height.

The slope itself is of the same clay: fill with a cohesion and without friction. The package looks at
circles that leave at the toe or beyond. Taylor's numbers for D = 1 and gentle slopes (0.164, 0.133 and
0.113 for 45, 30 and 22.5 degrees, from memory) belong to circles that leave on the slope, which an
embankment of frictional fill does not have, so they are not compared.
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
HALF_DIGIT = 0.0005


def run_of(angle):
    return 1.0 / np.tan(np.radians(angle))


def computed_number(angle, depth_factor):
    slope = Slope(run=run_of(angle), depth=depth_factor - 1.0)
    width = 2.0 * slope.run + 40.0 * depth_factor
    return STRENGTH / (computed_factor(slope, width=width) * WEIGHT)


@pytest.mark.parametrize("depth_factor", [1.02, 1.2, 1.5, 2.0, 3.0])
@pytest.mark.parametrize("angle", [45.0, 30.0, 22.5, 15.0])
def test_family_finds_what_a_free_search_finds(angle, depth_factor):
    searched = stability_number(Slope(run=run_of(angle), depth=depth_factor - 1.0))
    computed = computed_number(angle, depth_factor)
    assert searched / (1.0 + DENSITY_ALLOWANCE) <= computed <= searched * (1.0 + ARC_ALLOWANCE)


@pytest.mark.parametrize("angle", [45.0, 30.0, 22.5])
def test_deep_clay_tends_to_the_number_of_the_strip(angle):
    deep = computed_number(angle, 60.0)
    assert (
        (DEEP - HALF_DIGIT) / (1.0 + DENSITY_ALLOWANCE) <= deep <= (DEEP + HALF_DIGIT) * (1.0 + ARC_ALLOWANCE)
    )
