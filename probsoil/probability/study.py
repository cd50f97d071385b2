"""One door: limits on any performance function, each by the estimator that suits it."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from probsoil.errors import ParameterError
from probsoil.parameters.designs import CHUNK_SIZE
from probsoil.probability.chooser import MethodChoice, MethodName, Pilot, chosen_method
from probsoil.probability.counts import Sense
from probsoil.probability.plans import Allowance, MonteCarloPlan, StratifiedPlan
from probsoil.probability.ranking import TAIL_RUNS, score_of, training_runs
from probsoil.probability.scores import Score, ScoreChoice
from probsoil.probability.sequential import SequentialExceedance, monte_carlo_exceedance
from probsoil.probability.strata import Strata, pool_size, strata_by_score
from probsoil.probability.stratified import StratifiedExceedance, stratified_exceedance
from probsoil.probability.together import JointExceedance, joint_exceedance
from probsoil.probability.true_runs import QuantityLimit, TrueRuns, monte_carlo_outcomes

if TYPE_CHECKING:
    import pandas as pd

Estimate: TypeAlias = SequentialExceedance | StratifiedExceedance

PILOT_RUNS = 256
RARER = 0.1
LEAST_RANKED = 700  # runs in strata with which an estimate may begin: a pilot in each, and the far strata


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ExceedanceStudy:
    """Probabilities of several limits, and how each was found.

    Attributes
    ----------
    estimates : tuple of SequentialExceedance or StratifiedExceedance
        One for each limit, in their order.
    choices : tuple of MethodChoice
        Why each has its estimator.
    scores : tuple of ScoreChoice or None
        Score of each stratified estimate.
    together : JointExceedance
        Whether any is exceeded and which go together, from the realisations of plain Monte Carlo.
    model_runs : int, [-]
        Runs of the performance function made so far, those of earlier studies among them.
    seconds : float, [s]
        Time spent in it.
    """

    estimates: tuple[Estimate, ...]
    choices: tuple[MethodChoice, ...]
    scores: tuple[ScoreChoice | None, ...]
    together: JointExceedance
    model_runs: int
    seconds: float

    def to_frame(self) -> "pd.DataFrame":
        """Return the estimates as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per limit. The limits `guaranteed_low` and `guaranteed_high` need no condition; for plain
            Monte Carlo they are `low` and `high`.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        return pd.DataFrame(
            [_row(one, choice) for one, choice in zip(self.estimates, self.choices, strict=True)]
        )


