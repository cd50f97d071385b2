"""Messages that lead someone who does not know TOML, or this format, to the remedy."""

import sys
import tomllib

import pytest

from probsoil.errors import Fault, ScenarioError
from probsoil.ground.constants import WATER_UNIT_WEIGHT
from probsoil.scenario import Scenario, parse_scenario, remarks
from probsoil.scenario.structure import LISTS, inner_table, keys_of, member
from probsoil.scenario.translation import SECTIONS


def faults_in(text: str) -> tuple[Fault, ...]:
    with pytest.raises(ScenarioError, match="in the scenario") as caught:
        parse_scenario(text, file="bad.toml")
    return caught.value.faults


def line_of(text: str, part: str) -> int:
    return text[: text.index(part)].count("\n") + 1


def test_one_layer_under_the_singular_is_led_to_the_list(base_text: str) -> None:
    text = base_text.replace('[[layers]]\nname = "sand"', '[layer]\nname = "sand"')
    (fault,) = faults_in(text)
    assert fault.key == "layer"
    assert fault.hint == "did you mean [[layers]]?"
    assert fault.line == line_of(text, "[layer]\n")


def test_lone_table_under_the_singular_is_checked_as_a_list_of_one(base_text: str) -> None:
    start = base_text.index('[[limits]]\nname = "slip"')
    text = base_text[: base_text.index("[[limits]]")] + base_text[start:].replace("[[limits]]", "[limit]")
    (fault,) = faults_in(text)
    assert fault.hint == "did you mean [[limits]]?"
    faults = faults_in(text.replace("not_less_than = 1.0", "not_less_than = -1.0"))
    assert [fault.message for fault in faults] == ['unknown key "limit"', "-1 is too small"]


RARE = ("dependence", "further_loads", "evidence", "test_errors")  # lists that the base text does without


@pytest.mark.parametrize("key", [key for key in LISTS if key not in RARE])
@pytest.mark.parametrize("which", [0, 1])
def test_single_brackets_among_double_ones_are_found_where_they_stand(
    base_text: str, key: str, which: int
) -> None:
    text = base_text
    if key == "stations":
        text += '\n[[stations]]\nname = "a"\n\n[[stations]]\nname = "b"\ny = 10\n'
    parts = text.split(f"[[{key}]]")
    marks = [f"[[{key}]]"] * (len(parts) - 1)
    marks[which] = f" [ {key} ]"
    text = parts[0] + "".join(mark + part for mark, part in zip(marks, parts[1:], strict=True))
    (fault,) = faults_in(text)
    assert fault.line == line_of(text, f"[ {key} ]")
    assert fault.column == 2
    assert "opens one table" in fault.message
    assert fault.hint == f"double brackets for each: [[{key}]]"


def test_singular_given_twice_is_led_to_the_list(base_text: str) -> None:
    text = base_text.replace("[[stages]]", "[stage]")
    (fault,) = faults_in(text)
    assert fault.line == line_of(text, "[stage]")
    assert fault.hint == "double brackets for each: [[stages]]"


def test_other_tables_given_twice_are_still_told_as_such(base_text: str) -> None:
    (fault,) = faults_in(base_text + '\n[site]\nbase = "drained"\n')
    assert "given twice" in fault.message


def test_allowed_keys_are_all_listed_and_those_given_are_marked(base_text: str) -> None:
    (fault,) = faults_in(base_text.replace("phi = 33", "phi = 33\ncolour = 1"))
    assert fault.allowed is not None
    assert fault.allowed.split(", ") == [
        "name (given)",
        "soil (given)",
        "thickness (given)",
        "unit_weight (given)",
        "unit_weight_above",
        "constrained_modulus (given)",
        "phi (given)",
        "head",
    ]


def test_a_key_that_is_given_is_not_suggested(base_text: str) -> None:
    (fault,) = faults_in(base_text.replace("phi = 33", "phi = 33\nphii = 33"))
    assert fault.hint is None


def test_keys_of_a_distribution_are_listed_in_the_same_way(base_text: str) -> None:
    faults = faults_in(base_text.replace("mean = 0.12, cov = 0.20", "mean = 0.12, cof = 0.20"))
    assert faults[0].allowed is not None
    assert faults[0].allowed.startswith("dist (given), mean (given), cov, sd, ")


def test_every_missing_section_has_an_example_that_begins_it(base_text: str) -> None:
    faults = faults_in('format = 1\ntitle = "x"\nseed = 1\nhorizon = 1\n')
    assert [fault.key for fault in faults] == list(SECTIONS)
    for fault in faults:
        assert fault.message == f'section "{fault.key}" is missing'
        assert fault.hint == f"such as\n{SECTIONS[fault.key]}"
        assert len(SECTIONS[fault.key].splitlines()) == 2
        table = tomllib.loads(SECTIONS[fault.key])[fault.key]
        written = set(table[0] if isinstance(table, list) else table)
        own = tomllib.loads(base_text)[fault.key]
        model = inner_table(Scenario, fault.key) or member(
            fault.key, own[0] if isinstance(own, list) else own
        )
        assert model is not None
        assert written <= set(keys_of(model))


