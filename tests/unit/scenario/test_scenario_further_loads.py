"""Further loads in a scenario: what is read, and what is refused with its place and remedy."""

import tomllib

import jsonschema
import pytest

from probsoil.errors import ScenarioError
from probsoil.scenario import parse_scenario, scenario_schema

TANK = '[[further_loads]]\nname = "tank B"\nshape = "circle"\ndiameter = 12\nx = 20\n'
STAGE = '[[stages]]\nname = "tank B filled"\nload = "tank B"\npressure = 60\nstart = 0\nend = 1\n'


def with_tank(base_text, tank=TANK, stages=STAGE):
    """Put the further load before the stages, and its stage first among them."""
    return base_text.replace("[[stages]]\n", tank + "\n" + stages + "\n[[stages]]\n", 1)


def test_a_further_load_is_read_with_its_stages(base_text):
    text = with_tank(base_text)
    scenario = parse_scenario(text)
    (tank,) = scenario.further_loads
    assert (tank.name, tank.shape, tank.diameter.expectation, tank.x, tank.y, tank.depth.expectation) == (
        "tank B",
        "circle",
        12,
        20,
        0,
        0,
    )
    assert [stage.load for stage in scenario.stages][:2] == ["tank B", None]
    jsonschema.validate(tomllib.loads(text), scenario_schema())
    assert parse_scenario(base_text).further_loads == ()


def test_its_fill_has_an_address_that_may_be_uncertain_and_correlated(base_text):
    fill = 'fill_unit_weight = { dist = "normal", mean = 10, cov = 0.02 }\n'
    pair = (
        '[[dependence]]\nbetween = ["further_loads.tank B.fill_unit_weight", "load.fill_unit_weight"]\n'
        "rank_correlation = 0.3\n"
    )
    text = with_tank(base_text, TANK + fill, STAGE.replace("pressure = 60", "height = 6")) + pair
    scenario = parse_scenario(text)
    quantities = {quantity.address: quantity for quantity in scenario.quantities()}
    assert quantities["further_loads.tank B.fill_unit_weight"].is_uncertain
    with pytest.raises(ScenarioError, match="no uncertain number has the address") as caught:
        parse_scenario(text.replace('"further_loads.tank B.fill', '"further_loads.tank C.fill'))
    (fault,) = caught.value.faults
    assert fault.hint == 'did you mean "further_loads.tank B.fill_unit_weight"?'


@pytest.mark.parametrize(
    ("old", "new", "key", "message"),
    [
        ('load = "tank B"', 'load = "tank C"', "stages[1].load", "no further load of that name"),
        ('name = "tank B"\n', 'name = "tank A"\n', "stages[1].load", "no further load of that name"),
        ("pressure = 60", "height = 6", "stages[1].height", "needs the unit weight of the fill"),
        (
            "pressure = 60",
            "pressure = -60",
            "stages[1].pressure",
            "60 kPa is removed but only 0 kPa is there",
        ),
        ('shape = "circle"', 'shape = "circel"', "further_loads[1].shape", "unknown shape"),
        ("diameter = 12", "diameter = 0", "further_loads[1].diameter", "too small"),
        (
            "diameter = 12",
            "width = 12",
            "further_loads[1].width",
            '"width" does not go with shape = "circle"',
        ),
        ("x = 20\n", "", "further_loads[1].x", '"x" is missing'),
        ("x = 20\n", "x = 9999\n", "further_loads[1].x", "too large"),
        ("end = 1\n", "end = 100\n", "stages[1].end", "beyond the horizon"),
    ],
)
def test_what_cannot_be_is_refused(base_text, old, new, key, message):
    text = with_tank(base_text)
    assert old in text
    with pytest.raises(ScenarioError, match=message) as caught:
        parse_scenario(text.replace(old, new, 1))
    assert key in [fault.key.partition(" (")[0] for fault in caught.value.faults]


def test_a_stage_cannot_name_a_load_where_there_are_none(base_text):
    text = base_text.replace("[[stages]]\n", STAGE + "\n[[stages]]\n", 1)
    with pytest.raises(ScenarioError, match="the scenario has no further loads"):
        parse_scenario(text)


def test_every_load_needs_a_stage(base_text):
    with pytest.raises(ScenarioError, match='no stage belongs to the load "tank B"'):
        parse_scenario(with_tank(base_text, stages=""))
    head, stages = base_text.partition("[[stages]]\n")[0], base_text[base_text.index("[[limits]]") :]
    with pytest.raises(ScenarioError, match=r"no stage belongs to \[load\]: every one names a further load"):
        parse_scenario(head + TANK + STAGE + stages)


def test_names_of_further_loads_differ(base_text):
    with pytest.raises(ScenarioError, match='further load 1 is already named "tank B"'):
        parse_scenario(with_tank(base_text, TANK + TANK))


def test_an_embankment_is_raised_by_fill_also_beside(base_text):
    bank = (
        '[[further_loads]]\nname = "tank B"\nshape = "embankment"\ncrest_width = 4\nside_slope = 2\nx = 30\n'
    )
    with pytest.raises(ScenarioError, match="not by a pressure"):
        parse_scenario(with_tank(base_text, bank))
    with pytest.raises(ScenarioError, match="needs the unit weight of the fill") as caught:
        parse_scenario(with_tank(base_text, bank, STAGE.replace("pressure = 60", "height = 2")))
    assert 'fill_unit_weight in the load "tank B"' in str(caught.value)


def test_stages_of_different_loads_may_overlap_in_the_order_of_their_starts(base_text):
    later = STAGE.replace("start = 0", "start = 0.01")
    with pytest.raises(ScenarioError, match="the stage starts at 0 years, before stage 1") as caught:
        parse_scenario(with_tank(base_text, stages=later))
    assert "in the order in which they start" in str(caught.value)
    two = STAGE + STAGE.replace("filled", "again").replace("start = 0", "start = 0.5").replace(
        "end = 1", "end = 2"
    )
    with pytest.raises(ScenarioError, match=r"0\.5 years, before stage 1 .* ends at 1 year"):
        parse_scenario(with_tank(base_text, stages=two))
