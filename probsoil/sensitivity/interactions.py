"""Sobol' shares by blocks of correlated parameters: pairs of a chaos, and SALib on the true model."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import ArrayLike, FloatArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.probability.polynomial_chaos import PolynomialChaos
from probsoil.sensitivity.players import correlation_labels

if TYPE_CHECKING:
    import pandas as pd

STAGE = 21


def block_names(correlation: FloatArray, names: Sequence[str]) -> tuple[str, ...]:
    """Names of the blocks of correlated parameters.

    Parameters
    ----------
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals.
    names : sequence of str
        Addresses of the d parameters.

    Returns
    -------
    blocks : tuple of str
        Members joined by a plus sign.

    Raises
    ------
    ShapeError
        If the names do not match the correlation.
    """
    if correlation.shape != (len(names), len(names)) or not len(names):
        raise ShapeError(f"correlation {correlation.shape} does not match {len(names)} names")
    label = correlation_labels(correlation)
    return tuple(
        " + ".join(names[int(i)] for i in np.flatnonzero(label == block)) for block in range(label.max() + 1)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Pair:
    """Part of the variance that two blocks have only together.

    Attributes
    ----------
    first, second : str
        Blocks of correlated parameters; one parameter where it is correlated with none.
    share : float, [-]
        Share of the variance beyond what each does alone.
    """

    first: str
    second: str
    share: float


def strongest_pairs(
    chaos: PolynomialChaos,
    correlation: FloatArray,
    names: Sequence[str],
    *,
    count: int = 5,
    output: int = 0,
) -> tuple[Pair, ...]:
    """Pairs that act together most strongly (second-order Sobol' shares).

    Parameters
    ----------
    chaos : PolynomialChaos
        Expansion in independent standard normals u, z = C u with the lower Cholesky factor C of R.
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals z.
    names : sequence of str
        Addresses of the d parameters.
    count : int, [-]
        Greatest number of pairs.
    output : int, [-]
        Output of the chaos.

    Returns
    -------
    pairs : tuple of Pair
        The strongest first; pairs without any share are left out, so none where the quantity does not vary.

    Raises
    ------
    ShapeError
        If the names, the correlation and the chaos do not match.

    Notes
    -----
    Within a block of correlated parameters what belongs to whom is not defined, so pairs are of blocks: the
    sum of the squared coefficients of the terms that are active in these two blocks and in no other.
    """
    blocks = block_names(correlation, names)
    if chaos.indices.shape[1] != len(names):
        raise ShapeError(f"a chaos of {chaos.indices.shape[1]} variables does not match {len(names)} names")
    label = correlation_labels(correlation)
    member = np.arange(len(blocks))[:, np.newaxis] == label
    active = ((chaos.indices > 0).astype(np.int64) @ member.T.astype(np.int64)) > 0
    square = chaos.coefficients[:, output] ** 2
    variance = float(square[1:].sum())
    found: dict[tuple[int, ...], float] = {}
    for row in np.flatnonzero(active.sum(axis=1) == 2):
        both = tuple(int(block) for block in np.flatnonzero(active[row]))
        found[both] = found.get(both, 0.0) + float(square[row])
    order = sorted((both for both, part in found.items() if part > 0.0), key=lambda both: -found[both])
    return tuple(
        Pair(first=blocks[one], second=blocks[other], share=found[one, other] / variance)
        for one, other in order[:count]
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ModelShares:
    """Sobol' shares of a quantity by blocks of correlated parameters, from runs of the model itself.

    Attributes
    ----------
    block : tuple of str
        Blocks of correlated parameters.
    first, first_reach : ndarray, shape (n_block,), [-]
        Share of each block alone and half the width of its interval.
    total, total_reach : ndarray, shape (n_block,), [-]
        Share of all that the block takes part in, likewise.
    pair : ndarray, shape (n_block, n_block), [-]
        Share of each pair beyond the two alone; symmetric, zero on the diagonal.
    pair_reach : ndarray, shape (n_block, n_block), [-]
        Half the width of its interval.
    runs : int, [-]
        Runs of the model.
    confidence : float, [-]
        Confidence of the intervals, which are of SALib's bootstrap.
    """

    block: tuple[str, ...]
    first: FloatArray
    first_reach: FloatArray
    total: FloatArray
    total_reach: FloatArray
    pair: FloatArray
    pair_reach: FloatArray
    runs: int
    confidence: float

    def to_frame(self) -> "pd.DataFrame":
        """Return the shares as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per block.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        return pd.DataFrame(
            {
                "block": self.block,
                "first": self.first,
                "first_reach": self.first_reach,
                "total": self.total,
                "total_reach": self.total_reach,
            }
        )


def model_shares(
    performance: Callable[[FloatArray], ArrayLike],
    correlation: FloatArray,
    names: Sequence[str],
    *,
    n: int = 1024,
    seed: int = 0,
    confidence: float = 0.95,
) -> ModelShares:
    """Sobol' shares of a quantity on the model itself, by SALib.

    Parameters
    ----------
    performance : callable
        Quantity, (n,), at rows of correlated latent normals (n, d).
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals.
    names : sequence of str
        Addresses of the d parameters.
    n : int, [-]
        Base points, a power of two; the runs are 2 n (n_block + 1).
    seed : int, [-]
        Seed of the points and of the bootstrap.
    confidence : float, [-]
        Confidence of the intervals.

    Returns
    -------
    shares : ModelShares
        First, total and pair shares of each block.

    Raises
    ------
    ShapeError
        If the names do not match the correlation or the performance returns another number of values.
    ParameterError
        If there are fewer than two blocks, n is no power of two, or a value is not finite or none varies.

    Notes
    -----
    Points are drawn in the independent normals u with z = C u. A block of correlated parameters is one group
    of them, so that the groups are independent and their shares are defined.
    """
    from SALib.analyze import sobol as analyze  # deferred: takes a second to import
    from SALib.sample import sobol as sample

    blocks = block_names(correlation, names)
    if len(blocks) < 2:
        raise ParameterError(
            "all parameters are correlated with each other: one block has all of the variance"
        )
    if n < 2 or n & (n - 1):
        raise ParameterError(f"n must be a power of two, at least 2; got {n}")
    d = len(names)
    problem = {
        "num_vars": d,
        "names": [f"u{i}" for i in range(d)],
        "groups": [f"b{block}" for block in correlation_labels(correlation)],
        "bounds": [[0.0, 1.0]] * d,
        "dists": ["norm"] * d,
    }
    streams = np.random.SeedSequence(seed, spawn_key=(STAGE, 0)).generate_state(2)
    u = sample.sample(problem, n, calc_second_order=True, seed=int(streams[0]))
    z = np.einsum("nj,ij->ni", u, np.linalg.cholesky(correlation))
    values = np.asarray(performance(z), dtype=np.float64)
    if values.shape != (len(u),):
        raise ShapeError(f"performance must return shape ({len(u)},); got {values.shape}")
    if not np.isfinite(values).all() or np.ptp(values) == 0.0:
        raise ParameterError("every value must be finite, and they must vary, for shares of the variance")
    found = analyze.analyze(
        problem, values, calc_second_order=True, conf_level=confidence, seed=int(streams[1])
    )
    return ModelShares(
        block=blocks,
        first=np.asarray(found["S1"]),
        first_reach=np.asarray(found["S1_conf"]),
        total=np.asarray(found["ST"]),
        total_reach=np.asarray(found["ST_conf"]),
        pair=_symmetric(np.asarray(found["S2"]), len(blocks)),
        pair_reach=_symmetric(np.asarray(found["S2_conf"]), len(blocks)),
        runs=len(u),
        confidence=confidence,
    )


def _symmetric(upper: FloatArray, size: int) -> FloatArray:
    """Both halves of what SALib gives as an upper triangle with not-a-number elsewhere."""
    whole = np.zeros((size, size))
    for one, other in combinations(range(size), 2):
        whole[one, other] = whole[other, one] = upper[one, other]
    return whole
