"""The test paths of an element on its yield ellipse: undrained, drained and one-dimensional.

Derivations are on the theory page, docs/theory/cam_clay_element.md.
"""

from dataclasses import dataclass
from typing import Protocol

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.cam_clay import CamClay

_BISECTIONS = 64
# a stress ratio of 3 leaves no radial stress, one of -1.5 no axial stress
NO_RADIAL, NO_AXIAL = 3.0, -1.5


class Flow(Protocol):
    """A test path on the yield ellipse, one per realisation.

    Attributes
    ----------
    start, end : ndarray, shape (n,), [-]
        Stress ratio where yielding starts, and that to which it tends.
    """

    @property
    def start(self) -> FloatArray:
        """Stress ratio where yielding starts [-], shape (n,)."""

    @property
    def end(self) -> FloatArray:
        """Stress ratio to which it tends [-], shape (n,)."""

    def rate(self, ratio: FloatArray, left: FloatArray) -> FloatArray:
        """Rate of the running quantity.

        Parameters
        ----------
        ratio : ndarray, shape (n, k), [-]
            Stress ratio.
        left : ndarray, shape (n, k), [-]
            End less stress ratio, without loss of digits.

        Returns
        -------
        rate : ndarray, shape (n, k), [-]
            Growth per unit of w of the running quantity: of axial strain, or of ln p'.
        """

    def driven(self, running: FloatArray, ratio: FloatArray) -> FloatArray:
        """Amount of what the test drives.

        Parameters
        ----------
        running : ndarray, shape (n, k), [-]
            Running quantity.
        ratio : ndarray, shape (n, k), [-]
            Stress ratio.

        Returns
        -------
        driven : ndarray, shape (n, k), [-]
            Since yielding started; rises as long as the clay can follow.
        """

    def driven_rate(self, rate: FloatArray, ratio: FloatArray, left: FloatArray) -> FloatArray:
        """Growth per unit of w of what the test drives.

        Parameters
        ----------
        rate, ratio, left : ndarray, shape (n, k), [-]
            As for `rate`, and its answer.

        Returns
        -------
        rate : ndarray, shape (n, k), [-]
            Growth.
        """

    def mean_stress_at(self, running: FloatArray, ratio: FloatArray) -> FloatArray:
        """Mean effective stress.

        Parameters
        ----------
        running : ndarray, shape (n, k), [-]
            Running quantity.
        ratio : ndarray, shape (n, k), [-]
            Stress ratio.

        Returns
        -------
        stress : ndarray, shape (n, k), [kPa]
            p'.
        """


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class AtYield:
    """What every flow starts from.

    Attributes
    ----------
    clay : CamClay
        The clay.
    mean_stress : ndarray, shape (n,), [kPa]
        Where yielding starts.
    start, end : ndarray, shape (n,), [-]
        Stress ratio there, and that to which it tends.
    volume : ndarray, shape (n,), [-]
        1 + e where yielding starts.
    direction : ndarray, shape (n,), [-]
        1 where the axial strain grows, -1 where it falls.
    """

    clay: CamClay
    mean_stress: FloatArray
    start: FloatArray
    end: FloatArray
    volume: FloatArray
    direction: FloatArray

    def pole(self, ratio: FloatArray, left: FloatArray) -> FloatArray:
        r"""Way left over :math:`M^2 - \eta^2`, exact where the way ends at the critical state.

        Parameters
        ----------
        ratio, left : ndarray, shape (n, k), [-]
            Stress ratio, and end less stress ratio.

        Returns
        -------
        pole : ndarray, shape (n, k), [-]
            The quotient.
        """
        slope, sign = self.clay.slope(ratio), np.sign(self.end)[:, None]
        with np.errstate(divide="ignore", invalid="ignore"):
            plain = left / (slope * slope - ratio * ratio)
        return np.where(ratio * sign >= 0.0, sign / (slope + sign * ratio), plain)


class _Strained(AtYield):
    """Paths that the axial strain drives."""

    __slots__ = ()

    def driven(self, running: FloatArray, ratio: FloatArray) -> FloatArray:
        """See `Flow.driven`."""
        return np.asarray(self.direction[:, None] * running + 0.0 * ratio)

    def driven_rate(self, rate: FloatArray, ratio: FloatArray, left: FloatArray) -> FloatArray:
        """See `Flow.driven_rate`."""
        return np.asarray(self.direction[:, None] * rate + 0.0 * (ratio + left))


