"""Limits and sheets of a further load: it is assessed as the load would be, on the same realisations."""

import re

import numpy as np
import pytest

from probsoil.assessment import assess, sheet
from probsoil.assessment.evaluation import prepare
from probsoil.assessment.other_loads import positions_of
from probsoil.errors import ParameterError, ScenarioError
from probsoil.report import render_report
from probsoil.scenario import Scenario, parse_scenario, starter_text
from probsoil.scenario.other_load import other_load

N = 48

TANK = """
[[further_loads]]
name = "east tank"
shape = "circle"
diameter = {diameter}
contact = "{contact}"
x = 30
y = 4
fill_unit_weight = {weight}
"""

STAGES = """
[[stages]]
name = "{name} {number}"
{load}pressure = {pressure}
start = {start}
end = {end}
"""

LIMITS = """
[[limits]]
name = "settlement {name}"
quantity = "settlement"
{load}at = 10
not_more_than = 0.10

[[limits]]
name = "settling {name}"
quantity = "settlement"
{load}between = [1, 10]
not_more_than = 0.05

[[limits]]
name = "bearing {name}"
quantity = "bearing_safety"
{load}not_less_than = 2.0

[[limits]]
name = "degree {name}"
quantity = "degree_of_consolidation"
{load}at = 5
not_less_than = 0.5

[[limits]]
name = "time {name}"
quantity = "time_to_consolidation"
{load}not_more_than = 8
"""
EAST = 'load = "east tank"\n'
PRESSURES = ((30, 0, 0.2), (40, 0.5, 0.8), (-20, 2, 2.5))


def stages(name, load, factor=1.0):
    return "".join(
        STAGES.format(name=name, number=number, load=load, pressure=factor * pressure, start=start, end=end)
        for number, (pressure, start, end) in enumerate(PRESSURES)
    )


def in_order(*texts):
    """Put the stages of several loads in order of their start."""
    tables = [one for text in texts for one in re.split(r"(?=\[\[stages\]\])", text) if one.strip()]
    return "".join(sorted(tables, key=lambda one: float(re.search(r"start = (\S+)", one)[1])))


def two_tanks(diameter=12.0, factor=1.0, west_limits=True, extra=""):
    """Two tanks; the limits of the file look at both, or only at the further one."""
    text = starter_text("tank")
    head = text[: text.index("[load]")]
    head = re.sub(r"realisations = [\d_]+", f"realisations = {N}", head)
    load = '[load]\nshape = "circle"\ndiameter = 12.0\ncontact = "smooth"\nsubmergence = true\n'
    limits = (LIMITS.format(name="west", load="") if west_limits else "") + LIMITS.format(
        name="east", load=EAST
    )
    return (
        head
        + load
        + TANK.format(diameter=diameter, contact="smooth", weight=10)
        + extra
        + in_order(stages("west", ""), stages("east", EAST, factor))
        + limits
    )


def test_two_equal_tanks_are_equally_likely_to_exceed_their_limits():
    study = prepare(parse_scenario(two_tanks()))
    quantity = study(0)["quantity"]
    half = quantity.shape[1] // 2
    assert half == 5
    np.testing.assert_allclose(quantity[:, :half], quantity[:, half:], rtol=1e-9)
    assert np.isfinite(quantity[:, :4]).all()
    assert np.ptp(quantity[:, 0]) > 0.0


