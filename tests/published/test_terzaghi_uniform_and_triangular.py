"""Degree of consolidation of Terzaghi's theory against a printed table.

Source: University of Florida, Department of Civil Engineering, course notes CEG 4012, table of
the time factor T against the degree of consolidation U for different distributions of the
initial excess pressure (an online copy of the notes was opened). Theory: K. Terzaghi and
O. K. Froehlich, Theorie der Setzung von Tonschichten, 1936 (not opened).

The nonlinear, finite-strain kernel is run in the limit in which it must give the linear theory:
lambda so small that strain vanishes, and a load so small (a thousandth of the stress in situ)
that the stress hardly changes.

Band. A printed T is right to half of its last digit. The kernel may miss a degree by the
allowance for its steps (`reference_solutions`) plus 0.0005 for the thousandth of load.
"""

from decimal import Decimal

import numpy as np
import pytest
from reference_solutions import (
    DEFAULT_ALLOWANCE,
    FINE_ALLOWANCE,
    SUDDEN,
    clay_column,
    constant_cv,
    degree_sine,
    degree_triangular,
    degree_uniform,
    final_settlement,
    loaded,
)

# U: T as printed, so that the digits survive
PRINTED = {
    "uniform": {
        "0.05": "0.0020",
        "0.10": "0.0078",
        "0.20": "0.0314",
        "0.30": "0.0707",
        "0.40": "0.126",
        "0.50": "0.197",
        "0.60": "0.286",
        "0.65": "0.342",
        "0.70": "0.403",
        "0.80": "0.567",
        "0.90": "0.848",
        "0.95": "1.129",
    },
    "sine": {
        "0.10": "0.0427",
        "0.20": "0.0904",
        "0.30": "0.145",
        "0.40": "0.207",
        "0.50": "0.281",
        "0.60": "0.371",
        "0.65": "0.425",
        "0.70": "0.488",
        "0.80": "0.652",
        "0.90": "0.933",
        "0.95": "1.214",
    },
    "triangular": {
        "0.10": "0.0500",
        "0.20": "0.101",
        "0.30": "0.157",
        "0.40": "0.220",
        "0.50": "0.294",
        "0.60": "0.384",
        "0.65": "0.438",
        "0.70": "0.501",
        "0.80": "0.665",
        "0.90": "0.946",
        "0.95": "1.227",
    },
}
SERIES = {"uniform": degree_uniform, "sine": degree_sine, "triangular": degree_triangular}
INITIAL = {
    "uniform": np.ones_like,
    "sine": lambda depth: np.sin(np.pi / 2.0 * depth),
    "triangular": lambda depth: depth,
}
MISPRINTED = {("uniform", "0.65"), ("uniform", "0.10")}  # not the rounded root: 0.3404 and 0.00785
SMALL_LOAD = 5e-4
ROWS = [(shape, degree) for shape, table in PRINTED.items() for degree in table]


def edges(shape, degree):
    """The two ends of what the printed number stands for."""
    printed = Decimal(PRINTED[shape][degree])
    half = Decimal("0.5").scaleb(int(printed.as_tuple().exponent))
    return float(printed - half), float(printed + half)


def kernel_degree(shape, time_factors, grid):
    column = clay_column(grid=grid)
    added = 0.1 * INITIAL[shape](column.depth)
    settled, _ = loaded(column, constant_cv(column, 1.0), added, end=SUDDEN, wanted=time_factors, grid=grid)
    return settled / final_settlement(column, added)


@pytest.fixture(scope="module")
def computed():
    """Degree at both ends of every printed number, on the default and on a finer grid."""
    found = {}
    for shape, table in PRINTED.items():
        times = np.unique([edge for degree in table for edge in edges(shape, degree)])
        for grid in (1, 4):
            found[shape, grid] = dict(zip(times, kernel_degree(shape, times, grid), strict=True))
    return found


@pytest.mark.parametrize(("grid", "allowance"), [(1, DEFAULT_ALLOWANCE), (4, FINE_ALLOWANCE)])
@pytest.mark.parametrize(("shape", "degree"), [row for row in ROWS if row not in MISPRINTED])
def test_kernel_reaches_the_printed_degree_at_the_printed_time(computed, shape, degree, grid, allowance):
    early, late = (computed[shape, grid][edge] for edge in edges(shape, degree))
    band = allowance + SMALL_LOAD
    assert early - band <= float(degree) <= late + band


@pytest.mark.parametrize(("shape", "degree"), [row for row in ROWS if row not in MISPRINTED])
def test_series_lies_within_the_printed_rounding(shape, degree):
    early, late = SERIES[shape](edges(shape, degree))
    assert early <= float(degree) <= late


@pytest.mark.parametrize(("shape", "degree"), sorted(MISPRINTED))
def test_misprinted_rows_are_not_the_rounded_root(shape, degree):
    early, late = SERIES[shape](edges(shape, degree))
    assert not early <= float(degree) <= late


@pytest.mark.parametrize("shape", PRINTED)
def test_fine_grid_follows_the_series_at_every_time(shape):
    times = np.geomspace(1e-3, 3.0, 25)
    assert kernel_degree(shape, times, 4) == pytest.approx(
        SERIES[shape](times), abs=FINE_ALLOWANCE + SMALL_LOAD
    )


def test_drainage_at_both_faces_quarters_the_time():
    column = clay_column((2.0,), grid=4, base=True)
    times = np.array([0.05, 0.2, 0.5, 1.0])
    settled, _ = loaded(column, constant_cv(column, 1.0), 0.1, end=SUDDEN, wanted=times, grid=4)
    degree = settled / final_settlement(column, 0.1)
    assert degree == pytest.approx(degree_uniform(times), abs=FINE_ALLOWANCE + SMALL_LOAD)
