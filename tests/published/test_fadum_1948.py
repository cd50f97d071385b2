"""Vertical stress below the corner of a rectangle against a printed table.

Source of the 60 values: the table of the influence of a corner in B. M. Das, Principles of Geotechnical
Engineering, read in an online copy of a problem that prints it; the book was not opened. The
formula is that of N. M. Newmark, Univ. of Illinois Eng. Exp. Station Circular 24, 1935, and the chart that
of R. E. Fadum, Proc. 2nd Int. Conf. Soil Mech. Found. Eng., Rotterdam, 1948, both from memory. Three
entries are a unit off in the last digit; they are kept, and the double integral of Boussinesq's point load
says which is right.
"""

import numpy as np
import pytest
from scipy.integrate import dblquad

from probsoil.ground.load_stress import rectangle_influence

HALF_DIGIT = 0.5e-4
N = (0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0, 1.2, 1.4, 1.6, 1.8, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0)
PRINTED = {
    0.1: (
        *(0.0047, 0.0092, 0.0132, 0.0168, 0.0198, 0.0222, 0.0242, 0.0258, 0.0270, 0.0279),
        *(0.0293, 0.0301, 0.0306, 0.0309, 0.0311, 0.0314, 0.0315, 0.0316, 0.0316, 0.0316),
    ),
    0.5: (
        *(0.0198, 0.0387, 0.0559, 0.0711, 0.0840, 0.0947, 0.1034, 0.1104, 0.1158, 0.1202),
        *(0.1263, 0.1300, 0.1324, 0.1340, 0.1350, 0.1363, 0.1368, 0.1372, 0.1374, 0.1374),
    ),
    1.0: (
        *(0.0279, 0.0547, 0.0794, 0.1013, 0.1202, 0.1361, 0.1491, 0.1598, 0.1684, 0.1752),
        *(0.1851, 0.1914, 0.1955, 0.1981, 0.1999, 0.2024, 0.2034, 0.2042, 0.2044, 0.2045),
    ),
}
MISPRINTED = {(0.5, 0.8): 0.1103, (0.5, 1.8): 0.1339, (1.0, 0.6): 0.1360}  # to the last digit
ENTRIES = [(m, n, value) for m, row in PRINTED.items() for n, value in zip(N, row, strict=True)]


def corner(m, n, depth=1.0):
    """Influence below the corner of a rectangle with sides m and n times the depth."""
    width, length = m * depth, n * depth
    return float(rectangle_influence(depth, width / 2, length / 2, width=width, length=length))


def by_point_loads(m, n):
    def share(y, x):
        return 1.5 / np.pi / (x * x + y * y + 1.0) ** 2.5

    return dblquad(share, 0.0, m, 0.0, n, epsabs=1e-12, epsrel=1e-10)[0]


def newmark(m, n):
    """Newmark's expression in m and n, written out with the arctangent of two arguments."""
    v, w = m * m + n * n + 1.0, m * m * n * n
    root = 2.0 * m * n * np.sqrt(v)
    return (root / (v + w) * (v + 1.0) / v + np.arctan2(root, v - w)) / (4.0 * np.pi)


def test_there_are_sixty_entries():
    assert len(ENTRIES) == 60


@pytest.mark.parametrize(("m", "n", "value"), ENTRIES)
def test_printed_table(m, n, value):
    right = MISPRINTED.get((m, n), value)
    assert corner(m, n) == pytest.approx(right, abs=HALF_DIGIT)


@pytest.mark.parametrize(("m", "n"), MISPRINTED)
def test_entries_that_are_off_by_one_unit(m, n):
    exact = by_point_loads(m, n)
    assert abs(exact - PRINTED[m][N.index(n)]) > HALF_DIGIT
    assert corner(m, n) == pytest.approx(exact, abs=1e-10)


@pytest.mark.parametrize(("m", "n"), [(0.3, 0.7), (1.0, 2.0), (2.0, 2.0), (5.0, 9.0), (30.0, 40.0)])
def test_equals_newmarks_expression_also_where_its_arctangent_turns(m, n):
    assert corner(m, n) == pytest.approx(newmark(m, n), abs=1e-13)
    assert corner(m, n, depth=3.7) == pytest.approx(newmark(m, n), abs=1e-13)


@pytest.mark.parametrize(("x", "y"), [(0.0, 0.0), (0.6, -1.1), (1.5, 2.5), (2.4, 0.3), (-4.0, 5.0)])
def test_any_point_by_the_integral_of_point_loads(x, y):
    depth, width, length = 1.3, 3.0, 5.0

    def share(b, a):
        return 1.5 / np.pi * depth**3 / ((a - x) ** 2 + (b - y) ** 2 + depth**2) ** 2.5

    exact = dblquad(share, -width / 2, width / 2, -length / 2, length / 2, epsabs=1e-10)[0]
    assert float(rectangle_influence(depth, x, y, width=width, length=length)) == pytest.approx(
        exact, abs=1e-8
    )
