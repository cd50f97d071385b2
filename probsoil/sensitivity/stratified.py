"""Drivers from weighted realisations: true runs in strata of a pool, such as one ranked by a score."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import reduce

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.sensitivity.accumulate import DriverSums, Gathering, merge
from probsoil.sensitivity.cases import CaseSums
from probsoil.sensitivity.drivers import Cases, Drivers, ranked_drivers
from probsoil.sensitivity.elasticities import Elasticity
from probsoil.sensitivity.shares import shares


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Strata:
    """Weights of strata.

    Attributes
    ----------
    share : ndarray, shape (n_stratum,), [-]
        Probability of each stratum; they add up to one.
    pool : int or None, [-]
        Points that the shares were counted from, whose error is added; None where they are known.
    """

    share: FloatArray
    pool: int | None = None

    def __post_init__(self) -> None:
        share = self.share
        if share.ndim != 1 or len(share) == 0 or not (share > 0.0).all() or abs(share.sum() - 1.0) > 1e-9:
            raise ParameterError("the shares of the strata must be above zero and add up to one")
        if self.pool is not None and self.pool < 1:
            raise ParameterError(f"the pool must have at least one point; got {self.pool}")


def stratified_mean(count: IntArray, score: FloatArray, square: FloatArray, strata: Strata) -> Elasticity:
    r"""Mean over the exceeding part of what has mean zero over all, from strata.

    Parameters
    ----------
    count : ndarray of int, shape (n_stratum, 2), [-]
        Realisations that meet the limit and that exceed it, in each stratum.
    score, square : ndarray, shape (n_stratum, 2, m), [-]
        Sums and sums of squares of the scores over each.
    strata : Strata
        Weights.

    Returns
    -------
    mean : Elasticity
        Ratio estimate and its standard error; not a number where nothing exceeds or everything does.

    Raises
    ------
    ShapeError
        If the arrays do not match the strata.
    ParameterError
        If a stratum has fewer than two realisations.

    Notes
    -----
    With the weight b_h = W_h/n_h of a realisation and :math:`P = \sum b I`, the ratio is
    :math:`e = \sum b I s / \sum b I`, linearised :math:`\psi = I (s - e)/P`. Since s has mean zero over all,
    c times its weighted mean is taken off, with c the regression of one error on the other; the variance is
    :math:`V_{\psi\psi} - V_{\psi s}^2/V_{ss}`, each V the sum of :math:`W_h^2` times the covariance within
    stratum h over n_h, and, where the W_h were counted from a pool, the covariance of the means between
    strata over its size.
    """
    if count.shape != (len(strata.share), 2) or score.shape[:2] != count.shape or square.shape != score.shape:
        raise ShapeError(
            f"sums {score.shape} and counts {count.shape} do not match {len(strata.share)} strata"
        )
    n = count.sum(axis=1)
    if (n < 2).any():
        raise ParameterError("every stratum needs at least two realisations")
    b = (strata.share / n)[:, np.newaxis]
    probability = float((b[:, 0] * count[:, 1]).sum())
    if count[:, 1].sum() == 0 or count[:, 0].sum() == 0:
        unknown = np.full(score.shape[2], np.nan)
        return Elasticity(value=unknown, error=unknown)
    ratio = (b * score[:, 1]).sum(axis=0) / probability
    every, every_square = score.sum(axis=1), square.sum(axis=1)
    first = (score[:, 1] - count[:, 1:] * ratio) / probability
    first_square = (square[:, 1] - 2.0 * ratio * score[:, 1] + count[:, 1:] * ratio**2) / probability**2
    cross = (square[:, 1] - ratio * score[:, 1]) / probability
    own = _covariance(first, first, first_square, n, strata)
    both = _covariance(first, every, cross, n, strata)
    over_all = _covariance(every, every, every_square, n, strata)
    slope = np.divide(both, over_all, out=np.zeros_like(both), where=over_all > 0.0)
    return Elasticity(
        value=ratio - slope * (b * every).sum(axis=0),
        error=np.sqrt(np.maximum(own - slope * both, 0.0)),
    )


def stratified_drivers(
    parts: Sequence[DriverSums],
    strata: Strata,
    correlation: FloatArray,
    names: Sequence[str],
    *,
    confidence: float = 0.95,
    gathering: Gathering | None = None,
) -> Drivers:
    """Drivers of a limit from realisations in strata.

    Parameters
    ----------
    parts : sequence of DriverSums
        Sums over the realisations of each stratum, drawn at random from it.
    strata : Strata
        Weights.
    correlation : ndarray, shape (d, d), [-]
        Correlation R of the latent normals.
    names : sequence of str
        Addresses of the parameters.
    confidence : float, [-]
        Confidence of the limits.
    gathering : Gathering or None
        As the sums were made with.

    Returns
    -------
    drivers : Drivers
        As from plain realisations; the exceeding ones count by their effective number
        (sum of weights)² / sum of squared weights.

    Raises
    ------
    ShapeError
        If the sums, the strata and the names do not match.
    ParameterError
        If a stratum has fewer than two realisations.
    """
    if len(parts) != len(strata.share) or any(part.mean_score.shape[1] != len(names) for part in parts):
        raise ShapeError(f"{len(parts)} sums, {len(strata.share)} strata and {len(names)} names do not match")
    count = np.stack([part.count for part in parts])
    measures = (
        stratified_mean(count, *_stacked(parts, "spread_score", "spread_square"), strata),
        stratified_mean(count, *_stacked(parts, "mean_score", "mean_square"), strata),
    )
    b = strata.share / count.sum(axis=1)
    scale = b * count.sum()
    whole = reduce(merge, parts)
    products = sum(factor * part.products for factor, part in zip(scale, parts, strict=True))
    weighted = replace(whole, products=np.asarray(products))
    weight = (b[:, np.newaxis] * count).sum(axis=0)
    worth = weight**2 / np.maximum((b[:, np.newaxis] ** 2 * count).sum(axis=0), np.finfo(np.float64).tiny)
    cases = Cases(
        realisations=int(count.sum()),
        exceeding=int(count[:, 1].sum()),
        rarer=int(np.floor(worth.min() + 1e-9)),
        probability=float(weight[1]),
    )
    return ranked_drivers(
        names, measures, shares(weighted, correlation, confidence, gathering=gathering), cases, confidence
    )


def stratified_group_elasticities(parts: Sequence[CaseSums], strata: Strata) -> Elasticity:
    """Elasticities of groups from realisations in strata.

    Parameters
    ----------
    parts : sequence of CaseSums
        Sums over the realisations of each stratum.
    strata : Strata
        Weights.

    Returns
    -------
    elasticity : Elasticity
        One per group.

    Raises
    ------
    ShapeError
        If the sums do not match the strata.
    ParameterError
        If a stratum has fewer than two realisations.
    """
    count = np.stack([part.count for part in parts])
    return stratified_mean(count, *_stacked(parts, "group_score", "group_square"), strata)


def _stacked(
    parts: Sequence[DriverSums] | Sequence[CaseSums], score: str, square: str
) -> tuple[FloatArray, FloatArray]:
    return np.stack([getattr(part, score) for part in parts]), np.stack(
        [getattr(part, square) for part in parts]
    )


def _covariance(
    first: FloatArray, second: FloatArray, product: FloatArray, n: IntArray, strata: Strata
) -> FloatArray:
    """Covariance of two weighted means from sums (n_stratum, m) in the strata and sums of the products."""
    size, share = n[:, np.newaxis], strata.share[:, np.newaxis]
    within = (product - first * second / size) / (size - 1)
    total = (share**2 / size * within).sum(axis=0)
    if strata.pool is not None:
        one, other = first / size, second / size
        middle = (share * one).sum(axis=0) * (share * other).sum(axis=0)
        total = total + ((share * one * other).sum(axis=0) - middle) / strata.pool
    return np.asarray(total)