class UndrainedFlow(_Strained):
    """Yielding at constant volume; the running quantity is the axial strain."""

    __slots__ = ()

    def rate(self, ratio: FloatArray, left: FloatArray) -> FloatArray:
        """See `Flow.rate`."""
        lam, kap, stiffness, volume = _columns(self)
        square, share = self.clay.slope(ratio) ** 2, 1.0 - kap / lam
        plastic = share * 4.0 * ratio**2 / (square + ratio**2) * self.pole(ratio, left)
        elastic = (1.0 - share * 2.0 * ratio**2 / (square + ratio**2)) * left / (3.0 * stiffness)
        return np.asarray(kap / volume * (plastic + elastic))

    def mean_stress_at(self, running: FloatArray, ratio: FloatArray) -> FloatArray:
        """See `Flow.mean_stress_at`."""
        # at constant volume p' times the ellipse ratio to the power Lambda stays
        lam, kap, _, _ = _columns(self)
        size = self.clay.ellipse_ratio(self.start)[:, None] / self.clay.ellipse_ratio(ratio)
        return np.asarray(self.mean_stress[:, None] * size ** (1.0 - kap / lam) + 0.0 * running)


class DrainedFlow(_Strained):
    """Yielding at constant radial stress; the running quantity is the axial strain."""

    __slots__ = ()

    def rate(self, ratio: FloatArray, left: FloatArray) -> FloatArray:
        """See `Flow.rate`."""
        lam, kap, stiffness, _ = _columns(self)
        growth = 1.0 / (NO_RADIAL - ratio)  # of ln p' with the stress ratio
        bend = 2.0 * ratio / (self.clay.slope(ratio) ** 2 + ratio**2)
        volumetric = (lam * growth + (lam - kap) * bend) * left
        shear = (lam - kap) * (growth + bend) * 2.0 * ratio * self.pole(ratio, left)
        shear = shear + kap / stiffness * growth * left
        return np.asarray((volumetric / 3.0 + shear) / self._volume(ratio))

    def mean_stress_at(self, running: FloatArray, ratio: FloatArray) -> FloatArray:
        """See `Flow.mean_stress_at`."""
        radial = self.mean_stress * (NO_RADIAL - self.start)
        return np.asarray(radial[:, None] / (NO_RADIAL - ratio) + 0.0 * running)

    def _volume(self, ratio: FloatArray) -> FloatArray:
        lam, kap, _, volume = _columns(self)
        stress = np.log((NO_RADIAL - self.start)[:, None] / (NO_RADIAL - ratio))
        size = np.log(self.clay.ellipse_ratio(ratio) / self.clay.ellipse_ratio(self.start)[:, None])
        return np.asarray(volume - lam * stress - (lam - kap) * size)


class OneDimensionalFlow(AtYield):
    """Yielding without radial strain; the running quantity is ln p', driven by ln of the axial stress."""

    __slots__ = ()

    def rate(self, ratio: FloatArray, left: FloatArray) -> FloatArray:
        """See `Flow.rate`."""
        lam, kap, stiffness, _ = _columns(self)
        square = self.clay.slope(ratio) ** 2
        gap, bend = square - ratio**2, 2.0 * ratio / (square + ratio**2)
        above = (lam - kap) * bend * (3.0 * ratio - gap) + kap / (2.0 * stiffness) * gap
        near = above / self._quotient(left)
        across = ratio * self.end[:, None] < 0.0
        if not across.any():
            return np.asarray(near)
        # before q changes its sign M is another, and the polynomial too
        return np.where(across, above * left / rest_polynomial(self.clay, np.sqrt(square), ratio), near)

    def driven(self, running: FloatArray, ratio: FloatArray) -> FloatArray:
        """See `Flow.driven`."""
        axial = np.log((1.0 + ratio / 1.5) / (1.0 + self.start / 1.5)[:, None])
        return np.asarray(self.direction[:, None] * (running + axial))

    def driven_rate(self, rate: FloatArray, ratio: FloatArray, left: FloatArray) -> FloatArray:
        """See `Flow.driven_rate`."""
        return np.asarray(self.direction[:, None] * (rate + left / (1.5 + ratio)))

    def mean_stress_at(self, running: FloatArray, ratio: FloatArray) -> FloatArray:
        """See `Flow.mean_stress_at`."""
        return np.asarray(self.mean_stress[:, None] * np.exp(running + 0.0 * ratio))

    def _quotient(self, left: FloatArray) -> FloatArray:
        """Polynomial over the way left, expanded about the end: zero there unless the range ends."""
        clay, end, slope = self.clay, self.end, self.clay.slope(self.end)
        side = 0.5 * clay.kap / clay.shear_to_bulk
        first = -2.0 * clay.lam * end - 3.0 * (clay.lam - clay.kap) - side * (slope * slope - 3.0 * end * end)
        half_second, sixth_third = 3.0 * side * end - clay.lam, side
        behind = -left
        series = first[:, None] + behind * (half_second[:, None] + behind * sixth_third[:, None])
        cut = ~((end > NO_AXIAL) & (end < NO_RADIAL))
        if not cut.any():
            return np.asarray(-series)
        value = np.where(cut, rest_polynomial(clay, slope, end), 0.0)[:, None]
        return np.where(cut[:, None], value / left, 0.0) - series


