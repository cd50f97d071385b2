"""A smooth rising curve through stated percentiles, against the standard normal score.

The scenario needs its mean, the drawing of parameters its values, hence its place in this room.
"""

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from probsoil._typing import FloatArray

_REACH = 10.0  # of the moment sums in z; further by the pull of a logarithm
_NODES = 96  # of each Gauss-Legendre sum
_HALVINGS = 60


@dataclass(frozen=True, slots=True, eq=False)
class PercentileCurve:
    r"""Values that rise with the normal score and pass through stated percentiles.

    Attributes
    ----------
    z : ndarray, shape (n,), [-]
        Normal scores of the stated percentiles, rising.
    y : ndarray, shape (n,), [any]
        Stated values, or their natural logarithms.
    slope : ndarray, shape (n,), [any]
        Derivative of `y` with `z` there, above zero.
    low, high : float, [any]
        Ends of `y`; infinite where the tail is open.
    logarithmic : bool
        Whether `y` is a logarithm.

    Notes
    -----
    Between two stated percentiles the curve is the cubic with the slopes of Fritsch and Butland
    (1984), a weighted harmonic mean of the slopes of the two neighbouring chords, which never turns
    back. At the outermost ones the slope is that of the chord, so that two percentiles make the
    curve a straight line: a normal distribution, or a lognormal one. An open tail goes on along
    that chord, as the normal (or lognormal) law through the two outermost percentiles. A closed one
    bends towards its end as :math:`y = y_{low} + (y_1 - y_{low}) \exp[s_1 (z - z_1)/(y_1 - y_{low})]`,
    and likewise above: same value and slope where it begins, and the end is reached never.

    References
    ----------
    .. [1] F. N. Fritsch and J. Butland, A method for constructing local monotone piecewise cubic
       interpolants, SIAM J. Sci. Stat. Comput. 5(2), 1984 (recalled; not opened).
    """

    z: FloatArray
    y: FloatArray
    slope: FloatArray
    low: float
    high: float
    logarithmic: bool

    def quantile(self, z: FloatArray) -> FloatArray:
        """Return values at normal scores.

        Parameters
        ----------
        z : ndarray, shape (...,), [-]
            Normal scores.

        Returns
        -------
        value : ndarray, shape (...,), [any]
            Values; exactly the stated ones at the stated percentiles, save for the rounding of a
            logarithm.
        """
        z = np.asarray(z, dtype=np.float64)
        y = np.where(
            z < self.z[0], self._below(z), np.where(z < self.z[-1], self._between(z), self._above(z))
        )
        return np.exp(y) if self.logarithmic else y

    def score(self, value: float) -> float:
        """Return the normal score at which a value lies.

        Parameters
        ----------
        value : float, [any]
            Value.

        Returns
        -------
        z : float, [-]
            Score; infinite at and beyond a closed end.
        """
        if self.logarithmic and value <= 0.0:
            return -np.inf
        y = float(np.log(value)) if self.logarithmic else value
        if y < self.y[0]:
            return _tail_score(self.y[0] - y, self.y[0] - self.low, self.z[0], -self.slope[0])
        if y >= self.y[-1]:
            return _tail_score(y - self.y[-1], self.high - self.y[-1], self.z[-1], self.slope[-1])
        piece = int(np.searchsorted(self.y, y, side="right")) - 1
        before, after = float(self.z[piece]), float(self.z[piece + 1])
        for _ in range(_HALVINGS):
            middle = 0.5 * (before + after)
            before, after = (middle, after) if self._between(np.asarray(middle)) < y else (before, middle)
        return 0.5 * (before + after)

    def moments(self) -> tuple[float, float]:
        """Return mean and standard deviation.

        Returns
        -------
        mean : float, [any]
            Mean.
        sd : float, [any]
            Standard deviation.

        Notes
        -----
        Gauss-Legendre sums of 96 nodes from each stated percentile to the next and over either tail.
        """
        reach = _REACH + (2.0 * float(self.slope[[0, -1]].max()) if self.logarithmic else 0.0)
        ends = np.concatenate([[-reach], self.z, [reach]])
        node, weight = np.polynomial.legendre.leggauss(_NODES)
        half = 0.5 * np.diff(ends)[:, None]
        z = ends[:-1, None] + half * (1.0 + node)
        share = half * weight * np.exp(-0.5 * z**2) / np.sqrt(2.0 * np.pi)
        value = self.quantile(z)
        mean = float((share * value).sum())
        return mean, float(np.sqrt((share * (value - mean) ** 2).sum()))

    def _between(self, z: FloatArray) -> FloatArray:
        piece = np.clip(np.searchsorted(self.z, z, side="right") - 1, 0, self.z.size - 2)
        step = self.z[piece + 1] - self.z[piece]
        t = np.clip((z - self.z[piece]) / step, 0.0, 1.0)
        start, rise = self.y[piece], self.y[piece + 1] - self.y[piece]
        first, last = self.slope[piece] * step, self.slope[piece + 1] * step
        y: FloatArray = start + t * (
            first + t * (3.0 * rise - 2.0 * first - last + t * (first + last - 2.0 * rise))
        )
        return y

    def _below(self, z: FloatArray) -> FloatArray:
        run = self.slope[0] * np.minimum(z - self.z[0], 0.0)
        if not np.isfinite(self.low):
            return np.asarray(self.y[0] + run)
        gap = self.y[0] - self.low
        return np.asarray(self.low + gap * np.exp(run / gap))

    def _above(self, z: FloatArray) -> FloatArray:
        run = self.slope[-1] * np.maximum(z - self.z[-1], 0.0)
        if not np.isfinite(self.high):
            return np.asarray(self.y[-1] + run)
        gap = self.high - self.y[-1]
        # written from the stated value, which it gives exactly where the tail begins
        return np.asarray(self.y[-1] - gap * np.expm1(-run / gap))


