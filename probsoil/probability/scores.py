"""Cheap scores that rank points by how close they come to exceeding.

A score never delivers a probability: only the order in which it puts points is used, so a bad one
costs width of an interval and not its truth.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

import numpy as np
from scipy.special import ndtri

from probsoil._typing import FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.probability.counts import Sense

if TYPE_CHECKING:
    import pandas as pd

Score: TypeAlias = Callable[[FloatArray], FloatArray]

TO_THE_QUANTITY = "quadratic"
_PENALTIES = np.logspace(-5.0, 3.0, 25)  # of the mean eigenvalue
_LINEAR_EASE = 0.02  # penalty on a linear term over that on a quadratic one
_MOST_LEVERAGE = 0.9999


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PolynomialScore:
    """Polynomial of first or second degree in independent standard normals.

    Attributes
    ----------
    linear : ndarray, shape (d,), [any]
        Coefficients of first degree.
    quadratic : ndarray or None, shape (d, d), [any]
        Upper triangle of the coefficients of second degree; None for a linear score.
    """

    linear: FloatArray
    quadratic: FloatArray | None

    def __call__(self, u: FloatArray) -> FloatArray:
        """Score of each point.

        Parameters
        ----------
        u : ndarray, shape (n, d), [-]
            Points.

        Returns
        -------
        score : ndarray, shape (n,), [any]
            Up to a constant, the fitted quantity.
        """
        score: FloatArray = u @ self.linear
        if self.quadratic is not None:
            score += np.einsum("ij,ij->i", u @ self.quadratic, u)
        return score


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ScoreChoice:
    """The score that ranks best where it matters, and how the others did.

    Attributes
    ----------
    name : str
        Name of the chosen score.
    score : callable
        The chosen score.
    correlation : dict of str to float
        Spearman's rank correlation of each candidate with the quantity on the tail runs; empty where
        there was nothing to choose.
    tail_runs : int, [-]
        Runs on which the candidates were compared; none of them was fitted to.
    training_runs : int, [-]
        Runs that candidates were fitted to.
    """

    name: str
    score: Score
    correlation: dict[str, float]
    tail_runs: int
    training_runs: int

    def to_frame(self) -> "pd.DataFrame":
        """Return the comparison as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per candidate.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        names = list(self.correlation) or [self.name]
        return pd.DataFrame(
            {
                "candidate": names,
                "rank_correlation": [self.correlation.get(name, np.nan) for name in names],
                "chosen": [name == self.name for name in names],
            }
        )


def severity(values: FloatArray, sense: Sense) -> FloatArray:
    """Quantity turned so that more is worse.

    Parameters
    ----------
    values : ndarray, shape (n,), [any]
        Quantity of a limit; not a number where a run did not converge.
    sense : {"not more than", "not less than"}
        What the limit demands.

    Returns
    -------
    severity : ndarray, shape (n,), [any]
        The quantity or its negative; infinite where it is not a number, because that exceeds.
    """
    turned = values if sense == "not more than" else -values
    return np.where(np.isnan(turned), np.inf, turned)


def fitted_scores(u: FloatArray, worse: FloatArray) -> dict[str, Score]:
    """Candidate scores fitted to runs.

    Parameters
    ----------
    u : ndarray, shape (n, d), [-]
        Points that were run.
    worse : ndarray, shape (n,), [any]
        Severity of each; may be infinite.

    Returns
    -------
    scores : dict of str to callable
        A linear fit to normal scores of the ranks, and fits of second degree to the quantity and to
        normal scores of its ranks.

    Raises
    ------
    ShapeError
        If points and severities do not match or there are fewer than 8.

    Notes
    -----
    Ridge regression about the mean; the penalty on terms of second degree is 50 times that on linear
    ones, its size is chosen by leave-one-out. Fits to ranks do not change with the unit or with any rising
    function of the quantity: the linear one ranks a product of lognormals exactly in the limit. Infinite
    values count as the greatest finite ones in the fit to the quantity.
    """
    if u.ndim != 2 or worse.shape != (len(u),) or len(u) < 8:
        raise ShapeError(f"at least 8 points with a value each are needed; got {u.shape} and {worse.shape}")
    normal = ndtri((_rank(worse) + 0.5) / len(u))
    return {
        "linear": _ridge(u, normal, quadratic=False),
        TO_THE_QUANTITY: quantity_score(u, worse),
        "quadratic of ranks": _ridge(u, normal, quadratic=True),
    }


