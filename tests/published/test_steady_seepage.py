"""Effective stress where water seeps up or down.

Sources, opened: NPTEL course 105103097 (Indian Institutes of Technology), chapter 5, worked example 2, online
copy: below an excavation 3 m of clay of 2 T/m3 are left over a water-bearing sand, and the bottom cracks at
an artesian head of 6 m above the top of the sand. A formula page of an engineering examination site (CE board
exam randomizer, effective vertical pressure, online copy): effective stress z times the submerged unit
weight, less or plus i z times the unit weight of water for upward or downward seepage. Tolerance: rounding.
"""

import numpy as np
import pytest

from probsoil.ground.constants import WATER_UNIT_WEIGHT
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model
from probsoil.scenario import parse_scenario

TEXT = """
format = 1
title = "seepage"
seed = 1
horizon = 20
[site]
water_table = 0
base = "drained"
base_head = {head}
[[layers]]
name = "clay"
soil = "clay"
thickness = {thickness}
unit_weight = {weight}
void_ratio = 1.5
lambda = 0.2
kappa = 0.03
preconsolidation = {{ pop = 10 }}
M = 1.0
permeability = {{ cv = 1 }}
[load]
shape = "area"
[[stages]]
name = "fill"
pressure = 10
start = 0
end = 0.5
[[limits]]
name = "settlement"
quantity = "settlement"
at = 20
not_more_than = 1
"""
TONNE = WATER_UNIT_WEIGHT  # a tonne-force of the example weighs what a cubic metre of water does


def points_under(head, thickness=3.0, weight=2.0 * TONNE):
    case = parse_scenario(TEXT.format(head=head, thickness=thickness, weight=weight))
    values = {one.address: one.distribution.expectation for one in case.quantities()}
    return site_model(case), values


def test_the_bottom_of_the_excavation_cracks_at_the_printed_head():
    """6 m above the top of the sand, 3 m above the excavation: at hair's breadth on either side of it."""
    site, values = points_under(-2.9)
    below, above = values | {"site.base_head": -2.999}, values | {"site.base_head": -3.001}
    assert not ground_state(site, below).response.uplifted[0]
    assert ground_state(site, above).response.uplifted[0]


@pytest.mark.parametrize("gradient", [-0.6, -0.2, 0.0, 0.2, 0.45])
def test_seepage_takes_or_adds_its_gradient_times_the_weight_of_water(gradient):
    thickness, weight = 8.0, 16.0
    site, values = points_under(-gradient * thickness, thickness, weight)
    points = ground_state(site, values).ground.points
    depth = points.depth[0]
    expected = depth * (weight - WATER_UNIT_WEIGHT) - gradient * depth * WATER_UNIT_WEIGHT
    assert points.stress[0] == pytest.approx(np.maximum(expected, 1.0), rel=1e-12)
