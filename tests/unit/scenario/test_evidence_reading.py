"""Test results in a scenario: what is read, and what is said of every mistake."""

from pathlib import Path

import pytest

from probsoil.errors import ScenarioError
from probsoil.scenario import Scenario, parse_scenario, read_scenario
from probsoil.scenario.evidence import error_defaults
from probsoil.scenario.evidence_file import COLUMNS, EvidenceFile
from probsoil.scenario.test_results import KINDS, PARAMETERS

GROUND = """format = 1
title = "Tests"
seed = 1
realisations = 200
horizon = 10

[site]
water_table = 1.0
base = "drained"

[[layers]]
name = "clay"
soil = "clay"
thickness = 6.0
unit_weight = 15.0
void_ratio = { dist = "normal", mean = 2.0, cov = 0.08 }
lambda = { dist = "lognormal", mean = 0.36, cov = 0.12, inherent_cov = 0.2, vertical_scale = 1.5 }
kappa = { dist = "lognormal", mean = 0.05, cov = 0.20 }
preconsolidation = { pop = { dist = "lognormal", mean = 18, cov = 0.30 } }
M = { dist = "normal", mean = 1.02, cov = 0.06 }
permeability = { cv = { dist = "lognormal", mean = 1.0, cov = 0.5 } }

[[layers]]
name = "sand"
soil = "granular"
thickness = 3.0
unit_weight = 19.0
constrained_modulus = "25 MPa"
phi = 33

[load]
shape = "area"
fill_unit_weight = 19.0

[[stages]]
name = "fill"
height = 1.0
start = 0.0
end = 0.1

[[limits]]
name = "settlement"
quantity = "settlement"
at = 10
not_more_than = 0.3
"""
HEADER = ",".join(COLUMNS)
GOOD = "oedometer,T1,BH1,10,5,clay,3.0,lambda,0.40,-,0.02,"


def faults_of(text: str, folder: Path | None = None) -> list:
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(GROUND + text, file="case.toml" if folder is None else str(folder / "case.toml"))
    return caught.value.faults


def with_file(folder: Path, *rows: str, header: str = HEADER, more: str = "") -> str:
    (folder / "tests.csv").write_text("\n".join([header, *rows]) + "\n", encoding="utf-8")
    return f'\n[[evidence]]\nfile = "tests.csv"\n{more}'


def read(folder: Path, text: str) -> Scenario:
    path = folder / "case.toml"
    path.write_text(GROUND + text, encoding="utf-8")
    return read_scenario(path)


def test_inline_results_are_read_with_units_and_standard_errors() -> None:
    scenario = parse_scenario(
        GROUND
        + """
[[evidence]]
kind = "oedometer"
layer = "clay"
depth = "300 cm"
test = "BH1-3"
hole = "BH1"
x = 10
y = -5
lambda = { value = 0.34, standard_error = 0.02 }
preconsolidation_stress = "0.052 MPa"
cv = "2e-8 m2/s"
"""
    )
    first, second, third = scenario.test_results
    assert (first.parameter, first.value, first.standard_error) == ("lambda", 0.34, 0.02)
    assert (first.test, first.hole, first.x, first.y, first.depth) == ("BH1-3", "BH1", 10.0, -5.0, 3.0)
    assert (second.parameter, second.value) == ("preconsolidation_stress", pytest.approx(52.0))
    assert (third.parameter, third.value) == ("cv", pytest.approx(2e-8 * 365.25 * 86400.0))


def test_file_is_read_relative_to_the_scenario_and_flags_are_heeded(tmp_path: Path) -> None:
    rows = [GOOD, "oedometer,T2,BH1,,,,4.0,k,5e-8,cm/s,,low recovery"]
    used = read(tmp_path, with_file(tmp_path, *rows)).test_results
    assert [one.parameter for one in used] == ["lambda", "k"]
    assert used[1].value == pytest.approx(5e-10)
    assert used[1].layer == ""
    kept = read(tmp_path, with_file(tmp_path, *rows, more="use_flagged = false\n")).test_results
    assert [one.parameter for one in kept] == ["lambda"]


