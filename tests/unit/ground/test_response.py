"""The chain from the ground in situ to the answer: strength through the stages, degrees, screening."""

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage

from probsoil.ground.clay_settlement import cell_settlement
from probsoil.ground.response import ground_state, respond, screened
from probsoil.ground.slip_circles import candidate_circles
from probsoil.ground.undrained_strength import (
    normally_consolidated_strength_ratio,
    plastic_volumetric_ratio,
    undrained_shear_strength,
)

EMBANKMENT = (
    '[load]\nshape = "embankment"\ncrest_width = 8\nside_slope = 2\nfill_unit_weight = 19\n'
    "fill_phi = 33\nsubmergence = false"
)
MODE = 0.8


@pytest.fixture(scope="module")
def built():
    """A small embankment in two lifts, the second taken off at last, on clay with sand within it."""
    case = scenario(
        [
            clay("crust", 1.0, lam=0.12, kappa=0.02, void_ratio=1.1, preconsolidation="{ stress = 70 }"),
            clay("soft", 4.0, preconsolidation="{ pop = 8 }", permeability="{ cv = 3 }"),
            sand("sand", 1.0),
            clay("deep", 3.0, preconsolidation="{ ocr = 1.3 }"),
        ],
        [
            stage("one", 0, 0.2, height=1.0),
            stage("two", 1, 1.2, height=1.0),
            stage("off", 6, 6.2, height=-1.0),
        ],
        load=EMBANKMENT,
        water_table=0.8,
        horizon=40,
    )
    site = site_model(case)
    values = central(case) | {"site.mode_factor": MODE}
    return site, values, ground_state(site, values)


def test_strength_before_loading_follows_from_stress_and_history(built):
    _, _, state = built
    in_soft = state.ground.points.layer == 1
    stress = state.ground.points.stress[0, in_soft]
    ratio = plastic_volumetric_ratio(0.3, 0.04)
    strength = MODE * undrained_shear_strength(
        stress, stress + 8.0, normally_consolidated_strength_ratio(1.0, ratio), ratio
    )
    assert state.strength_before[0, in_soft] == pytest.approx(strength, rel=1e-12)


def test_strength_in_three_zones(built):
    """Nothing is gained beyond the toe; under the crest more than under the slope."""
    site, _, state = built
    clay_cells = state.ground.clay
    for slot in range(site.record.size):
        toe, slope, crest = (state.strength[slot, 0, zone, clay_cells] for zone in range(3))
        assert toe == pytest.approx(state.strength_before[0, clay_cells], rel=1e-12)
        assert (slope >= toe * (1 - 1e-9)).all()
        assert (crest >= slope * (1 - 1e-9)).all()
    assert (crest > 1.05 * toe).any()
    assert (state.strength[:, :, :, ~clay_cells] == 0.0).all()


def test_strength_under_the_crest_is_that_of_the_present_stress(built):
    site, _, state = built
    clay_cells = state.ground.clay
    layer = state.ground.points.layer[clay_cells]
    for slot in range(site.record.size):
        expected = MODE * undrained_shear_strength(
            state.consolidation.stress[0, slot],
            np.maximum(state.consolidation.yield_stress[0, slot], state.consolidation.stress[0, slot]),
            state.ground.columns.strength_ratio[0, layer],
            state.ground.columns.strength_exponent[0, layer],
        )
        assert state.strength[slot, 0, 2, clay_cells] == pytest.approx(expected, rel=1e-12)


def test_slip_is_looked_at_while_there_is_fill(built):
    site, _, state = built
    assert site.slip_times.tolist() == [0.2, 1.2, 6.2]
    assert state.response.slip.shape == (1, 3)
    assert state.response.slip[0, 1] < state.response.slip[0, 0]  # higher fill
    assert state.response.slip[0, 2] > state.response.slip[0, 0]  # one metre again, on stronger clay


def test_degree_at_record_is_settlement_over_what_the_present_load_brings(built):
    site, _, state = built
    response = state.response
    first = np.searchsorted(site.times, 0.2)
    stress0, clay_cells = state.ground.points.stress[0, state.ground.clay], state.ground.clay
    added = state.ground.load.stress[np.searchsorted(site.knots, 0.2), 0, clay_cells]
    layer = state.ground.points.layer[clay_cells]
    columns = state.ground.columns
    lam, kap, e0 = (getattr(columns, name)[0, layer] for name in ("lam", "kap", "void_ratio"))
    past = state.ground.yield_stress[0, clay_cells]
    reached = stress0 + added
    lost = np.where(
        reached > past,
        kap * np.log(past / stress0) + lam * np.log(reached / past),
        kap * np.log(reached / stress0),
    )
    done = (state.ground.points.thickness[0, clay_cells] / (1.0 + e0) * lost).sum()
    expected = state.consolidation.settlement[0, first] / done
    assert response.degree_at_record[0, 0] == pytest.approx(expected, rel=1e-9)


