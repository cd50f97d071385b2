"""Distributions with one longer tail besides the lognormal: gamma and Gumbel."""

import math
from dataclasses import dataclass
from typing import ClassVar

from probsoil.scenario.describing import Described, figure, with_unit

EULER = 0.57721566490153286
"""Euler's constant: mean of the Gumbel distribution of mode 0 and scale 1, [-]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Gamma(Described):
    """Gamma distribution: never negative, longer upper tail, thinner than the lognormal one.

    Attributes
    ----------
    shape : float, [-]
        Shape parameter, one over the square of the coefficient of variation.
    scale : float, [base unit]
        Mean over shape.
    """

    kind: ClassVar[str] = "gamma"
    shape: float
    scale: float

    @property
    def expectation(self) -> float:
        """Mean, [base unit]."""
        return self.shape * self.scale

    @property
    def sd(self) -> float:
        """Standard deviation, [base unit]."""
        return math.sqrt(self.shape) * self.scale

    def _outside(self, low: float, high: float) -> float:
        from scipy.special import gammainc, gammaincc  # deferred: most scenarios never need it

        below = float(gammainc(self.shape, low / self.scale)) if low > 0.0 else 0.0
        above = float(gammaincc(self.shape, high / self.scale)) if high > 0.0 else 1.0
        return below + above

    def _words(self, unit: str) -> str:
        spread = f"cov {1.0 / math.sqrt(self.shape):.3g}, shape {figure(self.shape)}"
        return f"gamma, mean {with_unit(self.expectation, unit)}, {spread}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Gumbel(Described):
    """Gumbel distribution of largest values: longer upper tail, may be negative.

    Attributes
    ----------
    mode, scale : float, [base unit]
        Most likely value, and spread: the standard deviation times the root of 6 over pi.
    """

    kind: ClassVar[str] = "gumbel"
    mode: float
    scale: float

    @property
    def expectation(self) -> float:
        """Mean, [base unit]."""
        return self.mode + EULER * self.scale

    @property
    def sd(self) -> float:
        """Standard deviation, [base unit]."""
        return math.pi / math.sqrt(6.0) * self.scale

    def _outside(self, low: float, high: float) -> float:
        # exp(-745) is the least number there is; anything beyond is a certainty either way
        hazards = (math.exp(min(700.0, -(end - self.mode) / self.scale)) for end in (low, high))
        below, above = hazards
        return math.exp(-below) - math.expm1(-above)

    def _words(self, unit: str) -> str:
        spread = f"standard deviation {with_unit(self.sd, unit)}"
        return f"Gumbel (of largest values), mean {with_unit(self.expectation, unit)}, {spread}"
