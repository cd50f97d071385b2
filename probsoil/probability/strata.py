"""A large pool of points cut into strata by a score, and limits of the probability from counts in them."""

from dataclasses import dataclass

import numpy as np
from scipy.special import gammainccinv, gammaincinv, ndtri

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.parameters.designs import CHUNK_SIZE
from probsoil.probability.binomial import clopper_pearson
from probsoil.probability.scores import Score
from probsoil.probability.true_runs import POOL_STAGE, TrueRuns

RATIO = 1.6  # from one stratum boundary to the next
SPARSE = 0.1  # share of cases in a stratum up to which they count as rare
SMALLEST = 64  # points in the top stratum
MOST_DRAWN = 1 << 14  # points of one stratum that may be run
POOL_CASES = 400  # points of the pool that should exceed: their number then scatters by 5 %
_POOL_BITS = (17, 22)
_CHUNKS_AT_ONCE = 16


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Strata:
    """Strata of a pool, the highest scores first.

    Attributes
    ----------
    size : ndarray of int, shape (n_stratum,), [-]
        Points of the pool in each.
    drawn : tuple of ndarray of int, each of shape (n_drawn,), [-]
        Points of each stratum in the order in which they are run, as many as may be.
    """

    size: IntArray
    drawn: tuple[IntArray, ...]

    @property
    def n_pool(self) -> int:
        """Points in the pool [-]."""
        return int(self.size.sum())

    @property
    def weight(self) -> FloatArray:
        """Share of the pool in each stratum [-]."""
        share: FloatArray = self.size / self.size.sum()
        return share

    @property
    def reach(self) -> FloatArray:
        """Share of the pool from the highest score down to the top of each stratum [-]."""
        return np.concatenate([[0.0], np.cumsum(self.weight)[:-1]])


@dataclass(frozen=True, slots=True, kw_only=True)
class Combined:
    """A probability put together from strata.

    Attributes
    ----------
    probability : float, [-]
        Sum of the shares weighted by the size of the strata.
    low, high : float, [-]
        Limits.
    """

    probability: float
    low: float
    high: float

    @property
    def half_width(self) -> float:
        """The longer of the two arms of the interval [-]."""
        return max(self.high - self.probability, self.probability - self.low)


def stratum_sizes(n_pool: int) -> IntArray:
    """Sizes of strata that grow by a constant ratio.

    Parameters
    ----------
    n_pool : int, [-]
        Points in the pool, at least 128.

    Returns
    -------
    size : ndarray of int, shape (n_stratum,), [-]
        Sizes, the highest scores first; about 64 points in the first.

    Raises
    ------
    ParameterError
        If the pool is too small.
    """
    if n_pool < 2 * SMALLEST:
        raise ParameterError(f"a pool must have at least {2 * SMALLEST} points; got {n_pool}")
    bounds = [n_pool]
    while bounds[-1] > RATIO * SMALLEST:
        bounds.append(int(bounds[-1] / RATIO))
    size: IntArray = np.diff(np.array([0, *bounds[::-1]], dtype=np.int64)).astype(np.int64)
    return size


def pool_size(probability: float, within: float = 0.2) -> int:
    """Points that a pool should have for a limit of about this probability.

    Parameters
    ----------
    probability : float, [-]
        Expected probability, or the target.
    within : float, [-]
        Precision wanted.

    Returns
    -------
    n_pool : int, [-]
        The power of two that holds at least 400 points that exceed, more for a precision below 20 % by its
        square, between 2^17 and 2^22.

    Raises
    ------
    ParameterError
        If the probability or the precision lies outside 0 to 1.
    """
    for value in (probability, within):
        if not 0.0 < value < 1.0:
            raise ParameterError(f"probability and precision must lie between 0 and 1; got {value:g}")
    cases = POOL_CASES * max(1.0, (0.2 / within) ** 2)
    return 1 << int(np.clip(np.ceil(np.log2(cases / probability)), *_POOL_BITS))


