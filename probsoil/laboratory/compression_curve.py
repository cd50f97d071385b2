"""Compression curve of an oedometer test: its branches, and the fit of two of them with a rounded bend."""

from dataclasses import dataclass, replace

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.laboratory.regression import (
    PRIOR_READINGS,
    Estimate,
    Regression,
    regression,
    whitener,
    widened,
)
from probsoil.laboratory.sheets import OedometerSheet

CURVE_SCATTER = 1e-3
"""Departure of a real curve from two straight branches, as strain [-]; a judgement."""

LEAST_INCREMENTS = 5
_RELOADED = 0.7  # of the largest stress known: nearer to it, reloading already bends
_WIDTHS = np.array([0.01, 0.04, 0.08, 0.12, 0.16, 0.20])  # of the bend, in ln stress
_N_BREAK = 121
_LEAST_GAIN = 8.0  # ratio of variances that a bend must explain
_STRAIGHT = (
    "one straight line fits as well as two branches: no virgin branch reached, no branch before yield, or a "
    "specimen too disturbed to tell them"
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Branches:
    """Readings of a test by branch, as places in the sheet.

    Attributes
    ----------
    first : ndarray of int, shape (n,), [-]
        First loading: each beyond every stress before it.
    loops : tuple of ndarray of int, shape (n,) each, [-]
        Legs of unloading and of reloading inside loops, each in order.
    rebound : ndarray of int, shape (m,), [-]
        Last unloading, its start included; empty where there is none.
    """

    first: IntArray
    loops: tuple[IntArray, ...]
    rebound: IntArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TwoBranchFit:
    """Two straight branches of void ratio against ln stress that pass into one another.

    Attributes
    ----------
    intercept : float, [-]
        Void ratio of the first branch at 1 kPa.
    initial_slope, lam : Estimate, [-]
        Fall of void ratio per unit of ln stress on first loading before the bend, and after it.
    ln_break : Estimate, [ln kPa]
        Where the branches meet.
    width : float, [-]
        Of the bend, in ln stress.
    """

    intercept: float
    initial_slope: Estimate
    lam: Estimate
    ln_break: Estimate
    width: float

    def void_ratio(self, stress: FloatArray) -> FloatArray:
        """Return the fitted curve.

        Parameters
        ----------
        stress : ndarray, shape (n,), [kPa]
            Effective vertical stress.

        Returns
        -------
        void_ratio : ndarray, shape (n,), [-]
            On the curve.
        """
        x = np.log(stress)
        steeper = self.lam.value - self.initial_slope.value
        return np.asarray(
            self.intercept - self.initial_slope.value * x - steeper * bend(x, self.ln_break.value, self.width)
        )


def expected_scatter(sheet: OedometerSheet) -> float:
    """Return the scatter of void ratios expected of a test.

    Parameters
    ----------
    sheet : OedometerSheet
        The test.

    Returns
    -------
    scatter : float, [-]
        Reading error of the sheet and departure of real curves from straight branches.
    """
    return float(np.hypot(sheet.reading_sd, CURVE_SCATTER * (1.0 + sheet.initial_void_ratio)))


def branches(stress: FloatArray) -> Branches:
    """Sort the readings of a test by branch.

    Parameters
    ----------
    stress : ndarray, shape (n,), [kPa]
        In the order tested; readings without stress belong to no branch.

    Returns
    -------
    branches : Branches
        Places in the order tested.
    """
    first: list[int] = []
    runs: list[list[int]] = []
    for place, value in enumerate(stress):
        if value <= 0.0:
            continue
        if not first or value > 1.001 * stress[first[-1]]:
            first.append(place)
            runs.append([place])
        else:
            runs[-1].append(place)
    legs = [_legs(stress, np.array(run)) for run in runs]
    loops = [leg for unloading, reloading in legs if reloading is not None for leg in (unloading, reloading)]
    last = legs[-1] if legs else (np.zeros(0, dtype=int), None)
    return Branches(
        first=np.array(first, dtype=int),
        loops=tuple(leg for leg in loops if leg.size > 1),
        rebound=last[0] if last[1] is None and last[0].size > 1 else np.zeros(0, dtype=int),
    )


def _legs(stress: FloatArray, run: IntArray) -> tuple[IntArray, IntArray | None]:
    """Split a run that starts at its largest stress into unloading and, if it turns, reloading."""
    lowest = int(np.argmin(stress[run]))
    back = run[lowest + 1 :]
    if back.size == 0:
        return run, None
    return run[: lowest + 1], back[stress[back] <= _RELOADED * stress[run[0]]]


def legs_slope(sheet: OedometerSheet, legs: tuple[IntArray, ...]) -> Regression:
    """Return the slope that legs of unloading and reloading share, each at its own level.

    Parameters
    ----------
    sheet : OedometerSheet
        The test.
    legs : tuple of ndarray of int, shape (n,) each, [-]
        Places of each leg, at least two in one.

    Returns
    -------
    fit : Regression
        The fall of void ratio per unit of ln stress first.
    """
    places = np.concatenate(legs)
    owner = np.repeat(np.arange(len(legs)), [leg.size for leg in legs])
    level = (owner[:, None] == np.arange(len(legs))[None, :]).astype(np.float64)
    design = np.column_stack([-np.log(sheet.stress[places]), level])
    return regression(design, sheet.void_ratio[places], expected_scatter(sheet))


def bend(x: FloatArray, at: float | FloatArray, width: float | FloatArray) -> FloatArray:
    """Return a ramp that starts at a point, rounded.

    Parameters
    ----------
    x : ndarray, shape (n,), [any]
        Where.
    at, width : float or ndarray, shape (n,), [any]
        Start, and width of the rounding.

    Returns
    -------
    ramp : ndarray, shape (n,), [any]
        Nothing well before the start, the distance from it well after.
    """
    return np.asarray(width * np.logaddexp(0.0, (x - at) / width))


def two_branch_fit(stress: FloatArray, void_ratio: FloatArray, scatter: float) -> TwoBranchFit | str:
    """Fit two branches to first loading.

    Parameters
    ----------
    stress : ndarray, shape (n,), [kPa]
        Effective vertical stress, rising.
    void_ratio : ndarray, shape (n,), [-]
        At the end of each increment.
    scatter : float, [-]
        Standard deviation of a void ratio expected beforehand.

    Returns
    -------
    fit : TwoBranchFit or str
        The fit, or why there is none.

    Notes
    -----
    ``e = a - k x - (lambda - k) w ln(1 + exp((x - b)/w))``, x the natural logarithm of stress. For every b
    and w of a grid the other three follow by generalised least squares; each grid point counts by its
    likelihood with the scatter integrated out, and the errors are those within and between grid points. So
    a break point that the readings leave open shows in all errors. Branches need two readings each.
    """
    n = stress.size
    if n < LEAST_INCREMENTS:
        return f"{n} increments of first loading; at least {LEAST_INCREMENTS} are needed to tell two branches"
    x, white = np.log(stress), whitener(n)
    ends = x[1], x[-2]
    at, width = (one.ravel() for one in np.meshgrid(np.linspace(*ends, _N_BREAK), _WIDTHS, indexing="ij"))
    ramp = bend(x[None, :], at[:, None], width[:, None])
    design = np.stack([np.broadcast_to(1.0, ramp.shape), np.broadcast_to(-x, ramp.shape), -ramp], axis=2)
    factors, target = np.einsum("ij,gjk->gik", white, design), white @ void_ratio
    normal = np.linalg.inv(np.einsum("gik,gil->gkl", factors, factors))
    coefficient = np.einsum("gkl,gil,i->gk", normal, factors, target)
    left = ((target - np.einsum("gik,gk->gi", factors, coefficient)) ** 2).sum(axis=1)
    allowed = (coefficient[:, 1] > 0.0) & (coefficient[:, 2] > 0.0)
    if not allowed.any():
        return _STRAIGHT
    least = float(left[allowed].min())
    freedom = n - 4 + PRIOR_READINGS
    refused = _refusal(x, void_ratio, white, (least + PRIOR_READINGS * scatter**2) / freedom, least)
    refused = refused or _at_an_end(float(at[allowed][left[allowed].argmin()]), *ends)
    if refused:
        return refused
    total = left + PRIOR_READINGS * scatter**2
    weight = np.where(allowed, (total / total[allowed].min()) ** (-0.5 * (n + PRIOR_READINGS)), 0.0)
    covariance = normal * (total / freedom)[:, None, None]
    fit = _averaged(weight / weight.sum(), np.stack([at, width]), coefficient, covariance, freedom)
    return replace(fit, intercept=float(np.mean(void_ratio - fit.void_ratio(stress))))


def _refusal(x: FloatArray, void_ratio: FloatArray, white: FloatArray, variance: float, least: float) -> str:
    """Say whether one straight line does as well as two."""
    factors, target = white @ np.stack([np.ones_like(x), x], axis=1), white @ void_ratio
    straight = target - factors @ np.linalg.lstsq(factors, target, rcond=None)[0]
    gain = (float(straight @ straight) - least) / (2.0 * variance)
    return "" if gain > _LEAST_GAIN else _STRAIGHT


def _at_an_end(best: float, low: float, high: float) -> str:
    step = (high - low) / (_N_BREAK - 1)
    if best > high - 0.5 * step:
        return "no virgin branch reached: fewer than two increments beyond the bend of the curve"
    if best < low + 0.5 * step:
        return "no branch before yield: fewer than two increments before the bend of the curve"
    return ""


def _averaged(
    weight: FloatArray, grid: FloatArray, coefficient: FloatArray, covariance: FloatArray, freedom: float
) -> TwoBranchFit:
    """Average over the grid; what differs between its points is part of the error."""
    # the slope of the virgin branch is the sum of the last two coefficients
    turn = np.array([[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 1.0, 1.0]])
    slopes = coefficient @ turn.T
    within = np.einsum("g,kl,glm,km->k", weight, turn, covariance, turn)
    mean = weight @ slopes
    spread = np.sqrt(within + weight @ (slopes - mean) ** 2)
    at, width = grid
    middle = float(weight @ at)
    errors = [widened(float(one), freedom) for one in spread]
    return TwoBranchFit(
        intercept=0.0,
        initial_slope=Estimate(value=float(mean[1]), standard_error=errors[1]),
        lam=Estimate(value=float(mean[2]), standard_error=errors[2]),
        ln_break=Estimate(
            value=middle, standard_error=widened(float(np.sqrt(weight @ (at - middle) ** 2)), freedom)
        ),
        width=float(width[weight.argmax()]),
    )
