"""Plain Monte Carlo that stops at a stated precision, with limits that know when it may stop."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.special import gammaln

from probsoil._typing import FloatArray, IntArray
from probsoil.errors import ParameterError
from probsoil.parameters.designs import CHUNK_SIZE, POINT_STAGE
from probsoil.probability.binomial import clopper_pearson, unseen_bound
from probsoil.probability.plans import MonteCarloPlan
from probsoil.probability.true_runs import QuantityLimit, TrueRuns, monte_carlo_outcomes

if TYPE_CHECKING:
    import pandas as pd

LOOK_GROWTH = 0.25  # doubling left the interval up to 1.4 times as wide as aimed at, and took more runs
_LOGITS = (-41.0, 34.0)  # between which limits are sought: 1e-18 from zero, 2e-15 from one
_COLUMNS = ("runs", "exceeding", "probability", "low", "high", "stops_at")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SequentialExceedance:
    """Probability that a limit is exceeded, by plain Monte Carlo with fixed looks.

    Attributes
    ----------
    limit : QuantityLimit
        The limit.
    probability : float, [-]
        Share of the realisations up to the look at which the limit was done.
    interval : tuple of float, [-]
        Two-sided limits that allow for the looks.
    confidence : float, [-]
        Confidence of the limits.
    unseen_bound : float or None, [-]
        Where no realisation exceeds, the one-sided upper limit; None otherwise.
    reached : float, [-]
        Longer arm of the interval over the probability; infinite where no realisation exceeds.
    within : float, [-]
        What was aimed at for `reached`.
    stopped : bool
        Whether the stopping rule was met; otherwise the runs allowed were used up.
    model_runs : int, [-]
        Realisations behind the estimate.
    exceeding : int, [-]
        Realisations that exceed, those that did not converge among them.
    not_converged : int, [-]
        Realisations without a number; counted as exceeding.
    look_runs, look_exceeding : ndarray of int, shape (n_look,), [-]
        Realisations and exceedances at each look made.
    look_stop : ndarray of int, shape (n_look,), [-]
        Exceedances at which the rule stops at each look.
    """

    limit: QuantityLimit
    probability: float
    interval: tuple[float, float]
    confidence: float
    unseen_bound: float | None
    reached: float
    within: float
    stopped: bool
    model_runs: int
    exceeding: int
    not_converged: int
    look_runs: IntArray
    look_exceeding: IntArray
    look_stop: IntArray

    def __post_init__(self) -> None:
        for name in ("look_runs", "look_exceeding", "look_stop"):  # own, read-only arrays
            array = getattr(self, name).copy()
            array.setflags(write=False)
            object.__setattr__(self, name, array)

    def to_frame(self) -> "pd.DataFrame":
        """Return the looks as a table, which shows the convergence.

        Returns
        -------
        frame : pandas.DataFrame
            One row per look; the limits are those of a run that had ended there by plan.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        low, high = clopper_pearson(self.look_exceeding, self.look_runs, self.confidence)
        share = self.look_exceeding / self.look_runs
        columns = (self.look_runs, self.look_exceeding, share, low, high, self.look_stop)
        return pd.DataFrame(dict(zip(_COLUMNS, columns, strict=True)))


