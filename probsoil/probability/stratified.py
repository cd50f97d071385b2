"""Small probabilities from few runs: a pool ranked by a score, true runs in every stratum."""

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal, TypeAlias

import numpy as np
from scipy.special import ndtri

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError
from probsoil.probability.binomial import clopper_pearson
from probsoil.probability.plans import StratifiedPlan
from probsoil.probability.strata import (
    Combined,
    Strata,
    combined_limits,
    stratum_limits,
    unseen_mass,
    wanted_runs,
)
from probsoil.probability.true_runs import POOL_STAGE, QuantityLimit, TrueRuns

if TYPE_CHECKING:
    import pandas as pd

Basis: TypeAlias = Literal["strata near the limit", "all strata"]

FAR_FROM_LIMIT = 20.0  # strata that begin beyond this many times the probability may be far
FAR_FROM_HITS = 2.5  # and beyond this many times the reach of the last stratum with a hit
TOP_STRATA = 3
LEAST_TOP_SHARE = 0.5  # of the points in them that must exceed, as far as the runs can tell
LEAST_BATCH = 64
_ORDER_CONFIDENCE = 0.999
_COLUMNS = ("size", "weight", "runs", "exceeding", "low", "high", "far")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class StratifiedExceedance:
    """Probability that a limit is exceeded, from strata.

    Attributes
    ----------
    limit : QuantityLimit
        The limit.
    probability : float, [-]
        Estimate.
    interval : tuple of float, [-]
        Two-sided limits. Where the basis is the strata near the limit they hold on the condition that
        none of the far strata exceeds.
    confidence : float, [-]
        Confidence of the limits.
    basis : {"strata near the limit", "all strata"}
        Which strata the interval is made of.
    unseen_bound : float, [-]
        One-sided upper limit, at `confidence`, of the probability of exceeding in the far strata; zero
        where none is far.
    guaranteed : tuple of float, [-]
        Two-sided limits without the condition: the upper one is the sum of the upper limit of the near
        strata and of the bound on the far ones, each at a quarter of the error.
    reached : float, [-]
        Longer arm of the interval over the probability; infinite where no run exceeds.
    within : float, [-]
        What was aimed at for `reached`.
    pool_runs : int, [-]
        Runs behind the estimate, without those that scores were fitted to and chosen by.
    exceeding : int, [-]
        Runs that exceed.
    not_converged : int, [-]
        Runs without a number; counted as exceeding.
    size, runs, hits : ndarray of int, shape (n_stratum,), [-]
        Points of the pool, runs, and runs that exceed, in each stratum, the highest scores first.
    far : ndarray of bool, shape (n_stratum,), [-]
        Whether a stratum lies far from the limit.
    surprises : ndarray, shape (n_surprise, d), [-]
        Points that exceed although the score put them far from the limit.
    path : ndarray, shape (n_look, 4), [-]
        Runs, estimate and its two limits after the pilot and after every batch.
    warnings : tuple of str
        What a reader must know.
    """

    limit: QuantityLimit
    probability: float
    interval: tuple[float, float]
    confidence: float
    basis: Basis
    unseen_bound: float
    guaranteed: tuple[float, float]
    reached: float
    within: float
    pool_runs: int
    exceeding: int
    not_converged: int
    size: IntArray
    runs: IntArray
    hits: IntArray
    far: BoolArray
    surprises: FloatArray
    path: FloatArray
    warnings: tuple[str, ...]

    def __post_init__(self) -> None:
        for name in ("size", "runs", "hits", "far", "surprises", "path"):  # own, read-only arrays
            array = getattr(self, name).copy()
            array.setflags(write=False)
            object.__setattr__(self, name, array)

    def to_frame(self) -> "pd.DataFrame":
        """Return the strata as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per stratum, the highest scores first.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        low, high = stratum_limits(self.hits, self.runs, self.size, self.confidence)
        weight = self.size / self.size.sum()
        columns = (self.size, weight, self.runs, self.hits, low, high, self.far)
        return pd.DataFrame(dict(zip(_COLUMNS, columns, strict=True)))


@dataclass(slots=True)
class _Sample:
    """Runs in the strata so far."""

    runs: TrueRuns
    limit: QuantityLimit
    strata: Strata
    n: IntArray
    hits: IntArray
    runs_before: int
    path: list[tuple[float, float, float, float]] = field(default_factory=list)

    @property
    def may_run(self) -> IntArray:
        return np.array([len(one) for one in self.strata.drawn], dtype=np.int64)

    def extend(self, more: IntArray) -> None:
        """Run further points of each stratum."""
        wanted = np.minimum(self.n + more, self.may_run)
        parts = [
            drawn[first:last] for drawn, first, last in zip(self.strata.drawn, self.n, wanted, strict=True)
        ]
        outcome = self.runs.outcomes(POOL_STAGE, np.concatenate(parts))
        if outcome.size:
            stratum = np.repeat(np.arange(len(parts)), [len(one) for one in parts])
            exceeding = self.limit.exceeded(outcome)
            self.hits = self.hits + np.bincount(stratum[exceeding], minlength=len(parts))
        self.n = wanted

    def extend_with_kept(self) -> None:
        """Take what other limits have run already, as far as the order of each stratum allows."""
        more = []
        for drawn, n in zip(self.strata.drawn, self.n, strict=True):
            missing = np.flatnonzero(~self.runs.is_kept(POOL_STAGE, drawn[n:]))
            more.append(int(missing[0]) if missing.size else len(drawn) - int(n))
        self.extend(np.array(more, dtype=np.int64))


def stratified_exceedance(
    runs: TrueRuns, limit: QuantityLimit, strata: Strata, plan: StratifiedPlan | None = None
) -> StratifiedExceedance:
    """Probability that a limit is exceeded, from true runs in strata of a pool.

    Parameters
    ----------
    runs : TrueRuns
        Performance function and its runs.
    limit : QuantityLimit
        The limit.
    strata : Strata
        Strata by a score of this limit.
    plan : StratifiedPlan, optional
        Precision and budget.

    Returns
    -------
    result : StratifiedExceedance
        Probability, limits, bound on what was not seen, counts and warnings.

    Raises
    ------
    ParameterError
        If the budget does not cover the pilot.
    ShapeError
        If the performance function does not give the quantity of the limit.

    Notes
    -----
    After the pilot, batches of a tenth of the runs so far go where they narrow the interval most, those
    of the far strata first until there are `far_runs` of them. Far strata begin beyond 20 times the
    probability and beyond 2.5 times the reach of the last hit. All strata count as near, and the interval
    needs no condition, where fewer than half of the points in the top three strata exceed or the shares do
    not fall with the score, each as far as exact limits can tell.
    """
    plan = plan or StratifiedPlan()
    count = len(strata.size)
    if plan.most_runs < plan.pilot * count:
        raise ParameterError(
            f"{plan.most_runs} runs do not cover a pilot of {plan.pilot} in each of {count} strata"
        )
    none = np.zeros(count, dtype=np.int64)
    sample = _Sample(runs, limit, strata, none, none, runs.n_runs)
    sample.extend(np.full(count, plan.pilot))
    sample.extend_with_kept()
    while not _enough(sample, plan):
        more = _further(sample, plan)
        if not more.any():
            break
        sample.extend(more)
    return _result(sample, plan)


def _near(sample: _Sample) -> int:
    """Count the strata that count as near the limit."""
    reach, last = sample.strata.reach, np.flatnonzero(sample.hits)
    if not last.size or _doubts(sample):
        return len(reach)
    probability = float((sample.strata.weight * sample.hits / sample.n).sum())
    below = np.append(reach, 1.0)[last[-1] + 1]
    return int(np.searchsorted(reach, max(FAR_FROM_LIMIT * probability, FAR_FROM_HITS * below)))


def _doubts(sample: _Sample) -> tuple[str, ...]:
    """Reasons not to trust the ranking."""
    hits, n = int(sample.hits[:TOP_STRATA].sum()), int(sample.n[:TOP_STRATA].sum())
    found = []
    if clopper_pearson(hits, n)[1] < LEAST_TOP_SHARE:
        found.append(
            f"only {hits} of {n} runs with the highest scores exceed: the score does not"
            " rank this limit, or the limit is rarer than the pool reaches"
        )
    # of all points with such scores: in the pool, a small stratum run to its end would have no width
    low, high = clopper_pearson(sample.hits, sample.n, _ORDER_CONFIDENCE)
    if (low > np.minimum.accumulate(high)).any():
        found.append("the share that exceeds does not fall with the score")
    return tuple(found)


def _look(sample: _Sample, confidence: float) -> Combined:
    return combined_limits(
        sample.hits, sample.n, sample.strata.size, near=_near(sample), confidence=confidence
    )


def _far_lack(sample: _Sample, plan: StratifiedPlan) -> IntArray:
    """Count the runs that the far strata lack; each has its share by size."""
    near, size = _near(sample), sample.strata.size
    lack = np.zeros(len(size), dtype=np.int64)
    if near < len(size):
        share = size[near:] / size[near:].sum()
        goal = np.minimum(np.ceil(plan.far_runs * share).astype(np.int64), sample.may_run[near:])
        lack[near:] = np.maximum(goal - sample.n[near:], 0)
    return lack


def _enough(sample: _Sample, plan: StratifiedPlan) -> bool:
    """Note how far the estimate has come, and say whether that will do."""
    found = _look(sample, plan.confidence)
    sample.path.append((float(sample.n.sum()), found.probability, found.low, found.high))
    precise = 0.0 < found.half_width <= plan.within * found.probability
    return precise and not _far_lack(sample, plan).any()


def _further(sample: _Sample, plan: StratifiedPlan) -> IntArray:
    left = plan.most_runs - (sample.runs.n_runs - sample.runs_before)
    lack = _far_lack(sample, plan)
    if lack.any():
        return _at_most(lack, left)
    batch = min(max(LEAST_BATCH, int(sample.n.sum()) // 10), left)
    if batch <= 0:
        return lack
    return wanted_runs(
        sample.hits, sample.n, sample.strata.size, sample.may_run, near=_near(sample), batch=batch
    )


def _at_most(more: IntArray, left: int) -> IntArray:
    if more.sum() <= left:
        return more
    fewer: IntArray = np.floor(more * (max(left, 0) / int(more.sum()))).astype(np.int64)
    return fewer


def _result(sample: _Sample, plan: StratifiedPlan) -> StratifiedExceedance:
    size, near = sample.strata.size, _near(sample)
    found = _look(sample, plan.confidence)
    far = np.arange(len(size)) >= near
    unseen = unseen_mass(sample.n, size, near=near, confidence=plan.confidence)
    interval, guaranteed = (found.low, found.high), _guaranteed(sample, plan.confidence, near)
    if not sample.hits.any():
        interval = guaranteed
    surprises = _surprises(sample, found.probability)
    return StratifiedExceedance(
        limit=sample.limit,
        probability=found.probability,
        interval=interval,
        confidence=plan.confidence,
        basis="strata near the limit" if far.any() else "all strata",
        unseen_bound=unseen,
        guaranteed=guaranteed,
        reached=found.half_width / found.probability if found.probability else float("inf"),
        within=plan.within,
        pool_runs=int(sample.n.sum()),
        exceeding=int(sample.hits.sum()),
        not_converged=_not_converged(sample),
        size=size,
        runs=sample.n,
        hits=sample.hits,
        far=far,
        surprises=surprises,
        path=np.array(sample.path),
        warnings=_warnings(sample, found, plan, unseen, len(surprises)),
    )


def _guaranteed(sample: _Sample, confidence: float, near: int) -> tuple[float, float]:
    """Limits without a condition on the far strata."""
    size, error = sample.strata.size, 1.0 - confidence
    if not sample.hits.any():
        return 0.0, unseen_mass(sample.n, size, near=0, confidence=1.0 - 0.5 * error)
    low, high = (
        combined_limits(sample.hits, sample.n, size, near=near, confidence=level)
        for level in (confidence, confidence if near == len(size) else 1.0 - 0.5 * error)
    )
    beyond = unseen_mass(sample.n, size, near=near, confidence=1.0 - 0.25 * error)
    return low.low, min(1.0, high.high + beyond)


def _run_points(sample: _Sample) -> IntArray:
    return np.concatenate([drawn[:n] for drawn, n in zip(sample.strata.drawn, sample.n, strict=True)])


def _not_converged(sample: _Sample) -> int:
    outcome = sample.runs.outcomes(POOL_STAGE, _run_points(sample))
    return int(np.isnan(outcome[:, sample.limit.quantity]).sum())


def _surprises(sample: _Sample, probability: float) -> FloatArray:
    """Points that exceed in strata that begin beyond 20 times the probability."""
    index = _run_points(sample)
    stratum = np.repeat(np.arange(len(sample.n)), sample.n)
    beyond = index[(sample.strata.reach > FAR_FROM_LIMIT * probability)[stratum]]
    if not beyond.size or not probability:
        return np.empty((0, sample.runs.dimension))
    exceeding = sample.limit.exceeded(sample.runs.outcomes(POOL_STAGE, beyond))
    return sample.runs.points(POOL_STAGE, beyond[exceeding])


def _least_for(n_pool: int, plan: StratifiedPlan) -> float:
    """Probability below which the scatter of the pool alone is wider than the precision."""
    factor = float(ndtri(0.5 * (1.0 + plan.confidence))) / plan.within
    return factor**2 / (n_pool + factor**2)


def _warnings(
    sample: _Sample, found: Combined, plan: StratifiedPlan, unseen: float, n_surprise: int
) -> tuple[str, ...]:
    words = list(_doubts(sample)) if sample.hits.any() else ["no run exceeds: only an upper limit is known"]
    if n_surprise:
        words.append(
            f"{n_surprise} of the runs that exceed lie where the score expects none: there is a way of"
            " failing that the score does not see"
        )
    if 0.0 < found.probability < _least_for(sample.strata.n_pool, plan):
        words.append(
            f"the pool of {sample.strata.n_pool:,} points is too small for {100.0 * plan.within:.3g} %:"
            " its own scatter is wider"
        )
    if unseen > found.probability > 0.0:
        words.append(
            f"the runs cannot exclude a way of failing that the score does not see, of a probability up to"
            f" {unseen:.2g}"
        )
    return tuple(words)
