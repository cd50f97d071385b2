"""Further loads: superposed stress, and what it does to settlement, strength and safety.

Superposition is exact, so it is held to rounding (1e-9; 1e-6 where a load is far away).
"""

from itertools import permutations

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.ground.applied_load import applied_load
from probsoil.ground.embankment import Embankment
from probsoil.ground.load_stress import circle_influence, strip_influence, trapezia_influence
from probsoil.ground.response import ground_state
from probsoil.ground.stability import heavier_by_added_fill

DEPTHS = np.array([[0.4, 1.0, 2.5, 6.0]])
GROUND = (clay("crust", 1.0, preconsolidation="{ stress = 60 }"), clay("soft", 5.0), sand("sand", 1.0))


def load(shape, *, wet="false", **keys):
    lines = [f'shape = "{shape}"', *(f"{key} = {value}" for key, value in keys.items())]
    return "\n".join(["[load]", *lines, f"submergence = {wet}"])


def further(name, shape, **keys):
    lines = [f'name = "{name}"', f'shape = "{shape}"', *(f"{key} = {value}" for key, value in keys.items())]
    return "\n".join(["[[further_loads]]", *lines])


def on(name, *args, **keys):
    return f'{stage(*args, **keys)}\nload = "{name}"'


def built(main, others=(), stages=(), layers=GROUND, **keys):
    return scenario(list(layers), list(stages), load="\n".join([main, *others]), base="drained", **keys)


def added(case, depth=DEPTHS):
    return applied_load(site_model(case), central(case), depth)


def settled(case):
    state = ground_state(site_model(case), central(case))
    assert state.response.converged.all()
    return state


BUILT = stage("built", 0.0, 0.5, pressure=50)


@pytest.mark.parametrize("wet", ["false", "true"])
def test_two_half_strips_side_by_side_are_one(wet):
    whole = built(load("strip", width=16, at=0, wet=wet), stages=[BUILT])
    halves = built(
        load("strip", width=8, at=4, wet=wet),
        [further("other half", "strip", width=8, x=8)],
        [BUILT, on("other half", "also", 0.0, 0.5, pressure=50)],
    )
    assert added(halves).stress == pytest.approx(added(whole).stress, rel=1e-9)
    one, two = settled(whole).response, settled(halves).response
    # iteration stops at 1e-4 of a stress in one step, a millionth of the settlement; either may stop earlier
    assert two.settlement == pytest.approx(one.settlement, rel=1e-6)
    assert two.degree_at_record == pytest.approx(one.degree_at_record, rel=1e-6)


def test_four_corners_that_meet_give_four_times_the_printed_value():
    """Below the corner of a square as deep as it is wide Fadum's chart and table give 0.175 (0.1752)."""
    others = [
        further(f"quarter {index}", "rectangle", width=2, length=2, x=x, y=y)
        for index, (x, y) in enumerate([(2, 0), (0, 2), (2, 2)])
    ]
    stages = [BUILT, *(on(f"quarter {index}", f"s{index}", 0.0, 0.5, pressure=50) for index in range(3))]
    case = built(load("rectangle", width=2, length=2, at="[1.0, 1.0]"), others, stages)
    found = added(case, np.array([[2.0]]))
    assert found.stress[-1, 0, 0] / 50.0 == pytest.approx(4 * 0.1752, abs=4 * 0.00005)
    whole = built(load("rectangle", width=4, length=4, at="[0.0, 0.0]"), stages=[BUILT])
    assert added(case).stress == pytest.approx(added(whole).stress, rel=1e-9)


def test_a_very_large_further_load_is_a_wide_one():
    small = load("circle", diameter=4)
    stages = [BUILT, on("around", "site fill", 1.0, 2.0, height=1.5)]
    wide = built(small, [further("around", "area", fill_unit_weight=19)], stages)
    keys = {"width": 1000, "length": 1000, "x": 0, "fill_unit_weight": 19}
    large = built(small, [further("around", "rectangle", **keys)], stages)
    assert added(large).stress == pytest.approx(added(wide).stress, rel=1e-5)
    assert added(wide).further[0, -1] == pytest.approx(np.full((1, 4), 28.5), rel=1e-12)


