"""Least factor of safety against a search in plain numpy, and what must follow from it."""

from itertools import pairwise

import numpy as np
import pytest

from probsoil.ground.slip import FillStrength, GroundStrength, competing_circles, slip_safety
from probsoil.ground.slip_circles import (
    N_ZONE,
    CircleLayout,
    EmbankmentSection,
    candidate_circles,
    circle_family,
    weighed,
)

SECTION = EmbankmentSection(height=3.0, side_slope=2.0, base_width=32.0, full_height=3.0)
LAYERS, POINTS_IN = 3, (5, 4, 7)  # the second layer is granular
FIRM = 1e6


LAYOUT = CircleLayout(
    section=SECTION, depth=9.0, boundaries=(1.75, 2.45, 6.95), density=0.4, frictional_ground=True
)


def family():
    return circle_family(LAYOUT)


def random_ground(n_sample, seed=3):
    rng = np.random.default_rng(np.random.SeedSequence(8, spawn_key=(seed,)))
    thickness = rng.uniform([1.0, 0.4, 3.0], [2.5, 1.0, 6.0], (n_sample, LAYERS))
    boundary = np.concatenate([np.zeros((n_sample, 1)), np.cumsum(thickness, axis=1)], axis=1)
    layer = np.repeat(np.arange(LAYERS), POINTS_IN)
    within = np.concatenate([(np.arange(n) + 0.5) / n for n in POINTS_IN])
    depth = boundary[:, layer] + within * thickness[:, layer]
    shape = (n_sample, N_ZONE, layer.size)
    granular = layer == 1
    cohesive = np.where(granular, 0.0, rng.uniform(8.0, 30.0, shape))
    frictional = np.where(granular, 6.0 * depth[:, None, :] * np.tan(np.radians(32.0)), 0.0) * np.ones(shape)
    ground = GroundStrength(
        boundary=boundary, point_layer=layer, point_depth=depth, cohesive=cohesive, frictional=frictional
    )
    fill = FillStrength(
        unit_weight=rng.uniform(17.0, 21.0, n_sample),
        friction_angle=rng.uniform(25.0, 38.0, n_sample),
        cohesion=rng.uniform(0.0, 8.0, n_sample),
    )
    return ground, fill


def on_slices(ground, sample, edges):
    """Mean strength of every slice, kinds x zones x slices: layers by their thickness in it."""
    kinds = (ground.cohesive[sample], ground.frictional[sample])
    boundary = ground.boundary[sample]
    out = np.zeros((2, N_ZONE, edges.size - 1))
    for k, (top, bottom) in enumerate(pairwise(edges)):
        if 0.5 * (top + bottom) > boundary[-1]:
            out[0, :, k] = FIRM
            continue
        reach = min(bottom, boundary[-1]) - top
        for layer, (upper, lower) in enumerate(pairwise(np.clip(boundary, top, top + reach))):
            mine = ground.point_layer == layer
            depth = ground.point_depth[sample, mine]
            for kind in range(2):
                for zone in range(N_ZONE):
                    here = np.interp(0.5 * (upper + lower), depth, kinds[kind][zone, mine])
                    out[kind, zone, k] += here * (lower - upper) / reach
    return out


def by_numpy(ground, fill, circles):
    """Every circle for every realisation, one at a time."""
    width = 2 * N_ZONE * (circles.slice_edge.size - 1)
    rows = np.zeros((circles.n_circle, width))
    for circle in range(circles.n_circle):
        entries = slice(circles.row_start[circle], circles.row_start[circle + 1])
        rows[circle, circles.column[entries]] = circles.weight[entries]
    factors = []
    for sample in range(fill.unit_weight.size):
        strength = on_slices(ground, sample, circles.slice_edge).ravel()
        weight, tangent = fill.unit_weight[sample], np.tan(np.radians(fill.friction_angle[sample]))
        resisting = rows @ strength + weight * tangent * circles.fill_friction
        resisting += fill.cohesion[sample] * circles.fill_cohesion
        factors.append(resisting / (weight * circles.driving))
    return np.array(factors)


def test_equals_a_search_in_plain_numpy():
    circles = family()
    ground, fill = random_ground(37)
    factor, critical = slip_safety(ground, fill, circles)
    expected = by_numpy(ground, fill, circles)
    assert factor == pytest.approx(expected.min(axis=1), rel=1e-12)
    assert critical.tolist() == expected.argmin(axis=1).tolist()
    assert 0.3 < factor.min() < factor.max() < 5.0
    assert np.unique(critical).size > 5


