"""Every key of the scenario in one table, made from the models."""

from collections.abc import Iterator
from dataclasses import dataclass
from types import NoneType, UnionType
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import BaseModel, WithJsonSchema
from pydantic.fields import FieldInfo
from pydantic_core import PydanticUndefined

from probsoil.scenario.distribution_keys import (
    FORMS,
    GREATEST_COV,
    OPTIONS,
    SPATIAL_DISTRIBUTIONS,
    SPATIAL_KEYS,
    form_text,
)
from probsoil.scenario.distributions import Distribution
from probsoil.scenario.fields import Range, Uncertain
from probsoil.scenario.models import Scenario
from probsoil.scenario.structure import CHOICES, LISTS, inner_table, keys_of, member


@dataclass(frozen=True, slots=True, kw_only=True)
class ReferenceRow:
    """One key of the scenario file.

    Attributes
    ----------
    table : str
        Where the key stands, such as ``[[layers]] clay``; empty at the top of the file.
    key : str
        Key.
    unit : str
        Base unit, ``-`` for a bare number, empty where there is none.
    allowed : str
        Range or choices.
    source : str
        Where the range comes from; empty where there is none.
    uncertain : bool
        Whether a distribution may be given.
    default : str
        Value if left out; ``required`` where there is none, empty where leaving out means none.
    meaning : str
        What the key says.
    """

    table: str
    key: str
    unit: str
    allowed: str
    source: str
    uncertain: bool
    default: str
    meaning: str


def reference_table() -> tuple[ReferenceRow, ...]:
    """Return every key with its unit, range and meaning.

    Returns
    -------
    rows : tuple of ReferenceRow
        In the order of the file format; the distributions come last.
    """
    return (*_rows("", Scenario), *_distribution_rows())


def _rows(table: str, model: type[BaseModel]) -> Iterator[ReferenceRow]:
    for key, attribute in keys_of(model).items():
        yield _row(table, key, model.model_fields[attribute])
    for key in keys_of(model):
        for title, inner in _inner(table, model, key):
            yield from _rows(title, inner)


def _inner(table: str, model: type[BaseModel], key: str) -> Iterator[tuple[str, type[BaseModel]]]:
    if model is Scenario and (key in LISTS or key in CHOICES):
        title = f"[[{key}]]" if key in LISTS else f"[{key}]"
        if key in CHOICES:
            yield from ((f"{title} {name}", choice) for name, choice in CHOICES[key][1].items())
        elif (choice := member(key, {})) is not None:
            yield title, choice
        return
    inner = inner_table(model, key)
    if inner is not None:
        yield (f"{table} {key}" if table else f"[{key}]"), inner


def _row(table: str, key: str, info: FieldInfo) -> ReferenceRow:
    field = next((part for part in info.metadata if isinstance(part, Range)), None)
    if field is None:
        return ReferenceRow(
            table=table,
            key=key,
            unit="",
            allowed=_allowed(info),
            source="",
            uncertain=False,
            default=_default(info),
            meaning=info.description or "",
        )
    return ReferenceRow(
        table=table,
        key=key,
        unit=field.unit,
        allowed=field.range_text.removesuffix(f" ({field.source})"),
        source=field.source,
        uncertain=isinstance(field, Uncertain),
        default=_default(info, field.unit),
        meaning=field.meaning,
    )


def _allowed(info: FieldInfo) -> str:
    written = next((part for part in info.metadata if isinstance(part, WithJsonSchema)), None)
    if written is not None:
        return "text" if (written.json_schema or {}).get("type") == "string" else "table"
    parts = [part for part in _alternatives(info.annotation) if part is not NoneType]
    return " | ".join(dict.fromkeys(_kind(part) for part in parts))


def _alternatives(annotation: Any) -> list[Any]:
    """Take a union and a list of choices apart; what is said of a type besides falls away."""
    origin = get_origin(annotation)
    if origin is Annotated:
        return _alternatives(get_args(annotation)[0])
    if origin in (Union, UnionType):
        return [one for part in get_args(annotation) for one in _alternatives(part)]
    return list(get_args(annotation)) if origin is Literal else [annotation]


def _kind(part: Any) -> str:
    if isinstance(part, str | int):
        return str(part)
    named = {str: "text", bool: "true | false", int: "whole number"}
    return named.get(part) or ("list" if "tuple" in str(part) else "table")


def _default(info: FieldInfo, unit: str = "") -> str:
    if info.default is PydanticUndefined:
        return "required"
    if info.default is None or info.default == () or isinstance(info.default, BaseModel):
        return ""
    if isinstance(info.default, Distribution):
        return info.default.describe(unit)
    return str(info.default).lower() if isinstance(info.default, bool) else str(info.default)


_MEANINGS = {
    "gumbel": "of largest values; cov is sd / mean, a fraction, at most {cov:g}; mode and scale in the unit",
    "gamma": "cov is sd / mean, a fraction, at most {cov:g}; shape is 1/cov squared, scale is mean / shape",
    "discrete": "each value with its probability; these add up to 1",
    "empirical": "values as found, in a list or a column of a CSV file beside the scenario, each as likely "
    'as another; smoothing "none" (default) draws them as they are, "linear" anything between neighbours; '
    "nothing beyond the least and the greatest",
    "percentiles": "value not exceeded with each percentage, rising; a smooth fit of the value (default) or "
    "its logarithm to the normal score passes through all of them; tails go on as the normal (or "
    "lognormal) law through the two outermost, or bend towards low and high where given",
}


def _distribution_rows() -> Iterator[ReferenceRow]:
    for name in FORMS:
        extra = (
            f"; also {', '.join(SPATIAL_KEYS)} for soil properties" if name in SPATIAL_DISTRIBUTIONS else ""
        )
        if name in OPTIONS:
            extra = f"; also {', '.join(OPTIONS[name])}"
        usual = "cov is sd / mean, a fraction, at most {cov:g}" if "cov" in form_text(name) else "bounds"
        yield ReferenceRow(
            table="distribution",
            key=f'dist = "{name}"',
            unit="of the parameter",
            allowed=f"{form_text(name)}{extra}",
            source="",
            uncertain=False,
            default="",
            meaning=_MEANINGS.get(name, usual).format(cov=GREATEST_COV),
        )
