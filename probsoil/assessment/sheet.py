"""One deterministic calculation, layer by layer, for a checker."""

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Literal

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment import sheet_answers as answers
from probsoil.assessment.bearing_answers import bearing_detail, bearing_rows
from probsoil.assessment.distortion_formulas import distortion_at_horizon, distortion_rows
from probsoil.assessment.evaluation import space_of
from probsoil.assessment.evidence_record import tested_words
from probsoil.assessment.observed import observations_of
from probsoil.assessment.pore_pressure_formulas import seepage_rows
from probsoil.assessment.sheet_formulas import example_of
from probsoil.assessment.sheet_lines import worked_lines
from probsoil.assessment.sheet_run import SheetRun, sheet_run, station_rows
from probsoil.assessment.sheet_sublayers import (
    PointState,
    Sublayer,
    cell_rows,
    point_state,
    sublayer_rows,
    sublayers,
)
from probsoil.assessment.statements import SHEET_CAUTIONS, assumptions
from probsoil.errors import ParameterError
from probsoil.ground.profile import Values
from probsoil.ground.response import GroundState
from probsoil.ground.site_model import SiteModel
from probsoil.ground.squeezing import squeezing_at
from probsoil.scenario import Scenario
from probsoil.scenario.other_load import other_load

if TYPE_CHECKING:
    import pandas as pd

