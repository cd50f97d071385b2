"""A slope of one undrained strength: the package's answer, and a search of circles of its own."""

from dataclasses import dataclass

import numpy as np
from scipy.optimize import differential_evolution

from probsoil.ground.embankment import EmbankmentSection
from probsoil.ground.slip import FillStrength, GroundStrength, slip_safety
from probsoil.ground.slip_circles import CircleLayout, circle_family

STRENGTH, WEIGHT = 20.0, 18.0
# The family of circles is as dense as it takes for its least factor to come within 1 % of the least
# of all circles (fixed when the method was chosen). Being a choice among circles, it never goes below,
# but for the quadrature along the arc (0.1 %).
DENSITY_ALLOWANCE, ARC_ALLOWANCE = 0.01, 0.001
NO_DEPTH = 1e-7  # of the height: a firm base at the level of the toe


@dataclass(frozen=True)
class Slope:
    """Height 1, run per unit of rise, and depth of clay below the toe, all in heights."""

    run: float
    depth: float
    height: float = 1.0


def computed_factor(slope, *, width, fill_strength=STRENGTH):
    """Least factor of the package for a slope (fill and ground) of `STRENGTH`."""
    section = EmbankmentSection(
        height=slope.height, side_slope=slope.run, base_width=width, full_height=slope.height
    )
    depth = max(slope.depth, NO_DEPTH * slope.height)
    layout = CircleLayout(section=section, depth=depth, within_fill=fill_strength > 0.0)
    points = np.linspace(0.0, 2.0 * depth, 12)[None, :]
    ground = GroundStrength(
        boundary=np.array([[0.0, 2.0 * depth]]),
        point_layer=np.zeros(12, dtype=np.int64),
        point_depth=points,
        cohesive=np.full((1, 3, 12), STRENGTH),
        frictional=None,
    )
    fill = FillStrength(
        unit_weight=np.array([WEIGHT]), friction_angle=np.zeros(1), cohesion=np.array([fill_strength])
    )
    factor, _ = slip_safety(ground, fill, circle_family(layout))
    return float(factor[0])


def stability_number(slope, *, n_column=300):
    """Greatest c/(F g H) over all circles: weight of slices, free search.

    The unknowns are where the circle leaves (on the ground beyond the toe or on the slope), where it enters
    behind the shoulder, and how far it is bent, up to touching the firm base or entering vertically.
    Soil below the level of the toe balances.
    """
    reach = 3.0 + 2.0 * slope.depth + slope.run

    def number(unknown):
        place, back, share = unknown
        leave = np.array([place, 0.0] if place <= 0.0 else [place * slope.run, place])
        enter = np.array([slope.run + back, 1.0])
        half = share * most_bent(leave, enter, slope.depth)
        centre, radius = circle(leave, enter, half)
        start = max(leave[0], 0.0)
        x = start + (enter[0] - start) * (np.arange(n_column) + 0.5) / n_column
        top = np.minimum(x / slope.run, 1.0) if slope.run > 0.0 else np.ones_like(x)
        bottom = np.maximum(centre[1] - np.sqrt(np.maximum(radius**2 - (x - centre[0]) ** 2, 0.0)), 0.0)
        moment = (np.maximum(top - bottom, 0.0) * (x - centre[0])).sum() * (enter[0] - start) / n_column
        return -moment / (radius**2 * 2.0 * half)

    # two searches, since steep slopes have one minimum at the toe and one far below it
    return max(
        -float(differential_evolution(number, bounds, seed=7, tol=1e-6, maxiter=200, popsize=10).fun)
        for bounds in (
            [(-reach, 0.0), (1e-3, reach), (1e-3, 1.0)],
            [(0.0, 0.98), (1e-3, reach), (1e-3, 1.0)],
        )
    )


def circle(leave, enter, half):
    """Centre and radius of the circle through two points whose arc between them has twice this angle."""
    chord = enter - leave
    length = np.hypot(*chord)
    along, across = chord / length, np.array([-chord[1], chord[0]]) / length
    return leave + 0.5 * length * (along + across / np.tan(half)), 0.5 * length / np.sin(half)


def most_bent(leave, enter, depth):
    """Greatest half angle: the arc touches the depth, or enters vertically."""
    incline = np.arctan2(enter[1] - leave[1], enter[0] - leave[0])
    low, high = 0.0, 0.5 * np.pi - incline
    for _ in range(30):
        middle = 0.5 * (low + high)
        centre, radius = circle(leave, enter, middle)
        lowest = centre[1] - radius if centre[0] > leave[0] else leave[1]
        low, high = (middle, high) if lowest >= -depth else (low, middle)
    return low
