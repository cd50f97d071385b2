"""What must hold for any ground: monotony, bounds, and independence of the company."""

import functools
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model
from probsoil.scenario import parse_scenario

PROPERTY = settings(max_examples=12, deadline=None, derandomize=True)

HEAD = """
format = 1
title = "any ground"
seed = 1
horizon = 30
[site]
water_table = 0.8
base = "drained"
mode_factor = 0.8
"""
CLAY = """
[[layers]]
name = "{name}"
soil = "clay"
thickness = {thickness}
unit_weight = 16
void_ratio = 1.9
lambda = 0.3
kappa = 0.05
preconsolidation = {{ pop = 15 }}
M = 1.0
permeability = {flow}
"""
SAND = """
[[layers]]
name = "sand"
soil = "granular"
thickness = 0.8
unit_weight = 19
constrained_modulus = "40 MPa"
phi = 33
"""
AREA = '[load]\nshape = "area"\nfill_unit_weight = 20\nsubmergence = {submergence}\n'
DRY = AREA.format(submergence="false")
EMBANKMENT = (
    '[load]\nshape = "embankment"\ncrest_width = 8\nside_slope = 2\nfill_unit_weight = 19\nfill_phi = 33\n'
    "submergence = false\n"  # or the stress falls again where the load comes first and sinks after
)
PROMISE = 0.005  # of the final settlement: what the default steps may be wrong by at any time
LIMIT = '[[limits]]\nname = "end"\nquantity = "settlement"\nat = 30\nnot_more_than = 1\n'
FLOW = {"cv": "{ cv = 1.5 }", "k": "{ k = 1e-9, ck = 0.8 }"}
LIFTS = ((0.0, 0.2, 1.5), (1.0, 1.2, 1.0))
REMOVAL = (*LIFTS, (6.0, 6.2, -1.0))


def stages(steps):
    return "".join(
        f'[[stages]]\nname = "s{index}"\nstart = {start}\nend = {end}\nheight = {height}\n'
        for index, (start, end, height) in enumerate(steps)
    )


@functools.cache
def built(flow="k", steps=LIFTS, load=DRY, halves=1):
    """A site and its central values; the clay below the sand is one layer or cut into equal parts."""
    parts = [CLAY.format(name=f"clay{i}", thickness=5.0 / halves, flow=FLOW[flow]) for i in range(halves)]
    scenario = parse_scenario("".join([HEAD, SAND, *parts, load, stages(steps), LIMIT]), file="any.toml")
    values = {quantity.address: quantity.distribution.expectation for quantity in scenario.quantities()}
    site = site_model(scenario)
    # few circles: they are laid out afresh for every state, and no property depends on how many
    return replace(site, layouts=tuple(replace(layout, density=0.25) for layout in site.layouts)), values


def state_of(site, values, **arrays):
    """State with some quantities of the first clay layer as arrays."""
    named = {
        f"clay0.{name}" if not name.startswith("load") else name.replace("__", "."): x
        for name, x in arrays.items()
    }
    state = ground_state(site, values | named)
    assert state.response.converged.all()
    return state


SOILS = {
    "thickness": st.floats(1.0, 9.0),
    "kappa": st.floats(0.01, 0.09),
    "pop": st.floats(1.0, 60.0),
    "void_ratio": st.floats(1.4, 2.6),
}


@given(soil=st.fixed_dictionaries(SOILS), flow=st.sampled_from(["cv", "k"]))
@PROPERTY
def test_settlement_grows_with_the_load(soil, flow):
    """With the stages alike, heavier fill settles the ground further at every time."""
    site, values = built(flow)
    weight = np.linspace(12.0, 24.0, 9)
    arrays = {name: np.full(weight.size, value) for name, value in soil.items()}
    settled = state_of(site, values, load__fill_unit_weight=weight, **arrays).response.settlement
    assert (np.diff(settled[:, 1:], axis=0) > 0.0).all()


@given(soil=st.fixed_dictionaries(SOILS), flow=st.sampled_from(["cv", "k"]))
@PROPERTY
def test_final_settlement_grows_with_lambda(soil, flow):
    """Where the load yields the clay: what is reached in the end, and hence the clay's whole compression."""
    site, values = built(flow)
    lam = np.linspace(0.1, 0.4, 9)
    arrays = {
        name: np.full(lam.size, value) for name, value in (soil | {"thickness": 2.0, "pop": 5.0}).items()
    }
    state = state_of(site, values, **arrays, **{"lambda": lam})
    assert (np.diff(state.response.settlement[:, -1]) > 0.0).all()


@given(soil=st.fixed_dictionaries(SOILS), flow=st.sampled_from(["cv", "k"]))
@PROPERTY
def test_settlement_is_never_negative_nor_falls_while_only_loading(soil, flow):
    """A long step may carry the settlement a little too far and back, by no more than the promise."""
    site, values = built(flow)
    state = state_of(site, values, **{name: np.array([value]) for name, value in soil.items()})
    settled = state.response.settlement[0]
    assert (settled[1:] > 0.0).all()
    assert (np.diff(settled) >= -PROMISE * settled.max()).all()


