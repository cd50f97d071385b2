"""Settlement at stations: positions, thicknesses, and what limits watch there."""

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, site_model, stage

from probsoil.errors import ParameterError
from probsoil.ground.applied_load import applied_load
from probsoil.ground.limit_quantities import limit_quantities
from probsoil.ground.load_displacement import embankment_displacement
from probsoil.ground.load_stress import embankment_influence
from probsoil.ground.response import respond
from probsoil.ground.station_layout import StationLayout
from probsoil.ground.station_quantities import station_part, station_quantity
from probsoil.ground.stations import (
    StationSettlement,
    at_section,
    section_scenario,
    section_values,
    settle_stations,
    station_sites,
    station_times,
)
from probsoil.scenario.limits import (
    AngularDistortionLimit,
    DifferentialSettlementLimit,
    SettlementLimit,
)

EMBANKMENT = (
    '[load]\nshape = "embankment"\ncrest_width = 10\nside_slope = 2\nfill_unit_weight = 19\n'
    "fill_phi = 33\nsubmergence = true"
)
SHAPES = {
    "strip": '[load]\nshape = "strip"\nwidth = 6',
    "rectangle": '[load]\nshape = "rectangle"\nwidth = 9\nlength = 5',
    "circle": '[load]\nshape = "circle"\ndiameter = 12',
}
FILL = [stage("fill", 0.0, 0.5, height=2.0)]
PRESS = [stage("full", 0.0, 0.5, pressure=40.0)]
GROUND = [clay("soft", 5.0, C_alpha_ratio=0.04), sand("sand", 2.0)]
AT = '[[limits]]\nname = "s"\nquantity = "settlement"\nat = 20\nnot_more_than = 1'


def station(name: str, x: float = 0.0, y: float = 0.0, thickness: str = "") -> str:
    more = f"\nthickness = {thickness}" if thickness else ""
    return f'[[stations]]\nname = "{name}"\nx = {x}\ny = {y}{more}'


def case(*stations: str, load: str = EMBANKMENT, stages=FILL, layers=GROUND):
    return scenario(layers, stages, load=load, limits=[AT, *stations])


def settled(found) -> StationSettlement:
    values = central(found)
    section = respond(site_model(section_scenario(found)), section_values(found, values))
    return settle_stations(station_sites(found), lambda _: values, section, station_times(found))


def test_a_station_on_the_centreline_is_the_scenario_without_stations() -> None:
    plain = case()
    alone = respond(site_model(plain), central(plain))
    found = settled(case(station("here", y=30.0)))
    assert np.array_equal(found.reference, alone.settlement)
    assert found.settlement[0, 0].tolist() == [
        alone.settlement[0, np.searchsorted(alone.times, time)] for time in (0.5, 20.0, 30.0)
    ]


def test_stations_computed_by_themselves_agree_with_the_section() -> None:
    """The second station, computed apart from slip, has the bits of the first on the same centreline."""
    found = settled(case(station("here"), station("there", y=25.0)))
    assert np.array_equal(found.settlement[:, 0], found.settlement[:, 1])
    assert np.array_equal(found.secondary[:, 0], found.secondary[:, 1])
    assert (found.secondary[:, :, -1] > 0.0).all()


def test_stages_creep_and_a_level_that_is_held_are_the_same_at_a_station() -> None:
    stages = [*FILL, stage("more", 2.0, 2.5, height=1.0), stage("off", 6.0, 6.2, height=-0.5)]
    load = f"{EMBANKMENT}\nhold_level_until = 9"
    found = settled(case(station("here"), station("there", y=25.0), load=load, stages=stages))
    assert np.array_equal(found.settlement[:, 0], found.settlement[:, 1])
    plain = settled(case(station("here"), station("there", y=25.0), stages=stages))
    assert np.array_equal(plain.secondary[:, 0], plain.secondary[:, 1])
    assert (found.settlement[:, :, -1] > plain.settlement[:, :, -1]).all()


