"""One-dimensional probability laws, each read through a latent standard normal z.

A law turns z into a value (`quantile`) and a value into z (`score`). Both work from the nearer
tail, so that a value far out on either side keeps its digits. Physical bounds are not handled
here; see `probsoil.parameters.marginals`.
"""

from dataclasses import dataclass, field
from typing import Protocol

import numpy as np
from scipy.special import betainc, betaincinv, betaln, log_ndtr, ndtr, ndtri

from probsoil._typing import FloatArray

_TABLE_REACH = 9.0  # beyond this |z| (probability 1e-19) a beta quantile stays where it is
_TABLE_PER_UNIT = 64
_TINY = 1e-150  # below this share of the range the leading term of the beta law is exact


class Law(Protocol):
    """What every law offers."""

    @property
    def mean(self) -> float:
        """Mean of the law, in the parameter's unit, [any]."""

    @property
    def sd(self) -> float:
        """Standard deviation of the law, in the parameter's unit, [any]."""

    def quantile(self, z: FloatArray) -> FloatArray:
        """Values at latent standard normals.

        Parameters
        ----------
        z : ndarray, shape (...,), [-]
            Latent standard normals.

        Returns
        -------
        values : ndarray, shape (...,), [any]
            Values of the law, in the parameter's unit, with the shape of `z`.
        """

    def score(self, value: float) -> float:
        """Latent standard normal at which a value lies.

        Parameters
        ----------
        value : float, [any]
            Value, in the parameter's unit.

        Returns
        -------
        z : float, [-]
            Standard normal score; infinite at and beyond an end of the law's range.
        """


def nearer_tail_score(below: float, above: float) -> float:
    """Latent standard normal with probability `below` to its left and `above` to its right.

    Parameters
    ----------
    below, above : float, [-]
        The two tail probabilities, which sum to one; the smaller is the one used.

    Returns
    -------
    z : float, [-]
        Standard normal score.
    """
    return float(ndtri(below)) if below < above else -float(ndtri(above))


def table_nodes() -> FloatArray:
    """Scores at which a law that is read from a table holds its values.

    Returns
    -------
    z : ndarray, shape (n_node,), [-]
        From -9 to 9, 64 to a unit.
    """
    return np.linspace(-_TABLE_REACH, _TABLE_REACH, round(2 * _TABLE_REACH * _TABLE_PER_UNIT) + 1)


def read_table(value: FloatArray, slope: FloatArray, z: FloatArray) -> FloatArray:
    """Values between the nodes of a table, by cubic Hermite pieces.

    Parameters
    ----------
    value, slope : ndarray, shape (n_node,), [any]
        Values at `table_nodes`, and their derivatives with z.
    z : ndarray, shape (...,), [-]
        Scores; beyond the table its end values stand.

    Returns
    -------
    between : ndarray, shape (...,), [any]
        Values.
    """
    place = (np.clip(z, -_TABLE_REACH, _TABLE_REACH) + _TABLE_REACH) * _TABLE_PER_UNIT
    node = np.minimum(place.astype(np.int64), value.size - 2)
    t = place - node
    start, end = value[node], value[node + 1]
    first, last = slope[node] / _TABLE_PER_UNIT, slope[node + 1] / _TABLE_PER_UNIT
    rise = end - start
    between: FloatArray = start + t * (
        first + t * (3.0 * rise - 2.0 * first - last + t * (first + last - 2.0 * rise))
    )
    return between


@dataclass(frozen=True, slots=True)
class NormalLaw:
    """Normal law.

    Attributes
    ----------
    mean, sd : float, [any]
        Mean and standard deviation, in the parameter's unit.
    """

    mean: float
    sd: float

    def quantile(self, z: FloatArray) -> FloatArray:
        """See `Law.quantile`."""
        return self.mean + self.sd * z

    def score(self, value: float) -> float:
        """See `Law.score`."""
        return (value - self.mean) / self.sd


@dataclass(frozen=True, slots=True)
class LognormalLaw:
    """Lognormal law.

    Attributes
    ----------
    median : float, [any]
        Median, above zero, in the parameter's unit.
    log_sd : float, [-]
        Standard deviation of the natural logarithm.
    """

    median: float
    log_sd: float

    @property
    def mean(self) -> float:
        """Mean of the law, in the parameter's unit, [any]."""
        return self.median * float(np.exp(0.5 * self.log_sd**2))

    @property
    def sd(self) -> float:
        """Standard deviation of the law, in the parameter's unit, [any]."""
        return self.mean * float(np.sqrt(np.expm1(self.log_sd**2)))

    def quantile(self, z: FloatArray) -> FloatArray:
        """See `Law.quantile`."""
        return self.median * np.exp(self.log_sd * z)

    def score(self, value: float) -> float:
        """See `Law.score`."""
        return float(np.log(value / self.median)) / self.log_sd if value > 0.0 else -np.inf


@dataclass(frozen=True, slots=True)
class UniformLaw:
    """Uniform law.

    Attributes
    ----------
    low, high : float, [any]
        Ends of the range, in the parameter's unit.
    """

    low: float
    high: float

    @property
    def mean(self) -> float:
        """Mean of the law, in the parameter's unit, [any]."""
        return 0.5 * (self.low + self.high)

    @property
    def sd(self) -> float:
        """Standard deviation of the law, in the parameter's unit, [any]."""
        return (self.high - self.low) / float(np.sqrt(12.0))

    def quantile(self, z: FloatArray) -> FloatArray:
        """See `Law.quantile`."""
        part = (self.high - self.low) * ndtr(-np.abs(z))
        return np.where(z < 0.0, self.low + part, self.high - part)

    def score(self, value: float) -> float:
        """See `Law.score`."""
        share = np.clip((value - self.low) / (self.high - self.low), 0.0, 1.0)
        return nearer_tail_score(float(share), float(1.0 - share))


