"""Marginals, dependence, spatial averaging and the points at which a model is run."""

from probsoil.parameters.dependence import correlation_blocks
from probsoil.parameters.designs import Design, LatinHypercube, MonteCarlo, ScrambledSobol, design
from probsoil.parameters.marginals import Marginal, marginal
from probsoil.parameters.space import ParameterSpace, ParameterSummary, parameter_space
from probsoil.scenario.correlation import latent_correlation, rank_correlation
from probsoil.scenario.spatial_averaging import averaged_variance, variance_function

__all__ = [
    "Design",
    "LatinHypercube",
    "Marginal",
    "MonteCarlo",
    "ParameterSpace",
    "ParameterSummary",
    "ScrambledSobol",
    "averaged_variance",
    "correlation_blocks",
    "design",
    "latent_correlation",
    "marginal",
    "parameter_space",
    "rank_correlation",
    "variance_function",
]
