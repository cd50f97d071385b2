"""Checks of piezometric levels and of excess pore pressure that is there before the works."""

from typing import Any

from probsoil.scenario.base import UNREAD
from probsoil.scenario.distributions import Distribution
from probsoil.scenario.groundwater import InitialExcess, controlled_boundaries
from probsoil.scenario.layers import ClayLayer, GranularLayer
from probsoil.scenario.mean_column import MeanColumn, mean_column, mean_stress
from probsoil.scenario.slips import Path, Slip

_PLACES = (0.1, 0.3, 0.5, 0.7, 0.9)  # of a layer's thickness, at which its effective stress is looked at


def groundwater_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the water in the ground.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    slips = _form_slips(scenario)
    if not slips:
        slips = _base_slips(scenario)
    column = None if slips else mean_column(scenario)
    if column is None:
        return slips
    return _level_slips(scenario, column) or _uplift_slips(scenario, column)


def _form_slips(scenario: Any) -> list[Slip]:
    """Refuse an initial excess pressure that is given in no form or in two."""
    slips = []
    for position, layer in enumerate(scenario.layers):
        given = getattr(layer, "initial_excess", None)
        if isinstance(layer, ClayLayer) and isinstance(given, InitialExcess):
            path = ("layers", position, "initial_excess")
            slips += [slip.below(path) for slip in _excess_slips(given)]
    return slips


def _excess_slips(table: Any) -> list[Slip]:
    given = {key for key in ("pressure", "degree", "load") if getattr(table, key) is not None}
    allowed = "pressure alone or with shape, or degree with load"
    if not given:
        return [
            Slip(
                path=(), message="the table says no pressure", allowed=allowed, wanting=("pressure", "degree")
            )
        ]
    if "pressure" in given and len(given) > 1:
        message = "pressure does not go with degree or load, which would say the same thing twice"
        return [Slip(path=("pressure",), message=message, allowed=allowed, at_key=True)]
    if "pressure" not in given and "shape" in table.model_fields_set:
        message = "shape does not go with degree: the pressure then varies as Terzaghi's theory has it"
        return [Slip(path=("shape",), message=message, allowed=allowed, at_key=True)]
    if "pressure" not in given and len(given) == 1:
        missing = "load" if "degree" in given else "degree"
        return [Slip(path=(), message=f"{missing} is missing", allowed=allowed, wanting=(missing,))]
    return []


def _base_slips(scenario: Any) -> list[Slip]:
    site, layers = scenario.site, scenario.layers
    if not isinstance(getattr(site, "base_head", None), Distribution):
        return []
    path = ("site", "base_head")
    if site.base == "undrained":
        message = "no water passes the bottom of the last layer, so a level below it acts on nothing"
        allowed = 'base = "drained", or head in the lowest granular layer'
        return [Slip(path=path, message=message, allowed=allowed, at_key=True)]
    if layers and getattr(layers[-1], "head", None) is not None:
        message = "the last layer has a head of its own, which is the level at its bottom as well"
        return [Slip(path=path, message=message, allowed="one of the two", at_key=True)]
    return []


def _level_slips(scenario: Any, column: MeanColumn) -> list[Slip]:
    """Refuse two different levels that no clay below the water table keeps apart, at the means."""
    layers, site = scenario.layers, scenario.site
    heads = [isinstance(layer, GranularLayer) and layer.head is not None for layer in layers]
    if site.base_head is None and not any(heads):
        return []
    known = controlled_boundaries(heads, base_drained=site.base == "drained")
    slips, place, level = [], 0, site.water_table.expectation
    for boundary, owner in sorted(known.items()):
        here = site.base_head if owner is None else layers[owner].head
        value = site.water_table.expectation if here is None else here.expectation
        value = min(value, column.depth[boundary])
        apart = sum(column.resistance[place:boundary])
        if apart <= 0.0 and value != level and not (owner is not None and boundary == owner + 1):
            slips.append(_touching(scenario, owner))
        place, level = boundary, value
    return slips


def _touching(scenario: Any, owner: int | None) -> Slip:
    path: Path = ("site", "base_head")
    if owner is not None:
        path = ("layers", owner, "head")
    elif scenario.site.base_head is None:
        path = ("site", "base")
    message = (
        "no clay below the water table lies between this level and the next one above, at mean depths, so "
        "nothing keeps them apart"
    )
    allowed = "one level for layers that touch; the water table where it stands in them"
    return Slip(path=path, message=message, allowed=allowed)


def _uplift_slips(scenario: Any, column: MeanColumn) -> list[Slip]:
    """Refuse pore pressure that would lift the ground, at the means."""
    for boundary in range(1, len(column.depth)):
        depth, total, pore = column.depth[boundary], column.total[boundary], column.pore[boundary]
        if pore >= total and _has_level(scenario):
            message = (
                f"at {depth:.4g} m the pore pressure, {pore:.4g} kPa, is no less than the weight of the "
                f"ground, {total:.4g} kPa, at the means: the ground would be lifted"
            )
            return [Slip(path=_cause(scenario, boundary), message=message, allowed="a lower level of water")]
    slips = []
    for index, layer in enumerate(scenario.layers):
        given = getattr(layer, "initial_excess", None)
        if given is None or UNREAD in (given.pressure, given.degree, given.load, given.shape):
            continue
        for share in _PLACES:
            effective, excess = mean_stress(scenario, column, index, share)
            if excess >= effective:
                key = "pressure" if given.pressure is not None else "load"
                top, bottom = column.depth[index : index + 2]
                message = (
                    f"{excess:.4g} kPa of excess pore pressure at {top + share * (bottom - top):.4g} m leave "
                    f"no effective stress: without it there are {effective:.4g} kPa, at the means"
                )
                where = ("layers", index, "initial_excess", key)
                slips.append(Slip(path=where, message=message, allowed=f"below {effective:.4g} kPa there"))
                break
    return slips


def _has_level(scenario: Any) -> bool:
    heads = [getattr(layer, "head", None) for layer in scenario.layers]
    return scenario.site.base_head is not None or any(head is not None for head in heads)


def _cause(scenario: Any, boundary: int) -> Path:
    """Return the key of the level that acts at a boundary or below it."""
    for index in range(max(boundary - 1, 0), len(scenario.layers)):
        if getattr(scenario.layers[index], "head", None) is not None:
            return ("layers", index, "head")
    if scenario.site.base_head is not None:
        return ("site", "base_head")
    above = [index for index in range(boundary) if getattr(scenario.layers[index], "head", None) is not None]
    return ("layers", above[-1], "head")
