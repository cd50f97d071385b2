"""The same site looked at from one of its further loads: that load becomes the one that is assessed."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import dist
from typing import TYPE_CHECKING, Any, TypeVar

from probsoil.errors import ParameterError
from probsoil.scenario.base import Table
from probsoil.scenario.further_loads import (
    FurtherArea,
    FurtherCircle,
    FurtherEmbankment,
    FurtherLoad,
    FurtherRectangle,
    FurtherStrip,
)
from probsoil.scenario.loads import AreaLoad, CircleLoad, EmbankmentLoad, Load, RectangleLoad, StripLoad
from probsoil.scenario.quantities import further_address
from probsoil.scenario.stations import LEAST_APART

if TYPE_CHECKING:
    from probsoil.scenario.models import Scenario

_PAIRS: dict[type[Table], type[Table]] = {
    EmbankmentLoad: FurtherEmbankment,
    AreaLoad: FurtherArea,
    StripLoad: FurtherStrip,
    RectangleLoad: FurtherRectangle,
    CircleLoad: FurtherCircle,
}
_OWN = {further: own for own, further in _PAIRS.items()}
_Value = TypeVar("_Value")


@dataclass(frozen=True, slots=True, kw_only=True)
class OtherLoad:
    """A scenario in which one of the further loads is the one that is assessed.

    Attributes
    ----------
    name : str
        Of the further load.
    place : tuple of float, [m]
        Its centre, from that of the load of the file.
    scenario : Scenario
        The same site with that load as its ``load`` and that of the file among its further loads; without
        drains and with no station but one at the centre, if there is one; with the limits that look at that
        load.
    addresses : tuple of (str, str)
        First parts of addresses in the file and in `scenario`, dot included, where they differ.
    """

    name: str
    place: tuple[float, float]
    scenario: "Scenario"
    addresses: tuple[tuple[str, str], ...]

    def address(self, given: str) -> str:
        """Return the address of a quantity as this scenario has it.

        Parameters
        ----------
        given : str
            Address in the file.

        Returns
        -------
        address : str
            Such as ``load.fill_unit_weight``.
        """
        return _renamed(given, self.addresses)

    def values(self, given: Mapping[str, _Value]) -> dict[str, _Value]:
        """Return values by the addresses of this scenario.

        Parameters
        ----------
        given : mapping of str to value
            By the addresses of the file.

        Returns
        -------
        values : dict of str to value
            The same values.
        """
        return {self.address(key): value for key, value in given.items()}


def other_load(scenario: "Scenario", name: str) -> OtherLoad:
    """Return a scenario as seen from one of its further loads.

    Parameters
    ----------
    scenario : Scenario
        As read.
    name : str
        Of the further load.

    Returns
    -------
    other : OtherLoad
        The same site and stages.

    Raises
    ------
    ParameterError
        If there is no further load of that name.
    """
    chosen = {load.name: load for load in scenario.further_loads}
    if name not in chosen:
        known = f"there are {', '.join(chosen)}" if chosen else "the scenario has none"
        raise ParameterError(f'there is no further load "{name}": {known}')
    load = chosen[name]
    place = (getattr(load, "x", 0.0), getattr(load, "y", 0.0))
    first = _first_name(chosen)
    addresses = (("load.", f"{further_address(first)}."), (f"{further_address(name)}.", "load."))
    changes = {
        "load": _as_own(load, submergence=scenario.load.submergence),
        "further_loads": (
            _as_further(scenario.load, first, place),
            *(_moved(one, place) for one in scenario.further_loads if one.name != name),
        ),
        "stages": tuple(
            stage.model_copy(update={"load": None if stage.load == name else stage.load or first})
            for stage in scenario.stages
        ),
        "drains": None,
        "stations": tuple(
            station.model_copy(update={"x": 0.0, "y": 0.0})
            for station in scenario.all_stations
            if dist((station.x, station.y), place) < LEAST_APART
        ),
        "station_line": None,
        "evidence": tuple(one.moved(place) for one in scenario.evidence),
        "limits": tuple(
            limit.model_copy(update={"load": None})
            for limit in scenario.limits
            if getattr(limit, "load", None) == name
        ),
        "dependence": tuple(
            pair.model_copy(update={"between": tuple(_renamed(one, addresses) for one in pair.between)})
            for pair in scenario.dependence
        ),
    }
    return OtherLoad(
        name=name, place=place, scenario=scenario.model_copy(update=changes), addresses=addresses
    )


def _renamed(address: str, addresses: tuple[tuple[str, str], ...]) -> str:
    for old, new in addresses:
        if address.startswith(old):
            return new + address.removeprefix(old)
    return address


def _first_name(taken: Mapping[str, object]) -> str:
    """Return the name under which the load of the file is one of the further loads."""
    name = "[load]"
    while name in taken:
        name += "]"
    return name


def _as_own(load: FurtherLoad, *, submergence: bool) -> Load:
    own: Load = _changed(load, _OWN[type(load)], {"submergence": submergence})
    return own


def _as_further(load: Load, name: str, place: tuple[float, float]) -> FurtherLoad:
    x, y = place
    further: FurtherLoad = _changed(load, _PAIRS[type(load)], {"name": name, "x": -x, "y": -y})
    return further


def _changed(load: Table, kind: type[Table], more: dict[str, object]) -> Any:
    """Return a load as one of another kind, with all keys that the two kinds share."""
    known = {key: getattr(load, key) for key in type(load).model_fields} | more
    return kind.model_construct(**{key: known[key] for key in kind.model_fields if key in known})


def _moved(load: FurtherLoad, place: tuple[float, float]) -> FurtherLoad:
    given = type(load).model_fields
    shift = {key: getattr(load, key) - by for key, by in zip("xy", place, strict=True) if key in given}
    return load.model_copy(update=shift)
