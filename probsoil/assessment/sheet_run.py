"""The one computation that a calculation sheet shows, with everything behind it."""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any, Literal

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.description import fixed_values
from probsoil.assessment.evaluation import space_of
from probsoil.errors import ConvergenceError, ParameterError
from probsoil.ground.applied_load import between_knots, relief_by_water, stress_at
from probsoil.ground.excavation import pressure_on_base
from probsoil.ground.profile import Values
from probsoil.ground.response import GroundState, ground_state, respond, screened
from probsoil.ground.site_model import SiteModel, site_model
from probsoil.ground.station_layout import station_layout
from probsoil.ground.stations import (
    at_section,
    section_scenario,
    section_values,
    station_site,
    station_sites,
)
from probsoil.ground.works import built_once
from probsoil.scenario import Scenario


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class SheetRun:
    """A scenario computed once.

    Attributes
    ----------
    scenario : Scenario
        As read.
    site : SiteModel
        With stresses kept at every time of its axis.
    at : dict of str to float
        Value of every quantity by its address, each in its own unit.
    state : GroundState
        The ground's answer; one realisation.
    beside : bool
        Whether this is a station away from the centreline or centre, for which strength, slip and bearing
        are not computed.
    """

    scenario: Scenario
    site: SiteModel
    at: dict[str, float]
    state: GroundState
    beside: bool = False

    @property
    def values(self) -> dict[str, FloatArray]:
        """The quantities as arrays of one realisation, shape (1,), [unit of each]."""
        return fixed_values(self.at)

    def layer_value(self, layer: int, key: str) -> float:
        """Return one quantity of a layer.

        Parameters
        ----------
        layer : int, [-]
            Index of the layer.
        key : str
            Last part of its address.

        Returns
        -------
        value : float, [unit of the quantity]
            As used.
        """
        return float(self.at[f"{self.site.layers[layer].name}.{key}"])

    def slot(self, time: float) -> int:
        """Return where the stresses of a time are kept.

        Parameters
        ----------
        time : float, [years]
            One of the time axis after the first.

        Returns
        -------
        slot : int, [-]
            Place in ``site.record``.
        """
        return int(np.searchsorted(self.site.record, time))

    def surface_pressure(self, time: float) -> float:
        """Return what fill and pressure weigh on the ground at a time, less soil dug out for them.

        Parameters
        ----------
        time : float, [years]
            Time.

        Returns
        -------
        pressure : float, [kPa]
            Unit weight times height of fill, and pressure besides; where soil is dug out, less its effective
            weight and the water under the base.
        """
        height = self.site.fill_height(time) + self.fill_added(time)
        placed = np.array([self.fill_weight * height + self.site.pressure(time)])
        return float(pressure_on_base(self.site, self.values, placed, time)[0])

    @property
    def fill_weight(self) -> float:
        """Unit weight of the fill, zero where there is none, [kN/m3]."""
        return float(self.at.get("load.fill_unit_weight", 0.0))

    def further(self, time: float) -> FloatArray:
        """Return the stress that further loads add at a time.

        Parameters
        ----------
        time : float, [years]
            Time.

        Returns
        -------
        stress : ndarray, shape (n_load, n_point), [kPa]
            Of each further load at every point of the profile.
        """
        found = self.state.ground.load.further
        if found is None:
            return np.zeros((0, self.state.ground.clay.size))
        return np.stack([between_knots(self.site, one, time)[0] for one in found])

    def fill_added(self, time: float) -> float:
        """Return the fill added to hold its level.

        Parameters
        ----------
        time : float, [years]
            Time.

        Returns
        -------
        thickness : float, [m]
            On the centreline.
        """
        return float(self.state.ground.load.fill_added(time)[0])

    def added(self, time: float) -> tuple[FloatArray, FloatArray]:
        """Return the stress that the works add at a time, and what submergence takes off.

        Parameters
        ----------
        time : float, [years]
            One of the time axis.

        Returns
        -------
        added, relief : ndarray, shape (n_point,), [kPa]
            At every point of the profile.
        """
        load, clay = self.state.ground.load, self.state.consolidation.settlement
        settled = clay[:, int(np.searchsorted(self.site.times, time))]
        return (
            stress_at(self.site, load, time)[0],
            relief_by_water(self.site, load, time, settled, self.state.ground.points.excess)[0],
        )


