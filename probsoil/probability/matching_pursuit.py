"""Choice of the few terms that explain a set of values: orthogonal matching pursuit."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray, IntArray

_DEPENDENT = 1e-10  # share of a column left after projection below which it brings nothing new
_EXACT = 1e-26  # share of the variance left below which the fit is exact to rounding
_LEAST_WAIT = 12  # steps without a better error before the pursuit ends


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Pursuit:
    """Terms chosen by orthogonal matching pursuit.

    Attributes
    ----------
    terms : ndarray of int, shape (n_chosen,), [-]
        Rows of the table of terms, in the order they were taken; the constant first.
    coefficients : ndarray, shape (n_chosen,), [any]
        Least-squares coefficients, in the unit of the values.
    leave_one_out : float, [-]
        Corrected leave-one-out error over the variance of the values.
    criterion : float, [-]
        Extended information criterion, the least over the number of terms.
    """

    terms: IntArray
    coefficients: FloatArray
    leave_one_out: float
    criterion: float


def matching_pursuit(table: FloatArray, values: FloatArray) -> Pursuit:
    r"""Terms that explain the values, by orthogonal matching pursuit on a growing QR factorisation.

    Parameters
    ----------
    table : ndarray, shape (n_term, n), [-]
        Values of the terms at the points; the first row is the constant.
    values : ndarray, shape (n,), [any]
        Values to be explained; not all alike.

    Returns
    -------
    pursuit : Pursuit
        Chosen terms; their number is the one with the least extended information criterion.

    Notes
    -----
    Each step takes the term with the greatest correlation with what is left, makes it orthogonal
    to those taken (twice, against rounding) and appends a column to Q. The number P of terms out of T
    offered is the one with the least :math:`n \ln(r'r/n) + P (\ln n + 2 \ln T)` [1]_, T counted
    because the best of many terms fits a little of anything. The leave-one-out error follows from the
    leverages, :math:`\overline{(r_i / (1 - h_i))^2}`, times the correction for the number of terms
    :math:`\frac{n}{n-P} (1 + \mathrm{tr}\,(\Psi'\Psi)^{-1})` [2]_. Choosing by it took several times too
    many terms where the set is large (``docs/theory/polynomial_chaos.md`` has the figures), so it is told and
    not used.

    References
    ----------
    .. [1] J. Chen and Z. Chen, "Extended Bayesian information criteria for model selection with large model
       spaces", Biometrika, 95, 2008 (recalled; not opened).
    .. [2] G. Blatman and B. Sudret, "Adaptive sparse polynomial chaos expansion based on least angle
       regression", Journal of Computational Physics, 230, 2011 (recalled; not opened).
    """
    growth = _Growth(table, values, min(len(table), max(len(values) // 2, 1)))
    best, least, error, since = 1, np.inf, np.inf, 0
    while True:
        criterion = growth.criterion()
        since += 1
        if criterion < least:
            best, least, error, since = growth.count, criterion, growth.corrected_error(), 0
        if growth.is_exact or since > max(_LEAST_WAIT, growth.count // 5) or not growth.take_next():
            break
    return Pursuit(
        terms=growth.taken[:best].copy(),
        coefficients=growth.coefficients(best),
        leave_one_out=error,
        criterion=least,
    )


def least_squares(table: FloatArray, values: FloatArray) -> FloatArray:
    """Least-squares coefficients of given terms.

    Parameters
    ----------
    table : ndarray, shape (n_term, n), [-]
        Values of the terms at the points; at least as many points as terms.
    values : ndarray, shape (n,), [any]
        Values to be explained.

    Returns
    -------
    coefficients : ndarray, shape (n_term,), [any]
        Coefficients, in the unit of the values; zero for a term that those before it make up.
    """
    growth = _Growth(table, values, len(table))
    for term in range(1, len(table)):
        growth.append(term)
    coefficients = np.zeros(len(table))
    coefficients[growth.taken[: growth.count]] = growth.coefficients(growth.count)
    return coefficients


class _Growth:
    """The factorisation so far: orthonormal rows Q, R and its inverse, what is left of the values."""

    def __init__(self, table: FloatArray, values: FloatArray, most: int) -> None:
        n = len(values)
        self.table, self.most, self.count = table, most, 1
        self.length = np.sqrt(np.einsum("ij,ij->i", table, table))
        self.open = self.length > 0.0
        self.open[0] = False
        self.taken = np.zeros(most, dtype=np.int64)
        self.q = np.empty((most, n))
        self.inverse = np.zeros((most, most))
        self.along = np.zeros(most)
        self.q[0] = table[0] / self.length[0]
        self.inverse[0, 0] = 1.0 / self.length[0]
        self.along[0] = self.q[0] @ values
        self.left = values - self.along[0] * self.q[0]
        self.spread = float(self.left @ self.left)
        self.leverage = self.q[0] ** 2
        self.trace = float(self.inverse[0, 0] ** 2)

    @property
    def is_exact(self) -> bool:
        return bool(self.left @ self.left <= _EXACT * self.spread)

    def criterion(self) -> float:
        n = len(self.left)
        floor = _EXACT * self.spread  # below it only rounding differs
        squares = max(float(self.left @ self.left), floor)
        return float(n * np.log(squares / n) + self.count * (np.log(n) + 2.0 * np.log(len(self.table))))

    def corrected_error(self) -> float:
        n = len(self.left)
        spared = 1.0 - self.leverage
        if n <= self.count or spared.min() <= 0.0:
            return np.inf
        error = float(((self.left / spared) ** 2).sum())
        return error / self.spread * n / (n - self.count) * (1.0 + self.trace)

    def take_next(self) -> bool:
        """Append the term most alike to what is left; False where there is none."""
        if self.count == self.most:
            return False
        alike = np.abs(self.table @ self.left)
        alike[self.open] /= self.length[self.open]
        alike[~self.open] = -1.0
        while True:
            term = int(alike.argmax())
            if alike[term] <= 0.0:
                return False
            self.open[term] = False
            if self.append(term):
                return True
            alike[term] = -1.0

    def append(self, term: int) -> bool:
        """Append one term; False where those taken make it up."""
        count, q = self.count, self.q[: self.count]
        row = self.table[term]
        shares = q @ row
        fresh = row - shares @ q
        again = q @ fresh
        fresh -= again @ q
        shares += again
        length = float(np.sqrt(fresh @ fresh))
        if length <= _DEPENDENT * self.length[term]:
            return False
        self.q[count] = fresh / length
        self.inverse[:count, count] = -(self.inverse[:count, :count] @ shares) / length
        self.inverse[count, count] = 1.0 / length
        self.trace += float((self.inverse[: count + 1, count] ** 2).sum())
        self.along[count] = self.q[count] @ self.left
        self.left = self.left - self.along[count] * self.q[count]
        self.leverage = self.leverage + self.q[count] ** 2
        self.taken[count] = term
        self.count = count + 1
        return True

    def coefficients(self, count: int) -> FloatArray:
        """Least-squares coefficients of the first `count` terms taken."""
        return np.asarray(self.inverse[:count, :count] @ self.along[:count], dtype=np.float64)
