"""The numbers of a scenario that may be uncertain, each under its address."""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, get_args

from pydantic import BaseModel

from probsoil.scenario.base import UNREAD
from probsoil.scenario.distributions import Constant, Distribution
from probsoil.scenario.fields import Uncertain

if TYPE_CHECKING:
    from probsoil.scenario.models import Scenario


@dataclass(frozen=True, slots=True, kw_only=True)
class Quantity:
    """One number of a scenario that may be uncertain.

    Attributes
    ----------
    address : str
        Such as ``soft clay.lambda``.
    unit : str
        Base unit, ``-`` for none.
    distribution : Distribution
        As given, in the base unit.
    low, high : float, [base unit]
        Physical range.
    meaning : str
        What the number is.
    averaging_length : float or None, [m]
        Mean thickness of the layer over which point-to-point variability averages out.
    in_series : bool
        Whether that average is harmonic (water passes through the parts of a layer in turn).
    of_works : bool
        Whether it says what is built rather than what the ground is like.
    """

    address: str
    unit: str
    distribution: Distribution
    low: float
    high: float
    meaning: str
    averaging_length: float | None = None
    in_series: bool = False
    of_works: bool = False

    @property
    def is_uncertain(self) -> bool:
        """Whether the number varies."""
        return not isinstance(self.distribution, Constant)


def uncertain_fields(model: type[BaseModel]) -> Iterator[tuple[str, str, Uncertain]]:
    """Yield the fields of a table that may be uncertain, in their order.

    Parameters
    ----------
    model : type
        Class of the table.

    Yields
    ------
    attribute : str
        Name of the attribute.
    key : str
        Key in the file.
    field : Uncertain
        Its range and meaning.
    """
    for attribute, info in model.model_fields.items():
        for part in info.metadata:
            if isinstance(part, Uncertain):
                yield attribute, info.alias or attribute, part


def quantities_of(scenario: "Scenario") -> tuple[Quantity, ...]:
    """Return the numbers of a scenario that are, or may be, uncertain.

    Parameters
    ----------
    scenario : Scenario
        Scenario, read in full or in part.

    Returns
    -------
    quantities : tuple of Quantity
        In the order site, layers from the top, load, further loads, stages, drains, model error; of those
        that say what is built only the uncertain ones.
    """
    return tuple(one for one in all_quantities(scenario) if one.is_uncertain or not one.of_works)


def all_quantities(scenario: "Scenario") -> tuple[Quantity, ...]:
    """Return every number of a scenario that may be uncertain, and plain ones that say what is built.

    Parameters
    ----------
    scenario : Scenario
        Scenario, read in full or in part.

    Returns
    -------
    quantities : tuple of Quantity
        In the same order.
    """
    found = list(_of_table("site", scenario.site, None))
    for layer in scenario.layers:
        if isinstance(layer, BaseModel) and isinstance(layer.name, str):
            known = isinstance(layer.thickness, Distribution)
            found += _of_table(layer.name, layer, layer.thickness.expectation if known else None)
    found += _of_table("load", scenario.load, None)
    for load in scenario.further_loads:
        if isinstance(load, BaseModel) and isinstance(load.name, str):
            found += _of_table(further_address(load.name), load, None)
    for stage in scenario.stages:
        if isinstance(stage, BaseModel) and isinstance(stage.name, str):
            found += [_of_one_sign(one) for one in _of_table(stage_address(stage.name), stage, None)]
    found += _of_table("drains", scenario.drains, None)
    found += _of_table("model_error", scenario.model_error, None)
    return tuple(found)


def further_address(name: str) -> str:
    """Return the first part of the addresses of a further load.

    Parameters
    ----------
    name : str
        Of the load.

    Returns
    -------
    start : str
        Such as ``further_loads.tank B``.
    """
    return f"further_loads.{name}"


def stage_address(name: str) -> str:
    """Return the first part of the addresses of a stage.

    Parameters
    ----------
    name : str
        Of the stage.

    Returns
    -------
    start : str
        Such as ``stages.first lift``.
    """
    return f"stages.{name}"


def _of_one_sign(amount: Quantity) -> Quantity:
    """Return what a stage adds or takes off with only those values that do so."""
    adds = amount.distribution.expectation > 0.0
    return replace(amount, low=0.0) if adds else replace(amount, high=0.0)


def possible_addresses(name: str, model: type[BaseModel]) -> tuple[str, ...]:
    """Return every address that a table of one class could have.

    Parameters
    ----------
    name : str
        First part of the address.
    model : type
        Class of the table.

    Returns
    -------
    addresses : tuple of str
        In the order of the fields.
    """
    found: list[str] = []
    for attribute in model.model_fields:
        found += _addresses_of_field(name, model, attribute)
    return tuple(found)


def unread_addresses(name: str, table: BaseModel) -> tuple[str, ...]:
    """Return the addresses of a table whose values could not be read.

    Parameters
    ----------
    name : str
        First part of the address.
    table : Table
        Read in part.

    Returns
    -------
    addresses : tuple of str
        In the order of the fields.
    """
    found: list[str] = []
    for attribute in type(table).model_fields:
        value = getattr(table, attribute)
        if value is UNREAD:
            found += _addresses_of_field(name, type(table), attribute)
        elif isinstance(value, BaseModel):
            found += unread_addresses(name, value)
    return tuple(found)


def _addresses_of_field(name: str, model: type[BaseModel], attribute: str) -> list[str]:
    info = model.model_fields[attribute]
    found = [
        f"{name}.{part.symbol or info.alias or attribute}"
        for part in info.metadata
        if isinstance(part, Uncertain)
    ]
    for part in (info.annotation, *get_args(info.annotation)):
        if isinstance(part, type) and issubclass(part, BaseModel):
            found += possible_addresses(name, part)
    return found


def _of_table(name: str, table: object, averaging_length: float | None) -> Iterator[Quantity]:
    """Walk one table and the tables within it, each under the same name."""
    if not isinstance(table, BaseModel):
        return
    model = type(table)
    known = {attribute: (key, field) for attribute, key, field in uncertain_fields(model)}
    for attribute in model.model_fields:
        value = getattr(table, attribute)
        if isinstance(value, BaseModel):
            yield from _of_table(name, value, averaging_length)
        elif attribute in known and isinstance(value, Distribution):
            key, field = known[attribute]
            yield Quantity(
                address=f"{name}.{field.symbol or key}",
                unit=field.unit,
                distribution=value,
                low=field.low,
                high=field.high,
                meaning=field.meaning,
                averaging_length=averaging_length,
                in_series=field.in_series,
                of_works=field.of_works,
            )
