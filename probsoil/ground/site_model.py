"""What of a scenario is the same in every realisation: layers in order, shape and stages of the load."""

from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import reduce

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.amounts import Amount, greater
from probsoil.ground.cells import DEFAULT_CELLS, FOUNDATION_CELLS, Cells, graded_cells
from probsoil.ground.embankment import Embankment
from probsoil.ground.foundation import Foundation, foundation_of
from probsoil.ground.further_load import FurtherLoadForm
from probsoil.ground.site_forms import (
    DrainForm,
    LayerForm,
    LoadChange,
    StageForm,
    drain_form,
    laid_share,
    layer_form,
    load_changes,
    stage_forms,
)
from probsoil.ground.site_layout import (
    NONE,
    bearing_check_times,
    circle_layouts,
    embankment_of,
    further_load_forms,
    limit_times,
    pit_depth,
    recorded_times,
    traffic_start,
)
from probsoil.ground.slip_circles import CircleFamily, CircleLayout
from probsoil.ground.slip_moving import MovingFamily
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
    moving : tuple of MovingFamily
        The same where the section of the fill is uncertain: then there are no `families`.
    bearing_times : ndarray, shape (n_bearing,), [years]
        Times among `record` at which bearing is looked at (load on a foundation).
    traffic_from : float, [years]
        Time from which traffic drives a slip; infinite without traffic.
    base_head : bool
        Whether the piezometric level at the bottom is given.
    station_point : tuple of float or None, [m]
        Plan position of the station where settlement is reported; None for the centreline, centre or point.
    station_name : str or None
        Its name.
    hold_level_until : float or None, [years]
        Time until which fill is added so that its level stays; None where none is.
    further_loads : tuple of FurtherLoadForm
        Loads beside the one that is assessed.
    works : Scenario or None
        Says what is built, where anything of it is uncertain: then heights, widths and so on are here the
        means, and `works.built` puts those of the realisations in their place. None where nothing is.
    face : float, [m]
        Depth of the base of a foundation, or of the ground dug out below an embankment or an area, for which
        the cells were laid out.
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
    moving: tuple[MovingFamily, ...] = ()
    foundation: Foundation | None = None
    bearing_times: FloatArray = field(default_factory=lambda: np.zeros(0))
    traffic_from: float = np.inf
    base_head: bool = False
    station_point: tuple[float, float] | None = None
    station_name: str | None = None
    hold_level_until: float | None = None
    further_loads: tuple[FurtherLoadForm, ...] = ()
    works: Scenario | None = None
    face: float = 0.0

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

    def fill_height(self, time: float, load: str | None = None) -> Amount:
        """Return the height of fill at a time.

        Parameters
        ----------
        time : float, [years]
            Time.
        load : str or None
            On which further load; None for the load that is assessed.

        Returns
        -------
        height : float or ndarray, shape (n_sample,), [m]
            Fill on the ground.
        """
        laid = [stage.height * laid_share(stage, time) for stage in self.stages if stage.load == load]
        return sum(laid, 0.0)

    @property
    def base(self) -> Amount:
        """Depth below which the load adds stress, [m]."""
        return self.face if self.foundation is None else self.foundation.depth

    def greatest_fill_height(self, time: float) -> Amount:
        """Return the height of fill above ground level at a time where it is highest on the site.

        Parameters
        ----------
        time : float, [years]
            Time.

        Returns
        -------
        height : float or ndarray, shape (n_sample,), [m]
            Of the load that is assessed where there is no other.
        """
        further = [self.fill_height(time, load.name) for load in self.further_loads]
        own = self.fill_height(time)
        if self.foundation is None and self.face > 0.0:
            own = greater(own - self.face, 0.0)
        return reduce(greater, further, own)

    def pressure(self, time: float, load: str | None = None) -> Amount:
        """Return the pressure that stages have added besides fill.

        Parameters
        ----------
        time : float, [years]
            Time.
        load : str or None
            Of which further load; None for the load that is assessed.

        Returns
        -------
        pressure : float or ndarray, shape (n_sample,), [kPa]
            Pressure on the ground.
        """
        added = [stage.pressure * laid_share(stage, time) for stage in self.stages if stage.load == load]
        return sum(added, 0.0)

    @property
    def section_varies(self) -> bool:
        """Whether the section of an embankment is that of each realisation."""
        shape = self.embankment
        sizes = () if shape is None else (shape.crest_width, shape.side_slope, shape.full_height)
        return any(isinstance(size, np.ndarray) for size in sizes)

    @property
    def excavates(self) -> bool:
        """Whether soil is dug out for the foundation; then pressures count what is placed in full."""
        return any(stage.excavate for stage in self.stages)

    def dug(self, time: float) -> Amount:
        """Return the depth to which soil has been dug out.

        Parameters
        ----------
        time : float, [years]
            Time.

        Returns
        -------
        depth : float or ndarray, shape (n_sample,), [m]
            Below ground level; where the depth of the base is uncertain, in proportion to it.
        """
        depth = sum(stage.excavate * laid_share(stage, time) for stage in self.stages)
        if self.foundation is None or isinstance(self.foundation.depth, float):
            return depth
        return depth / self.face * self.foundation.depth

    @property
    def point(self) -> tuple[float, float]:
        """Plan position x, y at which settlement is reported, from the centre of the load, [m]."""
        if self.station_point is not None:
            return self.station_point
        return (0.0, 0.0) if self.foundation is None else self.foundation.plan_point

    @property
    def offset(self) -> float:
        """Distance of that point from the centreline of an embankment, [m]; 0 for any other load."""
        return 0.0 if self.embankment is None else self.point[0]

    @property
    def changes(self) -> tuple[LoadChange, ...]:
        """Spells in which the load changes, in order of time."""
        return load_changes(self.stages)

    @property
    def end_names(self) -> dict[float, str]:
        """Names of the stages that end at each time, by that time [years]."""
        ends = sorted({stage.end for stage in self.stages})
        return {end: " and ".join(stage.name for stage in self.stages if stage.end == end) for end in ends}

    @property
    def station(self) -> str:
        """Where settlement is reported, in words."""
        if self.station_name is not None:
            return f"station {self.station_name}"
        return "centreline" if self.foundation is None else self.foundation.station

    @property
    def last_change(self) -> float:
        """End of the last stage, [years]."""
        return max(stage.end for stage in self.stages)

    @property
    def last_load_change(self) -> float:
        """Time after which the works add or remove nothing, [years]."""
        return max(self.last_change, self.hold_level_until or 0.0)


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
    face = pit_depth(stages) if foundation is None else float(foundation.depth)
    record, slip_times = recorded_times(scenario, stages, embankment)
    horizon = float(scenario.horizon)
    cells = graded_cells(
        np.array([layer.mean_thickness for layer in layers]),
        np.array([layer.is_clay for layer in layers]),
        base_drained=scenario.site.base == "drained",
        load_depth=face,
        target=_cell_target(layers, foundation) * refine,
    )
    # where stages of several loads begin or end together, the shortest says how fine the steps are
    ramps = sorted(((stage.start, stage.end) for stage in stages), key=lambda ramp: ramp[0] - ramp[1])
    drains = drain_form(scenario)
    restart = [] if drains is None else [drains.installed]
    still_dissipating = any(layer.excess for layer in layers)
    report = [time for time in _REPORT_TIMES if time < horizon]
    wanted = [*record, *limit_times(scenario), *report]
    hold = getattr(scenario.load, "hold_level_until", None)
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
            ramps,
            wanted,
            horizon,
            restart=restart,
            sudden_start=still_dissipating,
            refine=refine,
        ),
        record=record,
        slip_times=slip_times,
        layouts=layouts,
        foundation=foundation,
        bearing_times=np.zeros(0) if foundation is None else bearing_check_times(scenario, stages),
        traffic_from=traffic_start(scenario.load, stages),
        base_head=scenario.site.base_head is not None,
        hold_level_until=hold,
        further_loads=further_load_forms(scenario, stages),
        works=scenario if any(one.of_works for one in scenario.quantities()) else None,
        face=face,
    )


def _cell_target(layers: Sequence[LayerForm], foundation: Foundation | None) -> int:
    """Return how many cells there should be: more where the stress of a small foundation fades with depth."""
    depth = sum(layer.mean_thickness for layer in layers)
    return DEFAULT_CELLS if foundation is None or float(foundation.width) >= depth else FOUNDATION_CELLS
