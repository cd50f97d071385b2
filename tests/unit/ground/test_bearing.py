"""Bearing safety of a foundation: the line of strength, the levels, the numbers by hand."""

from dataclasses import replace

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage

from probsoil.errors import ParameterError
from probsoil.ground.bearing import bearing_at_checks, capacities_at, level_capacity, line_of_strength
from probsoil.ground.bearing_capacity import (
    circle_shape_factor,
    depth_factor,
    growth_ratio,
    rectangle_shape_factor,
    strength_growth_factor,
    strip_capacity,
)
from probsoil.ground.limit_quantities import limit_quantities
from probsoil.ground.response import ground_state
from probsoil.ground.squeezing import squeezing_at

PRANDTL = 2.0 + np.pi
BELOW = np.linspace(0.25, 3.75, 8)[None, :]  # eight slices of half a metre
WEIGHT = np.full((1, 8), 0.5)
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


def line(strength):
    return tuple(float(one[0]) for one in line_of_strength(strength, BELOW, WEIGHT))


def test_straight_profile_is_found_again():
    assert line(12.0 + 3.0 * BELOW) == pytest.approx((12.0, 3.0, 12.75))
    assert line(np.full((1, 8), 20.0)) == pytest.approx((20.0, 0.0, 20.0))


def test_crust_counts_with_its_mean_and_not_with_a_line_that_falls():
    assert line(40.0 - 5.0 * BELOW) == pytest.approx((30.0, 0.0, 21.25))


def test_line_never_starts_below_zero():
    step = np.where(BELOW < 3.0, 5.0, 80.0)
    start, growth, least = line(step)
    assert (start, least) == (0.0, 5.0)
    assert growth == pytest.approx((step * BELOW).sum() / (BELOW**2).sum())


def test_points_outside_the_depth_looked_at_do_not_count():
    strength, weight = 10.0 + 2.0 * BELOW, WEIGHT.copy()
    strength[0, 5:], weight[0, 5:] = 1.0, 0.0
    assert [float(one[0]) for one in line_of_strength(strength, BELOW, weight)] == pytest.approx(
        [10.0, 2.0, 10.5]
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
    assert upper.strength[0] == pytest.approx(34.0, rel=1e-6)  # half crust, half soft
    assert lower.pressure[0] == pytest.approx(50.0 * 2.0 / 3.0)
    factor = bearing_at_checks(site, {}, state.ground, state.strength)
    assert factor[0, 0] == pytest.approx(PRANDTL * 8.0 / (50.0 * 2.0 / 3.0), rel=1e-6)


def test_thin_soft_clay_on_stiff_is_not_taken_below_its_own_strength():
    layers = (clay("soft", 2.4, **QUICK), clay("stiff", 6.0, **QUICK))
    given = case('shape = "strip"\nwidth = 3', *layers)
    site, state = state_with(given, lambda z: np.where(z < 2.4, 10.0, 200.0))
    (_, found), _ = capacities_at(site, {}, state.ground, state.strength, 0.01)
    assert found.strength[0] == 0.0
    assert found.strip[0] == pytest.approx(PRANDTL * 10.0)


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
    assert factor == pytest.approx([(np.pi + 1.0 + 0.5 * 5.0) * 20.0 / 50.0])
    thick = case('shape = "circle"\ndiameter = 7', clay("clay", 4.0, **QUICK), sand("sand", 2.0))
    site, state = state_with(thick, lambda z: np.full(z.shape, 20.0))
    assert squeezing_at(site, {}, state.ground, state.strength, 0.01) is None
    buried = case('shape = "circle"\ndiameter = 20', sand("sand", 1.0), clay("clay", 4.0, **QUICK))
    site, state = state_with(buried, lambda z: np.full(z.shape, 20.0))
    assert squeezing_at(site, {}, state.ground, state.strength, 0.01) is None


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
