"""Reading: a sound file into base units, and files that are no scenario at all."""

import subprocess
import sys
from pathlib import Path

import pytest

from probsoil.errors import ScenarioError
from probsoil.scenario import (
    ClayLayer,
    Constant,
    EmbankmentLoad,
    GranularLayer,
    Lognormal,
    Normal,
    Scenario,
    parse_scenario,
    read_scenario,
)

DEMOS = Path(__file__).parents[3] / "scenarios"


def test_a_sound_scenario_is_read_into_base_units(base_text):
    scenario = parse_scenario(base_text)
    crust, soft, sand = scenario.layers
    assert isinstance(crust, ClayLayer)
    assert isinstance(sand, GranularLayer)
    assert isinstance(scenario.load, EmbankmentLoad)
    assert crust.thickness == Constant(value=1.5)
    assert crust.lambda_.expectation == pytest.approx(0.12, rel=1e-14)
    assert soft.thickness == Normal(mean=7.0, sd=0.6)
    assert soft.unit_weight == Normal(mean=15.8, sd=0.03 * 15.8)
    assert isinstance(soft.permeability.k, Lognormal)
    assert soft.permeability.k.cov == pytest.approx(0.7, rel=1e-12)
    assert sand.constrained_modulus == Constant(value=25_000.0)
    assert scenario.stages[0].end == pytest.approx(28 / 365.25)
    assert scenario.limits[0].between == (pytest.approx(427 / 365.25), 30.0)


def test_defaults(base_text):
    scenario = parse_scenario(base_text)
    assert (scenario.realisations, scenario.draws, scenario.currency) == (20_000, "monte carlo", "EUR")
    assert scenario.site.mode_factor == Normal(mean=0.8, sd=0.064)
    assert scenario.load.submergence is True
    assert scenario.load.fill_cohesion == Constant(value=0.0)
    assert scenario.model_error.settlement == Constant(value=1.0)
    assert scenario.limits[1].at is None


def test_thresholds_and_senses_of_every_kind_of_limit(base_text):
    extra = """
[[limits]]
name = "degree"
quantity = "degree_of_consolidation"
at = "2 years"
not_less_than = "80 %"

[[limits]]
name = "time"
quantity = "time_to_consolidation"
not_more_than = "26 weeks"
"""
    limits = parse_scenario(base_text + extra).limits
    assert [limit.sense for limit in limits] == [
        "not more than",
        "not less than",
        "not less than",
        "not more than",
    ]
    assert [limit.threshold for limit in limits] == [0.10, 1.0, 0.8, pytest.approx(182 / 365.25)]
    assert limits[3].degree == 0.9


def test_line_ends_and_byte_order_mark_make_no_difference(tmp_path, base_text):
    file = tmp_path / "windows.toml"
    file.write_bytes(b"\xef\xbb\xbf" + base_text.replace("\n", "\r\n").encode())
    assert read_scenario(file) == parse_scenario(base_text)


def test_places_are_right_with_windows_line_ends(base_text):
    spoiled = base_text.replace("M = 1.1", "M = 3.1")
    places = []
    for text in (spoiled, spoiled.replace("\n", "\r\n"), "\ufeff" + spoiled):
        with pytest.raises(ScenarioError, match="too large") as caught:
            parse_scenario(text)
        (fault,) = caught.value.faults
        places.append((fault.line, fault.column, fault.excerpt))
    assert places == [(19, 5, "M = 3.1")] * 3


def test_tables_may_be_written_under_headers_or_with_dotted_keys(base_text):
    inline = 'lambda = { dist = "lognormal", mean = 0.12, cov = 0.20 }'
    dotted = 'lambda.dist = "lognormal"\nlambda.mean = 0.12\nlambda.cov = 0.20'
    header = '\n[layers.lambda]\ndist = "lognormal"\nmean = 0.12\ncov = 0.20\n'
    sound = parse_scenario(base_text)
    assert parse_scenario(base_text.replace(inline, dotted)) == sound
    moved = base_text.replace(inline + "\n", "").replace(
        "permeability = { cv = 3.0 }\n", "permeability = { cv = 3.0 }\n" + header
    )
    assert parse_scenario(moved) == sound
    with pytest.raises(ScenarioError, match=r"layers\[1\]\.lambda\.cov") as caught:
        parse_scenario(moved.replace("cov = 0.20\n", "cov = 20\n", 1))
    (fault,) = caught.value.faults
    assert (fault.excerpt, fault.column) == ("cov = 20", 7)


