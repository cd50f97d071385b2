"""Bearing safety of a foundation: the line of strength, the levels, the numbers by hand."""

from dataclasses import replace

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage

from probsoil.errors import ParameterError
from probsoil.ground.bearing import bearing_at_checks, capacities_at, level_capacity
from probsoil.ground.bearing_capacity import (
    circle_shape_factor,
    depth_factor,
    growth_ratio,
    rectangle_shape_factor,
    strength_growth_factor,
    strip_capacity,
)
from probsoil.ground.bearing_line import circle_sections, crust_parts, strength_at_level, strength_line
from probsoil.ground.foundation import Foundation
from probsoil.ground.limit_quantities import limit_quantities
from probsoil.ground.response import ground_state
from probsoil.ground.squeezing import squeezing_at

PRANDTL = 2.0 + np.pi
BELOW = np.linspace(0.25, 11.75, 24)[None, :]  # slices of half a metre
EDGE = BELOW - 0.25
WIDTH = np.array([4.0])
STRIP = Foundation(shape="strip", width=4.0, length=np.inf, depth=0.0, contact="rough", at=(0.0, 0.0))
QUICK = {  # stiff, and nothing drains in the time looked at
    "permeability": "{ cv = 0.01 }",
    "preconsolidation": "{ pop = 30 }",
}
PRESSURE = [stage("built", 0.0, 0.01, pressure=50)]


def case(load, *layers, stages=PRESSURE, limits=None, **keys):
    text = f"[load]\n{load}\nsubmergence = false"
    return scenario(list(layers), stages, load=text, limits=limits, **keys)


def state_with(given, strength):
    """State of a case whose undrained strength is made a function of depth, the same in all zones."""
    site = site_model(given)
    state = ground_state(site, central(given))
    profile = strength(state.ground.points.depth)[None, :, None, :]
    return site, replace(state, strength=np.broadcast_to(profile, state.strength.shape).copy())


def line(strength, shape=STRIP, below=BELOW):
    found = strength_line(shape, below=below, edge=below - 0.25, strength=strength, width=WIDTH)
    return float(found.start[0]), float(found.growth[0]), float(found.crust_factor[0])


@pytest.mark.parametrize("shape", ["strip", "circle"])
def test_straight_profile_is_found_again(shape):
    plan = replace(STRIP, shape=shape, length=np.inf if shape == "strip" else 4.0)
    assert line(12.0 + 3.0 * BELOW, plan) == pytest.approx((12.0, 3.0, 1.0))
    assert line(np.full(BELOW.shape, 20.0), plan) == (20.0, 0.0, 1.0)


def test_line_from_nothing():
    start, growth, crust = line(3.0 * BELOW)
    assert (start, crust) == (pytest.approx(0.0, abs=2e-5), 1.0)
    assert growth == pytest.approx(3.0, rel=1e-3)
    carried = strip_capacity(start, growth, 4.0)
    assert float(carried) == pytest.approx(3.0 * 4.0 / 4.0, rel=1e-3)


def test_line_bends_over_below_one_width():
    """Strength that stops growing at one width carries what it would if it went on."""
    assert line(12.0 + 3.0 * np.minimum(BELOW, 4.0)) == pytest.approx((12.0, 3.0, 1.0))


def test_line_lies_nowhere_above_the_profile_and_touches_it():
    soft = np.where(BELOW < 1.5, 5.0, 80.0)
    start, growth, _ = line(soft)
    assert growth > 0.0
    gap = soft - (start + growth * np.minimum(BELOW, 4.0))
    assert gap[BELOW <= 8.0].min() == pytest.approx(0.0, abs=1e-9)
    assert start < 5.0
    assert line(np.where(BELOW < 4.0, 5.0, 80.0))[0] == pytest.approx(5.0)


def test_clay_deeper_than_two_widths_does_not_count():
    changed = np.where(BELOW > 8.0, 1.0, 12.0 + 3.0 * BELOW)
    assert line(changed) == line(12.0 + 3.0 * BELOW)


