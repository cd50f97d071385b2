"""How the tables of a scenario hang together, as read off their classes."""

from typing import get_args

from pydantic import BaseModel

from probsoil.scenario.evidence import Evidence, TestErrors
from probsoil.scenario.further_loads import (
    FurtherArea,
    FurtherCircle,
    FurtherEmbankment,
    FurtherRectangle,
    FurtherStrip,
)
from probsoil.scenario.layers import ClayLayer, GranularLayer
from probsoil.scenario.limits import (
    AddedFillLimit,
    AngularDistortionLimit,
    BearingSafetyLimit,
    ConsolidationLimit,
    ConsolidationTimeLimit,
    DifferentialSettlementLimit,
    SettlementLimit,
    SlipSafetyLimit,
)
from probsoil.scenario.loads import AreaLoad, CircleLoad, EmbankmentLoad, RectangleLoad, Stage, StripLoad
from probsoil.scenario.models import Dependence
from probsoil.scenario.stations import Station

LISTS = (
    "layers",
    "further_loads",
    "stages",
    "stations",
    "dependence",
    "evidence",
    "test_errors",
    "limits",
)
# Tables of more than one class: the key that tells the classes apart, and the classes.
CHOICES: dict[str, tuple[str, dict[str, type[BaseModel]]]] = {
    "layers": ("soil", {"clay": ClayLayer, "granular": GranularLayer}),
    "load": (
        "shape",
        {
            "embankment": EmbankmentLoad,
            "area": AreaLoad,
            "strip": StripLoad,
            "rectangle": RectangleLoad,
            "circle": CircleLoad,
        },
    ),
    "further_loads": (
        "shape",
        {
            "embankment": FurtherEmbankment,
            "area": FurtherArea,
            "strip": FurtherStrip,
            "rectangle": FurtherRectangle,
            "circle": FurtherCircle,
        },
    ),
    "limits": (
        "quantity",
        {
            "settlement": SettlementLimit,
            "differential_settlement": DifferentialSettlementLimit,
            "angular_distortion": AngularDistortionLimit,
            "slip_safety": SlipSafetyLimit,
            "bearing_safety": BearingSafetyLimit,
            "degree_of_consolidation": ConsolidationLimit,
            "time_to_consolidation": ConsolidationTimeLimit,
            "added_fill": AddedFillLimit,
        },
    ),
}
_PLAIN: dict[str, type[BaseModel]] = {
    "stages": Stage,
    "stations": Station,
    "dependence": Dependence,
    "evidence": Evidence,
    "test_errors": TestErrors,
}


def keys_of(model: type[BaseModel]) -> dict[str, str]:
    """Return the keys of a table as written in the file.

    Parameters
    ----------
    model : type
        Class of the table.

    Returns
    -------
    keys : dict of str to str
        Key in the file to name of the attribute.
    """
    return {info.alias or attribute: attribute for attribute, info in model.model_fields.items()}


def member(key: str, raw: object) -> type[BaseModel] | None:
    """Return the class of one table of a list or union, told by its own key.

    Parameters
    ----------
    key : str
        Key of the list or table at the top of the scenario.
    raw : object
        The table as parsed.

    Returns
    -------
    model : type or None
        None where it cannot be told.
    """
    if not isinstance(raw, dict):
        return None
    if key in _PLAIN:
        return _PLAIN[key]
    tag, models = CHOICES[key]
    name = raw.get(tag)
    return models.get(name) if isinstance(name, str) else None


def inner_table(model: type[BaseModel], key: str) -> type[BaseModel] | None:
    """Return the class of the table that stands under a key.

    Parameters
    ----------
    model : type
        Class of the outer table.
    key : str
        Key in the file.

    Returns
    -------
    inner : type or None
        None where the value is no table, or one of several classes.
    """
    attribute = keys_of(model).get(key)
    if attribute is None:
        return None
    annotation = model.model_fields[attribute].annotation
    parts = (annotation, *get_args(annotation))
    tables = [part for part in parts if isinstance(part, type) and issubclass(part, BaseModel)]
    return tables[0] if len(tables) == 1 else None
