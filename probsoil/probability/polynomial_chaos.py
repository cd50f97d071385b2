"""Sparse polynomial chaos: a response as a short sum of orthonormal polynomials.

It ranks, explains and predicts. It never delivers an exceedance probability by itself: its error is
least where the points are and greatest in the tail.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from probsoil._typing import ArrayLike, BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.probability.matching_pursuit import least_squares, matching_pursuit
from probsoil.probability.multi_indices import multi_indices, term_sum, term_values
from probsoil.probability.orthonormal_bases import OrthonormalBasis, hermite_basis

if TYPE_CHECKING:
    import pandas as pd

Candidate: TypeAlias = tuple[int, float, int | None]
"""Degree, exponent of the norm and greatest number of variables in a term."""

CANDIDATES: tuple[Candidate, ...] = ((2, 1.0, None), (3, 0.75, None), (4, 0.5, None))
RICHER: tuple[Candidate, ...] = ((3, 1.0, 2), (5, 0.75, 2))
_RICH = 20  # points per variable from which the richer sets are tried too
_LARGEST = 20_000_000  # numbers in one table of terms, 160 MB
_EVERY = 5  # every fifth point is held out
_ROWS = 4096  # points predicted together; the tables then stay in the cache
_FEWEST = 10


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PolynomialChaos:
    """Polynomial chaos of one or more outputs.

    Attributes
    ----------
    basis : OrthonormalBasis
        One-dimensional polynomials of each variable.
    indices : ndarray of int, shape (n_term, d), [-]
        Degrees of each term in each variable; the constant first.
    coefficients : ndarray, shape (n_term, n_output), [any]
        Coefficients, in the unit of each output; zero where an output does without a term.
    hold_out_error : ndarray, shape (n_output,), [-]
        Mean squared error at points held out of the fit, over the variance there. This is the error to state.
    leave_one_out : ndarray, shape (n_output,), [-]
        Corrected leave-one-out error of the chosen terms; too small, because the same values chose them.
    candidate : tuple of tuple
        Set of terms the pursuit of each output was given: degree, exponent of the norm, variables in a term.
    fitted, held_out, left_out : int, [-]
        Points behind the choice of terms, points held out, and points left out for want of a finite output.
    """

    basis: OrthonormalBasis
    indices: IntArray
    coefficients: FloatArray
    hold_out_error: FloatArray
    leave_one_out: FloatArray
    candidate: tuple[Candidate, ...]
    fitted: int
    held_out: int
    left_out: int

    @property
    def mean(self) -> FloatArray:
        """Mean of each output: the first coefficient, shape (n_output,), [any]."""
        return np.asarray(self.coefficients[0].copy())

    @property
    def variance(self) -> FloatArray:
        """Variance of each output: the sum of the other squares, shape (n_output,), [any]."""
        return np.asarray((self.coefficients[1:] ** 2).sum(axis=0))

    def predict(self, points: ArrayLike) -> FloatArray:
        """Predict the outputs at points.

        Parameters
        ----------
        points : array_like, shape (n, d), [any]
            Points in the variables of the basis: standard normals for Hermite polynomials.

        Returns
        -------
        outputs : ndarray, shape (n, n_output), [any]
            Outputs; a point gives the same bits alone and among others.

        Raises
        ------
        ShapeError
            If the points have another number of variables.
        """
        wanted = np.asarray(points, dtype=np.float64)
        degree = int(self.indices.max(initial=0))
        outputs = np.empty((len(wanted), self.coefficients.shape[1]))
        for first in range(0, max(len(wanted), 1), _ROWS):
            rows = slice(first, first + _ROWS)
            tables = self.basis.tables(wanted[rows], degree)
            outputs[rows] = term_sum(tables, self.indices, self.coefficients).T
        return outputs

    def to_frame(self) -> "pd.DataFrame":
        """Return the terms as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per term and output: the degrees in columns `degree_1`, ..., then output and coefficient.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        n_term, n_output = self.coefficients.shape
        columns = {
            f"degree_{i + 1}": np.repeat(self.indices[:, i], n_output) for i in range(self.indices.shape[1])
        }
        columns["output"] = np.tile(np.arange(n_output), n_term)
        return pd.DataFrame(columns | {"coefficient": self.coefficients.ravel()})