def rest_polynomial(clay: CamClay, slope: FloatArray, ratio: FloatArray) -> FloatArray:
    r"""Return the polynomial whose roots are the stress ratios that one-dimensional yielding keeps.

    Parameters
    ----------
    clay : CamClay
        The clay.
    slope : ndarray, shape (n,) or (n, k), [-]
        M on the side of the stress ratio.
    ratio : ndarray, shape of `slope`, [-]
        Stress ratio :math:`\eta`.

    Returns
    -------
    value : ndarray, shape of `slope`, [-]
        The polynomial.

    Notes
    -----
    :math:`\lambda(M^2-\eta^2) - 3(\lambda-\kappa)\eta - \kappa\eta(M^2-\eta^2)(1+\nu)/(3(1-2\nu))`.
    """
    lam, kap, side = clay.lam, clay.kap, 0.5 * clay.kap / clay.shear_to_bulk
    if ratio.ndim > 1:
        lam, kap, side = lam[:, None], kap[:, None], side[:, None]
    gap = slope * slope - ratio * ratio
    return np.asarray(lam * gap - 3.0 * (lam - kap) * ratio - side * ratio * gap)


def stress_ratio_at_rest(clay: CamClay) -> FloatArray:
    """Return the stress ratio to which one-dimensional loading tends.

    Parameters
    ----------
    clay : CamClay
        The clay.

    Returns
    -------
    ratio : ndarray, shape (n,), [-]
        q/p' on the virgin line, between 0 and M.
    """
    return _root(clay, clay.m, (np.zeros(clay.n_sample), clay.m))


def swelling_stress_ratio(clay: CamClay) -> FloatArray:
    """Return the stress ratio to which one-dimensional unloading tends in extension.

    Parameters
    ----------
    clay : CamClay
        The clay.

    Returns
    -------
    ratio : ndarray, shape (n,), [-]
        q/p', at least -1.5, where no axial stress is left.
    """
    extension = np.asarray(clay.m_extension)
    return _root(clay, extension, (-extension, np.full(clay.n_sample, NO_AXIAL)))


def parting_stress_ratio(clay: CamClay) -> FloatArray:
    """Return the stress ratio above M that parts yielding states which loading leads to rest from others.

    Parameters
    ----------
    clay : CamClay
        The clay.

    Returns
    -------
    ratio : ndarray, shape (n,), [-]
        q/p', at most 3, where no radial stress is left.
    """
    return _root(clay, clay.m, (clay.m, np.full(clay.n_sample, NO_RADIAL)))


def _root(clay: CamClay, slope: FloatArray, bracket: tuple[FloatArray, FloatArray]) -> FloatArray:
    """Root within the bracket by bisection, or its far end where there is none."""
    near, far = bracket
    positive = rest_polynomial(clay, slope, near) > 0.0
    alike = (rest_polynomial(clay, slope, far) > 0.0) == positive
    end = far
    for _ in range(_BISECTIONS):
        middle = 0.5 * (near + far)
        same = (rest_polynomial(clay, slope, middle) > 0.0) == positive
        near, far = np.where(same, middle, near), np.where(same, far, middle)
    return np.where(alike, end, 0.5 * (near + far))


def _columns(flow: AtYield) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    clay = flow.clay
    return clay.lam[:, None], clay.kap[:, None], clay.shear_to_bulk[:, None], flow.volume[:, None]
