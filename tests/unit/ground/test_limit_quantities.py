"""What each limit watches, from answers made up so that the right number is plain."""

from dataclasses import replace

import numpy as np
import pytest
from ground_cases import clay, scenario, site_model, stage

from probsoil.ground.limit_quantities import limit_quantities, slip_with_model_error
from probsoil.ground.response import Response

EMBANKMENT = (
    '[load]\nshape = "embankment"\ncrest_width = 10\nside_slope = 2\nfill_unit_weight = 19\n'
    "fill_phi = 33\nsubmergence = false"
)
STAGES = [
    stage("first", 0.0, 0.2, height=1.0),
    stage("second", 1.0, 1.5, height=1.0),
    stage("off", 3, 4, height=-2.0),
]
ERRORS = {"model_error.settlement": 1.0, "model_error.stability": 1.0}


def limit(quantity, **keys):
    lines = ["[[limits]]", f'name = "{quantity} {keys}"', f'quantity = "{quantity}"']
    return "\n".join([*lines, *(f"{key} = {value}" for key, value in keys.items())])


def case(*limits, stages=STAGES[:2]):
    return scenario([clay("soft", 5.0)], stages, load=EMBANKMENT, limits=list(limits), horizon=20.0)


def answer(site, **parts):
    """Response whose settlement is its time in millimetres, sample by sample a little more."""
    n = 3
    grown = 1.0 + 0.1 * np.arange(n)[:, None]
    degree = np.where(site.times >= site.last_change, 0.5, np.nan) * np.ones((n, 1))
    made = {
        "times": site.times,
        "settlement": 1e-3 * site.times * grown,
        "secondary": np.zeros((3, site.times.size)),
        "degree": degree,
        "record": site.record,
        "degree_at_record": 0.01 * site.record * grown,
        "slip_times": site.slip_times,
        "slip": (2.0 - 0.3 * np.arange(site.slip_times.size)) * grown,
        "critical_circle": np.zeros((n, site.slip_times.size), dtype=np.int64),
        "converged": np.ones(n, dtype=bool),
        "voids_closed": np.zeros(n, dtype=bool),
        "floored": np.zeros(n, dtype=bool),
        "kappa_clipped": np.zeros(n, dtype=bool),
    }
    return Response(**(made | parts))


def watched(*limits, stages=STAGES[:2], values=ERRORS, **parts):
    scenario_now = case(*limits, stages=stages)
    site = site_model(scenario_now)
    made = {name: part(site) if callable(part) else part for name, part in parts.items()}
    return limit_quantities(site, scenario_now.limits, answer(site, **made), values), site


def test_settlement_at_a_time_and_between_two():
    found, _ = watched(
        limit("settlement", at=7.5, not_more_than=1), limit("settlement", between=[2.0, 7.5], not_more_than=1)
    )
    assert found[:, 0] == pytest.approx([0.0075, 0.00825, 0.009], rel=1e-12)
    assert found[:, 1] == pytest.approx([0.0055, 0.00605, 0.0066], rel=1e-12)


def test_model_error_multiplies_settlement_and_safety():
    values = {
        "model_error.settlement": np.array([1.0, 2.0, 0.5]),
        "model_error.stability": np.array([1.0, 0.9, 1.2]),
    }
    found, site = watched(
        limit("settlement", at=10.0, not_more_than=1), limit("slip_safety", not_less_than=1), values=values
    )
    assert found[:, 0] == pytest.approx([0.010, 0.022, 0.006], rel=1e-12)
    assert found[:, 1] == pytest.approx([1.7, 0.9 * 1.7 * 1.1, 1.2 * 1.7 * 1.2], rel=1e-12)
    factors = slip_with_model_error(answer(site), values)
    assert factors.shape == (3, 2)
    assert factors[:, 1] == pytest.approx(found[:, 1], rel=1e-12)


def test_slip_is_the_least_over_stage_ends_or_that_of_one_time():
    found, site = watched(
        limit("slip_safety", not_less_than=1),
        limit("slip_safety", at=0.2, not_less_than=1),
        limit("slip_safety", at=0.7, not_less_than=1),
    )
    # made up: 2.0 at the first stage end, 1.7 in between, 1.4 at the second
    assert site.slip_times.tolist() == [0.2, 0.7, 1.5]
    assert found[0] == pytest.approx([1.4, 2.0, 1.7], rel=1e-12)


def test_a_check_asked_for_by_one_limit_does_not_enter_the_least_over_stages():
    lowest_between = {"slip": lambda _: np.array([[2.0, 0.5, 1.4]] * 3)}
    found, _ = watched(
        limit("slip_safety", not_less_than=1), limit("slip_safety", at=0.7, not_less_than=1), **lowest_between
    )
    assert found[0] == pytest.approx([1.4, 0.5], rel=1e-12)


