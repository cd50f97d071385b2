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
    kept = [stage("fill", 0, 0.2, pressure=50), stage("more", 2.0, 2.1, pressure=0.001)]
    removed = [stage("fill", 0, 0.2, pressure=65), stage("off", 2.0, 2.1, pressure=-15)]
    wanted = [10.1, 50.1]

    def creep(stages):
        times, _, secondary = response(case(stages=stages), wanted)
        return secondary[np.searchsorted(times, 50.1)] - secondary[np.searchsorted(times, 10.1)]

    without, after = creep(kept), creep(removed)
    # overconsolidated by 15 kPa on about 65: nearly down to the slope of the reloading line
    assert KAPPA / LAMBDA * without < after < 0.35 * without


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
