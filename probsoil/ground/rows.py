"""Arrays of one row per realisation, kept row after row in memory.

A choice of columns made with an index lies column after column. Arithmetic between the two kinds is
up to twenty times as slow, and a sum over such columns adds in another order than over one row alone.
"""

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray


def chosen(values: FloatArray, columns: IntArray | BoolArray) -> FloatArray:
    """Return some columns, row after row.

    Parameters
    ----------
    values : ndarray, shape (..., n), [any]
        The last axis runs over layers or depths.
    columns : ndarray of int or bool, shape (n_chosen,) or (n,), [-]
        Places on the last axis, or which of them.

    Returns
    -------
    chosen : ndarray, shape (..., n_chosen), [any]
        Contiguous.
    """
    places = np.flatnonzero(columns) if columns.dtype == np.bool_ else columns
    return np.take(values, places, axis=-1)


def row_sum(values: FloatArray) -> FloatArray:
    """Return the sum of every row.

    Parameters
    ----------
    values : ndarray, shape (n_sample, n), [any]
        One row per realisation.

    Returns
    -------
    total : ndarray, shape (n_sample,), [any]
        Bit for bit the same for a realisation alone and in company, however the array lies in memory.
    """
    return np.asarray(np.ascontiguousarray(values).sum(axis=1))
