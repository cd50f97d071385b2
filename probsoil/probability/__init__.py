"""Exceedance probabilities for any performance function, polynomial chaos, reliability cross-checks."""

from probsoil.probability.assembled_chaos import AssembledChaos, assembled_chaos
from probsoil.probability.bands import ExceedanceBand, exceedance_band, simultaneous_limits
from probsoil.probability.binomial import clopper_pearson, unseen_bound
from probsoil.probability.chooser import MethodChoice, Pilot, chosen_method
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
from probsoil.probability.plans import Allowance, MonteCarloPlan, StratifiedPlan
from probsoil.probability.polynomial_chaos import PolynomialChaos, polynomial_chaos
from probsoil.probability.ranking import score_of
from probsoil.probability.scores import Score, ScoreChoice
from probsoil.probability.second_order import SecondOrder, second_order
from probsoil.probability.sequential import (
    SequentialExceedance,
    monte_carlo_exceedance,
    sequential_limits,
)
from probsoil.probability.strata import Strata, pool_size, strata_by_score
from probsoil.probability.stratified import StratifiedExceedance, stratified_exceedance
from probsoil.probability.study import ExceedanceStudy, exceedance_study
from probsoil.probability.subset_simulation import SubsetSimulation, subset_simulation
from probsoil.probability.together import JointExceedance, joint_exceedance
from probsoil.probability.true_runs import QuantityLimit, TrueRuns
from probsoil.probability.variance_shares import ChaosShares, GroupShares, chaos_shares, group_shares

__all__ = [
    "Allowance",
    "AssembledChaos",
    "ChaosShares",
    "Exceedance",
    "ExceedanceBand",
    "ExceedanceCurve",
    "ExceedanceStudy",
    "FirstOrder",
    "GroupShares",
    "ImportanceSampling",
    "JointExceedance",
    "LimitState",
    "MethodChoice",
    "MonteCarloPlan",
    "OrthonormalBasis",
    "Performance",
    "Pilot",
    "PolynomialChaos",
    "QuantityLimit",
    "Score",
    "ScoreChoice",
    "SecondOrder",
    "Sense",
    "SequentialExceedance",
    "Strata",
    "StratifiedExceedance",
    "StratifiedPlan",
    "SubsetSimulation",
    "TrueRuns",
    "assembled_chaos",
    "chaos_shares",
    "chosen_method",
    "clopper_pearson",
    "distribution_basis",
    "exceedance",
    "exceedance_band",
    "exceedance_curve",
    "exceedance_study",
    "exceeding_counts",
    "exceeds",
    "first_order",
    "group_shares",
    "hermite_basis",
    "importance_sampling",
    "inert_variables",
    "joint_exceedance",
    "median_interval",
    "monte_carlo_exceedance",
    "multi_indices",
    "polynomial_chaos",
    "pool_size",
    "probability_interval",
    "quantile_basis",
    "reliability_index",
    "score_of",
    "second_order",
    "sequential_limits",
    "simultaneous_limits",
    "strata_by_score",
    "stratified_exceedance",
    "subset_simulation",
    "unseen_bound",
]
