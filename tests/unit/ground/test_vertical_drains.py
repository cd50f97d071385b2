"""Drains in a whole site: where they reach, from when, and that the default steps keep their promise."""

from dataclasses import replace

import numpy as np
import pytest
from ground_cases import AREA, central, clay, refined, scenario, stage

from probsoil.errors import ParameterError
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model
from probsoil.ground.vertical_drains import (
    drain_factor,
    influence_diameter,
    radial_degree_of_consolidation,
    well_resistance,
)

SOFT = {"permeability": "{ k = 1e-9, ck = 0.7 }", "void_ratio": 2.0, "preconsolidation": "{ pop = 8 }"}


def drains(**keys):
    given = {
        "pattern": '"square"',
        "spacing": 1.4,
        "equivalent_diameter": 0.065,
        "smear_ratio": 3,
        "smear_kh_ks": 3,
        "bottom": 6.0,
    } | keys
    return "\n".join(["[drains]", *(f"{key} = {value}" for key, value in given.items())])


def case(drain_text="", stages=None):
    steps = stages or [stage("fill", 0, 0.1, pressure=50)]
    return scenario(
        [clay("upper", 2.0, kh_kv=2.0, **SOFT), clay("lower", 4.0, permeability="{ cv = 0.8 }")],
        steps,
        load=AREA + "\n" + drain_text,
    )


def state_of(one, refine=1, also=()):
    site = refined(one, refine, also=also)
    return site, ground_state(site, central(one))


def settlement(one):
    site, state = state_of(one)
    assert state.response.converged.all()
    return site.times, state.response.settlement[0]


def test_drains_hasten_settlement_and_leave_its_end_alone():
    _, plain = settlement(case())
    _, drained = settlement(case(drains()))
    assert (drained[2:] > plain[2:]).all()
    _, state = state_of(case(drains(spacing=0.8)))
    final = state.ground.load.stress[-1, 0] + state.ground.points.stress[0]
    assert state.consolidation.stress[0, -1] == pytest.approx(final, rel=1e-3)


def test_drains_far_apart_are_no_drains():
    times, plain = settlement(case())
    one = case(drains())
    site = site_model(one)
    far = replace(site, drains=replace(site.drains, influence_diameter=1e6))
    drained = ground_state(far, central(one)).response.settlement[0]
    assert np.array_equal(site.times, times)
    assert drained == pytest.approx(plain, abs=1e-7)


def test_nothing_happens_before_they_are_installed():
    late = case(drains(installed=1.5))
    times, drained = settlement(late)
    assert 1.5 in times
    plain_site, plain = state_of(case(), also=times)
    before = times <= 1.5
    same = plain.response.settlement[0][np.searchsorted(plain_site.times, times)]
    final = same[-1]
    assert drained[before] == pytest.approx(same[before], abs=0.002 * final)
    after = times > 1.6
    assert (drained[after] > same[after] + 0.001 * final).any()


def test_clay_below_their_ends_is_not_reached():
    site, state = state_of(case(drains(bottom=2.0, spacing=0.7)))
    depth = state.ground.points.depth[0]
    slot = int(np.searchsorted(site.record, 0.1))
    excess = state.ground.points.stress[0] + 50.0 - state.consolidation.stress[0, slot]
    _, plain = state_of(case())
    undrained = plain.ground.points.stress[0] + 50.0 - plain.consolidation.stress[0, slot]
    assert (excess[depth < 1.5] < undrained[depth < 1.5]).all()
    assert excess[depth > 4.5] == pytest.approx(undrained[depth > 4.5], abs=0.5)


@pytest.mark.parametrize(
    ("slower", "faster"),
    [
        ({"smear_kh_ks": 6}, {}),
        ({"spacing": 2.0}, {}),
        ({"pattern": '"square"'}, {"pattern": '"triangular"'}),
        ({"discharge_capacity": 5}, {}),
        ({"equivalent_diameter": 0.04}, {}),
    ],
)
def test_what_slows_the_drains(slower, faster):
    times, slow = settlement(case(drains(**slower)))
    _, fast = settlement(case(drains(**faster)))
    middle = (times > 0.1) & (times < 1.0)
    assert (slow[middle] < fast[middle]).all()


def test_uncertain_smear_enters_every_realisation():
    one = case(drains(smear_kh_ks='{ dist = "uniform", low = 2, high = 5 }'))
    site, _ = state_of(one)
    values = central(one) | {"drains.smear_kh_ks": np.array([2.0, 5.0])}
    found = ground_state(site, values).response.settlement
    at = int(np.searchsorted(site.times, 0.25))
    assert found[0, at] > found[1, at]


@pytest.mark.parametrize(
    "text", [drains(), drains(installed=0.5, discharge_capacity=100), drains(bottom=3.3)]
)
def test_default_steps_keep_the_promise_with_drains(text):
    one = case(text, [stage("fill", 0, 0.1, pressure=40), stage("off", 1.0, 1.05, pressure=-15)])
    times, default = settlement(one)
    site, state = state_of(one, refine=8, also=times)
    fine = state.response.settlement[0][np.searchsorted(site.times, times)]
    # half a per cent of the greatest settlement: the promise of the default grid
    assert np.abs(default - fine).max() <= 0.005 * np.abs(fine).max()


def test_a_realisation_does_not_depend_on_its_company():
    one = case(drains())
    site, _ = state_of(one)
    values = central(one) | {"drains.smear_kh_ks": np.linspace(1.5, 6.0, 37)}
    together = ground_state(site, values).response.settlement
    alone = ground_state(site, values | {"drains.smear_kh_ks": np.array([np.linspace(1.5, 6.0, 37)[20]])})
    assert np.array_equal(together[20], alone.response.settlement[0])


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: influence_diameter(1.0, "hexagonal"), "pattern must be one of triangular, square"),
        (lambda: influence_diameter(0.0, "square"), "spacing must be finite and above 0"),
        (lambda: drain_factor(3.0, 3.0), "the smear zones would meet"),
        (lambda: drain_factor(1.0), "spacing_ratio must be finite and above 1"),
        (lambda: drain_factor(20.0, 2.0, 0.5), "permeability_ratio must be finite and at least 1"),
        (lambda: well_resistance(-1.0, 5.0, 0.1, 10.0), "depth must be finite and at least 0"),
        (lambda: radial_degree_of_consolidation(-0.1, 2.0), "time_factor must be finite and at least 0"),
    ],
)
def test_arguments_out_of_range_are_refused(call, message):
    with pytest.raises(ParameterError, match=message):
        call()


def test_site_without_drains_keeps_none():
    site, _ = state_of(case())
    assert site.drains is None
    assert replace(site).drains is None
