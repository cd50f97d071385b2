"""Levels of water and excess pore pressure in a scenario: what is read, what is refused, what is remarked."""

import pytest

from probsoil.errors import ScenarioError
from probsoil.scenario import parse_scenario, remarks
from probsoil.scenario.groundwater import (
    controlled_boundaries,
    excess_runs,
    piezometric_levels,
)
from probsoil.scenario.mean_column import mean_column, mean_stress

SAND, SOFT = 'name = "sand"\nsoil = "granular"\n', 'name = "soft clay"\nsoil = "clay"\n'


def with_site(text, more):
    return text.replace('base = "drained"\n', f'base = "drained"\n{more}\n', 1)


def with_layer(text, layer, more):
    assert layer in text
    return text.replace(layer, f"{layer}{more}\n", 1)


def addresses(scenario):
    return {one.address: one.distribution.expectation for one in scenario.quantities()}


def test_levels_and_excess_have_addresses_and_may_be_uncertain(base_text):
    text = with_layer(base_text, SAND, 'head = { dist = "normal", mean = -1.0, sd = 0.3 }')
    text = with_layer(text, SOFT, 'initial_excess = { pressure = { dist = "uniform", low = 5, high = 15 } }')
    found = parse_scenario(text)
    assert addresses(found)["sand.head"] == -1.0
    assert addresses(found)["soft clay.initial_excess"] == 10.0
    assert found.layers[1].initial_excess.shape == "sine"
    base = parse_scenario(with_site(base_text, 'base_head = "-60 cm"'))
    assert addresses(base)["site.base_head"] == pytest.approx(-0.6)
    degree = parse_scenario(with_layer(base_text, SOFT, "initial_excess = { degree = 0.7, load = 20 }"))
    assert addresses(degree)["soft clay.initial_degree"] == 0.7
    assert addresses(degree)["soft clay.initial_load"] == 20.0


def test_nothing_of_it_by_default(base_text):
    names = addresses(parse_scenario(base_text))
    assert not [name for name in names if "head" in name or "initial" in name]


EXCESS = "layers[2].initial_excess"


@pytest.mark.parametrize(
    ("more", "key", "message"),
    [
        ("{ shape = 'sine' }", EXCESS, "says no pressure"),
        ("{ pressure = 5, degree = 0.5 }", f"{EXCESS}.pressure", "does not go with degree or load"),
        ("{ degree = 0.5 }", f"{EXCESS}.load", "load is missing"),
        ("{ load = 5 }", f"{EXCESS}.degree", "degree is missing"),
        ("{ degree = 0.5, load = 5, shape = 'sine' }", f"{EXCESS}.shape", "shape does not go with degree"),
        ("{ pressure = 5, shape = 'square' }", f"{EXCESS}.shape", "uniform"),
        ("{ pressure = -5 }", f"{EXCESS}.pressure", "too small"),
        ("{ degree = 1.5, load = 5 }", f"{EXCESS}.degree", "too large"),
        ("{ pressure = 60 }", f"{EXCESS}.pressure", "leave no effective stress"),
        ("{ degree = 0.0, load = 90 }", f"{EXCESS}.load", "leave no effective stress"),
    ],
)
def test_excess_that_cannot_be_is_refused(base_text, more, key, message):
    with pytest.raises(ScenarioError, match=message) as caught:
        parse_scenario(with_layer(base_text, SOFT, f"initial_excess = {more}"))
    assert [fault.key.partition(" (")[0] for fault in caught.value.faults] == [key]


def test_an_undrained_base_has_no_level(base_text):
    text = with_site(base_text, "base_head = 0").replace('base = "drained"', 'base = "undrained"')
    with pytest.raises(ScenarioError, match="acts on nothing"):
        parse_scenario(text)


def test_the_last_layer_says_it_once(base_text):
    text = with_layer(with_site(base_text, "base_head = 0"), SAND, "head = 0")
    with pytest.raises(ScenarioError, match="level at its bottom as well"):
        parse_scenario(text)


def test_pressure_that_lifts_the_ground_is_refused(base_text):
    """At the top of the sand: 1.5 m at 17.5 and 7 m at 15.8, 136.9 kPa, against 9.81 times (8.5 + 6)."""
    with pytest.raises(ScenarioError, match="the ground would be lifted") as caught:
        parse_scenario(with_layer(base_text, SAND, "head = -6"))
    assert "142.2 kPa" in str(caught.value)
    assert "136.8 kPa" in str(caught.value) or "136.9 kPa" in str(caught.value)
    with pytest.raises(ScenarioError, match="the ground would be lifted"):
        parse_scenario(with_site(base_text, "base_head = -12"))
    assert parse_scenario(with_layer(base_text, SAND, "head = -5"))


def second_sand(text, head):
    layer = (
        f'[[layers]]\nname = "gravel"\nsoil = "granular"\nthickness = 2\nunit_weight = 19\n'
        f"constrained_modulus = 4e4\nphi = 35\n{head}\n"
    )
    return text.replace("[load]", f"{layer}\n[load]", 1)


