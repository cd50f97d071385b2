"""Straight lines through readings, with what is known of their errors beforehand."""

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtri, stdtrit

from probsoil._typing import FloatArray

PRIOR_READINGS = 4.0
"""How many readings the scatter expected beforehand counts for [-]; a judgement."""

READING_CORRELATION = 0.3
"""Correlation of the errors of neighbouring readings of one specimen [-]; a judgement."""

_CONFIDENCE = 0.95  # one-sided, of the 90 % interval that standard errors are widened for


@dataclass(frozen=True, slots=True, kw_only=True)
class Estimate:
    """A number read off a test.

    Attributes
    ----------
    value : float, [unit of the quantity]
        Best estimate.
    standard_error : float, [unit of the quantity]
        Of the interpretation alone; 1.645 of it on either side make the 90 % interval.
    """

    value: float
    standard_error: float

    @property
    def relative_error(self) -> float:
        """Standard error over value [-]."""
        return self.standard_error / abs(self.value)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Regression:
    """Coefficients of a linear regression.

    Attributes
    ----------
    coefficient : ndarray, shape (n,), [unit of the quantity]
        Best estimates.
    covariance : ndarray, shape (n, n), [product of the units]
        Of the coefficients, widened for a scatter known from few readings.
    scatter : float, [unit of the reading]
        Standard deviation of a reading about the line.
    """

    coefficient: FloatArray
    covariance: FloatArray
    scatter: float

    def estimate(self, index: int, factor: float = 1.0) -> Estimate:
        """Return one coefficient.

        Parameters
        ----------
        index : int, [-]
            Which.
        factor : float, [any]
            To multiply it with.

        Returns
        -------
        estimate : Estimate
            Value and standard error.
        """
        return Estimate(
            value=factor * float(self.coefficient[index]),
            standard_error=abs(factor) * float(np.sqrt(self.covariance[index, index])),
        )


def widened(standard_deviation: float, freedom: float) -> float:
    """Return the standard error that gives Student's 90 % interval when read as a normal one.

    Parameters
    ----------
    standard_deviation : float, [any]
        Scale of Student's distribution.
    freedom : float, [-]
        Degrees of freedom, above zero.

    Returns
    -------
    standard_error : float, [any]
        Larger than the scale.
    """
    return float(standard_deviation * stdtrit(freedom, _CONFIDENCE) / ndtri(_CONFIDENCE))


def whitener(place: FloatArray, correlation: float = READING_CORRELATION) -> FloatArray:
    """Return what turns readings with correlated errors into independent ones.

    Parameters
    ----------
    place : ndarray, shape (n,), [-]
        Of the readings, rising; neighbours lie one apart.
    correlation : float, [-]
        Between neighbours; it falls off geometrically with distance.

    Returns
    -------
    matrix : ndarray, shape (n, n), [-]
        To multiply readings and design with.
    """
    matrix = correlation ** np.abs(place[:, None] - place[None, :])
    return np.asarray(np.linalg.inv(np.linalg.cholesky(matrix)), dtype=np.float64)


def regression(
    design: FloatArray,
    reading: FloatArray,
    expected_scatter: float,
    *,
    correlation: float = READING_CORRELATION,
    place: FloatArray | None = None,
) -> Regression:
    """Fit a linear law to readings whose scatter is roughly known beforehand.

    Parameters
    ----------
    design : ndarray, shape (n, n_coefficient), [any]
        Factors of the coefficients.
    reading : ndarray, shape (n,), [any]
        Readings, in the order taken.
    expected_scatter : float, [unit of the reading]
        Standard deviation expected beforehand.
    correlation : float, [-]
        Of the errors of neighbours.
    place : ndarray, shape (n,), or None, [-]
        Of the readings, neighbours one apart; None for 0, 1, 2 and so on.

    Returns
    -------
    fit : Regression
        Generalised least squares; the variance of a reading is the mean of the one expected, which counts
        as `PRIOR_READINGS`, and the one found.
    """
    n, n_coefficient = design.shape
    white = whitener(np.arange(float(n)) if place is None else place, correlation)
    factors, target = white @ design, white @ reading
    normal = np.linalg.inv(factors.T @ factors)
    coefficient = normal @ (factors.T @ target)
    left = target - factors @ coefficient
    freedom = n - n_coefficient + PRIOR_READINGS
    variance = (float(left @ left) + PRIOR_READINGS * expected_scatter**2) / freedom
    return Regression(
        coefficient=np.asarray(coefficient),
        covariance=np.asarray(normal) * widened(np.sqrt(variance), freedom) ** 2,
        scatter=float(np.sqrt(variance)),
    )


def line(abscissa: FloatArray, reading: FloatArray, expected_scatter: float) -> Regression:
    """Fit a straight line.

    Parameters
    ----------
    abscissa : ndarray, shape (n,), [any]
        Where.
    reading : ndarray, shape (n,), [any]
        Readings.
    expected_scatter : float, [unit of the reading]
        Standard deviation expected beforehand.

    Returns
    -------
    fit : Regression
        Intercept and slope.
    """
    return regression(np.stack([np.ones_like(abscissa), abscissa], axis=1), reading, expected_scatter)


def pooled(values: FloatArray, expected_spread: float) -> tuple[float, float]:
    """Return the mean of several results and its standard error by the spread between them.

    Parameters
    ----------
    values : ndarray, shape (n,), [any]
        Results.
    expected_spread : float, [unit of the values]
        Standard deviation between them expected beforehand; counts as `PRIOR_READINGS` results.

    Returns
    -------
    mean, error : float, [unit of the values]
        The mean, and its standard error.
    """
    mean = float(values.mean())
    freedom = values.size - 1.0 + PRIOR_READINGS
    variance = (float(((values - mean) ** 2).sum()) + PRIOR_READINGS * expected_spread**2) / freedom
    return mean, widened(float(np.sqrt(variance / values.size)), freedom)
