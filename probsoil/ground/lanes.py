"""Side by side: how realisations are packed for the compiled kernels."""

from typing import TypeVar

import numpy as np

from probsoil._typing import FloatArray, IntArray

Numbers = TypeVar("Numbers", FloatArray, IntArray)

LANES = 32
"""Realisations that a kernel carries side by side, [-]; a multiple of any vector width."""


class Lanes:
    """Moves arrays between sample-first order and blocks of lanes, padding with the last sample.

    Parameters
    ----------
    n_sample : int, [-]
        Number of realisations.
    """

    def __init__(self, n_sample: int) -> None:
        self.n_sample = n_sample
        self.n_block = -(-n_sample // LANES)
        self._index = np.minimum(np.arange(self.n_block * LANES), n_sample - 1)

    def pack(self, values: FloatArray) -> FloatArray:
        """Return an array in blocks of lanes.

        Parameters
        ----------
        values : ndarray, shape (n_sample, n), [any]
            One row per realisation.

        Returns
        -------
        blocks : ndarray, shape (n_block, n, LANES), [any]
            Contiguous.
        """
        blocks = values[self._index].reshape(self.n_block, LANES, -1)
        return np.ascontiguousarray(blocks.transpose(0, 2, 1))

    def unpack(self, values: Numbers) -> Numbers:
        """Return blocks of lanes as one row per realisation.

        Parameters
        ----------
        values : ndarray, shape (n_block, ..., LANES), [any]
            Blocks.

        Returns
        -------
        rows : ndarray, shape (n_sample, ...), [any]
            Without the padding.
        """
        first = np.moveaxis(values, -1, 1)
        rows = first.reshape(self.n_block * LANES, *first.shape[2:])
        return np.ascontiguousarray(rows[: self.n_sample])
