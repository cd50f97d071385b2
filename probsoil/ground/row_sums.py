"""Sums over depth that do not depend on how many realisations are computed together."""

import numpy as np

from probsoil._typing import FloatArray


def row_sum(values: FloatArray) -> FloatArray:
    """Return the sum of every row.

    Parameters
    ----------
    values : ndarray, shape (n_sample, n), [any]
        One row per realisation.

    Returns
    -------
    total : ndarray, shape (n_sample,), [any]
        Bit for bit the same for a realisation alone and in company: the order in which numpy adds
        depends on how an array lies in memory, and a choice of columns lies otherwise than the whole.
    """
    return np.asarray(np.ascontiguousarray(values).sum(axis=1))