def test_points_above_the_level_do_not_count():
    below = BELOW - 1.0
    strength = np.where(below < 0.0, 1.0, 10.0 + 2.0 * below)
    assert line(strength, below=below) == pytest.approx((10.0, 2.0, 1.0))


def test_level_within_the_last_slice_takes_its_strength():
    strength = np.full((1, 3), 15.0)
    below = np.array([[-1.2, -0.7, -0.2]])
    assert line(strength, below=below) == pytest.approx((15.0, 0.0, 1.0))
    found = strength_line(STRIP, below=below, edge=below - 0.25, strength=strength, width=WIDTH)
    parts = crust_parts(found, below=below[0], edge=below[0] - 0.25, strength=strength[0], width=4.0)
    assert parts.number.tolist() == [2]
    assert parts.excess.tolist() == [0.0]
    assert parts.arc.sum() * 15.0 == pytest.approx(parts.alone)


def test_strength_at_the_level_is_carried_on_where_it_grows():
    below = np.array([[-0.5, 0.5, 1.5]])
    for strength, expected in (([9.0, 10.0, 12.0], 9.0), ([9.0, 10.0, 7.0], 10.0), ([9.0, 1.0, 9.0], 3.2e-5)):
        found = strength_at_level(below, np.array([strength]), WIDTH)
        assert found == pytest.approx([expected])


def test_crust_by_hand():
    """30 kPa to 2 m on 10 kPa, width 4 m: the circle the program calls worst, by its own geometry."""
    strength = np.where(BELOW < 2.0, 30.0, 10.0)
    found = strength_line(STRIP, below=BELOW, edge=EDGE, strength=strength, width=WIDTH)
    parts = crust_parts(found, below=BELOW[0], edge=EDGE[0], strength=strength[0], width=4.0)

    def carried(aside, above):  # the soft clay begins at nine tenths of 2 m, over the width
        radius = np.hypot(1.0 + aside, above)
        whole, deep = np.arccos(above / radius), np.arccos(min((above + 0.45) / radius, 1.0))
        return 2.0 * radius**2 * (30.0 * (whole - deep) + 10.0 * deep) / (aside + 0.5)

    of_one_strength = 10.0 * 4.0 * (1.0 + 0.4288**2) * np.arctan(1.0 / 0.4288)
    assert parts.alone == pytest.approx(of_one_strength)
    least = min(carried(a, y) for a, y in zip(*circle_sections(), strict=True))
    assert found.crust_factor[0] == pytest.approx(least / of_one_strength)
    assert parts.worst_on_line + (parts.excess * parts.arc).sum() == pytest.approx(least)
    assert (parts.line, parts.excess) == (
        pytest.approx(np.full(16, 10.0)),
        pytest.approx(np.where(BELOW[0, :16] < 2.0, 20.0, 0.0)),
    )


@pytest.mark.parametrize(
    ("load", "capacity"),
    [
        ('shape = "strip"\nwidth = 3', PRANDTL * 25.0),
        ('shape = "strip"\nwidth = 3\ndepth = 1.5', PRANDTL * 25.0 * (1.0 + 0.2 * 0.5)),
        ('shape = "rectangle"\nwidth = 3\nlength = 4', PRANDTL * 25.0 * (1.0 + 0.2 * 0.75)),
        ('shape = "rectangle"\nwidth = 2\nlength = 2\ndepth = 6', PRANDTL * 25.0 * 1.2 * 1.5),
        ('shape = "circle"\ndiameter = 3', 6.05 * 25.0),
        ('shape = "circle"\ndiameter = 3\ncontact = "smooth"', 5.69 * 25.0),
    ],
)
def test_one_strength_by_hand(load, capacity):
    site, state = state_with(case(load, clay("clay", 9.0, **QUICK)), lambda z: np.full(z.shape, 25.0))
    factor = bearing_at_checks(site, {}, state.ground, state.strength)
    assert factor == pytest.approx(np.full((1, 1), capacity / 50.0), rel=1e-3)  # 6.05 and 5.69 as rounded