def test_hint_of_several_lines_keeps_its_column() -> None:
    assert str(Fault(file="a", message="b", hint="c\nd")) == "a: b\n      hint:    c\n               d"


def test_negative_mean_of_a_lognormal_is_not_led_to_another_spread(base_text: str) -> None:
    (fault,) = faults_in(base_text.replace("mean = 0.12, cov = 0.20", "mean = -0.12, cov = 0.20"))
    assert fault.key.startswith("layers[1].lambda.mean")
    assert "a lognormal variable is never negative" in fault.message
    assert "sd" not in (fault.hint or "")


def test_equal_times_are_told_as_equal(base_text: str) -> None:
    (fault,) = faults_in(base_text.replace('["61 weeks", "30 years"]', '["1 year", 1]'))
    assert "the two times are equal, 1 year, and nothing settles between them" in fault.message


DEGREE = 'quantity = "degree_of_consolidation"\nat = {}\nnot_less_than = 0.9'


@pytest.mark.parametrize("at", ["0", '"20 days"', '"4 weeks"'])
def test_degree_of_consolidation_before_loading_is_refused(base_text: str, at: str) -> None:
    text = base_text.replace('quantity = "slip_safety"\nnot_less_than = 1.0', DEGREE.format(at))
    late = text.replace('start = 0\nend = "4 weeks"', 'start = "4 weeks"\nend = "5 weeks"')
    (fault,) = faults_in(late)
    assert fault.key.startswith("limits[2].at")
    assert "nothing is loaded before 0.07666 years" in fault.message
    if at == "0":
        (fault,) = faults_in(text)
        assert "nothing is loaded before 0 years" in fault.message
    else:
        parse_scenario(text)


def test_degree_is_not_judged_where_the_first_stage_cannot_be_read(base_text: str) -> None:
    text = base_text.replace('quantity = "slip_safety"\nnot_less_than = 1.0', DEGREE.format("0"))
    (fault,) = faults_in(text.replace("start = 0\n", 'start = "soon"\n'))
    assert fault.key.startswith("stages[1].start")


# Remarks: no mistakes, but worth another look. Stresses are worked out by hand below.


def remarks_on(text: str, *edits: tuple[str, str]) -> tuple[str, ...]:
    for old, new in edits:
        assert old in text
        text = text.replace(old, new, 1)
    return remarks(parse_scenario(text))


def test_sound_scenario_needs_no_remark(base_text: str) -> None:
    assert remarks_on(base_text) == ()


def test_water_table_below_everything_is_remarked(base_text: str) -> None:
    # the layers end at 1.5 + 7.0 + 3.0 = 11.5 m
    assert remarks_on(base_text, ("water_table = 1.0", "water_table = 11.5")) == ()
    (remark,) = remarks_on(base_text, ("water_table = 1.0", "water_table = 11.6"))
    assert "11.6 m (mean), below the last layer, which ends at 11.5 m" in remark


def test_preconsolidation_below_the_weight_of_the_ground_is_remarked(base_text: str) -> None:
    """The crust is 17.5 kN/m3 and 1.5 m thick, the soft clay 15.8 and 7.0 m, water at 1.0 m."""
    crust = 17.5 * 0.75
    clay = 17.5 * 1.5 + 15.8 * 3.5 - 9.81 * (1.5 + 3.5 - 1.0)
    pop = '{ pop = { dist = "lognormal", mean = 18, cov = 0.30 } }'
    for layer, old, stress in (("crust", "{ stress = 90 }", crust), ("soft clay", pop, clay)):
        assert remarks_on(base_text, (old, f"{{ stress = {stress + 0.01} }}")) == ()
        (remark,) = remarks_on(base_text, (old, f"{{ stress = {stress - 0.01} }}"))
        assert f"the preconsolidation stress of {layer}" in remark
        assert f"in situ at the middle of the layer, {stress:.4g} kPa" in remark


def test_weight_above_the_water_table_counts_in_its_own_measure(base_text: str) -> None:
    """Water at 3.0 m: the soft clay from 1.5 to 3.0 m weighs 14.0 kN/m3."""
    edits = (
        ("water_table = 1.0", "water_table = 3.0"),
        ("void_ratio = 1.9", "unit_weight_above = 14.0\nvoid_ratio = 1.9"),
    )
    stress = 17.5 * 1.5 + 14.0 * 1.5 + 15.8 * 2.0 - 9.81 * 2.0
    pop = '{ pop = { dist = "lognormal", mean = 18, cov = 0.30 } }'
    assert remarks_on(base_text, *edits, (pop, f"{{ stress = {stress + 0.01} }}")) == ()
    assert len(remarks_on(base_text, *edits, (pop, f"{{ stress = {stress - 0.01} }}"))) == 1


def test_water_weighs_what_it_weighs_in_the_ground_models() -> None:
    assert sys.modules["probsoil.scenario.mean_column"].WATER_UNIT_WEIGHT == WATER_UNIT_WEIGHT
