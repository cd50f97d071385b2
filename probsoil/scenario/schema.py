"""JSON Schema of the scenario, from which editors complete and check while one types.

It accepts whatever the reader accepts. What only the reader can see (numbers inside text with a
unit, and keys that must agree with each other) it lets pass.
"""

import re
from typing import Any

from pydantic import BaseModel
from pydantic.json_schema import GenerateJsonSchema, JsonSchemaValue
from pydantic_core import core_schema

from probsoil.scenario.distribution_keys import (
    CHOICE_KEYS,
    FORMS,
    GREATEST_COV,
    GREATEST_LOG_SD,
    NUMBER_KEYS,
    SPATIAL_DISTRIBUTIONS,
    SPATIAL_KEYS,
    entry_shape,
    own_keys,
    settling_keys,
)
from probsoil.scenario.distributions import Constant, Normal
from probsoil.scenario.fields import FIELD_MARK, RATIO_PATTERN, Range, Ratio, Uncertain
from probsoil.scenario.list_entries import LEAST_PERCENT
from probsoil.scenario.models import Scenario
from probsoil.units import KINDS, NUMBER_PATTERN, Kind, has_other_units, tabulated_units

DIALECT = "https://json-schema.org/draft/2020-12/schema"
_NUMBER_BOUNDS: dict[str, dict[str, float]] = {
    "cov": {"exclusiveMinimum": 0.0, "maximum": GREATEST_COV},
    "inherent_cov": {"exclusiveMinimum": 0.0, "maximum": GREATEST_COV},
    "log_sd": {"exclusiveMinimum": 0.0, "maximum": GREATEST_LOG_SD},
    "sd": {"exclusiveMinimum": 0.0},
    "median": {"exclusiveMinimum": 0.0},
    "alpha": {"exclusiveMinimum": 0.0},
    "shape": {"exclusiveMinimum": 0.0},
    "scale": {"exclusiveMinimum": 0.0},
    "probabilities": {"exclusiveMinimum": 0.0, "maximum": 1.0},
    "percent": {"minimum": LEAST_PERCENT, "maximum": 100.0 - LEAST_PERCENT},
    "beta": {"exclusiveMinimum": 0.0},
    "vertical_scale": {"exclusiveMinimum": 0.0},
    "horizontal_scale": {"exclusiveMinimum": 0.0},
}

_INHERENT_RANGE: dict[str, Any] = {
    "type": "object",
    "properties": {key: {"type": "number", "exclusiveMinimum": 0.0} for key in ("low", "high")},
    "required": ["low", "high"],
    "additionalProperties": False,
}


class _Generator(GenerateJsonSchema):
    """Pydantic's generator, with defaults written as a user would write them."""

    def encode_default(self, dft: Any) -> Any:
        if isinstance(dft, Constant):
            return dft.value
        if isinstance(dft, Normal):
            return {"dist": "normal", "mean": dft.mean, "sd": dft.sd}
        if isinstance(dft, BaseModel):
            return {}
        return super().encode_default(dft)

    def nullable_schema(self, schema: core_schema.NullableSchema) -> JsonSchemaValue:
        """TOML has no null: a key is there or it is not."""
        return self.generate_inner(schema["schema"])


def scenario_schema() -> dict[str, Any]:
    """Return the JSON Schema (draft 2020-12) of a scenario file.

    Returns
    -------
    schema : dict
        Made anew from the models at every call.
    """
    schema = Scenario.model_json_schema(by_alias=True, schema_generator=_Generator)
    written: dict[str, Any] = _with_fields(schema)
    tables = {
        _table_name(kind, spatial=spatial): (kind, spatial) for kind in KINDS for spatial in (False, True)
    }
    for name in sorted(_references(written) & tables.keys()):
        kind, spatial = tables[name]
        written["$defs"][name] = _distribution(kind, spatial=spatial)
    for kind in KINDS:
        written["$defs"][_text_name(kind)] = {"type": "string", "pattern": text_pattern(kind)}
    return {"$schema": DIALECT, **written}


