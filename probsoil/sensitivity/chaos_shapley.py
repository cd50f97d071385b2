"""Shapley shares of a quantity from its polynomial chaos, with dependent parameters."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from probsoil._typing import ArrayLike, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.probability.matching_pursuit import least_squares
from probsoil.probability.multi_indices import term_values
from probsoil.probability.polynomial_chaos import PolynomialChaos
from probsoil.sensitivity.accumulate import GROUPS
from probsoil.sensitivity.players import membership, player_effects
from probsoil.sensitivity.shares import jackknife_limits

if TYPE_CHECKING:
    import pandas as pd

LARGEST_ERROR = 0.1  # hold-out error beyond which shares are refused


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ShapleyShares:
    """Share of the variance of a quantity that belongs to each parameter or group.

    Attributes
    ----------
    name : tuple of str
        Parameters or groups.
    share : ndarray, shape (n,), [-]
        Shapley effects over the variance of the chaos, which add up to one; not a number where refused.
    low, high : ndarray, shape (n,), [-]
        Limits; not a number where no runs were given.
    error : ndarray, shape (n,), [-]
        Standard error from random orders of joining; zero where the shares are exact for the chaos.
    hold_out_error : float, [-]
        Mean squared error of the chaos at points held out of its fit, over the variance there: the part
        of the variance that the shares do not divide.
    confidence : float, [-]
        Confidence of the limits.
    note : str or None
        Why shares are refused.
    """

    name: tuple[str, ...]
    share: FloatArray
    low: FloatArray
    high: FloatArray
    error: FloatArray
    hold_out_error: float
    confidence: float
    note: str | None

    def to_frame(self) -> "pd.DataFrame":
        """Return the shares as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row per parameter or group, the greatest share first.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        columns = {"name": self.name, "share": self.share, "low": self.low, "high": self.high}
        return pd.DataFrame(columns).sort_values("share", ascending=False, ignore_index=True, kind="stable")


def shapley_shares(
    chaos: PolynomialChaos,
    correlation: FloatArray,
    players: Mapping[str, Sequence[int]],
    *,
    runs: tuple[ArrayLike, ArrayLike] | None = None,
    output: int = 0,
    confidence: float = 0.95,
) -> ShapleyShares:
    """Shapley shares of one output of a chaos under a Gaussian copula.

    Parameters
    ----------
    chaos : PolynomialChaos
        Expansion in independent standard normals u (Hermite polynomials).
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals z = C u of the parameters, C being the lower Cholesky factor of R.
    players : mapping of str to sequence of int
        Latent normals of each parameter or group, counted from 0; each belongs to exactly one.
    runs : tuple of array_like, shape of (u, values), [any], optional
        Runs that the chaos was fitted to, which give the limits.
    output : int, [-]
        Output of the chaos.
    confidence : float, [-]
        Confidence of the limits.

    Returns
    -------
    shares : ShapleyShares
        Shares, or none with the reason.

    Raises
    ------
    ShapeError
        If the shapes do not match.
    ParameterError
        If the polynomials are not Hermite's, the players do not divide the latent normals among them, or the
        runs are too few to fit the terms again.

    Notes
    -----
    Exact for the chaos (see `probsoil.sensitivity.players.player_effects`), which is told apart from exact
    for the model: shares are refused where the hold-out error is above 0.1. The limits are the t interval of
    the jackknife over 20 groups of runs, with the chosen terms kept and fitted again: they do not hold what
    another choice of terms would change, nor what the chaos leaves out. A parameter that no term has and
    that is tied to no other gets exactly zero.
    """
    dimension = chaos.indices.shape[1]
    if correlation.shape != (dimension, dimension):
        raise ShapeError(f"correlation must have shape ({dimension}, {dimension}); got {correlation.shape}")
    _check_hermite(chaos)
    member = membership(players, dimension)
    note = _refusal(chaos, output)
    unknown = np.full(len(players), np.nan)
    share, low, high, error = unknown, unknown, unknown, unknown
    if note is None:
        used = np.flatnonzero(chaos.coefficients[:, output])
        used = used[chaos.indices[used].any(axis=1)]
        fits = chaos.coefficients[used, output][:, np.newaxis]
        if runs is not None:
            fits = np.concatenate([fits, _left_out(chaos, used, runs, output)], axis=1)
        effects, deviation = player_effects(chaos.indices[used], fits, correlation, member)
        error = deviation[:, 0] / effects[:, 0].sum()
        if runs is None:
            share = effects[:, 0] / effects[:, 0].sum()
        else:
            share, low, high = jackknife_limits(effects, deviation[:, 0], confidence)
    return ShapleyShares(
        name=tuple(players),
        share=share,
        low=low,
        high=high,
        error=error,
        hold_out_error=float(chaos.hold_out_error[output]),
        confidence=confidence,
        note=note,
    )


def _check_hermite(chaos: PolynomialChaos) -> None:
    rising = np.arange(chaos.basis.degree + 1, dtype=np.float64)[1:]
    if chaos.basis.centre.any() or (chaos.basis.square[:, 1:] != rising).any():
        raise ParameterError(
            "the chaos must be in standard normals (Hermite polynomials): others hold only for independent "
            "parameters"
        )


def _refusal(chaos: PolynomialChaos, output: int) -> str | None:
    error = float(chaos.hold_out_error[output])
    if not error <= LARGEST_ERROR:
        return (
            f"no shares: the polynomial chaos leaves {100.0 * error:.0f} % of the variance unexplained at "
            f"points held out of its fit ({100.0 * LARGEST_ERROR:.0f} % at most); fit it to more runs"
        )
    return None if chaos.variance[output] > 0.0 else "no shares: the quantity does not vary"


def _left_out(
    chaos: PolynomialChaos, used: IntArray, runs: tuple[ArrayLike, ArrayLike], output: int
) -> FloatArray:
    """Coefficients of the terms without each group of runs in turn, shape (n_used, 20)."""
    u, values = np.asarray(runs[0], dtype=np.float64), np.asarray(runs[1], dtype=np.float64)
    values = values[:, np.newaxis] if values.ndim == 1 else values
    if u.ndim != 2 or u.shape[1] != chaos.indices.shape[1] or len(values) != len(u):
        raise ShapeError(f"runs {u.shape} and {values.shape} do not match the chaos or each other")
    quantity = values[:, output if values.shape[1] > 1 else 0]
    kept = np.isfinite(quantity) & np.isfinite(u).all(axis=1)
    u, quantity = u[kept], quantity[kept]
    if len(u) * (GROUPS - 1) // GROUPS < len(used) + 2:
        raise ParameterError(f"{len(u)} runs are too few to fit {len(used) + 1} terms again")
    terms = np.concatenate([np.zeros((1, u.shape[1]), dtype=np.int64), chaos.indices[used]])
    table = term_values(chaos.basis.tables(u, int(terms.max())), terms)
    group = np.arange(len(u)) % GROUPS
    return np.stack(
        [least_squares(table[:, group != g], quantity[group != g])[1:] for g in range(GROUPS)], axis=1
    )