@dataclass(frozen=True, slots=True)
class TriangularLaw:
    """Triangular law.

    Attributes
    ----------
    low, mode, high : float, [any]
        Ends of the range and the most likely value, in the parameter's unit.
    """

    low: float
    mode: float
    high: float

    @property
    def mean(self) -> float:
        """Mean of the law, in the parameter's unit, [any]."""
        return (self.low + self.mode + self.high) / 3.0

    @property
    def sd(self) -> float:
        """Standard deviation of the law, in the parameter's unit, [any]."""
        left, right = self.mode - self.low, self.high - self.mode
        return float(np.sqrt((left**2 + left * right + right**2) / 18.0))

    def quantile(self, z: FloatArray) -> FloatArray:
        """See `Law.quantile`."""
        span = self.high - self.low
        rising = self.low + np.sqrt(ndtr(z) * span * (self.mode - self.low))
        falling = self.high - np.sqrt(ndtr(-z) * span * (self.high - self.mode))
        return np.where(ndtr(z) * span < self.mode - self.low, rising, falling)

    def score(self, value: float) -> float:
        """See `Law.score`."""
        x = min(max(value, self.low), self.high)
        span = self.high - self.low
        if x < self.mode:
            below = (x - self.low) ** 2 / (span * (self.mode - self.low))
            return nearer_tail_score(below, 1.0 - below)
        above = (self.high - x) ** 2 / (span * (self.high - self.mode)) if x < self.high else 0.0
        return nearer_tail_score(1.0 - above, above)


@dataclass(frozen=True, slots=True, eq=False)
class BetaLaw:
    """Four-parameter beta law, read from a table in z.

    Attributes
    ----------
    alpha, beta : float, [-]
        Shape parameters, above zero.
    low, high : float, [any]
        Ends of the range, in the parameter's unit.

    Notes
    -----
    The table holds the logit of the share of the range, y, at 64 nodes per unit of z, with its
    exact slope phi(z) B(alpha, beta) / (y^alpha (1 - y)^beta); cubic Hermite pieces join them. The logit
    is close to a parabola in each tail, so both ends of the range keep their relative accuracy.
    """

    alpha: float
    beta: float
    low: float
    high: float
    _logit: FloatArray = field(init=False, repr=False)
    _slope: FloatArray = field(init=False, repr=False)

    def __post_init__(self) -> None:
        z = table_nodes()
        log_y, log_rest = _log_beta_quantile(self.alpha, self.beta, z)
        log_density = -0.5 * z**2 - 0.5 * np.log(2.0 * np.pi)
        slope = np.exp(
            log_density + betaln(self.alpha, self.beta) - self.alpha * log_y - self.beta * log_rest
        )
        object.__setattr__(self, "_logit", log_y - log_rest)
        object.__setattr__(self, "_slope", slope)

    @property
    def mean(self) -> float:
        """Mean of the law, in the parameter's unit, [any]."""
        return self.low + (self.high - self.low) * self.alpha / (self.alpha + self.beta)

    @property
    def sd(self) -> float:
        """Standard deviation of the law, in the parameter's unit, [any]."""
        total = self.alpha + self.beta
        share = float(np.sqrt(self.alpha * self.beta / (total + 1.0))) / total
        return (self.high - self.low) * share

    def quantile(self, z: FloatArray) -> FloatArray:
        """See `Law.quantile`."""
        logit = read_table(self._logit, self._slope, z)
        nearer: FloatArray = np.exp(-np.abs(logit))
        part = (self.high - self.low) * (nearer / (1.0 + nearer))
        return np.where(logit < 0.0, self.low + part, self.high - part)

    def score(self, value: float) -> float:
        """See `Law.score`."""
        y = min(max((value - self.low) / (self.high - self.low), 0.0), 1.0)
        return nearer_tail_score(
            float(betainc(self.alpha, self.beta, y)), float(betainc(self.beta, self.alpha, 1.0 - y))
        )


def _log_beta_quantile(alpha: float, beta: float, z: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Logarithms of the beta quantile y and of 1 - y, each kept accurate where it is small."""
    y = betaincinv(alpha, beta, ndtr(z))
    rest = betaincinv(beta, alpha, ndtr(-z))
    near_low = _log_small(y, alpha, beta, z)
    near_high = _log_small(rest, beta, alpha, -z)
    log_y = np.where(y < 0.5, near_low, np.log1p(-np.minimum(rest, 0.75)))
    log_rest = np.where(rest < 0.5, near_high, np.log1p(-np.minimum(y, 0.75)))
    return log_y, log_rest


def _log_small(share: FloatArray, alpha: float, beta: float, z: FloatArray) -> FloatArray:
    """Logarithm of a beta quantile, by its leading term where the quantile underflows."""
    leading = (log_ndtr(z) + np.log(alpha) + betaln(alpha, beta)) / alpha
    return np.where(share > _TINY, np.log(np.maximum(share, _TINY)), leading)
