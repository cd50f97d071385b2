"""Load through the stages, granular settlement, submergence: by hand."""

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage

from probsoil.errors import ParameterError
from probsoil.ground.applied_load import applied_load, relief_by_water, stress_at
from probsoil.ground.load_stress import embankment_influence
from probsoil.ground.response import ground_state

WATER = 9.81
AREA_FILL = '[load]\nshape = "area"\nfill_unit_weight = 20\nsubmergence = {submergence}'
EMBANKMENT = (
    '[load]\nshape = "embankment"\ncrest_width = 10\nside_slope = 2\nfill_unit_weight = 19\n'
    "fill_phi = 33\nsubmergence = false"
)
STAGES = [
    stage("first", 0.0, 0.5, height=1.0),
    stage("second", 2.0, 2.5, height=2.0),
    stage("off", 5, 6, height=-1.0),
]
TIMES = (0.0, 0.25, 0.5, 1.0, 2.25, 4.0, 5.5, 20.0)
HEIGHTS = (0.0, 0.5, 1.0, 1.0, 2.0, 3.0, 2.5, 2.0)
KNOTS, AT_KNOTS = (0.0, 0.5, 2.0, 2.5, 5.0, 6.0), (0.0, 1.0, 1.0, 3.0, 3.0, 2.0)


def area_case(*layers, submergence="false", stages=STAGES, **keys):
    return scenario(list(layers), stages, load=AREA_FILL.format(submergence=submergence), **keys)


def test_wide_fill_presses_alike_at_every_depth_and_follows_the_stages():
    case = area_case(clay("clay", 4.0))
    site, depth = site_model(case), np.array([[0.5, 3.0]])
    load = applied_load(site, central(case), depth)
    for time, height in zip(TIMES, HEIGHTS, strict=True):
        assert site.fill_height(time) == pytest.approx(height, abs=1e-12)
        assert stress_at(site, load, time) == pytest.approx(np.full((1, 2), 20.0 * height), abs=1e-10)


def test_pressure_and_fill_add_up():
    stages = [stage("fill", 0.0, 0.5, height=1.0), stage("tank", 1.0, 2.0, pressure=35)]
    case = area_case(clay("clay", 4.0), stages=stages)
    site = site_model(case)
    load = applied_load(site, central(case), np.array([[1.0]]))
    assert float(stress_at(site, load, 1.5)[0, 0]) == pytest.approx(20.0 + 17.5, rel=1e-12)


def test_embankment_spreads_with_the_base_that_stays():
    case = scenario([clay("clay", 8.0)], STAGES, load=EMBANKMENT)
    site, depth = site_model(case), np.array([[0.5, 3.0, 8.0]])
    assert site.embankment.base_width == pytest.approx(10.0 + 2 * 2 * 3.0)
    load = applied_load(site, central(case), depth)
    for time, height in ((0.5, 1.0), (2.5, 3.0), (6.0, 2.0)):
        share = embankment_influence(depth, 0.0, base_width=22.0, top_width=22.0 - 4.0 * height)
        assert stress_at(site, load, time) == pytest.approx(19.0 * height * share, rel=1e-12)
    # middle of the slope at full height: 22/2 - 2 x 3/2 from the centreline
    slope = embankment_influence(depth, 8.0, base_width=22.0, top_width=10.0)
    centre = embankment_influence(depth, 0.0, base_width=22.0, top_width=10.0)
    assert load.slope_share == pytest.approx(slope / centre, rel=1e-12)


def test_stress_in_the_ground_follows_the_load_where_water_leaves_at_once():
    case = area_case(
        clay("silt", 2.0, lam=0.05, permeability="{ k = 1e-5, ck = 2 }"), base="drained", water_table=1.0
    )
    state = ground_state(site_model(case), central(case))
    before = state.ground.points.stress
    for slot, time in enumerate(state.response.record):
        height = np.interp(time, KNOTS, AT_KNOTS)
        assert state.consolidation.stress[:, slot] == pytest.approx(before + 20.0 * height, rel=1e-3)


