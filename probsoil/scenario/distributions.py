"""Distributions a scenario may give to an uncertain number, in base units.

They carry no sampling: drawing is the business of `probsoil.parameters`. Here they can
say what they are, where their mean lies and how much of them lies beyond a physical range.
"""

import math
from dataclasses import dataclass
from typing import ClassVar, TypeAlias

from probsoil.scenario.describing import Described, figure, normal_cdf, with_unit
from probsoil.scenario.listed_distributions import Discrete, Empirical, Percentiles
from probsoil.scenario.skewed_distributions import Gamma, Gumbel


@dataclass(frozen=True, slots=True, kw_only=True)
class Constant(Described):
    """A number that is not uncertain.

    Attributes
    ----------
    value : float, [base unit]
        The number.
    """

    kind: ClassVar[str] = "constant"
    value: float

    @property
    def expectation(self) -> float:
        """Mean, [base unit]."""
        return self.value

    def _outside(self, low: float, high: float) -> float:
        return float(not low <= self.value <= high)

    def _words(self, unit: str) -> str:
        return f"fixed at {with_unit(self.value, unit)}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Normal(Described):
    """Normal distribution of the representative value of a parameter.

    Attributes
    ----------
    mean, sd : float, [base unit]
        Mean and standard deviation of what is not known of the mean.
    inherent_cov : float, [-]
        Variability from point to point as a fraction of the mean; averages out over a layer.
    vertical_scale : float or None, [m]
        Scale of fluctuation with depth.
    horizontal_scale : float or None, [m]
        Scale of fluctuation in plan.
    """

    kind: ClassVar[str] = "normal"
    mean: float
    sd: float
    inherent_cov: float = 0.0
    vertical_scale: float | None = None
    horizontal_scale: float | None = None

    @property
    def expectation(self) -> float:
        """Mean, [base unit]."""
        return self.mean

    def _outside(self, low: float, high: float) -> float:
        return normal_cdf((low - self.mean) / self.sd) + normal_cdf((self.mean - high) / self.sd)

    def _words(self, unit: str) -> str:
        text = f"normal, mean {with_unit(self.mean, unit)}, standard deviation {with_unit(self.sd, unit)}"
        return text + _inherent_text(self.inherent_cov, self.vertical_scale, self.horizontal_scale)


@dataclass(frozen=True, slots=True, kw_only=True)
class Lognormal(Described):
    """Lognormal distribution of the representative value of a parameter.

    Attributes
    ----------
    median : float, [base unit]
        Median.
    log_sd : float, [-]
        Standard deviation of the natural logarithm.
    inherent_cov : float, [-]
        Variability from point to point as a fraction of the mean; averages out over a layer.
    vertical_scale : float or None, [m]
        Scale of fluctuation with depth.
    horizontal_scale : float or None, [m]
        Scale of fluctuation in plan.
    inherent_range : tuple of float or None, [-]
        5 % and 95 % point of the variability from point to point where it is not known itself;
        `inherent_cov` is then that of the root mean square.
    """

    kind: ClassVar[str] = "lognormal"
    median: float
    log_sd: float
    inherent_cov: float = 0.0
    vertical_scale: float | None = None
    horizontal_scale: float | None = None
    inherent_range: tuple[float, float] | None = None

    @property
    def expectation(self) -> float:
        """Mean, [base unit]."""
        return self.median * math.exp(0.5 * self.log_sd**2)

    @property
    def cov(self) -> float:
        """Coefficient of variation [-]."""
        return math.sqrt(math.expm1(self.log_sd**2))

    def _outside(self, low: float, high: float) -> float:
        centre = math.log(self.median)
        above = normal_cdf((centre - math.log(high)) / self.log_sd) if high > 0.0 else 1.0
        below = normal_cdf((math.log(low) - centre) / self.log_sd) if low > 0.0 else 0.0
        return below + above

    def _words(self, unit: str) -> str:
        text = f"lognormal, mean {with_unit(self.expectation, unit)}, cov {self.cov:.3g}"
        own = _inherent_text(self.inherent_cov, self.vertical_scale, self.horizontal_scale)
        if self.inherent_range is None:
            return text + own
        low, high = self.inherent_range
        known = f"point-to-point cov {self.inherent_cov:.3g}"
        return text + own.replace(known, f"point-to-point cov not known, {low:.3g} to {high:.3g} (90 %)")


