"""What every distribution of a scenario can tell of itself."""

import math
from abc import ABC, abstractmethod
from typing import ClassVar

GREATEST_LOG_SD = 3.0
"""Greatest standard deviation of a natural logarithm, [-]."""


def normal_cdf(z: float) -> float:
    """Return the probability that a standard normal lies below a score.

    Parameters
    ----------
    z : float, [-]
        Score.

    Returns
    -------
    probability : float, [-]
        Probability.
    """
    return 0.5 * math.erfc(-z / math.sqrt(2.0))


def figure(value: float) -> str:
    """Return a number with four figures; powers of ten only where a plain number would be long.

    Parameters
    ----------
    value : float, [any]
        Number.

    Returns
    -------
    text : str
        Such as ``0.3125`` or ``25,000``.
    """
    return f"{value:,.0f}" if 1e4 <= abs(value) < 1e7 else f"{value:.4g}"


def with_unit(value: float, unit: str) -> str:
    """Return a number with four figures and its unit.

    Parameters
    ----------
    value : float, [`unit`]
        Number.
    unit : str
        Base unit, ``-`` for none.

    Returns
    -------
    text : str
        Such as ``18 kPa``.
    """
    if unit in ("", "-"):
        return figure(value)
    return f"{figure(value)} {'degrees' if unit == 'degree' else unit}"


class Described(ABC):
    """What every distribution can tell of itself."""

    __slots__ = ()
    kind: ClassVar[str]

    @property
    @abstractmethod
    def expectation(self) -> float:
        """Mean, [base unit]."""

    def probability_outside(self, low: float, high: float) -> float:
        """Return the probability beyond a range, point-to-point variability left out.

        Parameters
        ----------
        low, high : float, [base unit]
            Range.

        Returns
        -------
        probability : float, [-]
            From 0 to 1.
        """
        return min(1.0, max(0.0, self._outside(low, high)))

    def describe(self, unit: str) -> str:
        """Return the distribution in words.

        Parameters
        ----------
        unit : str
            Base unit, ``-`` for none.

        Returns
        -------
        text : str
            Short phrase.
        """
        return self._words(unit)

    @abstractmethod
    def _outside(self, low: float, high: float) -> float: ...

    @abstractmethod
    def _words(self, unit: str) -> str: ...
