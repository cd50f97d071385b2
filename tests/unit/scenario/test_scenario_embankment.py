"""Berms and traffic in a scenario: what is read and what is refused."""

import pytest

from probsoil.errors import ScenarioError
from probsoil.scenario import parse_scenario
from probsoil.scenario.distributions import Constant


def with_load(base_text, more):
    assert 'shape = "embankment"\n' in base_text
    return base_text.replace('shape = "embankment"\n', f'shape = "embankment"\n{more}\n')


def test_berms_and_traffic_are_read(base_text):
    more = 'berm_width = "6 m"\nberm_height = 0.5\ntraffic = { dist = "normal", mean = 10, cov = 0.2 }\n'
    load = parse_scenario(with_load(base_text, more + 'traffic_from = "1 year"')).load
    assert (load.berm_width, load.berm_height, load.traffic_from) == (6.0, 0.5, 1.0)
    assert load.traffic.expectation == 10.0


def test_nothing_of_it_by_default(base_text):
    load = parse_scenario(base_text).load
    assert (load.berm_width, load.berm_height, load.traffic_from) == (None, None, None)
    assert load.traffic == Constant(value=0.0)


@pytest.mark.parametrize(
    ("more", "key", "message"),
    [
        ("berm_width = 6", "load.berm_height", "berm_height is missing"),
        ("berm_height = 0.5", "load.berm_width", "berm_width is missing"),
        ("berm_width = 6\nberm_height = 50", "load.berm_height", "berms are 50 m high, the fill beside them"),
        ("berm_width = 0\nberm_height = 0.5", "load.berm_width", "too small"),
        ("traffic_from = 1", "load.traffic_from", "no traffic that could begin"),
        ("traffic = 10\ntraffic_from = 400", "load.traffic_from", "beyond the horizon"),
        ("traffic = -1", "load.traffic", "too small"),
    ],
)
def test_what_cannot_be_is_refused(base_text, more, key, message):
    with pytest.raises(ScenarioError, match=message) as caught:
        parse_scenario(with_load(base_text, more))
    assert [fault.key for fault in caught.value.faults] == [key]


def test_berms_are_of_an_embankment(base_text):
    with pytest.raises(ScenarioError, match='"berm_width" does not go with shape = "area"'):
        parse_scenario(base_text.replace('shape = "embankment"', 'shape = "area"\nberm_width = 3'))


def test_level_is_held_until_a_time(base_text):
    load = parse_scenario(with_load(base_text, 'hold_level_until = "1 year"')).load
    assert load.hold_level_until == 1.0
    assert parse_scenario(base_text).load.hold_level_until is None


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("hold_level_until = 0", "too small"),
        ("hold_level_until = 400", "400 years is beyond the horizon"),
    ],
)
def test_level_that_cannot_be_held_is_refused(base_text, text, message):
    with pytest.raises(ScenarioError, match=message) as caught:
        parse_scenario(with_load(base_text, text))
    assert [fault.key for fault in caught.value.faults] == ["load.hold_level_until"]


def test_level_cannot_be_held_before_the_first_stage(base_text):
    late = with_load(base_text, 'hold_level_until = "1 week"')
    first = late.index("start = ")
    late = late[:first] + 'start = "2 weeks"' + late[late.index("\n", first) :]
    with pytest.raises(ScenarioError, match="so there is no level to hold"):
        parse_scenario(late)


def test_level_is_of_fill(base_text):
    head = base_text.partition("[load]")[0]
    load = '[load]\nshape = "area"\nhold_level_until = 1\n'
    stages = '[[stages]]\nname = "vacuum"\npressure = 60\nstart = 0\nend = 0.5\n'
    settlement = '[[limits]]\nname = "end"\nquantity = "settlement"\nat = 1\nnot_more_than = 1\n'
    with pytest.raises(ScenarioError, match="no stage lays fill whose level could be held"):
        parse_scenario(head + load + stages + settlement)
