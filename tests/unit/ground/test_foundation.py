"""Foundations as loads: where the stress starts, where it is looked at, and the cells below the base."""

from itertools import pairwise

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage

from probsoil.errors import ParameterError
from probsoil.ground.applied_load import applied_load
from probsoil.ground.bearing import bearing_levels
from probsoil.ground.foundation import foundation_of
from probsoil.ground.load_stress import circle_influence, rectangle_influence, strip_influence
from probsoil.ground.profile import points_in_situ
from probsoil.ground.response import ground_state

STAGES = [stage("half", 0.0, 1.0, pressure=40), stage("all", 1.0, 2.0, pressure=40)]
DEPTHS = np.array([[0.4, 1.0, 2.5, 6.0]])


def load(shape, **keys):
    lines = [f'shape = "{shape}"', *(f"{key} = {value}" for key, value in keys.items())]
    return "\n".join(["[load]", *lines, "submergence = false"])


def case(shape, *layers, stages=STAGES, **keys):
    layers = layers or (clay("clay", 8.0),)
    return scenario(list(layers), stages, load=load(shape, **keys))


@pytest.mark.parametrize(
    ("shape", "keys", "influence"),
    [
        ("strip", {"width": 3}, lambda z: strip_influence(z, 0.0, width=3.0)),
        ("strip", {"width": 3, "at": 2.5}, lambda z: strip_influence(z, 2.5, width=3.0)),
        ("circle", {"diameter": 5}, lambda z: circle_influence(z, 0.0, diameter=5.0)),
        ("circle", {"diameter": 5, "at": 2.5}, lambda z: circle_influence(z, 2.5, diameter=5.0)),
        (
            "rectangle",
            {"width": 2, "length": 6, "at": "[0.5, -2.0]"},
            lambda z: rectangle_influence(z, 0.5, 2.0, width=2.0, length=6.0),
        ),
    ],
)
def test_each_shape_adds_the_stress_of_its_formula(shape, keys, influence):
    given = case(shape, **keys)
    site = site_model(given)
    added = applied_load(site, central(given), DEPTHS)
    for slot, time in enumerate(site.knots):
        assert added.stress[slot] == pytest.approx(site.pressure(time) * influence(DEPTHS), rel=1e-12)
    assert site.pressure(30.0) == pytest.approx(80.0)


def test_sides_of_a_rectangle_may_be_given_in_either_order():
    one = foundation_of(case("rectangle", width=2, length=6, at="[0.5, -2.0]").load)
    other = foundation_of(case("rectangle", width=6, length=2, at="[-2.0, 0.5]").load)
    assert one == other
    assert (one.width, one.length) == (2.0, 6.0)
    assert foundation_of(scenario([clay("clay", 4.0)], STAGES).load) is None


def test_fill_and_pressure_of_a_tank_add_up():
    stages = [stage("pad", 0.0, 1.0, height=0.5), stage("tank", 1.0, 2.0, pressure=12)]
    given = case("circle", diameter=10, fill_unit_weight=20, stages=stages)
    site = site_model(given)
    added = applied_load(site, central(given), DEPTHS)
    assert added.stress[-1] == pytest.approx(22.0 * circle_influence(DEPTHS, 0.0, diameter=10.0), rel=1e-12)
    assert site.bearing_times.tolist() == [1.0, 2.0]


def test_nothing_is_added_above_the_base():
    given = case("rectangle", width=2, length=3, depth=1.5)
    site = site_model(given)
    added = applied_load(site, central(given), np.array([[0.5, 1.49, 1.5, 3.0]]))
    assert added.stress[-1, 0, :2].tolist() == [0.0, 0.0]
    assert added.stress[-1, 0, 2] == pytest.approx(80.0)
    exact = rectangle_influence(1.5, 0.0, 0.0, width=2.0, length=3.0)
    assert added.stress[-1, 0, 3] == pytest.approx(80.0 * float(exact))


def test_point_that_the_base_cuts_counts_with_the_part_below_it():
    given = case("strip", width=4, depth=1.5)
    whole = applied_load(site_model(given), central(given), np.array([[1.4]]), np.array([[0.6]]))
    # 0.2 of 0.6 m lies below the base, its middle 0.1 m below it
    assert whole.spread[0, 0] == pytest.approx(0.2 / 0.6 * float(strip_influence(0.1, 0.0, width=4.0)))


@pytest.mark.parametrize("depth", [0.0, 1.2, 2.0])
def test_no_cell_reaches_across_the_base_whatever_the_thickness(depth):
    thickness = '{ dist = "normal", mean = 2.6, sd = 0.3 }'
    given = case("strip", clay("crust", thickness), clay("deep", 6.0), width=2, depth=depth)
    values = central(given) | {"crust.thickness": np.array([2.2, 2.6, 3.1])}
    points = points_in_situ(site_model(given), values, 3)
    top, bottom = points.depth - 0.5 * points.thickness, points.depth + 0.5 * points.thickness
    assert not ((top < depth - 1e-9) & (bottom > depth + 1e-9)).any()
    assert points.thickness.sum(axis=1) == pytest.approx(values["crust.thickness"] + 6.0, rel=1e-12)
    assert top[:, 1:] == pytest.approx(bottom[:, :-1], abs=1e-9)


