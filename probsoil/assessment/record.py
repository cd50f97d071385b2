"""The results of a campaign in the form that results.json promises."""

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.assessment.curves import whole_curve
from probsoil.assessment.description import Row, finite, numbers, quantiles
from probsoil.assessment.evaluation import Study
from probsoil.assessment.stations import place_record, station_record
from probsoil.ground.site_model import SiteModel
from probsoil.probability import (
    Exceedance,
    exceedance,
    exceedance_curve,
    median_interval,
)
from probsoil.scenario.limits import Limit
from probsoil.sensitivity import Driver, Drivers

CONFIDENCE = 0.95
_UNITS = {
    "settlement": "m",
    "differential_settlement": "m",
    "time_to_consolidation": "years",
    "added_fill": "m3/m",
}
_DRAWS = {"monte carlo": "Monte Carlo", "latin hypercube": "Latin hypercube", "sobol": "scrambled Sobol'"}
_WORST = {"not more than": np.inf, "not less than": -np.inf}  # what is not a number counts as exceeding


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class CampaignSample:
    """Everything kept of all realisations.

    Attributes
    ----------
    quantity : ndarray, shape (n_sample, n_limit), [m], [-] or [years]
        Quantity of every limit.
    secondary : ndarray, shape (n_sample, n_limit), [m]
        Part of a settlement limit's quantity that is secondary compression; not a number for others.
    distortion : ndarray, shape (n_sample, n_limit), [m]
        The same of undrained distortion; empty where none is computed.
    slip : ndarray, shape (n_sample, n_check), [-]
        Factor of safety at every check.
    bearing : ndarray, shape (n_sample, n_bearing), [-]
        Factor of safety against bearing failure at every check.
    final : ndarray, shape (n_sample,), [m]
        Settlement at the horizon.
    settlement : ndarray, shape (n_band, n_time), [m]
        Settlement through time of the first realisations.
    circle : ndarray, shape (n_band, n_check, 6), [m]
        Where the critical circles of the first realisations lie.
    station : ndarray, shape (n_band, n_station, n_when), [m]
        Settlement of the first realisations at every station.
    fill_added : ndarray, shape (n_sample,), [m]
        Thickness of fill added to hold its level; empty where none is.
    volume_added : ndarray, shape (n_sample,), [m3/m]
        Its volume, over a wide area per square metre [m]; empty where none is.
    overdrawn : ndarray of bool, shape (n_sample,), [-]
        Whether a stage took off less than it was to; empty where nothing that is built is uncertain.
    converged, voids_closed, floored, kappa_clipped, uplifted : ndarray of bool, shape (n_sample,), [-]
        Flags of the ground model; the last one empty where the water is at rest.
    replicate : ndarray of int, shape (n_sample,), [-]
        Replicate of the design.
    """

    quantity: FloatArray
    secondary: FloatArray
    slip: FloatArray
    final: FloatArray
    settlement: FloatArray
    converged: BoolArray
    voids_closed: BoolArray
    floored: BoolArray
    kappa_clipped: BoolArray
    replicate: IntArray
    bearing: FloatArray = field(default_factory=lambda: np.zeros((0, 0)))
    distortion: FloatArray = field(default_factory=lambda: np.zeros((0, 0)))
    uplifted: BoolArray = field(default_factory=lambda: np.zeros(0, dtype=np.bool_))
    circle: FloatArray = field(default_factory=lambda: np.zeros((0, 0, 6)))
    station: FloatArray = field(default_factory=lambda: np.zeros((0, 0, 0)))
    fill_added: FloatArray = field(default_factory=lambda: np.zeros(0))
    volume_added: FloatArray = field(default_factory=lambda: np.zeros(0))
    overdrawn: BoolArray = field(default_factory=lambda: np.zeros(0, dtype=np.bool_))


def limit_rows(study: Study, sample: CampaignSample) -> list[Row]:
    """Return one row per limit: probability, interval, verdict and exceedance curve.

    Parameters
    ----------
    study : Study
        Limits and design.
    sample : CampaignSample
        All realisations.

    Returns
    -------
    rows : list of dict
        Ready for JSON.
    """
    replicate = sample.replicate if study.points.replicates > 1 else None
    creeps = any(layer.creeps for layer in study.site.layers)
    rows, distorts = [], study.site.distorts
    for index, limit in enumerate(study.scenario.limits):
        values = sample.quantity[:, index]
        found = exceedance(
            values,
            limit.threshold,
            limit.sense,
            replicate=replicate,
            method=draws_words(study),
            confidence=CONFIDENCE,
            target=limit.target_probability,
            certain=study.certain,
        )
        curve = exceedance_curve(
            values,
            limit.sense,
            through=limit.threshold,
            replicate=replicate,
            confidence=CONFIDENCE,
            certain=study.certain,
        )
        worst = _WORST[limit.sense]
        rows.append(
            _limit_row(limit, found)
            | {"load": getattr(limit, "load", None)}
            | place_record(study, limit, sample.station)
            | _part("secondary", creeps, sample.secondary[:, index], values)
            | _part("distortion", distorts, sample.distortion[:, index] if distorts else values, values)
            | {
                "summary": _summary(values, worst=worst)
                | {"median_interval": _median_interval(values, worst=worst)},
                "curve": {
                    "step": curve.step,
                    "threshold": curve.threshold.tolist(),
                    "exceeding": curve.exceeding.tolist(),
                    "probability": curve.probability.tolist(),
                    "low": curve.low.tolist(),
                    "high": curve.high.tolist(),
                }
                | whole_curve(study, curve, CONFIDENCE),
            }
        )
    return rows


