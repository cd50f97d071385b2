"""Limits of an exceedance curve that hold at every threshold at once."""

from probsoil.assessment.description import Row
from probsoil.assessment.evaluation import Study
from probsoil.probability import ExceedanceCurve, simultaneous_limits


def whole_curve(study: Study, curve: ExceedanceCurve, confidence: float) -> Row:
    """Return the limits of a whole curve.

    Parameters
    ----------
    study : Study
        Design.
    curve : ExceedanceCurve
        Curve of one limit.
    confidence : float, [-]
        With which they hold.

    Returns
    -------
    limits : dict
        ``band_low`` and ``band_high``, ready for JSON; empty for replicated designs, for which such limits
        are not known, and where nothing is uncertain.
    """
    if study.points.replicates > 1 or study.certain:
        return {}
    low, high = simultaneous_limits(curve.exceeding, curve.model_runs, confidence)
    return {"band_low": low.tolist(), "band_high": high.tolist()}
