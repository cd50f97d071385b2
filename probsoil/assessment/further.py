"""Runs beyond the campaign, until the chance of each limit is as precise as was asked."""

import time
from collections.abc import Callable, Sequence
from concurrent.futures import Executor
from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.description import Row, finite
from probsoil.assessment.evaluation import Study
from probsoil.assessment.record import CONFIDENCE, CampaignSample
from probsoil.errors import ParameterError
from probsoil.parameters.designs import POINT_STAGE
from probsoil.probability import (
    Allowance,
    MonteCarloPlan,
    QuantityLimit,
    ScoreChoice,
    SequentialExceedance,
    StratifiedExceedance,
    TrueRuns,
    exceedance_study,
    monte_carlo_exceedance,
)
from probsoil.probability.exceedance import Verdict
from probsoil.probability.ranking import SPREAD, training_runs
from probsoil.probability.true_runs import TRAINING_STAGE, first_points

FURTHER = "further runs"
"""Name of the stage that progress is reported for."""
USUAL_PRECISION = 0.2
"""Aimed at where only a time is allowed, [-]."""
BLOCK = 128
"""Points that one worker evaluates at a time, [-]."""
MOST_SURPRISES = 5
SUFFICIENT = "Plain Monte Carlo: the realisations at hand are enough."
NO_TIME = "Plain Monte Carlo: no time was left for further runs."

Heard = Callable[[str, int, int], None]


@dataclass(frozen=True, slots=True, kw_only=True)
class Precision:
    """What the chance of each limit is to reach.

    Attributes
    ----------
    within : float, [-]
        Longer arm of the interval over the chance.
    seconds : float or None, [s]
        Time of the whole assessment after which no further runs are begun; None for as many further runs as
        the campaign has.
    """

    within: float = USUAL_PRECISION
    seconds: float | None = None


def precision_of(study: Study, within: float | None, seconds: float | None) -> Precision | None:
    """Return what is asked of the chances, if it can be.

    Parameters
    ----------
    study : Study
        Design.
    within : float or None, [-]
        Longer arm of the interval over the chance.
    seconds : float or None, [s]
        Time of the whole assessment.

    Returns
    -------
    precision : Precision or None
        None where neither is given.

    Raises
    ------
    ParameterError
        If a number is out of range, or points are not drawn by plain Monte Carlo.
    """
    if within is None and seconds is None:
        return None
    if within is not None and not 0.0 < within < 1.0:
        raise ParameterError(f"the precision must lie between 0 and 100 %; got {100.0 * within:g} %")
    if seconds is not None and not seconds > 0.0:
        raise ParameterError(f"the time limit must be above 0; got {seconds:g} s")
    if study.points.replicates > 1:
        raise ParameterError(
            f"a precision or a time limit needs realisations that are independent; draws are"
            f" {study.points.name!r}: use 'monte carlo' draws"
        )
    return Precision(within=USUAL_PRECISION if within is None else within, seconds=seconds)


@dataclass(slots=True)
class GroundRuns:
    """The ground as a performance function of independent standard normals, on all workers.

    Attributes
    ----------
    study : Study
        Parameters and ground.
    executor : Executor
        Evaluates blocks of points; results do not depend on it.
    heard : callable or None
        Called with the stage, runs done, and runs in all as far as known.
    done : int, [-]
        Runs made.
    """

    study: Study
    executor: Executor
    heard: Heard | None = None
    done: int = 0

    def __call__(self, u: FloatArray) -> FloatArray:
        """Quantity of every limit.

        Parameters
        ----------
        u : ndarray, shape (n, d), [-]
            Independent standard normals.

        Returns
        -------
        quantity : ndarray, shape (n, n_limit), [m], [-] or [years]
            Model error included; a row has the same bits whatever the others.
        """
        blocks = [u[first : first + BLOCK] for first in range(0, len(u), BLOCK)]
        parts, total = [], self.done + len(u)
        for part in self.executor.map(self._block, blocks):
            parts.append(part)
            self.done += len(part)
            if self.heard is not None:
                self.heard(FURTHER, self.done, total)
        return np.concatenate(parts)

    def _block(self, u: FloatArray) -> FloatArray:
        quantity = self.study.at(self.study.space.correlated(u))["quantity"]
        return np.asarray(quantity, dtype=np.float64)


