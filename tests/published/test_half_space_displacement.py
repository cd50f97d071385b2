"""Settlement of an elastic half-space under a uniform pressure, and of a layer on a firm base.

Source: Boussinesq's solution for circle and rectangle, s = q B (1 - nu^2)/E I, and Steinbrenner's
superposition for a layer of limited thickness (recalled, not opened). The closed forms are set against the
double integral of point loads by quadrature and against textbook factors (recalled): centre and edge of a
circle 1 and 2/pi of its diameter; corner of a square 0.561 of its side, of 1 by 2 0.766, of 1 by 5 1.052;
centre twice the corner. Tolerances: quadrature 1e-6; half of the last recalled digit; for the layered sum,
what a profile of limited depth leaves out, worked out in closed form, and rounding.
"""

import numpy as np
import pytest
from scipy.integrate import dblquad, quad

from probsoil.ground.load_displacement import (
    circle_displacement,
    embankment_displacement,
    rectangle_displacement,
    strip_displacement,
)
from probsoil.ground.load_stress import (
    circle_influence,
    embankment_influence,
    rectangle_influence,
    strip_influence,
)
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model
from probsoil.scenario import parse_scenario

NU = 0.5


def point_load(x, y, z):
    """Displacement by a unit point load times E, nu = 1/2."""
    r = np.sqrt(x * x + y * y + z * z)
    return (1.0 + NU) / (2.0 * np.pi * r) * (2.0 * (1.0 - NU) + z * z / (r * r))


@pytest.mark.parametrize(
    ("x", "y", "z"), [(0.0, 0.0, 1.0), (1.0, 2.0, 0.7), (0.4, -1.1, 2.0), (3.0, 0.5, 1.5)]
)
def test_rectangle_is_the_integral_of_point_loads(x, y, z):
    found = float(rectangle_displacement(z, x, y, width=2.0, length=4.0))
    exact, _ = dblquad(lambda v, u: point_load(x - u, y - v, z), -1.0, 1.0, -2.0, 2.0, epsabs=1e-9)
    assert found == pytest.approx(exact, abs=1e-6)


@pytest.mark.parametrize(("r", "z"), [(0.0, 0.5), (0.6, 1.0), (1.5, 0.8), (2.2, 1.2), (1.5, 4.0)])
def test_circle_is_the_integral_of_point_loads(r, z):
    found = float(circle_displacement(z, r, diameter=3.0))

    def ring(angle, radius):
        return radius * point_load(r - radius * np.cos(angle), radius * np.sin(angle), z)

    exact, _ = dblquad(ring, 0.0, 1.5, 0.0, 2.0 * np.pi, epsabs=1e-9)
    assert found == pytest.approx(exact, abs=1e-6)


@pytest.mark.parametrize("offset", [0.0, 1.0, 3.0])
def test_strip_is_the_limit_of_long_rectangles(offset):
    """Differences between depths: what is left of the ends falls with the square of the length."""
    depth, length = np.array([0.3, 1.0, 4.0]), 4e4
    long = rectangle_displacement(depth, offset, 0.0, width=2.0, length=length)
    strip = strip_displacement(depth, offset, width=2.0)
    assert np.diff(strip) == pytest.approx(np.diff(long), abs=(4.0 / length) ** 2 + 1e-9)


@pytest.mark.parametrize(("base", "top", "offset"), [(12.0, 6.0, 0.0), (12.0, 6.0, 4.0), (8.0, 0.0, 1.0)])
def test_embankment_is_the_integral_of_strips(base, top, offset):
    depth = np.array([0.4, 2.0, 9.0])
    found = embankment_displacement(depth, offset, base_width=base, top_width=top)
    exact = [
        quad(lambda width, z=z: float(strip_displacement(z, offset, width=width)), top, base)[0]
        / (base - top)
        for z in depth
        if top > 0.0
    ] or [
        quad(lambda width, z=z: float(strip_displacement(z, offset, width=width)), 1e-9, base)[0] / base
        for z in depth
    ]
    assert found == pytest.approx(np.array(exact), abs=1e-6)
    vertical = embankment_displacement(depth, offset, base_width=base, top_width=base)
    assert vertical == pytest.approx(strip_displacement(depth, offset, width=base), abs=1e-12)


