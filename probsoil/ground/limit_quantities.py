"""The quantity that each limit of a scenario watches, for every realisation."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError
from probsoil.ground.degree import time_to_degree
from probsoil.ground.profile import Values, column
from probsoil.ground.response import Response
from probsoil.ground.site_model import SiteModel
from probsoil.ground.station_quantities import station_part, station_quantity
from probsoil.ground.stations import Part, StationSettlement
from probsoil.scenario.limits import (
    ON_SETTLEMENT,
    AddedFillLimit,
    AngularDistortionLimit,
    BearingSafetyLimit,
    ConsolidationLimit,
    ConsolidationTimeLimit,
    DifferentialSettlementLimit,
    Limit,
    OnSettlement,
    SettlementLimit,
    SlipSafetyLimit,
)


def limit_quantities(
    site: SiteModel,
    limits: Sequence[Limit],
    response: Response,
    values: Values,
    stations: StationSettlement | None = None,
) -> FloatArray:
    """Return the quantity of every limit, model error included.

    Parameters
    ----------
    site : SiteModel
        Stages.
    limits : sequence of Limit
        The scenario's limits.
    response : Response
        The ground's answer.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address; the model errors are among them.
    stations : StationSettlement or None
        What settles at the stations, where there are any; they share one model error.

    Returns
    -------
    quantity : ndarray, shape (n_sample, n_limit), [m], [-] or [years]
        Not a number where the realisation did not converge; infinite where a degree of
        consolidation is not reached by the horizon, or where there is no fill to slip.
    """
    watched = [
        _at_stations(limit, stations, values)
        if stations is not None and isinstance(limit, ON_SETTLEMENT)
        else _quantity(site, limit, response, values)
        for limit in limits
    ]
    quantity = np.stack(watched, axis=1)
    quantity[~response.converged] = np.nan
    return quantity


def _at_stations(limit: OnSettlement, stations: StationSettlement, values: Values) -> FloatArray:
    error = column(values, "model_error.settlement", len(stations.converged))
    return np.asarray(error * station_quantity(limit, stations))


def _quantity(site: SiteModel, limit: Limit, response: Response, values: Values) -> FloatArray:
    if isinstance(limit, SettlementLimit):
        return _settlement(limit, response, values)
    if isinstance(limit, SlipSafetyLimit):
        return _least(slip_with_model_error(response, values), site, limit, site.slip_times)
    if isinstance(limit, AddedFillLimit):
        return added_volume(response, values)
    if isinstance(limit, BearingSafetyLimit):
        return _least(bearing_with_model_error(response, values), site, limit, site.bearing_times)
    if isinstance(limit, DifferentialSettlementLimit | AngularDistortionLimit):
        raise ParameterError(f"{limit.quantity} needs stations; none are given")
    if isinstance(limit, ConsolidationLimit):
        return response.degree_at_record[:, int(np.searchsorted(response.record, limit.at))]
    return _time_to_degree(site, limit, response)


def _settlement(limit: SettlementLimit, response: Response, values: Values) -> FloatArray:
    error = column(values, "model_error.settlement", response.settlement.shape[0])
    start, end = (0.0, limit.at) if limit.between is None else limit.between
    settled = _settled(response, end) - _settled(response, start)
    return np.asarray(error * settled)


def secondary_in_limits(
    limits: Sequence[Limit], response: Response, values: Values, stations: StationSettlement | None = None
) -> FloatArray:
    """Return the part of every settlement limit's quantity that is secondary compression.

    Parameters
    ----------
    limits : sequence of Limit
        The scenario's limits.
    response : Response
        The ground's answer.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    stations : StationSettlement or None
        What settles at the stations, where there are any.

    Returns
    -------
    secondary : ndarray, shape (n_sample, n_limit), [m]
        Model error included; not a number for limits on other quantities.
    """
    return _part_in_limits(limits, response, values, "secondary", stations)


def distortion_in_limits(
    limits: Sequence[Limit], response: Response, values: Values, stations: StationSettlement | None = None
) -> FloatArray:
    """Return the part of every settlement limit's quantity that is undrained distortion.

    Parameters
    ----------
    limits : sequence of Limit
        The scenario's limits.
    response : Response
        The ground's answer, with distortion.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    stations : StationSettlement or None
        What settles at the stations, where there are any.

    Returns
    -------
    distortion : ndarray, shape (n_sample, n_limit), [m]
        Model error included; not a number for limits on other quantities.
    """
    return _part_in_limits(limits, response, values, "distortion", stations)


def _part_in_limits(
    limits: Sequence[Limit],
    response: Response,
    values: Values,
    part: Part,
    stations: StationSettlement | None,
) -> FloatArray:
    n_sample = response.settlement.shape[0]
    error = column(values, "model_error.settlement", n_sample)
    alone = replace(response, settlement=getattr(response, part))
    parts = []
    for limit in limits:
        found = np.full(n_sample, np.nan)
        if isinstance(limit, SettlementLimit):
            found = (
                _settlement(limit, alone, values)
                if stations is None
                else np.asarray(error * station_part(limit, stations, part))
            )
        parts.append(found)
    return np.stack(parts, axis=1)


def _settled(response: Response, time: float | None) -> FloatArray:
    return response.settlement[:, int(np.searchsorted(response.times, time or 0.0))]


def slip_with_model_error(response: Response, values: Values) -> FloatArray:
    """Return the factor of safety at every check, model error included.

    Parameters
    ----------
    response : Response
        The ground's answer.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.

    Returns
    -------
    factor : ndarray, shape (n_sample, n_check), [-]
        Least factor over the circles times measured over computed.
    """
    error = column(values, "model_error.stability", response.settlement.shape[0])
    return np.asarray(error[:, None] * response.slip)


def added_thickness(response: Response, values: Values) -> FloatArray:
    """Return the thickness of the fill that holds the level, in all, model error included.

    Parameters
    ----------
    response : Response
        The ground's answer.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.

    Returns
    -------
    thickness : ndarray, shape (n_sample,), [m]
        On the centreline, times measured over computed settlement.
    """
    error = column(values, "model_error.settlement", response.settlement.shape[0])
    return np.asarray(error * response.fill_added[:, -1])


def added_volume(response: Response, values: Values) -> FloatArray:
    """Return the volume of the fill that holds the level, in all, model error included.

    Parameters
    ----------
    response : Response
        The ground's answer.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.

    Returns
    -------
    volume : ndarray, shape (n_sample,), [m3/m]
        Per metre run of an embankment; over a wide area per square metre, [m].
    """
    return np.asarray(response.mean_width * added_thickness(response, values))


def bearing_with_model_error(response: Response, values: Values) -> FloatArray:
    """Return the factor of safety against bearing failure at every check, model error included.

    Parameters
    ----------
    response : Response
        The ground's answer.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.

    Returns
    -------
    factor : ndarray, shape (n_sample, n_bearing), [-]
        Capacity over pressure times measured over computed.
    """
    error = column(values, "model_error.stability", response.settlement.shape[0])
    return np.asarray(error[:, None] * response.bearing)


def _least(
    factor: FloatArray, site: SiteModel, limit: SlipSafetyLimit | BearingSafetyLimit, times: FloatArray
) -> FloatArray:
    """Return the least factor over what a limit looks at: one time, or every stage end with a load.

    The time at which traffic begins is looked at together with the stage ends.
    """
    at_ends = {stage.end for stage in site.stages} | {site.traffic_from}
    wanted = at_ends if limit.at is None else {limit.at}
    checks = [index for index, time in enumerate(times) if float(time) in wanted]
    return np.asarray(factor[:, checks].min(axis=1, initial=np.inf))


def _time_to_degree(site: SiteModel, limit: ConsolidationTimeLimit, response: Response) -> FloatArray:
    """Return when the degree is first reached after the last stage, infinite if never."""
    first = int(np.searchsorted(response.times, site.last_change))
    return time_to_degree(response.times[first:], response.degree[:, first:], limit.degree)
