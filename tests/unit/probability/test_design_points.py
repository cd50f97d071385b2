"""Design points of limits with and without edges, and the methods that start from them."""

from itertools import combinations

import numpy as np
import pytest
from scipy.special import ndtr, ndtri

from probsoil.errors import ConvergenceError, ParameterError, ShapeError
from probsoil.probability import (
    LimitState,
    first_order,
    importance_sampling,
    second_order,
    subset_simulation,
)
from probsoil.probability.design_point_search import nearest_within, on_limit

# the search ends at steps of 1e-4; the index at a stationary point is then right to its square, edges to 1e-4
INDEX = 5e-4


def limit(performance, dimension, **options):
    return LimitState(performance=performance, dimension=dimension, **options)


def curved(u):
    return 3.0 - u[:, 0] + 0.1 * u[:, 1] ** 2


def test_edge_where_two_planes_must_both_be_passed():
    found = first_order(limit(lambda u: np.maximum(2.0 - u[:, 0], 1.5 - u[:, 1]), 2))
    np.testing.assert_allclose(found.point[0], [2.0, 1.5], atol=INDEX)
    assert found.beta[0] == pytest.approx(2.5, abs=INDEX)
    assert found.converged.all()


def test_edge_of_three_planes_among_35_variables():
    slopes = np.random.default_rng(0).standard_normal((35, 3))
    slopes /= np.linalg.norm(slopes, axis=0)
    levels = np.array([2.0, 2.2, 1.9])
    found = first_order(limit(lambda u: (levels - u @ slopes).max(axis=1), 35))
    # at the edge the point solves slopes' u = levels with least norm, all multipliers above zero
    multipliers = np.linalg.solve(slopes.T @ slopes, levels)
    assert (multipliers > 0.0).all()
    exact = slopes @ multipliers
    assert found.beta[0] == pytest.approx(np.linalg.norm(exact), abs=INDEX)
    np.testing.assert_allclose(found.point[0], exact, atol=3e-3)


def nearest_common_point(slopes, levels):
    """Distance of the point on some of the planes whose multipliers are none below zero, and within all."""
    for size in range(1, len(slopes) + 1):
        for chosen in combinations(range(len(slopes)), size):
            some = slopes[list(chosen)]
            multipliers = np.linalg.solve(some @ some.T, levels[list(chosen)])
            point = some.T @ multipliers
            if (multipliers >= 0.0).all() and (slopes @ point >= levels - 1e-10).all():
                return np.linalg.norm(point)
    raise AssertionError("no common point")


@pytest.mark.parametrize("seed", range(24))
def test_edges_of_several_planes_that_must_all_be_passed(seed):
    """Random planes that lean one way; any of them may carry the nearest point."""
    random = np.random.default_rng(seed)
    d = int(random.integers(2, 9))
    count = 2 if d == 2 else int(random.integers(2, d + 1))
    slopes = random.standard_normal((count, d)) + 1.5 * np.eye(d)[0]
    slopes /= np.linalg.norm(slopes, axis=1, keepdims=True)
    levels = random.uniform(1.5, 3.0, count)
    found = first_order(limit(lambda u: (levels - u @ slopes.T).max(axis=1), d))
    assert found.converged[0]
    assert found.beta[0] == pytest.approx(nearest_common_point(slopes, levels), abs=INDEX)


@pytest.mark.parametrize("sharpness", [0.5, 5.0, 50.0])
def test_edge_at_which_the_slope_jumps_across_the_shortest_way(sharpness):
    found = first_order(limit(lambda u: 3.0 - u[:, 0] + sharpness * np.abs(u[:, 1]), 2))
    assert found.beta[0] == pytest.approx(3.0, abs=INDEX)


def test_sum_of_terms_with_edges_has_its_nearest_face_found():
    """Convex sum of edges: the nearest point lies on one of four faces, each a plane."""

    def settlement(u):
        return (
            1.5 * np.maximum(u[:, 0] + u[:, 1], 0.0)
            + 1.2 * np.maximum(u[:, 0] - u[:, 1], 0.0)
            + 0.3 * u[:, 2]
        )

    found = first_order(limit(settlement, 3, threshold=4.0, sense="not more than"))
    faces = np.array([[2.7, 0.3, 0.3], [1.5, 1.5, 0.3], [1.2, -1.2, 0.3], [0.0, 0.0, 0.3]])
    exact = min(4.0 / np.linalg.norm(face) for face in faces)
    assert found.beta[0] == pytest.approx(exact, abs=INDEX)


