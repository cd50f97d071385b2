"""Settlement at several plan positions: each has its own layer averages and its own stress from the load."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.profile import Values
from probsoil.ground.response import Response, respond
from probsoil.ground.site_model import SiteModel, site_model
from probsoil.ground.station_layout import StationLayout, station_layout
from probsoil.scenario import Scenario
from probsoil.scenario.distributions import Constant
from probsoil.scenario.limits import ON_SETTLEMENT
from probsoil.scenario.loads import AreaLoad, CircleLoad, EmbankmentLoad, RectangleLoad, StripLoad
from probsoil.scenario.stations import Station

Part = Literal["settlement", "secondary", "distortion"]
_NOWHERE = np.zeros(0)


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class StationSite:
    """One station, ready to be computed.

    Attributes
    ----------
    station : Station
        Name, position and thicknesses.
    site : SiteModel
        What no realisation changes, without slip and bearing.
    thicker : tuple of (str, float), [-]
        Addresses of thicknesses and the factors on them here.
    in_section : bool
        Whether the computation of the section that slip and bearing stand for is that of the station.
    """

    station: Station
    site: SiteModel
    thicker: tuple[tuple[str, float], ...]
    in_section: bool

    def values(self, values: Values) -> Values:
        """Return the values of all quantities at this station.

        Parameters
        ----------
        values : mapping of str to ndarray, shape (n_sample,), or float
            Value of every quantity by its address, with its layer averages here.

        Returns
        -------
        values : mapping of str to ndarray, shape (n_sample,), or float
            The same, with the thicknesses of this station.
        """
        if not self.thicker:
            return values
        return {**values, **{address: factor * values[address] for address, factor in self.thicker}}


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class StationSettlement:
    """What settles at every station, without model error.

    Attributes
    ----------
    layout : StationLayout
        Where the stations are.
    times : ndarray, shape (n_when,), [years]
        Times at which settlement is kept, rising.
    settlement, secondary, distortion : ndarray, shape (n_sample, n_station, n_when), [m]
        Settlement and the parts of it that are secondary compression and undrained distortion (empty where
        none is computed); not a number where the consolidation did not converge.
    converged, voids_closed, uplifted : ndarray of bool, shape (n_sample,), [-]
        Whether it did at every station; whether voids closed, or pore pressure lifts the ground, at any.
    reference : ndarray, shape (n_sample, n_time), [m]
        Settlement of the first station at every time of the axis.
    """

    layout: StationLayout
    times: FloatArray
    settlement: FloatArray
    secondary: FloatArray
    distortion: FloatArray
    converged: BoolArray
    voids_closed: BoolArray
    uplifted: BoolArray
    reference: FloatArray

    def settled(self, time: float, part: Part = "settlement") -> FloatArray:
        """Return what has settled at every station by a time.

        Parameters
        ----------
        time : float, [years]
            One of `times`, or 0.
        part : {"settlement", "secondary", "distortion"}
            All of it, or one part.

        Returns
        -------
        settlement : ndarray, shape (n_sample, n_station), [m]
            Zero at the start.
        """
        kept: FloatArray = getattr(self, part)
        if time <= 0.0:
            return np.zeros(kept.shape[:2])
        return kept[:, :, int(np.searchsorted(self.times, time))]


def section_scenario(scenario: Scenario) -> Scenario:
    """Return the scenario of the section that slip, bearing and degree of consolidation stand for.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    section : Scenario
        Below the centreline or centre, with the thicknesses of the first station; as it is without stations.
    """
    stations = scenario.all_stations
    if not stations or not stations[0].thickness:
        return scenario
    return scenario.model_copy(update={"layers": _layers_at(scenario, stations[0])})


def section_values(scenario: Scenario, values: Values) -> Values:
    """Return the values of all quantities in that section.

    Parameters
    ----------
    scenario : Scenario
        As read.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address, with the layer averages of the first station.

    Returns
    -------
    values : mapping of str to ndarray, shape (n_sample,), or float
        The same, with the thicknesses of the first station.
    """
    stations = scenario.all_stations
    factors = _factors(scenario, stations[0]) if stations else ()
    return (
        {**values, **{address: factor * values[address] for address, factor in factors}}
        if factors
        else values
    )


def station_sites(scenario: Scenario, *, refine: int = 1) -> tuple[StationSite, ...]:
    """Return the stations of a scenario, ready to be computed.

    Parameters
    ----------
    scenario : Scenario
        As read.
    refine : int, [-]
        As for `site_model`.

    Returns
    -------
    stations : tuple of StationSite
        In the order given; none where the scenario has none.
    """
    return tuple(
        StationSite(
            station=station,
            site=settling_site(station_site(scenario, station, refine=refine)),
            thicker=_factors(scenario, station),
            in_section=index == 0 and at_section(scenario, station),
        )
        for index, station in enumerate(scenario.all_stations)
    )


def station_site(scenario: Scenario, station: Station, *, refine: int = 1) -> SiteModel:
    """Return what no realisation changes at one station.

    Parameters
    ----------
    scenario : Scenario
        As read.
    station : Station
        One of its own.
    refine : int, [-]
        As for `site_model`.

    Returns
    -------
    site : SiteModel
        With its thicknesses and position.
    """
    here = scenario.model_copy(
        update={"layers": _layers_at(scenario, station), "load": _load_at(scenario.load, station)}
    )
    point = (station.x, station.y)
    return replace(site_model(here, refine=refine), station_point=point, station_name=station.name)


def settling_site(site: SiteModel) -> SiteModel:
    """Return a site of which only the settlement is computed.

    Parameters
    ----------
    site : SiteModel
        As laid out.

    Returns
    -------
    site : SiteModel
        Without slip and bearing.
    """
    return replace(site, slip_times=_NOWHERE, layouts=(), families=(), bearing_times=_NOWHERE)


def station_times(scenario: Scenario) -> FloatArray:
    """Return the times at which the settlement of every station is kept.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    times : ndarray, shape (n_when,), [years]
        Those of limits on settlement, the end of the last stage and the horizon.
    """
    times = {float(scenario.horizon), max(float(stage.end) for stage in scenario.stages)}
    for limit in scenario.limits:
        if isinstance(limit, ON_SETTLEMENT):
            times |= {limit.at or 0.0} if limit.between is None else set(limit.between)
    return np.array(sorted(times - {0.0}), dtype=np.float64)


def settle_stations(
    stations: Sequence[StationSite],
    values_at: Callable[[int], Values],
    section: Response,
    times: FloatArray,
) -> StationSettlement:
    """Return what settles at every station.

    Parameters
    ----------
    stations : sequence of StationSite
        At least one.
    values_at : callable
        Gives the value of every quantity by its address for a station in the order given, with its layer
        averages but without its thicknesses.
    section : Response
        The ground's answer in the section of the first station.
    times : ndarray, shape (n_when,), [years]
        Times of the axis at which settlement is kept.

    Returns
    -------
    settled : StationSettlement
        One station is computed after another, so that memory does not grow with their number but for
        what is kept.
    """
    kept: dict[Part, list[FloatArray]] = {"settlement": [], "secondary": []}
    if stations[0].site.distorts:
        kept["distortion"] = []
    answers, reference = [], section.settlement
    for index, station in enumerate(stations):
        here = section if station.in_section else respond(station.site, station.values(values_at(index)))
        when = np.searchsorted(here.times, times)
        for part, series in kept.items():
            series.append(np.where(here.converged[:, None], getattr(here, part)[:, when], np.nan))
        answers.append((here.converged, here.voids_closed, here.uplifted))
        reference = here.settlement if index == 0 else reference
    converged, closed, uplifted = (np.stack(flags) for flags in zip(*answers, strict=True))
    whole = {part: np.stack(series, axis=1) for part, series in kept.items()}
    return StationSettlement(
        layout=station_layout([one.station for one in stations]),
        times=times,
        settlement=whole["settlement"],
        secondary=whole["secondary"],
        distortion=whole.get("distortion", np.zeros((0, 0, 0))),
        converged=np.asarray(converged.all(axis=0)),
        voids_closed=np.asarray(closed.any(axis=0)),
        uplifted=np.asarray(uplifted.any(axis=0)),
        reference=np.where(answers[0][0][:, None], reference, np.nan),
    )


def at_section(scenario: Scenario, station: Station) -> bool:
    """Tell whether a station lies below the centreline or centre.

    Parameters
    ----------
    scenario : Scenario
        Its load.
    station : Station
        One of its own.

    Returns
    -------
    there : bool
        Always under a load over a wide area without further loads.
    """
    load = scenario.load
    if scenario.further_loads:
        return (station.x, station.y) == (0.0, 0.0)
    if isinstance(load, AreaLoad):
        return True
    return station.x == 0.0 and (isinstance(load, EmbankmentLoad | StripLoad) or station.y == 0.0)


def _factors(scenario: Scenario, station: Station) -> tuple[tuple[str, float], ...]:
    means = {layer.name: layer.thickness.expectation for layer in scenario.layers}
    return tuple((f"{name}.thickness", thickness / means[name]) for name, thickness in station.thickness)


def _layers_at(scenario: Scenario, station: Station) -> tuple[object, ...]:
    """Return the layers with the mean thicknesses of a station, for the layout of cells."""
    here = dict(station.thickness)
    return tuple(
        layer.model_copy(update={"thickness": Constant(value=here[layer.name])})
        if layer.name in here
        else layer
        for layer in scenario.layers
    )


def _load_at(load: object, station: Station) -> object:
    """Return a load whose settlement is reported at a station."""
    if isinstance(load, RectangleLoad):
        return load.model_copy(update={"at": (station.x, station.y)})
    if isinstance(load, StripLoad):
        return load.model_copy(update={"at": station.x})
    if isinstance(load, CircleLoad):
        return load.model_copy(update={"at": float(np.hypot(station.x, station.y))})
    return load
