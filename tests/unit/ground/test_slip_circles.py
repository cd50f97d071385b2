"""Moments of slip circles against quadrature of another kind."""

import numpy as np
import pytest

from probsoil.errors import ParameterError
from probsoil.ground._circle_kernel import ARC_POINTS
from probsoil.ground.slip_circles import (
    N_ZONE,
    CircleLayout,
    EmbankmentSection,
    candidate_circles,
    circle_family,
    weighed,
)

SECTIONS = {
    "at full height": EmbankmentSection(height=3.0, side_slope=2.0, base_width=30.0, full_height=3.0),
    "while rising": EmbankmentSection(height=1.2, side_slope=2.0, base_width=30.0, full_height=3.0),
    "narrow": EmbankmentSection(height=2.5, side_slope=1.5, base_width=9.0, full_height=2.5),
    # low enough for circles that pass under the crest and on below the far slope
    "narrow, while rising": EmbankmentSection(height=0.8, side_slope=1.5, base_width=9.0, full_height=2.5),
    "vertical sides": EmbankmentSection(height=1.0, side_slope=0.0, base_width=12.0, full_height=1.0),
}
DEPTH = 7.0


def layout_of(section, **keys):
    return CircleLayout(section=section, depth=DEPTH, density=0.35, **keys)


def family_of(section, **keys):
    return circle_family(layout_of(section, **keys))


def some_circles(family, count=40):
    rng = np.random.default_rng(np.random.SeedSequence(5, spawn_key=(family.n_circle,)))
    return rng.choice(family.n_circle, size=min(count, family.n_circle), replace=False)


def surface(section, x):
    run = max(section.side_slope, 1e-12)
    top = np.minimum(section.height, np.minimum(x, section.base_width - x) / run)
    return np.where((x > 0.0) & (x < section.base_width), top, 0.0)


def dense_row(family, circle, n_kind):
    row = np.zeros(n_kind * N_ZONE * (family.slice_edge.size - 1))
    entries = slice(family.row_start[circle], family.row_start[circle + 1])
    row[family.column[entries]] = family.weight[entries]
    return row.reshape(n_kind, N_ZONE, -1)


def quadrature(section, family, circle, n_arc=60_000):
    """Weights, driving moment and fill terms by brute force over the arc from exit to entry."""
    x0, y0, radius = family.centre_x[circle], family.centre_y[circle], family.radius[circle]
    first, last = -np.arccos(y0 / radius), np.arccos((y0 - section.height) / radius)
    angle = first + (last - first) * (np.arange(n_arc) + 0.5) / n_arc
    moment = radius**2 * (last - first) / n_arc
    x, y = x0 + radius * np.sin(angle), y0 - radius * np.cos(angle)
    edge = family.slice_edge
    level = np.clip(np.searchsorted(edge, -y, side="left") - 1, 0, edge.size - 2)
    beyond = (x < 0.0) | (x > section.base_width)
    sloping = ~beyond & ((x < section.slope_zone) | (x > section.base_width - section.slope_zone))
    zone = np.where(beyond, 0, np.where(sloping, 1, 2))
    weights = np.zeros((2, N_ZONE, edge.size - 1))
    below = y <= 0.0
    np.add.at(weights[0], (zone[below], level[below]), moment)
    np.add.at(weights[1], (zone[below], level[below]), moment * np.cos(angle[below]) ** 2)
    column = surface(section, x) - y
    in_fill = ~below & (column > 0.0)
    friction = (moment * np.cos(angle) ** 2 * column)[in_fill].sum()
    # the weight of the fill inside the circle, over a grid of x fine enough for its corners
    left, right = (
        max(x0 - np.sqrt(radius**2 - y0**2), 0.0),
        x0 + np.sqrt(radius**2 - (y0 - section.height) ** 2),
    )
    grid = left + (right - left) * (np.arange(n_arc) + 0.5) / n_arc
    arc = np.maximum(y0 - np.sqrt(np.maximum(radius**2 - (grid - x0) ** 2, 0.0)), 0.0)
    inside = np.maximum(surface(section, grid) - arc, 0.0)
    driving = (inside * (grid - x0)).sum() * (right - left) / n_arc
    greatest = (np.cos(angle) ** 2 * column)[in_fill].max(initial=0.0)
    return weights, driving, (friction, greatest), in_fill.sum() * moment


@pytest.mark.parametrize("name", SECTIONS)
def test_weights_and_moments_equal_a_brute_force_sum(name):
    section = SECTIONS[name]
    family = family_of(section, frictional_ground=True)
    assert family.n_circle > 200
    for circle in some_circles(family):
        weights, driving, (friction, greatest), cohesion = quadrature(section, family, circle)
        row = dense_row(family, circle, 2)
        arc = family.radius[circle] ** 2 * 2.0 * np.pi / ARC_POINTS  # more than one point of the kernel's arc
        # a point of the arc may fall on the other side of a slice, a zone or ground level, at each end
        assert row == pytest.approx(weights, abs=2.0 * arc)
        whole = weights[0].sum() + cohesion
        # ground level only moves a point from one sum to the other; the fill's surface may lose one
        assert row[0].sum() + family.fill_cohesion[circle] == pytest.approx(whole, abs=arc)
        assert family.driving[circle] == pytest.approx(driving, rel=1e-3, abs=1e-3 * section.height)
        # one point crosses ground level; elsewhere the sum is smooth, and nothing at the fill's surface
        assert family.fill_friction[circle] == pytest.approx(friction, rel=1e-3, abs=arc * greatest)