def test_two_ways_to_exceed_are_both_found():
    found = first_order(limit(lambda u: np.abs(u[:, 0]), 3, threshold=2.5, sense="not more than"))
    assert sorted(found.point[:, 0].round(3).tolist()) == [-2.5, 2.5]
    assert found.any_bound == pytest.approx(2.0 * ndtr(-2.5), rel=1e-6)
    assert found.probability == pytest.approx(ndtr(-2.5), rel=1e-6)


def test_twin_opposite_a_design_point_is_found_from_one_start():
    state = limit(lambda u: np.abs(u[:, 0] + 0.2), 3, threshold=2.5, sense="not more than")
    found = first_order(state, starts=0)
    np.testing.assert_allclose(found.point[:, 0], [2.3, -2.7], atol=INDEX)


def test_index_is_negative_where_the_median_exceeds():
    found = first_order(limit(lambda u: -1.5 - u[:, 0], 3))
    assert found.origin_exceeds
    assert found.beta[0] == pytest.approx(-1.5, abs=INDEX)
    assert found.probability == pytest.approx(ndtr(1.5), rel=1e-4)
    assert found.any_bound == found.probability
    second = second_order(limit(lambda u: -1.5 - u[:, 0], 3), found)
    assert second.probability == pytest.approx(ndtr(1.5), rel=1e-4)
    with pytest.raises(ParameterError, match="plain Monte Carlo"):
        importance_sampling(limit(lambda u: -1.5 - u[:, 0], 3), found)


def test_direction_and_table():
    found = first_order(limit(lambda u: 3.0 - u @ np.array([0.6, 0.8]), 2))
    np.testing.assert_allclose(found.direction[0], [0.6, 0.8], atol=INDEX)
    frame = found.to_frame()
    assert list(frame.columns) == ["beta", "converged", "probability", "u_1", "u_2"]
    assert frame["probability"].item() == pytest.approx(ndtr(-3.0), rel=2e-3)


def test_runs_are_counted():
    seen = []

    def performance(u):
        seen.append(len(u))
        return curved(u)

    state = limit(performance, 2)
    found = first_order(state)
    assert found.model_runs == sum(seen)
    seen.clear()
    assert second_order(state, found).model_runs == sum(seen)
    seen.clear()
    assert importance_sampling(state, found, runs=50, far_runs=30).model_runs == sum(seen) == 80
    seen.clear()
    assert subset_simulation(state, sample=100, repeats=3).model_runs == sum(seen)


def test_limit_that_nothing_reaches():
    with pytest.raises(ConvergenceError, match="no design point"):
        first_order(limit(lambda u: 0.0 * u[:, 0] + 1.0, 3))


def test_failed_runs_exceed_and_do_not_stop_the_search():
    def performance(u):
        return np.where(u[:, 1] > 2.0, np.nan, 3.0 - u[:, 0])

    state = limit(performance, 2)
    assert state.margin(np.array([[0.0, 2.5]]))[0] == -np.inf
    assert first_order(state).beta[0] == pytest.approx(3.0, abs=INDEX)


def test_curvature_is_zero_of_a_plane_and_known_of_a_paraboloid():
    found = second_order(limit(curved, 2), first_order(limit(curved, 2)))
    assert found.curvature[0, 0] == pytest.approx(0.2, abs=1e-6)
    assert found.smooth.all()
    plane = limit(lambda u: 3.0 - u.sum(axis=1) / 2.0, 4)
    flat = second_order(plane, first_order(plane))
    np.testing.assert_allclose(flat.curvature, 0.0, atol=1e-8)
    assert flat.probability == pytest.approx(ndtr(-3.0), rel=1e-6)
    frame = flat.to_frame()
    assert {"beta", "breitung", "hohenbichler_rackwitz", "smooth", "curvature_1"} <= set(frame.columns)


def test_mixed_curvature_comes_from_the_whole_matrix():
    state = limit(lambda u: 3.0 - u[:, 0] + 0.1 * u[:, 1] * u[:, 2], 3)
    found = second_order(state, first_order(state))
    np.testing.assert_allclose(np.sort(found.curvature[0]), [-0.1, 0.1], atol=1e-6)


