"""Creep by hand: per decade of time, from the end of primary, and what a removed surcharge leaves of it."""

import numpy as np
import pytest
from ground_cases import central, clay, refined, sand, scenario, stage

from probsoil.errors import ParameterError
from probsoil.ground.response import ground_state
from probsoil.ground.secondary_compression import creep_reduction

FAST = '{ k = "1e-8 m/s", ck = 1.0 }'
RATIO, LAMBDA, KAPPA, VOIDS, THICKNESS = 0.05, 0.4, 0.05, 1.8, 1.5


def case(ratio=RATIO, stages=None, **keys):
    soil = {"lam": LAMBDA, "kappa": KAPPA, "void_ratio": VOIDS, "permeability": FAST} | keys
    if ratio is not None:
        soil["C_alpha_ratio"] = ratio
    return scenario(
        [sand("cover", 1.0), clay("soft", THICKNESS, **soil)],
        stages or [stage("fill", 0, 0.2, pressure=50)],
        base="drained",
        horizon=60,
    )


def response(one, at=()):
    site = refined(one, 1, also=at)
    found = ground_state(site, central(one)).response
    return site.times, found.settlement[0], found.secondary[0]


def test_a_decade_by_hand():
    """C_alpha/(1 + e0) H per tenfold time since the middle of loading, Cc being lambda ln 10."""
    wanted = [0.1 + 5.0, 0.1 + 50.0]
    times, _, secondary = response(case(), wanted)
    found = secondary[np.searchsorted(times, wanted[1])] - secondary[np.searchsorted(times, wanted[0])]
    assert found == pytest.approx(RATIO * LAMBDA * np.log(10.0) / (1.0 + VOIDS) * THICKNESS, rel=1e-9)


def test_settlement_holds_primary_and_creep():
    times, plain, none = response(case(ratio=None))
    again, settled, secondary = response(case())
    assert np.array_equal(times, again)
    assert np.array_equal(none, np.zeros_like(none))
    assert settled == pytest.approx(plain + secondary, rel=1e-12, abs=1e-15)


def test_creep_begins_when_primary_is_nearly_done():
    _, plain, secondary = response(case(permeability='{ k = "5e-10 m/s", ck = 1.0 }'))
    final = plain.max()
    _, without, _ = response(case(ratio=None, permeability='{ k = "5e-10 m/s", ck = 1.0 }'))
    begun = secondary > 0.0
    assert (without[~begun] <= 0.97 * without[-1]).all()
    assert (without[begun] >= 0.95 * without[-1] - 0.001 * final).all()
    assert 0 < begun.sum() < begun.size


def test_every_segment_creeps_from_its_own_primary():
    slow = '{ k = "2e-11 m/s", ck = 1.0 }'
    keys = {"lam": LAMBDA, "kappa": KAPPA, "void_ratio": VOIDS, "C_alpha_ratio": RATIO}
    one = scenario(
        [
            clay("quick", 1.0, permeability=FAST, **keys),
            sand("seam", 0.5),
            clay("slow", 6.0, permeability=slow, **keys),
        ],
        [stage("fill", 0, 0.2, pressure=50)],
        base="undrained",
        horizon=20,
    )
    times, _, secondary = response(one, [2.1, 19.1])
    found = secondary[np.searchsorted(times, 19.1)] - secondary[np.searchsorted(times, 2.1)]
    quick = RATIO * LAMBDA * np.log(10.0) / (1.0 + VOIDS) * 1.0 * np.log10(19.0 / 2.0)
    assert found == pytest.approx(quick, rel=1e-9)


def test_a_removed_surcharge_leaves_less_creep():
    kept = [stage("fill", 0, 0.2, pressure=50)]
    removed = [stage("fill", 0, 0.2, pressure=65), stage("off", 2.0, 2.1, pressure=-15)]
    wanted = [10.1, 50.1]

    def creep(stages):
        times, _, secondary = response(case(stages=stages), wanted)
        return secondary[np.searchsorted(times, 50.1)] - secondary[np.searchsorted(times, 10.1)]

    without, after = creep(kept), creep(removed)
    # overconsolidated by 15 kPa on about 65: nearly down to the slope of the reloading line
    assert KAPPA / LAMBDA * without < after < 0.35 * without


FILL = stage("fill", 0, 0.2, pressure=50)


def creep_between(stages, first, last, **keys):
    times, _, secondary = response(case(stages=stages, **keys), [first, last])
    return secondary[np.searchsorted(times, last)] - secondary[np.searchsorted(times, first)]


@pytest.mark.parametrize("days", [1.0, 36.5, 365.0])
@pytest.mark.parametrize("pressure", [0.001, -0.001])
def test_next_to_nothing_changes_next_to_nothing(days, pressure):
    """However long or short the stage; 0.001 kPa on some 70 moves the age by 3 in 10,000."""
    little = stage("little", 10.0, 10.0 + days / 365.25, pressure=pressure)
    for first, last in ((5.0, 59.0), (9.0, 12.0)):
        alone = creep_between([FILL], first, last)
        assert creep_between([FILL, little], first, last) == pytest.approx(alone, rel=1e-3)