def test_what_is_written_back_reads_the_same(tmp_path: Path) -> None:
    one = read(tmp_path, with_file(tmp_path, GOOD, "cone,C1,C1,,,clay,2.5,q_net,0.22,MPa,,drift"))
    file = one.evidence[0].file
    assert isinstance(file, EvidenceFile)
    (tmp_path / "tests.csv").write_text(file.text, encoding="utf-8")
    again = read_scenario(tmp_path / "case.toml").evidence[0].file
    assert isinstance(again, EvidenceFile)
    assert again.rows == file.rows


@pytest.mark.parametrize(
    ("row", "column", "said"),
    [
        (GOOD.replace("oedometer", "odometer"), "kind", "none of the choices"),
        (GOOD.replace("lambda", "lamda"), "parameter", "none of the choices"),
        (GOOD.replace("0.40", "about 0.4"), "value", "will not do"),
        (GOOD.replace("0.40", "nan"), "value", "will not do"),
        (GOOD.replace("0.40", "-0.4"), "value", "out of range"),
        (GOOD.replace(",-,", ",kPa,"), "unit", "kPa"),
        (GOOD.replace("3.0", "-1"), "depth", "will not do"),
        (GOOD.replace("0.02", "-0.02"), "standard_error", "will not do"),
        (GOOD.replace(",10,5,", ",10,,"), "x", "go together"),
    ],
)
def test_mistakes_in_a_file_are_told_with_row_and_column(
    tmp_path: Path, row: str, column: str, said: str
) -> None:
    (fault,) = faults_of(with_file(tmp_path, GOOD, row), tmp_path)
    assert fault.line == GROUND.count("\n") + 3
    assert f'tests.csv, row 3, column "{column}"' in fault.message
    assert said in fault.message


def test_every_mistake_of_a_file_at_once(tmp_path: Path) -> None:
    bad = [GOOD.replace("0.40", "x"), GOOD.replace("oedometer", "x"), "too,short"]
    faults = faults_of(with_file(tmp_path, *bad), tmp_path)
    assert [fault.message.split(",")[1].strip() for fault in faults] == ["row 2", "row 3", "row 4: 2 cells"]
    many = faults_of(with_file(tmp_path, *[GOOD.replace("0.40", "x")] * 30), tmp_path)
    assert len(many) == 21
    assert "10 more" in many[-1].message


@pytest.mark.parametrize(
    ("rows", "header", "said"),
    [([GOOD], "kind,test", "another header"), ([], HEADER, "0 rows"), ([",,"], HEADER, "0 rows")],
)
def test_files_of_another_form_are_refused(tmp_path: Path, rows: list[str], header: str, said: str) -> None:
    (fault,) = faults_of(with_file(tmp_path, *rows, header=header), tmp_path)
    assert said in fault.message


def test_missing_file_is_told(tmp_path: Path) -> None:
    (fault,) = faults_of('\n[[evidence]]\nfile = "nowhere.csv"\n', tmp_path)
    assert "no file nowhere.csv" in fault.message


TEST = '\n[[evidence]]\nkind = "oedometer"\nlayer = "clay"\ndepth = 3\nlambda = 0.4\n'