def sheet_run(
    scenario: Scenario,
    at: Literal["mean", "median"],
    station: str | None = None,
    *,
    values: Mapping[str, float] | None = None,
) -> SheetRun:
    """Compute a scenario once.

    Parameters
    ----------
    scenario : Scenario
        As read.
    at : {"mean", "median"}
        Which value every uncertain parameter takes.
    station : str or None
        Name of a station; None for the section that slip and bearing stand for.
    values : mapping of str to float or None
        Value of every quantity by its address, [unit of each]; None for those of
        the scenario's own parameters.

    Returns
    -------
    run : SheetRun
        The ground's answer and all that led to it.

    Raises
    ------
    ParameterError
        If `at` is neither, or there is no such station.
    ConvergenceError
        If the consolidation cannot be computed with these values.
    """
    given = space_of(scenario).at(at) if values is None else dict(values)
    site, one, beside = _computed(scenario, fixed_values(given), station)
    site = replace(screened(built_once(site, one), one, within=0.0), record=site.times[1:])
    state = ground_state(site, one)
    if not state.response.converged[0]:
        reason = (
            "the void ratio falls below 0.05: initial stress, void ratio and lambda do not belong together"
            if state.response.voids_closed[0]
            else "the iteration does not converge"
        )
        raise ConvergenceError(
            f"the consolidation cannot be computed with every parameter at its {at}: {reason}",
            best=float("nan"),
            error=float("nan"),
        )
    return SheetRun(
        scenario=scenario,
        site=site,
        at={address: float(np.asarray(value).flat[0]) for address, value in one.items()},
        state=state,
        beside=beside,
    )


def _computed(scenario: Scenario, values: Values, station: str | None) -> tuple[SiteModel, Values, bool]:
    """Return site and values of the section or of a station, and whether it lies beside the section."""
    if station is None:
        return site_model(section_scenario(scenario)), section_values(scenario, values), False
    stations = {one.station.name: one for one in station_sites(scenario)}
    if station not in stations:
        known = f"there are {', '.join(stations)}" if stations else "the scenario has none"
        raise ParameterError(f'there is no station "{station}": {known}')
    found = stations[station]
    beside = not at_section(scenario, found.station)
    site = found.site if beside else station_site(scenario, found.station)
    return site, found.values(values), beside


def station_rows(
    scenario: Scenario, at: Literal["mean", "median"]
) -> tuple[list[dict[str, Any]], list[dict[str, Any]]]:
    """Compute every station once.

    Parameters
    ----------
    scenario : Scenario
        As read.
    at : {"mean", "median"}
        Which value every uncertain parameter takes.

    Returns
    -------
    stations : list of dict
        Position [m] and settlement [m] at the end of the last stage and at the horizon.
    pairs : list of dict
        Distance [m], difference of settlement [m] and distortion [-] at the horizon: of neighbours on a line,
        or else of the first station and every other.
    """
    values = fixed_values(space_of(scenario).at(at))
    sites = station_sites(scenario)
    settled, rows = [], []
    for one in sites:
        response = respond(one.site, one.values(values))
        built = int(np.searchsorted(response.times, one.site.last_change))
        settled.append(float(response.settlement[0, -1]))
        rows.append(
            {
                "station": one.station.name,
                "x": one.station.x,
                "y": one.station.y,
                "after_last_stage": float(response.settlement[0, built]),
                "settlement": settled[-1],
            }
        )
    layout = station_layout([one.station for one in sites])
    pairs = [
        {
            "station": layout.names[first],
            "other": layout.names[second],
            "distance": layout.distance(first, second),
            "difference": abs(settled[second] - settled[first]),
            "distortion": abs(settled[second] - settled[first]) / layout.distance(first, second),
        }
        for first, second in layout.shown_pairs
    ]
    return rows, pairs
