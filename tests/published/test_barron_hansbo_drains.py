"""Vertical drains against Barron's and Hansbo's theory and textbook problems.

Sources, all recalled and not opened: R. A. Barron, Trans. ASCE 113, 1948 (equal and free strain);
S. Hansbo, ICSMFE Stockholm 1981; N. Carillo, J. Math. Phys. 21, 1942 (vertical and radial flow
together); B. M. Das, Principles of Foundation Engineering (surcharge with drains: Ur 0.77, Uv 0.67,
together 0.924). The problem with smear (rw 0.25, rs 0.35, de 4.5 m) was read online as a problem text
without its answer; its numbers here follow from the formulas. Tables of F(n) are worked out again in
the test by a route of their own (integration of the pressure over the cylinder).
"""

from dataclasses import replace

import numpy as np
import pytest
from reference_solutions import clay_column, constant_cv, degree_uniform, final_settlement, loaded
from scipy.integrate import quad
from scipy.optimize import brentq
from scipy.special import j0, j1, y0, y1

from probsoil.ground.conductivity import RadialDrainage
from probsoil.ground.vertical_drains import (
    drain_factor,
    influence_diameter,
    radial_degree_of_consolidation,
    well_resistance,
)

GRID_ALLOWANCE = 0.005  # of the final settlement, the promise of the default grid
ADDED = 0.5  # kPa on 100 kPa: the linear limit, off by a quarter of a per cent


def factor_by_integration(n: float, s: float = 1.0, ratio: float = 1.0) -> float:
    """Mean excess pressure over the cylinder for equal strain, in units of the outflow.

    With equal strain the flow through radius r drains the soil beyond it: du/dr is in proportion to
    (n^2 - r^2)/r over the permeability there. Radii in drain radii.
    """

    def pressure(r: float) -> float:
        near, _ = quad(lambda x: ratio * (n**2 - x**2) / x, 1.0, min(r, s))
        far, _ = quad(lambda x: (n**2 - x**2) / x, s, max(r, s))
        return near + far

    inside, _ = quad(lambda r: pressure(r) * r, 1.0, s)
    outside, _ = quad(lambda r: pressure(r) * r, s, n)
    return 2.0 * (inside + outside) / (n**2 * (n**2 - 1.0))  # mean over the soil alone


EXACT = 1e-7  # of the quadrature


@pytest.mark.parametrize("n", [5.0, 10.0, 15.0, 25.0, 50.0])
def test_factor_without_smear(n):
    assert float(drain_factor(n)) == pytest.approx(factor_by_integration(n), rel=EXACT)


@pytest.mark.parametrize(("degree", "factor"), [(0.5, "0.137"), (0.9, "0.455")])
def test_recalled_time_factors_of_a_spacing_ratio_of_ten(degree, factor):
    half = 0.5 * 10.0 ** -len(factor.split(".")[1])
    found = radial_degree_of_consolidation([float(factor) - half, float(factor) + half], drain_factor(10.0))
    assert found[0] <= degree + 1e-3
    assert found[1] >= degree - 1e-3


@pytest.mark.parametrize("n", [5.0, 9.0, 20.0])
@pytest.mark.parametrize("share", [0.25, 0.5, 0.8, 0.99])
@pytest.mark.parametrize("ratio", [1.0, 2.0, 5.0])
def test_factor_with_smear(n, share, ratio):
    """Up to a smear zone that fills the cylinder."""
    s = max(share * n, 1.0)
    assert float(drain_factor(n, s, ratio)) == pytest.approx(factor_by_integration(n, s, ratio), rel=EXACT)


def test_more_disturbance_never_drains_faster():
    wider = drain_factor(10.0, np.linspace(1.0, 9.99, 200), 5.0)
    assert (np.diff(wider) > 0.0).all()
    assert (np.diff(drain_factor(10.0, 3.0, np.linspace(1.0, 8.0, 50))) > 0.0).all()


def test_smear_zone_that_fills_the_cylinder_is_a_soil_of_its_permeability():
    assert float(drain_factor(10.0, 10.0 - 1e-9, 5.0)) == pytest.approx(5.0 * float(drain_factor(10.0)))


def test_problem_with_smear():
    factor = drain_factor(4.5 / 0.5, 0.7 / 0.5, 2.0)
    t = 0.3 * 6.0 / 4.5**2
    radial = float(radial_degree_of_consolidation(t, factor))
    vertical = float(degree_uniform(0.3 * 6.0 / 4.5**2))
    exact = factor_by_integration(9.0, 1.4, 2.0)
    assert float(factor) == pytest.approx(exact, rel=EXACT)
    assert radial == pytest.approx(1.0 - np.exp(-8.0 * t / exact), rel=1e-6)
    assert 1.0 - (1.0 - radial) * (1.0 - vertical) == pytest.approx(0.5511, abs=0.005)  # the usual formula


