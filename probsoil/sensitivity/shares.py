"""Shares of a quantity's variance, by the best linear fit in the latent normals."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from scipy.special import stdtrit

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError
from probsoil.sensitivity.accumulate import GROUPS, DriverSums, Gathering
from probsoil.sensitivity.players import membership, player_effects
from probsoil.sensitivity.shapley import linear_shapley

_CONSTANT = 1e-13  # variance over mean square below which a quantity does not vary


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Shares:
    """Share of the variance of a linear fit that belongs to each parameter.

    Attributes
    ----------
    share, low, high : ndarray, shape (d,), [-]
        Shapley effects over their sum, and their limits; not a number where there is no fit.
    r_squared : float, [-]
        Part of the quantity's variance that the linear fit explains; not a number where there is none.
    fitted : int, [-]
        Realisations with a finite quantity, which the fit is made from.
    needed : int, [-]
        Least number of them that allows a fit and its limits, dealt out to the groups evenly.
    enough : bool
        Whether they allow a fit with each group left out in turn.
    """

    share: FloatArray
    low: FloatArray
    high: FloatArray
    r_squared: float
    fitted: int
    needed: int
    enough: bool


def shares(
    sums: DriverSums,
    correlation: FloatArray,
    confidence: float = 0.95,
    *,
    gathering: Gathering | None = None,
    players: Mapping[str, Sequence[int]] | None = None,
) -> Shares:
    """Shapley shares of the best linear fit of a quantity in the latent normals.

    Parameters
    ----------
    sums : DriverSums
        Sums over all realisations.
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals.
    confidence : float, [-]
        Confidence of the limits.
    gathering : Gathering or None
        Latent normals whose shares are added up. That is the Shapley effect of the lot only where no two of
        them lie in one group of correlated ones.
    players : mapping of str to sequence of int, optional
        Groups of latent normals, each of which joins as a whole: exact also where correlation ties members of
        one group to each other or to another group. Each latent normal belongs to exactly one.

    Returns
    -------
    shares : Shares
        Shares that add up to one, limits, and the quality of the fit; one per latent normal, parameter of
        `gathering` or group of `players`.

    Raises
    ------
    ParameterError
        If a latent normal belongs to no group or to several, or both groupings are given.

    Notes
    -----
    The shares are exact for the fitted line and say nothing of what the line leaves unexplained (see
    `r_squared`) nor of the tail beyond the limit. The limits are the t interval of the jackknife over
    groups of realisations (each group left out in turn), with the error of the permutations where there is
    one, clipped to 0 and 1. Too few realisations for the fit, or a quantity that does not vary, give no
    shares.
    """
    dimension = sums.dimension
    if gathering is not None and players is not None:
        raise ParameterError("give either gathering or players, not both")
    member = None if players is None else membership(players, dimension)
    size = dimension if gathering is None else gathering.size
    unknown = np.full(size if member is None else len(member), np.nan)
    used = np.flatnonzero(sums.fitted)
    total = sums.products.sum(axis=0)
    fitted = int(sums.fitted.sum())
    spare = fitted - int(sums.fitted.max(initial=0)) - dimension - 1
    needed = dimension + 2 + -(-(dimension + 2) // (GROUPS - 1))
    enough = len(used) >= 2 and spare >= 1
    if dimension == 0 or not enough or not _varies(total):
        return Shares(
            share=unknown,
            low=unknown,
            high=unknown,
            r_squared=np.nan,
            fitted=fitted,
            needed=needed,
            enough=enough,
        )
    fits = np.stack([_slopes(total), *(_slopes(total - sums.products[g]) for g in used)], axis=1)
    if member is not None:  # b'z = (C'b)'u, a chaos of degree one
        turned = np.asarray(np.linalg.cholesky(correlation).T @ fits, dtype=np.float64)
        effects, error = player_effects(np.eye(dimension, dtype=np.int64), turned, correlation, member)
    else:
        effects, error = linear_shapley(fits, correlation)
    if gathering is not None:  # the errors stem from the same random orders, so they add up themselves
        effects, error = gathering.added_up(effects), gathering.added_up(error)
    share, low, high = jackknife_limits(effects, error[:, 0], confidence)
    return Shares(
        share=share,
        low=low,
        high=high,
        r_squared=_r_squared(total),
        fitted=fitted,
        needed=needed,
        enough=enough,
    )


def jackknife_limits(
    effects: FloatArray, error: FloatArray, confidence: float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Shares from effects, with limits from the same effects without each group of realisations in turn.

    Parameters
    ----------
    effects : ndarray, shape (n, n_group + 1), [any]
        Effects from all realisations, then without each group.
    error : ndarray, shape (n,), [any]
        Standard error of the effects from random orders.
    confidence : float, [-]
        Confidence of the limits.

    Returns
    -------
    share, low, high : ndarray, shape (n,), [-]
        Effects over their sum and the t limits of the jackknife, clipped to 0 and 1.
    """
    parts = effects / effects.sum(axis=0)
    share, left_out = parts[:, 0], parts[:, 1:]
    groups = left_out.shape[1]
    jackknife = (groups - 1) / groups * ((left_out - left_out.mean(axis=1, keepdims=True)) ** 2).sum(axis=1)
    variance = jackknife + (error / effects[:, 0].sum()) ** 2
    reach = float(stdtrit(groups - 1, 0.5 * (1.0 + confidence))) * np.sqrt(variance)
    return share, np.maximum(share - reach, 0.0), np.minimum(share + reach, 1.0)


def _slopes(products: FloatArray) -> FloatArray:
    """Coefficients of the latent normals in the least-squares fit."""
    return _coefficients(products)[1:]


def _coefficients(products: FloatArray) -> FloatArray:
    """Intercept and slopes of the least-squares fit, from its normal equations."""
    return np.asarray(np.linalg.solve(products[:-1, :-1], products[:-1, -1]), dtype=np.float64)


def _varies(products: FloatArray) -> bool:
    return bool(_total_squares(products) > _CONSTANT * products[-1, -1])


def _total_squares(products: FloatArray) -> float:
    """Sum of squares of the quantity about its mean."""
    return float(products[-1, -1] - products[0, -1] ** 2 / products[0, 0])


def _r_squared(products: FloatArray) -> float:
    left = float(products[-1, -1] - _coefficients(products) @ products[:-1, -1])
    return min(max(1.0 - left / _total_squares(products), 0.0), 1.0)