def monte_carlo_exceedance(
    runs: TrueRuns, limits: Sequence[QuantityLimit], plan: MonteCarloPlan | None = None
) -> tuple[SequentialExceedance, ...]:
    """Probabilities that limits are exceeded, by plain Monte Carlo with a stopping rule.

    Parameters
    ----------
    runs : TrueRuns
        Performance function and its runs.
    limits : sequence of QuantityLimit
        Limits, all judged on the same realisations.
    plan : MonteCarloPlan, optional
        Precision and budget.

    Returns
    -------
    results : tuple of SequentialExceedance
        One for each limit, at the first look at which that limit was precise enough.

    Raises
    ------
    ShapeError
        If the performance function does not give the quantity of a limit.

    Notes
    -----
    Looks are at 1024 realisations, or as planned, and then each a quarter further, the last at all that are
    allowed. A limit is done at the first look with so many exceedances that the exact binomial interval is
    within the precision. The interval given, which allows for the looks, may be somewhat wider than that.
    Further realisations are made only for limits that are not done, and do not change those that are. So each
    limit has a stopping rule on its own counts alone, which `sequential_limits` allows for exactly.
    """
    plan = plan or MonteCarloPlan()
    looks = look_schedule(plan.most_runs, plan.first_look)
    stops = stopping_counts(looks, plan.within, plan.confidence)
    counts: list[list[int]] = [[] for _ in limits]
    before = 0
    for n in looks.tolist():
        pending = [i for i, seen in enumerate(counts) if not _is_done(seen, stops)]
        if not pending:
            break
        outcome = runs.outcomes(POINT_STAGE, np.arange(before, n, dtype=np.int64))
        for i in pending:
            counts[i].append(sum(counts[i][-1:]) + int(limits[i].exceeded(outcome).sum()))
        before = n
    return tuple(
        _result(runs, limit, np.array(seen, dtype=np.int64), (looks, stops), plan)
        for limit, seen in zip(limits, counts, strict=True)
    )


def look_schedule(most_runs: int, first_look: int = CHUNK_SIZE) -> IntArray:
    """Numbers of realisations at which a run may stop.

    Parameters
    ----------
    most_runs : int, [-]
        Realisations at most.
    first_look : int, [-]
        Realisations at the first look.

    Returns
    -------
    looks : ndarray of int, shape (n_look,), [-]
        `first_look`, each a quarter or 1024 more than the last, and `most_runs` at the end.
    """
    looks = [first_look]
    while looks[-1] < most_runs:
        looks.append(looks[-1] + CHUNK_SIZE * max(1, round(LOOK_GROWTH * looks[-1] / CHUNK_SIZE)))
    return np.array([*(n for n in looks[:-1] if n < most_runs), most_runs], dtype=np.int64)


def stopping_counts(looks: IntArray, within: float, confidence: float) -> IntArray:
    """Exceedances at which the exact binomial interval is precise enough.

    Parameters
    ----------
    looks : ndarray of int, shape (n_look,), [-]
        Realisations at each look.
    within : float, [-]
        Longer arm of the interval over the probability.
    confidence : float, [-]
        Confidence of the interval.

    Returns
    -------
    count : ndarray of int, shape (n_look,), [-]
        The least count that stops; one more than the realisations where none does.
    """
    found = []
    for n in looks.tolist():
        least, most = 1, n + 1  # the arm over the share falls as the count rises
        while least < most:
            k = (least + most) // 2
            low, high = clopper_pearson(k, n, confidence)
            precise = max(float(high) - k / n, k / n - float(low)) <= within * k / n
            least, most = (least, k) if precise else (k + 1, most)
        found.append(least)
    return np.array(found, dtype=np.int64)


def sequential_limits(
    exceeding: int, looks: IntArray, stops: IntArray, confidence: float = 0.95
) -> tuple[float, float]:
    r"""Exact limits of a probability after a run that could have stopped earlier.

    Parameters
    ----------
    exceeding : int, [-]
        Exceedances at the last of the looks.
    looks : ndarray of int, shape (n_look,), [-]
        Realisations at each look up to the one at which the run ended.
    stops : ndarray of int, shape (n_look,), [-]
        Exceedances at which the run would have stopped at each.
    confidence : float, [-]
        Confidence of the two limits together.

    Returns
    -------
    low, high : float, [-]
        Limits that cover with at least the stated confidence; with a single look those of
        `clopper_pearson`.

    Raises
    ------
    ParameterError
        If the count lies outside 0 to the number of realisations or the confidence outside 0 to 1.

    Notes
    -----
    Outcomes are ordered by stage: to stop earlier speaks for a higher probability than to stop later, and
    at the same look more exceedances for a higher one. With :math:`Q(m; p)` the probability of
    not having stopped before the last look and of at most m exceedances at it, which falls as p rises, the
    limits are :math:`Q(k - 1; p) = 1 - \alpha/2` and :math:`Q(k; p) = \alpha/2`. No error has to be set aside
    for the looks, as a split between them (Bonferroni) would do. Q follows from the counts that have not
    stopped, carried from look to look by the binomial distribution of the realisations between.

    References
    ----------
    .. [1] C. Jennison and B. W. Turnbull, "Group Sequential Methods with Applications to Clinical Trials",
       Chapman and Hall, 2000, for the ordering by stage (recalled; not opened).
    """
    n = int(looks[-1])
    if not 0.0 < confidence < 1.0:
        raise ParameterError(f"confidence must lie between 0 and 1; got {confidence:g}")
    if not 0 <= exceeding <= n:
        raise ParameterError("a count must lie between 0 and the number of realisations")
    tail = 0.5 * (1.0 - confidence)
    low = 0.0 if exceeding == 0 else _root(exceeding - 1, looks, stops, 1.0 - tail)
    high = 1.0 if exceeding == n else _root(exceeding, looks, stops, tail)
    return low, high


