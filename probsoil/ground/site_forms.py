"""Which numbers describe layers, stages and drains; the numbers themselves come with each realisation."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray
from probsoil.ground.amounts import Amount, Reading, greater, lesser, mean_of
from probsoil.ground.vertical_drains import influence_diameter
from probsoil.scenario import Scenario
from probsoil.scenario.amounts import varies
from probsoil.scenario.layers import ClayLayer, GranularLayer
from probsoil.scenario.quantities import stage_address

_ROUNDING = 1e-9  # m; sums of heights carry rounding
_LEAST_SERVED = 1.01  # diameters of a drain that it serves at least, where both are uncertain


@dataclass(frozen=True, slots=True, kw_only=True)
class LayerForm:
    """Which numbers describe a layer; the numbers themselves come with each realisation.

    Attributes
    ----------
    name : str
        Name of the layer, first part of its addresses.
    is_clay : bool
        Whether it consolidates; otherwise it is granular.
    mean_thickness : float, [m]
        For the layout of cells.
    compression, swelling : str
        Key of the slope in virgin compression (lambda, Cc or CR) and in reloading (kappa, Cs or RR).
    yielding : str
        Key of the preconsolidation stress (preconsolidation, ocr or pop).
    friction : str
        M or phi.
    flow : str
        cv or k.
    strength_given : bool
        Whether S and m replace the strength that follows from M, lambda and kappa.
    weight_above : bool
        Whether the part above the water table has a unit weight of its own.
    creep : str
        Key that gives secondary compression, ``C_alpha_ratio`` or ``C_alpha``; nothing for none.
    has_head : bool
        Whether a granular layer has a piezometric level of its own.
    excess : str
        How initial excess pore pressure is given: the shape that goes with a measured pressure (sine,
        uniform or triangular), ``degree`` for a degree under an earlier load, or nothing.
    modulus : str
        Key of the undrained modulus (Eu or Eu_su), or nothing: then no distortion is computed.
    """

    name: str
    is_clay: bool
    mean_thickness: float
    compression: str = "lambda"
    swelling: str = "kappa"
    yielding: str = "pop"
    friction: str = "phi"
    flow: str = "k"
    strength_given: bool = False
    weight_above: bool = False
    creep: str = ""
    has_head: bool = False
    excess: str = ""
    modulus: str = ""

    @property
    def creeps(self) -> bool:
        """Whether secondary compression is computed."""
        return bool(self.creep)


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class StageForm:
    """One change of load, spread evenly between two times.

    Attributes
    ----------
    name : str
        Name of the stage.
    start, end : float, [years]
        When it begins and ends.
    height : float or ndarray, shape (n_sample,), [m]
        Fill laid (negative: taken away).
    pressure : float or ndarray, shape (n_sample,), [kPa]
        Pressure added besides the fill.
    load : str or None
        Further load that it belongs to; None for the load that is assessed.
    excavate : float, [m]
        Depth of soil dug out.
    """

    name: str
    start: float
    end: float
    height: Amount = 0.0
    pressure: Amount = 0.0
    load: str | None = None
    excavate: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadChange:
    """A spell in which the load on the site changes: one stage, or several that overlap.

    Attributes
    ----------
    name : str
        Names of the stages.
    start, end : float, [years]
        When the first of them begins and the last ends.
    digs : bool
        Whether only soil is dug out.
    """

    name: str
    start: float
    end: float
    digs: bool


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class DrainForm:
    """Vertical drains, apart from how much they smear.

    Attributes
    ----------
    influence_diameter : float or ndarray, shape (n_sample,), [m]
        Diameter of the cylinder of soil that one drain serves.
    diameter : float or ndarray, shape (n_sample,), [m]
        Equivalent diameter of a drain.
    smear_ratio : float or ndarray, shape (n_sample,), [-]
        Diameter of the smear zone over that of the drain.
    installed : float, [years]
        Time from which the drains work.
    bottom : float or ndarray, shape (n_sample,), [m]
        Depth that they reach.
    discharge_capacity : float, ndarray of shape (n_sample,), or None, [m3/year]
        Flow at a hydraulic gradient of one; None for no resistance.
    """

    influence_diameter: Amount
    diameter: Amount
    smear_ratio: Amount
    installed: float
    bottom: Amount
    discharge_capacity: Amount | None


def stage_forms(scenario: Scenario, read: Reading = mean_of) -> tuple[StageForm, ...]:
    """Return the stages of a scenario.

    Parameters
    ----------
    scenario : Scenario
        As read.
    read : callable
        Gives their heights and pressures; the means if left out.

    Returns
    -------
    stages : tuple of StageForm
        In order of time. Where heights or pressures are uncertain, a stage that takes off takes no more
        than is there.
    """
    heights, pressures = _placed(scenario, "height", read), _placed(scenario, "pressure", read)
    return tuple(
        StageForm(
            name=stage.name,
            start=stage.start,
            end=stage.end,
            height=height,
            pressure=pressure,
            load=stage.load,
            excavate=stage.excavate or 0.0,
        )
        for stage, height, pressure in zip(scenario.stages, heights, pressures, strict=True)
    )


def _placed(scenario: Scenario, key: str, read: Reading) -> list[Amount]:
    """Return the height or pressure of every stage."""
    given = [getattr(stage, key) for stage in scenario.stages]
    loads = [stage.load for stage in scenario.stages]
    uncertain = {load for load, amount in zip(loads, given, strict=True) if varies(amount)}
    there: dict[str | None, Amount] = {}
    placed: list[Amount] = []
    for stage, amount in zip(scenario.stages, given, strict=True):
        change = read(f"{stage_address(stage.name)}.{key}", amount)
        if stage.load in uncertain and read is not mean_of:
            before = there.get(stage.load, 0.0)
            change = greater(change, -before)
            there[stage.load] = before + change
        placed.append(change)
    return placed


def takes_too_much(scenario: Scenario, read: Reading, n_sample: int) -> BoolArray:
    """Return where a stage was to take off more than is there.

    Parameters
    ----------
    scenario : Scenario
        As read.
    read : callable
        Gives heights and pressures of the realisations.
    n_sample : int, [-]
        Number of realisations.

    Returns
    -------
    found : ndarray of bool, shape (n_sample,), [-]
        Whether any stage then took what was there.
    """
    found = np.zeros(n_sample, dtype=np.bool_)
    for key in ("height", "pressure"):
        for stage, placed in zip(scenario.stages, _placed(scenario, key, read), strict=True):
            wanted = read(f"{stage_address(stage.name)}.{key}", getattr(stage, key))
            found |= np.asarray(placed > wanted + _ROUNDING)
    return found


def load_changes(stages: Sequence[StageForm]) -> tuple[LoadChange, ...]:
    """Return the spells in which the load changes, stages that overlap together.

    Parameters
    ----------
    stages : sequence of StageForm
        In the order in which they start.

    Returns
    -------
    changes : tuple of LoadChange
        In order of time, none overlapping.
    """
    found: list[LoadChange] = []
    for stage in stages:
        digs = stage.excavate > 0.0
        if found and stage.start < found[-1].end - _ROUNDING:
            last = found.pop()
            name, digs = f"{last.name} and {stage.name}", last.digs and digs
            found.append(LoadChange(name=name, start=last.start, end=max(last.end, stage.end), digs=digs))
        else:
            found.append(LoadChange(name=stage.name, start=stage.start, end=stage.end, digs=digs))
    return tuple(found)


def laid_share(stage: StageForm, time: float) -> float:
    """Return how much of a stage is done at a time.

    Parameters
    ----------
    stage : StageForm
        Its start and end.
    time : float, [years]
        Time.

    Returns
    -------
    share : float, [-]
        From 0 to 1.
    """
    return min(max((time - stage.start) / (stage.end - stage.start), 0.0), 1.0)


def height_at(stages: Sequence[StageForm], time: float, load: str | None = None) -> Amount:
    """Return the height of fill that stages have laid by a time.

    Parameters
    ----------
    stages : sequence of StageForm
        In order of time.
    time : float, [years]
        Time.
    load : str or None
        On which further load; None for the load that is assessed.

    Returns
    -------
    height : float or ndarray, shape (n_sample,), [m]
        Exactly zero where all of it has been taken away.
    """
    height = sum(stage.height * laid_share(stage, time) for stage in stages if stage.load == load)
    if isinstance(height, np.ndarray):
        return np.where(height > _ROUNDING, height, 0.0)
    return height if height > _ROUNDING else 0.0  # a removal may leave a rounding error behind


def drain_form(scenario: Scenario, read: Reading = mean_of) -> DrainForm | None:
    """Return the vertical drains of a scenario.

    Parameters
    ----------
    scenario : Scenario
        As read.
    read : callable
        Gives their spacing and the like; the means if left out.

    Returns
    -------
    drains : DrainForm or None
        None without drains. Smear zones never reach further than the soil that a drain serves.
    """
    given = scenario.drains
    if given is None:
        return None

    def number(key: str) -> Amount:
        return read(f"drains.{key}", getattr(given, key))

    served, diameter, smear_ratio = (
        influence_diameter(number("spacing"), given.pattern),
        number("equivalent_diameter"),
        number("smear_ratio"),
    )
    if read is not mean_of:
        served = greater(served, _LEAST_SERVED * diameter)
        smear_ratio = lesser(smear_ratio, served / diameter * (1.0 - _ROUNDING))
    return DrainForm(
        influence_diameter=served,
        diameter=diameter,
        smear_ratio=smear_ratio,
        installed=given.installed,
        bottom=number("bottom"),
        discharge_capacity=None if given.discharge_capacity is None else number("discharge_capacity"),
    )


def layer_form(layer: ClayLayer | GranularLayer) -> LayerForm:
    """Return which numbers describe a layer.

    Parameters
    ----------
    layer : ClayLayer or GranularLayer
        As read.

    Returns
    -------
    form : LayerForm
        With its mean thickness.
    """
    if isinstance(layer, GranularLayer):
        return LayerForm(
            name=layer.name,
            is_clay=False,
            mean_thickness=layer.thickness.expectation,
            weight_above=layer.unit_weight_above is not None,
            has_head=layer.head is not None,
        )
    yielding = next(
        key for key in ("stress", "ocr", "pop") if getattr(layer.preconsolidation, key) is not None
    )
    return LayerForm(
        name=layer.name,
        is_clay=True,
        mean_thickness=layer.thickness.expectation,
        compression=_given(layer, {"lambda_": "lambda", "Cc": "Cc", "CR": "CR"}),
        swelling=_given(layer, {"kappa": "kappa", "Cs": "Cs", "RR": "RR"}),
        yielding="preconsolidation" if yielding == "stress" else yielding,
        friction=_given(layer, {"M": "M", "phi": "phi"}),
        flow="cv" if layer.permeability.cv is not None else "k",
        strength_given=layer.strength is not None,
        weight_above=layer.unit_weight_above is not None,
        creep=_creep_form(layer),
        excess=_excess_form(layer),
        modulus=_modulus_form(layer),
    )


def _excess_form(layer: ClayLayer) -> str:
    given = layer.initial_excess
    if given is None:
        return ""
    return "degree" if given.pressure is None else given.shape


def _creep_form(layer: ClayLayer) -> str:
    return next((key for key in ("C_alpha_ratio", "C_alpha") if getattr(layer, key) is not None), "")


def _modulus_form(layer: ClayLayer) -> str:
    given = layer.undrained_modulus
    if given is None:
        return ""
    return "Eu_su" if given.Eu is None else "Eu"


def _given(layer: ClayLayer, keys: dict[str, str]) -> str:
    return next(key for attribute, key in keys.items() if getattr(layer, attribute) is not None)
