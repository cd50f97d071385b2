"""Keys of strip, rectangle and circle: what is read, and what is refused with its place and remedy."""

import tomllib

import jsonschema
import pytest

from probsoil.errors import ScenarioError
from probsoil.scenario import CircleLoad, RectangleLoad, StripLoad, parse_scenario, scenario_schema

TEXT = """
format = 1
title = "Foundation"
seed = 1
horizon = 10
[site]
water_table = 1.0
base = "drained"
[[layers]]
name = "clay"
soil = "clay"
thickness = 5
unit_weight = 16
void_ratio = 1.8
lambda = 0.3
kappa = 0.04
preconsolidation = {{ pop = 20 }}
M = 1.0
permeability = {{ cv = 1 }}
[load]
{load}
[[stages]]
name = "built"
start = 0
end = 1
{amount}
[[limits]]
name = "stands"
quantity = "{quantity}"
not_less_than = 1.5
"""
STRIP, RECTANGLE, CIRCLE = (
    'shape = "strip"\nwidth = 2',
    'shape = "rectangle"\nwidth = 2\nlength = 3',
    'shape = "circle"\ndiameter = 10',
)


def text_of(load, amount="pressure = 50", quantity="bearing_safety"):
    return TEXT.format(load=load, amount=amount, quantity=quantity)


def faults_of(text):
    with pytest.raises(ScenarioError, match="mistake") as caught:
        parse_scenario(text, file="bad.toml")
    return caught.value.faults


def test_defaults_and_units_are_read():
    load = parse_scenario(text_of('shape = "rectangle"\nwidth = "10 ft"\nlength = 6')).load
    assert isinstance(load, RectangleLoad)
    assert load.width.expectation == pytest.approx(3.048)
    assert (load.depth.expectation, load.contact, load.at, load.submergence) == (
        0.0,
        "rough",
        (0.0, 0.0),
        True,
    )
    at = parse_scenario(text_of(f'{RECTANGLE}\nat = ["50 cm", -1]')).load.at
    assert at == pytest.approx((0.5, -1.0))
    assert isinstance(parse_scenario(text_of(f'{STRIP}\ncontact = "smooth"')).load, StripLoad)
    assert isinstance(parse_scenario(text_of(f"{CIRCLE}\nat = 5\ndepth = 1.5")).load, CircleLoad)


def test_height_of_what_fills_a_tank():
    case = parse_scenario(text_of(f"{CIRCLE}\nfill_unit_weight = 9.81", amount="height = 5"))
    addresses = [quantity.address for quantity in case.quantities()]
    assert "load.fill_unit_weight" in addresses


@pytest.mark.parametrize(
    ("load", "amount", "quantity", "key", "message"),
    [
        ('shape = "strip"', "pressure = 50", "bearing_safety", "load", 'key "width" is missing'),
        (
            'shape = "rectangle"\nwidth = 2',
            "pressure = 50",
            "bearing_safety",
            "load",
            'key "length" is missing',
        ),
        ('shape = "circle"', "pressure = 50", "bearing_safety", "load", 'key "diameter" is missing'),
        (
            'shape = "strip"\nwidth = 0',
            "pressure = 50",
            "bearing_safety",
            "load.width",
            "0 m is too small",
        ),
        (f"{STRIP}\ndepth = -1", "pressure = 50", "bearing_safety", "load.depth", "-1 m is too small"),
        (f"{STRIP}\nlength = 3", "pressure = 50", "bearing_safety", "load.length", "does not go with shape"),
        (f"{CIRCLE}\nwidth = 3", "pressure = 50", "bearing_safety", "load.width", "does not go with shape"),
        (
            f'{STRIP}\ncontact = "smoth"',
            "pressure = 50",
            "bearing_safety",
            "load.contact",
            "none of the choices",
        ),
        (
            f"{RECTANGLE}\nat = 1",
            "pressure = 50",
            "bearing_safety",
            "load.at",
            "two distances are needed",
        ),
        (f"{CIRCLE}\nat = -1", "pressure = 50", "bearing_safety", "load.at", "-1 m is too small"),
        (f"{CIRCLE}\nat = [1, 2]", "pressure = 50", "bearing_safety", "load.at", "not a number"),
        (
            f"{CIRCLE}\ncrest_width = 3",
            "pressure = 50",
            "bearing_safety",
            "load.crest_width",
            "does not go with shape",
        ),
        (STRIP, "height = 2", "bearing_safety", "height", "needs the unit weight of the fill"),
        (STRIP, "pressure = 50\nheight = 2", "bearing_safety", "pressure", "more than once"),
        (STRIP, "pressure = -50", "bearing_safety", "pressure", "50 kPa is removed but only 0 kPa"),
        (STRIP, "pressure = 50", "slip_safety", "quantity", "a foundation fails in bearing"),
        (
            'shape = "area"',
            "pressure = 50",
            "bearing_safety",
            "quantity",
            "bearing failure is for a foundation; the load is of shape area",
        ),
        (
            'shape = "circel"\ndiameter = 3',
            "pressure = 50",
            "bearing_safety",
            "load.shape",
            "unknown shape",
        ),
    ],
)
def test_a_mistake_gives_one_fault_at_its_key(load, amount, quantity, key, message):
    faults = [fault for fault in faults_of(text_of(load, amount, quantity)) if message in fault.message]
    assert len(faults) == 1, faults_of(text_of(load, amount, quantity))
    assert key in faults[0].key
    assert faults[0].line is not None


