"""Checks of the layers."""

from typing import Any

from probsoil.scenario.checks.common import exactly_one, repeated_names, reserved_names
from probsoil.scenario.distributions import Distribution
from probsoil.scenario.layers import ClayLayer, Permeability, Preconsolidation
from probsoil.scenario.loads import AreaLoad
from probsoil.scenario.mean_column import RELOADING, VIRGIN, mean_slope
from probsoil.scenario.slips import Slip
from probsoil.scenario.undrained_modulus import UndrainedModulus

CREEP = {"C_alpha_ratio": "C_alpha_ratio", "C_alpha": "C_alpha"}


def ground_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the layers seen together and each in itself.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    layers = scenario.layers
    slips = [*repeated_names(layers, "layers", "layer"), *reserved_names(layers, "layers")]
    if layers and all(getattr(layer, "soil", "clay") == "granular" for layer in layers):
        message = "no layer is of clay, so there is nothing that consolidates"
        slips.append(Slip(path=("layers",), message=message, allowed='at least one layer with soil = "clay"'))
    for position, layer in enumerate(layers):
        if isinstance(layer, ClayLayer):
            found = _clay_slips(layer) + _modulus_slips(layer, scenario.load)
            slips += [slip.below(("layers", position)) for slip in found]
    return slips


def _clay_slips(layer: Any) -> list[Slip]:
    slips = exactly_one(layer, VIRGIN, "virgin compression")
    slips += exactly_one(layer, RELOADING, "unloading and reloading")
    slips += exactly_one(layer, {"M": "M", "phi": "phi"}, "critical-state friction")
    if layer.C_alpha_ratio is not None and layer.C_alpha is not None:
        slips += exactly_one(layer, CREEP, "secondary compression")
    if isinstance(layer.preconsolidation, Preconsolidation):
        slips += _preconsolidation_slips(layer.preconsolidation)
    if isinstance(layer.permeability, Permeability):
        slips += _permeability_slips(layer.permeability)
    return slips + _compression_slips(layer)


def _modulus_slips(layer: Any, load: Any) -> list[Slip]:
    if not isinstance(layer.undrained_modulus, UndrainedModulus):
        return []
    if isinstance(load, AreaLoad):
        message = "clay under a load over a wide area cannot distort without losing water"
        allowed = 'no undrained_modulus with shape = "area"'
        return [Slip(path=("undrained_modulus",), message=message, allowed=allowed, at_key=True)]
    keys = {"Eu": "Eu", "ratio": "ratio"}
    found = exactly_one(layer.undrained_modulus, keys, "the undrained modulus")
    return [slip.below(("undrained_modulus",)) for slip in found]


def _preconsolidation_slips(table: Any) -> list[Slip]:
    path = ("preconsolidation",)
    forms = {"stress": "stress", "ocr": "ocr", "pop": "pop"}
    slips = [slip.below(path) for slip in exactly_one(table, forms, "the preconsolidation stress")]
    if isinstance(table.ocr, Distribution) and table.ocr.expectation < 1.0:
        message = f"the mean overconsolidation ratio is {table.ocr.expectation:g}"
        slips.append(
            Slip(path=(*path, "ocr"), message=message, allowed="a mean of at least 1 (by definition)")
        )
    return slips


def _permeability_slips(table: Any) -> list[Slip]:
    given = {key for key in ("cv", "k", "ck") if getattr(table, key) is not None}
    if given in ({"cv"}, {"k", "ck"}):
        return []
    allowed = "cv alone, or k with ck"
    if not given:
        return [
            Slip(path=("permeability",), message="the table is empty", allowed=allowed, wanting=("cv", "k"))
        ]
    if "cv" in given:
        message = "cv does not go with k or ck, which would say the same thing twice"
        return [Slip(path=("permeability", "cv"), message=message, allowed=allowed, at_key=True)]
    missing = "ck" if "k" in given else "k"
    message = f"{missing} is missing"
    return [Slip(path=("permeability",), message=message, allowed=allowed, wanting=(missing,))]


def _compression_slips(layer: Any) -> list[Slip]:
    """Refuse reloading that is no stiffer than virgin compression, at the means."""
    virgin, reloading = mean_slope(layer, VIRGIN), mean_slope(layer, RELOADING)
    if virgin is None or reloading is None or reloading[1] < virgin[1]:
        return []
    key = reloading[0]
    message = (
        f"reloading is not stiffer than virgin compression: {key} amounts to a mean kappa of "
        f"{reloading[1]:.3g}, {virgin[0]} to a mean lambda of {virgin[1]:.3g}"
    )
    allowed = "kappa below lambda, at their means (by definition)"
    return [Slip(path=(key,), message=message, allowed=allowed, hint=f"are {key} and {virgin[0]} swapped?")]
