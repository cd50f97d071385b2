"""The JSON Schema accepts what the reader accepts and flags what it can."""

import json
import tomllib
from pathlib import Path

import jsonschema
import pytest

from probsoil.scenario import STARTERS, parse_scenario, scenario_schema, starter_text
from probsoil.units import KINDS, tabulated_units

DEMOS = Path(__file__).parents[3] / "scenarios"


@pytest.fixture(scope="module")
def validator() -> jsonschema.Draft202012Validator:
    schema = scenario_schema()
    jsonschema.Draft202012Validator.check_schema(schema)
    return jsonschema.Draft202012Validator(schema)


def test_schema_is_plain_json_of_the_stated_dialect():
    schema = scenario_schema()
    assert schema["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    assert json.loads(json.dumps(schema)) == schema
    assert "x-field" not in json.dumps(schema)


@pytest.mark.parametrize("file", sorted(DEMOS.glob("*.toml")), ids=lambda file: file.stem)
def test_demos_pass(file, validator):
    validator.validate(tomllib.loads(file.read_text(encoding="utf-8")))


def test_starter_and_base_pass(validator, base_text):
    for kind in STARTERS:
        validator.validate(tomllib.loads(starter_text(kind)))
    validator.validate(tomllib.loads(base_text))


# Each is read without complaint, so an editor must not complain either.
ACCEPTED = [
    ("thickness = 1.5", 'thickness = "5 ft"'),
    ("thickness = 1.5", 'thickness = " +1.5e0m"'),
    ("thickness = 1.5", 'thickness = "2 yard"'),
    ("unit_weight = 17.5", 'unit_weight = "17.5 kN / m³"'),
    ("unit_weight = 17.5", 'unit_weight = "111 lbf per ft^3"'),
    ("unit_weight = 17.5", "unit_weight = 17"),
    ("M = 1.1", 'phi = "0.47 rad"'),
    ("{ cv = 3.0 }", '{ cv = "0.09 mm²/s" }'),
    ("mean = 0.12, cov = 0.20", 'mean = 0.12, cov = "20 %"'),
    ("mean = 0.12, cov = 0.20", "median = 0.12, log_sd = 0.20"),
    ("mean = 0.12, cov = 0.20", 'mean = 0.12, cov = 0.2, inherent_cov = 0.2, vertical_scale = "1 m"'),
    ("M = 1.1", 'M = { dist = "beta", alpha = 2, beta = 2, low = 1, high = 1.2 }'),
    ("M = 1.1", 'M = { dist = "triangular", low = 1, mode = 1.1, high = 1.2 }'),
    ("M = 1.1", 'M = { dist = "truncated_normal", mean = 1.1, sd = 0.1, low = 1, high = 1.2 }'),
    ("M = 1.1", 'M = { dist = "gamma", mean = 1.1, cov = 0.05 }'),
    ("M = 1.1", 'M = { dist = "gumbel", mode = 1.1, scale = 0.05 }'),
    (
        "thickness = 1.5",
        'thickness = { dist = "discrete", values = ["5 ft", 2], probabilities = [0.3, 0.7] }',
    ),
    ("M = 1.1", 'M = { dist = "empirical", values = [1.0, 1.2, 1.1], smoothing = "linear" }'),
    (
        "M = 1.1",
        'M = { dist = "percentiles", percent = [10, 90], values = [1, 1.2], low = 0.9, fit = "value" }',
    ),
    ("kappa = 0.02", "kappa = 0.02\nC_alpha = 0.01"),
    ("seed = 3", "seed = 0\nrealisations = 50\ndraws = 'sobol'\ncurrency = 'NOK'"),
]


@pytest.mark.parametrize(("old", "new"), ACCEPTED)
def test_what_the_reader_accepts_the_schema_accepts(old, new, validator, base_text):
    text = base_text.replace(old, new, 1)
    assert text != base_text
    parse_scenario(text)
    validator.validate(tomllib.loads(text))


@pytest.mark.parametrize("kind", [kind for kind in KINDS if kind != "number"])
def test_every_unit_of_the_table_passes_for_its_own_kind_only(kind):
    patterns = {other: scenario_schema()["$defs"][f"text_of_{other.replace(' ', '_')}"] for other in KINDS}
    for unit in tabulated_units(kind):
        jsonschema.validate(f"3.5 {unit}", patterns[kind])
        for other in KINDS:
            if other != kind:
                with pytest.raises(jsonschema.ValidationError, match="does not match"):
                    jsonschema.validate(f"3.5 {unit}", patterns[other])


FLAGGED = [
    ("seed = 3", "sed = 3"),
    ("seed = 3", "seed = -3"),
    ("horizon = 30", "horizon = 0"),
    ('base = "drained"', 'base = "dry"'),
    ("thickness = 1.5", "thickness = -1.5"),
    ("thickness = 1.5", 'thickness = "1.5"'),
    ("thickness = 1.5", 'thickness = "1,5 m"'),
    ("thickness = 1.5", 'thickness = "1.5 kPa"'),
    ("unit_weight = 17.5", 'unit_weight = "17.5 kN/m2"'),
    ("mean = 0.12, cov = 0.20", "mean = 0.12, cov = 3"),
    ("mean = 0.12, cov = 0.20", "mean = 0.12"),
    ("mean = 0.12, cov = 0.20", "mean = 0.12, cov = 0.2, sd = 0.1"),
    ("mean = 0.12, cov = 0.20", "mean = 0.12, cov = 0.2, inherent_cov = 0.1"),
    ("mean = 7.0, sd = 0.6", "mean = 7.0, sd = 0.6, inherent_cov = 0.1, vertical_scale = 1"),
    ('dist = "lognormal", mean = 0.12', 'dist = "weibull", mean = 0.12'),
    ("M = 1.1", 'M = { dist = "discrete", values = [1, 1.2], probabilities = [0, 1] }'),
    ("M = 1.1", 'M = { dist = "empirical", values = [1.1] }'),
    ("M = 1.1", 'M = { dist = "empirical", values = [1, 1.2], smoothing = "kernel" }'),
    ("M = 1.1", 'M = { dist = "percentiles", percent = [5, 100], values = [1, 1.2] }'),
    ("kappa = 0.02", "kappa = 0.02\nC_alpha = 0.01\nC_alpha_ratio = 0.04"),
    ("M = 1.1", "M = 1.1\nphi = 27"),
    ("M = 1.1\n", ""),
    ("{ stress = 90 }", "{ stress = 90, ocr = 2 }"),
    ("{ cv = 3.0 }", "{ cv = 3.0, k = 1e-9, ck = 1 }"),
    ("{ cv = 3.0 }", "{ k = 1e-9 }"),
    ('soil = "granular"', 'soil = "gravel"'),
    ("height = -0.5\n", ""),
    ('between = ["61 weeks", "30 years"]', 'between = ["61 weeks"]'),
    ("not_less_than = 1.0", "not_more_than = 1.0"),
    ("rank_correlation = 0.6", "rank_correlation = 1.2"),
    ('name = "crust"', 'name = "cr.ust"'),
    ("[load]", "[drains]\nspacing = 1\n[load]"),
]


@pytest.mark.parametrize(("old", "new"), FLAGGED)
def test_mistakes_an_editor_can_flag(old, new, validator, base_text):
    text = base_text.replace(old, new, 1)
    assert text != base_text
    with pytest.raises(
        jsonschema.ValidationError,
        match=r"is not valid|does not match|required|unexpected|less than|greater than|not one of|expected",
    ):
        validator.validate(tomllib.loads(text))
