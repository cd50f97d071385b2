"""How far the grid, the time steps and the choice of circles are from not mattering."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.evaluation import Study
from probsoil.assessment.other_loads import AssessedBeside
from probsoil.ground.response import Response, respond, screened
from probsoil.ground.site_model import site_model
from probsoil.ground.stations import section_scenario, settling_site, station_site, station_times

REALISATIONS, _FEWER = 32, 8  # fewer where slip circles are laid out for each alone
_ORDER_FACTOR = 1.6  # 1/(1 - 2**-1.4): halved steps remove this part if the observed order 1.4 holds


@dataclass(frozen=True, slots=True, kw_only=True)
class DiscretisationError:
    """Error of the computation itself, from a few realisations done again more finely.

    Attributes
    ----------
    realisations, cells, steps : int, [-]
        Realisations compared; cells and time steps of the campaign.
    settlement_error : float, [m]
        Greatest error of settlement at any computed time.
    settlement_error_share : float, [-]
        Greatest error of settlement over the final settlement of its realisation.
    slip_error_share : float or None, [-]
        Greatest difference of a factor of safety from that over the denser family of circles, over
        the latter; None without slip circles. Either family may miss the worst circle, so both are too
        high if anything.
    bearing_error_share : float or None, [-]
        The same of bearing on the finer grid; None without a foundation.
    """

    realisations: int
    cells: int
    steps: int
    settlement_error: float
    settlement_error_share: float
    slip_error_share: float | None
    bearing_error_share: float | None = None

    def to_dict(self) -> dict[str, int | float | None]:
        """Return the fields by name.

        Returns
        -------
        fields : dict
            Ready for JSON.
        """
        return {name: getattr(self, name) for name in self.__slots__}


def discretisation_error(study: Study) -> DiscretisationError:
    """Return the discretisation error, measured on the first realisations of the campaign.

    Parameters
    ----------
    study : Study
        Study of the campaign.

    Returns
    -------
    error : DiscretisationError
        Differences from twice as many cells and steps, raised for what the finer grid itself
        leaves, and from a denser family of circles without screening.
    """
    z = study.latent(0)[: _FEWER if study.site.moving else REALISATIONS]
    values = study.section_values(z)
    fine_site = screened(site_model(section_scenario(study.scenario), refine=2), values, within=0.0)
    coarse, fine = respond(study.site, values), respond(fine_site, values)
    pairs = [(coarse, fine), *(_computed_twice(study, z, one) for one in study.beside)]
    final = _final(fine)
    errors = [_settlement_error(*pair, _final(pair[1])) for pair in pairs]
    errors += [_station_error(study, z, place, final) for place in range(len(study.stations))]
    error, share = (max(one[part] for one in errors) for part in range(2))
    slip = _greatest([(one.slip, other.slip) for one, other in pairs])
    bearing = _greatest([(one.bearing, other.bearing) for one, other in pairs])
    return DiscretisationError(
        realisations=len(coarse.settlement),  # one where nothing is uncertain
        cells=study.site.cells.n_cell,
        steps=study.site.times.size - 1,
        settlement_error=_ORDER_FACTOR * error,
        settlement_error_share=_ORDER_FACTOR * share,
        slip_error_share=slip,
        bearing_error_share=bearing,
    )


def _computed_twice(study: Study, z: FloatArray, one: AssessedBeside) -> tuple[Response, Response]:
    """Return the ground's answer below a further load, as in the campaign and more finely."""
    values = one.values(study.space, z)
    return respond(one.site, values), respond(one.finer(values), values)


def _final(fine: Response) -> FloatArray:
    return np.maximum(fine.settlement[:, -1:], 1e-6)


def _settlement_error(coarse: Response, fine: Response, final: FloatArray) -> tuple[float, float]:
    """Return the greatest difference at any time, [m], and as a share of the final settlement."""
    shared = np.intersect1d(coarse.times, fine.times)
    difference = np.abs(
        coarse.settlement[:, np.searchsorted(coarse.times, shared)]
        - fine.settlement[:, np.searchsorted(fine.times, shared)]
    )
    return float(difference.max()), float((difference / final).max())


def _station_error(study: Study, z: FloatArray, place: int, final: FloatArray) -> tuple[float, float]:
    """Return the greatest difference at one station, [m], and as a share of the section's final settlement.

    As a share of the settlement of the station itself it would mean nothing beside a load, where next to
    nothing settles.
    """
    one = study.stations[place]
    values = one.values(study.space.values(z, place))
    fine_site = settling_site(station_site(study.scenario, one.station, refine=2))
    coarse, fine = respond(one.site, values), respond(fine_site, values)
    times = station_times(study.scenario)
    difference = np.abs(
        coarse.settlement[:, np.searchsorted(coarse.times, times)]
        - fine.settlement[:, np.searchsorted(fine.times, times)]
    )
    return float(difference.max()), float((difference / final).max())


def _greatest(pairs: Sequence[tuple[FloatArray, FloatArray]]) -> float | None:
    """Return the greatest difference of factors of safety as a share, of those that exist."""
    shares = []
    for coarse, fine in pairs:
        there = np.isfinite(coarse) & np.isfinite(fine)
        shares += np.abs(coarse[there] / fine[there] - 1.0).tolist()
    return max(shares, default=None)
