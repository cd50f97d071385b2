"""A scenario read in part, so that checks can go on where single keys failed."""

from collections.abc import Set as AbstractSet
from typing import Any, cast

from pydantic import BaseModel, ValidationError

from probsoil.scenario.base import UNREAD
from probsoil.scenario.fields import Range
from probsoil.scenario.limits import TIME
from probsoil.scenario.models import Dependence, Scenario
from probsoil.scenario.slips import Path
from probsoil.scenario.structure import CHOICES, LISTS, inner_table, keys_of, member


def partial_scenario(data: dict[str, Any], failed: AbstractSet[Path]) -> Scenario:
    """Return a scenario in which whatever could not be read is `UNREAD`.

    Parameters
    ----------
    data : dict
        Parsed file, all of its keys known.
    failed : set of tuple
        Paths of the values that were refused.

    Returns
    -------
    scenario : Scenario
        Not validated; lists that could not be read are empty.
    """
    scenario = _table(Scenario, data, (), failed)
    emptied = {key: () for key in LISTS if getattr(scenario, key) is UNREAD}
    return cast("Scenario", scenario.model_copy(update=emptied))


def _table(model: type[BaseModel], raw: dict[str, Any], path: Path, failed: AbstractSet[Path]) -> BaseModel:
    values: dict[str, Any] = {}
    for key, attribute in keys_of(model).items():
        info = model.model_fields[attribute]
        if key in raw:
            values[attribute] = _value(model, key, raw[key], (*path, key), failed)
        else:
            values[attribute] = UNREAD if info.is_required() else info.get_default()
    # By attribute name or alias alike; what is missing here was defaulted above.
    given = {attribute for key, attribute in keys_of(model).items() if key in raw}
    return model.model_construct(given, **values)


def _value(model: type[BaseModel], key: str, raw: Any, path: Path, failed: AbstractSet[Path]) -> Any:
    if path in failed:
        return UNREAD
    if model is Scenario and key in LISTS:
        return tuple(_item(key, item, (*path, position), failed) for position, item in enumerate(raw))
    if model is Scenario and key in CHOICES:
        return _item(key, raw, path, failed)
    for part in model.model_fields[keys_of(model)[key]].metadata:
        if isinstance(part, Range):
            return _read(part, raw)
    table = inner_table(model, key)
    if table is not None:
        return _table(table, raw, path, failed)
    return _between(model, raw, path, failed) if key == "between" else raw


def _item(key: str, raw: Any, path: Path, failed: AbstractSet[Path]) -> Any:
    model = member(key, raw)
    return UNREAD if model is None or path in failed else _table(model, raw, path, failed)


def _between(model: type[BaseModel], raw: Any, path: Path, failed: AbstractSet[Path]) -> Any:
    if any(bad[: len(path)] == path for bad in failed):
        return UNREAD
    return tuple(raw) if model is Dependence else tuple(_read(TIME, time) for time in raw)


def _read(field: Range, raw: object) -> object:
    try:
        return field.read(raw)
    except ValidationError:
        return UNREAD
