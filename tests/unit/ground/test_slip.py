"""Least factor of safety against a search in plain numpy, and what must follow from it."""

from dataclasses import fields, replace
from itertools import pairwise

import numpy as np
import pytest

from probsoil.ground.embankment import EmbankmentSection
from probsoil.ground.slip import FillStrength, GroundStrength, competing_circles, slip_safety
from probsoil.ground.slip_circles import CircleLayout, candidate_circles, circle_family, weighed

SECTION = EmbankmentSection(
    height=3.0, side_slope=2.0, base_width=42.0, full_height=3.0, berm_width=5.0, berm_height=1.2
)
N_ZONE = 4
LAYERS, POINTS_IN = 3, (5, 4, 7)  # the second layer is granular


LAYOUT = CircleLayout(
    section=SECTION,
    depth=9.0,
    boundaries=(1.75, 2.45, 6.95),
    density=0.35,
    frictional_ground=True,
    within_fill=True,
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
        traffic=rng.uniform(0.0, 15.0, n_sample),
    )
    return ground, fill


def on_slices(ground, sample, edges):
    """Mean strength of every slice, kinds x zones x slices: layers by their thickness in it."""
    kinds = (ground.cohesive[sample], ground.frictional[sample])
    boundary = ground.boundary[sample]
    out = np.zeros((2, N_ZONE, edges.size - 1))
    for k, (top, bottom) in enumerate(pairwise(edges)):
        if top >= boundary[-1]:
            for kind in range(2):
                out[kind, :, k] = kinds[kind][:, -1]
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
        resisting += fill.traffic[sample] * tangent * circles.traffic_friction
        driving = weight * circles.circles.driving + fill.traffic[sample] * circles.circles.traffic
        above = circles.circles.touch <= ground.boundary[sample, -1] + 1e-6
        factors.append(np.where(above, resisting / driving, np.inf))
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
    circle, weight = one.circles, fill.unit_weight[0]
    radius = circle.radius[0]
    assert circle.exit_x[0] < 0.0 < circle.traffic[0]
    arc = radius**2 * 2.0 * np.arccos(circle.centre_y[0] / radius)
    resisting = 15.0 * arc + fill.cohesion[0] * one.fill_cohesion[0]
    normal = weight * one.fill_friction[0] + fill.traffic[0] * one.traffic_friction[0]
    resisting += np.tan(np.radians(fill.friction_angle[0])) * normal
    driving = weight * circle.driving[0] + fill.traffic[0] * circle.traffic[0]
    assert critical[0] == 0
    # an arc of 480 points is right to one of them at each crossing of ground level
    assert factor[0] == pytest.approx(resisting / driving, rel=5e-3)


@pytest.mark.parametrize("what", ["cohesive", "frictional", "friction_angle", "cohesion"])
def test_more_strength_means_more_safety(what):
    circles = family()
    ground, fill = random_ground(20)
    before, _ = slip_safety(ground, fill, circles)
    parts = {name: getattr(ground, name) for name in ground.__slots__}
    filled = {part.name: getattr(fill, part.name) for part in fields(fill)}
    for group in (parts, filled):
        if what in group:
            group[what] = 1.1 * group[what]
    after, _ = slip_safety(GroundStrength(**parts), FillStrength(**filled), circles)
    assert (after >= before).all()
    assert (after > before).any()


def test_traffic_drives_where_the_fill_has_no_friction():
    circles = family()
    ground, fill = random_ground(20)
    fill = replace(fill, friction_angle=np.zeros(20))
    bare, _ = slip_safety(ground, replace(fill, traffic=None), circles)
    none, _ = slip_safety(ground, replace(fill, traffic=np.zeros(20)), circles)
    some, _ = slip_safety(ground, replace(fill, traffic=np.full(20, 5.0)), circles)
    more, _ = slip_safety(ground, replace(fill, traffic=np.full(20, 10.0)), circles)
    assert np.array_equal(bare, none)
    assert (more <= some).all()
    assert (some <= bare).all()
    assert (more < bare).mean() > 0.5


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
    filled = replace(fill, friction_angle=tangent, cohesion=2.0 * fill.cohesion)
    after, _ = slip_safety(stronger, filled, circles)
    # circles that touch the firm base (its strength is not doubled) are never critical
    assert after == pytest.approx(2.0 * before, rel=1e-12)


def test_circles_keep_out_of_the_firm_base():
    circles = family()
    ground, fill = random_ground(20)
    _, critical = slip_safety(ground, fill, circles)
    assert (circles.circles.touch[critical] <= ground.boundary[:, -1] + 1e-6).all()
    assert (circles.circles.touch > ground.boundary[:, -1].min()).any()


def test_where_every_circle_is_too_deep_the_shallowest_counts():
    ground, fill = random_ground(20)
    candidates = candidate_circles(LAYOUT)
    deep = weighed(LAYOUT, candidates[candidates.touch > 8.0])
    thin = replace(ground, boundary=ground.boundary * 0.2, point_depth=ground.point_depth * 0.2)
    factor, critical = slip_safety(thin, fill, deep)
    assert np.isfinite(factor).all()
    assert (deep.circles.touch[critical] == deep.circles.touch.min()).all()


def test_chosen_circles_serve_every_realisation():
    """Those beside the worst of the layout in depth are looked at too, on finer slices."""
    ground, fill = random_ground(60)
    within, layout = 0.01, replace(LAYOUT, density=1.0)
    chosen = competing_circles(ground, fill, layout, within=within)
    worst = competing_circles(ground, fill, layout, within=0.0)
    least, critical = slip_safety(ground, fill, worst)
    assert np.unique(critical).size <= worst.n_circle <= 3 * 60  # each with one on either side
    assert chosen.n_circle < worst.n_circle
    served, _ = slip_safety(ground, fill, chosen)
    # chosen on slices three times finer than those of the two families: what that may cost is promised
    assert (served <= least * (1.0 + within + 0.01)).all()


def test_a_looser_choice_takes_fewer_circles():
    sample = random_ground(40)
    counts = [competing_circles(*sample, LAYOUT, within=within).n_circle for within in (0.0, 0.01, 0.1)]
    assert counts[0] > counts[1] > counts[2] >= 1


def test_chosen_circles_end_where_slices_do():
    chosen = competing_circles(*random_ground(40), LAYOUT, within=0.01)
    touch = chosen.circles.touch
    inner = touch[(touch > 0.0) & (touch < LAYOUT.depth)]
    assert inner.size > 3
    assert np.abs(inner[:, None] - chosen.slice_edge[None, :]).min(axis=1).max() < 1e-6


def test_a_realisation_does_not_depend_on_its_company():
    circles = family()
    ground, fill = random_ground(37)
    fill = replace(fill, heavier=np.linspace(1.0, 1.2, 37))
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
        filled = FillStrength(**{part.name: getattr(fill, part.name)[one] for part in fields(fill)})
        factor, circle = slip_safety(alone, filled, circles)
        assert factor[0] == together[sample]
        assert circle[0] == critical[sample]
