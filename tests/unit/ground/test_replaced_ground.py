"""Ground dug out below an embankment or an area and replaced by its fill.

Tolerances, fixed before the first run: 1e-9 (relative) where the same stress is reached by another formula;
1e-4 where a load 1 km wide stands for one without end (its edges take some (z/B)^3 of the stress away); a
micrometre where all that was dug out is put back.
"""

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage

from probsoil.errors import ScenarioError
from probsoil.ground.response import ground_state, respond

LAYERS = [
    clay("crust", 1.5, preconsolidation="{ pop = 40 }", unit_weight=17.0),
    clay("soft", 5.0),
    sand("sand", 2.0),
]
PIT = '[[stages]]\nname = "pit"\nstart = 0.0\nend = 0.1\nexcavate = {}'
AREA = '[load]\nshape = "area"\nfill_unit_weight = 20\n'
EMBANKMENT = (
    '[load]\nshape = "embankment"\ncrest_width = {}\nside_slope = {}\nfill_unit_weight = 20\nfill_phi = 33\n'
)
STRIP = '[load]\nshape = "strip"\nwidth = {}\ndepth = {}\nfill_unit_weight = 20\n'
RECTANGLE = '[load]\nshape = "rectangle"\nwidth = 1000\nlength = 1000\ndepth = 1.0\nfill_unit_weight = 20\n'


def case(load, stages, *, water_table=0.6, layers=LAYERS, **keys):
    return scenario(layers, stages, load=load, base="drained", horizon=20.0, water_table=water_table, **keys)


def settled(one):
    return respond(site_model(one), central(one)).settlement[0]


def fill(*heights):
    return [
        stage(f"lift {place}", 0.4 * place, 0.4 * place + 0.2, height=one)
        for place, one in enumerate(heights, 1)
    ]


def test_over_a_wide_area_it_is_a_foundation_without_end():
    stages = [PIT.format(1.0), *fill(1.0, 0.8)]
    np.testing.assert_allclose(
        settled(case(AREA, stages)), settled(case(RECTANGLE, stages)), rtol=1e-4, atol=1e-7
    )


def test_a_very_wide_embankment_is_a_wide_area():
    stages = [PIT.format(1.0), *fill(1.3, 0.8)]
    wide = settled(case(EMBANKMENT.format(1000.0, 2.0), stages))
    np.testing.assert_allclose(wide, settled(case(AREA, stages)), rtol=1e-4, atol=1e-7)


@pytest.mark.parametrize("water_table", [0.2, 3.0])
def test_with_vertical_sides_it_is_a_strip_at_the_bottom_of_the_pit(water_table):
    stages = [PIT.format(0.8), *fill(0.5, 1.4)]
    # clay alone: in sand the stress of a foundation is averaged over a quarter of the layer, of fill not
    keys = {"water_table": water_table, "layers": LAYERS[:2]}
    bank = settled(case(EMBANKMENT.format(9.0, 0.0), stages, **keys))
    strip = settled(case(STRIP.format(9.0, 0.8), stages, **keys))
    np.testing.assert_allclose(bank, strip, rtol=1e-9, atol=1e-12)


@pytest.mark.parametrize("load", [AREA, EMBANKMENT.format(12.0, 2.0)])
def test_what_is_dug_out_and_no_more_put_back_leaves_no_settlement(load):
    # 1 m of crust at 17 kN/m3; the embankment needs some fill above ground and so is given next to none
    back = 17.0 / 20.0
    stages = [PIT.format(back), *fill(back * 0.5, back * 0.5 * (1.0 + 1e-6))]
    layers = [clay("crust", 1.5, preconsolidation="{ pop = 40 }", unit_weight=20.0), *LAYERS[1:]]
    found = settled(case(load, stages, layers=layers))
    assert found.min() < -1e-3  # it rises while the pit stands open
    assert abs(found[-1]) < 1e-6


