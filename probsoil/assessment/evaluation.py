"""What is worked out for one chunk of realisations."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from probsoil._typing import FloatArray
from probsoil.assessment.observed import observations_of
from probsoil.assessment.other_loads import AssessedBeside, assessed_beside, own_columns, positions_of
from probsoil.ground.limit_quantities import (
    added_thickness,
    added_volume,
    bearing_with_model_error,
    distortion_in_limits,
    limit_quantities,
    secondary_in_limits,
    slip_with_model_error,
)
from probsoil.ground.profile import Values, column
from probsoil.ground.response import Response, respond, screened
from probsoil.ground.site_model import SiteModel, site_model
from probsoil.ground.slip_position import critical_positions
from probsoil.ground.stations import (
    StationSettlement,
    StationSite,
    section_scenario,
    section_values,
    settle_stations,
    station_sites,
    station_times,
)
from probsoil.parameters import Design, ParameterSpace, design, parameter_space
from probsoil.scenario import Scenario
from probsoil.sensitivity import Gathering

BAND_CHUNKS = 64
"""Chunks whose settlement through time and slip circles are kept, [-]; the rest keep what limits need."""

_PILOT_STAGE = 2  # first spawn key; 0 and 1 belong to the designs
_PILOT_SIZE = 512
_PILOT_WIDTH = 1.5  # the pilot spreads its latent normals this much more widely


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Study:
    """A scenario made ready to be evaluated chunk by chunk.

    Attributes
    ----------
    scenario : Scenario
        As read, with what the caller overrode.
    space : ParameterSpace
        Uncertain parameters.
    points : Design
        Where in the latent space the realisations lie.
    site : SiteModel
        What no realisation changes, with the competing slip circles; with stations that of the section
        of the first.
    stations : tuple of StationSite
        Where else settlement is computed; none where the scenario has no stations.
    beside : tuple of AssessedBeside
        Further loads that limits look at.
    """

    scenario: Scenario
    space: ParameterSpace
    points: Design
    site: SiteModel
    stations: tuple[StationSite, ...] = ()
    beside: tuple[AssessedBeside, ...] = ()

    def latent(self, chunk: int) -> FloatArray:
        """Return the correlated latent normals of a chunk.

        Parameters
        ----------
        chunk : int, [-]
            Number of the chunk.

        Returns
        -------
        z : ndarray, shape (n_i, d), [-]
            One row per realisation.
        """
        return self.space.correlated(self.points.chunk(chunk))

    def __call__(self, chunk: int) -> Mapping[str, NDArray[np.generic]]:
        """Evaluate one chunk.

        Parameters
        ----------
        chunk : int, [-]
            Number of the chunk.

        Returns
        -------
        arrays : mapping of str to ndarray, shape (n_i, ...), [m], [-] or [years]
            ``quantity`` of every limit and what of it is ``secondary`` compression and, where any is
            computed, undrained ``distortion``, ``slip`` and ``bearing`` at every check, ``final``
            settlement, thickness of ``fill_added`` and ``volume_added`` where a level is held, flags, and in
            the first chunks ``settlement`` through time, that of every ``station`` at the times they are kept
            (model error included in all these) and where the critical ``circle`` lies.
        """
        return self.at(self.latent(chunk), whole=chunk < BAND_CHUNKS)

    def at(self, z: FloatArray, *, whole: bool = False) -> Mapping[str, NDArray[np.generic]]:
        """Evaluate given points.

        Parameters
        ----------
        z : ndarray, shape (n_i, d), [-]
            Correlated latent normals.
        whole : bool
            Whether settlement through time and circles are kept.

        Returns
        -------
        arrays : mapping of str to ndarray, shape (n_i, ...), [m], [-] or [years]
            As of a chunk; a row has the same bits whatever the others.
        """
        values = self.section_values(z)
        response = respond(self.site, values)
        stations = self.settled_stations(z, response)
        beside = [self._of(one, z) for one in self.beside]
        parts = [*self._own(response, values, stations), *beside]
        sections = [response, *(one.response for one in beside)]
        answers: list[Response | StationSettlement] = [*sections]
        answers += [] if stations is None else [stations]
        converged = np.logical_and.reduce([one.converged for one in answers])
        closed = np.logical_or.reduce([one.voids_closed for one in answers])
        error = column(values, "model_error.settlement", response.settlement.shape[0])
        settled = response.settlement if stations is None else stations.reference
        settlement = np.where(response.converged[:, None], error[:, None] * settled, np.nan)
        arrays: dict[str, NDArray[np.generic]] = {
            "quantity": self._gathered(parts, lambda part: part.quantity),
            "secondary": self._gathered(parts, lambda part: part.secondary),
            "slip": slip_with_model_error(response, values),
            "bearing": bearing_with_model_error(response, values),
            "final": settlement[:, -1],
            "floored": np.logical_or.reduce([one.floored for one in sections]),
            "kappa_clipped": np.logical_or.reduce([one.kappa_clipped for one in sections]),
            "converged": converged,
            "voids_closed": closed,
        }
        arrays |= self._of_some_sites(response, values, stations)
        if whole:
            arrays["settlement"] = settlement.astype(np.float32)
            if stations is not None:
                arrays["station"] = (error[:, None, None] * stations.settlement).astype(np.float32)
            arrays["circle"] = critical_positions(self.site, response).astype(np.float32)
        if self.certain:  # one calculation stands for every realisation
            return {key: np.repeat(array, len(z), axis=0) for key, array in arrays.items()}
        return arrays

    def _of_some_sites(
        self, response: Response, values: Values, stations: StationSettlement | None
    ) -> dict[str, NDArray[np.generic]]:
        """Return what is kept of sites that have it."""
        arrays: dict[str, NDArray[np.generic]] = {}
        if self.site.distorts:
            arrays["distortion"] = distortion_in_limits(self.scenario.limits, response, values, stations)
        if self.site.seeps or self.site.excess_layers:
            arrays["uplifted"] = response.uplifted if stations is None else stations.uplifted
        if self.site.hold_level_until is not None:
            arrays["fill_added"] = added_thickness(response, values)
            arrays["volume_added"] = added_volume(response, values)
        if self.site.works is not None:
            arrays["overdrawn"] = response.overdrawn
        return arrays

    def _own(
        self, response: Response, values: Values, stations: StationSettlement | None
    ) -> list["_InLimits"]:
        """Return what the limits on the load itself and on stations watch, if there are any."""
        columns = own_columns(self.scenario)
        limits = [self.scenario.limits[column] for column in columns]
        if not limits:
            return []
        return [
            _InLimits(
                columns=columns,
                response=response,
                quantity=limit_quantities(self.site, limits, response, values, stations),
                secondary=secondary_in_limits(limits, response, values, stations),
            )
        ]

    def _of(self, one: AssessedBeside, z: FloatArray) -> "_InLimits":
        """Return what the limits on a further load watch."""
        values = one.values(self.space, z)
        response = respond(one.site, values)
        return _InLimits(
            columns=one.columns,
            response=response,
            quantity=limit_quantities(one.site, one.scenario.limits, response, values),
            secondary=secondary_in_limits(one.scenario.limits, response, values),
        )

    def _gathered(
        self, parts: Sequence["_InLimits"], chosen: Callable[["_InLimits"], FloatArray]
    ) -> FloatArray:
        """Return the columns of all limits in the order of the file."""
        if len(parts) == 1:
            return chosen(parts[0])
        whole = np.empty((len(parts[0].response.converged), len(self.scenario.limits)))
        for part in parts:
            whole[:, part.columns] = chosen(part)
        return whole

    def section_values(self, z: FloatArray) -> Values:
        """Return the values of all quantities where slip and bearing are computed.

        Parameters
        ----------
        z : ndarray, shape (n, d), [-]
            Correlated latent normals.

        Returns
        -------
        values : mapping of str to ndarray, shape (n,), or float
            By address; layer averages and thicknesses are those of the first station.
        """
        return section_values(self.scenario, self.space.values(z))

    def settled_stations(self, z: FloatArray, section: Response) -> StationSettlement | None:
        """Return what settles at the stations.

        Parameters
        ----------
        z : ndarray, shape (n, d), [-]
            Correlated latent normals.
        section : Response
            The ground's answer in the section of the first station.

        Returns
        -------
        settled : StationSettlement or None
            None where the scenario has no stations.
        """
        if not self.stations:
            return None
        times = station_times(self.scenario)
        return settle_stations(self.stations, lambda place: self.space.values(z, place), section, times)

    @property
    def certain(self) -> bool:
        """Whether no parameter is uncertain, so that every realisation is the same calculation."""
        return self.space.dimension == 0


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class _InLimits:
    """What the limits on one load watch: their columns, and (n_i, n_column) of each."""

    columns: tuple[int, ...]
    response: Response
    quantity: FloatArray
    secondary: FloatArray


def prepare(scenario: Scenario) -> Study:
    """Return a scenario ready to be evaluated.

    Parameters
    ----------
    scenario : Scenario
        As read, with what the caller overrode.

    Returns
    -------
    study : Study
        Parameters, points and ground.
    """
    space = space_of(scenario)
    points = design(scenario.draws, seed=scenario.seed, n=scenario.realisations, dimension=space.dimension)
    generator = np.random.default_rng(np.random.SeedSequence(scenario.seed, spawn_key=(_PILOT_STAGE, 0)))
    pilot = generator.standard_normal((_PILOT_SIZE, space.dimension))
    spread = _PILOT_WIDTH * space.correlated(pilot)
    site = screened(site_model(section_scenario(scenario)), section_values(scenario, space.values(spread)))
    return Study(
        scenario=scenario,
        space=space,
        points=points,
        site=site,
        stations=station_sites(scenario),
        beside=assessed_beside(scenario, space, spread),
    )


def space_of(scenario: Scenario) -> ParameterSpace:
    """Return the uncertain parameters of a scenario.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    space : ParameterSpace
        Marginals, dependence, fixed numbers, and what the tests in hand have made of them.
    """
    pairs = [(*pair.between, pair.rank_correlation) for pair in scenario.dependence]
    used, _ = observations_of(scenario)
    return parameter_space(scenario.quantities(), pairs, positions=positions_of(scenario), observations=used)


def drawn_parameters(study: Study) -> tuple[tuple[str, ...], Gathering | None]:
    """Return the parameters that drivers are told for, and which latent normals make up each.

    Parameters
    ----------
    study : Study
        Parameter space.

    Returns
    -------
    names : tuple of str
        Addresses; with stations besides them ``address (local)`` for what of a parameter varies between
        the stations, all stations together.
    gathering : Gathering or None
        None where each parameter has one latent normal.
    """
    space, last = study.space, study.space.dimension - 1
    mixed = space.updated is not None and space.updated.mixed
    if space.local is None and not mixed:
        return space.names, None
    member, shift = np.arange(space.dimension), np.ones(space.dimension)
    names = list(space.names)
    for part in () if space.local is None else space.local.parts:
        member[part.latent], shift[part.latent] = len(names), part.common_shift
        names.append(f"{space.names[part.parameter]} (local)")
    if mixed:  # one more latent normal chooses how much the ground varies from point to point
        member[last] = len(names)
        names.append("variability from point to point")
    return tuple(names), Gathering(member=member, shift=shift)
