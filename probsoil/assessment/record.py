"""The results of a campaign in the form that results.json promises."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.assessment.description import Row, finite, numbers, quantiles
from probsoil.assessment.discretisation import DiscretisationError
from probsoil.assessment.evaluation import Study
from probsoil.ground.site_model import SiteModel
from probsoil.probability import Exceedance, exceedance, exceedance_curve
from probsoil.scenario import remarks
from probsoil.scenario.limits import Limit
from probsoil.sensitivity import Driver, Drivers

CONFIDENCE = 0.95
_UNITS = {"settlement": "m", "time_to_consolidation": "years"}
_DRAWS = {"monte carlo": "Monte Carlo", "latin hypercube": "Latin hypercube", "sobol": "scrambled Sobol'"}
_WORST = {"not more than": np.inf, "not less than": -np.inf}  # what is not a number counts as exceeding
_NOTICEABLE = 1e-4  # share of a distribution that is cut off


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class CampaignSample:
    """Everything kept of all realisations.

    Attributes
    ----------
    quantity : ndarray, shape (n_sample, n_limit), [m], [-] or [years]
        Quantity of every limit.
    slip : ndarray, shape (n_sample, n_check), [-]
        Factor of safety at every check.
    final : ndarray, shape (n_sample,), [m]
        Settlement at the horizon.
    settlement : ndarray, shape (n_band, n_time), [m]
        Settlement through time of the first realisations.
    converged, voids_closed, floored, kappa_clipped : ndarray of bool, shape (n_sample,), [-]
        Flags of the ground model.
    replicate : ndarray of int, shape (n_sample,), [-]
        Replicate of the design.
    """

    quantity: FloatArray
    slip: FloatArray
    final: FloatArray
    settlement: FloatArray
    converged: BoolArray
    voids_closed: BoolArray
    floored: BoolArray
    kappa_clipped: BoolArray
    replicate: IntArray


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
    rows = []
    for index, limit in enumerate(study.scenario.limits):
        values = sample.quantity[:, index]
        found = exceedance(
            values,
            limit.threshold,
            limit.sense,
            replicate=replicate,
            method=_DRAWS[study.points.name],
            confidence=CONFIDENCE,
            target=limit.target_probability,
        )
        curve = exceedance_curve(
            values, limit.sense, through=limit.threshold, replicate=replicate, confidence=CONFIDENCE
        )
        rows.append(
            _limit_row(limit, found)
            | {
                "summary": _summary(values, worst=_WORST[limit.sense]),
                "curve": {
                    "step": curve.step,
                    "threshold": curve.threshold.tolist(),
                    "exceeding": curve.exceeding.tolist(),
                    "probability": curve.probability.tolist(),
                    "low": curve.low.tolist(),
                    "high": curve.high.tolist(),
                },
            }
        )
    return rows


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
    }


def _time(limit: Limit) -> tuple[Row, str]:
    if limit.quantity == "time_to_consolidation":
        reached = f"to {100.0 * limit.degree:g} %"
        return {"degree": limit.degree}, f"{reached}, from the start, after the last stage"
    between = getattr(limit, "between", None)
    if between is not None:
        return {"between": list(between)}, f"between {between[0]:.3g} and {between[1]:.3g} years"
    if limit.at is not None:
        return {"at": limit.at}, f"at {limit.at:.3g} years"
    return {"least_over_stages": True}, "least over the ends of the stages"


def _summary(values: FloatArray, *, worst: float) -> Row:
    mean, spread = _mean(values), None
    if mean is not None:
        spread = float(values.std(ddof=1)) if values.size > 1 else 0.0
    return {"mean": mean, "sd": spread, "quantiles": quantiles(values, worst=worst)}


def _mean(values: FloatArray) -> float | None:
    """Return the mean; there is none where one value is infinite or not a number."""
    return float(values.mean()) if values.size and np.isfinite(values).all() else None


def settlement_record(site: SiteModel, sample: CampaignSample) -> Row:
    """Return the settlement through time as bands.

    Parameters
    ----------
    site : SiteModel
        Time axis and stages.
    sample : CampaignSample
        All realisations.

    Returns
    -------
    record : dict
        Ready for JSON.
    """
    worst = _WORST["not more than"]
    settlement = sample.settlement.astype(np.float64)
    return {
        "station": "centreline",
        "times": site.times.tolist(),
        "mean": numbers(settlement.mean(axis=0)),
        "quantiles": quantiles(settlement, worst=worst),
        "realisations": len(settlement),
        "stages": [{"name": stage.name, "start": stage.start, "end": stage.end} for stage in site.stages],
        "final": {key: value for key, value in _summary(sample.final, worst=worst).items() if key != "sd"},
    }


def slip_rows(site: SiteModel, sample: CampaignSample) -> list[Row]:
    """Return the factor of safety at every check.

    Parameters
    ----------
    site : SiteModel
        Checks and stages.
    sample : CampaignSample
        All realisations.

    Returns
    -------
    rows : list of dict
        Ready for JSON.
    """
    ends = {stage.end: stage.name for stage in site.stages}
    rows = []
    for index, time in enumerate(site.slip_times):
        factor = sample.slip[:, index]
        rows.append(
            {
                "stage": ends.get(float(time), f"at {time:.3g} years"),
                "time": float(time),
                "fill_height": round(site.fill_height(float(time)), 9),
                "mean": _mean(factor),
                "quantiles": quantiles(factor, worst=_WORST["not less than"]),
                "probability_below_one": float((~(factor >= 1.0)).mean()),
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


def warning_rows(study: Study, sample: CampaignSample, error: DiscretisationError) -> list[Row]:
    """Return what a reader must know before trusting the numbers.

    Parameters
    ----------
    study : Study
        Scenario and parameters.
    sample : CampaignSample
        All realisations.
    error : DiscretisationError
        Error of the computation.

    Returns
    -------
    rows : list of dict
        Code, message and the share of realisations (or of a distribution) concerned.
    """
    flags = [
        (
            "not_converged",
            "realisations in which the consolidation did not converge; they count as exceeding every limit",
            float((~sample.converged & ~sample.voids_closed).mean()),
        ),
        (
            "voids_closed",
            "realisations in which the void ratio fell below 0.05 somewhere: initial stress, void ratio and "
            "lambda do not belong together there; they count as exceeding every limit",
            float(sample.voids_closed.mean()),
        ),
        (
            "preconsolidation_raised",
            "realisations in which the preconsolidation stress drawn lay below the stress in situ at some "
            "depth and was raised to it",
            float(sample.floored.mean()),
        ),
        (
            "kappa_lowered",
            "realisations in which kappa was drawn above 0.95 lambda in some layer and lowered to that",
            float(sample.kappa_clipped.mean()),
        ),
    ]
    rows: list[Row] = [
        {"code": code, "message": message, "share": share} for code, message, share in flags if share > 0.0
    ]
    rows += [{"code": "remark", "message": text, "share": None} for text in remarks(study.scenario)]
    for summary in study.space.summary():
        if summary.cut_share > _NOTICEABLE:
            message = (
                f"{summary.name}: part of the distribution lay outside the physical range and was cut off"
            )
            rows.append({"code": "distribution_cut", "message": message, "share": summary.cut_share})
    if error.settlement_error_share > 0.005:
        message = "settlement on a finer grid differs by more than 0.5 % of the final settlement"
        rows.append({"code": "grid", "message": message, "share": error.settlement_error_share})
    if error.slip_error_share is not None and error.slip_error_share > 0.01:
        message = "the factor of safety over a denser family of circles differs by more than 1 %"
        rows.append({"code": "circles", "message": message, "share": error.slip_error_share})
    return rows