def _tail_score(beyond: float, gap: float, start: float, slope: float) -> float:
    """Return the score of a value so far beyond the outermost percentile, with its end a gap away."""
    if not np.isfinite(gap):
        return float(start + beyond / slope)
    return (
        float(start - gap / slope * np.log1p(-beyond / gap))
        if beyond < gap
        else float(np.sign(slope) * np.inf)
    )


@lru_cache(maxsize=256)
def percentile_curve(
    percent: tuple[float, ...],
    values: tuple[float, ...],
    low: float | None,
    high: float | None,
    *,
    logarithmic: bool,
) -> PercentileCurve:
    """Return the curve through stated percentiles.

    Parameters
    ----------
    percent : tuple of float, [%]
        Percentages, rising, above 0 and below 100; at least two.
    values : tuple of float, [any]
        Value of each, rising.
    low, high : float or None, [any]
        Ends of the range; None where the tail is open.
    logarithmic : bool
        Whether the logarithm is fitted instead of the value; values and ends are then above zero.

    Returns
    -------
    curve : PercentileCurve
        Curve.
    """
    from scipy.special import ndtri  # deferred: most scenarios never need it

    bend: Callable[[FloatArray], FloatArray] = np.log if logarithmic else np.asarray
    z, y = ndtri(np.asarray(percent) / 100.0), bend(np.asarray(values))
    ends = [
        open_end if end is None else float(bend(np.asarray(end)))
        for end, open_end in ((low, -np.inf), (high, np.inf))
    ]
    return PercentileCurve(z, y, _slopes(z, y), ends[0], ends[1], logarithmic)


def _slopes(z: FloatArray, y: FloatArray) -> FloatArray:
    step = np.diff(z)
    chord = np.diff(y) / step
    before = 2.0 * step[1:] + step[:-1]
    after = step[1:] + 2.0 * step[:-1]
    inner = (before + after) / (before / chord[:-1] + after / chord[1:])
    return np.concatenate([chord[:1], inner, chord[-1:]])
