"""Finite-strain consolidation of clay in one dimension, for many realisations at once."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.errors import ParameterError, ShapeError
from probsoil.ground._checks import checked
from probsoil.ground._consolidation_arrays import Faces, Loading, Schedule, Soil
from probsoil.ground._consolidation_kernel import GAMMA, consolidate_lanes
from probsoil.ground.cells import Cells
from probsoil.ground.conductivity import Conductivity, RadialDrainage
from probsoil.ground.constants import WATER_UNIT_WEIGHT
from probsoil.ground.lanes import LANES, Lanes
from probsoil.ground.top_up import LevelHeld


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class ClayState:
    """State of the cells before loading and the soil's constants.

    Attributes
    ----------
    thickness : ndarray, shape (n_sample, n_cell), [m]
        Thickness of each cell before loading.
    stress, yield_stress : ndarray, shape (n_sample, n_cell), [kPa]
        Effective vertical stress in situ and preconsolidation stress, ``yield_stress >= stress``.
    void_ratio : ndarray, shape (n_sample, n_cell), [-]
        Initial void ratio e0.
    lam, kap : ndarray, shape (n_sample, n_cell), [-]
        Lambda and kappa, slopes against the natural logarithm of stress, ``lam >= kap > 0``.
    """

    thickness: FloatArray
    stress: FloatArray
    yield_stress: FloatArray
    void_ratio: FloatArray
    lam: FloatArray
    kap: FloatArray


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Submergence:
    """What takes weight off again as the ground sinks below a water table that keeps its level.

    Attributes
    ----------
    spread : ndarray, shape (n_sample, n_cell), [-]
        Share of a change of weight at the surface that reaches the cell.
    height : ndarray, shape (n_knot, n_sample), [m]
        Height of fill at each knot of the load.
    water_depth : ndarray, shape (n_sample,), [m]
        Depth of the water table.
    """

    spread: FloatArray
    height: FloatArray
    water_depth: FloatArray


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class LoadHistory:
    """Vertical stress that the works add, piecewise linear in time.

    Attributes
    ----------
    time : ndarray, shape (n_knot,), [years]
        Rising; the first is the start of the computation.
    stress : ndarray, shape (n_knot, n_sample, n_cell), [kPa]
        Added total vertical stress at each knot.
    submergence : Submergence or None
        Loss of weight below the water table; None for none.
    level_held : LevelHeld or None
        Fill added as the ground settles, besides `stress`; None for none.
    """

    time: FloatArray
    stress: FloatArray
    submergence: Submergence | None = None
    level_held: LevelHeld | None = None


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class ConsolidationResult:
    """Answer of the clay through time.

    Attributes
    ----------
    by_segment : ndarray, shape (n_sample, n_segment, n_time), [m]
        Settlement of every drainage segment since the start; the first time is the start. Not a
        number where the computation failed.
    stress, yield_stress : ndarray, shape (n_sample, n_record, n_cell), [kPa]
        Effective vertical and preconsolidation stress at the recorded times; those in situ where
        the computation failed.
    converged : ndarray of bool, shape (n_sample,), [-]
        Whether every step was solved to tolerance with open voids, and no fill was to be added without end.
    voids_closed : ndarray of bool, shape (n_sample,), [-]
        Whether the void ratio fell below 0.05 somewhere: the compression line does not reach that
        far, so initial stress, void ratio and lambda do not belong together.
    """

    by_segment: FloatArray
    stress: FloatArray
    yield_stress: FloatArray
    converged: BoolArray
    voids_closed: BoolArray

    @property
    def settlement(self) -> FloatArray:
        """Settlement of the clay since the start, shape (n_sample, n_time), [m]."""
        return np.asarray(self.by_segment.sum(axis=1))


def consolidate(
    state: ClayState,
    conductivity: Conductivity,
    cells: Cells,
    load: LoadHistory,
    *,
    times: FloatArray,
    record: FloatArray,
) -> ConsolidationResult:
    r"""Return settlement and stress of the clay under a load history.

    Parameters
    ----------
    state : ClayState
        Cells before loading, arrays (n_sample, n_cell).
    conductivity : Conductivity
        Law of flow.
    cells : Cells
        Which cells join and which touch a drained face.
    load : LoadHistory
        Added stress through time.
    times : ndarray, shape (n_time,), [years]
        Ends of the time steps, rising, starting with ``load.time[0]``; no load knot may fall
        inside a step.
    record : ndarray, shape (n_record,), [years]
        Times, all among `times` after the first, at which stresses are kept.

    Returns
    -------
    result : ConsolidationResult
        Settlement at every time, stresses at the recorded ones.

    Raises
    ------
    ShapeError
        If an array does not match the others.
    ParameterError
        If times do not rise, a load knot lies inside a step, a recorded time is not a step end, or a
        stress, thickness or slope is out of range.

    Notes
    -----
    With the material coordinate a (depth before loading) and excess pore pressure u,

    .. math:: \frac{1}{1 + e_0}\frac{\partial e}{\partial t} = \frac{\partial}{\partial a}
        \left[\frac{k}{\gamma_w}\frac{1 + e_0}{1 + e}\frac{\partial u}{\partial a}\right]
        - \frac{k_h}{\gamma_w}\frac{1 + e}{1 + e_0}\frac{8 u}{\mu D_e^2},
        \qquad \sigma' = \sigma'_0 + \Delta\sigma - u

    as in Gibson, England and Hussey (1967) without self-weight terms (the stress in situ is the
    starting point). Cells conserve water exactly; conductances are harmonic means between cells
    and use the mean logarithm of the half cell at a drained face; time follows the two-stage,
    L-stable, second-order method of Alexander (1977); each stage is solved by Newton's method on
    the effective stress with the slope of the branch in force and conductances renewed, but not
    differentiated, at every iteration. Preconsolidation stress follows at the end of each step,
    never beyond the greatest total stress. Void ratio and conductivity are on the compression curve
    of `compression.void_ratio_lost`. The last term is radial flow to vertical drains with equal vertical
    strain (`vertical_drains`). No creep.

    References
    ----------
    .. [1] R. E. Gibson, G. L. England and M. J. L. Hussey, The theory of one-dimensional
       consolidation of saturated clays, Geotechnique 17(3), 1967 (from memory, not opened).
    .. [2] R. Alexander, Diagonally implicit Runge-Kutta methods for stiff O.D.E.'s, SIAM J. Numer.
       Anal. 14(6), 1977 (from memory, not opened).
    """
    n_sample = _check(state, cells, load, times)
    knot, weight = _placed(load.time, times)
    slot = _slots(times, record)
    lanes = Lanes(n_sample)
    settlement = np.zeros((lanes.n_block, cells.n_segment, times.size - 1, LANES))
    recorded = np.zeros((lanes.n_block, record.size, 2, cells.n_cell, LANES))
    failed = np.zeros((lanes.n_block, 2, LANES), dtype=np.int64)
    consolidate_lanes(
        _soil(lanes, state, conductivity),
        Faces(
            follows=conductivity.follows.astype(np.float64),
            power=conductivity.power.astype(np.int64),
            joined=cells.joined,
            drained=cells.drained,
            segment=cells.segment,
        ),
        _loading(lanes, load),
        Schedule(
            step=np.diff(times),
            knot=knot,
            weight=weight,
            record=slot,
            drains=_working(times, conductivity.drains),
            held=_holding(times, load.level_held),
        ),
        settlement,
        recorded,
        failed,
    )
    through_time = lanes.unpack(settlement)
    kept = lanes.unpack(recorded)
    unsolved, closed = lanes.unpack(failed).T > 0
    good = ~unsolved & ~closed & np.isfinite(through_time).all(axis=(1, 2))
    good &= True if load.level_held is None else load.level_held.possible
    through_time[~good] = np.nan
    kept[~good, :, 0] = state.stress[~good, None]
    kept[~good, :, 1] = state.yield_stress[~good, None]
    return ConsolidationResult(
        by_segment=np.concatenate([np.zeros((n_sample, cells.n_segment, 1)), through_time], axis=2),
        stress=kept[:, :, 0],
        yield_stress=kept[:, :, 1],
        converged=good,
        voids_closed=closed,
    )


def _working(times: FloatArray, drains: RadialDrainage | None) -> BoolArray:
    """Return for every step whether the drains work."""
    if drains is None:
        return np.zeros(times.size - 1, dtype=np.bool_)
    return np.asarray(times[1:] > drains.start)


def _holding(times: FloatArray, held: LevelHeld | None) -> BoolArray:
    """Return for every step whether the level of the fill is held."""
    return np.asarray(times[1:] <= (-np.inf if held is None else held.until))


def _loading(lanes: Lanes, load: LoadHistory) -> Loading:
    wet, held = load.submergence, load.level_held
    nothing = np.zeros((lanes.n_block, LANES))

    def per_lane(value: FloatArray) -> FloatArray:
        return lanes.pack(value[:, None])[:, 0, :]

    dry = np.zeros((lanes.n_block, load.stress.shape[2], LANES))
    return Loading(
        stress=np.stack([lanes.pack(one) for one in load.stress], axis=1),
        spread=dry if wet is None else lanes.pack(wet.spread),
        fill_spread=dry if held is None else lanes.pack(held.spread),
        height=np.zeros((lanes.n_block, load.time.size, LANES)) if wet is None else lanes.pack(wet.height.T),
        water_depth=nothing if wet is None else per_lane(wet.water_depth),
        water_weight=0.0 if wet is None else WATER_UNIT_WEIGHT,
        fill_weight=nothing if held is None else per_lane(held.unit_weight),
        granular=np.zeros((lanes.n_block, load.time.size, LANES))
        if held is None
        else np.stack([per_lane(one) for one in held.granular], axis=1),
        gain=nothing if held is None else per_lane(held.gain),
    )


def _soil(lanes: Lanes, state: ClayState, conductivity: Conductivity) -> Soil:
    drains = conductivity.drains
    rate = np.zeros_like(state.thickness) if drains is None else drains.rate
    return Soil(
        thickness=lanes.pack(state.thickness),
        stress=lanes.pack(state.stress),
        yield_stress=lanes.pack(state.yield_stress),
        void_ratio=lanes.pack(state.void_ratio),
        lam=lanes.pack(state.lam),
        kap=lanes.pack(state.kap),
        log_conductivity=lanes.pack(conductivity.log_value),
        decline=lanes.pack(conductivity.decline),
        radial=lanes.pack(0.5 * state.thickness**2 * rate),
    )


def _check(state: ClayState, cells: Cells, load: LoadHistory, times: FloatArray) -> int:
    n_sample, n_cell = int(state.thickness.shape[0]), int(state.thickness.shape[1])
    _check_state(state, (n_sample, n_cell))
    if n_cell != cells.n_cell:
        raise ShapeError(f"state has {n_cell} cells, cells has {cells.n_cell}")
    if load.stress.shape != (load.time.size, n_sample, n_cell):
        raise ShapeError(f"load.stress: shape {load.stress.shape} is not (n_knot, n_sample, n_cell)")
    if times.size < 2 or not (np.diff(times) > 0.0).all():
        raise ParameterError("times must rise and hold at least a start and an end")
    if times[0] != load.time[0] or times[-1] > load.time[-1]:
        raise ParameterError("times must start with the first load knot and end by the last")
    return n_sample


def _check_state(state: ClayState, expected: tuple[int, int]) -> None:
    for name in state.__slots__:
        shape = getattr(state, name).shape
        if shape != expected:
            raise ShapeError(f"state.{name}: shape {shape} is not (n_sample, n_cell) = {expected}")
    for name in ("thickness", "stress", "void_ratio", "kap"):
        checked(f"state.{name}", getattr(state, name), above=0.0)
    if (state.yield_stress < state.stress).any() or (state.lam < state.kap).any():
        raise ParameterError("state: yield_stress must not be below stress, nor lam below kap")


def _placed(knot_time: FloatArray, times: FloatArray) -> tuple[IntArray, FloatArray]:
    """Return, per step and stage, the load interval and the place in it (0 to 1)."""
    step = np.diff(times)
    stage_time = np.stack([times[:-1] + GAMMA * step, times[1:]], axis=1)
    inside = np.searchsorted(times, knot_time[knot_time <= times[-1]])
    if not np.isin(knot_time[knot_time <= times[-1]], times[np.minimum(inside, times.size - 1)]).all():
        raise ParameterError("every load knot up to the end must be among times")
    interval = np.searchsorted(knot_time, times[:-1], side="right") - 1
    interval = np.minimum(interval, knot_time.size - 2)[:, None].repeat(2, axis=1)
    length = knot_time[interval + 1] - knot_time[interval]
    weight = np.clip((stage_time - knot_time[interval]) / length, 0.0, 1.0)
    return np.ascontiguousarray(interval), np.ascontiguousarray(weight)


def _slots(times: FloatArray, record: FloatArray) -> IntArray:
    """Return the record slot of each step's end, -1 for none."""
    slot = np.full(times.size - 1, -1, dtype=np.int64)
    place = np.searchsorted(times, record)
    if (place < 1).any() or (place >= times.size).any() or not np.array_equal(times[place], record):
        raise ParameterError("every recorded time must be among times, after the first")
    slot[place - 1] = np.arange(record.size)
    return slot
