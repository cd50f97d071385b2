"""Further loads that limits look at: each is assessed as if it were the load, on the same realisations."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import dist

from probsoil._typing import FloatArray
from probsoil.ground.profile import Values
from probsoil.ground.response import screened
from probsoil.ground.site_model import SiteModel, site_model
from probsoil.ground.stations import section_scenario, section_values, settling_site
from probsoil.parameters import ParameterSpace
from probsoil.scenario import Scenario
from probsoil.scenario.other_load import OtherLoad, other_load
from probsoil.scenario.stations import LEAST_APART

_SAFETY = {"slip_safety", "bearing_safety"}


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class AssessedBeside:
    """A further load that limits look at.

    Attributes
    ----------
    other : OtherLoad
        The scenario as seen from it.
    columns : tuple of int, [-]
        Places of its limits among those of the file.
    place : int, [-]
        Place of its centre among the plan positions for which there are layer averages.
    site : SiteModel
        What no realisation changes, without slip and bearing where no limit looks at them.
    """

    other: OtherLoad
    columns: tuple[int, ...]
    place: int
    site: SiteModel

    @property
    def scenario(self) -> Scenario:
        """The scenario as seen from the load."""
        return self.other.scenario

    def values(self, space: ParameterSpace, z: FloatArray) -> Values:
        """Return the values of all quantities below the load.

        Parameters
        ----------
        space : ParameterSpace
            Parameters of the file.
        z : ndarray, shape (n, d), [-]
            Correlated latent normals.

        Returns
        -------
        values : mapping of str to ndarray, shape (n,), or float
            By the addresses of `scenario`.
        """
        return section_values(self.scenario, self.other.values(space.values(z, self.place)))

    def finer(self, values: Values) -> SiteModel:
        """Return the site on a finer grid and with denser circles.

        Parameters
        ----------
        values : mapping of str to ndarray, shape (n,), or float
            As `values` gives them.

        Returns
        -------
        site : SiteModel
            To measure the error of `site` by.
        """
        return screened(_laid_out(self.scenario, refine=2), values, within=0.0)


def others_of(scenario: Scenario) -> tuple[OtherLoad, ...]:
    """Return the further loads that limits look at.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    others : tuple of OtherLoad
        In the order of the loads.
    """
    named = {getattr(limit, "load", None) for limit in scenario.limits}
    return tuple(other_load(scenario, load.name) for load in scenario.further_loads if load.name in named)


def own_columns(scenario: Scenario) -> tuple[int, ...]:
    """Return which limits look at the load itself or at stations.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    columns : tuple of int, [-]
        Places among the limits.
    """
    return _columns(scenario, None)


def positions_of(scenario: Scenario) -> list[tuple[float, float]]:
    """Return the plan positions for which there are layer averages of their own.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    positions : list of (float, float), [m]
        Those of the stations, then the centres of the further loads that limits look at and where no station
        stands; with a single station there is one average for the whole site.
    """
    places = [(station.x, station.y) for station in scenario.all_stations]
    if len(places) < 2:
        return places
    return places + [other.place for other in others_of(scenario) if _found(places, other.place) is None]


def assessed_beside(
    scenario: Scenario, space: ParameterSpace, pilot: FloatArray
) -> tuple[AssessedBeside, ...]:
    """Return the further loads that limits look at, made ready to be computed.

    Parameters
    ----------
    scenario : Scenario
        As read.
    space : ParameterSpace
        Its parameters.
    pilot : ndarray, shape (n, d), [-]
        Correlated latent normals by which slip circles are screened.

    Returns
    -------
    loads : tuple of AssessedBeside
        In the order of the loads.
    """
    positions = positions_of(scenario)
    found = []
    for other in others_of(scenario):
        one = AssessedBeside(
            other=other,
            columns=_columns(scenario, other.name),
            place=_found(positions, other.place) or 0,
            site=_laid_out(other.scenario),
        )
        found.append(replace(one, site=screened(one.site, one.values(space, pilot))))
    return tuple(found)


def _columns(scenario: Scenario, name: str | None) -> tuple[int, ...]:
    return tuple(place for place, limit in enumerate(scenario.limits) if getattr(limit, "load", None) == name)


def _found(places: Sequence[tuple[float, float]], sought: tuple[float, float]) -> int | None:
    near = (index for index, place in enumerate(places) if dist(place, sought) < LEAST_APART)
    return next(near, None)


def _laid_out(scenario: Scenario, refine: int = 1) -> SiteModel:
    site = site_model(section_scenario(scenario), refine=refine)
    looked_at = {limit.quantity for limit in scenario.limits}
    return site if looked_at & _SAFETY else settling_site(site)