@pytest.mark.parametrize("height", [0.7, 2.0])
def test_each_shape_adds_its_stress_from_its_own_place(height):
    bank = further("bank", "embankment", crest_width=6, side_slope=2, fill_unit_weight=18, x=-21)
    tank = further("tank", "circle", diameter=9, depth=0.5, x=12, y=5)
    wall = further("wall", "strip", width=2, x=7)
    stages = [
        BUILT,
        on("bank", "bank", 1.0, 2.0, height=height),
        on("tank", "tank", 1.5, 2.5, pressure=70),
        on("wall", "wall", 3.0, 3.5, pressure=90),
    ]
    case = built(load("rectangle", width=6, length=3, at="[2.0, -1.0]"), [bank, tank, wall], stages)
    site = site_model(case)
    assert site.point == (2.0, -1.0)  # across and along as given, though the sides are put in order
    found = added(case).further[:, -1]
    shape = Embankment(crest_width=6.0, side_slope=2.0, full_height=height)
    assert found[0] == pytest.approx(18.0 * trapezia_influence(DEPTHS, 23.0, shape.trapezia(height)))
    below = np.maximum(DEPTHS - 0.5, 0.0)
    expected = 70.0 * circle_influence(below, np.hypot(10.0, 6.0), diameter=9.0) * (DEPTHS > 0.5)
    assert found[1] == pytest.approx(expected, rel=1e-12)
    assert found[2] == pytest.approx(90.0 * strip_influence(DEPTHS, -5.0, width=2.0), rel=1e-12)
    assert site.knots.tolist() == [0.0, 0.5, 1.0, 1.5, 2.0, 2.5, 3.0, 3.5, 30.0]
    assert site.last_change == 3.5
    assert [(one.name, one.start, one.end) for one in site.changes] == [
        ("built", 0.0, 0.5),
        ("bank and tank", 1.0, 2.5),
        ("wall", 3.0, 3.5),
    ]


def test_the_order_in_which_loads_are_listed_does_not_matter():
    texts = {
        "a": further("a", "circle", diameter=8, x=9, y=3),
        "b": further("b", "strip", width=3, x=-6),
        "c": further("c", "area", fill_unit_weight=18),
    }
    stages = [
        BUILT,
        on("a", "sa", 0.2, 0.9, pressure=60),
        on("b", "sb", 0.3, 0.5, pressure=30),
        on("c", "sc", 1.0, 1.2, height=0.6),
    ]
    main = load("rectangle", width=5, length=5)
    found = [settled(built(main, [texts[k] for k in order], stages)) for order in permutations("abc")]
    for state in found[1:]:
        assert state.response.settlement == pytest.approx(found[0].response.settlement, rel=1e-9)
        assert state.response.bearing == pytest.approx(found[0].response.bearing, rel=1e-9)


def test_a_load_far_away_changes_nothing():
    main = load("circle", diameter=6)
    stages = [BUILT, on("far", "far", 0.0, 0.5, pressure=100)]
    alone = settled(built(main, stages=[BUILT])).response
    beside = settled(built(main, [further("far", "circle", diameter=20, x=1500, y=800)], stages)).response
    assert beside.settlement == pytest.approx(alone.settlement, rel=1e-6)
    assert beside.bearing == pytest.approx(alone.bearing, rel=1e-6)


@settings(max_examples=8, deadline=None, derandomize=True)
@given(x=st.floats(-15.0, 15.0), more=st.floats(1.0, 60.0))
def test_settlement_and_strength_grow_with_a_further_load(x, more):
    main = load("strip", width=4)
    first, second = (
        settled(
            built(
                main,
                [further("beside", "strip", width=5, x=x)],
                [on("beside", "beside", 0.0, 0.3, pressure=pressure), stage("own", 4.0, 4.2, pressure=30)],
            )
        )
        for pressure in (20.0, 20.0 + more)
    )
    assert second.response.settlement[0, -1] > first.response.settlement[0, -1]
    # at the end: while water still leaves, a greater load slows it down in the middle of a layer, where
    # strength and with it bearing may then be a little less; 1e-4 is where the iteration stops
    assert (second.strength[-1] >= (1.0 - 1e-4) * first.strength[-1]).all()


