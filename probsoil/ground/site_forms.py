"""Which numbers describe layers, stages and drains; the numbers themselves come with each realisation."""

from collections.abc import Sequence
from dataclasses import dataclass

from probsoil.ground.vertical_drains import influence_diameter
from probsoil.scenario import Scenario
from probsoil.scenario.layers import ClayLayer, GranularLayer

_ROUNDING = 1e-9  # m; sums of heights carry rounding


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


@dataclass(frozen=True, slots=True, kw_only=True)
class StageForm:
    """One change of load, spread evenly between two times.

    Attributes
    ----------
    name : str
        Name of the stage.
    start, end : float, [years]
        When it begins and ends.
    height : float, [m]
        Fill laid (negative: taken away).
    pressure : float, [kPa]
        Pressure added besides the fill.
    load : str or None
        Further load that it belongs to; None for the load that is assessed.
    excavate : float, [m]
        Depth of soil dug out.
    """

    name: str
    start: float
    end: float
    height: float = 0.0
    pressure: float = 0.0
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


@dataclass(frozen=True, slots=True, kw_only=True)
class DrainForm:
    """Vertical drains, apart from how much they smear.

    Attributes
    ----------
    influence_diameter : float, [m]
        Diameter of the cylinder of soil that one drain serves.
    diameter : float, [m]
        Equivalent diameter of a drain.
    smear_ratio : float, [-]
        Diameter of the smear zone over that of the drain.
    installed : float, [years]
        Time from which the drains work.
    bottom : float, [m]
        Depth that they reach.
    discharge_capacity : float or None, [m3/year]
        Flow at a hydraulic gradient of one; None for no resistance.
    """

    influence_diameter: float
    diameter: float
    smear_ratio: float
    installed: float
    bottom: float
    discharge_capacity: float | None


def stage_forms(scenario: Scenario) -> tuple[StageForm, ...]:
    """Return the stages of a scenario.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    stages : tuple of StageForm
        In order of time.
    """
    return tuple(
        StageForm(
            name=stage.name,
            start=stage.start,
            end=stage.end,
            height=stage.height or 0.0,
            pressure=stage.pressure or 0.0,
            load=stage.load,
            excavate=stage.excavate or 0.0,
        )
        for stage in scenario.stages
    )


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


def height_at(stages: Sequence[StageForm], time: float, load: str | None = None) -> float:
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
    height : float, [m]
        Exactly zero where all of it has been taken away.
    """
    height = sum(stage.height * laid_share(stage, time) for stage in stages if stage.load == load)
    return height if height > _ROUNDING else 0.0  # a removal may leave a rounding error behind


def drain_form(scenario: Scenario) -> DrainForm | None:
    """Return the vertical drains of a scenario.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    drains : DrainForm or None
        None without drains.
    """
    given = scenario.drains
    if given is None:
        return None
    return DrainForm(
        influence_diameter=influence_diameter(given.spacing, given.pattern),
        diameter=given.equivalent_diameter,
        smear_ratio=given.smear_ratio,
        installed=given.installed,
        bottom=given.bottom,
        discharge_capacity=given.discharge_capacity,
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
