"""Laws of distributions that say nothing of variability from point to point."""

from collections.abc import Callable
from typing import Any

import numpy as np

from probsoil.errors import ParameterError
from probsoil.parameters.laws import BetaLaw, Law, NormalLaw, TriangularLaw, UniformLaw
from probsoil.parameters.listed_laws import InterpolatedLaw, PercentileLaw, StepLaw
from probsoil.parameters.skewed_laws import GammaLaw, GumbelLaw
from probsoil.scenario.distributions import Beta, Distribution, Triangular, TruncatedNormal, Uniform
from probsoil.scenario.listed_distributions import Discrete, Empirical, Percentiles
from probsoil.scenario.skewed_distributions import Gamma, Gumbel


def plain_law(distribution: Distribution) -> Law:
    """Law of a distribution as it was given.

    Parameters
    ----------
    distribution : Distribution
        Any kind but constant, normal and lognormal.

    Returns
    -------
    law : Law
        Law before conditioning on any bounds; of a truncated normal distribution the uncut one.

    Raises
    ------
    ParameterError
        If the distribution is of another kind.
    """
    if type(distribution) not in _LAWS:
        raise ParameterError(f"a distribution of kind {distribution.kind!r} has no uncertain value")
    return _LAWS[type(distribution)](distribution)


def _of_values(distribution: Empirical) -> Law:
    values = np.asarray(distribution.values)
    if distribution.smoothing == "linear":
        return InterpolatedLaw(values)
    different, count = np.unique(values, return_counts=True)
    return StepLaw.of(different, count / values.size)


_LAWS: dict[type, Callable[[Any], Law]] = {
    Uniform: lambda given: UniformLaw(given.low, given.high),
    Triangular: lambda given: TriangularLaw(given.low, given.mode, given.high),
    TruncatedNormal: lambda given: NormalLaw(given.mean, given.sd),
    Beta: lambda given: BetaLaw(given.alpha, given.beta, given.low, given.high),
    Gamma: lambda given: GammaLaw(given.shape, given.scale),
    Gumbel: lambda given: GumbelLaw(given.mode, given.scale),
    Discrete: lambda given: StepLaw.of(np.asarray(given.values), np.asarray(given.probabilities)),
    Empirical: _of_values,
    Percentiles: lambda given: PercentileLaw.of(given.curve),
}
