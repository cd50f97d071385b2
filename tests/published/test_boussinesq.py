"""Vertical stress under strips, circles and point loads against Boussinesq's solution.

J. Boussinesq, Application des potentiels, Gauthier-Villars, Paris, 1885, and the strip of J. H. Michell,
1902: formulas from memory, not opened. Tables of values are evaluations of them; the edge of the circle
is a double integral. The proof here is the integral of point or line loads by quadrature.
"""

import numpy as np
import pytest
from scipy.integrate import dblquad, quad

from probsoil.ground.load_stress import circle_influence, rectangle_influence, strip_influence

POINT = {
    0.0: 0.4775,
    0.25: 0.4103,
    0.5: 0.2733,
    0.75: 0.1565,
    1.0: 0.0844,
    1.5: 0.0251,
    2.0: 0.0085,
    3.0: 0.0015,
}
CENTRE = {
    0.2: 0.9925,
    0.5: 0.9106,
    1.0: 0.6464,
    1.5: 0.4240,
    2.0: 0.2845,
    3.0: 0.1462,
    4.0: 0.0869,
    5.0: 0.0571,
}
EDGE = {0.25: 0.45961, 0.5: 0.41748, 1.0: 0.33224, 1.5: 0.25624, 2.0: 0.19600, 3.0: 0.11811}
STRIP_CENTRE = {0.5: 0.818, 1.0: 0.550, 2.0: 0.306, 3.0: 0.208}
STRIP_EDGE = {0.5: 0.480, 1.0: 0.409, 2.0: 0.275}


@pytest.mark.parametrize(("distance", "value"), POINT.items())
def test_small_loads_are_a_point_load(distance, value):
    side, depth = 0.01, 2.0
    square = float(rectangle_influence(depth, distance * depth, 0.0, width=side, length=side)) / side**2
    disc = float(circle_influence(depth, distance * depth, diameter=side)) / (np.pi * side**2 / 4.0)
    exact = 1.5 / np.pi * (1.0 + distance**2) ** -2.5
    assert exact == pytest.approx(value, abs=0.6e-4)
    # a load of side b differs from a point by terms of the order (b/z)^2
    assert square * depth**2 == pytest.approx(exact, rel=5.0 * (side / depth) ** 2)
    assert disc * depth**2 == pytest.approx(exact, rel=5.0 * (side / depth) ** 2)


@pytest.mark.parametrize(("ratio", "value"), CENTRE.items())
def test_centre_of_a_circle(ratio, value):
    assert float(circle_influence(3.0 * ratio, 0.0, diameter=6.0)) == pytest.approx(value, abs=1.5e-4)


@pytest.mark.parametrize(("ratio", "value"), EDGE.items())
def test_edge_of_a_circle(ratio, value):
    assert float(circle_influence(3.0 * ratio, 3.0, diameter=6.0)) == pytest.approx(value, abs=0.6e-5)


@pytest.mark.parametrize("radius", [0.0, 0.4, 0.97, 1.0, 1.03, 1.8, 6.0])
@pytest.mark.parametrize("depth", [0.1, 0.7, 2.5, 12.0])
def test_circle_by_the_integral_of_point_loads(radius, depth):
    def share(angle, r):
        squares = r * r + radius * radius - 2.0 * r * radius * np.cos(angle) + depth * depth
        return 1.5 / np.pi * depth**3 * r / squares**2.5

    exact = 2.0 * dblquad(share, 0.0, 1.0, 0.0, np.pi, epsabs=1e-10, epsrel=1e-9)[0]
    assert float(circle_influence(depth, radius, diameter=2.0)) == pytest.approx(exact, abs=1e-7)


@pytest.mark.parametrize(("ratio", "value"), STRIP_CENTRE.items())
def test_centre_of_a_strip(ratio, value):
    assert float(strip_influence(4.0 * ratio, 0.0, width=4.0)) == pytest.approx(value, abs=0.6e-3)


@pytest.mark.parametrize(("ratio", "value"), STRIP_EDGE.items())
def test_edge_of_a_strip(ratio, value):
    assert float(strip_influence(4.0 * ratio, 2.0, width=4.0)) == pytest.approx(value, abs=0.6e-3)


@pytest.mark.parametrize("offset", [0.0, 0.7, 2.0, 3.1])
def test_strip_by_the_integral_of_line_loads(offset):
    depth, half = 0.8, 2.0

    def share(x):
        return 2.0 * depth**3 / (np.pi * ((x - offset) ** 2 + depth**2) ** 2)

    exact = quad(share, -half, half, epsabs=1e-12)[0]
    assert float(strip_influence(depth, offset, width=2.0 * half)) == pytest.approx(exact, abs=1e-10)