@pytest.mark.parametrize(
    ("text", "said"),
    [
        (TEST.replace('"clay"', '"caly"'), 'no layer "caly"'),
        (TEST.replace('"clay"', '"sand"'), "no clay"),
        (TEST.replace("depth = 3", "depth = 8"), "depth 8 m is not in"),
        (TEST.replace("lambda = 0.4\n", ""), "no result"),
        (TEST.replace("lambda", "su"), "does not give su"),
        (TEST.replace('kind = "oedometer"\n', ""), "kind is missing"),
        (TEST + "x = 3\n", "x and y go together"),
        (TEST.replace("0.4", "-0.4"), "too small"),
        (TEST.replace("0.4", "{ value = 0.4, error = 1 }"), 'unknown key "error"'),
        (TEST.replace("0.4", "{ standard_error = 1 }"), '"value" is missing'),
        (TEST.replace("0.4", "{ value = 0.4, standard_error = -1 }"), "too small"),
        (TEST.replace("oedometer", "plate"), "none of the choices"),
        (TEST + "colour = 1\n", 'unknown key "colour"'),
        ('\n[[test_errors]]\nkind = "vane"\nparameter = "lambda"\nerror_cov = 0.1\n', "does not give lambda"),
        ('\n[[test_errors]]\nkind = "vane"\nparameter = "su"\n', "no error is given"),
        ('\n[[test_errors]]\nkind = "vane"\nparameter = "su"\nfactor = 12\n', "does not go with"),
        ('\n[[test_errors]]\nkind = "vane"\nparameter = "su"\nerror_cov = 0\n', "too small"),
        ('\n[[test_errors]]\nkind = "vane"\nparameter = "su"\nbias_cov = 0.1\n' * 2, "already gives"),
    ],
)
def test_mistakes_in_the_scenario(text: str, said: str) -> None:
    faults = faults_of(text)
    assert any(said in fault.message for fault in faults), [fault.message for fault in faults]


def test_file_and_results_do_not_mix(tmp_path: Path) -> None:
    faults = faults_of(with_file(tmp_path, GOOD, more='kind = "vane"\nlambda = 0.3\n'), tmp_path)
    assert [fault.key for fault in faults] == ["evidence[1].kind", "evidence[1].lambda"]


def test_rows_outside_the_ground_are_told_by_file(tmp_path: Path) -> None:
    rows = [GOOD.replace("3.0", "7.9"), GOOD.replace(",clay,3.0", ",,12"), GOOD.replace("clay", "peat")]
    faults = faults_of(with_file(tmp_path, *rows), tmp_path)
    assert ["is not in" in faults[0].message, "below the last" in faults[1].message] == [True, True]
    assert 'no layer "peat"' in faults[2].message


def test_other_mistakes_do_not_hide_those_of_tests() -> None:
    faults = faults_of(TEST.replace('"clay"', '"caly"') + "\n[[limits]]\nname = 3\n")
    assert any("caly" in fault.message for fault in faults)


def test_every_default_error_has_a_source_and_covers_what_there_is() -> None:
    defaults = error_defaults()
    assert {kind for kind, _ in defaults} == set(KINDS)
    assert {parameter for _, parameter in defaults} == set(PARAMETERS)
    for key, one in defaults.items():
        assert 0.0 < one.error_cov < 1.0, key
        assert 0.0 <= one.bias_cov < 1.0, key
        assert len(one.source) > 5, key


@pytest.mark.parametrize(
    ("given", "said"),
    [
        ("{ low = 0.3, high = 0.1 }", "high is 0.1"),
        ("{ low = 0.1 }", "low and high"),
        ("{ low = 0.1, high = 9 }", "no coefficient"),
        ('{ low = "a", high = 0.4 }', "no coefficient"),
    ],
)
def test_range_of_variability_is_checked(given: str, said: str) -> None:
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(GROUND.replace("inherent_cov = 0.2", f"inherent_cov = {given}"))
    assert said in caught.value.faults[0].message


def test_range_of_variability_is_of_lognormal_laws_only() -> None:
    old = 'M = { dist = "normal", mean = 1.02, cov = 0.06 }'
    new = 'M = { dist = "normal", mean = 1.02, cov = 0.06, inherent_cov = { low = 0.1, high = 0.2 }, vertical_scale = 2 }'
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(GROUND.replace(old, new))
    assert "one number" in caught.value.faults[0].message


def test_range_of_variability_is_described() -> None:
    text = GROUND.replace("inherent_cov = 0.2", "inherent_cov = { low = 0.1, high = 0.4 }")
    (law,) = [one.distribution for one in parse_scenario(text).quantities() if one.address == "clay.lambda"]
    assert "not known, 0.1 to 0.4 (90 %)" in law.describe("-")
