"""The few circles chosen are enough: a refined search moves no least factor by 1 %.

On random layered profiles with a thin weak seam at an uncertain depth, with and without berms and with
traffic, the circles being chosen on other profiles than those they are then used for; and for some
profiles against a search of another kind over all circles.
"""

import numpy as np
import pytest
from scipy.optimize import differential_evolution

from probsoil.ground.embankment import EmbankmentSection
from probsoil.ground.response import COMPETING
from probsoil.ground.slip import FillStrength, GroundStrength, competing_circles, slip_safety
from probsoil.ground.slip_circles import CircleLayout

PROMISE = 0.01
ARC_ALLOWANCE = 0.001  # of the quadrature along the arc
DEPTH, N_POINT = 9.0, 60
SECTIONS = {
    "bermed": EmbankmentSection(
        height=3.0, side_slope=2.0, base_width=42.0, full_height=3.0, berm_width=5.0, berm_height=1.2
    ),
    "long berm": EmbankmentSection(
        height=4.0, side_slope=1.5, base_width=64.0, full_height=4.0, berm_width=14.0, berm_height=1.5
    ),
    "plain": EmbankmentSection(height=2.5, side_slope=2.5, base_width=28.0, full_height=2.5),
}


def profiles(section, n_sample, seed):
    """Crust over soft clay, a weak seam, and clay that grows stronger with depth; stronger under the fill."""
    rng = np.random.default_rng(np.random.SeedSequence(21, spawn_key=(seed,)))
    thickness = rng.uniform([0.5, 2.0, 0.3, 4.0], [1.5, 3.5, 0.6, 5.0], (n_sample, 4))
    boundary = np.concatenate([np.zeros((n_sample, 1)), np.cumsum(thickness, axis=1)], axis=1)
    layer = np.repeat(np.arange(4), N_POINT // 4)
    within = np.tile((np.arange(N_POINT // 4) + 0.5) / (N_POINT // 4), 4)
    depth = boundary[:, layer] + within * thickness[:, layer]
    top = rng.uniform([20.0, 8.0, 6.0, 12.0], [40.0, 14.0, 9.0, 18.0], (n_sample, 4))[:, layer]
    growth = rng.uniform(0.0, 2.0, (n_sample, 1)) * (layer == 3) * (depth - boundary[:, layer])
    zone = np.array([1.0, 1.15, 1.35, 1.08])[: section.n_zone]
    ground = GroundStrength(
        boundary=boundary,
        point_layer=layer,
        point_depth=depth,
        cohesive=(top + growth)[:, None, :] * zone[None, :, None],
        frictional=None,
    )
    fill = FillStrength(
        unit_weight=rng.uniform(17.0, 20.0, n_sample),
        friction_angle=rng.uniform(28.0, 36.0, n_sample),
        cohesion=rng.uniform(1.0, 6.0, n_sample),
        traffic=rng.uniform(0.0, 15.0, n_sample),
    )
    return ground, fill


def layout(section, ground, density):
    return CircleLayout(
        section=section,
        depth=DEPTH,
        boundaries=tuple(ground.boundary[:, 1:].mean(axis=0).tolist()),
        density=density,
        within_fill=True,
    )


def least(section, ground, fill, density):
    family = competing_circles(ground, fill, layout(section, ground, density), within=0.0)
    return slip_safety(ground, fill, family)[0]


@pytest.mark.parametrize("name", SECTIONS)
def test_a_refined_search_moves_the_least_factor_by_under_one_percent(name):
    section = SECTIONS[name]
    pilot = profiles(section, 512, seed=100 + len(name))
    family = competing_circles(*pilot, layout(section, pilot[0], 1.0), within=COMPETING)
    assert family.n_circle < 3 * 512 / 2  # each with one on either side; two realisations share one and more
    ground, fill = profiles(section, 48, seed=len(name))
    chosen, fine = slip_safety(ground, fill, family)[0], least(section, ground, fill, 1.5)
    assert np.abs(chosen / fine - 1.0).max() < PROMISE
    assert chosen.std() > 0.05 * chosen.mean()  # the profiles do differ


def surface(section, x):
    outline = section.outline
    return np.interp(x, outline[:, 0], outline[:, 1], left=0.0, right=0.0)


def factor_of(section, ground, fill, circle, n=1200):
    """Factor of safety of a circle by vertical slices of its own, for the only realisation."""
    x0, y0, entry = circle
    radius = np.hypot(entry - x0, section.height - y0)
    if y0 < section.height or entry <= x0 or radius - y0 > DEPTH or radius - y0 < 0.2:
        return 1e3
    back = x0 - radius * (1.0 - 1e-9)
    grid = np.linspace(back, entry, n + 1)
    arc = y0 - np.sqrt(np.maximum(radius**2 - (grid - x0) ** 2, 0.0))
    outside = np.flatnonzero((arc > surface(section, grid) + 1e-9) & (grid < entry - 1e-6))
    if outside.size == 0:
        return 1e3
    leave = grid[outside[-1]]
    first, last = np.arcsin((leave - x0) / radius), np.arcsin((entry - x0) / radius)
    angle = first + (last - first) * (np.arange(n) + 0.5) / n
    x, y = x0 + radius * np.sin(angle), y0 - radius * np.cos(angle)
    turn = (last - first) / n
    column = np.maximum(surface(section, x) - np.maximum(y, 0.0), 0.0)
    loaded = (x > max(section.shoulder, x0)) * fill.traffic[0]
    driving = ((fill.unit_weight[0] * column + loaded) * (x - x0) * radius * np.cos(angle) * turn).sum()
    if driving <= 0.0:
        return 1e3
    in_fill, tangent = y > 0.0, np.tan(np.radians(fill.friction_angle[0]))
    normal = (fill.unit_weight[0] * column + loaded) * np.cos(angle) ** 2
    strength = np.where(in_fill, fill.cohesion[0] + normal * tangent, strength_at(section, ground, x, -y))
    return (strength * radius**2 * turn).sum() / driving


def strength_at(section, ground, x, depth):
    inside = np.minimum(x, section.base_width - x)
    zone = np.where(inside < section.slope_zone, 1, 2)
    zone = np.where(inside < 0.0, 0, np.where(inside < section.berm_zone, 3, zone))
    layer = np.clip(np.searchsorted(ground.boundary[0], depth) - 1, 0, ground.boundary.shape[1] - 2)
    found = np.zeros(x.size)
    for one in range(ground.boundary.shape[1] - 1):
        mine = ground.point_layer == one
        for here in range(section.n_zone):
            value = np.interp(depth, ground.point_depth[0, mine], ground.cohesive[0, here, mine])
            found = np.where((layer == one) & (zone == here), value, found)
    return found


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_a_free_search_finds_no_worse_circle(seed):
    section = SECTIONS["bermed"]
    ground, fill = profiles(section, 1, seed=seed)
    computed = float(least(section, ground, fill, 1.0)[0])
    shoulder, reach = section.shoulder, 2.0 * DEPTH + section.berm_width
    searched = differential_evolution(
        lambda circle: factor_of(section, ground, fill, circle),
        [
            (-reach, shoulder + reach),
            (section.height, 4.0 * reach),
            (shoulder, section.base_width - shoulder),
        ],
        seed=11,
        tol=1e-6,
        popsize=14,
        maxiter=120,
    ).fun
    assert computed <= searched * (1.0 + PROMISE)
    assert computed >= searched * (1.0 - PROMISE)
