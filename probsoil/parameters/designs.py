"""Points at which a model is run: plain Monte Carlo, Latin hypercube, scrambled Sobol'.

Each design is cut into numbered chunks. A chunk depends on the seed and its number only, so any
worker may draw any chunk at any time. In the replicated designs a chunk never mixes replicates.
"""

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from typing import ClassVar, Literal, Protocol, TypeAlias

import numpy as np
from scipy.special import ndtri

from probsoil._typing import FloatArray, IntArray
from probsoil.errors import ParameterError

CHUNK_SIZE = 1024
REPLICATES = 16
POINT_STAGE = 0  # first spawn key of the points themselves
PERMUTATION_STAGE = 1  # first spawn key of the permutations of a replicate
_SOBOL_BITS = 30
_EDGE = 2.0**-53

DrawName: TypeAlias = Literal["monte carlo", "latin hypercube", "sobol"]


class Design(Protocol):
    """What every design offers."""

    name: ClassVar[str]
    replicates: ClassVar[int]
    chunk_size: ClassVar[int]

    @property
    def n(self) -> int:
        """Number of points [-]."""

    @property
    def n_chunks(self) -> int:
        """Number of chunks [-]."""

    def chunk(self, index: int) -> FloatArray:
        """Independent standard normals of one chunk.

        Parameters
        ----------
        index : int, [-]
            Number of the chunk, from 0.

        Returns
        -------
        u : ndarray, shape (n_i, d), [-]
            Standard normals, one row per point and one column per uncertain parameter; at most
            `chunk_size` rows.

        Raises
        ------
        ParameterError
            If there is no such chunk.
        """

    def replicate_index(self, index: int) -> IntArray:
        """Replicate that each point of one chunk belongs to.

        Parameters
        ----------
        index : int, [-]
            Number of the chunk, from 0.

        Returns
        -------
        replicate : ndarray, shape (n_i,), [-]
            Numbers from 0 to `replicates` - 1.

        Raises
        ------
        ParameterError
            If there is no such chunk.
        """