@pytest.mark.parametrize("pressure", [-0.5, -20.0, 30.0])
def test_what_comes_later_changes_nothing_before(pressure):
    times, alone, _ = response(case(stages=[FILL]), [1.9, 20.0, 58.0])
    late = [FILL, stage("late", 59.0, 59.5, pressure=pressure)]
    again, settled, _ = response(case(stages=late), [1.9, 20.0, 58.0])
    for time in (1.9, 20.0, 58.0):
        before = alone[np.searchsorted(times, time)]
        # both time axes are within half a per cent of the answer
        assert settled[np.searchsorted(again, time)] == pytest.approx(before, rel=0.005)


def test_paving_after_a_surcharge_does_not_make_the_clay_young():
    """By hand: the age goes on from the surcharge, and the overconsolidation falls a little."""
    surcharge = [stage("fill", 0, 0.2, pressure=65), stage("off", 2.0, 2.1, pressure=-15)]
    paved = [*surcharge, stage("paving", 4.0, 4.1, pressure=2)]
    decades = np.log10((50.0 - 0.1) / (10.0 - 0.1))
    whole = RATIO * LAMBDA * np.log(10.0) / (1.0 + VOIDS) * THICKNESS * decades
    one = case(stages=surcharge)
    state = ground_state(refined(one, 1), central(one))
    stress0 = state.ground.points.stress[0, state.ground.clay]
    for stages, present in ((surcharge, 50.0), (paved, 52.0)):
        left = creep_reduction((stress0 + 65.0) / (stress0 + present), KAPPA / LAMBDA)
        share = np.average(left, weights=state.ground.points.thickness[0, state.ground.clay])
        # the surcharge has all but worked through: 0.5 % of it may be left
        assert creep_between(stages, 10.0, 50.0) == pytest.approx(whole * share, rel=0.02)


def test_a_large_increase_begins_anew():
    """Doubled stress leaves nothing of the age: the spell by hand, counted from the middle of the stage."""
    stages = [FILL, stage("more", 10.0, 10.2, pressure=80)]
    decades = np.log10((59.0 - 10.1) / (20.0 - 10.1))
    by_hand = RATIO * LAMBDA * np.log(10.0) / (1.0 + VOIDS) * THICKNESS * decades
    assert creep_between(stages, 20.0, 59.0) == pytest.approx(by_hand, rel=1e-4)


def test_a_modest_increase_makes_the_clay_younger_along_lines_of_equal_age():
    """By hand, cell by cell in one thin segment: r to the power of -(1 - kappa/lambda)/(C_alpha/Cc)."""
    thin = [
        sand("cover", 1.0),
        clay("soft", 0.1, lam=LAMBDA, kappa=KAPPA, void_ratio=VOIDS, permeability=FAST, C_alpha_ratio=RATIO),
    ]
    stages = [FILL, stage("more", 10.0, 10.2, pressure=2.0)]
    one = scenario(thin, stages, base="drained", horizon=60)
    times, _, secondary = response(one, [12.0, 59.0])
    found = secondary[np.searchsorted(times, 59.0)] - secondary[np.searchsorted(times, 12.0)]
    state = ground_state(refined(one, 1), central(one))
    stress = float(state.ground.points.stress[0, state.ground.clay].mean()) + 50.0
    age = (10.1 - 0.1) * ((stress + 2.0) / stress) ** (-(1.0 - KAPPA / LAMBDA) / RATIO)
    decades = np.log10((59.0 - 10.1 + age) / (12.0 - 10.1 + age))
    by_hand = RATIO * LAMBDA * np.log(10.0) / (1.0 + VOIDS) * 0.1 * decades
    assert found == pytest.approx(by_hand, rel=2e-3)  # stress changes by 1 % over the clay


@pytest.mark.parametrize(("overconsolidation", "expected"), [(1.0, 1.0), (1.1, 0.2 + 0.8 / np.e), (5.0, 0.2)])
def test_reduction_by_hand(overconsolidation, expected):
    assert float(creep_reduction(overconsolidation, 0.2)) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ((0.9, 0.2), "overconsolidation must be finite and at least 1"),
        ((1.0, -0.1), "kappa_over_lambda must be"),
    ],
)
def test_arguments_out_of_range_are_refused(arguments, message):
    with pytest.raises(ParameterError, match=message):
        creep_reduction(*arguments)


def test_an_index_given_outright_is_the_ratio_times_the_compression_index():
    """To rounding: the ratio is made from it and made into it again."""
    index = RATIO * LAMBDA * np.log(10.0)
    stages = [stage("fill", 0, 0.2, pressure=50), stage("more", 5, 5.2, pressure=5)]
    _, _, by_ratio = response(case(stages=stages))
    _, _, outright = response(case(ratio=None, stages=stages, C_alpha=index))
    assert by_ratio[-1] > 0.0
    np.testing.assert_allclose(outright, by_ratio, rtol=1e-12)