def test_recalled_surcharge_with_drains():
    radial = float(radial_degree_of_consolidation(0.36, drain_factor(15.0)))
    vertical = float(degree_uniform(0.36))
    assert radial == pytest.approx(0.77, abs=0.005)
    assert vertical == pytest.approx(0.67, abs=0.005)
    assert 1.0 - (1.0 - radial) * (1.0 - vertical) == pytest.approx(0.924, abs=0.003)


def free_strain(n: float, t: float) -> float:
    """Average degree with free strain: eigenfunctions of the annulus in Bessel functions."""

    def closure(a: float) -> float:
        return float(j0(a) * y1(a * n) - y0(a) * j1(a * n))

    grid = np.linspace(1e-4, 60.0 * np.pi / (n - 1.0), 20001)
    values = np.array([closure(a) for a in grid])
    roots = [brentq(closure, grid[i], grid[i + 1]) for i in np.flatnonzero(values[:-1] * values[1:] < 0.0)]
    left = 0.0
    for a in roots:
        at_drain = j1(a) * y0(a) - y1(a) * j0(a)
        at_edge = j0(a * n) * y0(a) - y0(a * n) * j0(a)
        weight = 4.0 * at_drain**2 / (a**2 * (n**2 - 1.0) * (n**2 * at_edge**2 - at_drain**2))
        left += weight * np.exp(-4.0 * a**2 * n**2 * t)
    return 1.0 - left


@pytest.mark.parametrize("t", [0.1, 0.2, 0.4])
def test_equal_strain_is_close_to_free_strain(t):
    """Barron found the two nearly the same; within two per cent from a time factor of 0.1 on."""
    equal = float(radial_degree_of_consolidation(t, drain_factor(10.0)))
    assert equal == pytest.approx(free_strain(10.0, t), abs=0.02)


def column_with_drains(ch_over_cv: float, *, drains_only: bool, cv: float = 1.0):
    column = clay_column((2.0,))
    flow = constant_cv(column, cv)
    if drains_only:
        column = replace(column, cells=replace(column.cells, drained=np.zeros(column.n_cell)))
    rate = 8.0 * ch_over_cv / (float(drain_factor(20.0)) * 1.2**2) * np.ones((1, column.n_cell))
    return column, replace(flow, drains=RadialDrainage(rate=rate, start=0.0))


def test_kernel_with_radial_flow_alone():
    column, flow = column_with_drains(1.5, drains_only=True)
    wanted = np.array([0.02, 0.05, 0.1, 0.2, 0.5])
    settled, _ = loaded(column, flow, ADDED, end=1e-5, wanted=wanted)
    degree = settled / final_settlement(column, ADDED)
    exact = radial_degree_of_consolidation(1.5 * wanted / 1.2**2, drain_factor(20.0))
    assert degree == pytest.approx(exact, abs=GRID_ALLOWANCE)


def test_kernel_with_both_flows_is_carillos_product():
    """Exact for linear soil: the sink only multiplies the vertical solution by exp(-8 Th/mu)."""
    column, flow = column_with_drains(1.5, drains_only=False)
    wanted = np.array([0.02, 0.05, 0.1, 0.2, 0.5])
    settled, _ = loaded(column, flow, ADDED, end=1e-5, wanted=wanted)
    radial = radial_degree_of_consolidation(1.5 * wanted / 1.2**2, drain_factor(20.0))
    vertical = degree_uniform(wanted / 2.0**2)
    exact = 1.0 - (1.0 - radial) * (1.0 - vertical)
    assert settled / final_settlement(column, ADDED) == pytest.approx(exact, abs=GRID_ALLOWANCE)


def test_well_resistance_by_hand():
    # pi x 5 m x 15 m x 0.03 m/year over 100 m3/year at half the length of a drain of 10 m
    assert float(well_resistance(5.0, 10.0, 0.03, 100.0)) == pytest.approx(np.pi * 5 * 15 * 0.03 / 100)
    assert float(well_resistance(0.0, 10.0, 0.03, 100.0)) == 0.0


def test_diameters_have_the_area_of_the_grid():
    """The usual factors are the rounded roots of 4/pi and of 2 sqrt(3)/pi."""
    assert influence_diameter(1.0, "square") == pytest.approx(np.sqrt(4.0 / np.pi), abs=0.005)
    assert influence_diameter(1.0, "triangular") == pytest.approx(
        np.sqrt(2.0 * np.sqrt(3.0) / np.pi), abs=0.005
    )
