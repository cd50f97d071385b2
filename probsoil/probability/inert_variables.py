"""Variables that a performance function does not look at."""

import numpy as np

from probsoil._typing import BoolArray
from probsoil.errors import ParameterError
from probsoil.probability.limit_state import Performance, generator

STAGE = 14
_WIDE = 1.5  # standard deviations of the points: what starts to matter in the tail should be met


def inert_variables(
    performance: Performance, dimension: int, *, points: int = 16, seed: int = 0
) -> BoolArray:
    """Variables whose change leaves every value as it is, to the last bit.

    Parameters
    ----------
    performance : callable
        Values (n,) or (n, n_output) at rows of independent standard normals (n, d).
    dimension : int, [-]
        Number of standard normals d.
    points : int, [-]
        Random points at which each variable in turn is drawn anew; the runs are `points` times d + 1.
    seed : int, [-]
        Seed of the points.

    Returns
    -------
    inert : ndarray of bool, shape (d,), [-]
        True where no value changed. A variable that plays a part only where none of the points lies is taken
        for inert.

    Raises
    ------
    ParameterError
        If there are no points or no variables.
    """
    if points < 1 or dimension < 1:
        raise ParameterError(f"points and dimension must be at least 1; got {points} and {dimension}")
    random = generator(seed, STAGE)
    base = _WIDE * random.standard_normal((points, dimension))
    fresh = _WIDE * random.standard_normal((points, dimension))
    rows = np.tile(base, (dimension + 1, 1, 1))
    for variable in range(dimension):
        rows[variable + 1, :, variable] = fresh[:, variable]
    values = np.asarray(performance(rows.reshape(-1, dimension)), dtype=np.float64)
    values = values.reshape(dimension + 1, -1)
    same = (values[1:] == values[0]) | (np.isnan(values[1:]) & np.isnan(values[0]))
    return np.asarray(same.all(axis=1))
