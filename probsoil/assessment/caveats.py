"""What a reader must know before trusting the numbers of one run: its warnings."""

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.description import Row
from probsoil.assessment.discretisation import DiscretisationError
from probsoil.assessment.evaluation import Study
from probsoil.assessment.evidence_record import conflicts
from probsoil.assessment.record import CampaignSample
from probsoil.parameters.range_remarks import range_remarks
from probsoil.scenario import remarks
from probsoil.scenario.limits import Limit

REALISATIONS = "all realisations"
_SAFETY = ("slip_safety", "bearing_safety")
_NOTICEABLE = 1e-4  # share of a distribution that is cut off


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
        Code, message, the share concerned and what it is a share of.
    """
    rows = _flag_rows(sample) + _failure_rows(study, sample)
    if study.certain:
        message = (
            "nothing in this scenario is uncertain: every realisation is the same calculation, a limit is "
            "exceeded in all or in none, and intervals mean nothing"
        )
        rows.append(_row("nothing_uncertain", message))
    rows += [_row("remark", text) for text in remarks(study.scenario)]
    rows += [_row("published_range", text) for text in range_remarks(study.scenario)]
    for summary in study.space.summary():
        if summary.cut_share > _NOTICEABLE:
            message = (
                f"{summary.name}: part of the distribution lay outside the physical range and was cut off"
            )
            rows.append(_row("distribution_cut", message, summary.cut_share, "the distribution"))
    rows += [_row(code, message) for code, message in conflicts(study.space)]
    return rows + _grid_rows(error)


def _row(code: str, message: str, share: float | None = None, share_of: str | None = None) -> Row:
    return {"code": code, "message": message, "share": share, "share_of": share_of}


def _flag_rows(sample: CampaignSample) -> list[Row]:
    flags = [
        (
            "not_converged",
            "realisations in which the consolidation did not converge; they count as exceeding every limit",
            ~sample.converged & ~sample.voids_closed,
        ),
        (
            "voids_closed",
            "realisations in which the void ratio fell below 0.05 somewhere: initial stress, void ratio and "
            "lambda do not belong together there; they count as exceeding every limit",
            sample.voids_closed,
        ),
        (
            "preconsolidation_raised",
            "realisations in which the preconsolidation stress drawn lay below the stress in situ at some "
            "depth and was raised to it",
            sample.floored,
        ),
        (
            "kappa_lowered",
            "realisations in which kappa was drawn above 0.95 lambda in some layer and lowered to that",
            sample.kappa_clipped,
        ),
        (
            "uplift",
            "realisations in which the pore pressure before the works is no less than the weight of the "
            "ground at some depth: it would be lifted or quick; the effective stress is taken as 1 kPa there",
            sample.uplifted,
        ),
        (
            "overdrawn",
            "realisations in which a stage was to take off more than the uncertain amounts before it had "
            "placed; it took off what was there",
            sample.overdrawn,
        ),
    ]
    return [
        _row(code, message, float(flag.mean()), REALISATIONS) for code, message, flag in flags if flag.any()
    ]


def _failure_rows(study: Study, sample: CampaignSample) -> list[Row]:
    """Warn of settlement judged after the ground has failed, by slip and by bearing."""
    site = study.site
    return [
        *_failed_rows(study, "slipped_before", "fill slips", (site.slip_times, sample.slip)),
        *_failed_rows(
            study,
            "bearing_failed_before",
            "foundation fails in bearing",
            (site.bearing_times, sample.bearing),
        ),
    ]


def _failed_rows(study: Study, code: str, what: str, checks: tuple[FloatArray, FloatArray]) -> list[Row]:
    """Return one row for all limits that the same failures concern."""
    times, factor = checks
    concerned: dict[bytes, list[str]] = {}
    for limit in study.scenario.limits:
        own = getattr(limit, "load", None) is None
        if len(times) and own and limit.quantity not in _SAFETY:
            failed = (factor[:, times <= _judged_at(limit)] < 1.0).any(axis=1)
            concerned.setdefault(failed.tobytes(), []).append(limit.name)
    rows = []
    for flags, names in concerned.items():
        share = float(np.frombuffer(flags, dtype=np.bool_).mean())
        if share > 0.0:
            message = (
                f"realisations whose {what} (factor of safety below 1, model error included) before the "
                f"time of {'limit' if len(names) == 1 else 'limits'} {', '.join(names)}; settlement and "
                "consolidation computed after such a failure mean little, and they are counted all the same"
            )
            rows.append(_row(code, message, share, REALISATIONS))
    return rows


def _judged_at(limit: Limit) -> float:
    """Return until when the ground must stand for a limit to mean something, [years]."""
    between = getattr(limit, "between", None)
    end = between[1] if between is not None else getattr(limit, "at", None)
    return np.inf if end is None else float(end)  # a time to a degree is counted beyond the last stage


def _grid_rows(error: DiscretisationError) -> list[Row]:
    rows = []
    if error.settlement_error_share > 0.005:
        message = "settlement on a finer grid differs by more than 0.5 % of the final settlement"
        rows.append(_row("grid", message, error.settlement_error_share, "the final settlement"))
    if error.slip_error_share is not None and error.slip_error_share > 0.01:
        message = "the factor of safety over a denser family of circles differs by more than 1 %"
        rows.append(_row("circles", message, error.slip_error_share, "the factor of safety"))
    if error.bearing_error_share is not None and error.bearing_error_share > 0.01:
        message = "the factor of safety against bearing failure on a finer grid differs by more than 1 %"
        rows.append(_row("bearing_grid", message, error.bearing_error_share, "the factor of safety"))
    return rows
