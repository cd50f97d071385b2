"""Undrained bearing capacity against plasticity.

Values from memory, none of the sources opened: 2 + pi (L. Prandtl 1921), 5.69 and 6.05 for the smooth and
the rough circle (R. T. Shield 1955; G. Eason and R. T. Shield 1960), A. W. Skempton's square (1951), J.
Mandel and J. Salencon's thin layer (1972). E. H. Davis and J. R. Booker (Geotechnique 23(4), 1973) give a
chart that was not read: the table of the package is computed anew by the method of characteristics in
`slip_line_fields.py`. `EARLIER` holds numbers of this project's own first, coarser computation: a guard
against change, not a check from outside. The tolerance of 0.01 on F was set then.
"""

import numpy as np
import pytest
from slip_line_fields import circle_pressure, strip_pressure

from probsoil.ground.bearing_capacity import (
    circle_shape_factor,
    depth_factor,
    limited_thickness_factor,
    rectangle_shape_factor,
    squeezing_safety,
    strength_growth_factor,
    strip_capacity,
)

PRANDTL = 2.0 + np.pi
ON_F = 0.01
EARLIER = {  # regression, own numbers; rho B/c0: F smooth, F rough
    0.25: (1.033, 1.074),
    0.5: (1.062, 1.134),
    1.0: (1.109, 1.226),
    2.0: (1.181, 1.346),
    3.0: (1.233, 1.427),
    4.0: (1.273, 1.486),
    6.0: (1.331, 1.569),
    8.0: (1.370, 1.622),
    10.0: (1.397, 1.657),
    16.0: (1.441, 1.708),
    20.0: (1.455, 1.717),
}
RATIOS = (0.25, 0.7, 1.0, 2.0, 3.3, 4.0, 7.0, 10.0, 14.0, 20.0, 35.0, 60.0, 100.0)


def pressure_of_strip(ratio):
    return PRANDTL + 0.25 * np.asarray(ratio)


@pytest.mark.parametrize(("ratio", "factors"), EARLIER.items())
def test_growing_strength_has_not_changed_since_the_first_computation(ratio, factors):
    assert float(strength_growth_factor(ratio, "smooth")) == pytest.approx(factors[0], abs=ON_F)
    assert float(strength_growth_factor(ratio, "rough")) == pytest.approx(factors[1], abs=ON_F)


@pytest.mark.parametrize("contact", ["smooth", "rough"])
def test_table_of_strips_is_what_characteristics_give(contact):
    exact = strip_pressure(RATIOS, rough=contact == "rough") / pressure_of_strip(RATIOS)
    assert strength_growth_factor(RATIOS, contact) == pytest.approx(exact, abs=ON_F)
    beyond = np.array([300.0, 1000.0])
    exact = strip_pressure(beyond, rough=contact == "rough") / pressure_of_strip(beyond)
    assert strength_growth_factor(beyond, contact) == pytest.approx(exact, rel=0.02)


@pytest.mark.parametrize("ratio", [0.0, 0.7, 4.0, 16.0, 60.0])
def test_table_of_smooth_circles_is_what_characteristics_give(ratio):
    carried = float(circle_shape_factor(ratio, "smooth") * strength_growth_factor(ratio, "smooth"))
    exact = circle_pressure(ratio, rough=False) / pressure_of_strip(ratio)
    assert carried == pytest.approx(exact, abs=ON_F)


@pytest.mark.slow
@pytest.mark.parametrize("ratio", [0.0, 1.0, 4.0, 16.0])
def test_table_of_rough_circles_is_what_characteristics_give(ratio):
    carried = float(circle_shape_factor(ratio, "rough") * strength_growth_factor(ratio, "rough"))
    exact = circle_pressure(ratio, rough=True) / pressure_of_strip(ratio)
    assert carried == pytest.approx(exact, abs=2.0 * ON_F)  # of a number up to 1.5


def test_one_strength():
    assert float(strip_capacity(20.0, 0.0, 3.0)) == pytest.approx(20.0 * PRANDTL, rel=1e-12)
    assert PRANDTL * float(circle_shape_factor(0.0, "smooth")) == pytest.approx(5.69, abs=0.005)
    assert PRANDTL * float(circle_shape_factor(0.0, "rough")) == pytest.approx(6.05, abs=0.005)


def test_no_strength_at_the_base():
    """The pressure rises from the edge inward as rho x: a wedge for the strip, a cone for the circle."""
    assert float(strip_capacity(0.0, 2.0, 8.0)) == pytest.approx(2.0 * 8.0 / 4.0, rel=1e-12)
    assert float(circle_shape_factor(1e6)) == pytest.approx((1 / 6) / (1 / 4), rel=1e-12)


@pytest.mark.parametrize(("deep", "nc"), [(0.0, 6.0), (1.0, 7.2), (2.5, 9.0), (4.0, 9.0)])
def test_square_of_skempton(deep, nc):
    """His strip starts from 5 where this one starts from 2 + pi; the factors are his."""
    factors = float(rectangle_shape_factor(0.0, 1.0) * depth_factor(deep * 2.0, 2.0))
    assert 5.0 * factors == pytest.approx(nc, rel=1e-12)


def test_rectangle_lies_between_strip_and_square():
    assert float(rectangle_shape_factor(0.0, 0.0)) == 1.0
    assert float(rectangle_shape_factor(0.0, 0.5)) == pytest.approx(1.1, rel=1e-12)
    assert float(rectangle_shape_factor(50.0, 1.0)) == pytest.approx(
        float(circle_shape_factor(50.0)), rel=1e-12
    )


@pytest.mark.parametrize(("ratio", "nc"), [(1.0, PRANDTL), (2.0, PRANDTL), (4.0, 6.14), (10.0, 9.14)])
def test_thin_clay_on_a_firm_base(ratio, nc):
    assert float(limited_thickness_factor(ratio * 1.5, 1.5)) == pytest.approx(nc, abs=0.005)


def test_squeezing_under_the_side_of_an_embankment():
    """Strength 20 kPa, fill 3 m at 20 kN/m3 with 2:1 sides, 4 m of clay: 2.380 (from memory)."""
    found = squeezing_safety(20.0, thickness=4.0, height=3.0, side_slope=2.0, unit_weight=20.0)
    assert float(found) == pytest.approx(2.380, abs=0.0005)