@given(soil=st.fixed_dictionaries(SOILS), steps=st.sampled_from([LIFTS, REMOVAL]), wet=st.booleans())
@PROPERTY
def test_degree_lies_between_nothing_and_one_and_rises(soil, steps, wet):
    site, values = built(steps=steps, load=AREA.format(submergence=str(wet).lower()))
    response = state_of(site, values, **{name: np.array([value]) for name, value in soil.items()}).response
    after = response.degree[0, site.times >= site.last_change]
    assert ((after >= 0.0) & (after <= 1.0)).all()
    assert ((response.degree_at_record >= 0.0) & (response.degree_at_record <= 1.0)).all()
    if steps is LIFTS:
        assert (np.diff(after) >= -PROMISE).all()


@given(soil=st.fixed_dictionaries(SOILS), flow=st.sampled_from(["cv", "k"]))
@PROPERTY
def test_taking_load_off_never_settles_the_ground_further(soil, flow):
    """Against the same works without the removal, at every time after it began."""
    site, values = built(flow, steps=REMOVAL)
    stays, _ = built(flow, steps=LIFTS)
    arrays = {name: np.array([value]) for name, value in soil.items()}
    lighter, heavier = state_of(site, values, **arrays).response, state_of(stays, values, **arrays).response
    common = np.array([6.2, 10.0, 20.0, 30.0])
    common = common[np.isin(common, heavier.times)]
    assert common.size >= 3
    kept = [r.settlement[0, np.searchsorted(r.times, common)] for r in (lighter, heavier)]
    # both time axes are within half a per cent of the answer
    assert (kept[0] <= kept[1] + PROMISE * heavier.settlement.max()).all()
    clay_only = state_of(site, values, **arrays)
    falls = np.diff(clay_only.granular_settlement[0, site.times >= 6.0])
    assert (falls <= 1e-12).all()


@given(soil=st.fixed_dictionaries(SOILS), flow=st.sampled_from(["cv", "k"]))
@PROPERTY
def test_a_layer_cut_in_two_answers_alike(soil, flow):
    """Two layers of the same soil are the one layer: within the promise of 0.5 % that each keeps."""
    whole, values = built(flow)
    parts, part_values = built(flow, halves=2)
    one = {name: np.array([value]) for name, value in soil.items()}
    half = one | {"thickness": 0.5 * one["thickness"]}
    both = {f"clay{i}.{name}": value for i in (0, 1) for name, value in half.items()}
    entire = state_of(whole, values, **one).response.settlement[0]
    cut = ground_state(parts, part_values | both).response.settlement[0]
    assert np.array_equal(whole.times, parts.times)
    assert cut == pytest.approx(entire, abs=2.0 * PROMISE * entire.max())


@given(soil=st.fixed_dictionaries(SOILS), flow=st.sampled_from(["cv", "k"]))
@PROPERTY
def test_strength_grows_while_the_clay_consolidates(soil, flow):
    site, values = built(flow, load=EMBANKMENT)
    state = state_of(site, values, **{name: np.array([value]) for name, value in soil.items()})
    under_crest = state.strength[:, 0, 2, state.ground.clay]
    assert under_crest.shape == (site.record.size, site.cells.n_cell)
    assert (np.diff(under_crest, axis=0) >= -PROMISE * under_crest[:-1]).all()
    assert (under_crest[-1] > under_crest[0]).all()


@given(soil=st.fixed_dictionaries(SOILS), position=st.integers(0, 36))
@PROPERTY
def test_one_realisation_alone_equals_itself_in_company(soil, position):
    """Bit for bit, in everything a state holds, wherever it stands among 37."""
    site, values = built(steps=REMOVAL, load=EMBANKMENT)
    rng = np.random.default_rng(np.random.SeedSequence(2, spawn_key=(position,)))
    crowd = {
        "clay0.thickness": rng.uniform(1.0, 9.0, 37),
        "clay0.kappa": rng.uniform(0.01, 0.09, 37),
        "clay0.pop": rng.uniform(1.0, 60.0, 37),
        "clay0.void_ratio": rng.uniform(1.4, 2.6, 37),
        "site.water_table": rng.uniform(0.2, 2.0, 37),
    }
    for name, value in soil.items():
        crowd[f"clay0.{name}"][position] = value
    alone = ground_state(site, values | {name: value[[position]] for name, value in crowd.items()})
    among = ground_state(site, values | crowd)
    for name in alone.response.__slots__:
        one, many = getattr(alone.response, name), getattr(among.response, name)
        if one.shape == many.shape:  # times, not samples
            assert np.array_equal(one, many)
        else:
            assert np.array_equal(one[0], many[position], equal_nan=name == "degree")
    assert np.array_equal(alone.consolidation.stress[0], among.consolidation.stress[position])
    assert np.array_equal(alone.strength[:, 0], among.strength[:, position])