def test_settlement_in_the_end_is_the_strain_below_the_base_alone():
    """Elastic reloading all the way: kappa/(1+e0) ln(1 + added/in situ), summed over thin slices."""
    given = case(
        "rectangle",
        clay("clay", 8.0, preconsolidation="{ stress = 900 }", permeability="{ cv = 900 }"),
        width=3,
        length=4,
        depth=1.0,
    )
    state = ground_state(site_model(given), central(given))
    edges = np.linspace(1.0, 8.0, 7001)
    middle = 0.5 * (edges[1:] + edges[:-1])
    in_situ = np.maximum((16.0 - 9.81) * middle, 1.0)
    added = 80.0 * rectangle_influence(middle - 1.0, 0.0, 0.0, width=3.0, length=4.0)
    exact = (0.04 / 2.8 * np.log1p(added / in_situ) * np.diff(edges)).sum()
    assert state.response.settlement[0, -1] == pytest.approx(exact, rel=0.005)  # promise of the grid


def test_water_leaves_at_the_base():
    """No excess pressure, and so no change of stress, in the clay above it; below it there is."""
    keys = {"preconsolidation": "{ stress = 200 }", "permeability": "{ k = 1e-10, ck = 5 }"}
    given = case("strip", clay("clay", 8.0, **keys), width=3, depth=2)
    state = ground_state(site_model(given), central(given))
    points, slot = state.ground.points, int(np.searchsorted(state.response.record, 2.0))
    gained = state.consolidation.stress[0, slot] - points.stress[0]
    excess = 80.0 * state.ground.load.spread[0] - gained
    above = points.depth[0] < 2.0
    assert np.abs(excess[above]).max() < 0.5
    assert excess[~above].max() > 30.0


def test_realisation_that_does_not_converge_does_not_end_the_run():
    """A soft normally consolidated surface under a heavy strip: no number, and no error either."""
    layers = [clay("crust", 1.0, permeability="{ cv = 0.01 }"), clay("soft", 9.0)]
    given = scenario(
        layers, [stage("built", 0.0, 0.01, pressure=50)], load='[load]\nshape = "strip"\nwidth = 2'
    )
    response = ground_state(site_model(given), central(given)).response
    assert np.isnan(response.bearing).all() or response.converged.all()


def test_small_foundations_get_more_cells():
    wide, narrow = (site_model(case("strip", width=width)).cells.n_cell for width in (20, 2))
    assert narrow > 1.5 * wide


def test_load_spreads_at_two_to_one():
    foundation = foundation_of(case("rectangle", width=2, length=6).load)
    width, share = foundation.spread_area(np.array([0.0, 2.0]))
    assert width.tolist() == [2.0, 4.0]
    assert share == pytest.approx([1.0, 2.0 * 6.0 / (4.0 * 8.0)])
    circle = foundation_of(case("circle", diameter=4).load)
    assert circle.spread_area(np.array([4.0]))[1] == pytest.approx([0.25])
    strip = foundation_of(case("strip", width=4).load)
    assert strip.spread_area(np.array([4.0]))[1] == pytest.approx([0.5])


def test_levels_are_the_base_and_the_tops_of_clay_below_it():
    layers = [clay("top", 1.0), sand("sand", 1.0), clay("upper", 2.0), clay("lower", 4.0)]
    given = case("strip", *layers, width=2, depth=1.5)
    site = site_model(given)
    state = ground_state(site, central(given))
    levels = bearing_levels(site, site.foundation, state.ground)
    assert [bool(level.exists[0]) for level in levels] == [False, True, True]
    assert [float(level.depth[0]) for level in levels[1:]] == pytest.approx([2.0, 4.0])
    first = [float(level.edge[0][level.below[0] > 0.0][0]) for level in levels[1:]]
    assert first == pytest.approx([0.0, 0.0], abs=1e-9)  # the first clay below begins at the level


@pytest.mark.parametrize(
    ("function", "arguments", "message"),
    [
        (strip_influence, (1.0, 0.0), "width must be finite and above 0"),
        (rectangle_influence, (1.0, 0.0, 0.0), "length must be finite and above 0"),
        (circle_influence, (1.0, 0.0), "diameter must be finite and above 0"),
    ],
)
def test_loads_without_size_are_refused(function, arguments, message):
    sizes = {"strip_influence": {"width": 0}, "circle_influence": {"diameter": -1}}
    with pytest.raises(ParameterError, match=message):
        function(*arguments, **sizes.get(function.__name__, {"width": 1, "length": 0}))
    with pytest.raises(ParameterError, match="depth must be finite and at least 0"):
        strip_influence(-1.0, 0.0, width=1.0)


@pytest.mark.parametrize("at", [(0.0, 0.0), (0.4, 1.1), (1.0, 2.0), (1.7, -3.0)])
def test_four_quarters_make_a_rectangle(at):
    x, y = at
    depth = np.array([0.0, 0.3, 2.0, 9.0])
    parts = sum(
        rectangle_influence(depth, x - cx, y - cy, width=1.0, length=2.0)
        for cx in (-0.5, 0.5)
        for cy in (-1.0, 1.0)
    )
    assert rectangle_influence(depth, x, y, width=2.0, length=4.0) == pytest.approx(parts, abs=1e-13)


def test_long_rectangle_is_a_strip_and_all_fade_with_depth():
    depth = np.array([0.1, 1.0, 4.0, 40.0, 400.0])
    strip = strip_influence(depth, 0.6, width=2.0)
    assert rectangle_influence(depth, 0.6, 0.0, width=2.0, length=1e6) == pytest.approx(strip, abs=1e-8)
    square = rectangle_influence(depth, 0.6, 0.0, width=2.0, length=2.0)
    circle = circle_influence(depth, 0.6, diameter=2.0)
    for found in (strip, square, circle):
        assert all(a > b for a, b in pairwise(found))
    assert square[-1] == pytest.approx(1.5 / np.pi * 4.0 / 400.0**2, rel=1e-4)
    assert circle[-1] == pytest.approx(1.5 / np.pi * np.pi / 400.0**2, rel=1e-4)