def at_most(most: int, looks: IntArray, stops: IntArray, probability: float) -> float:
    """Probability of not having stopped before the last look and of few exceedances at it.

    Parameters
    ----------
    most : int, [-]
        Exceedances at the last look at most.
    looks : ndarray of int, shape (n_look,), [-]
        Realisations at each look.
    stops : ndarray of int, shape (n_look,), [-]
        Exceedances at which the run stops at each; that of the last look plays no part.
    probability : float, [-]
        Probability of exceeding in one realisation.

    Returns
    -------
    chance : float, [-]
        Q of `sequential_limits`.
    """
    steps = np.diff(np.concatenate([[0], looks]))
    chance = np.ones(1)
    for step, stop in zip(steps, [*stops[:-1].tolist(), most + 1], strict=True):
        size = min(stop, most + 1)
        new = _binomial(np.arange(min(size, step + 1)), int(step), probability)
        chance = np.convolve(chance, new)[:size]
    return float(chance.sum())


def _root(most: int, looks: IntArray, stops: IntArray, level: float) -> float:
    from scipy.optimize import brentq  # deferred: only a run with looks needs it

    def excess(logit: float) -> float:
        return at_most(most, looks, stops, 1.0 / (1.0 + np.exp(-logit))) - level

    logit = float(brentq(excess, *_LOGITS, xtol=1e-12, rtol=1e-13))
    return float(1.0 / (1.0 + np.exp(-logit)))


def _binomial(k: FloatArray | IntArray, n: int, probability: float) -> FloatArray:
    choose = gammaln(n + 1.0) - gammaln(k + 1.0) - gammaln(n - k + 1.0)
    chance: FloatArray = np.exp(choose + k * np.log(probability) + (n - k) * np.log1p(-probability))
    return chance


def _is_done(seen: list[int], stops: IntArray) -> bool:
    return bool(seen) and seen[-1] >= stops[len(seen) - 1]


def _result(
    runs: TrueRuns,
    limit: QuantityLimit,
    seen: IntArray,
    schedule: tuple[IntArray, IntArray],
    plan: MonteCarloPlan,
) -> SequentialExceedance:
    looks, stops = (one[: len(seen)] for one in schedule)
    n, k = int(looks[-1]), int(seen[-1])
    low, high = sequential_limits(k, looks, stops, plan.confidence)
    outcome = monte_carlo_outcomes(runs, n)[:, limit.quantity]
    return SequentialExceedance(
        limit=limit,
        probability=k / n,
        interval=(low, high),
        confidence=plan.confidence,
        unseen_bound=None if k else unseen_bound(n, plan.confidence),
        reached=max(high - k / n, k / n - low) * n / k if k else float("inf"),
        within=plan.within,
        stopped=_is_done(seen.tolist(), stops),
        model_runs=n,
        exceeding=k,
        not_converged=int(np.isnan(outcome).sum()),
        look_runs=looks,
        look_exceeding=seen,
        look_stop=stops,
    )
