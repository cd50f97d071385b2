"""Finding a score for a limit: candidates given and fitted, compared where the limit lies."""

from collections.abc import Mapping

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.errors import ParameterError
from probsoil.parameters.designs import CHUNK_SIZE
from probsoil.probability.scores import (
    TO_THE_QUANTITY,
    Score,
    ScoreChoice,
    chosen_score,
    fitted_scores,
    quantity_score,
    severity,
    worst_predicted,
)
from probsoil.probability.true_runs import TAIL_STAGE, TRAINING_STAGE, QuantityLimit, TrueRuns, first_points

SPREAD = 1.3  # of the points that scores are fitted to and compared on, over that of the parameters
TAIL_CHUNKS = 20
TAIL_RUNS = 100


def training_runs(dimension: int) -> int:
    """Return how many runs scores are fitted to.

    Parameters
    ----------
    dimension : int, [-]
        Number of uncertain parameters.

    Returns
    -------
    n : int, [-]
        15 for each parameter, at least 200.
    """
    return max(200, 15 * dimension)


def score_of(
    runs: TrueRuns,
    limit: QuantityLimit,
    given: Mapping[str, Score] | None = None,
    *,
    fit: bool = True,
    n: int | None = None,
) -> ScoreChoice:
    """Score that ranks points for a limit.

    Parameters
    ----------
    runs : TrueRuns
        Performance function and its runs.
    limit : QuantityLimit
        The limit.
    given : mapping of str to callable, optional
        Candidates known beforehand, such as a cheap closed form; each takes points, shape (n, d), and
        gives shape (n,), higher is worse.
    fit : bool
        Whether to fit candidates as well.
    n : int, [-], optional
        Runs to fit to; 15 for each parameter, at least 200, if not given.

    Returns
    -------
    choice : ScoreChoice
        The best candidate; a single one costs no runs.

    Raises
    ------
    ParameterError
        If there is no candidate or there are too few runs to fit to.
    ShapeError
        If the performance function does not give the quantity of the limit.

    Notes
    -----
    Points for fitting and comparing are drawn 1.3 times as wide as the parameters, so that a fit need not
    be carried beyond its points where the limit lies. Candidates are compared on the 100 of 20,480 such
    points that one or another thinks worst, none of which they were fitted to: over the whole range every
    fit looks good, and the order of the tail is what counts. If the fit of second degree to the quantity
    wins, it is made again with the tail runs added; the rank correlation reported is that of before.
    """
    candidates = dict(given or {})
    if not fit and len(candidates) == 1:
        ((name, score),) = candidates.items()
        return ScoreChoice(name=name, score=score, correlation={}, tail_runs=0, training_runs=0)
    size = (training_runs(runs.dimension) if n is None else n) if fit else 0
    index = first_points(size)
    u, worse = _run(runs, limit, TRAINING_STAGE, index)
    if fit:
        candidates |= fitted_scores(u, worse)
    if not candidates:
        raise ParameterError("at least one candidate score is needed: give one or allow fitting")
    pool = first_points(TAIL_CHUNKS * CHUNK_SIZE)
    place = worst_predicted(candidates, SPREAD * runs.points(TAIL_STAGE, pool), TAIL_RUNS)
    tail, tail_worse = _run(runs, limit, TAIL_STAGE, place)
    choice = chosen_score(candidates, tail, tail_worse, training_runs=size)
    if choice.name != TO_THE_QUANTITY:
        return choice
    refitted = quantity_score(np.concatenate([u, tail]), np.concatenate([worse, tail_worse]))
    return ScoreChoice(
        name=choice.name,
        score=refitted,
        correlation=choice.correlation,
        tail_runs=choice.tail_runs,
        training_runs=size,
    )


def _run(runs: TrueRuns, limit: QuantityLimit, stage: int, index: IntArray) -> tuple[FloatArray, FloatArray]:
    if not index.size:
        return np.empty((0, runs.dimension)), np.empty(0)
    outcome = runs.outcomes(stage, index, SPREAD)
    limit.exceeded(outcome)  # refuses a quantity that is not there
    return SPREAD * runs.points(stage, index), severity(outcome[:, limit.quantity], limit.sense)