def test_bad_point_is_reported_with_every_other_mistake():
    faults = faults_of(text_of(f'{RECTANGLE}\nat = [1, "x"]\ndepth = 90', amount="pressure = 0"))
    assert len(faults) == 3


@pytest.mark.parametrize(
    "load", [STRIP, f"{RECTANGLE}\nat = [1.0, -0.5]", f'{CIRCLE}\ncontact = "smooth"\nat = 2']
)
def test_schema_accepts_what_is_read(load):
    text = text_of(load)
    parse_scenario(text)
    jsonschema.Draft202012Validator(scenario_schema()).validate(tomllib.loads(text))


DIG = '[[stages]]\nname = "dug out"\nstart = 0\nend = 0.5\nexcavate = {}\n'
PIT = 'shape = "circle"\ndiameter = 8\ndepth = 1.5'


def dug(load=PIT, depth="1.5", stage="start = 1\nend = 2\npressure = 60", first=True):
    built = TEXT.format(load=load, amount="pressure = 60", quantity="bearing_safety")
    block = built[built.index("[[stages]]") : built.index("[[limits]]")]
    later = f'[[stages]]\nname = "built"\n{stage}\n'
    both = (
        DIG.format(depth) + later
        if first
        else later + DIG.format(depth).replace("0.5", "3").replace("= 0\n", "= 2\n")
    )
    return built.replace(block, both)


def test_soil_is_dug_out_to_the_base():
    scenario = parse_scenario(dug())
    assert [stage.excavate for stage in scenario.stages] == [1.5, None]
    jsonschema.validate(tomllib.loads(dug()), scenario_schema())


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (dug(depth="1.0"), r"1 m are dug out in all, but the base lies 1\.5 m below ground level"),
        (dug(depth="0"), "too small"),
        (dug(load='shape = "area"'), "bearing failure is for a foundation; the load is of shape area"),
        (dug(first=False), 'soil is dug out after stage 1 "built" has loaded it'),
        (dug(stage="start = 1\nend = 2\npressure = 60\nexcavate = 1"), "given more than once, as"),
        (
            dug()
            .replace('name = "built"\nstart = 1\nend = 2\npressure = 60\n', "")
            .rsplit("[[stages]]", 1)[0]
            + '[[limits]]\nname = "stands"\nquantity = "bearing_safety"\nnot_less_than = 1.5\n',
            "nothing is placed in the excavation",
        ),
    ],
)
def test_what_cannot_be_dug_is_refused(text, message):
    with pytest.raises(ScenarioError, match=message):
        parse_scenario(text)


def test_soil_is_not_dug_out_for_a_further_load():
    further = '[[further_loads]]\nname = "pit"\nshape = "circle"\ndiameter = 5\ndepth = 1\nx = 9\n'
    text = dug().replace("[[stages]]", further + "[[stages]]", 1)
    with pytest.raises(ScenarioError, match=r"soil is dug out for \[load\] only"):
        parse_scenario(text.replace('name = "dug out"', 'name = "dug out"\nload = "pit"'))
