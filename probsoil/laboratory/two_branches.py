"""Two branches of first loading with a rounded bend, the virgin one straight or flattening."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.laboratory.compression_curve import reading_place
from probsoil.laboratory.regression import PRIOR_READINGS, Estimate, whitener, widened

LEAST_INCREMENTS = 5
FLATTENING = 0.5
"""Standard deviation expected of the part of the virgin slope that dies out, over it [-]; a judgement."""

FLATTENS = 0.3
"""Probability expected beforehand that a virgin branch flattens [-]; a judgement."""

_WIDTHS = np.array([0.01, 0.05, 0.09, 0.14, 0.20, 0.28, 0.40])  # of the bend, in ln stress
_STRAIGHT_VIRGIN = 1e-9  # a reach of nothing: no part of the slope dies out
_REACHES = np.array([_STRAIGHT_VIRGIN, 0.5, 1.0, 2.5])  # for a part of the slope to die out, in ln stress
_N_BREAK = 121
_LEAST_GAIN = 8.0  # ratio of variances that a bend must explain
_STRAIGHT = (
    "one straight line fits as well as two branches: no virgin branch reached, no branch before yield, or a "
    "specimen too disturbed to tell them"
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Bends:
    """Bends tried, one per element.

    Attributes
    ----------
    at : ndarray, shape (g,), [ln kPa]
        Where the branches meet.
    width : ndarray, shape (g,), [-]
        Of the bend, in ln stress.
    reach : ndarray, shape (g,), [-]
        Over which the part of the virgin slope that dies out does so, in ln stress.
    long : ndarray of bool, shape (g,), [-]
        Whether the rounding has long tails.
    """

    at: FloatArray
    width: FloatArray
    reach: FloatArray
    long: BoolArray

    def ramp(self, x: FloatArray) -> FloatArray:
        """Return the distance beyond the meeting of the branches, rounded.

        Parameters
        ----------
        x : ndarray, shape (n,), [ln kPa]
            Where.

        Returns
        -------
        ramp : ndarray, shape (g, n), [-]
            Nothing well before the bend, the distance from it well after.
        """
        t, width = x[None, :] - self.at[:, None], self.width[:, None]
        short = width * np.logaddexp(0.0, t / width)
        hyperbola = 0.5 * (t + np.sqrt(t**2 + (2.0 * np.log(2.0) * width) ** 2))  # as high at the bend
        return np.where(self.long[:, None], hyperbola, short)

    def died(self, ramp: FloatArray) -> FloatArray:
        """Return what the part of the slope that dies out has summed up to.

        Parameters
        ----------
        ramp : ndarray, shape (g, n), [-]
            Distance beyond the bend.

        Returns
        -------
        died : ndarray, shape (g, n), [-]
            The distance itself at first, the reach at last.
        """
        reach = self.reach[:, None]
        return np.asarray(-reach * np.expm1(-ramp / reach))

    def design(self, x: FloatArray) -> FloatArray:
        """Return the factors of level, slope before the bend, and lasting and dying additions to it.

        Parameters
        ----------
        x : ndarray, shape (n,), [ln kPa]
            Where.

        Returns
        -------
        design : ndarray, shape (g, n, 4), [-]
            Of void ratio.
        """
        ramp = self.ramp(x)
        ones = np.ones_like(ramp)
        return np.stack([ones, -x * ones, -ramp, -self.died(ramp)], axis=2)

    def slopes(self, end: float) -> FloatArray:
        """Return the factors of the slopes looked for.

        Parameters
        ----------
        end : float, [ln kPa]
            Last load.

        Returns
        -------
        factors : ndarray, shape (g, 4, 4), [-]
            Rows: slope before the bend; mean of the virgin branch; just beyond the bend; at the last load.
        """
        beyond = end - self.at
        factors = np.zeros((self.at.size, 4, 4))
        factors[:, :, 1] = 1.0
        factors[:, 1:, 2] = 1.0
        factors[:, 1, 3] = self.died(beyond[:, None])[:, 0] / beyond
        factors[:, 2, 3] = 1.0
        factors[:, 3, 3] = np.exp(-beyond / self.reach)
        return factors

    def chosen(self, index: int) -> "Bends":
        """Return one of them.

        Parameters
        ----------
        index : int, [-]
            Which.

        Returns
        -------
        bend : Bends
            Of one element.
        """
        one = slice(index, index + 1)
        return Bends(at=self.at[one], width=self.width[one], reach=self.reach[one], long=self.long[one])


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TwoBranchFit:
    """Two branches of void ratio against ln stress that pass into one another.

    Attributes
    ----------
    initial_slope : Estimate, [-]
        Fall of void ratio per unit of ln stress on first loading before the bend.
    lam : Estimate, [-]
        The same of the virgin branch, mean from the meeting of the branches to the last load.
    first_lam, last_lam : Estimate, [-]
        Of the virgin branch just beyond the bend, and at the last load.
    ln_break : Estimate, [ln kPa]
        Where the branches meet.
    likeliest : Bends
        The bend of the likeliest curve.
    coefficient : ndarray, shape (4,), [-]
        Of that curve.
    """

    initial_slope: Estimate
    lam: Estimate
    first_lam: Estimate
    last_lam: Estimate
    ln_break: Estimate
    likeliest: Bends
    coefficient: FloatArray

    def void_ratio(self, stress: FloatArray) -> FloatArray:
        """Return the likeliest curve.

        Parameters
        ----------
        stress : ndarray, shape (n,), [kPa]
            Effective vertical stress.

        Returns
        -------
        void_ratio : ndarray, shape (n,), [-]
            On the curve.
        """
        return np.asarray(self.likeliest.design(np.log(stress))[0] @ self.coefficient)


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
    ``e = a - k x - s r - c d (1 - exp(-r/d))``, x the natural logarithm of stress and r its distance beyond
    the meeting of the branches b, rounded over a width w: ``w ln(1 + exp((x - b)/w))`` or, with longer
    tails, ``((x - b) + sqrt((x - b)^2 + (2 w ln 2)^2))/2``. The last term lets the virgin branch flatten:
    c is zero with a probability of 1 - `FLATTENS`, else above it, expected within `FLATTENING` of the
    steepest slope read. For every b, w, d
    and rounding of a grid the other four follow by generalised least squares; each grid point counts by its
    likelihood with the scatter integrated out, and the errors are those within and between grid points. So
    a break point, or a shape, that the readings leave open shows in all errors.
    """
    n = stress.size
    if n < LEAST_INCREMENTS:
        return f"{n} increments of first loading; at least {LEAST_INCREMENTS} are needed to tell two branches"
    x, white = np.log(stress), whitener(reading_place(stress))
    bends = _tried(float(x[1]), float(x[-2]))
    steepest = float(np.max(-np.diff(void_ratio) / np.diff(x)))
    if steepest <= 0.0:
        return _STRAIGHT
    rows = white @ bends.design(x)
    known = np.zeros((rows.shape[0], 1, 4))  # what is expected of c counts as a reading of it
    known[:, :, 3] = scatter / (FLATTENING * steepest)
    factors, target = np.concatenate([rows, known], axis=1), np.append(white @ void_ratio, 0.0)
    coefficient, normal, left = _flattening_fits(factors, target)
    turn = bends.slopes(float(x[-1]))
    slopes = (turn @ coefficient[:, :, None])[:, :, 0]
    allowed = (slopes[:, 0] > 0.0) & (slopes[:, 1:] > slopes[:, :1]).all(axis=1)
    if not allowed.any():
        return _STRAIGHT
    best = int(np.where(allowed, left, np.inf).argmin())
    freedom = n - 4 + PRIOR_READINGS
    total = left + PRIOR_READINGS * scatter**2
    refused = _refusal(x, target[:-1], white, (float(total[best]) / freedom, float(left[best])))
    refused = refused or _at_an_end(float(bends.at[best]), float(x[1]), float(x[-2]))
    if refused:
        return refused
    weight = np.where(allowed, (total / total[best]) ** (-0.5 * (n + PRIOR_READINGS)), 0.0)
    weight *= np.where(bends.reach > _STRAIGHT_VIRGIN, FLATTENS / (_REACHES.size - 1), 1.0 - FLATTENS)
    weight *= np.sqrt(normal[:, 3, 3]) * known[:, 0, 3]  # of what was expected of c, the share that is left
    weight /= weight.sum()
    covariance = normal * (total / freedom)[:, None, None]
    within = ((turn @ covariance) * turn).sum(axis=2)
    found = [_averaged(weight, slopes[:, k], within[:, k], freedom) for k in range(4)]
    return TwoBranchFit(
        initial_slope=found[0],
        lam=found[1],
        first_lam=found[2],
        last_lam=found[3],
        ln_break=_averaged(weight, bends.at, np.zeros_like(bends.at), freedom),
        likeliest=bends.chosen(best),
        coefficient=coefficient[best],
    )


