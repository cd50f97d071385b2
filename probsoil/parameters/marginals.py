"""Marginal law of each uncertain parameter: representative value, physical bounds, summary numbers.

The value that a calculation uses for a layer is a layer average, so the point-to-point part of
the uncertainty is reduced by averaging before it is added to the knowledge part. A law that could
leave the physical range of its parameter is conditioned on the range, and the share cut is kept.
"""

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from scipy.special import ndtri

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError
from probsoil.parameters.laws import Law, LognormalLaw, NormalLaw
from probsoil.parameters.listed_laws import InterpolatedLaw, StepLaw
from probsoil.parameters.plain_laws import plain_law
from probsoil.parameters.truncation import Truncation, interval_probability
from probsoil.scenario.distributions import Distribution, Lognormal, Normal, TruncatedNormal
from probsoil.scenario.spatial_averaging import inherent_variance, remaining_variance

NEGLIGIBLE_CUT = 1e-12
GREATEST_CUT = 0.5
_REACH = 10.0  # latent range of the moment sums
_NODES = 4001


class UncertainQuantity(Protocol):
    """What a parameter has to tell of itself (`probsoil.scenario.quantities.Quantity` does)."""

    @property
    def address(self) -> str:
        """Name of the parameter, ``layer.symbol``."""

    @property
    def unit(self) -> str:
        """Unit of its values."""

    @property
    def meaning(self) -> str:
        """What it is, in words."""

    @property
    def distribution(self) -> Distribution:
        """Law as the user gave it."""

    @property
    def low(self) -> float:
        """Lowest value physically possible, [`unit`]."""

    @property
    def high(self) -> float:
        """Highest value physically possible, [`unit`]."""

    @property
    def averaging_length(self) -> float | None:
        """Length over which the representative value is an average [m]."""

    @property
    def in_series(self) -> bool:
        """Whether that average is harmonic."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Marginal:
    """Law of one uncertain parameter, as drawn.

    Attributes
    ----------
    name, unit, meaning, text : str
        Address, unit, meaning in words, and the law as the user gave it.
    low, high : float, [`unit`]
        Physical bounds; infinite where there is none.
    cut_share : float, [-]
        Probability that the law had outside the physical bounds; 0 where it is under 1e-12.
    law : Law
        Law before conditioning on the bounds.
    truncation : Truncation or None
        Interval the law is conditioned on; None where nothing that matters is cut.
    mean, sd : float, [`unit`]
        Mean and standard deviation of the law as drawn.
    """

    name: str
    unit: str
    meaning: str
    text: str
    low: float
    high: float
    cut_share: float
    law: Law
    truncation: Truncation | None
    mean: float
    sd: float

    def quantile(self, z: ArrayLike) -> FloatArray:
        """Values of the parameter at latent standard normals.

        Parameters
        ----------
        z : array_like, shape (n,), [-]
            Latent standard normals; the value rises with them.

        Returns
        -------
        value : ndarray, shape (n,), [`unit`]
            Values, never outside the physical bounds.
        """
        score = np.asarray(z, dtype=np.float64)
        if self.truncation is not None:
            score = self.truncation.score(score)
        return np.clip(self.law.quantile(score), self.low, self.high)

    def percentile(self, probability: ArrayLike) -> FloatArray:
        """Values with a given probability below them.

        Parameters
        ----------
        probability : array_like, shape (n,), [-]
            Probabilities between 0 and 1.

        Returns
        -------
        value : ndarray, shape (n,), [`unit`]
            Percentiles.
        """
        return self.quantile(ndtri(np.asarray(probability, dtype=np.float64)))

    def score(self, value: float) -> float:
        """Latent standard normal at which the parameter takes a value.

        Parameters
        ----------
        value : float, [`unit`]
            Value of the parameter.

        Returns
        -------
        z : float, [-]
            Latent standard normal; infinite at or beyond the end of the law.
        """
        score = self.law.score(value)
        return score if self.truncation is None else self.truncation.inverse(score)


def marginal(quantity: UncertainQuantity) -> Marginal:
    """Law of a parameter's representative value within its physical bounds.

    Parameters
    ----------
    quantity : UncertainQuantity
        Parameter with a distribution other than a constant.

    Returns
    -------
    marginal : Marginal
        Law as drawn, with its summary numbers.

    Raises
    ------
    ParameterError
        If more than half of the distribution lies outside the physical bounds.

    Notes
    -----
    Where the bounds cut less than 1e-12 the law is left as it is and only clipped, so that normal
    and lognormal parameters are in closed form. Otherwise values follow the law conditioned on the
    bounds; its mean and standard deviation are then sums over 4001 nodes of z.
    """
    law = representative_law(quantity.distribution, quantity.averaging_length, in_series=quantity.in_series)
    own = _own_bounds(law, quantity.distribution)
    start, end = _kept_scores(law, quantity.low, quantity.high)
    start, end = max(own.start, start), min(own.end, end)
    cut = (
        1.0
        if start >= end
        else (interval_probability(own.start, start) + interval_probability(end, own.end)) / own.kept
    )
    if cut > GREATEST_CUT:
        raise ParameterError(
            f"{quantity.address}: {cut:.1%} of the distribution lies outside the physical range "
            f"{quantity.low:g} to {quantity.high:g} {quantity.unit}; at most half may"
        )
    truncated = cut >= NEGLIGIBLE_CUT or isinstance(quantity.distribution, TruncatedNormal)
    truncation = Truncation(start, end) if truncated else None
    mean, sd = (law.mean, law.sd) if truncation is None else _moments(law, truncation)
    return Marginal(
        name=quantity.address,
        unit=quantity.unit,
        meaning=quantity.meaning,
        text=quantity.distribution.describe(quantity.unit),
        low=quantity.low,
        high=quantity.high,
        cut_share=cut if truncated else 0.0,
        law=law,
        truncation=truncation,
        mean=mean,
        sd=sd,
    )


def representative_law(
    distribution: Distribution, averaging_length: float | None, *, in_series: bool = False
) -> Law:
    r"""Law of the average of a property over its layer, before any physical bound.

    Parameters
    ----------
    distribution : Distribution
        Law as the user gave it: knowledge of the layer's mean and, for normal and lognormal,
        the variability from point to point.
    averaging_length : float or None, [m]
        Length over which the representative value is an average; None for none, which leaves the
        variability from point to point whole.
    in_series : bool
        Whether the average is harmonic, as for permeability across a layer, instead of arithmetic.

    Returns
    -------
    law : Law
        Law of the representative value.

    Raises
    ------
    ParameterError
        If the distribution is a constant or of an unknown kind.

    Notes
    -----
    With the inherent coefficient of variation :math:`V` and the variance function
    :math:`\Gamma^2` of the layer: normal, :math:`s^2 = s_k^2 + \Gamma^2 (V \mu)^2`; lognormal, the
    variances of the logarithm add, :math:`s^2 = s_k^2 + \Gamma^2 \ln(1 + V^2)`, and the mean is
    kept (an arithmetic average over the layer has the mean of its points), so that the median falls
    by the factor :math:`\exp(-\Gamma^2 \ln(1 + V^2) / 2)`. A harmonic average of a lognormal field
    is smaller than the arithmetic one by :math:`(1 + V^2)^{-(1 - \Gamma^2)}`, in the limit of a
    thick layer by :math:`1/(1 + V^2)`; the same factor is used for a normal field.
    """
    match distribution:
        case Normal():
            extra = inherent_variance(distribution, averaging_length)
            factor = _harmonic_factor(distribution, averaging_length) if in_series else 1.0
            sd = float(np.sqrt(distribution.sd**2 + extra))
            return NormalLaw(factor * distribution.mean, factor * sd)
        case Lognormal():
            extra = inherent_variance(distribution, averaging_length)
            log_sd = float(np.sqrt(distribution.log_sd**2 + extra))
            factor = _harmonic_factor(distribution, averaging_length) if in_series else 1.0
            return LognormalLaw(factor * distribution.median * float(np.exp(-0.5 * extra)), log_sd)
        case _:
            return plain_law(distribution)


def _harmonic_factor(distribution: Normal | Lognormal, length: float | None) -> float:
    """Harmonic over arithmetic average of the field."""
    point = float(np.log1p((distribution.inherent_cov or 0.0) ** 2))
    return float(np.exp(remaining_variance(point, distribution.vertical_scale, length) - point))


def _kept_scores(law: Law, low: float, high: float) -> tuple[float, float]:
    """Scores whose values lie within bounds; a value with a probability of its own is kept whole."""
    if isinstance(law, StepLaw | InterpolatedLaw):
        return law.kept_scores(low, high)
    return law.score(low), law.score(high)


def _own_bounds(law: Law, distribution: Distribution) -> Truncation:
    """Bounds that belong to the distribution itself and so are no cut."""
    if isinstance(distribution, TruncatedNormal):
        return Truncation(law.score(distribution.low), law.score(distribution.high))
    return Truncation(-np.inf, np.inf)


def _moments(law: Law, truncation: Truncation) -> tuple[float, float]:
    """Mean and standard deviation by the trapezoidal rule in z (spectral for smooth laws)."""
    z = np.linspace(-_REACH, _REACH, _NODES)
    weight = np.exp(-0.5 * z**2)
    weight /= weight.sum()
    value = law.quantile(truncation.score(z))
    mean = float(weight @ value)
    return mean, float(np.sqrt(weight @ (value - mean) ** 2))