@dataclass(frozen=True, slots=True, kw_only=True)
class Uniform(Described):
    """Uniform distribution.

    Attributes
    ----------
    low, high : float, [base unit]
        Bounds.
    """

    kind: ClassVar[str] = "uniform"
    low: float
    high: float

    @property
    def expectation(self) -> float:
        """Mean, [base unit]."""
        return 0.5 * (self.low + self.high)

    def _outside(self, low: float, high: float) -> float:
        inside = max(0.0, min(high, self.high) - max(low, self.low))
        return 1.0 - inside / (self.high - self.low)

    def _words(self, unit: str) -> str:
        return f"uniform from {figure(self.low)} to {with_unit(self.high, unit)}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Triangular(Described):
    """Triangular distribution.

    Attributes
    ----------
    low, mode, high : float, [base unit]
        Lower bound, most likely value, upper bound.
    """

    kind: ClassVar[str] = "triangular"
    low: float
    mode: float
    high: float

    @property
    def expectation(self) -> float:
        """Mean, [base unit]."""
        return (self.low + self.mode + self.high) / 3.0

    def _outside(self, low: float, high: float) -> float:
        return 1.0 - max(0.0, self._cdf(high) - self._cdf(low))

    def _cdf(self, x: float) -> float:
        width = self.high - self.low
        if x <= self.low:
            return 0.0
        if x >= self.high:
            return 1.0
        if x < self.mode:
            return (x - self.low) / width * ((x - self.low) / (self.mode - self.low))
        return 1.0 - (self.high - x) / width * ((self.high - x) / (self.high - self.mode))

    def _words(self, unit: str) -> str:
        ends = f"{figure(self.low)} to {with_unit(self.high, unit)}"
        return f"triangular from {ends}, most likely {figure(self.mode)}"


@dataclass(frozen=True, slots=True, kw_only=True)
class TruncatedNormal(Described):
    """Normal distribution cut at two bounds.

    Attributes
    ----------
    mean, sd : float, [base unit]
        Mean and standard deviation of the normal distribution before it is cut.
    low, high : float, [base unit]
        Bounds.
    """

    kind: ClassVar[str] = "truncated_normal"
    mean: float
    sd: float
    low: float
    high: float

    @property
    def expectation(self) -> float:
        """Mean after cutting, [base unit]."""
        a, b = (self.low - self.mean) / self.sd, (self.high - self.mean) / self.sd
        density_drop = (math.exp(-0.5 * a * a) - math.exp(-0.5 * b * b)) / math.sqrt(2.0 * math.pi)
        return self.mean + self.sd * density_drop / self.share_kept

    @property
    def share_kept(self) -> float:
        """Probability of the uncut normal distribution between the bounds [-]."""
        a, b = (self.low - self.mean) / self.sd, (self.high - self.mean) / self.sd
        # The difference of the smaller tails keeps its digits far from the mean.
        return normal_cdf(-a) - normal_cdf(-b) if a > 0.0 else normal_cdf(b) - normal_cdf(a)

    def _outside(self, low: float, high: float) -> float:
        if low <= self.low and self.high <= high:
            return 0.0
        inside_low, inside_high = max(low, self.low), min(high, self.high)
        if inside_low >= inside_high:
            return 1.0
        inside = TruncatedNormal(mean=self.mean, sd=self.sd, low=inside_low, high=inside_high)
        return 1.0 - inside.share_kept / self.share_kept

    def _words(self, unit: str) -> str:
        return (
            f"normal, mean {with_unit(self.mean, unit)}, standard deviation {with_unit(self.sd, unit)}, "
            f"cut at {figure(self.low)} and {with_unit(self.high, unit)}"
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Beta(Described):
    """Beta distribution on a stated interval (four parameters).

    Attributes
    ----------
    alpha, beta : float, [-]
        Shape parameters.
    low, high : float, [base unit]
        Bounds.
    """

    kind: ClassVar[str] = "beta"
    alpha: float
    beta: float
    low: float
    high: float

    @property
    def expectation(self) -> float:
        """Mean, [base unit]."""
        return self.low + (self.high - self.low) * self.alpha / (self.alpha + self.beta)

    def _outside(self, low: float, high: float) -> float:
        if low <= self.low and self.high <= high:
            return 0.0
        from scipy.special import betainc  # deferred: most scenarios never need it

        width = self.high - self.low
        ends = [min(1.0, max(0.0, (x - self.low) / width)) for x in (low, high)]
        below, within = (float(betainc(self.alpha, self.beta, end)) for end in ends)
        return 1.0 - (within - below)

    def _words(self, unit: str) -> str:
        return (
            f"beta from {figure(self.low)} to {with_unit(self.high, unit)}, "
            f"mean {figure(self.expectation)}, shapes {self.alpha:.3g} and {self.beta:.3g}"
        )


Distribution: TypeAlias = (
    Constant
    | Normal
    | Lognormal
    | Uniform
    | Triangular
    | TruncatedNormal
    | Beta
    | Gamma
    | Gumbel
    | Discrete
    | Empirical
    | Percentiles
)
BOUNDED = (Uniform, Triangular, TruncatedNormal, Beta, Discrete, Empirical)


def _inherent_text(inherent_cov: float, vertical_scale: float | None, horizontal_scale: float | None) -> str:
    if inherent_cov == 0.0 or vertical_scale is None:
        return ""
    scales = f"vertical scale of fluctuation {vertical_scale:.3g} m"
    if horizontal_scale is not None:
        scales += f", horizontal {horizontal_scale:.3g} m"
    return f"; point-to-point cov {inherent_cov:.3g}, {scales}"