def strata_by_score(runs: TrueRuns, score: Score, n_pool: int) -> Strata:
    """Rank a pool of independent points by a score and cut it into strata.

    Parameters
    ----------
    runs : TrueRuns
        Whose seed and dimension the pool has; nothing is run.
    score : callable
        Takes points, shape (n, d), gives shape (n,); higher is worse.
    n_pool : int, [-]
        Points in the pool; rounded up to whole chunks of 1024.

    Returns
    -------
    strata : Strata
        Sizes and the order of running.

    Raises
    ------
    ShapeError
        If the score does not give one number per point.

    Notes
    -----
    Points of the pool are independent, so in the order of their numbers the first of a stratum are a
    simple random sample of it. The order is the same for every score (permanent random numbers of survey
    sampling), so the samples of different limits share as many points as they can. Points of equal score
    stay in one stratum.
    """
    n_chunks = -(-n_pool // CHUNK_SIZE)
    worth = np.concatenate(
        [_scored(runs, score, first, n_chunks) for first in range(0, n_chunks, _CHUNKS_AT_ONCE)]
    )
    place = len(worth) - np.cumsum(stratum_sizes(len(worth)))[:-1]
    least = np.partition(worth, place)[place]  # the lowest score of each stratum but the last
    stratum = np.searchsorted(-least, -worth, side="left")
    size: IntArray = np.bincount(stratum)
    kept = np.flatnonzero(size)
    drawn = tuple(np.flatnonzero(stratum == one)[:MOST_DRAWN] for one in kept)
    return Strata(size=size[kept], drawn=drawn)


def stratum_limits(
    hits: IntArray, n: IntArray, size: IntArray, confidence: float
) -> tuple[FloatArray, FloatArray]:
    """Limits of the share of each stratum that exceeds.

    Parameters
    ----------
    hits, n : ndarray of int, shape (n_stratum,), [-]
        Runs that exceed, and runs.
    size : ndarray of int, shape (n_stratum,), [-]
        Points in each stratum, of which the runs are drawn without replacement.
    confidence : float, [-]
        Confidence of the two limits of one stratum.

    Returns
    -------
    low, high : ndarray, shape (n_stratum,), [-]
        Exact binomial limits, never wider than what the points not run allow.
    """
    low, high = clopper_pearson(hits, n, confidence)
    return np.maximum(low, hits / size), np.minimum(high, 1.0 - (n - hits) / size)


def combined_limits(hits: IntArray, n: IntArray, size: IntArray, *, near: int, confidence: float) -> Combined:
    r"""Probability and limits from counts in strata.

    Parameters
    ----------
    hits, n : ndarray of int, shape (n_stratum,), [-]
        Runs that exceed, and runs; at least one in each stratum.
    size : ndarray of int, shape (n_stratum,), [-]
        Points of the pool in each stratum.
    near : int, [-]
        Number of strata, from the highest score, that take part.
    confidence : float, [-]
        Confidence of the two limits together.

    Returns
    -------
    combined : Combined
        Probability and limits.

    Raises
    ------
    ShapeError
        If the three arrays are not of one length.

    Notes
    -----
    With :math:`W_h` the share of the pool in a stratum, :math:`\hat p_h` its share of hits and
    :math:`l_h, u_h` its exact limits, the limits are those of the method of variance estimates recovery,

    .. math::

        L = \hat P - \sqrt{\sum W_h^2 (\hat p_h - l_h)^2 + z^2 \hat P (1 - \hat P) / N},

    and the same with :math:`u_h - \hat p_h` above; the last term is the scatter of a pool of N points. All
    strata without a hit have one term together, the bound of `unseen_mass`, and so have all strata
    without a miss. The combination is approximate, as a rule on the wide side; its coverage was measured.

    References
    ----------
    .. [1] G. Y. Zou and A. Donner, "Construction of confidence limits about effect measures: a general
       approach", Statistics in Medicine, 27, 2008 (recalled; not opened).
    """
    if not hits.shape == n.shape == size.shape:
        raise ShapeError(f"one count per stratum is needed; got {hits.shape}, {n.shape} and {size.shape}")
    weight, share = size / size.sum(), hits / n
    taken = np.arange(len(size)) < near
    probability = float((weight * share)[taken].sum())
    pool = float(ndtri(0.5 * (1.0 + confidence))) ** 2 * probability * (1.0 - probability) / size.sum()
    below, above = _arms(hits, n, size, taken, confidence)
    return Combined(
        probability=probability,
        low=max(0.0, probability - float(np.sqrt((below**2).sum() + pool))),
        high=min(1.0, probability + float(np.sqrt((above**2).sum() + pool))),
    )


def unseen_mass(n: IntArray, size: IntArray, *, near: int, confidence: float) -> float:
    r"""Upper limit of the probability of exceeding in strata where no run did.

    Parameters
    ----------
    n : ndarray of int, shape (n_stratum,), [-]
        Runs in each stratum; none of those beyond `near` exceeded.
    size : ndarray of int, shape (n_stratum,), [-]
        Points of the pool in each stratum.
    near : int, [-]
        Number of strata, from the highest score, that are left out of the bound.
    confidence : float, [-]
        One-sided confidence.

    Returns
    -------
    bound : float, [-]
        Zero where no stratum lies beyond `near`.

    Notes
    -----
    If the strata exceed with probabilities :math:`p_h`, no hit has the probability
    :math:`\prod (1 - p_h)^{n_h} \le \exp(-\sum n_h p_h)`. Where that is at least one minus the
    confidence :math:`\gamma`, :math:`\sum n_h p_h \le -\ln(1 - \gamma)` and hence
    :math:`\sum W_h p_h \le -\ln(1 - \gamma) \max W_h / n_h`: about 3 W / n at 95 %, whatever the function.
    """
    if near >= len(n):
        return 0.0
    weight = size / size.sum()
    return min(_none_seen(weight[near:], n[near:], confidence), float(weight[near:].sum()))


def wanted_runs(
    hits: IntArray, n: IntArray, size: IntArray, most: IntArray, *, near: int, batch: int
) -> IntArray:
    """Where a batch of further runs narrows the interval most.

    Parameters
    ----------
    hits, n : ndarray of int, shape (n_stratum,), [-]
        Runs that exceed, and runs.
    size : ndarray of int, shape (n_stratum,), [-]
        Points of the pool in each stratum.
    most : ndarray of int, shape (n_stratum,), [-]
        Points that may be run in each stratum.
    near : int, [-]
        Number of strata, from the highest score, that take part.
    batch : int, [-]
        Further runs.

    Returns
    -------
    more : ndarray of int, shape (n_stratum,), [-]
        Further runs in each stratum, at most `batch` together.

    Notes
    -----
    Neyman's rule with the arm of the exact limits in place of the standard deviation, so that a stratum
    without hits keeps a share: runs in proportion to the square root of the arm squared times the runs
    that gave it, less those already made. Strata of rare cases share their arm by `falling_share`.
    """
    taken = (np.arange(len(size)) < near) & (n < most)
    arm = np.maximum(*_arms(hits, n, size, taken, 0.95))
    need = arm * np.sqrt(n)
    if not need.any():
        return np.zeros(len(n), dtype=np.int64)
    goal = (n[need > 0.0].sum() + batch) * need / need.sum()
    lack = np.clip(goal - n, 0.0, most - n)
    more = np.floor(lack * min(1.0, batch / lack.sum())).astype(np.int64)
    short = np.argsort(-(lack - more), kind="stable")[: max(0, min(batch - int(more.sum()), len(n)))]
    more[short] += (lack[short] > more[short]).astype(np.int64)
    possible: IntArray = np.minimum(more, most - n)
    return possible


def falling_share(hits: IntArray, n: IntArray) -> FloatArray:
    """Share of each stratum that exceeds if it nowhere rises with falling score.

    Parameters
    ----------
    hits, n : ndarray of int, shape (n_stratum,), [-]
        Runs that exceed, and runs, the highest scores first.

    Returns
    -------
    share : ndarray, shape (n_stratum,), [-]
        The nearest falling sequence, by least squares weighted with the runs: neighbours out of order are
        pooled.
    """
    from scipy.optimize import isotonic_regression  # deferred: only strata need it

    return np.asarray(isotonic_regression(hits / n, weights=n, increasing=False).x)


def _arms(
    hits: IntArray, n: IntArray, size: IntArray, taken: BoolArray, confidence: float
) -> tuple[FloatArray, FloatArray]:
    """Lower and upper arm of each stratum's part of the probability; strata of rare cases share theirs."""
    low, high = stratum_limits(hits, n, size, confidence)
    weight, share, level = size / size.sum(), hits / n, falling_share(hits, n)
    below, above = weight * (share - low) * taken, weight * (high - share) * taken
    for cases, rate, up, down in ((hits, level, above, below), (n - hits, 1.0 - level, below, above)):
        few = taken & (rate <= SPARSE)
        if few.any():
            unit = weight[few] / n[few]
            lower, upper = _rare_arms(cases[few], unit, confidence)
            # by the falling share, not the own: one hit by luck would draw runs, none by luck would keep
            # them away, and the sum would come out low
            part = np.sqrt(unit * weight[few] * rate[few] + unit.max() ** 2 * weight[few] / weight[few].sum())
            part /= np.sqrt((part**2).sum())
            down[few], up[few] = lower * part, upper * part
    return below, above


def _rare_arms(cases: IntArray, unit: FloatArray, confidence: float) -> tuple[float, float]:
    """Arms of a weighted sum of rare cases."""
    most, tail = float(unit.max()), 0.5 * (1.0 - confidence)
    total, spread = float((unit * cases).sum()), float((unit**2 * cases).sum())
    low = float(gammaincinv(total**2 / spread, tail)) * spread / total if total else 0.0
    mean, variance = total + most, spread + most**2
    high = float(gammainccinv(mean**2 / variance, tail)) * variance / mean
    return total - low, high - total


def _none_seen(weight: FloatArray, n: IntArray, confidence: float) -> float:
    return -float(np.log1p(-confidence)) * float((weight / n).max())


def _scored(runs: TrueRuns, score: Score, first: int, n_chunks: int) -> FloatArray:
    numbers = range(first, min(first + _CHUNKS_AT_ONCE, n_chunks))
    u = np.concatenate([runs.block(POOL_STAGE, number) for number in numbers])
    worth = np.asarray(score(u), dtype=np.float64)
    if worth.shape != (len(u),):
        raise ShapeError(f"a score must give shape (n,) for points of shape {u.shape}; got {worth.shape}")
    return np.where(np.isnan(worth), np.inf, worth)
