"""Soil dug out for a foundation: heave, reloading, water, bearing.

Tolerances, fixed before the first run: 0.5 % of the settlement or heave by hand on the default grid; a weight
put back leaves nothing to 1e-6 m at the end of 60 years on clay that drains within one.
"""

import numpy as np
import pytest
from ground_cases import central, clay, refined, sand, scenario, site_model, stage
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.ground.applied_load import applied_load
from probsoil.ground.load_stress import rectangle_influence
from probsoil.ground.profile import LEAST_STRESS
from probsoil.ground.response import ground_state
from probsoil.ground.squeezing import squeezing_at

WATER = 9.81
PAD = '[load]\nshape = "rectangle"\nwidth = 20\nlength = 30\ndepth = {depth}\nsubmergence = {wet}\n'
FAST = "{ cv = 40 }"
WEIGHT = 16.0


def dig(name, start, end, depth):
    return f'[[stages]]\nname = "{name}"\nstart = {start}\nend = {end}\nexcavate = {depth}'


def built(*amounts, depth=2.0, layers=None, water_table=1.0, wet="false", digs=None, horizon=60.0):
    digs = [dig("dig", 0.0, 0.2, depth)] if digs is None else digs
    later = [stage(f"s{place}", 5.0 + place, 5.5 + place, pressure=one) for place, one in enumerate(amounts)]
    return scenario(
        layers or [clay("clay", 8.0, permeability=FAST)],
        [*digs, *later],
        load=PAD.format(depth=depth, wet=wet),
        water_table=water_table,
        base="drained",
        horizon=horizon,
    )


def solved(case, refine=1):
    site = refined(case, refine)
    state = ground_state(site, central(case))
    assert state.response.converged.all()
    return site, state


def settlement_at(site, state, time):
    return float(state.response.settlement[0, np.searchsorted(site.times, time)])


@pytest.mark.parametrize("water_table", [0.0, 1.0, 3.0])
def test_stress_below_a_bare_base_is_that_of_the_soil_between(water_table):
    """Weight dug out, less the water that takes its place, spread over the plan."""
    case = built(60.0, water_table=water_table)
    site = site_model(case)
    depth = np.array([[0.5, 1.9, 2.5, 4.0, 7.5]])
    stress = applied_load(site, central(case), depth).stress
    removed = WEIGHT * 2.0 - WATER * max(2.0 - water_table, 0.0)
    below = np.maximum(depth - 2.0, 0.0)
    share = rectangle_influence(below, 0.0, 0.0, width=20.0, length=30.0) * (depth > 2.0)
    knot = {time: place for place, time in enumerate(site.knots.tolist())}
    assert stress[knot[0.2]] == pytest.approx(-removed * share, rel=1e-12, abs=1e-12)
    assert stress[knot[5.5]] == pytest.approx((60.0 - WEIGHT * 2.0) * share, rel=1e-12, abs=1e-12)


def test_heave_and_recompression_by_hand():
    """Normally consolidated clay: kappa both ways, lambda beyond what it has carried."""
    case = built(60.0)
    site, state = solved(case)
    thin = 6.0 / 20_000
    depth = 2.0 + thin * (np.arange(20_000) + 0.5)
    before = WEIGHT * depth - WATER * (depth - 1.0)
    share = rectangle_influence(depth - 2.0, 0.0, 0.0, width=20.0, length=30.0)
    left = np.maximum(before - (WEIGHT * 2.0 - WATER) * share, LEAST_STRESS)
    heave = (thin * 0.04 / 2.8 * np.log(before / left)).sum()
    assert -settlement_at(site, state, 5.0) == pytest.approx(heave, rel=0.005)
    settled = (thin * 0.3 / 2.8 * np.log(1.0 + (60.0 - WEIGHT * 2.0) * share / before)).sum()
    assert settlement_at(site, state, 60.0) == pytest.approx(settled, rel=0.005)


@settings(max_examples=8, deadline=None, derandomize=True)
@given(
    depth=st.floats(0.3, 3.0), water_table=st.floats(0.0, 4.0), pop=st.floats(0.0, 40.0), top=st.booleans()
)
def test_the_weight_dug_out_put_back_leaves_nothing(depth, water_table, pop, top):
    layers = [clay("clay", 8.0, permeability=FAST, preconsolidation=f"{{ pop = {pop} }}")]
    if top:
        layers.insert(0, sand("sand", 1.0, unit_weight=WEIGHT))
    site, state = solved(built(WEIGHT * depth, depth=depth, layers=layers, water_table=water_table))
    heave = settlement_at(site, state, 5.0)
    assert heave < 0.0
    assert abs(settlement_at(site, state, 60.0)) < 1e-6
    assert state.response.settlement[0].max() < -0.005 * heave  # what the default steps may be wrong by
    _, finer = solved(built(WEIGHT * depth, depth=depth, layers=layers, water_table=water_table), refine=4)
    assert finer.response.settlement[0].max() < 1e-6