def test_textbook_factors_of_the_half_space():
    def factor(displacement, size):
        return float(displacement) / (size * (1.0 - NU**2))

    assert factor(circle_displacement(0.0, 0.0, diameter=6.0), 6.0) == pytest.approx(1.0, abs=1e-12)
    assert factor(circle_displacement(0.0, 3.0, diameter=6.0), 6.0) == pytest.approx(2.0 / np.pi, abs=1e-12)
    for length, corner in ((1.0, 0.561), (2.0, 0.766), (5.0, 1.052)):
        shape = {"width": 2.0, "length": 2.0 * length}
        at_corner = factor(rectangle_displacement(0.0, 1.0, length, **shape), 2.0)
        centre = factor(rectangle_displacement(0.0, 0.0, 0.0, **shape), 2.0)
        assert at_corner == pytest.approx(corner, abs=5.01e-4)
        assert centre == pytest.approx(2.0 * at_corner, rel=1e-12)


def strain_by_stress(influence, depth, step=1e-4):
    """Vertical strain E/q from a displacement, by differences."""
    return (influence(depth - step) - influence(depth + step)) / (2.0 * step)


def test_strain_is_that_of_the_stresses_in_plane_strain():
    """Below a strip's centreline: 3/4 (sigma_z - sigma_x)/E, their sum twice the angle over pi."""
    depth = np.array([0.5, 1.0, 3.0])
    sigma_z = strip_influence(depth, 0.0, width=2.0)
    sigma_x = 2.0 * 2.0 * np.arctan(1.0 / depth) / np.pi - sigma_z
    found = strain_by_stress(lambda z: strip_displacement(z, 0.0, width=2.0), depth)
    assert found == pytest.approx(0.75 * (sigma_z - sigma_x), abs=1e-6)


def test_strain_is_that_of_the_stresses_below_a_circle():
    """On the axis: (sigma_z - sigma_r)/E, with the radial stress at nu = 1/2 (recalled)."""
    depth, radius = np.array([0.4, 1.0, 3.0]), 1.5
    sigma_z = circle_influence(depth, 0.0, diameter=2.0 * radius)
    root = np.hypot(depth, radius)
    sigma_r = 0.5 * ((1.0 + 2.0 * NU) - 2.0 * (1.0 + NU) * depth / root + (depth / root) ** 3)
    found = strain_by_stress(lambda z: circle_displacement(z, 0.0, diameter=2.0 * radius), depth)
    assert found == pytest.approx(sigma_z - sigma_r, abs=1e-6)


def test_incompressible_ground_takes_the_trace_of_its_stresses():
    """eps_z E = 3/2 sigma_z - (sum of normal stresses)/2, the sum being 3 times a pressure that is harmonic.

    At nu = 1/2 that pressure is the solid angle over 2 pi, arctan(ab/zR)/(2 pi) below a corner.
    """
    depth, a, b = np.array([0.5, 1.0, 2.5]), 1.0, 2.0
    corner = {"width": 2.0 * a, "length": 2.0 * b}
    sigma_z = rectangle_influence(depth, a, b, **corner)
    solid = 4.0 * np.arctan(a * b / (depth * np.sqrt(a * a + b * b + depth * depth)))
    centre_z = rectangle_influence(depth, 0.0, 0.0, **corner)
    pressure = solid / (2.0 * np.pi)
    found = strain_by_stress(lambda z: rectangle_displacement(z, 0.0, 0.0, **corner), depth)
    assert found == pytest.approx(1.5 * (centre_z - pressure), abs=1e-6)
    assert (sigma_z < centre_z).all()


