"""Exceedance probabilities and curves, polynomial chaos, and reliability methods as cross-checks."""

from probsoil.probability.assembled_chaos import AssembledChaos, assembled_chaos
from probsoil.probability.binomial import clopper_pearson, unseen_bound
from probsoil.probability.counts import Sense, exceeding_counts, exceeds
from probsoil.probability.exceedance import Exceedance, exceedance, reliability_index
from probsoil.probability.exceedance_curve import ExceedanceCurve, exceedance_curve
from probsoil.probability.first_order import FirstOrder, first_order
from probsoil.probability.importance_sampling import ImportanceSampling, importance_sampling
from probsoil.probability.inert_variables import inert_variables
from probsoil.probability.intervals import probability_interval
from probsoil.probability.limit_state import LimitState, Performance
from probsoil.probability.median import median_interval
from probsoil.probability.multi_indices import multi_indices
from probsoil.probability.orthonormal_bases import (
    OrthonormalBasis,
    distribution_basis,
    hermite_basis,
    quantile_basis,
)
from probsoil.probability.polynomial_chaos import PolynomialChaos, polynomial_chaos
from probsoil.probability.second_order import SecondOrder, second_order
from probsoil.probability.subset_simulation import SubsetSimulation, subset_simulation
from probsoil.probability.variance_shares import ChaosShares, GroupShares, chaos_shares, group_shares

__all__ = [
    "AssembledChaos",
    "ChaosShares",
    "Exceedance",
    "ExceedanceCurve",
    "FirstOrder",
    "GroupShares",
    "ImportanceSampling",
    "LimitState",
    "OrthonormalBasis",
    "Performance",
    "PolynomialChaos",
    "SecondOrder",
    "Sense",
    "SubsetSimulation",
    "assembled_chaos",
    "chaos_shares",
    "clopper_pearson",
    "distribution_basis",
    "exceedance",
    "exceedance_curve",
    "exceeding_counts",
    "exceeds",
    "first_order",
    "group_shares",
    "hermite_basis",
    "importance_sampling",
    "inert_variables",
    "median_interval",
    "multi_indices",
    "polynomial_chaos",
    "probability_interval",
    "quantile_basis",
    "reliability_index",
    "second_order",
    "subset_simulation",
    "unseen_bound",
]