def _part(name: str, there: bool, part: FloatArray, quantity: FloatArray) -> Row:
    """Return what a part makes of a settlement, on average over realisations."""
    good = np.isfinite(quantity) & np.isfinite(part)
    if not there or not good.any() or quantity[good].mean() <= 0.0:
        return {f"{name}_mean": None, f"{name}_share": None}
    mean = float(part[good].mean())
    share = mean / float(quantity[good].mean())
    # rebound after a removal may take away more than this part adds; then a share says nothing
    return {f"{name}_mean": mean, f"{name}_share": share if 0.0 <= share <= 1.0 else None}


def draws_words(study: Study) -> str:
    """Name the way the points were drawn, and how often it was repeated.

    Parameters
    ----------
    study : Study
        Design.

    Returns
    -------
    words : str
        Such as ``Monte Carlo``.
    """
    name, replicates = _DRAWS[study.points.name], study.points.replicates
    return name if replicates == 1 else f"{name} in {replicates} replicates"


def _limit_row(limit: Limit, found: Exceedance) -> Row:
    time, time_text = _time(limit)
    cost = limit.cost_if_exceeded
    return {
        "name": limit.name,
        "quantity": limit.quantity,
        "unit": _UNITS.get(limit.quantity, "-"),
        "sense": limit.sense,
        "threshold": limit.threshold,
        "time": time,
        "time_text": time_text,
        "probability": found.probability,
        "interval": list(found.interval),
        "confidence": found.confidence,
        "exceeding": found.exceeding,
        "not_converged": found.not_converged,
        "never_reached": found.never_reached if limit.quantity == "time_to_consolidation" else 0,
        "reliability_index": found.reliability_index,
        "reliability_interval": list(found.reliability_interval),
        "method": found.method,
        "model_runs": found.model_runs,
        "unseen_bound": found.unseen_bound,
        "target_probability": limit.target_probability,
        "verdict": found.verdict,
        "cost_if_exceeded": cost,
        "expected_cost": None if cost is None else cost * found.probability,
        "expected_cost_interval": None if cost is None else [cost * end for end in found.interval],
    }


def _time(limit: Limit) -> tuple[Row, str]:
    if limit.quantity == "time_to_consolidation":
        reached = f"to {100.0 * limit.degree:g} %"
        return {"degree": limit.degree}, f"{reached}, from the start, after the last stage"
    if limit.quantity == "added_fill":
        return {}, "in all"
    between = getattr(limit, "between", None)
    if between is not None:
        return {"between": list(between)}, f"between {between[0]:.3g} and {between[1]:.3g} years"
    if limit.at is not None:
        return {"at": limit.at}, f"at {limit.at:.3g} years"
    return {"least_over_stages": True}, "least over the stages"


def _summary(values: FloatArray, *, worst: float) -> Row:
    mean, spread = _mean(values), None
    if mean is not None:
        spread = float(values.std(ddof=1)) if values.size > 1 else 0.0
    return {"mean": mean, "sd": spread, "quantiles": quantiles(values, worst=worst)}


def _median_interval(values: FloatArray, *, worst: float) -> list[float | None]:
    """Return the limits of the median; null where infinite or where there are too few values."""
    ends = median_interval(np.where(np.isnan(values), worst, values), CONFIDENCE)
    return [None, None] if ends is None else [finite(end) for end in ends]


def _mean(values: FloatArray) -> float | None:
    """Return the mean; there is none where one value is infinite or not a number."""
    return float(values.mean()) if values.size and np.isfinite(values).all() else None