TEXT = """
format = 1
title = "deep clay"
seed = 1
horizon = 10
[site]
water_table = 0
base = "drained"
[[layers]]
name = "clay"
soil = "clay"
thickness = {thickness}
unit_weight = 17
void_ratio = 1.0
lambda = 0.1
kappa = 0.02
preconsolidation = {{ pop = 400 }}
M = 1.0
permeability = {{ cv = 1 }}
undrained_modulus = {{ Eu = {modulus} }}
[load]
{load}
[[stages]]
name = "frame"
{amount}
start = 0
end = 0.1
[[limits]]
name = "settlement"
quantity = "settlement"
at = 10
not_more_than = 1
"""
MODULUS, PRESSURE = 6000.0, 60.0


def layered(load, thickness, amount=f"pressure = {PRESSURE}"):
    case = parse_scenario(TEXT.format(load=load, thickness=thickness, modulus=MODULUS, amount=amount))
    values = {one.address: one.distribution.expectation for one in case.quantities()}
    return ground_state(site_model(case), values).response.distortion[0, -1]


@pytest.mark.parametrize(
    ("load", "size", "factor"),
    [
        ('shape = "circle"\ndiameter = 3', 3.0, 1.0),
        ('shape = "circle"\ndiameter = 3\nat = 1.5', 3.0, 2.0 / np.pi),
        ('shape = "rectangle"\nwidth = 2\nlength = 4', 2.0, 2.0 * 0.766),
        ('shape = "rectangle"\nwidth = 2\nlength = 4\nat = [1, 2]', 2.0, 0.766),
    ],
)
def test_layered_sum_reaches_the_half_space(load, size, factor):
    """Below the profile of 200 m a point load would still give 3 P/(2 pi E z), which is added."""
    area = {"circle": np.pi * 1.5**2, "rectangle": 8.0}[load.partition('"')[2].partition('"')[0]]
    rest = 3.0 * PRESSURE * area / (2.0 * np.pi * MODULUS * 200.0)
    expected = PRESSURE * size * (1.0 - NU**2) / MODULUS * factor
    assert layered(load, 200) + rest == pytest.approx(expected, rel=1e-3)


def steinbrenner(a, b, h):
    """Displacement of the corner of a rectangle on a layer of thickness h, times E/q, at nu = 1/2 (recalled).

    F1 and F2 with lengths, for B = a: (1 - nu^2) F1 + (1 - nu - 2 nu^2) F2, of which the second term is zero.
    """
    m, n = b / a, h / a
    root = np.sqrt(1.0 + m * m + n * n)
    first = m * np.log((1.0 + np.sqrt(m * m + 1.0)) * np.sqrt(m * m + n * n) / (m * (1.0 + root)))
    second = np.log((m + np.sqrt(m * m + 1.0)) * np.sqrt(1.0 + n * n) / (m + root))
    return a * (1.0 - NU**2) * (first + second) / np.pi


@pytest.mark.parametrize(("m", "n"), [(1.0, 1.0), (1.0, 4.0), (2.0, 2.0), (5.0, 10.0)])
def test_a_layer_on_a_firm_base_is_steinbrenner_s(m, n):
    """Four corners at the centre of a footing of 2 by 2m."""
    load = f'shape = "rectangle"\nwidth = 2\nlength = {2 * m}'
    expected = 4.0 * PRESSURE / MODULUS * steinbrenner(1.0, m, n)
    assert layered(load, n) == pytest.approx(expected, rel=1e-9)


def test_embankment_on_a_layer():
    load = 'shape = "embankment"\ncrest_width = 6\nside_slope = 2\nfill_unit_weight = 20\nfill_phi = 33'
    found = layered(load, 8, "height = 1.5")
    influence = embankment_influence(np.array([4.0]), 0.0, base_width=12.0, top_width=6.0)
    exact = quad(
        lambda z: strain_by_stress(
            lambda depth: embankment_displacement(depth, 0.0, base_width=12.0, top_width=6.0), z
        ),
        1e-3,
        8.0,
    )[0]
    assert found == pytest.approx(20.0 * 1.5 * exact / MODULUS, rel=2e-3)
    assert 0.0 < influence < 1.0
