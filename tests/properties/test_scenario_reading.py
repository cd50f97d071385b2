"""Whatever is done to a scenario file, the reader answers with a scenario or with its mistakes."""

import math
import tomllib
from pathlib import Path

import jsonschema
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.errors import Fault, ScenarioError
from probsoil.scenario import Scenario, parse_scenario, read_scenario, scenario_schema
from probsoil.scenario.distribution_tables import FORMS, SPATIAL_KEYS, own_keys, read_distribution
from probsoil.scenario.distributions import Distribution
from probsoil.scenario.slips import Slip
from probsoil.units import KINDS, UnitError, to_base

DEMOS = [
    path.read_text(encoding="utf-8")
    for path in sorted((Path(__file__).parents[2] / "scenarios").glob("*.toml"))
]
SCHEMA = jsonschema.Draft202012Validator(scenario_schema())
VALUES = st.sampled_from(
    [
        *("0", "-1", "1e308", "1e-308", "nan", "inf", "true", "07:32:00", "0x" + "f" * 4000),
        *('""', '"x"', '"3 m"', '"9 kPa"', '"soft clay.k"'),
        *("[]", "{}", "[[]]", "[1, 2]", "{ dist = 1 }", '{ dist = "beta" }', "{ name = 3 }"),
    ]
)


@st.composite
def edited_line(draw: st.DrawFn, line: str) -> str:
    """A line with another value, a mistyped key, a cut or an insertion."""
    how = draw(st.sampled_from(["value", "key", "cut", "insert"]))
    cut = draw(st.integers(0, len(line)))
    if how == "value":
        return line.split("=")[0] + "= " + draw(VALUES)
    if how == "key":
        cut = min(cut, line.find("=")) if "=" in line else cut
        return line[:cut] + line[cut + 1 :]
    if how == "cut":
        return line[:cut] + line[cut + draw(st.integers(1, 9)) :]
    return line[:cut] + draw(st.text(max_size=3)) + line[cut:]


@st.composite
def mutated(draw: st.DrawFn) -> str:
    """A demo with lines dropped, doubled, swapped or edited."""
    lines = draw(st.sampled_from(DEMOS)).split("\n")
    for _ in range(draw(st.integers(1, 6))):
        at, other = (draw(st.integers(0, len(lines) - 1)) for _ in range(2))
        how = draw(st.sampled_from(["drop", "double", "swap", "edit", "edit", "edit"]))
        if how == "drop":
            del lines[at]
        elif how == "double":
            lines.insert(at, lines[at])
        elif how == "swap":
            lines[at], lines[other] = lines[other], lines[at]
        else:
            lines[at] = draw(edited_line(lines[at]))
    return "\n".join(lines)


def faults_in(text: str) -> tuple[Fault, ...]:
    try:
        scenario = parse_scenario(text, file="m.toml")
    except ScenarioError as error:
        return error.faults
    assert isinstance(scenario, Scenario)
    assert scenario.quantities()
    return ()


@settings(max_examples=400, deadline=None)
@given(mutated())
def test_mutated_demos_give_a_scenario_or_their_mistakes(text):
    lines = text.removeprefix("\ufeff").replace("\r\n", "\n").split("\n")
    faults = faults_in(text)
    for fault in faults:
        assert str(fault).startswith("m.toml")
        if fault.line is not None:
            assert fault.excerpt == lines[fault.line - 1]
            assert 1 <= fault.column <= len(fault.excerpt) + 1
    if not faults:  # what the reader accepts, an editor must not flag
        SCHEMA.validate(tomllib.loads(text.removeprefix("\ufeff")))


@settings(max_examples=100, deadline=None)
@given(st.binary(max_size=300))
def test_any_bytes_give_mistakes(tmp_path_factory, content):
    file = tmp_path_factory.mktemp("bytes") / "x.toml"
    file.write_bytes(content)
    with pytest.raises(ScenarioError, match="in the scenario"):
        read_scenario(file)


NUMBERS = st.one_of(
    st.floats(),
    st.floats(0.0, 10.0),
    st.integers(-(10**400), 10**400),
    st.sampled_from(["3 m", "20 %", "x", True, None]),
)


@settings(max_examples=500, deadline=None)
@given(st.data())
def test_any_distribution_table_is_read_or_refused(data):
    name = data.draw(st.sampled_from(sorted(FORMS)))
    keys = data.draw(st.lists(st.sampled_from([*own_keys(name), *SPATIAL_KEYS]), unique=True))
    form = data.draw(st.sampled_from(FORMS[name]))
    chosen = data.draw(st.sampled_from([tuple(keys), form]))
    table = {"dist": name, **{key: data.draw(NUMBERS) for key in chosen}}
    outcome = read_distribution(table, data.draw(st.sampled_from(KINDS)), spatial=data.draw(st.booleans()))
    if isinstance(outcome, list):
        assert outcome
        assert all(isinstance(slip, Slip) for slip in outcome)
    else:
        assert isinstance(outcome, Distribution)
        assert outcome.describe("m")
        assert 0.0 <= outcome.probability_outside(0.1, 5.0) <= 1.0
        assert not math.isnan(outcome.expectation)


@settings(max_examples=300, deadline=None)
@given(
    st.one_of(st.text(max_size=20), st.from_regex(r"\A-?[0-9]{1,3} [a-zA-Z/*^23 ]{1,12}\Z")),
    st.sampled_from(KINDS),
)
def test_any_text_is_a_finite_quantity_or_a_unit_error(text, kind):
    try:
        number = to_base(text, kind)
    except UnitError:
        return
    assert math.isfinite(number)
