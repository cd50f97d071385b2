"""What of a scenario is the same in every realisation: layers in order, shape and stages of the load."""

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.cells import DEFAULT_CELLS, FOUNDATION_CELLS, Cells, graded_cells
from probsoil.ground.embankment import Embankment
from probsoil.ground.foundation import Foundation, foundation_of
from probsoil.ground.slip_circles import CircleFamily, CircleLayout
from probsoil.ground.time_steps import time_axis
from probsoil.ground.vertical_drains import influence_diameter
from probsoil.scenario import Scenario
from probsoil.scenario.distributions import Constant
from probsoil.scenario.layers import ClayLayer, GranularLayer
from probsoil.scenario.loads import EmbankmentLoad, Load

_REPORT_TIMES = (0.25, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0)  # years, for tables and curves
_DEEPER = 1.25  # circles reach this far below the mean bottom of the profile, for thicker realisations
_WIDTHS = 0.75  # and never deeper than this share of the embankment's base
_ROUNDING = 1e-9  # m; sums of heights carry rounding
_NONE = Constant(value=0.0)


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
    creeps : bool
        Whether secondary compression is computed.
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
    creeps: bool = False


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
    """

    name: str
    start: float
    end: float
    height: float = 0.0
    pressure: float = 0.0


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


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class SiteModel:
    """Everything about ground and load that no realisation changes.

    Attributes
    ----------
    layers : tuple of LayerForm
        From ground level down.
    base_drained : bool
        Whether what lies below the last layer drains freely.
    embankment : Embankment or None
        None for any other load.
    foundation : Foundation or None
        Strip, rectangle or circle; None for any other load.
    stages : tuple of StageForm
        In order of time.
    drains : DrainForm or None
        Vertical drains.
    submergence : bool
        Whether fill that sinks below the water table loses weight.
    horizon : float, [years]
        End of the time axis.
    cells : Cells
        Consolidation cells.
    times : ndarray, shape (n_time,), [years]
        Time axis of the computation.
    record : ndarray, shape (n_record,), [years]
        Times at which stresses are kept: stage ends, the times of limits that need them, the horizon.
    slip_times : ndarray, shape (n_check,), [years]
        Times among `record` at which slip is looked at (fill on the ground).
    layouts : tuple of CircleLayout
        Circles to look at, one layout for each of `slip_times`.
    families : tuple of CircleFamily
        Circles that compete, one family for each of `slip_times`; empty before they are screened.
    bearing_times : ndarray, shape (n_bearing,), [years]
        Times among `record` at which bearing is looked at (load on a foundation).
    traffic_from : float, [years]
        Time from which traffic drives a slip; infinite without traffic.
    """

    layers: tuple[LayerForm, ...]
    base_drained: bool
    embankment: Embankment | None
    stages: tuple[StageForm, ...]
    drains: DrainForm | None
    submergence: bool
    horizon: float
    cells: Cells
    times: FloatArray
    record: FloatArray
    slip_times: FloatArray
    layouts: tuple[CircleLayout, ...]
    families: tuple[CircleFamily, ...] = ()
    foundation: Foundation | None = None
    bearing_times: FloatArray = field(default_factory=lambda: np.zeros(0))
    traffic_from: float = np.inf

    @property
    def knots(self) -> FloatArray:
        """Times at which the load is given, linear between, shape (n_knot,), [years]."""
        times = {0.0, self.horizon, *(t for stage in self.stages for t in (stage.start, stage.end))}
        return np.array(sorted(times))

    def fill_height(self, time: float) -> float:
        """Return the height of fill at a time.

        Parameters
        ----------
        time : float, [years]
            Time.

        Returns
        -------
        height : float, [m]
            Fill on the ground.
        """
        return sum(stage.height * _laid(stage, time) for stage in self.stages)

    def pressure(self, time: float) -> float:
        """Return the pressure that stages have added besides fill.

        Parameters
        ----------
        time : float, [years]
            Time.

        Returns
        -------
        pressure : float, [kPa]
            Pressure on the ground.
        """
        return sum(stage.pressure * _laid(stage, time) for stage in self.stages)

    @property
    def last_increase(self) -> float:
        """Middle of the last stage that added load, [years]."""
        adding = [stage for stage in self.stages if stage.height > 0.0 or stage.pressure > 0.0]
        return 0.5 * (adding[-1].start + adding[-1].end)

    @property
    def station(self) -> str:
        """Where settlement is reported, in words."""
        return "centreline" if self.foundation is None else self.foundation.station

    @property
    def last_change(self) -> float:
        """End of the last stage, [years]."""
        return self.stages[-1].end


def _laid(stage: StageForm, time: float) -> float:
    return min(max((time - stage.start) / (stage.end - stage.start), 0.0), 1.0)


def site_model(scenario: Scenario, *, refine: int = 1) -> SiteModel:
    """Return the part of a scenario that no realisation changes, with its cells, times and circles.

    Parameters
    ----------
    scenario : Scenario
        As read.
    refine : int, [-]
        Cells and time steps are this many times finer, and circles denser by half as much again in
        each of their three dimensions; 1 for campaigns, 2 to measure the discretisation error.

    Returns
    -------
    model : SiteModel
        Ready for `response.respond`.
    """
    layers = tuple(_layer_form(layer) for layer in scenario.layers)
    stages = tuple(
        StageForm(
            name=stage.name,
            start=stage.start,
            end=stage.end,
            height=stage.height or 0.0,
            pressure=stage.pressure or 0.0,
        )
        for stage in scenario.stages
    )
    embankment = _embankment(scenario, stages)
    foundation = foundation_of(scenario.load)
    record, slip_times = _wanted(scenario, stages, embankment)
    horizon = float(scenario.horizon)
    cells = graded_cells(
        np.array([layer.mean_thickness for layer in layers]),
        np.array([layer.is_clay for layer in layers]),
        base_drained=scenario.site.base == "drained",
        load_depth=0.0 if foundation is None else foundation.depth,
        target=_cell_target(layers, foundation) * refine,
    )
    ramps = [(stage.start, stage.end) for stage in stages]
    drains = _drain_form(scenario)
    restart = [] if drains is None else [drains.installed]
    report = [time for time in _REPORT_TIMES if time < horizon]
    wanted = [*record, *_limit_times(scenario), *report]
    layouts = _layouts(
        embankment,
        layers,
        stages,
        slip_times,
        density=0.5 * (1.0 + refine),
        cohesive_fill=getattr(scenario.load, "fill_cohesion", _NONE) != _NONE,
    )
    return SiteModel(
        layers=layers,
        base_drained=scenario.site.base == "drained",
        embankment=embankment,
        stages=stages,
        drains=drains,
        submergence=bool(scenario.load.submergence),
        horizon=horizon,
        cells=cells,
        times=time_axis(ramps, wanted, horizon, restart=restart, refine=refine),
        record=record,
        slip_times=slip_times,
        layouts=layouts,
        foundation=foundation,
        bearing_times=np.zeros(0) if foundation is None else _bearing_times(scenario, stages),
        traffic_from=_traffic_from(scenario.load, stages),
    )


def _drain_form(scenario: Scenario) -> DrainForm | None:
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


def _cell_target(layers: Sequence[LayerForm], foundation: Foundation | None) -> int:
    """Return how many cells there should be: more where the stress of a small foundation fades with depth."""
    depth = sum(layer.mean_thickness for layer in layers)
    return DEFAULT_CELLS if foundation is None or foundation.width >= depth else FOUNDATION_CELLS


def _layer_form(layer: ClayLayer | GranularLayer) -> LayerForm:
    if isinstance(layer, GranularLayer):
        return LayerForm(
            name=layer.name,
            is_clay=False,
            mean_thickness=layer.thickness.expectation,
            weight_above=layer.unit_weight_above is not None,
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
        creeps=layer.C_alpha_ratio is not None,
    )


def _given(layer: ClayLayer, keys: dict[str, str]) -> str:
    return next(key for attribute, key in keys.items() if getattr(layer, attribute) is not None)


def _embankment(scenario: Scenario, stages: Sequence[StageForm]) -> Embankment | None:
    if not isinstance(scenario.load, EmbankmentLoad):
        return None
    full_height = float(np.cumsum([stage.height for stage in stages]).max())
    return Embankment(
        crest_width=scenario.load.crest_width,
        side_slope=scenario.load.side_slope,
        full_height=full_height,
        berm_width=scenario.load.berm_width or 0.0,
        berm_height=scenario.load.berm_height or 0.0,
    )


def _traffic_from(load: Load, stages: Sequence[StageForm]) -> float:
    """Return when traffic begins to count: as given, or when the fill is first at its greatest height."""
    if not isinstance(load, EmbankmentLoad) or load.traffic == _NONE:
        return float(np.inf)
    if load.traffic_from is not None:
        return load.traffic_from
    heights = np.cumsum([stage.height for stage in stages])
    highest = int(np.argmax(heights > heights.max() - _ROUNDING))
    return stages[highest].end


def _limit_times(scenario: Scenario) -> list[float]:
    times: list[float] = []
    for limit in scenario.limits:
        at, between = getattr(limit, "at", None), getattr(limit, "between", None)
        times += [] if at is None else [at]
        times += [] if between is None else list(between)
        if limit.quantity == "time_to_consolidation" and limit.threshold <= scenario.horizon:
            times.append(limit.threshold)
    return times


def _wanted(
    scenario: Scenario, stages: Sequence[StageForm], embankment: Embankment | None
) -> tuple[FloatArray, FloatArray]:
    """Return the times at which stresses are kept, and those at which slip is looked at."""
    ends = {stage.end for stage in stages}
    degree = {limit.at for limit in scenario.limits if limit.quantity == "degree_of_consolidation"}
    slip = _times_of(scenario, "slip_safety")
    if embankment is not None and np.isfinite(traffic := _traffic_from(scenario.load, stages)):
        slip.add(traffic)
    kept = ends | degree | slip | _times_of(scenario, "bearing_safety") | {float(scenario.horizon)}
    record = np.array(sorted(time for time in kept if time > 0.0), dtype=np.float64)
    if embankment is None:
        return record, np.zeros(0)
    check = [time for time in sorted(ends | slip) if time > 0.0 and _height(stages, time) > 0.0]
    return record, np.array(check, dtype=np.float64)


def _times_of(scenario: Scenario, quantity: str) -> set[float]:
    """Return the single times at which limits of a quantity look."""
    times = {getattr(limit, "at", None) for limit in scenario.limits if limit.quantity == quantity}
    return {time for time in times if time is not None}


def _bearing_times(scenario: Scenario, stages: Sequence[StageForm]) -> FloatArray:
    """Return when bearing is looked at: stage ends and times of limits, where there is a load."""
    times = {stage.end for stage in stages} | _times_of(scenario, "bearing_safety")
    loaded = [time for time in sorted(times) if time > 0.0 and _pressed(stages, time)]
    return np.array(loaded, dtype=np.float64)


def _pressed(stages: Sequence[StageForm], time: float) -> bool:
    pressure = sum(stage.pressure * _laid(stage, time) for stage in stages)
    return _height(stages, time) > 0.0 or pressure > 1e-9


def _height(stages: Sequence[StageForm], time: float) -> float:
    height = sum(stage.height * _laid(stage, time) for stage in stages)
    return height if height > _ROUNDING else 0.0  # a removal may leave a rounding error behind


def _layouts(
    embankment: Embankment | None,
    layers: Sequence[LayerForm],
    stages: Sequence[StageForm],
    slip_times: FloatArray,
    *,
    density: float,
    cohesive_fill: bool,
) -> tuple[CircleLayout, ...]:
    if embankment is None:
        return ()
    boundaries = np.cumsum([layer.mean_thickness for layer in layers]).tolist()
    depth = min(_DEEPER * boundaries[-1], _WIDTHS * embankment.base_width)
    frictional = any(not layer.is_clay for layer in layers)
    return tuple(
        CircleLayout(
            section=embankment.section(_height(stages, float(time))),
            depth=depth,
            boundaries=tuple(boundaries),
            density=density,
            frictional_ground=frictional,
            within_fill=cohesive_fill,
        )
        for time in slip_times
    )
