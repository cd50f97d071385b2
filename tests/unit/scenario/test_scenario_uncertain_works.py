"""Uncertain heights, widths and drains in a scenario, and a limit on added fill: what is read and refused."""

import tomllib

import jsonschema
import pytest

from probsoil.errors import ScenarioError
from probsoil.parameters import parameter_space
from probsoil.scenario import parse_scenario, scenario_schema
from probsoil.scenario.amounts import text_of
from probsoil.scenario.distributions import Constant, Normal
from probsoil.scenario.quantities import all_quantities

NORMAL = '{{ dist = "normal", mean = {}, sd = {} }}'
DRAINS = (
    '\n[drains]\npattern = "square"\nspacing = {spacing}\nequivalent_diameter = 0.066\nsmear_ratio = 2\n'
    "bottom = 8\ndischarge_capacity = 100\n"
)
LIMIT = '\n[[limits]]\nname = "top-up"\nquantity = "added_fill"\nnot_more_than = {}\n'
PAIR = '\n[[dependence]]\nbetween = ["{}", "{}"]\nrank_correlation = 0.4\n'
OFF = '\n[[stages]]\nname = "off"\nheight = {}\nstart = "3 years"\nend = "3.1 years"\n'


def uncertain(base_text):
    text = base_text.replace("height = 1.5", f"height = {NORMAL.format(1.5, 0.1)}", 1)
    return text.replace(
        "crest_width = 12.0", f"crest_width = {NORMAL.format(12.0, 0.5).replace('12.0', '12')}"
    )


def faults(text):
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(text)
    return caught.value.faults


def test_heights_and_widths_have_addresses_and_may_be_correlated(base_text):
    pair = PAIR.format("stages.first lift.height", "load.crest_width")
    text = uncertain(base_text) + pair
    scenario = parse_scenario(text)
    found = {one.address: one for one in scenario.quantities()}
    height = found["stages.first lift.height"]
    assert (height.unit, height.is_uncertain, height.low, height.of_works) == ("m", True, 0.0, True)
    assert found["load.crest_width"].is_uncertain
    assert len(found) == len(scenario.quantities())
    assert "load.side_slope" not in found  # a plain number of the works is no parameter
    space = parameter_space(
        scenario.quantities(), [(*one.between, one.rank_correlation) for one in scenario.dependence]
    )
    assert {"stages.first lift.height", "load.crest_width"} <= set(space.names)
    jsonschema.validate(tomllib.loads(text), scenario_schema())


def test_a_plain_number_cannot_be_correlated(base_text):
    pair = PAIR.format("load.side_slope", "stages.first lift.height")
    messages = [one.message for one in faults(uncertain(base_text) + pair)]
    assert messages == ['"load.side_slope" is a fixed number']
    (typing,) = faults(uncertain(base_text) + pair.replace("load.side_slope", "stages.first lft.height"))
    assert typing.hint == 'did you mean "stages.first lift.height"?'


def test_plain_numbers_are_known_though_no_parameters(base_text):
    scenario = parse_scenario(base_text)
    known = {one.address: one for one in all_quantities(scenario)}
    assert known["load.crest_width"].distribution == Constant(value=12.0)
    assert not [one for one in scenario.quantities() if one.of_works]


def test_a_layer_cannot_have_the_name_of_the_stages(base_text):
    (fault,) = faults(base_text.replace('name = "crust"', 'name = "stages"'))
    assert '"stages" is the name of a table' in fault.message


@pytest.mark.parametrize(
    ("height", "message"),
    [
        ('{ dist = "uniform", low = -0.1, high = 2.0 }', "on average the stage adds"),
        ('{ dist = "normal", mean = 1.0, sd = 0.8 }', "on average the stage adds, but with a chance of 11 %"),
        ('{ dist = "normal", mean = -0.3, sd = 0.4 }', "on average the stage removes"),
        ('{ dist = "uniform", low = -1.0, high = 1.0 }', "on average the stage removes"),
        ('{ dist = "normal", mean = 120, sd = 1 }', "leaves its physical range"),
    ],
)
def test_a_stage_adds_or_takes_off_and_not_either_by_chance(base_text, height, message):
    text = base_text.replace("height = 1.5", f"height = {height}", 1)
    wrong = [one for one in faults(text) if message in one.message]
    assert [one.key.partition(" (")[0] for one in wrong] == ["stages[1].height"]


def test_what_little_lies_beyond_is_cut_openly(base_text):
    text = base_text + OFF.format('{ dist = "normal", mean = -0.4, sd = 0.2 }')
    scenario = parse_scenario(text)
    space = parameter_space(scenario.quantities())
    (row,) = [one for one in space.summary() if one.name == "stages.off.height"]
    assert row.cut_share == pytest.approx(0.02275, abs=1e-5)  # beyond two standard deviations
    assert row.high == 0.0
    assert row.mean < -0.4


def test_more_than_is_there_on_average_is_refused(base_text):
    text = base_text + OFF.format('{ dist = "normal", mean = -9.0, sd = 0.1 }')
    (fault,) = faults(text)
    assert "9 m is removed but only" in fault.message


def test_drains_with_uncertain_spacing_are_told_in_words(base_text):
    scenario = parse_scenario(base_text + DRAINS.format(spacing=NORMAL.format(1.2, 0.1)))
    assert scenario.drains is not None
    assert (
        "about 1.2 m apart (normal, mean 1.2 m, standard deviation 0.1 m) to 8 m depth"
        in scenario.drains.describe()
    )
    assert [one.address for one in scenario.quantities() if one.of_works] == ["drains.spacing"]
    (fault,) = faults(
        base_text
        + DRAINS.format(spacing='{ dist = "uniform", low = 0.3, high = 0.31 }').replace("= 2\n", "= 6\n")
    )
    assert "the smear zones" in fault.message


def test_amounts_in_words():
    assert text_of(Constant(value=-0.4), "m", what="of fill", signed=True) == "-0.4 m of fill"
    assert text_of(Constant(value=2.5)) == "2.5"
    assert text_of(Normal(mean=2.0, sd=0.1), "m") == "about 2 m (normal, mean 2 m, standard deviation 0.1 m)"


def test_added_fill_is_limited_where_a_level_is_held(base_text):
    held = base_text.replace('shape = "embankment"\n', 'shape = "embankment"\nhold_level_until = 2\n')
    assert parse_scenario(held + LIMIT.format(8)).limits[-1].threshold == 8.0
    assert parse_scenario(held + LIMIT.format('"4 yd3/ft"')).limits[-1].threshold == pytest.approx(
        10.0335, abs=1e-4
    )
    (fault,) = faults(base_text + LIMIT.format(8))
    assert (fault.message, fault.allowed) == (
        "no fill is added: the level is not held",
        "hold_level_until in [load]",
    )
    (fault,) = faults(held + LIMIT.format('"8 m3"'))
    assert fault.allowed.startswith("a number in m3/m, or a string with a unit: m3/m, yd3/ft, ft3/ft")


@pytest.mark.parametrize(
    ("shape", "message"),
    [
        ('shape = "area"\nhold_level_until = 2', "per metre run of an embankment"),
        ('shape = "strip"\nwidth = 4', "hold the level of a foundation"),
    ],
)
def test_added_fill_is_that_of_an_embankment(base_text, shape, message):
    start, end = base_text.index("[load]"), base_text.index("[[stages]]")
    text = base_text[:start] + f"[load]\n{shape}\nfill_unit_weight = 19\n\n" + base_text[end:]
    wrong = [one for one in faults(text + LIMIT.format(8)) if message in one.message]
    assert len(wrong) == 1
