"""The undrained modulus of a clay in a scenario: what is read and what is refused."""

import pytest

from probsoil.errors import ScenarioError
from probsoil.scenario import parse_scenario

SOFT = 'name = "soft clay"\nsoil = "clay"\n'


def with_modulus(text, table):
    assert SOFT in text
    return text.replace(SOFT, f"{SOFT}undrained_modulus = {table}\n", 1)


def test_both_forms_are_read_and_may_be_uncertain(base_text):
    given = parse_scenario(with_modulus(base_text, '{ Eu = "6 MPa" }'))
    ratio = parse_scenario(
        with_modulus(base_text, '{ ratio = { dist = "lognormal", mean = 300, cov = 0.3 } }')
    )
    found = {one.address: one for one in (*given.quantities(), *ratio.quantities())}
    assert found["soft clay.Eu"].distribution.expectation == 6000.0
    assert found["soft clay.Eu_su"].distribution.expectation == pytest.approx(300.0)
    assert found["soft clay.Eu_su"].is_uncertain


@pytest.mark.parametrize(
    ("table", "key", "message"),
    [
        ("{ }", "layers[2].undrained_modulus", "the undrained modulus is missing"),
        ("{ Eu = 5000, ratio = 300 }", "layers[2].undrained_modulus.ratio", "given more than once"),
        ("{ Eu = 5 }", "layers[2].undrained_modulus.Eu", "too small"),
        ("{ ratio = 1e5 }", "layers[2].undrained_modulus.ratio", "too large"),
    ],
)
def test_what_cannot_be_is_refused(base_text, table, key, message):
    with pytest.raises(ScenarioError, match=message) as caught:
        parse_scenario(with_modulus(base_text, table))
    assert [fault.key.partition(" (")[0] for fault in caught.value.faults] == [key]


def test_a_wide_load_distorts_nothing(base_text):
    text = with_modulus(base_text, "{ ratio = 300 }").replace(
        'shape = "embankment"\ncrest_width = 12.0\nside_slope = 2.0\n', 'shape = "area"\n'
    )
    text = text.replace("fill_phi = 34\n", "").replace(
        '[[limits]]\nname = "slip"\nquantity = "slip_safety"\nnot_less_than = 1.0\n', ""
    )
    with pytest.raises(ScenarioError, match="cannot distort without losing water") as caught:
        parse_scenario(text)
    assert len(caught.value.faults) == 1
