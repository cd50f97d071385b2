"""What must hold for any ground whose water is not at rest, or which is still consolidating."""

import functools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.ground.clay_settlement import settlement_when_done
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model
from probsoil.scenario import parse_scenario

PROPERTY = settings(max_examples=10, deadline=None, derandomize=True)
TEXT = """
format = 1
title = "any ground"
seed = 1
horizon = 30
[site]
water_table = 0.8
base = "drained"
{head}
mode_factor = 0.8
[[layers]]
name = "crust"
soil = "clay"
thickness = 1.2
unit_weight = 17.5
void_ratio = 1.2
lambda = 0.15
kappa = 0.03
preconsolidation = {{ pop = 40 }}
M = 1.1
permeability = {{ cv = 3 }}
[[layers]]
name = "clay"
soil = "clay"
thickness = 6
unit_weight = 16
void_ratio = 1.9
lambda = 0.3
kappa = 0.05
preconsolidation = {{ {form} }}
M = 1.0
permeability = {{ k = 1e-9, ck = 0.8 }}
{excess}
[load]
shape = "embankment"
crest_width = 12
side_slope = 2
fill_unit_weight = 19
fill_phi = 33
submergence = {wet}
[[stages]]
name = "lift"
height = 1.5
start = 0.5
end = 0.8
[[limits]]
name = "end"
quantity = "settlement"
at = 30
not_more_than = 1
"""
POP, OCR = "pop = 12", "ocr = 1.3"


@functools.cache
def built(head="", excess="", form=POP, wet="true"):
    case = parse_scenario(TEXT.format(head=head, excess=excess, form=form, wet=wet))
    values = {one.address: one.distribution.expectation for one in case.quantities()}
    return site_model(case), values


def state_of(built_site, **values):
    site, central = built_site
    named = {name.replace("__", "."): np.atleast_1d(value) for name, value in values.items()}
    return ground_state(site, central | named)


def same_bits(one, other):
    for name in one.response.__slots__:
        if name not in ("times", "record", "slip_times"):
            a, b = getattr(one.response, name), getattr(other.response, name)
            assert np.array_equal(a, b, equal_nan=a.dtype.kind == "f"), name
    assert np.array_equal(one.consolidation.stress, other.consolidation.stress)
    assert np.array_equal(one.strength, other.strength)


@given(
    water=st.floats(0.0, 2.5),
    thickness=st.floats(2.0, 9.0),
    k=st.floats(1e-10, 1e-8),
    form=st.sampled_from([POP, OCR]),
)
@PROPERTY
def test_a_level_that_is_the_water_table_changes_nothing(water, thickness, k, form):
    """Bit for bit."""
    arrays = {"site__water_table": water, "clay__thickness": thickness, "clay__k": k}
    at_rest = state_of(built(form=form), **arrays)
    same_bits(at_rest, state_of(built("base_head = 0.8", form=form), **arrays, site__base_head=water))


@given(shape=st.sampled_from(["sine", "uniform", "triangular"]), thickness=st.floats(2.0, 9.0))
@PROPERTY
def test_no_excess_is_none(shape, thickness):
    """Stresses bit for bit; settlement within the promise, as the time axis begins with other steps."""
    none = state_of(built(), clay__thickness=thickness)
    excess = f'initial_excess = {{ pressure = 0, shape = "{shape}" }}'
    site, _ = built(excess=excess)
    zero = state_of(built(excess=excess), clay__thickness=thickness)
    assert np.array_equal(zero.ground.points.stress, none.ground.points.stress)
    assert np.array_equal(zero.ground.yield_stress, none.ground.yield_stress)
    assert np.array_equal(zero.strength_before, none.strength_before)
    common = np.intersect1d(site.times, built()[0].times)
    a, b = (
        state.response.settlement[0, np.searchsorted(state.response.times, common)] for state in (zero, none)
    )
    assert a == pytest.approx(b, abs=0.005 * b[-1])
    done = state_of(built(excess="initial_excess = { degree = 1, load = 20 }"), clay__thickness=thickness)
    assert done.ground.points.stress == pytest.approx(none.ground.points.stress, rel=1e-9)


