"""Stress before loading, as worked out by hand."""

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage

from probsoil.ground.in_situ_stress import (
    hydrostatic_pressure,
    preconsolidation_stress,
    total_vertical_stress,
)
from probsoil.ground.profile import GREATEST_KAPPA_SHARE, clay_columns, points_in_situ, yield_stresses

BOUNDARY = np.array([[0.0, 2.0, 5.0]])
BELOW, ABOVE = np.array([[18.0, 16.0]]), np.array([[15.0, 14.0]])


def total(depths, water):
    return total_vertical_stress(
        np.array([depths]),
        BOUNDARY,
        unit_weight=BELOW,
        unit_weight_above=ABOVE,
        water_table=np.array([water]),
    )[0]


def test_water_table_within_the_first_layer():
    # 0.5 m at 15, then 18 to 2 m, then 16
    assert total([0.25, 1.0, 3.0], 0.5) == pytest.approx([3.75, 7.5 + 9.0, 7.5 + 27.0 + 16.0], rel=1e-12)


def test_water_table_within_the_second_layer():
    # 2 m at 15, 1 m at 14, then 16
    assert total([1.0, 2.5, 4.0], 3.0) == pytest.approx([15.0, 37.0, 44.0 + 16.0], rel=1e-12)


@pytest.mark.parametrize(("water", "last"), [(0.0, 36.0 + 48.0), (5.0, 30.0 + 42.0), (9.0, 30.0 + 42.0)])
def test_water_table_at_ground_level_and_below_everything(water, last):
    assert total([5.0], water) == pytest.approx([last], rel=1e-12)


def test_water_pressure_starts_at_the_water_table():
    pressure = hydrostatic_pressure(np.array([[0.5, 2.0, 5.0]]), np.array([2.0]))
    assert pressure[0] == pytest.approx([0.0, 0.0, 29.43], rel=1e-12)


@pytest.mark.parametrize(
    ("form", "value", "expected", "floored"),
    [
        ("preconsolidation", 40.0, [40.0, 40.0, 60.0], [False, False, True]),
        ("ocr", 1.5, [30.0, 45.0, 90.0], [False, False, False]),
        ("ocr", 0.8, [20.0, 30.0, 60.0], [True, True, True]),
        ("pop", 12.0, [32.0, 42.0, 72.0], [False, False, False]),
        ("pop", 0.0, [20.0, 30.0, 60.0], [False, False, False]),
    ],
)
def test_preconsolidation_stress_is_never_below_the_present_stress(form, value, expected, floored):
    stress, raised = preconsolidation_stress(np.array([[20.0, 30.0, 60.0]]), form, np.array([value]))
    assert stress[0] == pytest.approx(expected, rel=1e-12)
    assert raised[0].tolist() == floored


def two_layers(**keys):
    layers = [sand("sand", 2.0, unit_weight_above=17.0), clay("clay", 4.0, unit_weight=15.5, **keys)]
    return scenario(layers, [stage("fill", 0, 0.5, pressure=30)], water_table=1.0)


def test_points_carry_the_stress_of_what_lies_above():
    case = two_layers()
    points = points_in_situ(site_model(case), central(case), 1)
    in_clay = points.layer == 1
    depth = points.depth[0, in_clay]
    by_hand = 17.0 + 19.0 + 15.5 * (depth - 2.0) - 9.81 * (depth - 1.0)
    assert points.stress[0, in_clay] == pytest.approx(by_hand, rel=1e-12)
    assert points.depth[0, ~in_clay] == pytest.approx([0.25, 0.75, 1.25, 1.75], rel=1e-12)
    assert points.thickness[0, in_clay].sum() == pytest.approx(4.0, rel=1e-12)


def test_realisations_keep_their_own_thickness_and_water_table():
    case = two_layers()
    values = central(case) | {
        "sand.thickness": np.array([1.0, 3.0]),
        "site.water_table": np.array([0.2, 4.0]),
    }
    points = points_in_situ(site_model(case), values, 2)
    assert points.boundary.tolist() == [[0.0, 1.0, 5.0], [0.0, 3.0, 7.0]]
    last = points.depth[:, -1]
    by_hand = [
        17.0 * 0.2 + 19.0 * 0.8 + 15.5 * (last[0] - 1.0) - 9.81 * (last[0] - 0.2),
        17.0 * 3.0 + 15.5 * (last[1] - 3.0) - 9.81 * (last[1] - 4.0),
    ]
    assert points.stress[:, -1] == pytest.approx(by_hand, rel=1e-12)


@pytest.mark.parametrize(
    ("keys", "lam", "kap"),
    [
        ({}, 0.3, 0.04),
        ({"lam": None, "kappa": None, "Cc": 0.7, "Cs": 0.1}, 0.7 / np.log(10), 0.1 / np.log(10)),
        (
            {"lam": None, "kappa": None, "CR": 0.25, "RR": 0.03},
            0.25 * 2.8 / np.log(10),
            0.03 * 2.8 / np.log(10),
        ),
    ],
)
def test_slopes_in_every_form(keys, lam, kap):
    case = two_layers(**keys)
    columns = clay_columns(site_model(case), central(case), 1)
    assert columns.lam[0] == pytest.approx([0.0, lam], rel=1e-12)
    assert columns.kap[0] == pytest.approx([0.0, kap], rel=1e-12)
    assert not columns.kappa_clipped.any()


def test_kappa_drawn_above_lambda_is_brought_down_and_said_so():
    case = two_layers()
    values = central(case) | {"clay.kappa": np.array([0.04, 0.9])}
    columns = clay_columns(site_model(case), values, 2)
    assert columns.kap[:, 1] == pytest.approx([0.04, GREATEST_KAPPA_SHARE * 0.3], rel=1e-12)
    assert columns.kappa_clipped[:, 1].tolist() == [False, True]


def test_measured_strength_replaces_the_critical_state_one():
    case = two_layers(strength="{ S = 0.27, m = 0.9 }")
    columns = clay_columns(site_model(case), central(case), 1)
    assert (columns.strength_ratio[0, 1], columns.strength_exponent[0, 1]) == (0.27, 0.9)


def test_friction_angle_and_slope_m_give_one_strength():
    sine = np.sin(np.radians(25.0))
    by_m = two_layers(M=float(6.0 * sine / (3.0 - sine)))
    by_angle = two_layers(M=None, phi=25)
    ratios = [clay_columns(site_model(c), central(c), 1).strength_ratio[0, 1] for c in (by_m, by_angle)]
    assert ratios[0] == pytest.approx(ratios[1], rel=1e-12)


def test_granular_points_keep_their_stress_as_yield_stress():
    case = two_layers(preconsolidation="{ pop = 25 }")
    site, values = site_model(case), central(case)
    points = points_in_situ(site, values, 1)
    stress, floored = yield_stresses(site, values, points)
    in_clay = points.layer == 1
    assert stress[0, ~in_clay] == pytest.approx(points.stress[0, ~in_clay], rel=1e-12)
    assert stress[0, in_clay] == pytest.approx(points.stress[0, in_clay] + 25.0, rel=1e-12)
    assert not floored.any()