def test_growing_strength_by_hand():
    """Strip 4 m wide at 1 m, strength 10 + 2 z from the surface: c0 = 12, rho B/c0 = 2/3."""
    given = case('shape = "strip"\nwidth = 4\ndepth = 1', clay("clay", 9.0, **QUICK))
    site, state = state_with(given, lambda z: 10.0 + 2.0 * z)
    factor = bearing_at_checks(site, {}, state.ground, state.strength)
    f = float(strength_growth_factor(8.0 / 12.0))
    assert 1.13 < f < 1.20  # between the entries for 1/2 and 1 of the chart
    by_hand = f * (PRANDTL * 12.0 + 0.25 * 8.0) * (1.0 + 0.2 / 4.0) / 50.0
    assert factor[0, 0] == pytest.approx(by_hand, rel=1e-6)


def test_soft_clay_below_a_crust_governs_by_the_spread_load():
    layers = (clay("crust", 1.0, **QUICK), clay("soft", 9.0, **QUICK))
    given = case('shape = "strip"\nwidth = 2', *layers)
    site, state = state_with(given, lambda z: np.where(z < 1.0, 60.0, 8.0))
    (first, upper), (second, lower) = capacities_at(site, {}, state.ground, state.strength, 0.01)
    assert (float(first.depth[0]), float(second.depth[0])) == (0.0, 1.0)
    assert (upper.line.start[0], upper.line.growth[0]) == pytest.approx((8.0, 0.0))
    assert 2.0 < upper.line.crust_factor[0] < 4.0
    assert lower.pressure[0] == pytest.approx(50.0 * 2.0 / 3.0)
    factor = bearing_at_checks(site, {}, state.ground, state.strength)
    assert factor[0, 0] == pytest.approx(PRANDTL * 8.0 / (50.0 * 2.0 / 3.0), rel=1e-6)


def test_thin_soft_clay_on_stiff_is_not_taken_below_its_own_strength():
    layers = (clay("soft", 2.4, **QUICK), clay("stiff", 6.0, **QUICK))
    given = case('shape = "strip"\nwidth = 3', *layers)
    site, state = state_with(given, lambda z: np.where(z < 2.4, 10.0, 200.0))
    (_, found), _ = capacities_at(site, {}, state.ground, state.strength, 0.01)
    assert PRANDTL * 10.0 <= found.strip[0] <= 10.0 * (np.pi + 1.0 + 0.5 * 3.0 / 2.4) * 1.1
    assert found.line.start[0] <= 10.0


def test_granular_pad_spreads_the_load_onto_the_clay():
    given = case('shape = "circle"\ndiameter = 8', sand("pad", 1.0), clay("clay", 9.0, **QUICK))
    site, state = state_with(given, lambda z: np.full(z.shape, 20.0))
    factor = bearing_at_checks(site, {}, state.ground, state.strength)
    nc = PRANDTL * float(circle_shape_factor(0.0))
    assert factor[0, 0] == pytest.approx(nc * 20.0 / (50.0 * (8.0 / 9.0) ** 2), rel=1e-9)


def test_no_clay_below_the_base_cannot_fail():
    given = case('shape = "strip"\nwidth = 2\ndepth = 3.5', clay("clay", 3.0, **QUICK), sand("sand", 4.0))
    state = ground_state(site_model(given), central(given))
    assert np.isinf(state.response.bearing).all()


def test_strength_grows_between_stages_and_unloading_is_looked_at():
    stages = [
        stage("half", 0.0, 0.1, pressure=20),
        stage("all", 3.0, 3.1, pressure=20),
        stage("none", 9.0, 9.1, pressure=-40),
    ]
    loose = clay("clay", 6.0, permeability="{ cv = 20 }", preconsolidation="{ pop = 5 }")
    load = 'shape = "circle"\ndiameter = 30'
    waiting = case(load, loose, stages=stages)
    waits = ground_state(site_model(waiting), central(waiting))
    at_once = [stage("half", 0.0, 0.1, pressure=20), stage("all", 0.1, 0.2, pressure=20)]
    hurried = case(load, loose, stages=at_once)
    quick = ground_state(site_model(hurried), central(hurried))
    assert waits.response.bearing.shape == (1, 2)  # nothing to bear once it is empty
    assert waits.response.bearing[0, 1] > 1.1 * quick.response.bearing[0, 1]


