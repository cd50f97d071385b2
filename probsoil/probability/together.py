"""Several limits at once: whether any is exceeded, and which are exceeded together."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import ArrayLike, FloatArray, IntArray
from probsoil.errors import ShapeError
from probsoil.probability.binomial import clopper_pearson
from probsoil.probability.exceedance import Exceedance, exceedance

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class JointExceedance:
    """How several limits are exceeded on the same realisations.

    Attributes
    ----------
    names : tuple of str
        What the limits are called.
    any_exceeded : Exceedance
        Probability that at least one limit is exceeded; its threshold counts limits.
    all_exceeded : Exceedance
        Probability that every limit is.
    number : ndarray of int, shape (n_limit + 1,), [-]
        Realisations that exceed none, one, two, ... of the limits.
    both : ndarray of int, shape (n_limit, n_limit), [-]
        Realisations that exceed two limits; on the diagonal, the one.
    conditional : ndarray, shape (n_limit, n_limit), [-]
        Chance that the limit of the column is exceeded where that of the row is; not a number where that
        of the row never is.
    low, high : ndarray, shape (n_limit, n_limit), [-]
        Limits of `conditional`; 0 and 1 where nothing is known.
    if_unrelated : ndarray, shape (n_limit, n_limit), [-]
        Realisations that would exceed both if the two were unrelated.
    confidence : float, [-]
        Confidence of each pair of limits by itself.
    model_runs : int, [-]
        Realisations.
    """

    names: tuple[str, ...]
    any_exceeded: Exceedance
    all_exceeded: Exceedance
    number: IntArray
    both: IntArray
    conditional: FloatArray
    low: FloatArray
    high: FloatArray
    if_unrelated: FloatArray
    confidence: float
    model_runs: int

    def __post_init__(self) -> None:
        for name in ("number", "both", "conditional", "low", "high", "if_unrelated"):  # own, read-only
            array = getattr(self, name).copy()
            array.setflags(write=False)
            object.__setattr__(self, name, array)

    def to_frame(self) -> "pd.DataFrame":
        """Return the pairs as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per ordered pair: where the first is exceeded, how often the second is.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        rows = [
            {
                "where": self.names[i],
                "also": self.names[j],
                "where_exceeded": int(self.both[i, i]),
                "both_exceeded": int(self.both[i, j]),
                "if_unrelated": float(self.if_unrelated[i, j]),
                "conditional": float(self.conditional[i, j]),
                "low": float(self.low[i, j]),
                "high": float(self.high[i, j]),
            }
            for i in range(len(self.names))
            for j in range(len(self.names))
            if i != j
        ]
        return pd.DataFrame(rows)


def joint_exceedance(
    exceeded: ArrayLike,
    names: Sequence[str],
    *,
    replicate: ArrayLike | None = None,
    method: str = "monte carlo",
    confidence: float = 0.95,
) -> JointExceedance:
    """Probability that any of several limits is exceeded, and which go together.

    Parameters
    ----------
    exceeded : array_like of bool, shape (n, n_limit), [-]
        Whether each realisation exceeds each limit, by the rule of `exceeds`.
    names : sequence of str
        What the limits are called.
    replicate : array_like of int, shape (n,), [-], optional
        Replicate of each realisation, from 0, for points that are not independent.
    method : str
        Name of the way the points were drawn.
    confidence : float, [-]
        Confidence of each interval.

    Returns
    -------
    result : JointExceedance
        Probabilities with limits, counts of pairs, conditional chances with limits.

    Raises
    ------
    ShapeError
        If there are no realisations or no limits, or the names or replicates do not match.
    ParameterError
        If the confidence lies outside 0 to 1.

    Notes
    -----
    Among the k independent realisations that exceed one limit, the number that exceed another as well is
    binomial, so its exact limits hold whatever k came out. For points that are not independent they are a
    guide, as a rule on the wide side; the chance of any is then from the replicates.
    """
    table = np.asarray(exceeded, dtype=np.bool_)
    if table.ndim != 2 or 0 in table.shape or table.shape[1] != len(names):
        raise ShapeError(
            f"one column of realisations for each of {len(names)} limits is needed; got {table.shape}"
        )
    total = table.sum(axis=1)
    whole = table.astype(np.int64)
    both = whole.T @ whole
    one = np.diagonal(both)
    trials = np.broadcast_to(np.maximum(one, 1)[:, np.newaxis], both.shape)
    known = np.broadcast_to((one > 0)[:, np.newaxis], both.shape)
    low, high = clopper_pearson(both, trials, confidence)
    chances = [
        exceedance(
            total, least - 0.5, "not more than", replicate=replicate, method=method, confidence=confidence
        )
        for least in (1, len(names))
    ]
    return JointExceedance(
        names=tuple(names),
        any_exceeded=chances[0],
        all_exceeded=chances[1],
        number=np.bincount(total, minlength=len(names) + 1),
        both=both,
        conditional=np.where(known, both / trials, np.nan),
        low=np.where(known, low, 0.0),
        high=np.where(known, high, 1.0),
        if_unrelated=np.outer(one, one) / len(table),
        confidence=confidence,
        model_runs=len(table),
    )