def test_a_further_load_is_felt_from_its_own_place() -> None:
    """A second tank 15 m to one side: the side towards it settles more, and 9 m off as 9 m off."""
    neighbour = (
        '[[further_loads]]\nname = "tank B"\nshape = "circle"\ndiameter = 12\nx = 15\n'
        '[[stages]]\nname = "B"\nload = "tank B"\nstart = 0\nend = 0.5\npressure = 40'
    )
    points = [station(name, x, y) for name, x, y in (("near", 6, 0), ("far", -6, 0), ("side", 0, 6))]
    found = settled(case(*points, neighbour, load=SHAPES["circle"], stages=PRESS))
    near, far, side = found.settlement[0, :, -1]
    assert near > side > far
    alone = settled(case(*points, load=SHAPES["circle"], stages=PRESS)).settlement[0, :, -1]
    assert np.ptp(alone) == 0.0
    assert far > alone[1]


def test_both_sides_of_an_embankment_settle_alike_and_less_than_its_middle() -> None:
    """Without creep, which the model lets go on in normally consolidated clay also where no load arrives."""
    ground = [clay("soft", 5.0), sand("sand", 2.0)]
    stations = [station(f"{x}", x=x) for x in (0.0, 4.0, -4.0, 9.0, -9.0, 300.0)]
    found = settled(case(*stations, layers=ground))
    last = found.settlement[0, :, -1]
    assert last[1] == pytest.approx(last[2], rel=1e-12)
    assert last[3] == pytest.approx(last[4], rel=1e-12)
    assert last[0] > last[1] > last[3] > last[5] >= 0.0
    assert last[5] < 1e-4 * last[0]


def test_stress_at_a_station_is_that_of_the_trapezium_there() -> None:
    one = station_sites(case(station("slope", x=6.0)))[0]
    depth = np.array([[0.5, 3.0, 6.0]])
    load = applied_load(one.site, central(case()), depth)
    expected = 19.0 * 2.0 * embankment_influence(depth, 6.0, base_width=18.0, top_width=10.0)
    np.testing.assert_allclose(load.stress[-1], expected, rtol=1e-12)


@pytest.mark.parametrize("shape", SHAPES)
def test_a_station_of_a_foundation_is_its_reported_point(shape: str) -> None:
    x, y = (2.0, 1.5) if shape == "rectangle" else (2.0, 0.0)
    at = f"\nat = {[x, y] if shape == 'rectangle' else x}"
    given = case(load=SHAPES[shape] + at, stages=PRESS)
    alone = respond(site_model(given), central(given))
    found = settled(case(station("a", x=x, y=y), load=SHAPES[shape], stages=PRESS))
    assert np.array_equal(found.reference, alone.settlement)


def test_a_circle_looks_the_same_from_every_side() -> None:
    points = [(3.0, 4.0), (5.0, 0.0), (0.0, -5.0)]
    load = SHAPES["circle"]
    found = settled(case(*(station(f"{x} {y}", x, y) for x, y in points), load=load, stages=PRESS))
    assert np.ptp(found.settlement[0, :, -1]) == 0.0


def test_a_wide_area_settles_alike_everywhere() -> None:
    load = '[load]\nshape = "area"'
    found = settled(case(station("a"), station("b", 40.0, 7.0), load=load, stages=PRESS))
    assert np.array_equal(found.settlement[:, 0], found.settlement[:, 1])


def test_a_thickness_at_a_station_is_that_of_a_scenario_with_it() -> None:
    """2.5 of 5 m is half of it, exactly; so the bits are the same."""
    thin = case(layers=[clay("soft", 2.5, C_alpha_ratio=0.04), GROUND[1]])
    alone = respond(site_model(thin), central(thin))
    found = settled(case(station("deep"), station("thin", y=10.0, thickness="{ soft = 2.5 }")))
    assert found.settlement[0, 1, -1] == alone.settlement[0, -1]
    assert found.settlement[0, 1, -1] < found.settlement[0, 0, -1]


def test_the_section_has_the_ground_of_the_first_station() -> None:
    found = case(station("thin", y=10.0, thickness="{ soft = 2.5 }"), station("deep"))
    assert site_model(section_scenario(found)).layers[0].mean_thickness == 2.5
    assert section_values(found, central(found))["soft.thickness"] == 2.5
    assert section_values(case(), central(case()))["soft.thickness"] == 5.0


