"""What the numbers of an assessment depend on, written out so that two runs can be compared in words."""

import hashlib
from collections.abc import Iterator
from dataclasses import fields, is_dataclass
from importlib import metadata

from pydantic import BaseModel

from probsoil import __version__
from probsoil.assessment.evaluation import Study
from probsoil.campaign import Identity, campaign_identity, source_digest
from probsoil.scenario import Scenario
from probsoil.scenario.evidence_file import EvidenceFile

_SINGULAR = {"layers": "layer", "stages": "stage", "stations": "station", "limits": "limit"}
_LISTED = 12  # numbers of a list that a message shows; longer ones are told apart by a digest
_PACKAGES = ("numpy", "scipy", "numba")


def identity_of(study: Study) -> Identity:
    """Return what tells the campaign of a study from every other whose numbers would differ.

    Parameters
    ----------
    study : Study
        Scenario with what the caller overrode, made ready.

    Returns
    -------
    Identity
        Every value of the scenario, the versions of what computes, and the program's own code.
    """
    versions = {name: metadata.version(name) for name in _PACKAGES}
    drawn = {"number of realisations drawn": study.points.n}
    stated = stated_values(study.scenario) | drawn | {"probsoil": __version__} | versions
    return campaign_identity(stated, **{"the_program's_own_code": source_digest()})


def stated_values(scenario: Scenario) -> dict[str, object]:
    """Return every value of a scenario by the place it has in the file.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    dict of str to object
        Numbers in base units, defaults included, what is not given left out; such as
        ``load.crest_width`` or ``layer "soft clay": lambda.median``.
    """
    values: dict[str, object] = {}
    for key, value in _entries(scenario):
        if isinstance(value, tuple) and value and isinstance(value[0], BaseModel):
            values |= _listed(key, value)
        else:
            values |= dict(_leaves(key, value))
    return values


def _listed(key: str, tables: tuple[BaseModel, ...]) -> dict[str, object]:
    """Return the values of a list of tables, each under its name, and the order of the names."""
    names = [getattr(table, "name", None) for table in tables]
    if None in names:
        heads = [f"{key}[{place}]" for place in range(1, len(tables) + 1)]
        values: dict[str, object] = {}
    else:
        heads = [f'{_SINGULAR.get(key, key)} "{name}":' for name in names]
        values = {f"order of {key}": ", ".join(map(str, names))}
    for head, table in zip(heads, tables, strict=True):
        mark = " " if head.endswith(":") else "."
        for inner, value in _entries(table):
            values |= {f"{head}{mark}{place}": leaf for place, leaf in _leaves(inner, value)}
    return values


def _leaves(place: str, value: object) -> Iterator[tuple[str, object]]:
    """Yield the plain values below a place; distributions are opened, so that none is rounded."""
    if value is None:
        return
    if isinstance(value, BaseModel):
        for key, inner in _entries(value):
            yield from _leaves(f"{place}.{key}", inner)
    elif is_dataclass(value) and hasattr(value, "kind"):
        if [one.name for one in fields(value)] == ["value"]:
            yield place, getattr(value, "value", None)
            return
        yield f"{place}.dist", value.kind
        for one in fields(value):
            yield from _leaves(f"{place}.{one.name}", getattr(value, one.name))
    elif isinstance(value, EvidenceFile | tuple):
        yield place, _listing(value)
    else:
        yield place, value


def _listing(value: "EvidenceFile | tuple[object, ...]") -> object:
    """Return what tells a long list from others without showing all of it."""
    rows, what = (value.rows, "results") if isinstance(value, EvidenceFile) else (value, "values")
    if what == "values" and len(rows) <= _LISTED:
        return value
    return f"{len(rows)} {what} of digest {hashlib.sha256(repr(rows).encode()).hexdigest()[:16]}"


def _entries(table: BaseModel) -> Iterator[tuple[str, object]]:
    """Yield key in the file and value of a table."""
    for attribute, info in type(table).model_fields.items():
        yield info.alias or attribute, getattr(table, attribute)