def test_limits_take_the_least_or_one_time_and_the_model_error():
    limits = [
        '[[limits]]\nname = "least"\nquantity = "bearing_safety"\nnot_less_than = 1.5',
        '[[limits]]\nname = "once"\nquantity = "bearing_safety"\nat = 0.05\nnot_less_than = 1.5',
        '[[limits]]\nname = "before"\nquantity = "bearing_safety"\nat = 0\nnot_less_than = 1.5',
    ]
    stages = [stage("half", 0.0, 0.1, pressure=25), stage("all", 0.2, 0.3, pressure=25)]
    given = case('shape = "strip"\nwidth = 2', clay("clay", 6.0, **QUICK), stages=stages, limits=limits)
    site = site_model(given)
    values = central(given) | {"model_error.stability": 0.8}
    response = ground_state(site, values).response
    assert site.bearing_times.tolist() == [0.05, 0.1, 0.3]
    least, once, before = limit_quantities(site, given.limits, response, values)[0]
    assert least == pytest.approx(0.8 * response.bearing[0, 2])
    assert once == pytest.approx(0.8 * response.bearing[0, 0])
    assert 3.0 * least < once < 4.0 * least  # a quarter of the load, before the strength has grown
    assert before == np.inf


def test_edge_gains_less_than_the_middle():
    given = case(
        'shape = "strip"\nwidth = 6',
        clay("clay", 6.0, permeability="{ cv = 500 }"),
        stages=PRESSURE,
        horizon=5,
    )
    state = ground_state(site_model(given), central(given))
    beyond, edge, middle = state.strength[-1, 0]
    shallow = state.ground.points.depth[0] < 3.0
    assert (beyond[shallow] < edge[shallow]).all()
    assert (edge[shallow] < middle[shallow]).all()
    assert state.ground.load.slope_share[0, 0] == pytest.approx(0.5, abs=0.01)  # at the surface


def test_squeezing_is_looked_at_where_the_clay_is_thin():
    thin = case('shape = "circle"\ndiameter = 20', clay("clay", 4.0, **QUICK), sand("sand", 2.0))
    site, state = state_with(thin, lambda z: np.full(z.shape, 20.0))
    factor = squeezing_at(site, {}, state.ground, state.strength, 0.01)
    assert factor == pytest.approx([(np.pi + 1.0 + 5.0 / 3.0) * 20.0 / 50.0])  # D/3H
    thick = case('shape = "circle"\ndiameter = 7', clay("clay", 4.0, **QUICK), sand("sand", 2.0))
    site, state = state_with(thick, lambda z: np.full(z.shape, 20.0))
    assert squeezing_at(site, {}, state.ground, state.strength, 0.01) is None


@pytest.mark.parametrize("blanket", [sand("sand", 1.0), clay("crust", 1.0, **QUICK)])
def test_squeezing_is_looked_at_below_a_blanket_and_a_crust(blanket):
    given = case('shape = "circle"\ndiameter = 20', blanket, clay("clay", 4.0, **QUICK))
    site, state = state_with(given, lambda z: np.where(z < 1.0, 90.0, 20.0))
    factor = squeezing_at(site, {}, state.ground, state.strength, 0.01)
    pressure = 50.0 * (20.0 / 21.0) ** 2
    assert factor == pytest.approx([(np.pi + 1.0 + 21.0 / 4.0 / 3.0) * 20.0 / pressure])


