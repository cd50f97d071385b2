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
