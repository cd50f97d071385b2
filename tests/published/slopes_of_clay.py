"""A slope of one undrained strength: the package's answer, and a search of circles of its own."""

from dataclasses import dataclass

import numpy as np
from scipy.optimize import differential_evolution

from probsoil.ground.slip import FillStrength, GroundStrength, slip_safety
from probsoil.ground.slip_circles import CircleLayout, EmbankmentSection, circle_family

STRENGTH, WEIGHT = 20.0, 18.0
# The family of circles is as dense as it takes for its least factor to come within 1 % of the least
# of all circles (fixed when the method was chosen). Being a choice among circles, it never goes below,
# but for the quadrature along the arc (0.1 %).
DENSITY_ALLOWANCE, ARC_ALLOWANCE = 0.01, 0.001


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
    family = circle_family(CircleLayout(section=section, depth=slope.depth))
    points = np.linspace(0.0, 2.0 * slope.depth, 12)[None, :]
    ground = GroundStrength(
        boundary=np.array([[0.0, 2.0 * slope.depth]]),
        point_layer=np.zeros(12, dtype=np.int64),
        point_depth=points,
        cohesive=np.full((1, 3, 12), STRENGTH),
        frictional=None,
    )
    fill = FillStrength(
        unit_weight=np.array([WEIGHT]), friction_angle=np.zeros(1), cohesion=np.array([fill_strength])
    )
    factor, _ = slip_safety(ground, fill, family)
    return float(factor[0])


def stability_number(slope, *, n_column=1500):
    """Greatest c/(F g H) over circles that leave at or beyond the toe: weight of slices, free search.

    The unknowns are the centre and the depth reached; soil below the level of the toe balances.
    """

    def number(circle):
        x0, y0, touch = circle
        radius = y0 + touch
        left, right = x0 - np.sqrt(radius**2 - y0**2), x0 + np.sqrt(radius**2 - (y0 - 1.0) ** 2)
        if left > 0.0 or right < slope.run:
            return 0.0
        x = np.linspace(0.0, right, 2 * n_column + 1)[1::2]
        top = np.minimum(x / slope.run, 1.0) if slope.run > 0.0 else np.ones_like(x)
        bottom = np.maximum(y0 - np.sqrt(radius**2 - (x - x0) ** 2), 0.0)
        moment = (np.maximum(top - bottom, 0.0) * (x - x0)).sum() * right / n_column
        angle = np.arcsin((x0 - left) / radius) + np.arcsin((right - x0) / radius)
        return -moment / (radius**2 * angle)

    reach = 3.0 + 2.0 * slope.depth + slope.run
    bounds = [(-reach, reach), (1.0, 3.0 * reach), (1e-6, slope.depth)]
    best = differential_evolution(number, bounds, seed=7, tol=1e-9, maxiter=400, popsize=20)
    return float(-best.fun)