def test_granular_layers_settle_at_once_and_come_back():
    layers = [sand("upper", 2.0, constrained_modulus='"20 MPa"'), clay("clay", 3.0), sand("lower", 4.0)]
    case = area_case(*layers)
    site = site_model(case)
    state = ground_state(site, central(case))
    by_hand = [20.0 * height * (2.0 / 20e3 + 4.0 / 40e3) for height in np.interp(site.times, KNOTS, AT_KNOTS)]
    assert state.granular_settlement[0] == pytest.approx(by_hand, abs=1e-12)
    assert state.response.settlement == pytest.approx(
        state.consolidation.settlement + state.granular_settlement
    )


def sinking(submergence, water_table=0.3):
    case = area_case(
        sand("bed", 0.5),
        clay("soft", 5.0, preconsolidation="{ pop = 5 }", permeability="{ cv = 20 }"),
        submergence=submergence,
        stages=[stage("fill", 0, 0.2, height=3.0)],
        water_table=water_table,
        base="drained",
        horizon=40,
    )
    return ground_state(site_model(case), central(case))


def test_submergence_lightens_what_has_sunk():
    """The ground above the water table and then the fill sink into water that keeps its level."""
    state, dry = sinking("true"), sinking("false")
    settled = float(state.consolidation.settlement[0, -1])
    assert 0.4 < settled < float(dry.consolidation.settlement[0, -1])  # past the 0.3 m of dry ground
    in_situ = state.ground.points.stress[:, state.ground.clay]
    gained = state.consolidation.stress[0, -1] - in_situ[0]
    # once the water has gone; the load fell while the stress came near to it: allow a thousandth of the load
    assert gained == pytest.approx(60.0 - WATER * settled, abs=0.06)
    assert dry.consolidation.stress[0, -1] - in_situ[0] == pytest.approx(60.0, abs=0.06)


def test_relief_stops_where_all_has_sunk_and_never_exceeds_the_load():
    case = area_case(clay("clay", 4.0), submergence="true", stages=STAGES[:1], water_table=0.3)
    site = site_model(case)
    n = 4
    values = central(case) | {"load.fill_unit_weight": np.array([20.0, 20.0, 20.0, 5.0])}
    load = applied_load(site, values, np.ones((n, 1)))
    relief = relief_by_water(site, load, 0.5, np.array([-0.1, 0.2, 9.0, 9.0]))
    # 1 m of fill on 0.3 m of dry ground; the light fill of the last one weighs 5 kPa
    assert relief[:, 0] == pytest.approx([0.0, WATER * 0.2, WATER * 1.3, 5.0], rel=1e-12)


def test_pressure_without_fill_never_loses_weight():
    stages = [stage("tank", 0.0, 0.5, pressure=60)]
    layers = [clay("soft", 6.0)]
    loads = ('[load]\nshape = "area"\nsubmergence = true', '[load]\nshape = "area"\nsubmergence = false')
    settled = []
    for load in loads:
        case = scenario(layers, stages, load=load)
        settled.append(ground_state(site_model(case), central(case)).response.settlement)
    assert np.array_equal(*settled)


@pytest.mark.parametrize(
    ("base", "top", "message"),
    [
        (0.0, 0.0, "base 0 m, top 0 m"),
        (5.0, 6.0, "widths must be base >= top >= 0 with base > 0; got base 5 m, top 6 m"),
        (5.0, -1.0, "top -1 m"),
        (float("nan"), 1.0, "base nan m"),
    ],
)
def test_impossible_widths_are_refused(base, top, message):
    with pytest.raises(ParameterError, match=message):
        embankment_influence(1.0, 0.0, base_width=base, top_width=top)


@pytest.mark.parametrize(("depth", "offset", "name"), [(-1.0, 0.0, "depth"), (1.0, np.inf, "offset")])
def test_points_above_ground_or_nowhere_are_refused(depth, offset, name):
    with pytest.raises(ParameterError, match=f"^{name} must be finite"):
        embankment_influence(depth, offset, base_width=10.0, top_width=5.0)