@given(form=st.sampled_from([POP, OCR]), thickness=st.floats(3.0, 8.0))
@PROPERTY
def test_more_artesian_head_never_settles_less_in_the_end(form, thickness):
    """With ocr or pop, which move with the stress in situ; a preconsolidation stress given does not."""
    heads = np.linspace(4.0, -0.8, 7)
    site, _ = built("base_head = 0.8", form=form, wet="false")
    state = state_of(
        built("base_head = 0.8", form=form, wet="false"),
        site__base_head=heads,
        clay__thickness=np.full(heads.size, thickness),
    )
    assert not state.response.uplifted.any()
    ground = state.ground
    added = ground.load.stress[-1][:, ground.clay]
    done = settlement_when_done(site, ground, ground.yield_stress[:, ground.clay], added)
    assert (np.diff(done) >= -1e-12).all()
    before = state.strength_before[:, ground.clay]
    assert (np.diff(before, axis=0) <= 1e-9).all()
    assert (state.response.slip[:-1] >= state.response.slip[1:] - 1e-9).all()


@given(excess=st.floats(1.0, 10.0), thickness=st.floats(3.0, 8.0), wet=st.sampled_from(["true", "false"]))
@PROPERTY
def test_excess_settles_the_ground_before_any_load_and_softens_it(excess, thickness, wet):
    given_excess = "initial_excess = { pressure = 5 }"
    site, _ = built(excess=given_excess, wet=wet)
    arrays = {"clay__thickness": thickness}
    with_it = state_of(built(excess=given_excess, wet=wet), clay__initial_excess=excess, **arrays)
    without = state_of(built(wet=wet), **arrays)
    assert with_it.response.converged.all()
    before = site.times <= 0.5
    settled = with_it.response.settlement[0, before]
    assert (np.diff(settled) > 0.0).all()
    assert (with_it.strength_before <= without.strength_before + 1e-12).all()
    assert with_it.response.slip[0, 0] <= without.response.slip[0, 0]
    degree = with_it.response.degree_at_record
    assert ((degree >= 0.0) & (degree <= 1.0)).all()
    late = with_it.consolidation.stress[0, -1] <= (
        with_it.ground.points.stress + with_it.ground.points.excess + with_it.ground.load.stress[-1]
    )[0, with_it.ground.clay] * (1.0 + 1e-3)
    assert late.all()


@given(position=st.integers(0, 18))
@PROPERTY
def test_one_realisation_alone_equals_itself_in_company(position):
    """Bit for bit, with seepage and excess at once."""
    site, central = built("base_head = 0", "initial_excess = { degree = 0.6, load = 15 }")
    rng = np.random.default_rng(np.random.SeedSequence(5, spawn_key=(position,)))
    crowd = {
        "site.base_head": rng.uniform(-0.5, 4.0, 19),
        "site.water_table": rng.uniform(0.2, 2.0, 19),
        "clay.thickness": rng.uniform(3.0, 8.0, 19),
        "clay.k": rng.uniform(3e-10, 3e-9, 19),
        "crust.cv": rng.uniform(1.0, 6.0, 19),
        "clay.initial_degree": rng.uniform(0.05, 0.95, 19),
        "clay.initial_load": rng.uniform(1.0, 15.0, 19),
    }
    alone = ground_state(site, central | {name: value[[position]] for name, value in crowd.items()})
    among = ground_state(site, central | crowd)
    assert np.array_equal(alone.response.settlement[0], among.response.settlement[position])
    assert np.array_equal(alone.response.slip[0], among.response.slip[position])
    assert np.array_equal(alone.ground.points.stress[0], among.ground.points.stress[position])
    assert np.array_equal(alone.strength[:, 0], among.strength[:, position])