def test_undrained_distortion_at_a_station_is_that_of_the_trapezium_there() -> None:
    """Displacement of the half-space at the offset: top less bottom of 5 m of clay over its modulus."""
    stiff = case(
        station("slope", x=6.0),
        layers=[clay("soft", 5.0, undrained_modulus="{ Eu = 3000 }"), sand("sand", 2.0)],
    )
    found = settled(stiff)
    widths = {"base_width": 18.0, "top_width": 10.0}
    top, bottom = (float(embankment_displacement(depth, 6.0, **widths)) for depth in (0.0, 5.0))
    expected = 19.0 * 2.0 * (top - bottom) / 3000.0
    assert found.distortion[0, 0, -1] == pytest.approx(expected, rel=1e-9)


def test_where_the_section_is() -> None:
    beside = case(station("a", x=1.0), station("b", y=9.0))
    assert [at_section(beside, one) for one in beside.all_stations] == [False, True]
    round_ = case(station("a", y=1.0), station("b"), load=SHAPES["circle"], stages=PRESS)
    assert [at_section(round_, one) for one in round_.all_stations] == [False, True]
    strip = case(station("a", y=1.0), load=SHAPES["strip"], stages=PRESS)
    assert at_section(strip, strip.stations[0])


LINE = StationLayout(names=("a", "b", "c"), positions=((0.0, 0.0), (0.0, 30.0), (0.0, 10.0)))
LIMIT = {"name": "l", "not_more_than": 0.1}


def answers(layout: StationLayout, *rows: list[float]) -> StationSettlement:
    """Settlement at two times, one row of stations each, for one realisation."""
    kept = np.array(rows).T[None]
    return StationSettlement(
        layout=layout,
        times=np.array([1.0, 10.0]),
        settlement=kept,
        secondary=0.1 * kept,
        distortion=0.2 * kept,
        converged=np.ones(1, dtype=bool),
        voids_closed=np.zeros(1, dtype=bool),
        uplifted=np.zeros(1, dtype=bool),
        reference=kept[:, 0],
    )


def test_pairs_along_a_line_and_of_all() -> None:
    assert LINE.order == [0, 2, 1]
    assert LINE.pairs("neighbours") == LINE.shown_pairs == ((0, 2), (2, 1))
    assert LINE.pairs("any") == ((0, 1), (0, 2), (1, 2))
    assert LINE.pairs(("b", "a")) == ((1, 0),)
    bent = StationLayout(names=("a", "b", "c"), positions=((0.0, 0.0), (0.0, 30.0), (9.0, 10.0)))
    assert bent.order is None
    assert bent.shown_pairs == ((0, 1), (0, 2))
    assert bent.distance(0, 2) == pytest.approx(np.hypot(9.0, 10.0))


@pytest.mark.parametrize(
    ("limit", "expected"),
    [
        (SettlementLimit(quantity="settlement", at=10.0, **LIMIT), 0.30),
        (SettlementLimit(quantity="settlement", at=10.0, station="b", **LIMIT), 0.15),
        (SettlementLimit(quantity="settlement", at=10.0, station="any", **LIMIT), 0.33),
        (SettlementLimit(quantity="settlement", between=(1.0, 10.0), station="any", **LIMIT), 0.25),
        (DifferentialSettlementLimit(quantity="differential_settlement", at=10.0, **LIMIT), 0.18),
        (
            DifferentialSettlementLimit(
                quantity="differential_settlement", at=10.0, stations=("a", "b"), **LIMIT
            ),
            0.15,
        ),
        (
            DifferentialSettlementLimit(
                quantity="differential_settlement", between=(1.0, 10.0), stations="neighbours", **LIMIT
            ),
            0.11,
        ),
        (AngularDistortionLimit(quantity="angular_distortion", at=10.0, **LIMIT), 0.009),
        (AngularDistortionLimit(quantity="angular_distortion", at=10.0, stations=("a", "c"), **LIMIT), 0.003),
        (
            AngularDistortionLimit(
                quantity="angular_distortion", at=10.0, stations=("a", "b"), tilt="removed", **LIMIT
            ),
            0.0,
        ),
        (AngularDistortionLimit(quantity="angular_distortion", at=10.0, tilt="removed", **LIMIT), 0.008),
        (
            AngularDistortionLimit(
                quantity="angular_distortion", at=10.0, stations=("c", "a"), tilt="removed", **LIMIT
            ),
            0.008,
        ),
    ],
)
def test_what_limits_watch(limit, expected: float) -> None:
    """a, b, c settle by 0.05, 0.03 and 0.10 m at first and by 0.30, 0.15 and 0.33 m in the end.

    c lies 10 m from a and 20 m from b. From a to b 0.15 m are lost over 30 m, a tilt of -0.005; from a to c
    0.003 is gained, 0.008 more than the tilt, and from c to b 0.009 lost, 0.004 more than the tilt.
    """
    found = answers(LINE, [0.05, 0.03, 0.10], [0.30, 0.15, 0.33])
    assert station_quantity(limit, found)[0] == pytest.approx(expected, abs=1e-12)


