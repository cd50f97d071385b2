"""Moments of slip circles against quadrature of another kind."""

import numpy as np
import pytest

from probsoil.errors import ParameterError
from probsoil.ground._circle_kernel import ARC_POINTS
from probsoil.ground.embankment import EmbankmentSection
from probsoil.ground.slip_circles import CircleLayout, candidate_circles, circle_family, weighed

BERMED = {"side_slope": 2.0, "base_width": 40.0, "full_height": 3.0, "berm_width": 5.0, "berm_height": 1.2}
SECTIONS = {
    "at full height": EmbankmentSection(height=3.0, side_slope=2.0, base_width=30.0, full_height=3.0),
    "while rising": EmbankmentSection(height=1.2, side_slope=2.0, base_width=30.0, full_height=3.0),
    "narrow": EmbankmentSection(height=2.5, side_slope=1.5, base_width=9.0, full_height=2.5),
    # low enough for circles that pass under the crest and on below the far slope
    "narrow, while rising": EmbankmentSection(height=0.8, side_slope=1.5, base_width=9.0, full_height=2.5),
    "vertical sides": EmbankmentSection(height=1.0, side_slope=0.0, base_width=12.0, full_height=1.0),
    "berms": EmbankmentSection(height=3.0, **BERMED),
    "berms, while rising": EmbankmentSection(height=0.9, **BERMED),
}
DEPTH = 7.0


def layout_of(section, **keys):
    return CircleLayout(section=section, depth=DEPTH, density=0.35, **({"within_fill": True} | keys))


def family_of(section, **keys):
    return circle_family(layout_of(section, **keys))


def some_circles(family, count=40):
    rng = np.random.default_rng(np.random.SeedSequence(5, spawn_key=(family.n_circle,)))
    return rng.choice(family.n_circle, size=min(count, family.n_circle), replace=False)


def surface(section, x):
    """Level of the surface; at a vertical side that of the fill."""
    inside, run = np.minimum(x, section.base_width - x), max(section.side_slope, 1e-12)
    level = np.minimum(section.height, inside / run)
    if section.berm_width > 0.0:
        berm = np.minimum(min(section.berm_height, section.height), inside / run)
        if section.height > section.berm_height:
            level = np.maximum(berm, np.minimum(section.height, (inside - section.berm_width) / run))
    return np.maximum(level, 0.0)


def dense_row(family, circle, n_kind):
    row = np.zeros(n_kind * family.n_zone * (family.slice_edge.size - 1))
    entries = slice(family.row_start[circle], family.row_start[circle + 1])
    row[family.column[entries]] = family.weight[entries]
    return row.reshape(n_kind, family.n_zone, -1)


def zones(section, x):
    inside = np.minimum(x, section.base_width - x)
    zone = np.where(inside < section.slope_zone, 1, 2)
    zone = np.where(inside < section.berm_zone, 3, zone)
    return np.where(inside < 0.0, 0, zone)


def quadrature(section, family, circle, n_arc=60_000):
    """Weights, driving moments and fill terms by brute force over the arc from exit to entry."""
    one = family.circles[np.array([circle])]
    x0, y0, radius = one.centre_x[0], one.centre_y[0], one.radius[0]
    first = np.arcsin((one.exit_x[0] - x0) / radius)
    last = np.arcsin(min((one.entry_x[0] - x0) / radius, 1.0))
    angle = first + (last - first) * (np.arange(n_arc) + 0.5) / n_arc
    moment = radius**2 * (last - first) / n_arc
    x, y = x0 + radius * np.sin(angle), y0 - radius * np.cos(angle)
    edge = family.slice_edge
    level = np.clip(np.searchsorted(edge, -y, side="left") - 1, 0, edge.size - 2)
    zone = zones(section, x)
    weights = np.zeros((2, family.n_zone, edge.size - 1))
    below = y <= 0.0
    np.add.at(weights[0], (zone[below], level[below]), moment)
    np.add.at(weights[1], (zone[below], level[below]), moment * np.cos(angle[below]) ** 2)
    column = surface(section, x) - y
    in_fill = ~below & (column > 0.0)
    friction = (moment * np.cos(angle) ** 2 * column)[in_fill].sum()
    loaded = in_fill & (x > max(section.shoulder, x0)) & (one.entry_y[0] >= section.height)
    under_traffic = (moment * np.cos(angle) ** 2)[loaded].sum()
    # the weight of the fill inside the circle, over a grid of x fine enough for its corners
    left, right = max(one.exit_x[0], 0.0), one.entry_x[0]
    grid = left + (right - left) * (np.arange(n_arc) + 0.5) / n_arc
    arc = np.maximum(y0 - np.sqrt(np.maximum(radius**2 - (grid - x0) ** 2, 0.0)), 0.0)
    inside = np.maximum(surface(section, grid) - arc, 0.0)
    step = (right - left) / n_arc
    driving = (inside * (grid - x0)).sum() * step
    on_top = (grid > max(section.shoulder, x0)) & (one.entry_y[0] >= section.height)
    traffic = (grid - x0)[on_top].sum() * step
    greatest = (np.cos(angle) ** 2 * column)[in_fill].max(initial=0.0)
    return weights, (driving, traffic), (friction, greatest, under_traffic), in_fill.sum() * moment


