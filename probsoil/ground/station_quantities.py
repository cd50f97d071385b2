"""What limits on settlement watch where there are stations."""

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.station_layout import StationLayout
from probsoil.ground.stations import Part, StationSettlement
from probsoil.scenario.limits import (
    AngularDistortionLimit,
    DifferentialSettlementLimit,
    OnSettlement,
    SettlementLimit,
)
from probsoil.scenario.stations import ANY


def station_quantity(limit: OnSettlement, stations: StationSettlement) -> FloatArray:
    """Return what a limit on settlement watches, without model error.

    Parameters
    ----------
    limit : SettlementLimit, DifferentialSettlementLimit or AngularDistortionLimit
        One of the scenario's.
    stations : StationSettlement
        What settles at every station.

    Returns
    -------
    quantity : ndarray, shape (n_sample,), [m] or [-]
        Settlement at the station or the greatest; greatest difference over the pairs compared, or greatest
        difference over distance. Not a number where a station that matters did not converge.
    """
    settled = _between(limit, stations)
    if isinstance(limit, SettlementLimit):
        return settled.max(axis=1) if limit.station == ANY else settled[:, _place(limit, stations.layout)]
    return np.asarray(compared(limit, settled, stations.layout).max(axis=1))


def compared(
    limit: DifferentialSettlementLimit | AngularDistortionLimit, settled: FloatArray, layout: StationLayout
) -> FloatArray:
    r"""Return the difference, or the angular distortion, of every pair that a limit compares.

    Parameters
    ----------
    limit : DifferentialSettlementLimit or AngularDistortionLimit
        Which pairs.
    settled : ndarray, shape (n_sample, n_station), [m]
        Settlement.
    layout : StationLayout
        Where the stations are.

    Returns
    -------
    size : ndarray, shape (n_sample, n_pair), [m] or [-]
        Without sign, in the order of `StationLayout.pairs`.

    Notes
    -----
    Differential settlement is :math:`|s_i - s_j|`; angular distortion :math:`|s_i - s_j| / l_{ij}` with l
    the distance in plan. With the tilt removed, the slope :math:`\omega` from end to end of the line of
    stations is taken off the slope of each pair along the line first: the relative rotation of Burland and
    Wroth (1974; recalled, not opened), for a structure that reaches from the first to the last station.
    """
    pairs = np.array(layout.pairs(limit.stations))
    difference = settled[:, pairs[:, 1]] - settled[:, pairs[:, 0]]
    if isinstance(limit, DifferentialSettlementLimit):
        return np.abs(difference)
    distance = np.array([layout.distance(*pair) for pair in pairs.tolist()])
    slope = difference / distance
    order = layout.order
    if limit.tilt == "removed" and order is not None:
        first, last = order[0], order[-1]
        tilt = (settled[:, last] - settled[:, first]) / layout.distance(first, last)
        forward = np.sign([order.index(j) - order.index(i) for i, j in pairs.tolist()])
        slope = slope - tilt[:, None] * forward
    return np.asarray(np.abs(slope), dtype=np.float64)


def station_part(limit: SettlementLimit, stations: StationSettlement, part: Part) -> FloatArray:
    """Return one part of a settlement at stations, without model error.

    Parameters
    ----------
    limit : SettlementLimit
        One of the scenario's.
    stations : StationSettlement
        What settles at every station.
    part : {"settlement", "secondary", "distortion"}
        Which part.

    Returns
    -------
    part : ndarray, shape (n_sample,), [m]
        Where any station counts, that of the one that settles most.
    """
    found = _between(limit, stations, part)
    if limit.station != ANY:
        return found[:, _place(limit, stations.layout)]
    most = _between(limit, stations).argmax(axis=1)
    return np.asarray(np.take_along_axis(found, most[:, None], axis=1)[:, 0])


def _place(limit: SettlementLimit, layout: StationLayout) -> int:
    return 0 if limit.station is None else layout.names.index(limit.station)


def _between(limit: OnSettlement, stations: StationSettlement, part: Part = "settlement") -> FloatArray:
    start, end = (0.0, limit.at or 0.0) if limit.between is None else limit.between
    return stations.settled(end, part) - stations.settled(start, part)
