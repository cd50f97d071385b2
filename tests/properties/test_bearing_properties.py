"""What must hold for any foundation: monotony, symmetry, bounds, independence of the company."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.ground.bearing import bearing_at_checks, line_of_strength
from probsoil.ground.bearing_capacity import strip_capacity
from probsoil.ground.load_stress import circle_influence, rectangle_influence, strip_influence
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model
from probsoil.scenario import parse_scenario

PROPERTY = settings(max_examples=25, deadline=None, derandomize=True)
SLOW = settings(max_examples=8, deadline=None, derandomize=True)
SIDE = st.floats(0.2, 50.0)
PLACE = st.floats(-60.0, 60.0)
DEPTH = st.floats(0.0, 80.0)

GROUND = """
format = 1
title = "any foundation"
seed = 1
horizon = 20
[site]
water_table = 1.0
base = "drained"
[[layers]]
name = "crust"
soil = "clay"
thickness = 2.0
unit_weight = 18
void_ratio = 1.0
lambda = 0.12
kappa = 0.02
preconsolidation = { stress = 120 }
M = 1.1
permeability = { cv = 2 }
[[layers]]
name = "clay"
soil = "clay"
thickness = 6.0
unit_weight = 16
void_ratio = 1.7
lambda = 0.3
kappa = 0.05
preconsolidation = { pop = 20 }
M = 1.0
permeability = { cv = 1 }
[load]
"""
STAGE = '[[stages]]\nname = "all"\nstart = 0\nend = 0.2\npressure = {}\n'
LIMIT = '[[limits]]\nname = "end"\nquantity = "settlement"\nat = 20\nnot_more_than = 1\n'
LOADS = (
    'shape = "strip"\nwidth = 2.5\ndepth = 0.8\n',
    'shape = "rectangle"\nwidth = 2\nlength = 5\n',
    'shape = "circle"\ndiameter = 9\ncontact = "smooth"\n',
)


def state_of(load, pressure, **changes):
    scenario = parse_scenario(GROUND + load + STAGE.format(pressure) + LIMIT)
    values = {quantity.address: quantity.distribution.expectation for quantity in scenario.quantities()}
    site = site_model(scenario)
    return site, ground_state(site, values | changes)


@PROPERTY
@given(width=SIDE, length=SIDE, x=PLACE, y=PLACE, z=DEPTH)
def test_influence_is_a_share_and_the_same_on_all_sides(width, length, x, y, z):
    found = float(rectangle_influence(z, x, y, width=width, length=length))
    assert -1e-12 <= found <= 1.0 + 1e-12
    for across, along in ((-x, y), (x, -y), (-x, -y)):
        mirrored = float(rectangle_influence(z, across, along, width=width, length=length))
        assert mirrored == pytest.approx(found, abs=1e-12)
    turned = float(rectangle_influence(z, y, x, width=length, length=width))
    assert turned == pytest.approx(found, abs=1e-12)


@PROPERTY
@given(width=SIDE, x=PLACE, z=DEPTH, share=st.floats(0.1, 0.9))
def test_strips_side_by_side_add_up(width, x, z, share):
    left, right = share * width, (1.0 - share) * width
    parts = strip_influence(z, x + 0.5 * width - 0.5 * left, width=left) + strip_influence(
        z, x - 0.5 * width + 0.5 * right, width=right
    )
    assert float(parts) == pytest.approx(float(strip_influence(z, x, width=width)), abs=1e-12)


@PROPERTY
@given(diameter=SIDE, radius=st.floats(0.0, 60.0), z=st.floats(0.01, 80.0))
def test_circle_lies_between_the_squares_within_and_around_it(diameter, radius, z):
    circle = float(circle_influence(z, radius, diameter=diameter))
    inner, outer = (
        float(rectangle_influence(z, radius, 0.0, width=side, length=side))
        for side in (diameter / np.sqrt(2.0), diameter)
    )
    assert inner - 1e-12 <= circle <= outer + 1e-12


@PROPERTY
@given(c0=st.floats(0.0, 100.0), rho=st.floats(0.0, 20.0), width=SIDE, more=st.floats(0.1, 10.0))
def test_capacity_grows_with_strength_growth_and_roughness(c0, rho, width, more):
    found = float(strip_capacity(c0, rho, width))
    assert float(strip_capacity(c0 + more, rho, width)) >= found
    assert float(strip_capacity(c0, rho + more, width)) >= found
    assert float(strip_capacity(c0, rho, width, "smooth")) <= found + 1e-9
    assert found >= (2.0 + np.pi) * c0 - 1e-9


@PROPERTY
@given(
    profile=st.lists(st.floats(1.0, 80.0), min_size=3, max_size=12),
    scale=st.floats(0.5, 3.0),
)
def test_line_of_strength_scales_and_is_nowhere_below_zero(profile, scale):
    strength = np.array([profile])
    below = 0.5 + np.arange(len(profile), dtype=np.float64)[None, :]
    weight = np.ones_like(below)
    start, growth, least = line_of_strength(strength, below, weight)
    assert start[0] >= 0.0
    assert growth[0] >= 0.0
    assert min(profile) == least[0]
    scaled = line_of_strength(scale * strength, below, weight)
    for one, other in zip(scaled, (start, growth, least), strict=True):
        assert one == pytest.approx(scale * other, rel=1e-9, abs=1e-9)


@SLOW
@given(load=st.sampled_from(LOADS), pressure=st.floats(5.0, 40.0), more=st.floats(1.0, 40.0))
def test_more_load_lowers_the_safety_and_settles_more(load, pressure, more):
    _, one = state_of(load, pressure)
    _, other = state_of(load, pressure + more)
    assert other.response.bearing[0, 0] < one.response.bearing[0, 0]
    assert other.response.settlement[0, -1] > one.response.settlement[0, -1]


@SLOW
@given(load=st.sampled_from(LOADS), factor=st.floats(0.5, 1.5))
def test_safety_is_in_proportion_to_the_mode_factor(load, factor):
    _, one = state_of(load, 30.0, **{"site.mode_factor": 0.8})
    _, other = state_of(load, 30.0, **{"site.mode_factor": 0.8 * factor})
    assert other.response.bearing == pytest.approx(factor * one.response.bearing, rel=1e-9)


@pytest.mark.parametrize("load", LOADS)
def test_one_realisation_alone_equals_itself_in_company_bit_for_bit(load):
    thickness = np.array([1.4, 1.9, 2.3, 2.8, 3.3])
    site, state = state_of(load, 30.0, **{"crust.thickness": thickness})
    for row in (0, 3, 4):
        _, alone = state_of(load, 30.0, **{"crust.thickness": thickness[row : row + 1]})
        assert alone.response.bearing[0].tobytes() == state.response.bearing[row].tobytes()
        assert alone.response.settlement[0].tobytes() == state.response.settlement[row].tobytes()
    again = bearing_at_checks(site, {}, state.ground, state.strength)
    assert again.tobytes() == state.response.bearing.tobytes()


def test_layer_cut_in_two_bears_alike():
    """Within the least squares of slightly other cells, and the check on the top of the lower part."""
    whole = GROUND + LOADS[0] + STAGE.format(30) + LIMIT
    head, _, tail = whole.partition('[[layers]]\nname = "clay"')
    body, _, rest = tail.partition("[load]")
    layer = f'[[layers]]\nname = "clay"{body}'
    halves = layer.replace("thickness = 6.0", "thickness = 3.0")
    halves += halves.replace('"clay"\nsoil', '"lower"\nsoil')
    found = []
    for text in (whole, f"{head}{halves}[load]{rest}"):
        scenario = parse_scenario(text)
        values = {quantity.address: quantity.distribution.expectation for quantity in scenario.quantities()}
        found.append(ground_state(site_model(scenario), values).response.bearing[0, 0])
    assert found[1] == pytest.approx(found[0], rel=0.005)
