"""Shares of the variance of a polynomial chaos, in closed form (Sobol' indices)."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.errors import ParameterError
from probsoil.probability.polynomial_chaos import PolynomialChaos

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ChaosShares:
    """Shares of the variance of each output of a chaos; not a number where an output does not vary.

    Attributes
    ----------
    first : ndarray, shape (d, n_output), [-]
        Share of each variable alone.
    total : ndarray, shape (d, n_output), [-]
        Share of all terms that have the variable; exactly zero where none has it.
    pair : ndarray, shape (d, d, n_output), [-]
        Share of each pair beyond what the two do alone; symmetric, zero on the diagonal.
    higher : ndarray, shape (n_output,), [-]
        Share of the terms with three variables or more.
    """

    first: FloatArray
    total: FloatArray
    pair: FloatArray
    higher: FloatArray

    def to_frame(self) -> "pd.DataFrame":
        """Return first and total shares as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per variable and output.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        d, n_output = self.first.shape
        return pd.DataFrame(
            {
                "variable": np.repeat(np.arange(d), n_output),
                "output": np.tile(np.arange(n_output), d),
                "first": self.first.ravel(),
                "total": self.total.ravel(),
            }
        )


def chaos_shares(chaos: PolynomialChaos) -> ChaosShares:
    r"""First-order, total and pair shares of a chaos.

    Parameters
    ----------
    chaos : PolynomialChaos
        Expansion in independent variables.

    Returns
    -------
    shares : ChaosShares
        Shares; those of single variables, of pairs (each once) and of the rest add up to one.

    Notes
    -----
    The terms are orthonormal, so the part of a set of variables is the sum of :math:`c_\alpha^2` over the
    terms with exactly these [1]_. The variables are the latent independent ones: where parameters are
    correlated these are not shares of the parameters.

    References
    ----------
    .. [1] B. Sudret, "Global sensitivity analysis using polynomial chaos expansions", Reliability Engineering
       and System Safety, 93, 2008 (recalled; not opened).
    """
    active = chaos.indices > 0
    squares = _relative_squares(chaos)
    count = active.sum(axis=1)
    d = active.shape[1]
    pair = np.zeros((d, d, squares.shape[1]))
    for row in np.flatnonzero(count == 2):
        one, other = np.flatnonzero(active[row])
        pair[one, other] += squares[row]
        pair[other, one] += squares[row]
    return ChaosShares(
        first=_summed(active & (count == 1)[:, np.newaxis], squares),
        total=_summed(active, squares),
        pair=pair,
        higher=np.asarray(squares[count > 2].sum(axis=0)),
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class GroupShares:
    """Shares of groups of variables.

    Attributes
    ----------
    name : tuple of str
        Names of the groups.
    closed : ndarray, shape (n_group, n_output), [-]
        Share of the terms whose variables all belong to the group.
    total : ndarray, shape (n_group, n_output), [-]
        Share of the terms with at least one variable of the group.
    """

    name: tuple[str, ...]
    closed: FloatArray
    total: FloatArray

    def to_frame(self) -> "pd.DataFrame":
        """Return the shares as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per group and output.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        n_output = self.closed.shape[1]
        return pd.DataFrame(
            {
                "group": np.repeat(self.name, n_output),
                "output": np.tile(np.arange(n_output), len(self.name)),
                "closed": self.closed.ravel(),
                "total": self.total.ravel(),
            }
        )


def group_shares(chaos: PolynomialChaos, groups: Mapping[str, Sequence[int]]) -> GroupShares:
    """Shares of groups of variables, such as the latent normals of one layer.

    Parameters
    ----------
    chaos : PolynomialChaos
        Expansion in independent variables.
    groups : mapping of str to sequence of int
        Variables of each group, counted from 0; a variable may be in several groups or in none.

    Returns
    -------
    shares : GroupShares
        Closed and total shares of each group.

    Raises
    ------
    ParameterError
        If there is no group or a variable does not exist.
    """
    d = chaos.indices.shape[1]
    if not groups:
        raise ParameterError("groups must name at least one group")
    member = np.zeros((len(groups), d), dtype=np.bool_)
    for row, (name, variables) in enumerate(groups.items()):
        if any(not 0 <= variable < d for variable in variables):
            raise ParameterError(f"group {name!r}: variables must lie between 0 and {d - 1}")
        member[row, list(variables)] = True
    active, squares = chaos.indices > 0, _relative_squares(chaos)
    touched = (active.astype(np.int64) @ member.T.astype(np.int64)) > 0
    outside = (active.astype(np.int64) @ (~member.T).astype(np.int64)) > 0
    return GroupShares(
        name=tuple(groups),
        closed=_summed(touched & ~outside, squares),
        total=_summed(touched, squares),
    )


def _relative_squares(chaos: PolynomialChaos) -> FloatArray:
    """Squares of the coefficients over the variance, that of the constant zero."""
    squares = chaos.coefficients**2
    squares[0] = 0.0
    variance = squares.sum(axis=0)
    return np.asarray(squares / np.where(variance > 0.0, variance, np.nan))


def _summed(chosen: BoolArray, squares: FloatArray) -> FloatArray:
    """Sum of the squares of the chosen terms, column by column of `chosen`; not-a-number stays."""
    sums = [np.asarray(squares[column].sum(axis=0) + 0.0 * squares[0]) for column in chosen.T]
    return np.stack(sums)