def test_factor_by_hand_for_one_circle():
    """One uniform strength: su R^2 2a below ground, fill friction and cohesion above it."""
    circles = family()
    _, fill = random_ground(1)
    uniform = GroundStrength(
        boundary=np.array([[0.0, 50.0]]),
        point_layer=np.zeros(2, dtype=np.int64),
        point_depth=np.array([[1.0, 49.0]]),
        cohesive=np.full((1, N_ZONE, 2), 15.0),
        frictional=np.zeros((1, N_ZONE, 2)),
    )
    one = weighed(LAYOUT, candidate_circles(LAYOUT)[np.arange(circles.n_circle) == 400])
    factor, critical = slip_safety(uniform, fill, one)
    radius, weight = one.radius[0], fill.unit_weight[0]
    arc = radius**2 * 2.0 * np.arccos(one.centre_y[0] / radius)
    resisting = 15.0 * arc + fill.cohesion[0] * one.fill_cohesion[0]
    resisting += weight * np.tan(np.radians(fill.friction_angle[0])) * one.fill_friction[0]
    assert critical[0] == 0
    # an arc of 480 points is right to one of them at each crossing of ground level
    assert factor[0] == pytest.approx(resisting / (weight * one.driving[0]), rel=5e-3)


@pytest.mark.parametrize("what", ["cohesive", "frictional", "friction_angle", "cohesion"])
def test_more_strength_means_more_safety(what):
    circles = family()
    ground, fill = random_ground(20)
    before, _ = slip_safety(ground, fill, circles)
    parts = {name: getattr(ground, name) for name in ground.__slots__}
    filled = {name: getattr(fill, name) for name in fill.__slots__}
    for group in (parts, filled):
        if what in group:
            group[what] = 1.1 * group[what]
    after, _ = slip_safety(GroundStrength(**parts), FillStrength(**filled), circles)
    assert (after >= before).all()
    assert (after > before).any()


def test_all_strength_doubled_doubles_the_factor():
    circles = family()
    ground, fill = random_ground(20)
    before, _ = slip_safety(ground, fill, circles)
    stronger = GroundStrength(
        boundary=ground.boundary,
        point_layer=ground.point_layer,
        point_depth=ground.point_depth,
        cohesive=2.0 * ground.cohesive,
        frictional=2.0 * ground.frictional,
    )
    tangent = np.degrees(np.arctan(2.0 * np.tan(np.radians(fill.friction_angle))))
    filled = FillStrength(unit_weight=fill.unit_weight, friction_angle=tangent, cohesion=2.0 * fill.cohesion)
    after, _ = slip_safety(stronger, filled, circles)
    # circles that touch the firm base (its strength is not doubled) are never critical
    assert after == pytest.approx(2.0 * before, rel=1e-12)


def test_circles_keep_out_of_the_firm_base():
    circles = family()
    ground, fill = random_ground(20)
    _, critical = slip_safety(ground, fill, circles)
    deepest = circles.radius[critical] - circles.centre_y[critical]
    slack = np.diff(circles.slice_edge).max()  # a slice belongs where its middle lies
    assert (deepest <= ground.boundary[:, -1] + slack).all()


def test_screening_keeps_the_least_factor():
    circles = family()
    ground, fill = random_ground(60)
    least, critical = slip_safety(ground, fill, circles)
    kept = competing_circles(ground, fill, LAYOUT, within=0.02)
    assert np.unique(critical).size <= kept.n_circle < circles.n_circle
    again, _ = slip_safety(ground, fill, kept)
    assert np.array_equal(again, least)
    expected = by_numpy(ground, fill, circles)
    near = (expected <= 1.02 * expected.min(axis=1, keepdims=True)).any(axis=0)
    assert kept.n_circle == near.sum()
    assert np.array_equal(kept.radius, circles.radius[near])


def test_screened_family_never_gives_less_than_the_full_one():
    kept = competing_circles(*random_ground(60), LAYOUT, within=0.02)
    others = random_ground(60, seed=4)
    full, part = slip_safety(*others, family())[0], slip_safety(*others, kept)[0]
    assert (part >= full).all()


def test_wider_screening_keeps_more():
    sample = random_ground(10)
    counts = [competing_circles(*sample, LAYOUT, within=within).n_circle for within in (0.0, 0.02, 0.2)]
    assert counts[0] < counts[1] < counts[2]


def test_a_realisation_does_not_depend_on_its_company():
    circles = family()
    ground, fill = random_ground(37)
    together, critical = slip_safety(ground, fill, circles)
    for sample in (0, 15, 16, 36):
        one = slice(sample, sample + 1)
        alone = GroundStrength(
            boundary=ground.boundary[one],
            point_layer=ground.point_layer,
            point_depth=ground.point_depth[one],
            cohesive=ground.cohesive[one],
            frictional=ground.frictional[one],
        )
        filled = FillStrength(**{name: getattr(fill, name)[one] for name in fill.__slots__})
        factor, circle = slip_safety(alone, filled, circles)
        assert factor[0] == together[sample]
        assert circle[0] == critical[sample]