def test_no_fill_nothing_to_slip():
    found, site = watched(limit("slip_safety", at=10.0, not_less_than=1), stages=STAGES)
    assert 10.0 not in site.slip_times
    assert np.isinf(found).all()
    assert (found > 0).all()


def test_degree_is_read_at_its_time():
    found, _ = watched(limit("degree_of_consolidation", at=7.0, not_less_than=0.8))
    assert found[:, 0] == pytest.approx([0.07, 0.077, 0.084], rel=1e-12)


def test_a_realisation_that_did_not_converge_is_no_number():
    found, _ = watched(
        limit("settlement", at=7.5, not_more_than=1),
        limit("slip_safety", not_less_than=1),
        limit("time_to_consolidation", degree=0.4, not_more_than=5),
        converged=np.array([True, False, True]),
    )
    assert np.isnan(found[1]).all()
    assert np.isfinite(found[[0, 2]]).all()


TO_90 = limit("time_to_consolidation", degree=0.9, not_more_than=5)


def rising(rates):
    """Degrees 1 - exp(-rate x time since the last stage), one per sample; 0 at the end of it."""

    def made(site):
        since = site.times - site.last_change
        degree = 1.0 - np.exp(-np.outer(rates, np.maximum(since, 0.0)))
        return np.where(since >= 0.0, degree, np.nan)

    return made


@pytest.mark.parametrize(("degree", "factor"), [(0.3, 0.07069), (0.5, 0.19673), (0.9, 0.84809)])
def test_time_on_terzaghis_curve(degree, factor):
    """The parabola and the tail are each within 1.5 % of Terzaghi's curve (exact roots of the series)."""

    def terzaghi(site):
        since = np.maximum(site.times - site.last_change, 0.0)
        m = (2.0 * np.arange(2000) + 1.0) * np.pi / 2.0
        rates = np.array([0.2, 0.5, 1.0])
        drop = np.exp(-(m**2) * rates[:, None, None] * since[None, :, None])
        curve = 1.0 - (2.0 / m**2 * drop).sum(axis=2)
        return np.where(site.times >= site.last_change, curve, np.nan)

    found, site = watched(limit("time_to_consolidation", degree=degree, not_more_than=5), degree=terzaghi)
    exact = factor / np.array([0.2, 0.5, 1.0])
    assert found[:, 0] - site.last_change == pytest.approx(exact, rel=0.015)


def test_exponential_tail_is_met_exactly():
    rates = np.array([0.3, 0.5, 0.7])

    def tail(site):
        since = np.maximum(site.times - site.last_change, 0.0)
        curve = 1.0 - 0.4 * np.exp(-rates[:, None] * since)  # never below 60 %
        return np.where(site.times >= site.last_change, curve, np.nan)

    found, site = watched(TO_90, degree=tail)
    assert found[:, 0] - site.last_change == pytest.approx(np.log(4.0) / rates, rel=1e-12)


def test_a_degree_never_reached_takes_for_ever():
    found, _ = watched(TO_90, degree=rising(np.array([0.001, 1.0, 0.01])))
    assert np.isinf(found[[0, 2], 0]).all()
    assert np.isfinite(found[1, 0])


def test_a_degree_reached_before_the_last_stage_ends_takes_no_more_time():
    def ready(site):
        return np.where(site.times >= site.last_change, 0.95, np.nan) * np.ones((3, 1))

    found, site = watched(TO_90, degree=ready)
    assert (found[:, 0] == site.last_change).all()


def test_a_degree_reached_in_the_first_step_is_found_within_it():
    found, site = watched(TO_90, degree=rising(np.array([1e4, 1.0, 1.0])))
    first = site.times[np.searchsorted(site.times, site.last_change) + 1]
    assert site.last_change < found[0, 0] < first


def test_time_and_degree_tell_the_same_at_the_threshold():
    """The time is not more than the threshold exactly where the degree then is not less than asked."""
    rates = np.concatenate([np.geomspace(0.05, 5.0, 60), [np.log(10.0) / 3.5]])

    def many(site):
        return rising(rates)(site)

    scenario_now = case(TO_90)
    site = site_model(scenario_now)
    n = rates.size
    response = replace(
        answer(site),
        degree=many(site),
        settlement=np.zeros((n, site.times.size)),
        slip=np.ones((n, site.slip_times.size)),
        converged=np.ones(n, dtype=bool),
    )
    time = limit_quantities(site, scenario_now.limits, response, ERRORS)[:, 0]
    at_threshold = response.degree[:, np.searchsorted(site.times, 5.0)]
    assert 5.0 in site.times
    assert np.array_equal(time <= 5.0, at_threshold >= 0.9)
    assert 0 < (time <= 5.0).sum() < n