def settlement_record(study: Study, sample: CampaignSample) -> Row:
    """Return the settlement through time as bands, and that of every station.

    Parameters
    ----------
    study : Study
        Time axis, stages of the load and stations.
    sample : CampaignSample
        All realisations.

    Returns
    -------
    record : dict
        Ready for JSON.
    """
    worst, site = _WORST["not more than"], study.site
    settlement = sample.settlement.astype(np.float64)
    return {
        "station": study.stations[0].site.station if study.stations else site.station,
        "times": site.times.tolist(),
        "mean": numbers(settlement.mean(axis=0)),
        "quantiles": quantiles(settlement, worst=worst),
        "realisations": len(settlement),
        "stages": [{"name": stage.name, "start": stage.start, "end": stage.end} for stage in site.stages],
        "final": {key: value for key, value in _summary(sample.final, worst=worst).items() if key != "sd"},
    } | station_record(study, sample.station)


def added_fill_rows(site: SiteModel, sample: CampaignSample) -> list[Row]:
    """Return how much fill holding the level takes.

    Parameters
    ----------
    site : SiteModel
        Until when, and the section of an embankment.
    sample : CampaignSample
        All realisations.

    Returns
    -------
    rows : list of dict
        One, ready for JSON: thickness on the centreline [m] and volume, per metre run of an embankment
        [m3/m] or per square metre of an area [m3/m2]; none where no level is held.
    """
    if site.hold_level_until is None:
        return []
    unit = "m3/m2" if site.embankment is None else "m3/m"
    worst = _WORST["not more than"]
    return [
        {
            "until": site.hold_level_until,
            "unit": unit,
            "mean_width": None if site.embankment is None else float(site.embankment.mean_width),
            "width_varies": site.works is not None,
            "thickness": _summary(sample.fill_added, worst=worst),
            "volume": _summary(sample.volume_added, worst=worst),
        }
    ]


def slip_rows(study: Study, sample: CampaignSample) -> list[Row]:
    """Return the factor of safety against slip at every check.

    Parameters
    ----------
    study : Study
        Checks, stages and design.
    sample : CampaignSample
        All realisations.

    Returns
    -------
    rows : list of dict
        Ready for JSON.
    """
    return _factor_rows(study, sample, study.site.slip_times, sample.slip)


def bearing_rows(study: Study, sample: CampaignSample) -> list[Row]:
    """Return the factor of safety against bearing failure at every check.

    Parameters
    ----------
    study : Study
        Checks, stages and design.
    sample : CampaignSample
        All realisations.

    Returns
    -------
    rows : list of dict
        Ready for JSON; besides the height of fill the pressure that stages have added.
    """
    site = study.site
    rows = _factor_rows(study, sample, site.bearing_times, sample.bearing)
    return [
        row | {"pressure": round(float(site.pressure(float(time))), 9)}
        for row, time in zip(rows, site.bearing_times, strict=True)
    ]


def _factor_rows(study: Study, sample: CampaignSample, times: FloatArray, factors: FloatArray) -> list[Row]:
    site = study.site
    replicate = sample.replicate if study.points.replicates > 1 else None
    ends = {site.traffic_from: "traffic"} | site.end_names
    rows: list[Row] = []
    for time, factor in zip(times.tolist(), factors.T, strict=True):
        below = exceedance(
            factor, 1.0, "not less than", replicate=replicate, confidence=CONFIDENCE, certain=study.certain
        )
        rows.append(
            {
                "stage": ends.get(time, f"at {time:.3g} years"),
                "time": time,
                "fill_height": round(float(site.fill_height(time)), 9),
                "mean": _mean(factor),
                "quantiles": quantiles(factor, worst=_WORST["not less than"]),
                "probability_below_one": below.probability,
                "interval_below_one": list(below.interval),
            }
        )
    return rows


def driver_rows(limits: Sequence[Limit], found: Sequence[Drivers]) -> tuple[list[Row], list[Row]]:
    """Return what drives each limit, and how far that ranking can be trusted.

    Parameters
    ----------
    limits : sequence of Limit
        The scenario's limits.
    found : sequence of Drivers
        Drivers of each.

    Returns
    -------
    rows, quality : list of dict
        Ready for JSON.
    """
    rows: list[Row] = []
    quality: list[Row] = []
    for limit, result in zip(limits, found, strict=True):
        rows += [{"limit": limit.name} | _driver_row(driver) for driver in result.rows]
        quality.append(
            {
                "limit": limit.name,
                "ranked_by": result.ranked_by,
                "exceeding": result.exceeding,
                "r_squared": finite(result.r_squared),
                "note": result.note,
            }
        )
    return rows, quality


def _driver_row(driver: Driver) -> Row:
    return {
        "parameter": driver.parameter,
        "rank": driver.rank,
        "spread_elasticity": finite(driver.spread_elasticity),
        "spread_interval": [finite(value) for value in driver.spread_interval],
        "spread_clear": driver.spread_clear,
        "mean_elasticity": finite(driver.mean_elasticity),
        "mean_interval": [finite(value) for value in driver.mean_interval],
        "mean_clear": driver.mean_clear,
        "share": finite(driver.share),
        "share_interval": [finite(value) for value in driver.share_interval],
        "direction": driver.direction,
    }
