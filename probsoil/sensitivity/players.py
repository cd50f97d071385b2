"""Shapley effects of a Hermite chaos under a Gaussian copula, for parameters or for groups of them."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import factorial

import numpy as np
from scipy.sparse.csgraph import connected_components

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.sensitivity.shapley import effects_of_worth

LARGEST_EXACT_GAME = 12  # players; 4,096 subsets
ORDER_PAIRS = 200
HIGHEST_DEGREE = 8  # within one block of correlated variables
_SEED = 20_012
_NUMBERS = 4_000_000  # numbers in one table, 32 MB


def correlation_labels(correlation: FloatArray) -> IntArray:
    """Blocks of variables that are tied to each other and to no other.

    Parameters
    ----------
    correlation : ndarray, shape (d, d), [-]
        Correlation R.

    Returns
    -------
    label : ndarray of int, shape (d,), [-]
        Block of each variable, from 0.
    """
    _, label = connected_components(correlation != 0.0, directed=False)
    return np.asarray(label, dtype=np.int64)


def membership(players: Mapping[str, Sequence[int]], dimension: int) -> BoolArray:
    """Which variables each player holds.

    Parameters
    ----------
    players : mapping of str to sequence of int
        Variables of each player, counted from 0.
    dimension : int, [-]
        Number of variables d.

    Returns
    -------
    member : ndarray of bool, shape (n_player, d), [-]
        Each variable belongs to exactly one player.

    Raises
    ------
    ParameterError
        If a variable does not exist, or belongs to no player or to several.
    """
    member = np.zeros((len(players), dimension), dtype=np.bool_)
    for row, (name, variables) in enumerate(players.items()):
        if any(not 0 <= variable < dimension for variable in variables):
            raise ParameterError(f"group {name!r}: variables must lie between 0 and {dimension - 1}")
        member[row, list(variables)] = True
    times = member.sum(axis=0)
    if (times != 1).any():
        wrong = [int(variable) for variable in np.flatnonzero(times != 1)]
        raise ParameterError(f"each variable must belong to exactly one group; these do not: {wrong}")
    return member


def player_effects(
    indices: IntArray, coefficients: FloatArray, correlation: FloatArray, member: BoolArray
) -> tuple[FloatArray, FloatArray]:
    r"""Shapley effects of functions of correlated normals that a Hermite chaos describes.

    Parameters
    ----------
    indices : ndarray of int, shape (n_term, d), [-]
        Degrees of each term in each of the independent normals u.
    coefficients : ndarray, shape (n_term, n_function), [any]
        Coefficients of the orthonormal terms, in the unit of each function.
    correlation : ndarray, shape (d, d), [-]
        Correlation R of z = C u, C being the lower Cholesky factor of R.
    member : ndarray of bool, shape (n_player, d), [-]
        Which of the z each player holds; see `membership`.

    Returns
    -------
    effects : ndarray, shape (n_player, n_function), [any]
        Part of the variance of each function that belongs to each player, unit squared; they add up to it.
    error : ndarray, shape (n_player, n_function), [any]
        Standard error; zero but where more than 12 players act in one part of the function.

    Raises
    ------
    ShapeError
        If the shapes do not match.
    ParameterError
        If a term has a degree above 8 within a block of correlated variables.

    Notes
    -----
    The worth of a set w of the z is the variance of E[f | z_w]. Since
    :math:`E[u | z_w] = P_w u` with the projector :math:`P_w = C_w' R_{ww}^{-1} C_w`, two terms of equal
    degree k with the letters i_1, ..., i_k and j_1, ..., j_k give

    .. math:: \mathrm{cov}(E[\psi_\alpha | z_w], E[\psi_\beta | z_w])
       = \frac{\mathrm{perm}\,(P_w)_{i_a j_b}}{\sqrt{\alpha!\, \beta!}}

    (Wick's theorem) and terms of different degree nothing. P_w falls apart into the blocks of correlation,
    so terms that are active in different sets of blocks are orthogonal for every w: each set of blocks is a
    game by itself, over the players that hold variables there. All subsets up to 12 players, beyond that
    200 random orders and their reverses with a fixed seed.

    References
    ----------
    .. [1] A. B. Owen and C. Prieur, "On Shapley value for measuring importance of dependent inputs",
       SIAM/ASA Journal on Uncertainty Quantification, 5, 2017 (recalled; not opened).
    """
    d = len(correlation)
    if correlation.shape != (d, d) or indices.shape[1] != d or member.shape[1] != d:
        raise ShapeError(
            f"correlation {correlation.shape} does not match terms of {indices.shape[1]} variables"
        )
    if len(coefficients) != len(indices):
        raise ShapeError(f"{len(indices)} terms do not match coefficients {coefficients.shape}")
    factor = np.asarray(np.linalg.cholesky(correlation), dtype=np.float64)
    label = correlation_labels(correlation)
    block = np.arange(label.max(initial=-1) + 1)[:, np.newaxis] == label
    active = ((indices > 0).astype(np.int64) @ block.T.astype(np.int64)) > 0
    effects = np.zeros((len(member), coefficients.shape[1]))
    variance = np.zeros_like(effects)
    patterns, game = np.unique(active, axis=0, return_inverse=True)
    for number, pattern in enumerate(patterns):
        if not pattern.any():
            continue  # the constant
        rows = np.flatnonzero(game.ravel() == number)
        blocks = [np.flatnonzero(block[which]) for which in np.flatnonzero(pattern)]
        players = np.flatnonzero(member[:, np.concatenate(blocks)].any(axis=1))
        parts = [
            _block_part(indices[np.ix_(rows, own)], factor, correlation, own, member[players])
            for own in blocks
        ]
        found, error = _played(_Game(parts, coefficients[rows]), len(players))
        effects[players] += found
        variance[players] += error**2
    return effects, np.sqrt(variance)


@dataclass(frozen=True, slots=True, eq=False)
class _Block:
    """One block of correlated variables within a game."""

    factor: FloatArray  # rows of C and columns of u of the block
    correlation: FloatArray
    member: BoolArray  # players by variables of the block
    degrees: IntArray  # distinct degrees of the terms in the block
    place: IntArray  # which of them each term has

    def covariances(self, held: BoolArray) -> FloatArray:
        """Covariances of the conditional means of the distinct terms, for each set of held variables."""
        n, m = len(held), len(self.degrees)
        if held.shape[1] == 1:
            return np.asarray(held[:, :, np.newaxis] * np.eye(m))
        projector = self._projectors(held)
        gram = np.zeros((n, m, m))
        total = self.degrees.sum(axis=1)
        for degree in np.unique(total):
            rows = np.flatnonzero(total == degree)
            letters = np.array([np.repeat(np.arange(len(one)), one) for one in self.degrees[rows]])
            pairs = projector[:, letters[:, np.newaxis, :, np.newaxis], letters[np.newaxis, :, np.newaxis, :]]
            norm = np.sqrt([np.prod([float(factorial(k)) for k in one]) for one in self.degrees[rows]])
            gram[:, rows[:, np.newaxis], rows] = permanent(pairs) / np.outer(norm, norm)
        return gram

    def _projectors(self, held: BoolArray) -> FloatArray:
        projector = np.zeros((len(held), *self.factor.shape))
        count = held.sum(axis=1)
        for size in np.unique(count[count > 0]):
            rows = np.flatnonzero(count == size)
            chosen = np.nonzero(held[rows])[1].reshape(-1, size)
            inner = self.correlation[chosen[:, :, np.newaxis], chosen[:, np.newaxis, :]]
            outer = self.factor[chosen]
            projector[rows] = np.swapaxes(outer, 1, 2) @ np.linalg.solve(inner, outer)
        return projector

    @property
    def load(self) -> int:
        """Numbers that one set of held variables takes."""
        if len(self.factor) == 1:
            return len(self.degrees) ** 2
        return int(len(self.degrees) ** 2 * 2 ** self.degrees.sum(axis=1).max(initial=0))


def _block_part(
    degrees: IntArray, factor: FloatArray, correlation: FloatArray, own: IntArray, member: BoolArray
) -> _Block:
    distinct, place = np.unique(degrees, axis=0, return_inverse=True)
    if len(own) > 1 and distinct.sum(axis=1).max() > HIGHEST_DEGREE:
        raise ParameterError(
            f"terms within a block of correlated variables may have degree {HIGHEST_DEGREE} at most; "
            f"got {distinct.sum(axis=1).max()}"
        )
    square = np.ix_(own, own)
    return _Block(factor[square], correlation[square], member[:, own], distinct, place.ravel())


@dataclass(frozen=True, slots=True, eq=False)
class _Game:
    """Terms that are active in one set of blocks."""

    blocks: list[_Block]
    coefficients: FloatArray

    def worth(self, chosen: BoolArray) -> FloatArray:
        """Variance explained by each set of players, shape (n_set, n_function)."""
        terms, functions = self.coefficients.shape
        worth = np.empty((len(chosen), functions))
        step = max(1, _NUMBERS // max(terms**2, terms * functions, *(block.load for block in self.blocks)))
        for first in range(0, len(chosen), step):
            rows = slice(first, first + step)
            product = np.ones((len(chosen[rows]), terms, terms))
            for block in self.blocks:
                held = (chosen[rows].astype(np.int64) @ block.member.astype(np.int64)) > 0
                unique, inverse = np.unique(held, axis=0, return_inverse=True)
                gram = block.covariances(unique)[:, block.place[:, np.newaxis], block.place]
                product *= gram[inverse.ravel()]
            worth[rows] = (self.coefficients * (product @ self.coefficients)).sum(axis=1)
        return worth


def permanent(matrix: FloatArray) -> FloatArray:
    """Permanents of small matrices.

    Parameters
    ----------
    matrix : ndarray, shape (..., k, k), [any]
        Matrices.

    Returns
    -------
    permanent : ndarray, shape (...,), [any]
        Sum over all permutations of the product of the chosen entries, built up row by row over subsets of
        the columns.
    """
    size = matrix.shape[-1]
    sums = [np.ones(matrix.shape[:-2])]
    for mask in range(1, 1 << size):
        row = mask.bit_count() - 1
        total = np.zeros(matrix.shape[:-2])
        for column in range(size):
            if mask >> column & 1:
                total += matrix[..., row, column] * sums[mask ^ (1 << column)]
        sums.append(total)
    return sums[-1]


def _played(game: _Game, size: int) -> tuple[FloatArray, FloatArray]:
    if size <= LARGEST_EXACT_GAME:
        every = np.arange(1 << size)
        effects = effects_of_worth(game.worth((every[:, np.newaxis] >> np.arange(size)) & 1 == 1))
        return effects, np.zeros_like(effects)
    generator = np.random.default_rng(np.random.SeedSequence(_SEED))
    forward = generator.permuted(np.tile(np.arange(size), (ORDER_PAIRS, 1)), axis=1)
    average = np.zeros((ORDER_PAIRS, size, game.coefficients.shape[1]))
    rows = np.arange(ORDER_PAIRS)[:, np.newaxis]
    for order in (forward, forward[:, ::-1]):
        joined = np.argsort(order, axis=1)  # when each player joins
        chosen = joined[:, np.newaxis, :] < np.arange(size + 1)[np.newaxis, :, np.newaxis]
        worth = game.worth(chosen.reshape(-1, size)).reshape(ORDER_PAIRS, size + 1, -1)
        average[rows, order] += 0.5 * np.diff(worth, axis=1)
    return average.mean(axis=0), average.std(axis=0, ddof=1) / np.sqrt(ORDER_PAIRS)