def test_only_the_load_itself_presses_on_its_base_and_drives_a_slip():
    bank = load("embankment", crest_width=8, side_slope=2, fill_unit_weight=19, fill_phi=33)
    lift = stage("lift", 25.0, 25.2, height=2.0)  # when the clay has consolidated under what is beside
    near, far = (
        further("beside", "embankment", crest_width=8, side_slope=2, fill_unit_weight=19, x=x)
        for x in (30, 2000)
    )
    both, alone = (
        built(bank, [one], [on("beside", "before", 0.0, 0.2, height=3.0), lift]) for one in (near, far)
    )
    site = site_model(both)
    assert [site.fill_height(25.2), site.fill_height(25.2, "beside"), site.greatest_fill_height(25.2)] == [
        2,
        3,
        3,
    ]
    assert site.slip_times.tolist() == [25.2]
    assert site.embankment == site_model(alone).embankment
    safer, first = settled(both).response.slip[0, 0], settled(alone).response.slip[0, 0]
    assert first < safer < 1.2 * first


def test_level_is_held_against_the_settlement_by_every_load():
    bank = load("embankment", crest_width=8, side_slope=2, fill_unit_weight=19, fill_phi=33)
    held = bank + "\nhold_level_until = 30"
    stages = [stage("lift", 0.0, 0.2, height=1.0), on("site fill", "site fill", 1.0, 1.2, height=0.5)]
    state = settled(built(held, [further("site fill", "area", fill_unit_weight=18)], stages))
    assert state.response.fill_added[0] == pytest.approx(state.response.settlement[0], abs=1e-12)
    site = site_model(built(held, [further("site fill", "area", fill_unit_weight=18)], stages))
    ratio = heavier_by_added_fill(site, state.ground.load, 30.0)
    assert ratio == pytest.approx(1.0 + state.response.fill_added[0, -1], rel=1e-12)


def test_a_realisation_alone_is_the_same_as_in_company():
    case = built(
        load("strip", width=4, wet="true"),
        [further("beside", "embankment", crest_width=4, side_slope=2, fill_unit_weight=19, x=9)],
        [BUILT, on("beside", "beside", 0.2, 0.7, height=1.5)],
    )
    site, n = site_model(case), 20
    values = {key: np.full(n, value) for key, value in central(case).items()}
    values["further_loads.beside.fill_unit_weight"] = np.linspace(15.0, 22.0, n)
    together = ground_state(site, values).response
    assert (np.diff(together.settlement[:, -1]) > 0.0).all()
    alone = ground_state(site, {key: value[7:8] for key, value in values.items()}).response
    np.testing.assert_array_equal(alone.settlement[0], together.settlement[7])
    np.testing.assert_array_equal(alone.bearing[0], together.bearing[7])


def test_clay_creeps_alike_under_two_halves_laid_together_and_one_whole():
    ground = [clay("clay", 1.0, C_alpha_ratio=0.05, permeability="{ cv = 20 }")]
    whole = built(load("strip", width=16, at=0), stages=[BUILT], layers=ground)
    halves = built(
        load("strip", width=8, at=4),
        [further("other half", "strip", width=8, x=8)],
        [BUILT, on("other half", "also", 0.0, 0.5, pressure=50)],
        layers=ground,
    )
    one, two = settled(whole).response, settled(halves).response
    assert one.secondary[0, -1] > 0.01
    assert two.secondary == pytest.approx(one.secondary, rel=1e-6)


def test_stress_in_thick_granular_points_is_a_mean_for_further_loads_too():
    """A quarter of a sand layer is one point: two halves must give what the whole does there as well."""
    depth, thickness = np.array([[1.0, 2.5, 4.0]]), np.array([[0.2, 1.5, 1.5]])
    thick = np.array([False, True, True])
    whole = built(load("strip", width=6, at=0), stages=[BUILT])
    halves = built(
        load("strip", width=3, at=1.5),
        [further("other half", "strip", width=3, x=3)],
        [BUILT, on("other half", "also", 0.0, 0.5, pressure=50)],
    )
    keys = {"depth": depth, "thickness": thickness, "thick": thick}
    one, two = (applied_load(site_model(case), central(case), **keys) for case in (whole, halves))
    assert two.stress == pytest.approx(one.stress, rel=1e-9)
    fine = np.linspace(1.75, 3.25, 2001)[None]
    mean = np.trapezoid(applied_load(site_model(halves), central(halves), fine).stress[-1, 0], fine[0]) / 1.5
    assert two.stress[-1, 0, 1] == pytest.approx(mean, rel=1e-6)