def _flattening_fits(factors: FloatArray, target: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return coefficients, covariance per variance and squares left, the last coefficient not below 0."""
    turned = factors.transpose(0, 2, 1)
    normal = np.linalg.inv(turned @ factors)
    coefficient = (normal @ (turned @ target)[:, :, None])[:, :, 0]
    # held at nothing where it came out below: the least squares under that condition
    excess = np.minimum(coefficient[:, 3], 0.0)
    along = normal[:, :, 3] / normal[:, 3, 3][:, None]
    held = (excess < 0.0)[:, None, None]
    coefficient = coefficient - excess[:, None] * along
    normal = normal - np.where(held, along[:, :, None] * normal[:, None, :, 3], 0.0)
    left = ((target - (factors @ coefficient[:, :, None])[:, :, 0]) ** 2).sum(axis=1)
    return np.asarray(coefficient), np.asarray(normal), np.asarray(left)


def _tried(low: float, high: float) -> Bends:
    grid = (np.linspace(low, high, _N_BREAK), _WIDTHS, _REACHES, np.array([0.0, 1.0]))
    at, width, reach, long = (one.ravel() for one in np.meshgrid(*grid, indexing="ij"))
    return Bends(at=at, width=width, reach=reach, long=long > 0.0)


def _refusal(x: FloatArray, target: FloatArray, white: FloatArray, bent: tuple[float, float]) -> str:
    """Say whether one straight line does as well as two, of which scatter and squares left are given."""
    variance, least = bent
    factors = white @ np.stack([np.ones_like(x), x], axis=1)
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


def _averaged(weight: FloatArray, value: FloatArray, within: FloatArray, freedom: float) -> Estimate:
    """Average over the grid; what differs between its points is part of the error."""
    mean = float(weight @ value)
    return Estimate(
        value=mean, standard_error=widened(float(np.sqrt(weight @ (within + (value - mean) ** 2))), freedom)
    )
