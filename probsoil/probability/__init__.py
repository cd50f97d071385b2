"""Exceedance probabilities and curves from finished realisations."""

from probsoil.probability.binomial import clopper_pearson, unseen_bound
from probsoil.probability.counts import Sense, exceeding_counts, exceeds
from probsoil.probability.exceedance import Exceedance, exceedance, reliability_index
from probsoil.probability.exceedance_curve import ExceedanceCurve, exceedance_curve
from probsoil.probability.intervals import probability_interval
from probsoil.probability.median import median_interval

__all__ = [
    "Exceedance",
    "ExceedanceCurve",
    "Sense",
    "clopper_pearson",
    "exceedance",
    "exceedance_curve",
    "exceeding_counts",
    "exceeds",
    "median_interval",
    "probability_interval",
    "reliability_index",
    "unseen_bound",
]