def test_in_the_end_it_is_the_net_pressure_that_counts():
    """As without digging at all, where all of the reloading is on kappa: the clay has carried it before."""
    dug = solved(built(70.0, layers=[clay("clay", 8.0, permeability=FAST)]))[1]
    net = solved(built(70.0 - 2.0 * WEIGHT, digs=[]))[1]
    assert dug.response.settlement[0, -1] == pytest.approx(net.response.settlement[0, -1], rel=0.005)
    assert dug.strength[-1] == pytest.approx(net.strength[-1], rel=0.005)


def test_a_structure_takes_the_place_of_the_water_first():
    pressures = (4.0, 9.81, 20.0)
    cases = [built(pressure, water_table=1.0) for pressure in pressures]
    at_end = [
        applied_load(site_model(case), central(case), np.array([[4.0]])).stress[-1, 0, 0] for case in cases
    ]
    assert at_end[0] == pytest.approx(at_end[1], rel=1e-12)
    share = float(rectangle_influence(2.0, 0.0, 0.0, width=20.0, length=30.0))
    assert at_end[2] - at_end[1] == pytest.approx((20.0 - 9.81) * share, rel=1e-12)


def test_settlement_grows_with_what_is_placed():
    last = [
        solved(built(pressure))[1].response.settlement[0, -1] for pressure in (5.0, 20.0, 32.0, 50.0, 90.0)
    ]
    assert (np.diff(last) > 0.0).all()
    assert last[1] < 0.0 < last[3]


def test_digging_in_two_steps_ends_where_one_does():
    one = solved(built(60.0))
    two = solved(built(60.0, digs=[dig("half", 0.0, 0.2, 0.8), dig("rest", 1.0, 1.1, 1.2)]))
    assert settlement_at(*two, 5.0) == pytest.approx(settlement_at(*one, 5.0), rel=0.005)
    assert settlement_at(*two, 60.0) == pytest.approx(settlement_at(*one, 60.0), rel=0.005)
    assert two[0].dug(0.2) == pytest.approx(0.8)
    assert two[0].dug(1.05) == pytest.approx(1.4)


def test_nothing_fails_in_bearing_under_less_than_was_dug_out():
    site, state = solved(built(20.0, 80.0))
    first, second = state.response.bearing[0]
    assert np.isinf(first)
    assert 0.0 < second < 10.0
    assert squeezing_at(site, central(built(20.0, 80.0)), state.ground, state.strength, 5.5) is None


def test_strength_falls_while_the_pit_stands_open():
    site, state = solved(built(60.0))
    edge = state.strength[:, 0, 1][:, state.ground.points.depth[0] > 2.5]
    before = state.strength_before[0, state.ground.points.depth[0] > 2.5]
    dug = np.searchsorted(site.record, 0.2)
    assert (edge[dug] <= before + 1e-9).all()
    assert edge[dug].min() < 0.95 * before.max()


def test_stress_is_nowhere_below_the_least_and_finer_steps_agree():
    coarse, fine = solved(built(60.0)), solved(built(60.0), refine=4)
    assert fine[1].consolidation.stress.min() >= LEAST_STRESS * (1.0 - 1e-4)
    common = [0.2, 5.0, 5.5, 60.0]
    first = [settlement_at(*coarse, time) for time in common]
    second = [settlement_at(*fine, time) for time in common]
    assert first == pytest.approx(second, abs=0.005 * abs(second[-1]))


def test_submergence_takes_nothing_off_a_heave():
    wet, dry = (solved(built(20.0, wet=one)) for one in ("true", "false"))
    assert settlement_at(*wet, 60.0) == pytest.approx(settlement_at(*dry, 60.0), rel=1e-9)


def test_a_realisation_alone_is_the_same_as_in_company():
    case = built(60.0)
    site, n = site_model(case), 20
    values = {key: np.full(n, value) for key, value in central(case).items()}
    values["clay.unit_weight"] = np.linspace(14.0, 18.0, n)
    values["site.water_table"] = np.linspace(0.0, 3.0, n)
    together = ground_state(site, values).response
    alone = ground_state(site, {key: value[7:8] for key, value in values.items()}).response
    np.testing.assert_array_equal(alone.settlement[0], together.settlement[7])
    np.testing.assert_array_equal(alone.bearing[0], together.bearing[7])


def test_clay_does_not_creep_while_the_pit_stands_open():
    layers = [clay("clay", 8.0, permeability=FAST, C_alpha_ratio=0.05)]
    site, state = solved(built(60.0, layers=layers))
    secondary = state.response.secondary[0]
    assert (secondary[site.times <= 5.0] == 0.0).all()
    assert secondary[-1] > 0.0