def exceedance_study(
    runs: TrueRuns,
    limits: Sequence[QuantityLimit],
    allowance: Allowance,
    *,
    given: Mapping[int, Mapping[str, Score]] | None = None,
    method: MethodName | None = None,
    finished: int = 0,
) -> ExceedanceStudy:
    """Probabilities that limits are exceeded, for any performance function.

    Parameters
    ----------
    runs : TrueRuns
        Performance function and its runs. A second study on the same object makes only runs that the
        first has not made.
    limits : sequence of QuantityLimit
        Limits, at least one.
    allowance : Allowance
        Precision, and runs or time of the whole study, of which the pilot takes 256.
    given : mapping of int to mapping of str to callable, optional
        Cheap scores known beforehand, by the column of the quantity they rank; higher is worse.
    method : {"monte carlo", "stratified by score"}, optional
        Estimator of every limit; chosen for each by `chosen_method` if not given.
    finished : int, [-]
        First realisations of plain Monte Carlo that `runs` holds already. They are the pilot and the first
        look, and come on top of what is allowed.

    Returns
    -------
    study : ExceedanceStudy
        Estimates, choices, scores and which limits go together.

    Raises
    ------
    ParameterError
        If there are no limits, or the runs allowed do not cover the pilot or what strata need.
    ShapeError
        If the performance function or a score does not give the shape it must.

    Notes
    -----
    A pilot of 256 realisations of plain Monte Carlo comes first; its realisations count in what follows.
    Where some limits need strata, plain Monte Carlo for the others may use half of what is allowed, and
    the limits that need strata share the rest evenly. Limits of one sense on one quantity share their
    score and strata, so that runs made for one serve the other. Where what is allowed does not cover strata
    for all limits that need them, the later ones are left to plain Monte Carlo.
    """
    if not limits:
        raise ParameterError("at least one limit is needed; got none")
    if allowance.runs is not None and allowance.runs < PILOT_RUNS:
        raise ParameterError(f"at least {PILOT_RUNS} runs are needed for the pilot; got {allowance.runs}")
    before = runs.n_runs
    choices = _choices(runs, limits, allowance, given or {}, finished)
    allowed = choices[0].most_runs - finished
    if method is None:
        choices = _afforded(choices, allowed, runs.dimension)
    else:
        choices = [replace(one, method=method, reason="As asked.") for one in choices]
    rare = [i for i, one in enumerate(choices) if one.method == "stratified by score"]
    common = [i for i in range(len(limits)) if i not in rare]
    plan = MonteCarloPlan(
        within=allowance.within,
        confidence=allowance.confidence,
        most_runs=finished + max(1, allowed // 2 if rare else allowed),
        first_look=finished or CHUNK_SIZE,
    )
    counted = monte_carlo_exceedance(runs, [limits[i] for i in common], plan)
    seen = max([finished or PILOT_RUNS, *(one.model_runs for one in counted)])
    found: dict[int, Estimate] = dict(zip(common, counted, strict=True))
    ranked = _Ranked(runs, given or {})
    for place, i in enumerate(rare):
        share = (allowed - (runs.n_runs - before)) // (len(rare) - place)
        rarest = min(choices[j].probability for j in rare if _kind(limits[j]) == _kind(limits[i]))
        if finished:  # what so many realisations hardly saw may be much rarer than it was taken for
            rarest *= RARER
        found[i] = ranked.estimate(limits[i], rarest, allowance, share)
    return ExceedanceStudy(
        estimates=tuple(found[i] for i in range(len(limits))),
        choices=tuple(choices),
        scores=tuple(ranked.scores[_kind(limits[i])] if i in rare else None for i in range(len(limits))),
        together=_together(runs, limits, seen, allowance),
        model_runs=runs.n_runs,
        seconds=runs.seconds,
    )


@dataclass(slots=True)
class _Ranked:
    """Scores and strata that limits on one quantity share."""

    runs: TrueRuns
    given: Mapping[int, Mapping[str, Score]]
    scores: dict[tuple[int, Sense], ScoreChoice] = field(default_factory=dict)
    strata: dict[tuple[int, Sense], Strata] = field(default_factory=dict)

    def estimate(
        self, limit: QuantityLimit, rarest: float, allowance: Allowance, share: int
    ) -> StratifiedExceedance:
        """Estimate one limit from a share of the runs, those that its score needs among them."""
        kind, before = _kind(limit), self.runs.n_runs
        if kind not in self.strata:
            known = self.given.get(limit.quantity)
            self.scores[kind] = score_of(self.runs, limit, known, fit=not known)
            self.strata[kind] = strata_by_score(
                self.runs, self.scores[kind].score, pool_size(rarest, allowance.within)
            )
        plan = StratifiedPlan(
            within=allowance.within,
            confidence=allowance.confidence,
            most_runs=share - (self.runs.n_runs - before),
        )
        return stratified_exceedance(self.runs, limit, self.strata[kind], plan)


def _kind(limit: QuantityLimit) -> tuple[int, Sense]:
    return limit.quantity, limit.sense


def _choices(
    runs: TrueRuns,
    limits: Sequence[QuantityLimit],
    allowance: Allowance,
    given: Mapping[int, object],
    finished: int,
) -> list[MethodChoice]:
    n = finished or PILOT_RUNS
    outcome = monte_carlo_outcomes(runs, n)
    each = runs.seconds / max(1, runs.n_runs)
    whole = replace(
        allowance,
        runs=None if allowance.runs is None else allowance.runs + finished,
        seconds=None if allowance.seconds is None else allowance.seconds + finished * each,
    )
    return [
        chosen_method(
            Pilot(runs=n, exceeding=int(limit.exceeded(outcome).sum()), seconds_per_run=each),
            whole,
            dimension=runs.dimension,
            target=limit.target,
            has_score=limit.quantity in given,
        )
        for limit in limits
    ]


def _afforded(choices: list[MethodChoice], allowed: int, dimension: int) -> list[MethodChoice]:
    """Leave to plain Monte Carlo the limits for which there would be too few runs in strata."""
    least = training_runs(dimension) + TAIL_RUNS + LEAST_RANKED
    found: list[MethodChoice] = []
    rare = [place for place, one in enumerate(choices) if one.method == "stratified by score"]
    budget = allowed if len(rare) == len(choices) else allowed // 2
    if len(rare) * least > budget:
        rare = rare[: (allowed // 2) // least]
    for place, one in enumerate(choices):
        if one.method == "stratified by score" and place not in rare:
            reason = (
                f"Plain Monte Carlo, for what it gives: {allowed:,} runs besides those at hand do not cover"
                f" strata by a score for this limit, some {least:,} at least."
            )
            found.append(replace(one, method="monte carlo", reason=reason))
        else:
            found.append(one)
    return found


def _together(
    runs: TrueRuns, limits: Sequence[QuantityLimit], n: int, allowance: Allowance
) -> JointExceedance:
    outcome = monte_carlo_outcomes(runs, n)
    exceeded = np.column_stack([limit.exceeded(outcome) for limit in limits])
    return joint_exceedance(exceeded, [one.name for one in limits], confidence=allowance.confidence)


def _row(one: Estimate, choice: MethodChoice) -> dict[str, object]:
    guaranteed, runs = (
        (one.guaranteed, one.pool_runs)
        if isinstance(one, StratifiedExceedance)
        else (one.interval, one.model_runs)
    )
    return {
        "limit": one.limit.name,
        "threshold": one.limit.threshold,
        "method": choice.method,
        "probability": one.probability,
        "low": one.interval[0],
        "high": one.interval[1],
        "guaranteed_low": guaranteed[0],
        "guaranteed_high": guaranteed[1],
        "unseen_bound": one.unseen_bound,
        "reached": one.reached,
        "runs": runs,
        "exceeding": one.exceeding,
        "not_converged": one.not_converged,
    }