def test_levels_that_nothing_keeps_apart_are_refused(base_text):
    text = second_sand(with_layer(base_text, SAND, "head = 0"), "head = -1")
    with pytest.raises(ScenarioError, match="nothing keeps them apart") as caught:
        parse_scenario(text)
    assert len(caught.value.faults) == 1
    assert parse_scenario(second_sand(with_layer(base_text, SAND, "head = 0"), "head = 0"))
    low = base_text.replace("water_table = 1.0", "water_table = 9")
    with pytest.raises(ScenarioError, match="nothing keeps them apart"):
        parse_scenario(with_site(low, "base_head = 3"))
    unsaid = second_sand(with_layer(base_text, SAND, "head = 0"), "")
    with pytest.raises(ScenarioError, match="nothing keeps them apart"):
        parse_scenario(unsaid)  # the base is drained at the level of the water table, by default


def test_what_is_worth_a_second_look_is_said(base_text):
    drained = with_site(base_text, "base_head = 0") + (
        '[drains]\npattern = "square"\nspacing = 1.5\nequivalent_diameter = 0.06\nsmear_ratio = 2\n'
        "smear_kh_ks = 2\nbottom = 8\n"
    )
    assert any("vertical drains change the seepage" in text for text in remarks(parse_scenario(drained)))
    still = with_layer(base_text, SOFT, "initial_excess = { pressure = 5 }")
    assert any("soft clay still holds excess" in text for text in remarks(parse_scenario(still)))
    assert not any("still holds" in text for text in remarks(parse_scenario(base_text)))


def test_what_the_ground_carries_now_is_less_by_the_excess(base_text):
    text = base_text.replace('pop = { dist = "lognormal", mean = 18, cov = 0.30 }', "stress = 30")
    heavy = [one for one in remarks(parse_scenario(text)) if "preconsolidation stress of soft clay" in one]
    assert len(heavy) == 1
    relieved = parse_scenario(with_layer(text, SOFT, "initial_excess = { pressure = 14 }"))
    assert [one for one in remarks(relieved) if "preconsolidation stress of soft clay" in one] == []


def test_levels_share_the_loss_by_resistance():
    assert piezometric_levels(1.0, [0.0, 2.0, 6.0], {3: -3.0}) == [1.0, 1.0, 0.0, -3.0]
    assert piezometric_levels(1.0, [2.0, 0.0, 5.0], {1: 0.0, 2: 0.0}) == [1.0, 0.0, 0.0, 0.0]
    assert piezometric_levels(1.0, [0.0, 0.0], {2: 0.5}) == [1.0, 1.0, 0.5]
    assert piezometric_levels(1.0, [3.0, 1.0], {}) == [1.0, 1.0, 1.0]


def test_levels_are_known_at_layers_that_have_one_and_at_a_drained_base():
    assert controlled_boundaries([False, True, False], base_drained=True) == {1: 1, 2: 1, 3: None}
    assert controlled_boundaries([False, True], base_drained=True) == {1: 1, 2: 1}
    assert controlled_boundaries([False, True, False], base_drained=False) == {1: 1, 2: 1}


def test_neighbours_with_an_excess_share_one_shape():
    runs = excess_runs([False, True, True, False, True], base_drained=False)
    assert runs[1] == runs[2] == (1, 2, False)
    assert runs[4] == (4, 4, True)
    assert excess_runs([True], base_drained=True) == [(0, 0, False)]


def test_the_column_of_means_by_hand(base_text):
    """Water at 1 m, sand at -1 m: the crust is 3 m2/year, so little is lost in it."""
    found = parse_scenario(with_layer(base_text, SAND, "head = -1"))
    column = mean_column(found)
    assert column.depth == (0.0, 1.5, 8.5, 11.5)
    assert column.total == pytest.approx((0.0, 26.25, 136.85, 193.85))
    assert column.pore[2:] == pytest.approx((9.81 * 9.5, 9.81 * 12.5))
    crust, clay = column.resistance[:2]
    # crust: cv gw lambda/((1 + e0) sp); clay: k in m/s
    assert crust == pytest.approx(0.5 * 2.1 * 90.0 / (3.0 * 9.81 * 0.12))
    assert clay == pytest.approx(7.0 / (1.2e-9 * 365.25 * 86400.0))
    level = 1.0 - 2.0 * crust / (crust + clay)
    assert column.level[1] == pytest.approx(level)
    effective, excess = mean_stress(found, column, 1)
    pore = 9.81 * (5.0 - 0.5 * (level - 1.0))
    assert effective == pytest.approx(26.25 + 3.5 * 15.8 - pore)
    assert excess == 0.0


def test_nothing_is_checked_on_what_could_not_be_read(base_text):
    text = with_site(base_text, "base_head = 0").replace("unit_weight = 17.5", 'unit_weight = "heavy"')
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(text)
    assert len(caught.value.faults) == 1
