"""Vertical stress under an embankment against the integral of line loads.

Source: J. O. Osterberg, Influence values for vertical stresses in a semi-infinite mass due to an
embankment loading, Proc. 4th Int. Conf. Soil Mech. Found. Eng., London, 1957 (formula from memory;
the chart was not opened, and charts of it are read to no better than two digits). The proof here is
Boussinesq's line load, ds = 2 q z^3/(pi r^4), summed over the load by quadrature; the table below
holds values of the same integral for half an embankment, below the inner edge of its flat part.
"""

from itertools import pairwise

import numpy as np
import pytest
from scipy.integrate import quad

from probsoil.ground.load_stress import embankment_influence

# flat half-width B1/z: slope width B2/z: share of the full pressure, one half of the embankment
SLOPE = (0.1, 0.5, 1.0, 2.0, 3.0, 5.0, 10.0)
HALF = {
    0.0: (0.03173, 0.14758, 0.25000, 0.35242, 0.39758, 0.43717, 0.46827),
    0.2: (0.15265, 0.24703, 0.32206, 0.39434, 0.42631, 0.45459, 0.47701),
    0.5: (0.29421, 0.35242, 0.39546, 0.43671, 0.45539, 0.47227, 0.48589),
    1.0: (0.41661, 0.43850, 0.45483, 0.47138, 0.47936, 0.48692, 0.49326),
    2.0: (0.48095, 0.48474, 0.48792, 0.49163, 0.49367, 0.49580, 0.49776),
    3.0: (0.49338, 0.49440, 0.49533, 0.49654, 0.49728, 0.49812, 0.49896),
}
SECTIONS = [(30.0, 10.0), (30.0, 0.0), (12.0, 11.9), (8.0, 8.0), (60.0, 2.0)]  # base and top widths
OFFSETS = (0.0, 1.0, 3.99, 5.0, 7.5, 14.9, 15.0, 21.0, 60.0)
DEPTHS = (0.05, 0.4, 2.0, 9.0, 40.0)


def pressure(x, base, top):
    """Share of the full pressure that acts on the ground at x from the centreline."""
    if abs(x) >= base / 2.0:
        return 0.0
    return 1.0 if abs(x) <= top / 2.0 else (base / 2.0 - abs(x)) / (base / 2.0 - top / 2.0)


def by_line_loads(depth, offset, base, top):
    def share(x):
        return pressure(x, base, top) * 2.0 * depth**3 / (np.pi * ((x - offset) ** 2 + depth**2) ** 2)

    breaks = {-base / 2.0, -top / 2.0, top / 2.0, base / 2.0}
    near = {offset + step * depth for step in (-30, -6, -2, -0.5, 0.5, 2, 6, 30)}
    edges = sorted(breaks | {x for x in near if abs(x) < base / 2.0})
    return sum(quad(share, a, b, epsabs=1e-12)[0] for a, b in pairwise(edges))


@pytest.mark.parametrize("flat", HALF)
def test_half_embankment_table(flat):
    base, top = 2.0 * (flat + np.array(SLOPE)), 2.0 * flat
    both = [float(embankment_influence(1.0, 0.0, base_width=b, top_width=top)) for b in base]
    assert np.array(both) / 2.0 == pytest.approx(HALF[flat], abs=5.1e-6)  # half of the last digit


@pytest.mark.parametrize(("base", "top"), SECTIONS)
def test_equals_the_integral_of_line_loads(base, top):
    for offset in OFFSETS:
        computed = embankment_influence(np.array(DEPTHS), offset, base_width=base, top_width=top)
        expected = [by_line_loads(depth, offset, base, top) for depth in DEPTHS]
        assert computed == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize(("base", "top"), SECTIONS)
def test_at_ground_level_it_is_the_pressure_itself(base, top):
    # an edge of a vertical side is the one point without a limit that is the pressure
    for offset in (x for x in OFFSETS if not (base == top and x == base / 2.0)):
        at_zero = embankment_influence(0.0, offset, base_width=base, top_width=top)
        close_by = embankment_influence(1e-7, offset, base_width=base, top_width=top)
        assert float(at_zero) == pytest.approx(pressure(offset, base, top), abs=1e-12)
        assert float(close_by) == pytest.approx(pressure(offset, base, top), abs=1e-4)


def test_edge_of_a_vertical_side_carries_half():
    for depth in (0.0, 1e-9, 1e-3):
        at_edge = embankment_influence(depth, 4.0, base_width=8.0, top_width=8.0)
        assert float(at_edge) == pytest.approx(0.5, abs=1e-6)


def test_far_down_only_the_total_counts():
    depth, base, top = 5000.0, 30.0, 10.0
    line_load = 0.5 * (base + top) * 2.0 / (np.pi * depth)
    assert float(embankment_influence(depth, 0.0, base_width=base, top_width=top)) == pytest.approx(
        line_load, rel=1e-4
    )


@pytest.mark.parametrize("slope", SLOPE)
@pytest.mark.parametrize("flat", [0.2, 0.5, 1.0, 2.0, 3.0])
def test_station_below_the_edge_of_the_top(flat, slope):
    """From the table: a slope alone on one side, the whole top and a slope on the other; five digits each."""
    expected = HALF[0.0][SLOPE.index(slope)] + HALF[flat][SLOPE.index(slope)]
    found = embankment_influence(1.0, 0.5 * flat, base_width=flat + 2.0 * slope, top_width=flat)
    assert float(found) == pytest.approx(expected, abs=1.05e-5)