def test_some_circles_pass_below_the_far_slope():
    section = SECTIONS["narrow, while rising"]
    family = family_of(section)
    far = family.centre_x + np.sqrt(family.radius**2 - family.centre_y**2)
    assert (far > section.base_width - section.slope_zone + 0.5).sum() > 20


@pytest.mark.parametrize("name", SECTIONS)
def test_circles_leave_beyond_the_toe_enter_on_top_and_stay_above_the_depth(name):
    section = SECTIONS[name]
    family = family_of(section)
    assert (family.radius - family.centre_y <= DEPTH * (1.0 + 1e-12)).all()
    leave = family.centre_x - np.sqrt(family.radius**2 - family.centre_y**2)
    enter = family.centre_x + np.sqrt(family.radius**2 - (family.centre_y - section.height) ** 2)
    assert (leave <= 1e-9 * family.radius).all()
    assert (enter >= section.shoulder - 1e-9 * family.radius).all()
    assert (enter <= section.base_width - section.shoulder + 1e-9 * family.radius).all()
    assert (family.driving > 0.0).all()


def test_arc_below_ground_level_in_closed_form():
    """Half-angle a from the vertical: cohesion R^2 2a, friction R^2 (a + sin a cos a)."""
    family = family_of(SECTIONS["at full height"], frictional_ground=True)
    for circle in some_circles(family):
        radius = family.radius[circle]
        a = np.arccos(family.centre_y[circle] / radius)
        row = dense_row(family, circle, 2)
        arc = radius**2 * 2.0 * np.pi / ARC_POINTS
        assert row[0].sum() == pytest.approx(radius**2 * 2.0 * a, abs=arc)
        assert row[1].sum() == pytest.approx(radius**2 * (a + np.sin(a) * np.cos(a)), abs=arc)


def test_frictional_columns_are_left_out_where_nothing_has_friction():
    with_friction = family_of(SECTIONS["at full height"], frictional_ground=True)
    without = family_of(SECTIONS["at full height"])
    n_slice = without.slice_edge.size - 1
    assert without.column.max() < N_ZONE * n_slice <= with_friction.column.max()
    assert np.array_equal(without.driving, with_friction.driving)


def test_some_circles_weighed_by_themselves_are_the_same():
    layout = layout_of(SECTIONS["while rising"])
    family, candidates = circle_family(layout), candidate_circles(layout)
    assert len(candidates) == family.n_circle
    keep = np.zeros(family.n_circle, dtype=bool)
    keep[[3, 50, 51, 120]] = True
    part = weighed(layout, candidates[keep])
    assert part.n_circle == 4
    assert part.driving.tolist() == family.driving[keep].tolist()
    for new, old in enumerate(np.flatnonzero(keep)):
        assert np.array_equal(dense_row(part, new, 1), dense_row(family, old, 1))


def test_slices_end_and_circles_touch_at_layer_boundaries():
    boundaries = (1.3, 4.1, 7.0, 20.0)  # the last two do not lie within the depth
    layout = layout_of(SECTIONS["at full height"], boundaries=boundaries)
    plain = layout_of(SECTIONS["at full height"])
    assert {1.3, 4.1} <= set(layout.slice_edge.tolist())
    assert layout.slice_edge[[0, -1]].tolist() == plain.slice_edge[[0, -1]].tolist() == [0.0, DEPTH]
    assert (np.diff(layout.slice_edge) > 0.0).all()
    circles = candidate_circles(layout)
    touch = circles.radius - circles.centre_y
    for depth in (1.3, 4.1):
        assert (np.abs(touch - depth) < 1e-9).any()
    assert touch.max() <= DEPTH * (1.0 + 1e-12)


def test_denser_layouts_have_more_circles_and_slices():
    section = SECTIONS["at full height"]
    layouts = [CircleLayout(section=section, depth=DEPTH, density=density) for density in (0.25, 0.5)]
    counts = [len(candidate_circles(layout)) for layout in layouts]
    assert 5.0 < counts[1] / counts[0] < 12.0  # the cube of two, less the invalid ones
    assert layouts[1].slice_edge.size - 1 == 2 * (layouts[0].slice_edge.size - 1)


@pytest.mark.parametrize(("height", "depth"), [(0.0, 5.0), (-1.0, 5.0), (2.0, 0.0)])
def test_no_height_or_no_depth_is_refused(height, depth):
    section = EmbankmentSection(height=height, side_slope=2.0, base_width=30.0, full_height=3.0)
    with pytest.raises(ParameterError, match=f"must be above zero; got {height:g} and {depth:g} m"):
        CircleLayout(section=section, depth=depth)