def test_one_variable_has_no_curvature():
    state = limit(lambda u: 2.0 - u[:, 0], 1)
    found = second_order(state, first_order(state))
    assert found.curvature.shape == (1, 0)
    assert found.probability == pytest.approx(ndtr(-2.0), rel=1e-6)


def test_edge_is_told_from_a_curve():
    state = limit(lambda u: 3.0 - u[:, 0] + 5.0 * np.abs(u[:, 1]), 2)
    assert not second_order(state, first_order(state)).smooth[0]


def test_no_curvature_where_the_limit_is_flat_or_has_no_number():
    first = first_order(limit(lambda u: 3.0 - u[:, 0], 2))
    flat = second_order(limit(lambda u: 1.0 + 0.0 * u[:, 0], 2), first)
    broken = second_order(limit(lambda u: np.where(np.abs(u[:, 1]) > 0.01, np.nan, 3.0 - u[:, 0]), 2), first)
    for found in (flat, broken):
        assert np.isnan(found.breitung[0])
        assert not found.smooth[0]


def test_edge_beside_the_design_point_is_told_too():
    """The face of the point is plane up to 0.3 from it, where another begins."""
    state = limit(lambda u: 3.0 - u[:, 0] + 4.0 * np.maximum(u[:, 1] - 0.3, 0.0), 2)
    found = second_order(state, first_order(state))
    assert found.curvature[0, 0] == pytest.approx(0.0, abs=1e-6)
    assert not found.smooth[0]


def test_failed_runs_beside_a_design_point_leave_no_curvature():
    state = limit(lambda u: np.where(np.abs(u[:, 1:]).max(axis=1) > 0.05, np.nan, 3.0 - u[:, 0]), 4)
    found = second_order(state, first_order(limit(lambda u: 3.0 - u[:, 0], 4)))
    assert np.isnan(found.curvature).all()


def test_sphere_bends_too_sharply_for_the_formula():
    state = limit(lambda u: 25.0 - (u**2).sum(axis=1), 2)
    found = second_order(state, first_order(state))
    np.testing.assert_allclose(found.curvature, -0.2, atol=1e-6)
    assert np.isnan(found.breitung[0]) or found.breitung[0] > 1e3 * ndtr(-5.0)


def test_way_to_fail_that_the_search_missed_is_seen_far_away():
    """A jump of mass 0.023 that no slope points to: told by plain draws, not by the design point."""

    def performance(u):
        return np.where(u[:, 2] < -2.0, -1.0, 3.0 - u[:, 0])

    state = limit(performance, 3)
    first = first_order(state, directions=1, starts=0)
    np.testing.assert_allclose(first.point[0], [3.0, 0.0, 0.0], atol=INDEX)
    exact = ndtr(-3.0) + ndtr(-2.0) - ndtr(-3.0) * ndtr(-2.0)
    found = importance_sampling(state, first, confidence=0.999)
    assert len(found.far_point) > 0
    assert (found.far_point[:, 2] < -2.0).all()
    assert found.interval[0] <= exact <= found.interval[1]
    assert found.interval[1] <= found.near * 1.5 + found.unseen_bound
    assert found.to_frame()["far_hits"].item() == len(found.far_point)


def test_nothing_seen_is_a_bound_and_not_zero():
    state = limit(lambda u: 3.0 - u[:, 0], 2)
    first = first_order(state)
    never = importance_sampling(limit(lambda u: 1.0 + 0.0 * u[:, 0], 2), first, runs=100, far_runs=100)
    assert never.probability == 0.0
    assert never.interval == (0.0, never.unseen_bound)
    assert never.unseen_bound == pytest.approx(1.0 - 0.05**0.01)
    found = subset_simulation(limit(lambda u: 1.0 + 0.0 * u[:, 0], 2), sample=100, repeats=3)
    assert found.probability == 0.0
    assert found.interval == (0.0, found.unseen_bound)
    assert found.unseen_bound == pytest.approx(1.0 - 0.05 ** (1 / 300))


def test_subset_simulation_of_what_is_common_is_a_count():
    state = limit(lambda u: u[:, 0], 2)
    found = subset_simulation(state, sample=1000, repeats=4)
    assert found.model_runs == 4000
    assert found.interval[0] <= 0.5 <= found.interval[1]