def test_on_a_line_no_two_stations_are_steeper_than_neighbours() -> None:
    found = answers(LINE, [0.0, 0.0, 0.0], [0.3, 0.1, 0.27])
    worst = [
        station_quantity(
            AngularDistortionLimit(quantity="angular_distortion", at=10.0, stations=which, **LIMIT), found
        )[0]
        for which in ("any", "neighbours")
    ]
    assert worst[0] == worst[1]


def test_a_rigid_tilt_distorts_nothing_once_it_is_taken_off() -> None:
    found = answers(LINE, [0.0, 0.0, 0.0], [0.10, 0.40, 0.20])
    off = AngularDistortionLimit(quantity="angular_distortion", at=10.0, tilt="removed", **LIMIT)
    assert station_quantity(off, found)[0] == pytest.approx(0.0, abs=1e-15)


def test_parts_of_what_settles_at_stations() -> None:
    found = answers(LINE, [0.05, 0.03, 0.10], [0.30, 0.15, 0.33])
    most = SettlementLimit(quantity="settlement", at=10.0, station="any", **LIMIT)
    assert station_part(most, found, "secondary")[0] == pytest.approx(0.033)
    assert station_part(most, found, "distortion")[0] == pytest.approx(0.066)
    first = SettlementLimit(quantity="settlement", at=10.0, **LIMIT)
    assert station_part(first, found, "secondary")[0] == pytest.approx(0.030)


def test_without_convergence_there_is_no_number() -> None:
    found = answers(LINE, [0.05, 0.03, 0.10], [0.30, np.nan, 0.33])
    kinds = (
        SettlementLimit(quantity="settlement", at=10.0, station="any", **LIMIT),
        DifferentialSettlementLimit(quantity="differential_settlement", at=10.0, **LIMIT),
        AngularDistortionLimit(quantity="angular_distortion", at=10.0, **LIMIT),
    )
    assert all(np.isnan(station_quantity(kind, found)[0]) for kind in kinds)
    apart = AngularDistortionLimit(quantity="angular_distortion", at=10.0, stations=("a", "c"), **LIMIT)
    assert station_quantity(apart, found)[0] == pytest.approx(0.003)


def test_one_error_of_the_model_for_all_stations() -> None:
    found = case(station("a"), station("b", y=5.0, thickness="{ soft = 2.5 }"))
    values = central(found) | {"model_error.settlement": 2.0}
    section = respond(site_model(section_scenario(found)), values)
    both = settle_stations(station_sites(found), lambda _: values, section, station_times(found))
    limits = [
        SettlementLimit(quantity="settlement", at=20.0, station="b", **LIMIT),
        DifferentialSettlementLimit(quantity="differential_settlement", at=20.0, **LIMIT),
    ]
    watched = limit_quantities(site_model(found), limits, section, values, both)[0]
    first, second = both.settled(20.0)[0]
    assert watched == pytest.approx([2.0 * second, 2.0 * (first - second)])


def test_differences_need_stations() -> None:
    plain = case()
    response = respond(site_model(plain), central(plain))
    limit = DifferentialSettlementLimit(quantity="differential_settlement", at=20.0, **LIMIT)
    with pytest.raises(ParameterError, match="differential_settlement needs stations; none are given"):
        limit_quantities(site_model(plain), [limit], response, central(plain))
