"""Drains far apart are no drains, closer ones are never slower; depths may be measured from anywhere."""

from dataclasses import replace
from itertools import pairwise

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.ground.in_situ_stress import hydrostatic_pressure, total_vertical_stress
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model
from probsoil.scenario import parse_scenario

PROPERTY = settings(max_examples=12, deadline=None, derandomize=True)
SITE = """
format = 1
title = "drained ground"
seed = 1
horizon = 20
[site]
water_table = 0.5
base = "undrained"
[[layers]]
name = "clay"
soil = "clay"
thickness = 6
unit_weight = 16
void_ratio = 1.9
lambda = 0.3
kappa = 0.05
preconsolidation = { pop = 15 }
M = 1.0
permeability = { k = 6e-10, ck = 0.9 }
[load]
shape = "area"
fill_unit_weight = 20
submergence = false
[[stages]]
name = "fill"
height = 2
start = 0
end = 0.3
[[limits]]
name = "degree"
quantity = "degree_of_consolidation"
at = 1
not_less_than = 0.5
"""
DRAINS = """
[drains]
pattern = "square"
spacing = 1.5
equivalent_diameter = 0.066
smear_ratio = 2.5
smear_kh_ks = 3
installed = {installed}
bottom = {bottom}
"""
SOIL = st.fixed_dictionaries(
    {"clay.kappa": st.floats(0.01, 0.09), "clay.pop": st.floats(1.0, 60.0), "clay.k": st.floats(2e-10, 5e-9)}
)


def response(text, soil, diameter=None):
    """Ground's answer, with drains of another influence diameter where one is given."""
    scenario = parse_scenario(text, file="any.toml")
    values = {quantity.address: quantity.distribution.expectation for quantity in scenario.quantities()}
    site = site_model(scenario)
    if diameter is not None:
        site = replace(site, drains=replace(site.drains, influence_diameter=diameter))
    found = ground_state(site, values | {name: np.array([value]) for name, value in soil.items()}).response
    assert found.converged.all()
    return found


@given(soil=SOIL, bottom=st.floats(1.0, 6.0))
@PROPERTY
def test_drains_at_a_vast_spacing_equal_none(soil, bottom):
    """The time axis begins anew when drains are installed; at 0 it does so in any case."""
    far = response(SITE + DRAINS.format(installed=0, bottom=bottom), soil, diameter=1e6)
    none = response(SITE, soil)
    assert np.array_equal(far.times, none.times)
    np.testing.assert_allclose(far.settlement, none.settlement, rtol=1e-6)


@given(soil=SOIL, installed=st.sampled_from([0.0, 0.5]))
@PROPERTY
def test_closer_drains_are_never_slower(soil, installed):
    text = SITE + DRAINS.format(installed=installed, bottom=6.0)
    settled = [response(text, soil, diameter).settlement[0] for diameter in (0.8, 1.6, 3.2, 1e6)]
    for closer, wider in pairwise(settled):
        # both are within half a per cent of the answer (the promise of the default steps)
        assert (closer >= wider - 0.005 * wider.max()).all()
    assert (settled[0] > settled[-1] * 1.001).any()


@given(
    thickness=st.lists(st.floats(0.5, 5.0), min_size=1, max_size=4),
    table=st.floats(0.0, 8.0),
    raised=st.floats(0.1, 30.0),
    weight=st.floats(10.0, 22.0),
)
@PROPERTY
def test_ground_level_may_be_put_higher(thickness, table, raised, weight):
    """Under a dry layer more, with the water where it was, every effective stress is its weight larger."""
    unit = np.linspace(15.0, 19.0, len(thickness))[None, :]
    boundary = np.concatenate([[0.0], np.cumsum(thickness)])[None, :]
    depth = np.linspace(0.0, boundary[0, -1], 9)[None, :]

    def effective(depth, boundary, unit, table):
        water = np.array([table])
        total = total_vertical_stress(
            depth, boundary, unit_weight=unit, unit_weight_above=unit, water_table=water
        )
        return total - hydrostatic_pressure(depth, water)

    below = effective(depth, boundary, unit, table)
    layers = np.concatenate([np.array([[weight]]), unit], axis=1)
    deeper = np.concatenate([[[0.0]], boundary + raised], axis=1)
    above = effective(depth + raised, deeper, layers, table + raised)
    np.testing.assert_allclose(above, below + weight * raised, rtol=1e-9, atol=1e-9)
