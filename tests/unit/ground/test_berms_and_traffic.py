"""Berms beside an embankment and traffic on it: load, strength zones, safety, and when each counts."""

from dataclasses import replace

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage

from probsoil.ground.embankment import Embankment
from probsoil.ground.limit_quantities import limit_quantities
from probsoil.ground.load_stress import trapezia_influence
from probsoil.ground.response import ground_state, screened

SHAPE = Embankment(crest_width=10.0, side_slope=2.0, full_height=3.0, berm_width=6.0, berm_height=1.2)
BARE = (
    '[load]\nshape = "embankment"\ncrest_width = 10\nside_slope = 2\nfill_unit_weight = 19\n'
    "fill_phi = 33\nsubmergence = false"
)
BERMS = "\nberm_width = 6\nberm_height = 1.2"
STAGES = [
    stage("low", 0, 0.2, height=0.8),
    stage("high", 1, 1.2, height=2.2),
    stage("off", 6, 6.2, height=-2.4),
]


def built(more="", stages=STAGES, limits=None):
    case = scenario(
        [
            clay("crust", 1.0, lam=0.12, kappa=0.02, void_ratio=1.1, preconsolidation="{ stress = 70 }"),
            clay("soft", 5.0, preconsolidation="{ pop = 8 }", permeability="{ cv = 3 }"),
            sand("sand", 1.0),
        ],
        stages,
        load=BARE + more,
        water_table=0.8,
        horizon=40,
        limits=limits,
    )
    values = {address: np.array([value]) for address, value in central(case).items()}
    site = screened(site_model(case), values, within=0.0)
    return case, site, values, ground_state(site, values)


@pytest.mark.parametrize("height", [0.8, 1.2, 2.0, 3.0])
def test_trapezia_make_up_the_section(height):
    outline = SHAPE.section(height).outline
    area = np.trapezoid(outline[:, 1], outline[:, 0])
    parts = [0.5 * (one.base_width + one.top_width) * one.height for one in SHAPE.trapezia(height)]
    assert sum(parts) == pytest.approx(area, rel=1e-12)
    assert outline[-1, 0] == SHAPE.base_width == pytest.approx(10.0 + 2 * (2 * 3.0 + 6.0))
    assert outline[:, 1].max() == height


@pytest.mark.parametrize("offset", [0.0, 9.0, 14.0, 25.0])
def test_stress_is_the_integral_of_the_line_loads_of_the_section(offset):
    """Flamant: 2 q z^3/(pi (x^2 + z^2)^2) per unit of line load."""
    outline, depth = SHAPE.section(3.0).outline, np.array([0.7, 3.0, 8.0])
    x = np.linspace(0.0, SHAPE.base_width, 200_001)
    load = np.interp(x, outline[:, 0], outline[:, 1])
    away = x - 0.5 * SHAPE.base_width - offset
    expected = [np.trapezoid(load * 2.0 * z**3 / (np.pi * (away**2 + z * z) ** 2), x) for z in depth.tolist()]
    assert trapezia_influence(depth, offset, SHAPE.trapezia(3.0)) == pytest.approx(expected, rel=1e-6)


def test_berms_rise_with_the_fill_and_sink_with_it():
    heights = {0.8: 0.8, 1.2: 1.2, 3.0: 1.2, 0.6: 0.6}
    for height, berm in heights.items():
        corners = SHAPE.section(height).corners
        assert corners[1, 1] == berm
        assert len(corners) == (4 if height > berm else 2)


def test_berms_add_stress_below_the_centreline_and_gain_strength_under_themselves():
    _, site, _, state = built(BERMS)
    _, _, _, bare = built()
    highest = int(np.searchsorted(site.knots, 1.2))
    assert (state.ground.load.stress[highest] > bare.ground.load.stress[highest]).all()
    assert state.strength.shape[2] == 4
    assert bare.strength.shape[2] == 3
    clay_cells = state.ground.clay
    slot = int(np.searchsorted(site.record, 6.0 + 0.2))
    beyond, slope, crest, berm = state.strength[slot, 0][:, clay_cells]
    assert (berm >= beyond * (1.0 - 1e-12)).all()
    assert (berm <= slope * (1.0 + 1e-12)).all()
    assert (slope <= crest * (1.0 + 1e-12)).all()
    assert (berm > 1.02 * beyond).any()
    # in proportion to the elastic stress half-way under berm and slope
    share = state.ground.load.berm_share[0]
    depth = state.ground.points.depth[0]
    middle = 0.5 * SHAPE.base_width - 0.5 * (6.0 + 2.0 * 1.2)
    parts = SHAPE.trapezia(3.0)
    expected = trapezia_influence(depth, middle, parts) / trapezia_influence(depth, 0.0, parts)
    assert share == pytest.approx(expected, rel=1e-12)


def test_berms_help_where_the_fill_stands_above_them():
    _, site, _, state = built(BERMS)
    _, _, _, bare = built()
    low, high, _ = range(site.slip_times.size)
    assert state.response.slip[0, high] > 1.1 * bare.response.slip[0, high]
    # while the fill is no higher than the berms it is only a wider fill
    assert state.response.slip[0, low] == pytest.approx(bare.response.slip[0, low], rel=0.01)


def test_traffic_drives_slips_from_the_top_on_and_settles_nothing():
    _, site, _, state = built("\ntraffic = 15")
    _, _, _, bare = built()
    assert site.traffic_from == 1.2
    low, high, off = range(site.slip_times.size)
    assert np.array_equal(state.response.settlement, bare.response.settlement)
    assert np.array_equal(state.strength, bare.strength)
    assert state.response.slip[0, low] == bare.response.slip[0, low]
    assert state.response.slip[0, high] < 0.97 * bare.response.slip[0, high]
    assert state.response.slip[0, off] < bare.response.slip[0, off]


def test_traffic_from_a_time_of_its_own_is_looked_at_then():
    limit = '[[limits]]\nname = "slip"\nquantity = "slip_safety"\nnot_less_than = 1'
    case, site, values, state = built("\ntraffic = 30\ntraffic_from = 3", limits=[limit])
    assert site.slip_times.tolist() == [0.2, 1.2, 3.0, 6.2]
    bare = built("", limits=[limit])[3].response.slip[0]
    slip = state.response.slip[0]
    assert slip[:2].tolist() == bare[:2].tolist()
    assert slip[3] < bare[2]
    # the least over the stage ends looks at the time at which traffic begins, too
    made = replace(state.response, slip=np.array([[2.0, 1.5, 1.1, 1.8]]))
    assert limit_quantities(site, case.limits, made, values).tolist() == [[1.1]]


def test_circles_in_the_fill_only_where_it_may_have_cohesion():
    assert not any(layout.within_fill for layout in built()[1].layouts)
    assert all(layout.within_fill for layout in built("\nfill_cohesion = 4")[1].layouts)
