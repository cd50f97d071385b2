"""Settlement across the preconsolidation stress, as with a pocket calculator.

No publication: the example is made up here. 5 m of clay with e0 = 1.2, Cc = 0.6, Cs = 0.08, under
50 kPa, preconsolidated to 70 kPa, takes 60 kPa more:

    5/(1 + 1.2) [0.08 log10(70/50) + 0.6 log10(110/70)] = 0.2942 m
"""

import numpy as np
import pytest
from reference_solutions import clay_column, constant_cv, loaded
from scipy.integrate import quad

from probsoil.ground.compression import (
    lambda_from_compression_index,
    lambda_from_compression_ratio,
    void_ratio_lost,
)
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model
from probsoil.scenario import parse_scenario

BY_HAND = 5.0 / 2.2 * (0.08 * np.log10(70.0 / 50.0) + 0.6 * np.log10(110.0 / 70.0))
THICK, VOID_RATIO, CC, CS, POP = 5.0, 1.2, 0.6, 0.08, 20.0
WEIGHT, FILL = 15.5, 60.0

SITE = f"""
format = 1
title = "one layer"
seed = 1
horizon = 100
[site]
water_table = 0.0
base = "drained"
mode_factor = 0.8
[[layers]]
name = "clay"
soil = "clay"
thickness = {THICK}
unit_weight = {WEIGHT}
void_ratio = {VOID_RATIO}
Cc = {CC}
Cs = {CS}
preconsolidation = {{ pop = {POP} }}
phi = 25
permeability = {{ cv = 5.0 }}
[load]
shape = "area"
submergence = false
[[stages]]
name = "fill"
pressure = {FILL}
start = 0
end = 0.1
[[limits]]
name = "in the end"
quantity = "settlement"
at = 100
not_more_than = 1
"""


def stress_in_situ(depth):
    """Effective stress; the program takes 1 kPa for the first centimetres, which have less."""
    return max((WEIGHT - 9.81) * depth, 1.0)


def compression(stress, yielding, after):
    """Void ratio lost from `stress` to `after` across `yielding`, in decades."""
    lower = min(after, yielding)
    return CS * np.log10(lower / stress) + (CC * np.log10(after / yielding) if after > yielding else 0.0)


def values_of(scenario):
    return {quantity.address: quantity.distribution.expectation for quantity in scenario.quantities()}


def test_the_number_itself():
    assert pytest.approx(0.29424, abs=5.1e-6) == BY_HAND


def test_compression_curve():
    lost = void_ratio_lost(
        110.0,
        110.0,
        initial_stress=50.0,
        initial_yield_stress=70.0,
        slopes=(lambda_from_compression_index(CC), lambda_from_compression_index(CS)),
    )
    assert float(lost) * THICK / (1.0 + VOID_RATIO) == pytest.approx(BY_HAND, rel=1e-12)


def test_strain_per_decade_gives_the_same():
    ratio = CC / (1.0 + VOID_RATIO)
    assert float(lambda_from_compression_ratio(ratio, VOID_RATIO)) == pytest.approx(
        float(lambda_from_compression_index(CC)), rel=1e-12
    )


def test_kernel_ends_at_the_hand_value():
    column = clay_column(
        (THICK,),
        stress=50.0,
        yielding=70.0,
        void_ratio=VOID_RATIO,
        lam=(CC / np.log(10.0),),
        kap=CS / np.log(10.0),
    )
    settled, result = loaded(column, constant_cv(column, 5.0), 60.0, end=0.1, wanted=[100.0])
    # exp(-pi^2 T/4) at T = 20 leaves nothing; what remains is the iteration's tolerance
    assert settled[0] == pytest.approx(BY_HAND, abs=1e-5)
    assert result.yield_stress[0, 0] == pytest.approx(110.0, rel=1e-5)


def test_response_ends_at_the_integral_over_depth():
    scenario = parse_scenario(SITE, file="hand.toml")
    response = ground_state(site_model(scenario, refine=4), values_of(scenario)).response

    def strain(depth):
        stress = stress_in_situ(depth)
        return compression(stress, stress + POP, stress + FILL) / (1.0 + VOID_RATIO)

    by_integral, _ = quad(strain, 0.0, THICK, epsabs=1e-10)
    # the strain is steep near ground level, where the stress starts from nothing: allow 0.2 %
    assert response.settlement[0, -1] == pytest.approx(by_integral, rel=2e-3)
    assert response.degree[0, -1] == pytest.approx(1.0, abs=1e-3)


def test_too_small_a_load_stays_on_the_flat_branch():
    text = SITE.replace(f"pressure = {FILL}", "pressure = 15.0")
    scenario = parse_scenario(text, file="hand.toml")
    response = ground_state(site_model(scenario, refine=4), values_of(scenario)).response
    by_integral, _ = quad(
        lambda z: CS * np.log10(1.0 + 15.0 / stress_in_situ(z)) / 2.2, 0.0, THICK, epsabs=1e-10
    )
    assert response.settlement[0, -1] == pytest.approx(by_integral, rel=5e-3)
