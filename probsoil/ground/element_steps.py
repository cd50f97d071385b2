"""One run of an element test in one direction: elastic within the ellipse, then flow along it."""

from abc import abstractmethod
from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.cam_clay import CamClay, ClayState, ellipse_excess
from probsoil.ground.cam_clay_flow import passage
from probsoil.ground.element_flows import (
    DrainedFlow,
    Flow,
    OneDimensionalFlow,
    UndrainedFlow,
    parting_stress_ratio,
    stress_ratio_at_rest,
    swelling_stress_ratio,
)

_ON_ELLIPSE = 1e-9


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Travelled:
    """What one run of a test gives.

    Attributes
    ----------
    mean_stress, deviator : ndarray, shape (n, k), [kPa]
        p' and q at each point; not a number where the clay has no answer.
    yield_size : ndarray, shape (n, k), [kPa]
        p'c at each point.
    void_ratio : ndarray, shape (n, k), [-]
        e at each point.
    dry : ndarray, shape (n,), [-]
        Whether yielding was reached and began dry of critical.
    jumps : ndarray, shape (n,), [-]
        Whether softening outran what drives the test, so that the element jumped at an unchanged strain
        (triaxial) or stress (oedometer).
    """

    mean_stress: FloatArray
    deviator: FloatArray
    yield_size: FloatArray
    void_ratio: FloatArray
    dry: BoolArray
    jumps: BoolArray

    def last_state(self) -> ClayState:
        """State at the last target.

        Returns
        -------
        state : ClayState
            Where the next run begins.
        """
        return ClayState(
            mean_stress=self.mean_stress[:, -1],
            deviator=self.deviator[:, -1],
            void_ratio=self.void_ratio[:, -1],
            yield_size=self.yield_size[:, -1],
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Step:
    """A run of a test from a state, in one direction per realisation.

    Attributes
    ----------
    clay : CamClay
        The clay.
    state : ClayState
        Where the run begins.
    direction : ndarray, shape (n,), [-]
        1 where the axial strain grows, -1 where it falls.
    """

    clay: CamClay
    state: ClayState
    direction: FloatArray

    def travelled(self, target: FloatArray, n_panel: int) -> Travelled:
        """Take the element to each target.

        Parameters
        ----------
        target : ndarray, shape (n, k), [-]
            Amounts of what drives the run, from its beginning, none negative.
        n_panel : int, [-]
            Panels of the integration.

        Returns
        -------
        travelled : Travelled
            At each target.
        """
        with np.errstate(all="ignore"):  # realisations without an answer carry not-a-number along
            stress, deviator = self._yield_point()
            past = target - self._driven_to(stress, deviator)[:, None]
            mean, shear = self._elastic(target)
            if not (past > 0.0).any():
                return self._within(mean, shear)
            flow = self._flow(stress, deviator)
            table = passage(flow, n_panel)
            running, ratio = table.reached(np.maximum(past, 0.0))
            yields = past > 0.0
            mean = np.where(yields, flow.mean_stress_at(running, ratio), mean)
            size = np.where(yields, mean * self.clay.ellipse_ratio(ratio), self.state.yield_size[:, None])
            return Travelled(
                mean_stress=mean,
                deviator=np.where(yields, ratio * mean, shear),
                yield_size=size,
                void_ratio=self._void_ratio(mean, size),
                dry=(np.abs(flow.start) > self.clay.slope(flow.start)) & yields.any(axis=1),
                jumps=table.falls_back(past),
            )

    def _within(self, mean: FloatArray, shear: FloatArray) -> Travelled:
        """Answer of a run in which no realisation yields."""
        size = self.state.yield_size[:, None] + 0.0 * mean
        never = np.zeros(self.clay.n_sample, dtype=bool)
        return Travelled(
            mean_stress=mean,
            deviator=shear,
            yield_size=size,
            void_ratio=self._void_ratio(mean, size),
            dry=never,
            jumps=never,
        )

    def _void_ratio(self, mean: FloatArray, size: FloatArray) -> FloatArray:
        """Void ratio on its elastic line, which moves with the size of the ellipse: exact."""
        lam, kap = self.clay.lam[:, None], self.clay.kap[:, None]
        elastic = kap * np.log(mean / self.state.mean_stress[:, None])
        plastic = (lam - kap) * np.log(size / self.state.yield_size[:, None])
        return np.asarray(self.state.void_ratio[:, None] - elastic - plastic)

    def _met(self, slope: float | FloatArray) -> tuple[FloatArray, FloatArray]:
        """Where a straight elastic path of a slope in q over p' leaves the ellipse."""
        state, onward = self.state, self.direction > 0.0
        axis = state.mean_stress - state.deviator / slope  # p' where the path meets q = 0
        inside = np.where(onward, axis < state.yield_size, axis <= 0.0)
        m = np.where(inside, self.clay.m, np.asarray(self.clay.m_extension))
        square, size = m * m, state.yield_size
        double = slope**2 + square
        half = slope**2 * axis + 0.5 * square * size
        product = slope**2 * axis * axis
        upper = (half + np.sqrt(np.maximum(half * half - double * product, 0.0))) / double
        met = np.where(onward, upper, product / (double * upper))
        outward = self.direction * self._leaving(slope) > 0.0
        met = np.where(self._on_ellipse() & outward, state.mean_stress, met)
        return met, state.deviator + slope * (met - state.mean_stress)

    def _leaving(self, slope: float | FloatArray) -> FloatArray:
        """Slope of the ellipse's equation along a path, positive outward."""
        state = self.state
        square = self.clay.slope(state.deviator) ** 2
        return np.asarray(2.0 * state.mean_stress - state.yield_size + 2.0 * slope * state.deviator / square)

    def _on_ellipse(self) -> BoolArray:
        return np.asarray(ellipse_excess(self.clay, self.state) > -_ON_ELLIPSE)

    def _start(self, stress: FloatArray, deviator: FloatArray, end: FloatArray) -> dict[str, FloatArray]:
        volume = 1.0 + self.state.void_ratio - self.clay.kap * np.log(stress / self.state.mean_stress)
        return {"mean_stress": stress, "start": deviator / stress, "end": end, "volume": volume}

    def _critical(self) -> FloatArray:
        return np.where(self.direction > 0.0, self.clay.m, -np.asarray(self.clay.m_extension))

    @abstractmethod
    def _yield_point(self) -> tuple[FloatArray, FloatArray]:
        """Mean stress and deviator where the elastic path leaves the ellipse."""

    @abstractmethod
    def _driven_to(self, stress: FloatArray, deviator: FloatArray) -> FloatArray:
        """Amount of what drives the run up to there."""

    @abstractmethod
    def _elastic(self, target: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Mean stress and deviator within the ellipse at each target."""

    @abstractmethod
    def _flow(self, stress: FloatArray, deviator: FloatArray) -> Flow:
        """Flow that follows."""


class UndrainedStep(Step):
    """Shear at constant volume, driven by the logarithmic axial strain."""

    __slots__ = ()

    def _yield_point(self) -> tuple[FloatArray, FloatArray]:
        state = self.state
        m = np.where(self.direction > 0.0, self.clay.m, np.asarray(self.clay.m_extension))
        reach = m * np.sqrt(np.maximum(state.mean_stress * (state.yield_size - state.mean_stress), 0.0))
        return state.mean_stress, self.direction * np.maximum(reach, self.direction * state.deviator)

    def _modulus(self) -> FloatArray:
        """Three times the shear modulus: growth of q with axial strain at constant volume [kPa]."""
        state, clay = self.state, self.clay
        return np.asarray(3.0 * clay.shear_to_bulk * (1.0 + state.void_ratio) * state.mean_stress / clay.kap)

    def _driven_to(self, stress: FloatArray, deviator: FloatArray) -> FloatArray:
        del stress
        return np.asarray(self.direction * (deviator - self.state.deviator) / self._modulus())

    def _elastic(self, target: FloatArray) -> tuple[FloatArray, FloatArray]:
        growth = (self.direction * self._modulus())[:, None] * target
        return self.state.mean_stress[:, None] + 0.0 * target, self.state.deviator[:, None] + growth

    def _flow(self, stress: FloatArray, deviator: FloatArray) -> UndrainedFlow:
        start = self._start(stress, deviator, self._critical())
        return UndrainedFlow(clay=self.clay, direction=self.direction, **start)


class DrainedStep(Step):
    """Shear at constant radial effective stress, driven by the logarithmic axial strain."""

    __slots__ = ()

    def _yield_point(self) -> tuple[FloatArray, FloatArray]:
        return self._met(3.0)

    def _share(self) -> FloatArray:
        """Axial over volumetric strain within the ellipse [-]: q rises by three times p'."""
        return np.asarray(1.0 / 3.0 + 1.0 / self.clay.shear_to_bulk)

    def _driven_to(self, stress: FloatArray, deviator: FloatArray) -> FloatArray:
        del deviator
        before = 1.0 + self.state.void_ratio
        after = before - self.clay.kap * np.log(stress / self.state.mean_stress)
        return np.asarray(self.direction * self._share() * np.log(before / after))

    def _elastic(self, target: FloatArray) -> tuple[FloatArray, FloatArray]:
        state, before = self.state, (1.0 + self.state.void_ratio)[:, None]
        after = before * np.exp(-self.direction[:, None] * target / self._share()[:, None])
        stress = state.mean_stress[:, None] * np.exp((before - after) / self.clay.kap[:, None])
        return stress, state.deviator[:, None] + 3.0 * (stress - state.mean_stress[:, None])

    def _flow(self, stress: FloatArray, deviator: FloatArray) -> DrainedFlow:
        start = self._start(stress, deviator, self._critical())
        return DrainedFlow(clay=self.clay, direction=self.direction, **start)


class OneDimensionalStep(Step):
    """Compression or swelling without radial strain, driven by the logarithm of the axial stress."""

    __slots__ = ()

    def to_stress(self, axial_stress: FloatArray, n_panel: int) -> Travelled:
        """Take the element to axial stresses.

        Parameters
        ----------
        axial_stress : ndarray, shape (n, k), [kPa]
            Targets, none behind the direction of the run.
        n_panel : int, [-]
            Panels of the integration.

        Returns
        -------
        travelled : Travelled
            At each target.
        """
        driven = self.direction[:, None] * np.log(axial_stress / self.state.axial_stress[:, None])
        return self.travelled(driven, n_panel)

    def _slope(self) -> FloatArray:
        """Deviator over mean stress of the elastic path [-], from no radial strain."""
        return 2.0 * self.clay.shear_to_bulk

    def _yield_point(self) -> tuple[FloatArray, FloatArray]:
        return self._met(self._slope())

    def _driven_to(self, stress: FloatArray, deviator: FloatArray) -> FloatArray:
        axial = stress + deviator / 1.5
        return np.asarray(self.direction * np.log(axial / self.state.axial_stress))

    def _elastic(self, target: FloatArray) -> tuple[FloatArray, FloatArray]:
        state, slope = self.state, self._slope()[:, None]
        axial = state.axial_stress[:, None]
        change = axial * np.expm1(self.direction[:, None] * target) / (1.0 + slope / 1.5)
        return state.mean_stress[:, None] + change, state.deviator[:, None] + slope * change

    def _flow(self, stress: FloatArray, deviator: FloatArray) -> OneDimensionalFlow:
        ratio = deviator / stress
        swelling, upper = swelling_stress_ratio(self.clay), parting_stress_ratio(self.clay)
        rest = stress_ratio_at_rest(self.clay)
        loads = np.where((ratio > swelling) & (ratio < upper), rest, np.nan)
        end = np.where(self.direction > 0.0, loads, np.where(ratio < rest, swelling, upper))
        return OneDimensionalFlow(
            clay=self.clay, direction=self.direction, **self._start(stress, deviator, end)
        )
