"""What the realisations say of several limits at once and of a whole curve, in the form of results.json."""

import numpy as np

from probsoil.assessment.description import Row, finite
from probsoil.assessment.evaluation import Study
from probsoil.assessment.record import CONFIDENCE, CampaignSample, draws_words
from probsoil.probability import Exceedance, JointExceedance, exceeds, joint_exceedance


def together_record(study: Study, sample: CampaignSample) -> dict[str, Row]:
    """Return whether any limit is exceeded and which go together.

    Parameters
    ----------
    study : Study
        Limits and design.
    sample : CampaignSample
        All realisations.

    Returns
    -------
    record : dict
        ``together``, ready for JSON; empty with a single limit, and where nothing is uncertain.
    """
    limits = study.scenario.limits
    if len(limits) < 2 or study.certain:
        return {}
    exceeded = [
        exceeds(sample.quantity[:, column], limit.threshold, limit.sense)
        for column, limit in enumerate(limits)
    ]
    found = joint_exceedance(
        np.column_stack(exceeded),
        [limit.name for limit in limits],
        replicate=sample.replicate if study.points.replicates > 1 else None,
        method=draws_words(study),
        confidence=CONFIDENCE,
    )
    return {
        "together": {
            "any": _chance(found.any_exceeded),
            "all": _chance(found.all_exceeded),
            "number": found.number.tolist(),
            "pairs": _pairs(found),
        }
    }


def _chance(found: Exceedance) -> Row:
    return {
        "probability": found.probability,
        "interval": list(found.interval),
        "exceeding": found.exceeding,
        "model_runs": found.model_runs,
        "unseen_bound": found.unseen_bound,
        "method": found.method,
    }


def _pairs(found: JointExceedance) -> list[Row]:
    count = range(len(found.names))
    return [
        {
            "where": found.names[i],
            "also": found.names[j],
            "where_exceeded": int(found.both[i, i]),
            "both_exceeded": int(found.both[i, j]),
            "if_unrelated": float(found.if_unrelated[i, j]),
            "conditional": finite(float(found.conditional[i, j])),
            "interval": [float(found.low[i, j]), float(found.high[i, j])],
        }
        for i in count
        for j in count
        if i != j
    ]