_EDGE, _CREST = 1, 2  # zones below the edge of a foundation and under a crest


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Sheet:
    """A deterministic calculation.

    Attributes
    ----------
    at : {"mean", "median"}
        Which value every parameter took.
    times : tuple of float, [years]
        Time axis.
    settlement : tuple of float, [m]
        Settlement at each time.
    final_settlement : float, [m]
        Settlement at the horizon.
    layers : tuple of dict
        Stresses, strain and settlement of every layer, [kPa], [-], [m]; ``stress_increase`` is that of
        the load at the horizon, before any loss of weight by submergence.
    strength : tuple of dict
        Undrained strength with depth before loading and at the end of every stage, [kPa]: under the
        crest, or below the edge of a foundation.
    slip_safety : dict of str to float, [-]
        Least factor of safety at the end of every stage with fill on the ground.
    values : dict of str to float
        Every quantity as used, in its unit.
    bearing_safety : dict of str to float, [-]
        Least factor of safety against bearing failure at the end of every stage with load on a
        foundation.
    bearing : tuple of dict
        What it comes from: one row for every such stage and level, [m], [kPa], [-].
    bearing_points : tuple of dict
        Strength, line and crust below the level where the factor is least, [m], [kPa], [-].
    squeezing_safety : dict of str to float, [-]
        Factor of safety against squeezing of thin clay, at the stages it applies to.
    station : str
        Where settlement is.
    title : str
        Of the scenario.
    quantities : tuple of dict
        The values with unit and meaning.
    sublayers : tuple of dict
        A few rows per layer that add up to the settlement, see `sheet_sublayers`, [m], [kPa], [-].
    through_time : tuple of dict
        Parts of the settlement and degree of consolidation at chosen times, [years], [m], [-].
    segments : tuple of dict
        Primary and secondary settlement of every drainage segment, [m], [years], [-].
    drains : dict or None
        Vertical drains and their factor mu, [m], [-].
    strength_in_rows : tuple of dict
        Strength at one depth of every clay sub-layer with all that it follows from, [kPa], [-].
    slip : tuple of dict
        Critical circle and moments at every time at which slip is looked at, [m], [kNm/m], [-].
    formulas : tuple of dict
        Every formula in symbols and with the numbers of one row put in.
    cells : tuple of dict
        The program's own cells, [m], [kPa].
    distortion : tuple of dict
        Undrained distortion of the sub-layers at the horizon, [m], [kPa]; empty where none is computed.
    seepage : tuple of dict
        How the loss of head is shared by the layers, [m], [years], [kPa]; empty where water is at rest.
    stations, station_pairs : tuple of dict
        Settlement of every station and the differences between them, [m], [-].
    tests : int, [-]
        Results of tests that the values stand on, besides the distributions of the scenario.
    assumptions, cautions : tuple of str
        What the calculation rests on, and what its reader must bear in mind.
    """

    at: str
    times: tuple[float, ...]
    settlement: tuple[float, ...]
    final_settlement: float
    layers: tuple[dict[str, Any], ...]
    strength: tuple[dict[str, Any], ...]
    slip_safety: dict[str, float]
    values: dict[str, float]
    bearing_safety: dict[str, float] = field(default_factory=dict)
    bearing: tuple[dict[str, Any], ...] = ()
    bearing_points: tuple[dict[str, Any], ...] = ()
    squeezing_safety: dict[str, float] = field(default_factory=dict)
    station: str = "centreline"
    title: str = ""
    quantities: tuple[dict[str, Any], ...] = ()
    sublayers: tuple[dict[str, Any], ...] = ()
    through_time: tuple[dict[str, Any], ...] = ()
    segments: tuple[dict[str, Any], ...] = ()
    drains: dict[str, Any] | None = None
    strength_in_rows: tuple[dict[str, Any], ...] = ()
    slip: tuple[dict[str, Any], ...] = ()
    formulas: tuple[dict[str, Any], ...] = ()
    cells: tuple[dict[str, Any], ...] = ()
    seepage: tuple[dict[str, Any], ...] = ()
    distortion: tuple[dict[str, Any], ...] = ()
    stations: tuple[dict[str, Any], ...] = ()
    station_pairs: tuple[dict[str, Any], ...] = ()
    tests: int = 0
    assumptions: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()

    def to_dict(self) -> dict[str, Any]:
        """Return the sheet for JSON.

        Returns
        -------
        record : dict
            The attributes by name.
        """
        record = {name: getattr(self, name) for name in self.__slots__}
        return {key: list(value) if isinstance(value, tuple) else value for key, value in record.items()}

    def to_frame(self) -> "pd.DataFrame":
        """Return the layers as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per layer.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        return pd.DataFrame(list(self.layers))

    def _repr_html_(self) -> str:
        """Return the table of layers for a notebook."""
        return str(self.to_frame().to_html(index=False))


def sheet(
    scenario: Scenario,
    at: Literal["mean", "median"] = "mean",
    station: str | None = None,
    *,
    load: str | None = None,
) -> Sheet:
    """Return one deterministic calculation.

    Parameters
    ----------
    scenario : Scenario
        As read.
    at : {"mean", "median"}
        Which value every uncertain parameter takes. The model error is not applied.
    station : str or None
        Name of the station that is calculated; None for the section below the centreline or centre, with
        the ground of the first station.
    load : str or None
        Name of the further load that is calculated, as if it were the load; None for the load.

    Returns
    -------
    sheet : Sheet
        Stresses, settlement and strength layer by layer.

    Raises
    ------
    ParameterError
        If `at` is neither, there is no such station or further load, or both are named.
    ConvergenceError
        If the consolidation cannot be computed with these values.
    """
    stations: list[dict[str, Any]] = []
    pairs: list[dict[str, Any]] = []
    if load is not None:
        if station is not None:
            raise ParameterError("a sheet is that of a station or of a further load, not of both")
        other = other_load(scenario, load)
        run = sheet_run(other.scenario, at, values=other.values(space_of(scenario).at(at)))
        scenario = other.scenario
    else:
        run = sheet_run(scenario, at, station)
        stations, pairs = station_rows(scenario, at)
    site, state, response = run.site, run.state, run.state.response
    rows, points, values = sublayers(run), point_state(run), run.at
    return Sheet(
        at=at,
        times=tuple(response.times.tolist()),
        settlement=tuple(response.settlement[0].tolist()),
        final_settlement=float(response.settlement[0, -1]),
        layers=tuple(_layer_rows(run, points)),
        strength=() if run.beside else tuple(_strength_rows(site, state)),
        slip_safety=_by_stage(site, site.slip_times, response.slip[0]),
        values=values,
        bearing_safety=_by_stage(site, site.bearing_times, response.bearing[0]),
        squeezing_safety=_squeezing(site, state, run.values),
        station=site.station if load is None else f"{site.station} of {load}",
        title=scenario.title,
        quantities=tuple(
            {"address": one.address, "value": values[one.address], "unit": one.unit, "meaning": one.meaning}
            for one in scenario.quantities()
        ),
        stations=tuple(stations),
        station_pairs=tuple(pairs),
        tests=len(observations_of(scenario)[0]),
        assumptions=assumptions(site, stations=len(stations)) + tested_words(scenario),
        cautions=SHEET_CAUTIONS,
        **_in_detail(run, rows, points),
    )


def _in_detail(run: SheetRun, rows: list[Sublayer], points: PointState) -> dict[str, Any]:
    """Return what lets a checker follow the calculation line by line."""
    bearing = bearing_rows(run)
    least = bearing_detail(run, bearing)
    found = {
        "sublayers": sublayer_rows(run, rows, points),
        "through_time": answers.time_rows(run),
        "segments": answers.segment_rows(run, points),
        "strength_in_rows": [] if run.beside else answers.strength_rows(run, rows),
        "slip": answers.slip_rows(run),
        "cells": cell_rows(run, rows, points),
        "seepage": seepage_rows(run),
        "distortion": distortion_rows(run, rows),
        "bearing": bearing,
        "bearing_points": [] if least is None else least["points"],
    }
    drains = answers.drain_record(run, rows)
    example = rows[example_of(found["sublayers"])["number"] - 1]
    found["formulas"] = worked_lines(run, example, {**found, "drains": drains, "bearing_least": least})
    return {"drains": drains, **{name: tuple(part) for name, part in found.items()}}


def _by_stage(site: SiteModel, times: FloatArray, factors: FloatArray) -> dict[str, float]:
    ends = site.end_names
    pairs = zip(times.tolist(), factors.tolist(), strict=True)
    return {ends[time]: factor for time, factor in pairs if time in ends}


def _squeezing(site: SiteModel, state: GroundState, values: Values) -> dict[str, float]:
    looked_at = {*site.slip_times.tolist(), *site.bearing_times.tolist()}
    found = {}
    for stage in site.stages:
        if stage.end in looked_at:
            factor = squeezing_at(site, values, state.ground, state.strength, stage.end)
            if factor is not None:
                found[stage.name] = float(factor[0])
    return found


def _layer_rows(run: SheetRun, state: PointState) -> list[dict[str, Any]]:
    points, site = run.state.ground.points, run.site
    distorted = distortion_at_horizon(run)
    rows = []
    for index, layer in enumerate(site.layers):
        mine = points.layer == index
        top, bottom = float(points.boundary[0, index]), float(points.boundary[0, index + 1])
        middle = 0.5 * (top + bottom)

        def at_middle(profile: FloatArray, mine: Any = mine, middle: float = middle) -> float:
            return float(np.interp(middle, points.depth[0, mine], profile[mine]))

        settlement = float(state.shortening[mine].sum())
        rows.append(
            {
                "name": layer.name,
                "soil": "clay" if layer.is_clay else "granular",
                "top": top,
                "bottom": bottom,
                "initial_stress": at_middle(state.initial),
                "preconsolidation": at_middle(state.preconsolidation) if layer.is_clay else None,
                "stress_increase": at_middle(state.added),
                "void_ratio": float(run.state.ground.columns.void_ratio[0, index]) if layer.is_clay else None,
                "strain": settlement / (bottom - top),
                "settlement": settlement,
                "secondary": float(state.secondary[mine].sum()),
                "distortion": float(distorted[mine].sum()),
            }
        )
    return rows


def _strength_rows(site: SiteModel, state: GroundState) -> list[dict[str, Any]]:
    ground = state.ground
    zone = _CREST if site.foundation is None else _EDGE
    rows = []
    for point in np.flatnonzero(ground.clay):
        after = {
            stage.name: float(state.strength[np.searchsorted(site.record, stage.end), 0, zone, point])
            for stage in site.stages
        }
        rows.append(
            {
                "depth": float(ground.points.depth[0, point]),
                "layer": site.layers[ground.points.layer[point]].name,
                "before": float(state.strength_before[0, point]),
                "at_end_of_stage": after,
            }
        )
    return rows