def test_a_scenario_never_changes(base_text):
    scenario = parse_scenario(base_text)
    with pytest.raises(ValueError, match="frozen"):
        scenario.seed = 4
    assert isinstance(scenario.layers, tuple)


def test_a_scenario_may_be_made_from_a_mapping_of_the_same_shape(base_text):
    import tomllib

    assert Scenario.model_validate(tomllib.loads(base_text)) == parse_scenario(base_text)


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "the file is empty"),
        (b"# only a remark\n\n", "the file is empty"),
        (b"\x7fELF\x02\x01\x01\x00\x00\x00", "this is a binary file, not text"),
        (bytes(range(128, 256)) * 4, "not in UTF-8 (byte 1, line 1)"),
        ("title = 'Tr\xe4sk'".encode("latin-1"), "not in UTF-8 (byte 12, line 1)"),
        (b"x" * 2_000_001, "larger than 2000000 bytes"),
        (b"seed = " + b"9" * 5000, "a value cannot be read"),
        (b"a = " + b"[" * 5000, "nested too deeply"),
        (b"a = " + b"{a=" * 3000, "nested too deeply"),
    ],
    ids=["empty", "remarks", "binary", "bytes", "latin-1", "huge", "digits", "lists", "tables"],
)
def test_files_that_are_no_scenario(tmp_path, content, message):
    file = tmp_path / "bad.toml"
    file.write_bytes(content)
    with pytest.raises(ScenarioError, match="1 mistake in the scenario") as caught:
        read_scenario(file)
    (fault,) = caught.value.faults
    assert message in fault.message
    assert fault.file == str(file)


def test_missing_file_names_the_nearest(tmp_path):
    (tmp_path / "heron_flats.toml").write_text("x = 1")
    with pytest.raises(ScenarioError, match="there is no such file") as caught:
        read_scenario(tmp_path / "heron_flat.toml")
    assert "heron_flats.toml" in caught.value.faults[0].hint


def test_folder_and_impossible_names(tmp_path):
    with pytest.raises(ScenarioError, match="this is a folder"):
        read_scenario(tmp_path)
    with pytest.raises(ScenarioError, match="cannot be read"):
        read_scenario("a\0b")
    with pytest.raises(ScenarioError, match="cannot be read"):
        read_scenario(tmp_path / ("n" * 5000))


@pytest.mark.parametrize(
    ("text", "place", "message", "hint"),
    [
        ("a = ", (1, 5), "a value is expected here", "text in quotes"),
        ("horizon = 30 years", (1, 14), "something stands after the value", '"6 weeks"'),
        ("x = 1,5", (1, 6), "something stands after the value", "decimal point"),
        ("a = { b = 1,\nc = 2 }", (1, 13), "a key is expected here", "must stand on one line"),
        ("a = 1\na = 2", (2, 6), "given twice", "keep one"),
        ("[a]\nb = 1\n[a]\n", (3, 3), "this table is given twice", "[[double]]"),
        ("a = { b = 1, b = 2 }", (1, 19), "given twice", "keep one"),
        ("title = 'abc", (1, 13), "text in quotes is not closed", "same quote"),
        ('title = "abc\nx = 1', (1, 13), "not closed on its line", "same quote"),
        ("a = [1, 2", (1, 10), "the list is not closed", "]"),
        ("just words", (1, 6), "followed by = and a value", ""),
        ("[a", (1, 3), "the header is not closed", "[table]"),
    ],
)
def test_mistakes_of_toml_itself(text, place, message, hint):
    with pytest.raises(ScenarioError, match="not valid TOML") as caught:
        parse_scenario(text)
    (fault,) = caught.value.faults
    assert message in fault.message
    assert hint in (fault.hint or "")
    assert (fault.line, fault.column) == place


@pytest.mark.parametrize("file", sorted(DEMOS.glob("*.toml")), ids=lambda file: file.stem)
def test_demos_are_sound(file):
    scenario = read_scenario(file)
    uncertain = [quantity for quantity in scenario.quantities() if quantity.is_uncertain]
    assert 15 <= len(uncertain) <= 25
    assert scenario.realisations == 20_000


def test_reading_needs_no_slow_library():
    code = (
        "import sys; from probsoil.scenario import read_scenario; read_scenario(sys.argv[1]);"
        "print([m for m in ('pint', 'pandas', 'scipy', 'matplotlib') if m in sys.modules])"
    )
    command = [sys.executable, "-c", code, str(DEMOS / "heron_flats.toml")]
    done = subprocess.run(command, capture_output=True, text=True, check=True, cwd=DEMOS.parent)
    assert done.stdout.strip() == "[]"