def test_a_further_load_answers_as_the_load_of_a_scenario_written_for_it():
    """The same two tanks, once with the smaller as a further load and once as the load."""
    scenario = parse_scenario(two_tanks(diameter=9.0, factor=0.8))
    mine = prepare(scenario)
    text = two_tanks(diameter=12.0)
    text = text.replace("diameter = 12.0\ncontact", "diameter = 9.0\ncontact", 1)
    text = text.replace("x = 30\ny = 4", "x = -30\ny = -4")
    for number, (pressure, _, _) in enumerate(PRESSURES):
        for name, factor in (("west", 0.8), ("east", 1.0)):
            old = re.search(rf'name = "{name} {number}"\n(load = .*\n)?pressure = (\S+)', text)
            text = text.replace(old[0], old[0].replace(old[2], str(factor * pressure)))
    theirs = prepare(parse_scenario(text))
    assert mine.space.names == theirs.space.names
    here, there = mine(0)["quantity"], theirs(0)["quantity"]
    np.testing.assert_allclose(here[:, 5:], there[:, :5], rtol=1e-12)
    np.testing.assert_allclose(here[:, :5], there[:, 5:], rtol=1e-12)
    assert np.abs(here[:, :5] / here[:, 5:] - 1.0)[:, 0].min() > 0.01


def test_seen_twice_from_the_other_load_is_the_scenario_itself():
    scenario = parse_scenario(two_tanks())
    once = other_load(scenario, "east tank")
    again = other_load(once.scenario, "[load]").scenario
    assert again.load == scenario.load
    assert (again.further_loads[0].x, again.further_loads[0].y) == (30.0, 4.0)
    assert once.address("further_loads.east tank.fill_unit_weight") == "load.fill_unit_weight"
    assert once.address("load.fill_unit_weight") == "further_loads.[load].fill_unit_weight"
    assert once.address("soft clay.lambda") == "soft clay.lambda"
    assert [stage.load for stage in again.stages] == [
        None if stage.load is None else "[load]]" for stage in scenario.stages
    ]


def test_limits_may_look_at_the_further_load_only_and_all_is_told():
    found = assess(parse_scenario(two_tanks(west_limits=False)), workers=1)
    rows = found.results["limits"]
    assert {row["load"] for row in rows} == {"east tank"}
    assert {row["place_text"] for row in rows} == {"of east tank"}
    assert found.results["discretisation"]["bearing_error_share"] is not None
    page = render_report(found.results).replace("&nbsp;", " ").replace("\u00a0", " ")
    assert "the settlement of east tank at 10 years" in page
    assert "factor of safety against bearing failure of east tank over the stages" in page
    assert "consolidation of east tank" in page


def test_sheet_of_a_further_load():
    scenario = parse_scenario(two_tanks(diameter=9.0))
    east = sheet(scenario, load="east tank")
    assert east.station == "centre of east tank"
    assert east.final_settlement != sheet(scenario).final_settlement
    assert sheet(parse_scenario(two_tanks()), load="east tank").final_settlement == pytest.approx(
        sheet(parse_scenario(two_tanks())).final_settlement, rel=1e-9
    )
    with pytest.raises(ParameterError, match='no further load "north": there are east tank'):
        sheet(scenario, load="north")
    with pytest.raises(ParameterError, match="not of both"):
        sheet(scenario, station="x", load="east tank")
    with pytest.raises(ParameterError, match='no further load "north": the scenario has none'):
        other_load(parse_scenario(starter_text("tank")), "north")


EMBANKMENT = """
[[further_loads]]
name = "ramp"
shape = "embankment"
crest_width = {crest}
side_slope = {slope}
x = 60
fill_unit_weight = {weight}
{more}
"""


def with_ramp(more="fill_phi = 34", crest=8.0, slope=2.0):
    text = starter_text("embankment")
    head = re.sub(r"realisations = [\d_]+", f"realisations = {N}", text[: text.index("[load]")])
    load = (
        '[load]\nshape = "embankment"\ncrest_width = 8.0\nside_slope = 2.0\nfill_unit_weight = 19.0\n'
        "fill_phi = 34\n"
    )
    both = [
        f'[[stages]]\nname = "{name}"\n{key}height = 2.0\nstart = 0\nend = 0.1\n'
        for name, key in (("road", ""), ("ramp", 'load = "ramp"\n'))
    ]
    limit = '[[limits]]\nname = "slip {0}"\nquantity = "slip_safety"\n{1}not_less_than = 1.2\n'
    limits = limit.format("road", "") + limit.format("ramp", 'load = "ramp"\n')
    further = EMBANKMENT.format(crest=crest, slope=slope, weight=19.0, more=more)
    return head + load + further + "".join(both) + limits


