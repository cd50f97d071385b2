"""Units: the table against pint, and what is said of what cannot be read."""

import math
import re

import pint
import pytest

from probsoil.units import BASE_UNITS, KINDS, UnitError, kind_of_unit, tabulated_units, to_base

PINT_NAMES = {
    "psf": "lbf/ft**2",
    "ksf": "kip/ft**2",
    "tsf": "ton_force/ft**2",
    "pcf": "lbf/ft**3",
    "gon": "grade",
    "tf": "metric_ton*g_0",
    "kgf": "kilogram_force",
    "°": "degree",
    "y": "year",
}
PINT_BASES = {
    "length": "m",
    "pressure": "kPa",
    "unit weight": "kN/m**3",
    "time": "julian_year",
    "permeability": "m/s",
    "coefficient of consolidation": "m**2/julian_year",
    "discharge capacity": "m**3/julian_year",
    "angle": "degree",
    "volume per metre": "m**2",
}


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    return pint.UnitRegistry()


def pint_expression(unit: str) -> str:
    """Write a unit of the table as pint writes it, part by part."""
    if unit in PINT_NAMES:
        return PINT_NAMES[unit]
    parts = []
    for part in unit.split("/"):
        name, power = part.rstrip("23"), part[len(part.rstrip("23")) :]
        parts.append(f"({PINT_NAMES.get(name, name)})" + (f"**{power}" if power else ""))
    return "/".join(parts)


@pytest.mark.parametrize("kind", [kind for kind in KINDS if kind != "number"])
def test_every_factor_of_the_table_agrees_with_pint(kind, registry):
    for unit, factor in tabulated_units(kind).items():
        expected = registry.Quantity(1.0, pint_expression(unit)).to(PINT_BASES[kind]).magnitude
        assert factor == pytest.approx(expected, rel=1e-12), unit


@pytest.mark.parametrize("kind", KINDS)
def test_base_unit_has_factor_one_and_a_bare_number_is_in_it(kind):
    assert to_base(2.5, kind) == 2.5
    if kind != "number":
        assert to_base(f"2.5 {BASE_UNITS[kind]}", kind) == 2.5


@pytest.mark.parametrize(
    ("text", "kind", "expected"),
    [
        ("6 weeks", "time", 42 / 365.25),
        ("-2 weeks", "time", -14 / 365.25),
        ("25 MPa", "pressure", 25e3),
        ("1.2e-9 m/s", "permeability", 1.2e-9),
        (".5 m²/year", "coefficient of consolidation", 0.5),
        ("3 m^2/yr", "coefficient of consolidation", 3.0),
        ("3 m**2 per year", "coefficient of consolidation", 3.0),
        ("18 kN / m³", "unit weight", 18.0),
        ("20 %", "number", 0.2),
        ("  4cm ", "length", 0.04),
        ("30°", "angle", 30.0),
    ],
)
def test_usual_spellings(text, kind, expected):
    assert to_base(text, kind) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "kind", "expected"),
    [
        ("3 yard", "length", 2.7432),
        ("2 furlong", "length", 402.336),
        ("2 ton_force/foot2", "pressure", 2 * 2000 * 0.45359237 * 9.80665e-3 / 0.3048**2),
        ("1 fortnight", "time", 14 / 365.25),
        ("100 dyn/cm3", "unit weight", 1.0),
    ],
)
def test_unusual_units_are_left_to_pint(text, kind, expected):
    # pint's furlong is that of the survey foot, which differs by 2 parts in a million.
    assert to_base(text, kind) == pytest.approx(expected, rel=3e-6)


@pytest.mark.parametrize(
    ("value", "kind", "message", "hint"),
    [
        ("15.5 kN/m2", "unit weight", 'unit "kN/m2" is a unit of pressure, not of unit weight', '"kN/m3"'),
        ("1.9 Mg/m3", "unit weight", "is a unit of density, not of unit weight", "multiply by 9.81"),
        ("18 kn/m3", "unit weight", "is not a unit of unit weight", '"kN/m3"'),
        ("90 mPa", "pressure", "is not a unit of pressure", '"MPa"'),
        ("90 kpa", "pressure", "is not a unit of pressure", '"kPa"'),
        ("30 yaers", "time", "is not a unit of time", '"years"'),
        ("1,2 m", "length", "a comma is not a decimal sign here", "decimal point"),
        ("12", "length", "a string must carry a unit", 'write 12 without quotes, or "12 m"'),
        ("about 3 m", "length", "this is not a number with a unit", None),
        ("", "length", "this is not a number with a unit", None),
        ("nan m", "length", "this is not a number with a unit", None),
        ("3 m", "angle", "is a unit of length, not of angle", None),
        ("3 degC", "length", "is not a unit of length", None),
        ("2 m*9**9**9**9", "length", "is not a unit of length", None),
        ("1e999 m", "length", "the number is infinite", None),
        (math.nan, "length", "this is not a number", None),
        (-math.inf, "length", "the number is infinite", None),
        (10**400, "length", "the number is too large", None),
        (True, "length", "this is not a number", None),
    ],
)
def test_what_is_said_of_a_mistake(value, kind, message, hint):
    with pytest.raises(UnitError, match=re.escape(message)) as caught:
        to_base(value, kind)
    assert caught.value.allowed
    if hint is not None:
        assert hint in caught.value.hint


def test_kind_of_unit_knows_table_and_pint():
    assert kind_of_unit("kPa") == "pressure"
    assert kind_of_unit("furlong") == "length"
    assert kind_of_unit("smoots_of_old") is None


def test_no_unit_belongs_to_two_kinds():
    seen = [unit for kind in KINDS for unit in tabulated_units(kind)]
    assert len(seen) == len(set(seen))