def precision_record(
    study: Study, sample: CampaignSample, ground: GroundRuns, precision: Precision, elapsed: float
) -> dict[str, Row]:
    """Make further runs until the chance of every limit is precise enough, and tell what came of it.

    Parameters
    ----------
    study : Study
        Limits and parameters.
    sample : CampaignSample
        All realisations.
    ground : GroundRuns
        Makes the further runs.
    precision : Precision
        What is asked.
    elapsed : float, [s]
        Time spent so far.

    Returns
    -------
    record : dict
        ``precision``, ready for JSON; empty where nothing is uncertain.
    """
    if study.certain:
        return {}
    limits = [
        QuantityLimit(
            threshold=limit.threshold,
            sense=limit.sense,
            quantity=column,
            name=limit.name,
            target=limit.target_probability,
        )
        for column, limit in enumerate(study.scenario.limits)
    ]
    runs = TrueRuns(ground, dimension=study.space.dimension, seed=study.scenario.seed)
    runs.keep(POINT_STAGE, sample.quantity)
    n = study.points.n
    plan = MonteCarloPlan(within=precision.within, confidence=CONFIDENCE, most_runs=n, first_look=n)
    counted = monte_carlo_exceedance(runs, limits, plan)
    missing = [place for place, one in enumerate(counted) if not one.reached <= precision.within]
    allowed = _allowed(n, runs, precision, elapsed) if missing else 0
    rows = [_row(study, one, SUFFICIENT if one.stopped else NO_TIME, None) for one in counted]
    if allowed:
        found = exceedance_study(
            runs,
            [limits[place] for place in missing],
            Allowance(within=precision.within, confidence=CONFIDENCE, runs=allowed),
            finished=n,
        )
        for place, one, choice, score in zip(
            missing, found.estimates, found.choices, found.scores, strict=True
        ):
            rows[place] = _row(study, one, choice.reason, score, _contradiction(one, counted[place]))
    return {
        "precision": {
            "within": precision.within,
            "time_limit": precision.seconds,
            "allowed_runs": allowed,
            "further_runs": runs.n_runs,
            "limits": rows,
        }
    }


def _allowed(n: int, runs: TrueRuns, precision: Precision, elapsed: float) -> int:
    """Return how many further runs may be made; a time is turned into a number by the first of them."""
    if precision.seconds is None:
        return n
    started = time.perf_counter()
    if elapsed >= precision.seconds:
        return 0
    # those that a score would be fitted to, so that they are of use if one is
    runs.outcomes(TRAINING_STAGE, first_points(training_runs(runs.dimension)), SPREAD)
    left = precision.seconds - elapsed - (time.perf_counter() - started)
    return max(0, int(left * runs.n_runs / runs.seconds))


def _row(
    study: Study,
    found: SequentialExceedance | StratifiedExceedance,
    reason: str,
    score: ScoreChoice | None,
    contradiction: Sequence[str] = (),
) -> Row:
    ranked = isinstance(found, StratifiedExceedance)
    guaranteed = found.guaranteed if isinstance(found, StratifiedExceedance) else found.interval
    return {
        "limit": found.limit.name,
        "method": "stratified by score" if ranked else "monte carlo",
        "reason": reason,
        "probability": found.probability,
        "interval": list(found.interval),
        "guaranteed": list(guaranteed),
        "unseen_bound": found.unseen_bound,
        "reached": finite(found.reached),
        "met": bool(found.reached <= found.within),
        "model_runs": found.pool_runs if isinstance(found, StratifiedExceedance) else found.model_runs,
        "exceeding": found.exceeding,
        "not_converged": found.not_converged,
        "score": None if score is None else score.name,
        "score_runs": 0 if score is None else score.training_runs + score.tail_runs,
        "verdict": _verdict(found),
        "path": _path(found),
    } | _doubts(study, found, contradiction)


def _path(found: SequentialExceedance | StratifiedExceedance) -> list[Row]:
    """Return estimate and limits against runs."""
    if isinstance(found, StratifiedExceedance):
        steps = found.path.tolist()
    else:
        steps = found.to_frame()[["runs", "probability", "low", "high"]].to_numpy().tolist()
    return [
        {"runs": int(runs), "probability": probability, "interval": [low, high]}
        for runs, probability, low, high in steps
    ]


def _doubts(
    study: Study, found: SequentialExceedance | StratifiedExceedance, contradiction: Sequence[str]
) -> Row:
    """Return what the reader must know, and parameters of runs that the score did not foresee."""
    if not isinstance(found, StratifiedExceedance):
        return {"warnings": list(contradiction), "surprises": []}
    values = study.space.values(study.space.correlated(found.surprises))
    return {
        "warnings": [*found.warnings, *contradiction],
        "surprises": [
            {name: float(np.asarray(values[name])[place]) for name in study.space.names}
            for place in range(min(MOST_SURPRISES, len(found.surprises)))
        ],
    }


def _contradiction(
    found: SequentialExceedance | StratifiedExceedance, counted: SequentialExceedance
) -> list[str]:
    """Say where strata leave out what the realisations saw: a way of exceeding that the score misses."""
    low, high = counted.interval
    if found.interval[1] >= low and found.interval[0] <= high:
        return []
    return [
        f"the realisations put the chance at {low:.2g} to {high:.2g}, which has nothing in common with this"
        " interval: go by them"
    ]


def _verdict(found: SequentialExceedance | StratifiedExceedance) -> Verdict | None:
    """Return the verdict by the interval, or by the one-sided bound where plain Monte Carlo saw nothing."""
    target, (low, high) = found.limit.target, found.interval
    if target is None:
        return None
    if isinstance(found, SequentialExceedance) and found.unseen_bound is not None:
        high = found.unseen_bound
    if high <= target:
        return "within target"
    return "beyond target" if low > target else "not conclusive"
