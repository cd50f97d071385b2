"""From pydantic's errors to slips in the words of the field."""

from typing import Any, cast

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails

from probsoil.scenario.models import Scenario
from probsoil.scenario.slips import Path, Slip, did_you_mean
from probsoil.scenario.stations import GREATEST_COUNT
from probsoil.scenario.structure import CHOICES, LISTS, inner_table, keys_of, member

_EXAMPLES = {
    "preconsolidation": "preconsolidation = { ocr = 1.5 }",
    "permeability": "permeability = { cv = 1.5 }",
    "strength": "strength = { S = 0.25, m = 0.8 }",
}
# How each section of the file that must be there begins.
SECTIONS = {
    "site": "[site]\nwater_table = 1.0  # m below ground level; goes with base",
    "layers": '[[layers]]\nname = "soft clay"  # such a block for each layer, from ground level down',
    "load": '[load]\nshape = "embankment"  # goes with crest_width, side_slope and the fill',
    "stages": '[[stages]]\nname = "first lift"  # such a block for each stage, with height, start, end',
    "limits": '[[limits]]\nname = "residual settlement"  # such a block for each limit',
}
_NAME_RULE = "text of at most 60 characters, without a dot and without a blank at either end"
_LABEL_RULE = "text of at most 80 characters, without a blank at either end"


def slips_of(error: ValidationError, data: dict[str, Any]) -> list[Slip]:
    """Return the slips behind a validation error.

    Parameters
    ----------
    error : ValidationError
        As raised for the whole scenario.
    data : dict
        Data that was validated, all of its keys known.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    return [_slip(detail, data) for detail in error.errors(include_url=False)]


def is_absolute(error: ValidationError) -> bool:
    """Return whether an error comes from the checks on the whole scenario.

    Parameters
    ----------
    error : ValidationError
        As raised for the whole scenario.

    Returns
    -------
    absolute : bool
        True where every key by itself was readable.
    """
    return all(detail.get("ctx", {}).get("absolute", False) for detail in error.errors(include_url=False))


def _slip(detail: ErrorDetails, data: dict[str, Any]) -> Slip:
    context = detail.get("ctx", {})
    path, model = _place(detail["loc"], data)
    if detail["type"] == "slip":
        slip = cast("Slip", context["slip"])
        return slip if context["absolute"] else slip.below(path[: len(path) - len(slip.path)])
    if detail["type"] == "missing":
        key = str(path[-1])
        example = SECTIONS.get(key) if model is Scenario else None
        return Slip(
            path=path[:-1],
            message=f'{"key" if example is None else "section"} "{key}" is missing',
            allowed=_description(model, key),
            hint=None if example is None else f"such as\n{example}",
            wanting=(key,),
        )
    if detail["type"].startswith("union_tag"):
        return _tag(path, data)
    return _plain(detail, path, context)


def _place(loc: Path, data: dict[str, Any]) -> tuple[Path, type[BaseModel]]:
    """Take the class names pydantic inserts out of a location; say which table it is in."""
    model: type[BaseModel] = Scenario
    first = str(loc[0]) if loc else ""
    depth = 2 if first in LISTS else 1
    if (first in LISTS or first in CHOICES) and len(loc) > depth:
        model = member(first, _at(data, loc[:depth])) or Scenario
        loc = (*loc[:depth], *loc[depth + 1 :]) if first in CHOICES else loc
    for part in loc[:-1]:
        model = inner_table(model, str(part)) or model
    return loc, model


def _at(data: Any, path: Path) -> Any:
    for part in path:
        data = data[part]
    return data


def _description(model: type[BaseModel], key: str) -> str | None:
    attribute = keys_of(model).get(key)
    if attribute is None:
        return None
    info = model.model_fields[attribute]
    meanings = [part.meaning for part in info.metadata if hasattr(part, "meaning")]
    return meanings[0] if meanings else info.description


def _tag(path: Path, data: dict[str, Any]) -> Slip:
    top = str(path[0])
    tag, models = CHOICES[top]
    table = _at(data, path)
    allowed = "one of " + ", ".join(models)
    if not isinstance(table, dict):
        return Slip(path=path, message="this is not a table", allowed=f"a table with the key {tag}")
    if tag not in table:
        return Slip(path=path, message=f'key "{tag}" is missing', allowed=allowed, wanting=(tag,))
    value = table[tag]
    hint = did_you_mean(value, list(models)) if isinstance(value, str) else None
    return Slip(path=(*path, tag), message=f"unknown {tag}", allowed=allowed, hint=hint)


def _plain(detail: ErrorDetails, path: Path, context: dict[str, Any]) -> Slip:
    kind, key = detail["type"], path[-1] if path else ""
    if kind == "literal_error":
        return _choice(detail, path, context)
    if kind in ("model_type", "model_attributes_type"):
        example = f"[[{path[0]}]]" if isinstance(key, int) else _EXAMPLES.get(key, f"[{key}]")
        return Slip(path=path, message="this is not a table", allowed="a table", hint=f"such as {example}")
    if kind in ("tuple_type", "list_type") and key in LISTS:
        return Slip(
            path=path,
            message="this is not a list of tables",
            allowed="a list of tables",
            hint=f"head each with [[{key}]]",
        )
    if kind in ("string_type", "string_too_short", "string_too_long", "string_pattern_mismatch"):
        return Slip(path=path, message=_text_message(kind, str(key)), allowed=_text_rule(path))
    if kind == "bool_type":
        return Slip(
            path=path, message="this is neither true nor false", allowed="true or false, without quotes"
        )
    if kind.startswith(("int_", "greater_than", "less_than")):
        return Slip(path=path, message="this is no such whole number", allowed=_integer_rule(str(key)))
    return Slip(path=path, message=detail["msg"])


def _choice(detail: ErrorDetails, path: Path, context: dict[str, Any]) -> Slip:
    expected = str(context.get("expected", ""))
    choices = [part.strip("'") for part in expected.replace(" or ", ", ").split(", ")]
    given = detail["input"]
    hint = did_you_mean(given, choices) if isinstance(given, str) else None
    message = (
        "this is none of the choices" if len(choices) > 1 else f"this version reads {path[-1]} = {expected}"
    )
    return Slip(path=path, message=message, allowed=" or ".join(choices), hint=hint)


def _text_message(kind: str, key: str) -> str:
    if kind == "string_type":
        return "this is not text; put it in quotes"
    if kind == "string_too_short":
        return f"the {key} is empty"
    return f"the {key} is too long" if kind == "string_too_long" else f"this will not do as a {key}"


def _text_rule(path: Path) -> str:
    if path[-1] == "currency":
        return "up to 8 characters without a blank, such as EUR"
    return _NAME_RULE if path[0] in ("layers", "further_loads", "stages") else _LABEL_RULE


def _integer_rule(key: str) -> str:
    if key == "seed":
        return "a whole number from 0 to 9223372036854775807"
    if key == "number":
        return f"a whole number from 2 to {GREATEST_COUNT}"
    return "a whole number from 1 to 100000000"