@pytest.mark.parametrize(
    ("shape", "contact", "width"), [("circle", "rough", 30.0), ("strip", "smooth", 24.0)]
)
def test_friction_of_squeezing_is_the_mean_pressure_that_equilibrium_asks_for(shape, contact, width):
    """Clay pressed out between two plates: dp/dr = (c1 + c2)/H from the edge inward, by adding up rings."""
    size = "diameter" if shape == "circle" else "width"
    load = f'shape = "{shape}"\n{size} = {width}\ncontact = "{contact}"'
    given = case(load, clay("clay", 4.0, **QUICK), sand("sand", 2.0))
    site, state = state_with(given, lambda z: np.full(z.shape, 20.0))
    factor = squeezing_at(site, {}, state.ground, state.strength, 0.01)
    r = (np.arange(200_000) + 0.5) * 0.5 * width / 200_000
    faces = 2.0 if contact == "rough" else 1.0
    pressure, weight = faces * (0.5 * width - r) / 4.0, r if shape == "circle" else np.ones_like(r)
    assert factor == pytest.approx(
        [(np.pi + 1.0 + np.average(pressure, weights=weight)) * 20.0 / 50.0], rel=1e-6
    )


@pytest.mark.parametrize(("lower", "looked_at"), [(40.0, True), (39.0, False)])
def test_clay_twice_as_strong_is_firm(lower, looked_at):
    given = case('shape = "strip"\nwidth = 10', clay("soft", 3.0, **QUICK), clay("stiff", 12.0, **QUICK))
    site, state = state_with(given, lambda z: np.where(z < 3.0, 20.0, lower))
    factor = squeezing_at(site, {}, state.ground, state.strength, 0.01)
    if looked_at:
        assert factor == pytest.approx([(np.pi + 1.0 + 0.5 * 10.0 / 3.0) * 20.0 / 50.0])
    else:
        assert factor is None


def test_squeezing_is_judged_in_every_realisation():
    given = case('shape = "strip"\nwidth = 10', clay("clay", 4.0, **QUICK), sand("sand", 2.0))
    site = site_model(given)
    state = ground_state(site, central(given) | {"clay.thickness": np.array([4.0, 6.0, 3.0])})
    strength = np.full_like(state.strength, 20.0)
    factor = squeezing_at(site, {}, state.ground, strength, 0.01)
    nc = [np.pi + 1.0 + 0.5 * 10.0 / 4.0, np.inf, np.pi + 1.0 + 0.5 * 10.0 / 3.0]
    assert factor == pytest.approx(np.array(nc) * 20.0 / 50.0)


def test_level_wider_than_the_foundation_keeps_its_proportions():
    given = case(
        'shape = "rectangle"\nwidth = 2\nlength = 6', clay("a", 2.0, **QUICK), clay("b", 8.0, **QUICK)
    )
    site, state = state_with(given, lambda z: np.full(z.shape, 10.0))
    (_, _), (level, _) = capacities_at(site, {}, state.ground, state.strength, 0.01)
    strength = state.strength[0, :, 1][:, state.ground.clay]
    found = level_capacity(site.foundation, level, strength, np.array([50.0]))
    assert found.shape_factor == pytest.approx([float(rectangle_shape_factor(0.0, 4.0 / 8.0))])
    assert found.pressure == pytest.approx([50.0 * 12.0 / 32.0])


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: strength_growth_factor(-1.0), "ratio must be finite and at least 0"),
        (lambda: strength_growth_factor(1.0, "sticky"), "contact must be rough or smooth; got 'sticky'"),
        (lambda: rectangle_shape_factor(0.0, 1.5), "width_over_length must be at most 1"),
        (lambda: depth_factor(1.0, 0.0), "width must be finite and above 0"),
        (lambda: strip_capacity(-1.0, 0.0, 1.0), "strength must be finite and at least 0"),
    ],
)
def test_numbers_out_of_range_are_refused(call, message):
    with pytest.raises(ParameterError, match=message):
        call()


def test_ratio_of_growth_where_there_is_no_strength():
    assert growth_ratio(np.array([0.0, 0.0, 4.0]), np.array([0.0, 3.0, 8.0])).tolist() == [0.0, 1e6, 2.0]