@pytest.mark.parametrize("name", SECTIONS)
def test_weights_and_moments_equal_a_brute_force_sum(name):
    section = SECTIONS[name]
    family = family_of(section, frictional_ground=True)
    assert family.n_circle > 200
    for circle in some_circles(family):
        weights, (driving, traffic), fill, cohesion = quadrature(section, family, circle)
        friction, greatest, under_traffic = fill
        row = dense_row(family, circle, 2)
        radius = family.circles.radius[circle]
        arc = radius**2 * 2.0 * np.pi / ARC_POINTS  # more than one point of the kernel's arc
        # a point of the arc may fall on the other side of a slice, a zone or ground level, at each end
        assert row == pytest.approx(weights, abs=2.0 * arc)
        whole = weights[0].sum() + cohesion
        # ground level only moves a point from one sum to the other; the fill's surface may lose one
        assert row[0].sum() + family.fill_cohesion[circle] == pytest.approx(whole, abs=arc)
        # the brute sum itself is one step wrong where the fill or the traffic ends
        assert family.circles.driving[circle] == pytest.approx(driving, rel=1e-4, abs=1e-3)
        assert family.circles.traffic[circle] == pytest.approx(traffic, rel=1e-4, abs=1e-2)
        # one point crosses ground level; elsewhere the sum is smooth, and nothing at the fill's surface
        assert family.fill_friction[circle] == pytest.approx(friction, rel=1e-3, abs=arc * greatest)
        assert family.traffic_friction[circle] == pytest.approx(under_traffic, abs=arc)


def test_some_circles_pass_below_the_far_slope():
    section = SECTIONS["narrow, while rising"]
    circles = family_of(section).circles
    far = circles.centre_x + np.sqrt(np.maximum(circles.radius**2 - circles.centre_y**2, 0.0))
    assert (far > section.base_width - section.slope_zone + 0.5).sum() > 20


@pytest.mark.parametrize("name", SECTIONS)
def test_circles_leave_and_enter_on_the_surface_and_stay_below_it(name):
    section = SECTIONS[name]
    circles = family_of(section).circles
    slack = 1e-9 * circles.radius
    assert (circles.touch <= DEPTH * (1.0 + 1e-12)).all()
    for x, y in ((circles.exit_x, circles.exit_y), (circles.entry_x, circles.entry_y)):
        on_circle = np.hypot(x - circles.centre_x, y - circles.centre_y)
        assert (np.abs(on_circle - circles.radius) <= slack).all()
    # a vertical side has no height of its own at its foot
    face = (circles.exit_x == 0.0) & (section.side_slope == 0.0)
    assert circles.exit_y[~face] == pytest.approx(surface(section, circles.exit_x)[~face], abs=1e-9)
    short = circles.entry_x < section.base_width - 1e-9  # at a vertical far side it may enter at the edge
    assert circles.entry_y[short] == pytest.approx(surface(section, circles.entry_x)[short], abs=1e-9)
    assert (circles.entry_x <= section.base_width - section.shoulder + slack).all()
    assert (circles.centre_y >= circles.entry_y).all()
    assert (circles.driving > 0.0).all()
    share = np.linspace(0.0, 1.0, 41)[1:-1, None]
    x = circles.exit_x + share * (circles.entry_x - circles.exit_x)
    arc = circles.centre_y - np.sqrt(np.maximum(circles.radius**2 - (x - circles.centre_x) ** 2, 0.0))
    assert (arc <= surface(section, x) + slack + 1e-9 * section.height).all()