def quantity_score(u: FloatArray, worse: FloatArray) -> PolynomialScore:
    """Fit of second degree to the quantity itself.

    Parameters
    ----------
    u : ndarray, shape (n, d), [-]
        Points that were run.
    worse : ndarray, shape (n,), [any]
        Severity of each; infinite values count as the greatest finite ones.

    Returns
    -------
    score : PolynomialScore
        The fit.
    """
    finite = worse[np.isfinite(worse)]
    bounded = np.clip(worse, finite.min(), finite.max()) if finite.size else np.zeros(len(u))
    return _ridge(u, bounded, quadratic=True)


def worst_predicted(scores: Mapping[str, Score], u: FloatArray, n: int) -> IntArray:
    """Points that one candidate or another thinks worst.

    Parameters
    ----------
    scores : mapping of str to callable
        Candidates.
    u : ndarray, shape (n_pool, d), [-]
        Points to pick from.
    n : int, [-]
        How many to pick.

    Returns
    -------
    place : ndarray of int, shape (n,), [-]
        Rows of `u` that stand highest with any candidate, each candidate bringing about as many.

    Notes
    -----
    Each candidate is judged on what the others think worst as well: one that sees a single way of failing
    would look good among the points that all of them think bad.
    """
    highest = np.max([_rank(score(u)) for score in scores.values()], axis=0)
    return np.argsort(-highest, kind="stable")[:n]


def chosen_score(
    scores: Mapping[str, Score], u: FloatArray, worse: FloatArray, *, training_runs: int
) -> ScoreChoice:
    """Choose the candidate that ranks the tail best.

    Parameters
    ----------
    scores : mapping of str to callable
        Candidates, the first of equals winning.
    u : ndarray, shape (n, d), [-]
        Tail points, none of which any candidate was fitted to.
    worse : ndarray, shape (n,), [any]
        Severity of each.
    training_runs : int, [-]
        Runs the candidates were fitted to, for the record.

    Returns
    -------
    choice : ScoreChoice
        The candidate with the highest rank correlation.

    Raises
    ------
    ParameterError
        If there are no candidates.
    """
    if not scores:
        raise ParameterError("at least one candidate score is needed; got none")
    found = {name: _spearman(score(u), worse) for name, score in scores.items()}
    best = max(found, key=lambda name: found[name])
    return ScoreChoice(
        name=best,
        score=scores[best],
        correlation=found,
        tail_runs=len(u),
        training_runs=training_runs,
    )


def _rank(values: FloatArray) -> FloatArray:
    """Ranks from 0; equal values share the mean of theirs."""
    _, inverse, count = np.unique(values, return_inverse=True, return_counts=True)
    last = np.cumsum(count)
    mean: FloatArray = (last - 0.5 * (count + 1))[inverse]
    return mean


def _spearman(one: FloatArray, other: FloatArray) -> float:
    a, b = _rank(one), _rank(other)
    a, b = a - a.mean(), b - b.mean()
    spread = np.sqrt((a @ a) * (b @ b))
    return float(a @ b / spread) if spread > 0.0 else 0.0


def _ridge(u: FloatArray, target: FloatArray, *, quadratic: bool) -> PolynomialScore:
    d = u.shape[1]
    row, column = np.triu_indices(d)
    # products of different normals and squares over sqrt(2) have unit variance; means go with the constant
    scale = np.where(row == column, np.sqrt(0.5), 1.0)
    terms = np.hstack([u / np.sqrt(_LINEAR_EASE), u[:, row] * u[:, column] * scale]) if quadratic else u
    found = _ridge_coefficients(terms, target)
    if not quadratic:
        return PolynomialScore(linear=found, quadratic=None)
    upper = np.zeros((d, d))
    upper[row, column] = found[d:] * scale
    return PolynomialScore(linear=found[:d] / np.sqrt(_LINEAR_EASE), quadratic=upper)


def _ridge_coefficients(terms: FloatArray, target: FloatArray) -> FloatArray:
    """Coefficients by the dual form, which is cheap where terms outnumber runs."""
    centred, goal = terms - terms.mean(axis=0), target - target.mean()
    values, vectors = np.linalg.eigh(centred @ centred.T)
    values = np.maximum(values, 0.0)
    rotated = vectors.T @ goal
    unit = max(float(values.mean()), np.finfo(np.float64).tiny)
    kept = values[:, np.newaxis] / (values[:, np.newaxis] + _PENALTIES * unit)
    leverage = np.minimum((vectors**2) @ kept + 1.0 / len(goal), _MOST_LEVERAGE)
    residual = goal[:, np.newaxis] - vectors @ (kept * rotated[:, np.newaxis])
    error = ((residual / (1.0 - leverage)) ** 2).mean(axis=0)
    best = _PENALTIES[int(np.argmin(error))] * unit
    coefficients: FloatArray = centred.T @ (vectors @ (rotated / (values + best)))
    return coefficients