def test_stress_below_the_pit_by_hand():
    stages = [PIT.format(1.0), *fill(1.0, 1.5)]
    one = case(EMBANKMENT.format(10.0, 2.0), stages, water_table=5.0)
    site = site_model(one)
    state = ground_state(site, central(one))
    points, load = state.ground.points, state.ground.load
    below = points.depth[0] > 1.0 + 0.5 * points.thickness[0]
    z = points.depth[0, below] - 1.0

    def strip(width):
        angle = np.arctan(0.5 * width / z)
        return 2.0 / np.pi * (angle + np.sin(angle) * np.cos(angle))

    base, top, height = 16.0, 10.0, 1.5
    a, b = base / 2, top / 2
    slope = 2.0 / np.pi * (a * np.arctan(a / z) - b * np.arctan(b / z)) / (a - b)
    expected = 20.0 * height * slope + (20.0 * 1.0 - 17.0 * 1.0) * strip(base)
    np.testing.assert_allclose(load.stress[-1, 0, below], expected, rtol=1e-9)
    inside = points.depth[0] < 1.0 - 0.5 * points.thickness[0]
    assert (load.stress[:, 0, inside] == np.maximum(0.0, 1.0 - points.stress[0, inside])).all()
    assert site.embankment is not None
    assert site.embankment.mean_width == pytest.approx((13.0 * 1.5 + 16.0 * 1.0) / 2.5)
    assert site.slip_times.size == 0


def test_soft_ground_replaced_settles_less():
    layers = [clay("peat", 1.5, lam=0.6, void_ratio=4.0, unit_weight=12.0), *LAYERS[1:]]
    over = settled(case(EMBANKMENT.format(10.0, 2.0), fill(1.0, 1.0), layers=layers))
    instead = settled(case(EMBANKMENT.format(10.0, 2.0), [PIT.format(1.4), *fill(1.4, 2.0)], layers=layers))
    assert 0.0 < instead[-1] < over[-1]


def test_its_fill_may_be_uncertain_and_its_level_held():
    load = EMBANKMENT.format(10.0, 2.0) + "hold_level_until = 2.0\n"
    uncertain = case(load, [PIT.format(1.0), *fill(1.2, '{ dist = "normal", mean = 1.0, sd = 0.1 }')])
    values = {**central(uncertain), "stages.lift 2.height": np.array([1.0, 1.2])}
    found = respond(site_model(uncertain), values)
    plain = case(load, [PIT.format(1.0), *fill(1.2, 1.2)])
    alone = respond(site_model(plain), central(plain))
    np.testing.assert_allclose(found.settlement[1], alone.settlement[0], rtol=1e-12, atol=1e-13)
    np.testing.assert_allclose(found.fill_added[1], alone.fill_added[0], rtol=1e-12, atol=1e-13)


SLIP = '[[limits]]\nname = "slip"\nquantity = "slip_safety"\nnot_less_than = 1.0'
BANK = EMBANKMENT.format(10.0, 2.0)


@pytest.mark.parametrize(
    ("load", "stages", "keys", "message"),
    [
        (BANK, [PIT.format(1.0), *fill(2.0)], {"limits": [SLIP]}, "a slip through ground that is dug out"),
        (
            BANK,
            [PIT.format(1.0), *fill(0.9)],
            {},
            "0.9 m of fill in 1 m of ground dug out do not rise above ground",
        ),
        (BANK + "berm_width = 2\nberm_height = 0.6\n", [PIT.format(1.0), *fill(1.5)], {}, "above the berms"),
        (
            BANK,
            [*fill(2.0), PIT.format(1.0).replace("0.0", "1.0").replace("0.1", "1.1")],
            {},
            "has loaded it",
        ),
        (AREA, [PIT.format(8.5), *fill(9.0)], {}, "the ground described ends at 8.5 m"),
        (AREA, [PIT.format(1.0)], {}, "nothing is placed in the excavation"),
        (AREA, [PIT.format(1.0) + "\nheight = 1", *fill(2.0)], {}, "given more than once"),
    ],
)
def test_what_cannot_be_is_refused_with_its_remedy(load, stages, keys, message):
    with pytest.raises(ScenarioError, match=message) as caught:
        case(load, stages, **keys)
    assert len(caught.value.faults) == 1