def test_what_kinds_of_circles_there_are():
    section = SECTIONS["berms"]
    circles = family_of(section).circles
    back = section.corners[2, 0]
    kinds = {
        "beyond the toe": circles.exit_x < 0.0,
        "at the toe": (circles.exit_x == 0.0) & (circles.touch > 0.0),
        "on the slope of the berm": (circles.exit_y > 0.0) & (circles.exit_y < 1.2),
        "on the berm": (circles.exit_y == 1.2) & (circles.exit_x < back) & (circles.touch > 0.0),
        "on the slope above it": (circles.exit_y > 1.2) & (circles.touch > 0.0),
        "in the fill": circles.touch < 0.0,
        "of the berm alone": circles.entry_y == 1.2,
    }
    assert {name: which.sum() > 20 for name, which in kinds.items()} == dict.fromkeys(kinds, True)
    assert (circles.touch[circles.touch > 0.0] >= 0.2 - 1e-12).all()


def test_fill_without_cohesion_has_no_circles_of_its_own():
    with_own = candidate_circles(layout_of(SECTIONS["at full height"]))
    without = candidate_circles(layout_of(SECTIONS["at full height"], within_fill=False))
    assert (without.touch >= 0.2 - 1e-12).all()
    assert len(without) == (with_own.touch > 0.0).sum()
    inside = with_own.touch <= 0.0
    assert (with_own.touch[inside] < 0.0).any()
    shoulder = SECTIONS["at full height"].shoulder
    below = with_own.centre_y - np.sqrt(with_own.radius**2 - (shoulder - with_own.centre_x) ** 2)
    assert (SECTIONS["at full height"].height - below[inside] >= 0.2 - 1e-9).all()


def test_arc_below_ground_level_in_closed_form():
    """Half-angle a from the vertical: cohesion R^2 2a, friction R^2 (a + sin a cos a)."""
    family = family_of(SECTIONS["at full height"], frictional_ground=True, within_fill=False)
    for circle in some_circles(family):
        radius = family.circles.radius[circle]
        a = np.arccos(family.circles.centre_y[circle] / radius)
        row = dense_row(family, circle, 2)
        arc = radius**2 * 2.0 * np.pi / ARC_POINTS
        # a circle that leaves on the slope crosses ground level twice
        assert row[0].sum() == pytest.approx(radius**2 * 2.0 * a, abs=2.0 * arc)
        assert row[1].sum() == pytest.approx(radius**2 * (a + np.sin(a) * np.cos(a)), abs=2.0 * arc)


def test_frictional_columns_are_left_out_where_nothing_has_friction():
    with_friction = family_of(SECTIONS["at full height"], frictional_ground=True)
    without = family_of(SECTIONS["at full height"])
    n_slice = without.slice_edge.size - 1
    assert without.column.max() < without.n_zone * n_slice <= with_friction.column.max()
    assert np.array_equal(without.circles.driving, with_friction.circles.driving)


def test_some_circles_weighed_by_themselves_are_the_same():
    layout = layout_of(SECTIONS["while rising"])
    family, candidates = circle_family(layout), candidate_circles(layout)
    assert len(candidates) == family.n_circle
    keep = np.zeros(family.n_circle, dtype=bool)
    keep[[3, 50, 51, 120]] = True
    part = weighed(layout, candidates[keep])
    assert part.n_circle == 4
    assert part.circles.driving.tolist() == family.circles.driving[keep].tolist()
    for new, old in enumerate(np.flatnonzero(keep)):
        assert np.array_equal(dense_row(part, new, 1), dense_row(family, old, 1))


def test_slices_end_and_circles_touch_at_layer_boundaries():
    boundaries = (1.3, 4.1, 7.0, 20.0)  # the last two do not lie within the depth
    layout = layout_of(SECTIONS["at full height"], boundaries=boundaries)
    plain = layout_of(SECTIONS["at full height"])
    assert {1.3, 4.1} <= set(layout.slice_edge.tolist())
    assert layout.slice_edge[[0, -1]].tolist() == plain.slice_edge[[0, -1]].tolist() == [0.0, DEPTH]
    assert (np.diff(layout.slice_edge) > 0.0).all()
    touch = candidate_circles(layout).touch
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