@dataclass(frozen=True, slots=True)
class MonteCarlo:
    """Independent points.

    Attributes
    ----------
    seed : int, [-]
        Seed of the run.
    n : int, [-]
        Number of points.
    dimension : int, [-]
        Number of uncertain parameters d.
    """

    name: ClassVar[str] = "monte carlo"
    replicates: ClassVar[int] = 1
    chunk_size: ClassVar[int] = CHUNK_SIZE
    seed: int
    n: int
    dimension: int

    def __post_init__(self) -> None:
        _check(self.n, self.dimension)

    @property
    def n_chunks(self) -> int:
        """Number of chunks [-]."""
        return -(-self.n // CHUNK_SIZE)

    def chunk(self, index: int) -> FloatArray:
        """Independent standard normals of one chunk.

        Parameters
        ----------
        index : int, [-]
            Number of the chunk, from 0.

        Returns
        -------
        u : ndarray, shape (n_i, d), [-]
            Standard normals; only the last chunk may hold fewer than 1024 points.

        Raises
        ------
        ParameterError
            If there is no such chunk.
        """
        _check_chunk(index, self.n_chunks)
        size = min(CHUNK_SIZE, self.n - index * CHUNK_SIZE)
        return _generator(self.seed, POINT_STAGE, index).standard_normal((size, self.dimension))

    def replicate_index(self, index: int) -> IntArray:
        """Replicate of each point: all zero, since the points are independent.

        Parameters
        ----------
        index : int, [-]
            Number of the chunk, from 0.

        Returns
        -------
        replicate : ndarray, shape (n_i,), [-]
            Zeros.

        Raises
        ------
        ParameterError
            If there is no such chunk.
        """
        _check_chunk(index, self.n_chunks)
        return np.zeros(min(CHUNK_SIZE, self.n - index * CHUNK_SIZE), dtype=np.int64)


@dataclass(frozen=True, slots=True)
class _Replicated:
    """Sixteen replicates of equal size, drawn independently of each other.

    Attributes
    ----------
    seed : int, [-]
        Seed of the run.
    asked : int, [-]
        Number of points asked for; rounded up to what the replicates hold.
    dimension : int, [-]
        Number of uncertain parameters d.
    """

    replicates: ClassVar[int] = REPLICATES
    chunk_size: ClassVar[int] = CHUNK_SIZE
    seed: int
    asked: int
    dimension: int

    def __post_init__(self) -> None:
        _check(self.asked, self.dimension)

    @property
    def per_replicate(self) -> int:
        """Points in each replicate [-]."""
        return -(-self.asked // REPLICATES)

    @property
    def n(self) -> int:
        """Number of points [-]."""
        return REPLICATES * self.per_replicate

    @property
    def n_chunks(self) -> int:
        """Number of chunks [-]."""
        return REPLICATES * -(-self.per_replicate // CHUNK_SIZE)

    def chunk(self, index: int) -> FloatArray:
        """Independent standard normals of one chunk.

        Parameters
        ----------
        index : int, [-]
            Number of the chunk, from 0.

        Returns
        -------
        u : ndarray, shape (n_i, d), [-]
            Standard normals.

        Raises
        ------
        ParameterError
            If there is no such chunk.
        """
        return np.asarray(ndtri(self._uniform(index, *self._place(index))))

    def replicate_index(self, index: int) -> IntArray:
        """Replicate that each point of one chunk belongs to.

        Parameters
        ----------
        index : int, [-]
            Number of the chunk, from 0.

        Returns
        -------
        replicate : ndarray, shape (n_i,), [-]
            One number throughout, from 0 to 15.

        Raises
        ------
        ParameterError
            If there is no such chunk.
        """
        replicate, _, size = self._place(index)
        return np.full(size, replicate, dtype=np.int64)

    def _place(self, index: int) -> tuple[int, int, int]:
        """Replicate of a chunk, its first point within the replicate, and its size."""
        _check_chunk(index, self.n_chunks)
        replicate, part = divmod(index, self.n_chunks // REPLICATES)
        first = part * CHUNK_SIZE
        return replicate, first, min(CHUNK_SIZE, self.per_replicate - first)

    def _uniform(self, index: int, replicate: int, first: int, size: int) -> FloatArray:
        raise NotImplementedError


@dataclass(frozen=True, slots=True)
class LatinHypercube(_Replicated):
    """Sixteen independent Latin hypercubes with random placement in their cells.

    Attributes
    ----------
    seed : int, [-]
        Seed of the run.
    asked : int, [-]
        Number of points asked for; rounded up to sixteen equal replicates.
    dimension : int, [-]
        Number of uncertain parameters d.

    References
    ----------
    .. [1] M. D. McKay, R. J. Beckman and W. J. Conover, "A comparison of three methods for selecting
       values of input variables in the analysis of output from a computer code", Technometrics, 21,
       1979 (recalled; not opened).
    """

    name: ClassVar[str] = "latin hypercube"

    def _uniform(self, index: int, replicate: int, first: int, size: int) -> FloatArray:
        cells = _latin_cells(self.seed, replicate, self.per_replicate, self.dimension)[first : first + size]
        within = _generator(self.seed, POINT_STAGE, index).random((size, self.dimension))
        return np.clip((cells + within) / self.per_replicate, _EDGE, 1.0 - _EDGE)


@dataclass(frozen=True, slots=True)
class ScrambledSobol(_Replicated):
    """Sixteen independently scrambled Sobol' sets, each with its columns in random order.

    Attributes
    ----------
    seed : int, [-]
        Seed of the run.
    asked : int, [-]
        Number of points asked for; each replicate is rounded up to a power of two.
    dimension : int, [-]
        Number of uncertain parameters d.

    Notes
    -----
    The columns are permuted because some low-dimensional projections of the sequence are poor: for a
    rare event a fixed order can be worse than plain Monte Carlo, and which parameter meets which
    column is an accident of the file. The points lie on a lattice of 2^-30; each is moved by half a
    cell, so that none falls on 0.
    """

    name: ClassVar[str] = "sobol"

    @property
    def per_replicate(self) -> int:
        """Points in each replicate, a power of two [-]."""
        return 1 << (-(-self.asked // REPLICATES) - 1).bit_length()

    def _uniform(self, index: int, replicate: int, first: int, size: int) -> FloatArray:  # noqa: ARG002
        if self.dimension == 0:
            return np.empty((size, 0))
        from scipy.stats import qmc  # deferred: half a second that only this design needs

        generator = _generator(self.seed, POINT_STAGE, replicate)
        sequence = qmc.Sobol(self.dimension, scramble=True, bits=_SOBOL_BITS, rng=generator)
        if first:  # moving on by zero is an error in scipy
            sequence.fast_forward(first)
        columns = _generator(self.seed, PERMUTATION_STAGE, replicate).permutation(self.dimension)
        return np.asarray(sequence.random(size)[:, columns] + 0.5 * 2.0**-_SOBOL_BITS)


_DESIGNS: dict[str, Callable[[int, int, int], Design]] = {
    MonteCarlo.name: MonteCarlo,
    LatinHypercube.name: LatinHypercube,
    ScrambledSobol.name: ScrambledSobol,
}


def design(name: DrawName, *, seed: int, n: int, dimension: int) -> Design:
    """Design by its name.

    Parameters
    ----------
    name : {"monte carlo", "latin hypercube", "sobol"}
        Which design.
    seed : int, [-]
        Seed of the run.
    n : int, [-]
        Number of points asked for; the replicated designs round it up.
    dimension : int, [-]
        Number of uncertain parameters d.

    Returns
    -------
    design : Design
        The design; its `n` is the number of points it will give.

    Raises
    ------
    ParameterError
        If the name is unknown, `n` is below 1 or `dimension` is negative.
    """
    if name not in _DESIGNS:
        raise ParameterError(f"draws must be one of {', '.join(map(repr, _DESIGNS))}; got {name!r}")
    return _DESIGNS[name](seed, n, dimension)


@lru_cache(maxsize=2)
def _latin_cells(seed: int, replicate: int, n: int, dimension: int) -> IntArray:
    """Cell of every point of a replicate in every direction; kept while its chunks are drawn."""
    generator = _generator(seed, PERMUTATION_STAGE, replicate)
    columns = [generator.permutation(n) for _ in range(dimension)]
    cells = np.column_stack(columns) if columns else np.empty((n, 0), dtype=np.int64)
    cells.setflags(write=False)
    return cells


def _generator(seed: int, stage: int, index: int) -> np.random.Generator:
    return np.random.default_rng(np.random.SeedSequence(seed, spawn_key=(stage, index)))


def _check(n: int, dimension: int) -> None:
    if n < 1:
        raise ParameterError(f"the number of realisations must be at least 1; got {n}")
    if dimension < 0:
        raise ParameterError(f"the number of uncertain parameters must be 0 or more; got {dimension}")


def _check_chunk(index: int, n_chunks: int) -> None:
    if not 0 <= index < n_chunks:
        raise ParameterError(f"chunk must lie between 0 and {n_chunks - 1}; got {index}")
