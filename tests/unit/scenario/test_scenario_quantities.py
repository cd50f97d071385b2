"""The uncertain numbers of a scenario, and the tables made from the models."""

import pytest

from probsoil.errors import ParameterError
from probsoil.scenario import STARTERS, parse_scenario, reference_table, starter_text
from probsoil.scenario.distribution_tables import FORMS
from probsoil.units import BASE_UNITS


def test_addresses_in_the_order_of_the_format(base_text):
    assert [quantity.address for quantity in parse_scenario(base_text).quantities()] == [
        "site.water_table",
        "site.mode_factor",
        "crust.thickness",
        "crust.unit_weight",
        "crust.void_ratio",
        "crust.lambda",
        "crust.kappa",
        "crust.preconsolidation",
        "crust.M",
        "crust.cv",
        "crust.kh_kv",
        "soft clay.thickness",
        "soft clay.unit_weight",
        "soft clay.void_ratio",
        "soft clay.Cc",
        "soft clay.Cs",
        "soft clay.pop",
        "soft clay.phi",
        "soft clay.k",
        "soft clay.ck",
        "soft clay.kh_kv",
        "sand.thickness",
        "sand.unit_weight",
        "sand.constrained_modulus",
        "sand.phi",
        "load.fill_unit_weight",
        "load.fill_phi",
        "load.fill_cohesion",
        "load.traffic",
        "model_error.settlement",
        "model_error.stability",
    ]


def test_order_of_keys_in_the_file_does_not_matter(base_text):
    swapped = base_text.replace(
        "M = 1.1\npermeability = { cv = 3.0 }", "permeability = { cv = 3.0 }\nM = 1.1"
    )
    assert swapped != base_text
    assert parse_scenario(swapped).quantities() == parse_scenario(base_text).quantities()


def test_a_quantity_carries_its_unit_range_and_averaging_length(base_text):
    found = {quantity.address: quantity for quantity in parse_scenario(base_text).quantities()}
    permeability = found["soft clay.k"]
    assert (permeability.unit, permeability.low, permeability.high) == ("m/s", 1e-13, 1e-5)
    assert permeability.averaging_length == 7.0
    assert permeability.is_uncertain
    assert found["load.fill_phi"].averaging_length is None
    assert not found["load.fill_phi"].is_uncertain


def test_strength_and_ocr_addresses(base_text):
    text = base_text.replace("{ stress = 90 }", "{ ocr = 2 }\nstrength = { S = 0.25, m = 0.8 }")
    addresses = [quantity.address for quantity in parse_scenario(text).quantities()]
    assert {"crust.ocr", "crust.strength_S", "crust.strength_m"} <= set(addresses)
    assert len(set(addresses)) == len(addresses)


def test_reference_table_has_every_key_once_with_unit_and_meaning():
    rows = reference_table()
    assert len({(row.table, row.key) for row in rows}) == len(rows)
    assert all(row.meaning for row in rows)
    keyed = {(row.table, row.key): row for row in rows}
    thickness = keyed["[[layers]] clay", "thickness"]
    assert (thickness.unit, thickness.allowed, thickness.source) == ("m", "0.05 to 200 m", "common practice")
    assert thickness.uncertain
    assert thickness.default == "required"
    assert keyed["[load] embankment", "crest_width"].uncertain
    assert not keyed["[load] embankment", "berm_width"].uncertain
    assert keyed["", "realisations"].default == "20000"
    assert keyed["[[layers]] clay preconsolidation", "pop"].unit == "kPa"
    assert {row.unit for row in rows} <= {*BASE_UNITS.values(), "", "of the parameter"}
    assert [row.key for row in rows if row.table == "distribution"] == [f'dist = "{name}"' for name in FORMS]


TAUGHT = {
    "embankment": {"settlement", "slip_safety", "degree_of_consolidation", "time_to_consolidation"},
    "footing": {"settlement", "bearing_safety"},
    "tank": {"settlement", "bearing_safety", "degree_of_consolidation"},
}


@pytest.mark.parametrize("kind", STARTERS)
def test_starters_are_sound_and_teach(kind):
    text = starter_text(kind)
    scenario = parse_scenario(text)
    assert sum(quantity.is_uncertain for quantity in scenario.quantities()) > 10
    assert {limit.quantity for limit in scenario.limits} == TAUGHT[kind]
    assert sum("#" in line for line in text.splitlines()) > 40


def test_unknown_starter_names_the_choices():
    with pytest.raises(ParameterError, match='no starter "quay"; choose from: embankment, footing, tank'):
        starter_text("quay")