def text_pattern(kind: Kind) -> str:
    """Return the pattern of a text that gives a number with its unit.

    Parameters
    ----------
    kind : str
        Kind of quantity.

    Returns
    -------
    pattern : str
        Regular expression. Where unusual units are understood as well, only the
        usual units of other kinds are ruled out.
    """
    own = tabulated_units(kind)
    if not has_other_units(kind):
        return rf"^\s*{NUMBER_PATTERN}\s*(?:{_alternatives(list(own))})\s*$"
    others = [unit for other in KINDS for unit in tabulated_units(other) if unit not in own]
    return rf"^\s*{NUMBER_PATTERN}\s*(?!(?:{_alternatives(others)})\s*$)[A-Za-z_µμ][^,]*$"


def _alternatives(units: list[str]) -> str:
    return "|".join(re.escape(unit) for unit in sorted(set(units)))


def _text_name(kind: Kind) -> str:
    return f"text of {kind}".replace(" ", "_")


def _table_name(kind: Kind, *, spatial: bool) -> str:
    return f"distribution of {kind}{' varying from point to point' if spatial else ''}".replace(" ", "_")


def _reference(name: str) -> dict[str, str]:
    return {"$ref": f"#/$defs/{name}"}


def _references(node: Any) -> set[str]:
    if isinstance(node, list):
        return set().union(*(_references(item) for item in node))
    if not isinstance(node, dict):
        return set()
    own = {str(node["$ref"]).rpartition("/")[2]} if "$ref" in node else set()
    return own.union(*(_references(value) for value in node.values()))


def _with_fields(node: Any) -> Any:
    """Put the schema of each field where its mark stands."""
    if isinstance(node, list):
        return [_with_fields(item) for item in node]
    if not isinstance(node, dict):
        return node
    copy = {key: _with_fields(value) for key, value in node.items() if key != FIELD_MARK}
    if FIELD_MARK in node:
        copy |= _field(node[FIELD_MARK])
    return copy


def _field(field: Range) -> dict[str, Any]:
    bounds = {
        "exclusiveMinimum" if field.open_low else "minimum": field.low,
        "exclusiveMaximum" if field.open_high else "maximum": field.high,
    }
    choices: list[dict[str, Any]] = [{"type": "number", **bounds}, _reference(_text_name(field.kind))]
    if isinstance(field, Ratio):
        choices[1] = {"type": "string", "pattern": RATIO_PATTERN}
    if isinstance(field, Uncertain):
        choices.append(_reference(_table_name(field.kind, spatial=field.spatial)))
    return {"description": f"{field.meaning}; {field.range_text}", "anyOf": choices}


def _distribution(kind: Kind, *, spatial: bool) -> dict[str, Any]:
    return {"anyOf": [_one_distribution(name, kind, spatial=spatial) for name in FORMS]}


def _one_distribution(name: str, kind: Kind, *, spatial: bool) -> dict[str, Any]:
    keys = own_keys(name)
    table: dict[str, Any] = {
        "type": "object",
        "properties": {"dist": {"const": name}, **{key: _entry(key, kind) for key in keys}},
        "required": ["dist"],
        "additionalProperties": False,
        "oneOf": [_form(form, settling_keys(name)) for form in FORMS[name]],
    }
    if spatial and name in SPATIAL_DISTRIBUTIONS:
        table["properties"] |= {key: _number(key, kind) for key in SPATIAL_KEYS}
        if name == "lognormal":
            table["properties"]["inherent_cov"]["anyOf"].append(_INHERENT_RANGE)
        table["dependentRequired"] = {
            "inherent_cov": ["vertical_scale"],
            "vertical_scale": ["inherent_cov"],
            "horizontal_scale": ["inherent_cov"],
        }
    return table


def _form(form: tuple[str, ...], keys: tuple[str, ...]) -> dict[str, Any]:
    others = [key for key in keys if key not in form]
    rule: dict[str, Any] = {"required": list(form)}
    if others:
        rule["not"] = {"anyOf": [{"required": [key]} for key in others]}
    return rule


def _entry(key: str, kind: Kind) -> dict[str, Any]:
    shape = entry_shape(key)
    if shape == "number":
        return _number(key, kind)
    if shape == "list":
        return {"type": "array", "minItems": 2, "items": _number(key, kind)}
    return {"enum": list(CHOICE_KEYS[key])} if shape == "choice" else {"type": "string", "minLength": 1}


def _number(key: str, kind: Kind) -> dict[str, Any]:
    own = NUMBER_KEYS.get(key, kind)
    return {"anyOf": [{"type": "number", **_NUMBER_BOUNDS.get(key, {})}, _reference(_text_name(own))]}