def test_slip_of_a_further_embankment_is_that_of_its_equal():
    study = prepare(parse_scenario(with_ramp()))
    quantity = study(0)["quantity"]
    np.testing.assert_allclose(quantity[:, 0], quantity[:, 1], rtol=1e-9)
    flat = prepare(parse_scenario(with_ramp(slope=4.0)))(0)["quantity"]
    assert (flat[:, 1] > flat[:, 0]).all()
    bermed = prepare(parse_scenario(with_ramp(more="fill_phi = 34\nberm_width = 6\nberm_height = 0.8")))
    assert (bermed(0)["quantity"][:, 1] > quantity[:, 0]).all()


@pytest.mark.parametrize(
    ("text", "key", "message"),
    [
        (with_ramp(more=""), "further_loads[1].fill_phi", "its slip; the friction of its fill is missing"),
        (
            with_ramp().replace('load = "ramp"\nnot_less', 'load = "rampe"\nnot_less'),
            "limits[2].load",
            "no further",
        ),
        (
            with_ramp().replace("[[further", "hold_level_until = 1\n[[further", 1),
            "limits[2].load",
            "a limit on a further load and hold_level_until are not computed together",
        ),
        (
            with_ramp(more="fill_phi = 34\nberm_width = 6"),
            "further_loads[1].berm_height",
            "berm_height is missing",
        ),
        (
            two_tanks().replace('quantity = "bearing_safety"\nload', 'quantity = "slip_safety"\nload'),
            "limits[8].quantity",
            "a foundation fails in bearing",
        ),
        (
            two_tanks().replace(EAST + "at = 10", EAST + 'station = "a"\nat = 10'),
            "limits[6].station",
            "at a further load or at a station, not at both",
        ),
    ],
)
def test_what_cannot_be_is_refused(text, key, message):
    with pytest.raises(ScenarioError, match=message) as caught:
        parse_scenario(text)
    assert any(fault.key.startswith(key) for fault in caught.value.faults)


def with_stations(at_load=False):
    """Variability in plan, two stations, and one of them at the centre of the further load if wished."""
    third = '[[stations]]\nname = "under east"\nx = 30\ny = 4\n' if at_load else ""
    places = '[[stations]]\nname = "centre"\nx = 0\n\n[[stations]]\nname = "edge"\nx = 6\n\n' + third
    text = two_tanks(extra=places)
    return text.replace("vertical_scale = 1.5", "vertical_scale = 1.5, horizontal_scale = 20")


def test_with_stations_the_further_load_stands_on_ground_of_its_own():
    scenario = parse_scenario(with_stations())
    assert positions_of(scenario) == [(0.0, 0.0), (6.0, 0.0), (30.0, 4.0)]
    study = prepare(scenario)
    quantity = study(0)["quantity"]
    assert np.abs(quantity[:, 5] / quantity[:, 0] - 1.0).max() > 0.01
    shared = prepare(parse_scenario(with_stations(at_load=True)))
    assert positions_of(shared.scenario) == [(0.0, 0.0), (6.0, 0.0), (30.0, 4.0)]
    limits = [limit for limit in shared.scenario.limits if limit.name == "settlement west"]
    under = limits[0].model_copy(update={"name": "station", "station": "under east"})
    both = prepare(shared.scenario.model_copy(update={"limits": (*shared.scenario.limits, under)}))
    found = both(0)["quantity"]
    np.testing.assert_allclose(found[:, -1], found[:, 5], rtol=1e-9)


def test_scenario_type_is_kept():
    assert isinstance(other_load(parse_scenario(two_tanks()), "east tank").scenario, Scenario)