def test_subset_simulation_where_margins_are_alike():
    """Half of the draws share the least margin: the level takes them all and ends."""
    state = limit(lambda u: np.where(u[:, 0] > 0.0, 1.0, 2.0), 2)
    assert subset_simulation(state, sample=200, repeats=3).probability == 0.0
    stairs = limit(lambda u: 2.0 - np.floor(np.maximum(u[:, 0], 0.0)), 1)
    found = subset_simulation(stairs, sample=1000, repeats=8, confidence=0.999)
    assert found.interval[0] <= ndtr(-3.0) <= found.interval[1]


def test_subset_simulation_gives_up_beyond_twelve_levels():
    state = limit(lambda u: 9.0 - u[:, 0], 1)
    found = subset_simulation(state, sample=100, repeats=3)
    assert found.probability == 0.0
    assert found.model_runs <= 3 * (100 + 12 * 90)


def test_same_seed_same_numbers_another_seed_others():
    state = limit(curved, 2)
    first = first_order(state)
    one, same, other = (subset_simulation(state, sample=100, repeats=3, seed=s) for s in (1, 1, 2))
    assert one.repeat.tobytes() == same.repeat.tobytes() != other.repeat.tobytes()
    one, same, other = (importance_sampling(state, first, seed=s).probability for s in (1, 1, 2))
    assert one == same != other


def test_tables_have_one_row():
    state = limit(curved, 2)
    assert len(subset_simulation(state, sample=100, repeats=3).to_frame()) == 1
    assert len(importance_sampling(state, first_order(state)).to_frame()) == 1


def test_help_of_the_search():
    assert nearest_within(np.array([[1.0, 0.0]]), np.array([0.5])) is None  # the origin is in it
    both = nearest_within(np.array([[1.0, 0.0], [-1.0, 0.0]]), np.array([-1.0, -1.0]))
    assert both is None  # nothing is left of both
    point, multipliers = nearest_within(np.array([[-1.0, 0.0], [0.0, -1.0]]), np.array([-2.0, 1.0]))
    np.testing.assert_allclose(point, [2.0, 0.0], atol=1e-12)
    np.testing.assert_allclose(multipliers, [2.0, 0.0], atol=1e-12)
    assert on_limit(lambda u: 3.0 - u[:, 0], np.array([1.0, 0.0])) is None
    assert on_limit(lambda u: 3.0 - u[:, 0], np.zeros(2)) is None
    np.testing.assert_allclose(on_limit(lambda u: 3.0 - u[:, 0], np.array([2.9, 0.1]))[0], 3.0, rtol=1e-8)


def test_what_is_refused():
    state = limit(curved, 2)
    first = first_order(state)
    other = limit(lambda u: 3.0 - u[:, 0], 3)
    with pytest.raises(ParameterError, match="dimension"):
        limit(curved, 0)
    with pytest.raises(ParameterError, match="sense"):
        limit(curved, 2, sense="below")
    with pytest.raises(ParameterError, match="threshold"):
        limit(curved, 2, threshold=np.nan)
    with pytest.raises(ShapeError, match="must return shape"):
        limit(lambda u: u, 2).margin(np.zeros((3, 2)))
    with pytest.raises(ParameterError, match="starts"):
        first_order(state, starts=-1)
    with pytest.raises(ParameterError, match="step"):
        second_order(state, first, step=0.0)
    with pytest.raises(ParameterError, match="3 coordinates"):
        second_order(other, first)
    with pytest.raises(ParameterError, match="3 coordinates"):
        importance_sampling(other, first)
    with pytest.raises(ParameterError, match="runs must"):
        importance_sampling(state, first, runs=1)
    with pytest.raises(ParameterError, match="multiple of ten"):
        subset_simulation(state, sample=105)
    with pytest.raises(ParameterError, match="repeats"):
        subset_simulation(state, repeats=2)


def test_estimates_of_a_rare_plane_among_35_variables_cover_it():
    weight = np.exp(-0.05 * np.arange(35))
    weight /= np.linalg.norm(weight)
    state = limit(lambda u: u @ weight, 35, threshold=-float(ndtri(1e-4)), sense="not more than")
    first = first_order(state)
    assert first.probability == pytest.approx(1e-4, rel=1e-4)
    for found in (
        importance_sampling(state, first, confidence=0.999),
        subset_simulation(state, confidence=0.999),
    ):
        assert found.interval[0] <= 1e-4 <= found.interval[1]
