"""Settlement of granular layers under every shape of load, with removal."""

import numpy as np
import pytest
from ground_cases import AREA, central, clay, sand, scenario, stage
from scipy.integrate import quad

from probsoil.ground.load_stress import (
    circle_influence,
    embankment_influence,
    rectangle_influence,
    strip_influence,
)
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model

MODULUS, PRESSURE, THICKNESS = 40e3, 100.0, 5.0
SHAPES = {
    "rectangle": (
        '[load]\nshape = "rectangle"\nwidth = 2\nlength = 3\ndepth = {depth}\nsubmergence = false',
        lambda z: rectangle_influence(z, 0.0, 0.0, width=2.0, length=3.0),
    ),
    "strip": (
        '[load]\nshape = "strip"\nwidth = 1\ndepth = {depth}\nsubmergence = false',
        lambda z: strip_influence(z, 0.0, width=1.0),
    ),
    "circle": (
        '[load]\nshape = "circle"\ndiameter = 4\nat = 2\ndepth = {depth}\nsubmergence = false',
        lambda z: circle_influence(z, 2.0, diameter=4.0),
    ),
}
FILL = '[load]\nshape = "embankment"\ncrest_width = 6\nside_slope = 1.5\nfill_unit_weight = 20\nfill_phi = 33'


def granular(load, **amount):
    case = scenario(
        [sand("sand", THICKNESS, constrained_modulus=MODULUS), clay("clay", 4.0)],
        [stage("on", 0.0, 0.1, **amount), stage("off", 3.0, 3.1, **{key: -x for key, x in amount.items()})],
        load=load,
        base="drained",
    )
    site = site_model(case)
    return site.times, ground_state(site, central(case)).granular_settlement[0]


@pytest.mark.parametrize("depth", [0.0, 0.7, 1.25])
@pytest.mark.parametrize("shape", SHAPES)
def test_foundations_press_on_every_depth_as_much_as_they_should(shape, depth):
    """The integral of the stress by quadrature; Gauss points within each quarter of the layer find it."""
    load, influence = SHAPES[shape]
    _, settled = granular(load.format(depth=depth), pressure=PRESSURE)
    exact = quad(lambda z: float(influence(z)), 0.0, THICKNESS - depth, limit=200)[0] * PRESSURE / MODULUS
    assert settled.max() == pytest.approx(exact, rel=1e-5)


def test_embankment_and_wide_area():
    """Four points do for a load that is wide against their spacing: half a per cent."""
    _, settled = granular(FILL, height=1.5)

    def influence(z):
        return float(embankment_influence(z, 0.0, base_width=10.5, top_width=6.0))

    exact = quad(influence, 0.0, THICKNESS)[0] * 30.0 / MODULUS
    assert settled.max() == pytest.approx(exact, rel=0.005)
    _, wide = granular(AREA, pressure=PRESSURE)
    assert wide.max() == pytest.approx(PRESSURE * THICKNESS / MODULUS, rel=1e-12)


@pytest.mark.parametrize(
    ("load", "amount"),
    [
        (AREA, {"pressure": PRESSURE}),
        (FILL, {"height": 1.5}),
        *((load.format(depth=0.7), {"pressure": PRESSURE}) for load, _ in SHAPES.values()),
    ],
    ids=["area", "embankment", *SHAPES],
)
def test_it_comes_at_once_and_goes_with_the_load(load, amount):
    times, settled = granular(load, **amount)
    held = (times >= 0.1) & (times <= 3.0)
    assert settled[held] == pytest.approx(settled.max(), rel=1e-12)
    assert settled.max() > 0.0
    assert settled[times >= 3.1] == pytest.approx(0.0, abs=1e-12)
    assert np.all(np.diff(settled[times <= 0.1]) > 0.0)
