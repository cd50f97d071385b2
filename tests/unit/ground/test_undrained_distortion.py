"""Undrained distortion through time, by layer and by form of the modulus."""

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, stage

from probsoil.errors import ParameterError
from probsoil.ground.load_displacement import embankment_displacement, strip_displacement
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model
from probsoil.ground.undrained_distortion import undrained_modulus

FOOTING = '[load]\nshape = "rectangle"\nwidth = 2\nlength = 3\ndepth = {depth}\nsubmergence = false'
LOADS = {
    "circle": '[load]\nshape = "circle"\ndiameter = 6\nat = 2\nsubmergence = true\nfill_unit_weight = 10',
    "rectangle": FOOTING.format(depth=0),
    "strip": '[load]\nshape = "strip"\nwidth = 2\nat = 0.5\ndepth = 0.7\nsubmergence = false',
}
FILL = (
    '[load]\nshape = "embankment"\ncrest_width = 6\nside_slope = 2\nfill_unit_weight = 19\nfill_phi = 33\n'
    "submergence = true\nberm_width = 3\nberm_height = 0.5"
)
MODULUS = "{ Eu = 4000 }"


def state_of(case, **values):
    site = site_model(case)
    return site, ground_state(site, central(case) | values)


def case_of(load, *, modulus=MODULUS, amounts=(40.0, -40.0), key="pressure", layers=None):
    ground = layers or [clay("clay", 6.0, undrained_modulus=modulus)]
    stages = [
        stage("on", 0.0, 0.2, **{key: amounts[0]}),
        stage("off", 2.0, 2.2, **{key: amounts[1]}),
    ]
    return scenario(ground, stages, load=load, base="drained")


@pytest.mark.parametrize("shape", LOADS)
def test_it_comes_with_the_load_and_goes_with_it(shape):
    site, state = state_of(case_of(LOADS[shape]))
    moved = state.response.distortion[0]
    full = moved[np.searchsorted(site.times, 0.2)]
    assert full > 0.0
    between = (site.times >= 0.2) & (site.times <= 2.0)
    assert moved[between] == pytest.approx(full, rel=1e-12)
    during = site.times <= 0.2
    assert moved[during] == pytest.approx(full * site.times[during] / 0.2, abs=1e-12)
    assert moved[site.times >= 2.2] == pytest.approx(0.0, abs=1e-15)
    assert moved[0] == 0.0


@pytest.mark.parametrize("shape", LOADS)
def test_it_is_settlement_and_no_consolidation(shape):
    amounts = (40.0, -10.0)
    site, stiff = state_of(case_of(LOADS[shape], modulus=None, amounts=amounts))
    _, soft = state_of(case_of(LOADS[shape], amounts=amounts))
    added = soft.response.settlement - stiff.response.settlement
    assert added == pytest.approx(soft.response.distortion, abs=1e-15)
    assert stiff.response.distortion.size == 0
    assert np.array_equal(soft.response.degree, stiff.response.degree, equal_nan=True)
    assert np.array_equal(soft.consolidation.stress, stiff.consolidation.stress)
    assert np.array_equal(soft.response.bearing, stiff.response.bearing)
    assert site.times.size == added.shape[1]


def test_fill_that_rises_and_is_trimmed():
    site, state = state_of(case_of(FILL, key="height", amounts=(2.0, -0.7)))
    moved = state.response.distortion[0]
    assert moved[np.searchsorted(site.times, 0.2)] > moved[-1] > 0.0


def test_half_the_modulus_gives_twice_the_distortion_of_that_layer_alone():
    layers = [
        clay("upper", 2.0, undrained_modulus="{ Eu = 5000 }"),
        sand("sand", 1.0),
        clay("lower", 3.0, undrained_modulus="{ Eu = 8000 }"),
        clay("deep", 2.0),
    ]
    case = case_of(LOADS["rectangle"], layers=layers, amounts=(40.0, -5.0))
    values = {"upper.Eu": np.array([5000.0, 2500.0, 5000.0]), "lower.Eu": np.array([8000.0, 8000.0, 4000.0])}
    _, state = state_of(case, **values)
    plain, upper, lower = state.response.distortion[:, -1]
    assert (upper - plain) + (lower - plain) == pytest.approx(plain, rel=1e-12)
    assert upper > lower > plain  # more of it comes from nearer to the load


def test_ratio_goes_with_the_strength_in_triaxial_compression():
    """Whatever the mode factor; S and m given, so that su is 0.25 times the stress in situ."""
    layer = clay(
        "clay", 6.0, strength="{ S = 0.25, m = 0.8 }", undrained_modulus="{ ratio = 400 }", unit_weight=17
    )
    case = case_of(LOADS["circle"], layers=[layer])
    site, state = state_of(case, **{"site.mode_factor": np.array([0.7])})
    modulus = undrained_modulus(site, central(case), state.ground)[0]
    assert modulus == pytest.approx(400.0 * 0.25 * state.ground.points.stress[0], rel=1e-12)


def test_nothing_above_the_base_counts():
    """A footing at 1 m on 6 m of clay is one at ground level on 5 m of clay."""
    deep = case_of(FOOTING.format(depth=1.0))
    shallow = case_of(FOOTING.format(depth=0), layers=[clay("clay", 5.0, undrained_modulus=MODULUS)])
    moved = [state_of(case)[1].response.distortion[0].max() for case in (deep, shallow)]
    assert moved[0] == pytest.approx(moved[1], rel=1e-12)


@pytest.mark.parametrize("position", [0, 5, 18])
def test_one_realisation_alone_equals_itself_in_company(position):
    case = case_of(LOADS["circle"], modulus="{ ratio = 300 }")
    site, rng = site_model(case), np.random.default_rng(3)
    crowd = {"clay.Eu_su": rng.uniform(100.0, 600.0, 19), "clay.thickness": rng.uniform(4.0, 8.0, 19)}
    among = ground_state(site, central(case) | crowd).response
    alone = ground_state(
        site, central(case) | {name: one[[position]] for name, one in crowd.items()}
    ).response
    assert np.array_equal(among.distortion[position], alone.distortion[0])
    assert np.array_equal(among.settlement[position], alone.settlement[0])


def test_what_cannot_be_is_refused():
    with pytest.raises(ParameterError, match="base >= top >= 0"):
        embankment_displacement(1.0, 0.0, base_width=2.0, top_width=3.0)
    with pytest.raises(ParameterError, match="width"):
        strip_displacement(1.0, 0.0, width=0.0)
    with pytest.raises(ParameterError, match="depth"):
        strip_displacement(-1.0, 0.0, width=1.0)