def test_degree_after_the_last_stage_only(built):
    site, _, state = built
    before = site.times < 6.2
    assert np.isnan(state.response.degree[0, before]).all()
    assert ((state.response.degree[0, ~before] >= 0.0) & (state.response.degree[0, ~before] <= 1.0)).all()


def test_respond_is_the_response_of_the_state(built):
    site, values, state = built
    again = respond(site, values)
    assert np.array_equal(again.settlement, state.response.settlement)
    assert np.array_equal(again.slip, state.response.slip)


def test_screening_loses_nothing_in_its_pilot_and_little_beyond(built):
    site, values, _ = built
    rng = np.random.default_rng(np.random.SeedSequence(11, spawn_key=(0,)))

    def spread(n, width):
        drawn = np.exp(rng.uniform(-width, width, (4, n)))
        return values | {
            "soft.pop": 8.0 * drawn[0],
            "soft.lambda": 0.3 * drawn[1],
            "soft.M": np.clip(1.0 * drawn[2], 0.5, 1.8),
            "soft.thickness": 4.0 * drawn[3],
        }

    pilot = spread(48, 0.5)
    smaller = screened(site, pilot)
    candidates = [len(candidate_circles(layout)) for layout in site.layouts]
    assert all(0 < kept.n_circle < many for kept, many in zip(smaller.families, candidates, strict=True))
    # those chosen lie beside the full layout in depth too, so they may find a little less
    assert respond(smaller, pilot).slip == pytest.approx(respond(site, pilot).slip, rel=0.01)
    others = spread(200, 0.3)
    worst = screened(site, others, within=0.0)
    assert respond(smaller, others).slip == pytest.approx(respond(worst, others).slip, rel=0.01)


def test_cells_add_up_to_the_settlement_of_the_clay(built):
    site, _, state = built
    shortening = cell_settlement(site, state.ground, state.consolidation)
    assert shortening.shape == (1, site.cells.n_cell)
    assert shortening.sum() == pytest.approx(state.consolidation.settlement[0, -1], rel=1e-9)


def test_clay_all_through_has_no_frictional_strength():
    """The same ground with its sand given away: the factor rests on undrained strength alone."""
    stages = [stage("one", 0, 0.2, height=1.5)]
    layers = [clay("upper", 2.0, preconsolidation="{ pop = 20 }"), clay("lower", 4.0)]
    weak = scenario(layers, stages, load=EMBANKMENT, water_table=0.5)
    site = site_model(weak)
    values = central(weak)
    single = respond(site, values | {"site.mode_factor": 1.0}).slip
    double = respond(site, values | {"site.mode_factor": 2.0}).slip
    assert single.shape == (1, 1)
    # what doubles is the clay's part; the fill's friction stays
    assert 1.2 * single[0, 0] < double[0, 0] < 2.0 * single[0, 0]


def test_floors_and_clips_are_reported(built):
    site, values, _ = built
    changed = values | {"crust.preconsolidation": np.array([1.0, 70.0]), "soft.kappa": np.array([0.04, 0.5])}
    response = respond(site, changed)
    assert response.floored.tolist() == [True, False]
    assert response.kappa_clipped.tolist() == [False, True]
    assert response.converged.all()


def test_a_realisation_that_cannot_be_solved_does_not_stop_the_others():
    """Compression so strong that the voids would close is marked, not raised, and yields no number."""
    case = scenario(
        [clay("soft", 6.0, void_ratio=1.5, lam=0.4, kappa=0.05, permeability="{ k = 1e-9, ck = 0.5 }")],
        [stage("fill", 0, 0.1, height=3.0)],
        load=EMBANKMENT,
    )
    values = central(case) | {"soft.lambda": np.array([0.6, 0.1])}
    response = respond(site_model(case), values)
    assert response.converged.tolist() == [False, True]
    assert response.voids_closed.tolist() == [True, False]
    assert np.isnan(response.settlement[0, -1])
    assert np.isnan(response.slip[0]).all()
    assert np.isfinite(response.settlement[1]).all()
    assert np.isfinite(response.slip[1]).all()


def test_there_is_nothing_to_screen_under_a_wide_load():
    case = scenario([clay("soft", 4.0)], [stage("fill", 0, 0.1, pressure=30)])
    site = site_model(case)
    assert screened(site, central(case)) is site
