"""Whatever the tests: more of them never widen, their order does not matter, useless ones change nothing."""

import math
import sys
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

sys.path.insert(0, str(Path(__file__).parents[1] / "unit" / "parameters"))

from evidence_cases import Parameter, cov, lognormal, ranged, rank, result, updated

PARAMETERS = [
    Parameter("clay.lambda", lognormal(0.4, 0.15, 0.25, horizontal_scale=40.0)),
    Parameter("clay.kappa", lognormal(0.05, 0.2, 0.15, horizontal_scale=40.0)),
    Parameter("clay.M", lognormal(1.0, 0.06)),
]
DEPENDENCE = [("clay.lambda", "clay.kappa", rank(0.5)), ("clay.lambda", "clay.M", rank(-0.2))]
STATIONS = [(0.0, 0.0), (30.0, 0.0)]
MEDIANS = {"lambda": 0.4, "kappa": 0.05, "M": 1.0}

tests_in_hand = st.lists(
    st.tuples(
        st.sampled_from(sorted(MEDIANS)),
        st.floats(-0.6, 0.6),
        st.floats(0.0, 6.0),
        st.one_of(st.none(), st.tuples(st.floats(-80.0, 80.0), st.floats(-80.0, 80.0))),
        st.sampled_from(["", "A", "B"]),
        st.floats(0.02, 0.5),
    ),
    min_size=1,
    max_size=6,
)


def _observations(drawn: list) -> list:
    return [
        result(
            MEDIANS[name] * math.exp(away),
            number,
            parameter=name,
            addresses=(f"clay.{name}",),
            below_top=depth,
            place=place,
            hole=hole,
            error=error,
            bias=cov(0.05),
        )
        for number, (name, away, depth, place, hole, error) in enumerate(drawn)
    ]


def _covariance(space) -> np.ndarray:
    one = space.updated
    return one.factor[0] @ one.correlation @ one.factor[0].T


@settings(deadline=None, max_examples=40)
@given(tests_in_hand, st.booleans())
def test_one_more_test_never_widens_anything(drawn: list, stations: bool) -> None:
    places = STATIONS if stations else STATIONS[:1]
    tests = _observations(drawn)
    fewer = updated(PARAMETERS, tests[:-1], DEPENDENCE, places)
    before = fewer.correlation if fewer.updated is None else _covariance(fewer)
    after = _covariance(updated(PARAMETERS, tests, DEPENDENCE, places))
    assert np.linalg.eigvalsh(before - after)[0] > -1e-9


@settings(deadline=None, max_examples=40)
@given(tests_in_hand, st.randoms(use_true_random=False), st.booleans())
def test_order_of_tests_does_not_matter(drawn: list, random, stations: bool) -> None:
    places = STATIONS if stations else STATIONS[:1]
    tests = _observations(drawn)
    shuffled = tests[:]
    random.shuffle(shuffled)
    one, other = (updated(PARAMETERS, listed, DEPENDENCE, places) for listed in (tests, shuffled))
    np.testing.assert_allclose(_covariance(one), _covariance(other), atol=1e-9)
    np.testing.assert_allclose(one.updated.mean, other.updated.mean, atol=1e-8)
    assert one.updated.chance == pytest.approx(other.updated.chance, rel=1e-6)


@settings(deadline=None, max_examples=30)
@given(tests_in_hand)
def test_sources_add_up_to_the_variance(drawn: list) -> None:
    found = updated(PARAMETERS, _observations(drawn), DEPENDENCE, STATIONS).updated
    np.testing.assert_allclose(found.split.before.sum(axis=1), 1.0, atol=1e-12)
    np.testing.assert_allclose(found.split.after.sum(axis=1), found.score_sd[0] ** 2, atol=1e-9)
    assert (found.split.after > -1e-12).all()
    known = found.split.before[:, 0] + found.split.before[:, 1]
    assert (found.split.after.sum(axis=1) <= known + 1e-9).all()


def test_test_of_huge_error_changes_nothing() -> None:
    before = updated(PARAMETERS, [], DEPENDENCE)
    after = updated(PARAMETERS, [result(0.9, error=1e6)], DEPENDENCE)
    for one, other in zip(before.summary(), after.summary(), strict=True):
        # the logarithm of 1 + 1e12 is 28, so of the variance 0.15^2 / 28 is told at most
        assert other.mean == pytest.approx(one.mean, rel=3e-3)
        assert other.sd == pytest.approx(one.sd, rel=3e-3)


def test_no_test_leaves_the_space_bit_for_bit() -> None:
    bare, tested = (
        updated(PARAMETERS, [], DEPENDENCE, STATIONS),
        updated(PARAMETERS, [], DEPENDENCE, STATIONS),
    )
    assert tested.updated is None
    u = np.random.default_rng(1).standard_normal((50, bare.dimension))
    for name, values in bare.values(bare.correlated(u), 1).items():
        assert np.array_equal(values, tested.values(tested.correlated(u), 1)[name])


def test_data_far_from_what_was_expected_are_told_by_their_chance() -> None:
    parameter = [Parameter("clay.lambda", lognormal(0.4, 0.10))]
    near = updated(parameter, [result(0.42)]).updated
    far = updated(parameter, [result(0.80)]).updated
    assert near is not None
    assert far is not None
    # ln 2 over sqrt(0.10^2 + 0.10^2), two-sided
    assert far.chance == pytest.approx(math.erfc(math.log(2.0) / math.sqrt(0.02) / math.sqrt(2.0)), rel=1e-6)
    assert near.chance > 0.5 > 0.01 > far.chance


def test_same_bits_alone_and_in_a_batch_at_every_station() -> None:
    parameters = [Parameter("clay.lambda", ranged(0.4, 0.15, 0.1, 0.4)), PARAMETERS[2]]
    law = parameters[0].distribution
    object.__setattr__(law, "horizontal_scale", 40.0)
    space = updated(parameters, [result(0.5, place=(10.0, 0.0))], None, STATIONS)
    u = np.random.default_rng(2).standard_normal((300, space.dimension))
    for station in range(2):
        whole = space.values(space.correlated(u), station)["clay.lambda"]
        alone = [space.values(space.correlated(u[i : i + 1]), station)["clay.lambda"][0] for i in range(300)]
        assert np.array_equal(whole, alone)
