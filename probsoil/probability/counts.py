"""When a limit is exceeded, and how often: the one rule that every table and figure uses."""

from typing import Literal, TypeAlias

import numpy as np

from probsoil._typing import ArrayLike, BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError

Sense: TypeAlias = Literal["not more than", "not less than"]
SENSES: tuple[Sense, ...] = ("not more than", "not less than")


def exceeds(values: ArrayLike, threshold: float, sense: Sense) -> BoolArray:
    """Whether each value fails to meet a limit.

    Parameters
    ----------
    values : array_like, shape (n,), [any]
        Quantity of the limit in each realisation; not a number where it did not converge.
    threshold : float, [any]
        Threshold, in the unit of `values`.
    sense : {"not more than", "not less than"}
        What the limit demands.

    Returns
    -------
    exceeded : ndarray of bool, shape (n,), [-]
        True where the value lies beyond the threshold; a value equal to it meets the limit, one that is
        not a number does not. Infinite values are compared as they stand: a time that is never
        reached is more than any time.

    Raises
    ------
    ParameterError
        If the sense is unknown or the threshold is not a number.
    """
    _check(threshold, sense)
    value = np.asarray(values, dtype=np.float64)
    met = value <= threshold if sense == "not more than" else value >= threshold
    return ~met  # not-a-number compares as not met


def exceeding_counts(
    values: FloatArray, thresholds: FloatArray, sense: Sense, replicate: IntArray | None = None
) -> IntArray:
    """Count the values beyond each threshold, replicate by replicate.

    Parameters
    ----------
    values : ndarray, shape (n,), [any]
        Quantity of the limit in each realisation.
    thresholds : ndarray, shape (n_threshold,), [any]
        Thresholds, in the unit of `values`.
    sense : {"not more than", "not less than"}
        What the limit demands.
    replicate : ndarray of int, shape (n,), [-], optional
        Replicate of each realisation, from 0; None for one.

    Returns
    -------
    counts : ndarray of int, shape (n_replicate, n_threshold), [-]
        Counts by the rule of `exceeds`.

    Raises
    ------
    ParameterError
        If the sense is unknown.
    """
    _check(0.0, sense)
    if replicate is None:
        return _sorted_counts(values, thresholds, sense)[np.newaxis]
    rows = [
        _sorted_counts(values[replicate == r], thresholds, sense) for r in range(int(replicate.max()) + 1)
    ]
    return np.stack(rows)


def as_sample(values: ArrayLike, replicate: ArrayLike | None) -> tuple[FloatArray, IntArray | None]:
    """Sample and replicate numbers as checked arrays.

    Parameters
    ----------
    values : array_like, shape (n,), [any]
        Quantity of the limit in each realisation.
    replicate : array_like of int, shape (n,), [-], or None
        Replicate of each realisation, from 0.

    Returns
    -------
    values : ndarray, shape (n,), [any]
        Values as floats.
    replicate : ndarray of int, shape (n,), [-], or None
        Replicates; None where there is only one.

    Raises
    ------
    ShapeError
        If there are no values, they are not one row, or the replicates do not match them.
    ParameterError
        If a replicate number is negative.
    """
    sample = np.asarray(values, dtype=np.float64)
    if sample.ndim != 1 or sample.size == 0:
        raise ShapeError(f"values must have shape (n,) with n at least 1; got {sample.shape}")
    if replicate is None:
        return sample, None
    index = np.asarray(replicate, dtype=np.int64)
    if index.shape != sample.shape:
        raise ShapeError(f"replicate must have the shape of values, {sample.shape}; got {index.shape}")
    if index.min() < 0:
        raise ParameterError(f"replicate numbers must be 0 or more; got {index.min()}")
    return sample, index if index.max() > 0 else None


def _sorted_counts(values: FloatArray, thresholds: FloatArray, sense: Sense) -> IntArray:
    ordered = np.sort(values)  # not-a-number sorts last, above infinity
    if sense == "not more than":
        return values.size - np.searchsorted(ordered, thresholds, side="right").astype(np.int64)
    unknown = int(np.isnan(values).sum())
    return np.searchsorted(ordered, thresholds, side="left").astype(np.int64) + unknown


def _check(threshold: float, sense: Sense) -> None:
    if sense not in SENSES:
        raise ParameterError(f"sense must be 'not more than' or 'not less than'; got {sense!r}")
    if np.isnan(threshold):
        raise ParameterError("threshold must be a number; got nan")
