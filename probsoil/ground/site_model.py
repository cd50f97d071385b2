"""What of a scenario is the same in every realisation: layers in order, shape and stages of the load."""

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.cells import DEFAULT_CELLS, FOUNDATION_CELLS, Cells, graded_cells
from probsoil.ground.embankment import Embankment
from probsoil.ground.foundation import Foundation, foundation_of
from probsoil.ground.site_forms import (
    DrainForm,
    LayerForm,
    StageForm,
    drain_form,
    laid_share,
    layer_form,
    stage_forms,
)
from probsoil.ground.site_layout import (
    NONE,
    bearing_check_times,
    circle_layouts,
    embankment_of,
    limit_times,
    recorded_times,
    traffic_start,
)
from probsoil.ground.slip_circles import CircleFamily, CircleLayout
from probsoil.ground.time_steps import time_axis
from probsoil.scenario import Scenario

__all__ = ["DrainForm", "LayerForm", "SiteModel", "StageForm", "site_model"]

_REPORT_TIMES = (0.25, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0)  # years, for tables and curves


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
    base_head : bool
        Whether the piezometric level at the bottom is given.
    offset : float, [m]
        Distance of the point of settlement from the centreline of an embankment.
    station_name : str or None
        Name of the station where settlement is reported; None for the centreline, centre or point.
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
    base_head: bool = False
    offset: float = 0.0
    station_name: str | None = None

    @property
    def seeps(self) -> bool:
        """Whether the pore pressure in situ is other than that of water at rest."""
        return self.base_head or any(layer.has_head for layer in self.layers)

    @property
    def excess_layers(self) -> tuple[int, ...]:
        """Layers that still hold excess pore pressure when the works begin, [-]."""
        return tuple(index for index, layer in enumerate(self.layers) if layer.excess)

    @property
    def distorts(self) -> bool:
        """Whether undrained distortion of any layer is computed."""
        return any(layer.modulus for layer in self.layers)

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
        return sum(stage.height * laid_share(stage, time) for stage in self.stages)

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
        return sum(stage.pressure * laid_share(stage, time) for stage in self.stages)

    @property
    def station(self) -> str:
        """Where settlement is reported, in words."""
        if self.station_name is not None:
            return f"station {self.station_name}"
        return "centreline" if self.foundation is None else self.foundation.station

    @property
    def last_change(self) -> float:
        """End of the last stage, [years]."""
        return self.stages[-1].end


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
    layers = tuple(layer_form(layer) for layer in scenario.layers)
    stages = stage_forms(scenario)
    embankment = embankment_of(scenario, stages)
    foundation = foundation_of(scenario.load)
    record, slip_times = recorded_times(scenario, stages, embankment)
    horizon = float(scenario.horizon)
    cells = graded_cells(
        np.array([layer.mean_thickness for layer in layers]),
        np.array([layer.is_clay for layer in layers]),
        base_drained=scenario.site.base == "drained",
        load_depth=0.0 if foundation is None else foundation.depth,
        target=_cell_target(layers, foundation) * refine,
    )
    ramps = [(stage.start, stage.end) for stage in stages]
    drains = drain_form(scenario)
    restart = [] if drains is None else [drains.installed]
    still_dissipating = any(layer.excess for layer in layers)
    report = [time for time in _REPORT_TIMES if time < horizon]
    wanted = [*record, *limit_times(scenario), *report]
    layouts = circle_layouts(
        embankment,
        layers,
        stages,
        slip_times,
        density=0.5 * (1.0 + refine),
        cohesive_fill=getattr(scenario.load, "fill_cohesion", NONE) != NONE,
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
        times=time_axis(
            ramps, wanted, horizon, restart=restart, sudden_start=still_dissipating, refine=refine
        ),
        record=record,
        slip_times=slip_times,
        layouts=layouts,
        foundation=foundation,
        bearing_times=np.zeros(0) if foundation is None else bearing_check_times(scenario, stages),
        traffic_from=traffic_start(scenario.load, stages),
        base_head=scenario.site.base_head is not None,
    )


def _cell_target(layers: Sequence[LayerForm], foundation: Foundation | None) -> int:
    """Return how many cells there should be: more where the stress of a small foundation fades with depth."""
    depth = sum(layer.mean_thickness for layer in layers)
    return DEFAULT_CELLS if foundation is None or foundation.width >= depth else FOUNDATION_CELLS