def polynomial_chaos(
    points: ArrayLike,
    values: ArrayLike,
    *,
    basis: OrthonormalBasis | None = None,
    candidates: Sequence[Candidate] | None = None,
    held_out: tuple[ArrayLike, ArrayLike] | None = None,
    inert: BoolArray | None = None,
) -> PolynomialChaos:
    """Sparse polynomial chaos fitted to finished runs.

    Parameters
    ----------
    points : array_like, shape (n, d), [any]
        Points: independent standard normals, or independent parameters where `basis` is given.
    values : array_like, shape (n,) or (n, n_output), [any]
        Outputs at the points.
    basis : OrthonormalBasis, optional
        Polynomials of each variable; Hermite polynomials by default.
    candidates : sequence of tuple, optional
        Sets of terms to choose from, each degree, exponent of the norm and greatest number of variables in a
        term; three by default, five from 20 points per variable.
    held_out : tuple of array_like, shape of (points, values), [any], optional
        Points and values that measure the error; every fifth point by default.
    inert : ndarray of bool, shape (d,), [-], optional
        Variables known to play no part; no term has them.

    Returns
    -------
    chaos : PolynomialChaos
        Terms, coefficients, hold-out error.

    Raises
    ------
    ShapeError
        If the shapes do not match.
    ParameterError
        If fewer than ten points have finite outputs, or no candidate fits into memory.

    Notes
    -----
    Each candidate set is searched by matching pursuit; the one with the least extended information criterion
    is kept, output by output. Points held out by the default rule join the last least-squares fit of the
    chosen terms, so the stated error is that of a fit to fewer points. Where the points are spread wider than
    the law, the error is that of the spread points.
    """
    runs = _finite_runs(points, values)
    d = runs.points.shape[1]
    sets = _candidates(len(runs.points), d, candidates)
    used = basis or hermite_basis(d, max(degree for degree, _, _ in sets))
    train, check, joined = _split(runs, held_out)
    chosen = _chosen_terms(used, sets, train, np.zeros(d, dtype=np.bool_) if inert is None else inert)
    indices, coefficients = _united(chosen)
    first = _Fit(used, indices, coefficients)
    error = first.relative_error(check)
    if joined is not None:
        first = first.again(joined)
    return PolynomialChaos(
        basis=used,
        indices=indices,
        coefficients=first.coefficients,
        hold_out_error=error,
        leave_one_out=np.array([one.leave_one_out for one in chosen]),
        candidate=tuple(one.candidate for one in chosen),
        fitted=len(train.points),
        held_out=len(check.points),
        left_out=runs.left_out,
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Runs:
    points: FloatArray
    outputs: FloatArray
    left_out: int = 0

    def rows(self, kept: BoolArray) -> "_Runs":
        return _Runs(points=self.points[kept], outputs=self.outputs[kept])


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Chosen:
    """Terms of one output."""

    candidate: Candidate
    indices: IntArray
    coefficients: FloatArray
    leave_one_out: float
    criterion: float


@dataclass(frozen=True, slots=True, eq=False)
class _Fit:
    basis: OrthonormalBasis
    indices: IntArray
    coefficients: FloatArray

    def _tables(self, points: FloatArray) -> FloatArray:
        return self.basis.tables(points, int(self.indices.max(initial=0)))

    def relative_error(self, runs: _Runs) -> FloatArray:
        predicted = term_sum(self._tables(runs.points), self.indices, self.coefficients).T
        return relative_squared_error(predicted, runs.outputs)

    def again(self, runs: _Runs) -> "_Fit":
        """Coefficients of the same terms by least squares on other runs."""
        values = term_values(self._tables(runs.points), self.indices)
        coefficients = np.zeros_like(self.coefficients)
        for output in range(coefficients.shape[1]):
            # a constant output and one that is met exactly keep what they have
            used = np.flatnonzero(self.coefficients[:, output])
            if len(used):
                coefficients[used, output] = least_squares(values[used], runs.outputs[:, output])
        return _Fit(self.basis, self.indices, coefficients)


def relative_squared_error(predicted: FloatArray, values: FloatArray) -> FloatArray:
    """Mean squared error over the variance of the values.

    Parameters
    ----------
    predicted, values : ndarray, shape (n, n_output), [any]
        Predicted and true outputs.

    Returns
    -------
    error : ndarray, shape (n_output,), [-]
        Zero where values that do not vary are met; infinite where they are not.
    """
    squares = ((predicted - values) ** 2).mean(axis=0)
    spread = values.var(axis=0)
    size = np.maximum((values**2).mean(axis=0), np.finfo(np.float64).tiny)
    constant = spread <= 1e-24 * size
    met = squares <= 1e-24 * size
    return np.where(constant, np.where(met, 0.0, np.inf), squares / np.where(constant, 1.0, spread))


def _finite_runs(points: ArrayLike, values: ArrayLike) -> _Runs:
    x, y = np.asarray(points, dtype=np.float64), np.asarray(values, dtype=np.float64)
    y = y[:, np.newaxis] if y.ndim == 1 else y
    if x.ndim != 2 or y.ndim != 2 or len(x) != len(y) or x.shape[1] == 0 or y.shape[1] == 0:
        raise ShapeError(f"points {x.shape} and values {y.shape} must be (n, d) and (n,) or (n, n_output)")
    kept = np.isfinite(y).all(axis=1) & np.isfinite(x).all(axis=1)
    if kept.sum() < _FEWEST:
        raise ParameterError(f"at least {_FEWEST} points with finite values are needed; got {kept.sum()}")
    return _Runs(points=x[kept], outputs=y[kept], left_out=int((~kept).sum()))


def _split(runs: _Runs, held_out: tuple[ArrayLike, ArrayLike] | None) -> tuple[_Runs, _Runs, _Runs | None]:
    """Split the runs: those that choose, those that check, and runs of the last fit where it is another."""
    if held_out is not None:
        check = _finite_runs(*held_out)
        if check.points.shape[1] != runs.points.shape[1] or check.outputs.shape[1] != runs.outputs.shape[1]:
            raise ShapeError("held-out points and values must have the columns of those fitted")
        return runs, check, None
    checking = np.arange(len(runs.points)) % _EVERY == _EVERY - 1
    return runs.rows(~checking), runs.rows(checking), runs


def _candidates(n: int, d: int, given: Sequence[Candidate] | None) -> tuple[Candidate, ...]:
    if given is not None:
        if len(given) == 0:
            raise ParameterError("candidates must hold at least one set of terms")
        return tuple(given)
    return CANDIDATES + RICHER if n >= _RICH * d else CANDIDATES


def _chosen_terms(
    basis: OrthonormalBasis, sets: Sequence[Candidate], train: _Runs, inert: BoolArray
) -> list[_Chosen]:
    n, d = train.points.shape
    if inert.shape != (d,):
        raise ShapeError(f"inert must have shape ({d},); got {inert.shape}")
    tables = basis.tables(train.points, max(degree for degree, _, _ in sets))
    best: list[_Chosen | None] = [None] * train.outputs.shape[1]
    for candidate in sets:
        indices = _indices_without(candidate, inert)
        if len(indices) * n > _LARGEST:
            continue
        table = term_values(tables, indices)
        for output, kept in enumerate(best):
            found = _pursued(candidate, indices, table, train.outputs[:, output])
            if kept is None or found.criterion < kept.criterion:
                best[output] = found
    if any(one is None for one in best):
        raise ParameterError(f"every set of terms is too large for {n} points of {d} variables")
    return [one for one in best if one is not None]


def _indices_without(candidate: Candidate, inert: BoolArray) -> IntArray:
    degree, norm, interaction = candidate
    active = np.flatnonzero(~inert)
    if len(active) == 0:
        return np.zeros((1, len(inert)), dtype=np.int64)
    own = multi_indices(len(active), degree, norm, interaction=interaction)
    indices = np.zeros((len(own), len(inert)), dtype=np.int64)
    indices[:, active] = own
    return indices


def _pursued(candidate: Candidate, indices: IntArray, table: FloatArray, values: FloatArray) -> _Chosen:
    if np.ptp(values) == 0.0:
        return _Chosen(
            candidate=candidate,
            indices=indices[:1],
            coefficients=values[:1].copy(),
            leave_one_out=0.0,
            criterion=-np.inf,
        )
    found = matching_pursuit(table, values)
    return _Chosen(
        candidate=candidate,
        indices=indices[found.terms],
        coefficients=found.coefficients,
        leave_one_out=found.leave_one_out,
        criterion=found.criterion,
    )


def _united(chosen: Sequence[_Chosen]) -> tuple[IntArray, FloatArray]:
    """One list of terms for all outputs, the constant first."""
    every = np.concatenate([one.indices for one in chosen])
    unique, place = np.unique(every, axis=0, return_inverse=True)
    order = np.lexsort((*(-unique[:, ::-1].T), unique.sum(axis=1)))
    rank = np.empty(len(order), dtype=np.int64)
    rank[order] = np.arange(len(order))
    coefficients = np.zeros((len(unique), len(chosen)))
    start = 0
    for output, one in enumerate(chosen):
        stop = start + len(one.indices)
        coefficients[rank[place.ravel()[start:stop]], output] = one.coefficients
        start = stop
    return np.asarray(unique[order], dtype=np.int64), coefficients
