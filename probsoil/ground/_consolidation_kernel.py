"""Compiled finite-strain consolidation of many realisations at once.

Realisations run in lanes: the innermost axis of every array holds `LANES` of them, side by
side, so that the compiler turns each inner loop into vector instructions. A lane never looks
at its neighbours (each stops iterating by its own test), so a realisation gives the same bits
alone or in company. `consolidation` documents the physics and wraps this kernel; nothing is
checked here.

Names: s = effective stress, x = ln s, w = void ratio lost since the start, xp = ln of the current
preconsolidation stress, wp = w on the virgin line at xp, mass = cell thickness / (1 + e0).
"""

import math
from typing import NamedTuple

import numpy as np
from numba import njit

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.ground._elementary import exponential, natural_log
from probsoil.ground.lanes import LANES

GAMMA = 1.0 - 1.0 / math.sqrt(2.0)  # Alexander (1977): two-stage, L-stable, second order
_BEYOND = (1.0 - GAMMA) / GAMMA
_TOLERANCE = 1e-4  # relative change of stress at which iteration stops; what is left is far less
_MOST_ITERATIONS = 40
LEAST_VOID_RATIO = 0.05  # below it no soil is left that the compression line could describe

_compiled = njit(nogil=True, cache=True, error_model="numpy", fastmath={"contract"})


class Soil(NamedTuple):
    """Cells of all blocks, arrays (block, cell, lane); see `consolidation` for units."""

    thickness: FloatArray
    stress: FloatArray
    yield_stress: FloatArray
    void_ratio: FloatArray
    lam: FloatArray
    kap: FloatArray
    log_conductivity: FloatArray
    decline: FloatArray
    radial: FloatArray  # flow to drains over flow through half the cell, at the initial void ratio


class Faces(NamedTuple):
    """What all realisations share, arrays (cell,); see `consolidation.Conductivity` and `Cells`."""

    follows: FloatArray
    power: IntArray
    joined: BoolArray
    drained: FloatArray
    segment: IntArray  # drainage segment of each cell, rising


class Loading(NamedTuple):
    """Added stress (block, knot, cell, lane), and what submergence takes off again."""

    stress: FloatArray
    spread: FloatArray  # (block, cell, lane)
    height: FloatArray  # (knot,), of fill
    water_depth: FloatArray  # (block, lane)
    water_weight: float  # zero where submergence does not count


class Schedule(NamedTuple):
    """Steps: their length, the load interval and place in it of both stages, and record slots."""

    step: FloatArray  # (step,)
    knot: IntArray  # (step, stage)
    weight: FloatArray  # (step, stage)
    record: IntArray  # (step,), -1 for none
    drains: BoolArray  # (step,), whether vertical drains work


class _State(NamedTuple):
    """State of one block at the start of a step, arrays (cell, lane)."""

    s: FloatArray
    x: FloatArray
    w: FloatArray
    xp: FloatArray
    wp: FloatArray
    rate: FloatArray  # of s
    mass: FloatArray
    peak: FloatArray  # greatest total so far, which no effective stress exceeds
    sunk: FloatArray  # (2, lane): settlement and its rate


class _Trial(NamedTuple):
    """State sought in one stage, arrays (cell, lane)."""

    s: FloatArray
    x: FloatArray
    w: FloatArray
    total: FloatArray  # initial effective stress plus added stress
    target: FloatArray  # w that the stage starts from


class _Work(NamedTuple):
    """Scratch of the linear solve, arrays (cell, lane) or (lane,)."""

    cell: FloatArray
    between: FloatArray
    leak: FloatArray
    diagonal: FloatArray
    change: FloatArray
    live: FloatArray
    worst: FloatArray
    sunk: FloatArray  # settlement foreseen, then the pressure it takes off


@_compiled
def _start(b: int, soil: Soil, state: _State) -> None:
    for i in range(state.s.shape[0]):
        for lane in range(LANES):
            x = natural_log(soil.stress[b, i, lane])
            xp = natural_log(soil.yield_stress[b, i, lane])
            state.s[i, lane] = soil.stress[b, i, lane]
            state.x[i, lane] = x
            state.xp[i, lane] = xp
            state.wp[i, lane] = soil.kap[b, i, lane] * (xp - x)
            state.w[i, lane] = 0.0
            state.rate[i, lane] = 0.0
            state.peak[i, lane] = soil.stress[b, i, lane]
            state.mass[i, lane] = soil.thickness[b, i, lane] / (1.0 + soil.void_ratio[b, i, lane])
    for lane in range(LANES):
        state.sunk[0, lane] = 0.0
        state.sunk[1, lane] = 0.0


@_compiled
def _guess(state: _State, span: float, trial: _Trial) -> None:
    """Carry the stress on at the latest rate, within a factor of two."""
    for i in range(state.s.shape[0]):
        for lane in range(LANES):
            s = state.s[i, lane]
            trial.s[i, lane] = min(max(s + span * state.rate[i, lane], 0.5 * s), 2.0 * s)


@_compiled
def _compress(b: int, soil: Soil, state: _State, trial: _Trial) -> None:
    """Void ratio lost at the trial stress."""
    for i in range(trial.s.shape[0]):
        for lane in range(LANES):
            x = natural_log(trial.s[i, lane])
            past = x - state.xp[i, lane]
            trial.x[i, lane] = x
            trial.w[i, lane] = (
                state.wp[i, lane]
                + soil.kap[b, i, lane] * min(past, 0.0)
                + soil.lam[b, i, lane] * max(past, 0.0)
            )


@_compiled
def _add_load(b: int, j: int, share: float, soil: Soil, loading: Loading, trial: _Trial, work: _Work) -> None:
    """Total of initial and added stress between load knots j and j + 1.

    What has sunk below the water table, first the ground above it and then the fill, loses the
    weight of water.
    """
    height = (1.0 - share) * loading.height[j] + share * loading.height[j + 1]
    for lane in range(LANES):
        submerged = min(max(work.sunk[lane], 0.0), loading.water_depth[b, lane] + height)
        work.sunk[lane] = loading.water_weight * submerged
    for i in range(trial.s.shape[0]):
        for lane in range(LANES):
            added = (1.0 - share) * loading.stress[b, j, i, lane] + share * loading.stress[b, j + 1, i, lane]
            relief = min(work.sunk[lane] * loading.spread[b, i, lane], max(added, 0.0))
            trial.total[i, lane] = soil.stress[b, i, lane] + added - relief


@_compiled
def _conduct(
    b: int, span: float, drains: bool, soil: Soil, faces: Faces, state: _State, trial: _Trial, work: _Work
) -> None:
    """Conductances over `span`: harmonic between cells, half a cell to a drained face."""
    n_cell = trial.s.shape[0]
    for i in range(n_cell):
        for lane in range(LANES):
            exponent = soil.log_conductivity[b, i, lane] - soil.decline[b, i, lane] * trial.w[i, lane]
            exponent -= faces.follows[i] * max(trial.x[i, lane], state.xp[i, lane])
            work.cell[i, lane] = exponential(exponent) * 2.0 * span / soil.thickness[b, i, lane]
            work.leak[i, lane] = 0.0
        for _ in range(faces.power[i]):
            for lane in range(LANES):
                work.cell[i, lane] /= 1.0 + soil.void_ratio[b, i, lane] - trial.w[i, lane]
    for i in range(1, n_cell):
        if faces.joined[i]:
            for lane in range(LANES):
                upper, lower = work.cell[i - 1, lane], work.cell[i, lane]
                work.between[i, lane] = upper * lower / (upper + lower)
    if drains:
        for i in range(n_cell):
            for lane in range(LANES):
                # the cell gets lower as it is squeezed, and its flow paths upward shorter
                voids = 1.0 + soil.void_ratio[b, i, lane]
                shortened = (voids - trial.w[i, lane]) / voids
                work.leak[i, lane] = work.cell[i, lane] * soil.radial[b, i, lane] * shortened * shortened
    for i in range(n_cell):
        if faces.drained[i] > 0.0:
            _leak(b, i, span, soil, faces, state, trial, work)


@_compiled
def _leak(
    b: int, i: int, span: float, soil: Soil, faces: Faces, state: _State, trial: _Trial, work: _Work
) -> None:
    """Conductance from a cell to its drained face, which carries the full stress.

    It takes the mean of the logarithms at the face and at the cell's centre.
    """
    for lane in range(LANES):
        x = natural_log(trial.total[i, lane])
        past = x - state.xp[i, lane]
        w = state.wp[i, lane] + soil.kap[b, i, lane] * min(past, 0.0) + soil.lam[b, i, lane] * max(past, 0.0)
        mean = 0.5 * (trial.w[i, lane] + w)
        exponent = soil.log_conductivity[b, i, lane] - soil.decline[b, i, lane] * mean
        largest = max(trial.x[i, lane], state.xp[i, lane]) + max(x, state.xp[i, lane])
        exponent -= 0.5 * faces.follows[i] * largest
        value = exponential(exponent) * 2.0 * span * faces.drained[i] / soil.thickness[b, i, lane]
        for _ in range(faces.power[i]):
            value /= 1.0 + soil.void_ratio[b, i, lane] - mean
        work.leak[i, lane] += value


@_compiled
def _assemble(b: int, soil: Soil, state: _State, trial: _Trial, work: _Work) -> None:
    """Imbalance of water and its derivative by the stress of each cell."""
    n_cell = trial.s.shape[0]
    for i in range(n_cell):
        for lane in range(LANES):
            virgin = trial.x[i, lane] > state.xp[i, lane]
            slope = soil.lam[b, i, lane] if virgin else soil.kap[b, i, lane]
            excess = trial.total[i, lane] - trial.s[i, lane]
            stored = state.mass[i, lane] * (trial.w[i, lane] - trial.target[i, lane])
            work.change[i, lane] = stored - work.leak[i, lane] * excess
            work.diagonal[i, lane] = state.mass[i, lane] * slope / trial.s[i, lane] + work.leak[i, lane]
    for i in range(1, n_cell):
        for lane in range(LANES):
            lower = trial.total[i, lane] - trial.s[i, lane]
            upper = trial.total[i - 1, lane] - trial.s[i - 1, lane]
            flow = work.between[i, lane] * (lower - upper)
            work.change[i, lane] -= flow
            work.change[i - 1, lane] += flow
            work.diagonal[i, lane] += work.between[i, lane]
            work.diagonal[i - 1, lane] += work.between[i, lane]


@_compiled
def _solve(work: _Work) -> None:
    """Solve the symmetric tridiagonal system in place; off-diagonals are minus `between`."""
    n_cell = work.change.shape[0]
    for i in range(1, n_cell):
        for lane in range(LANES):
            factor = work.between[i, lane] / work.diagonal[i - 1, lane]
            work.diagonal[i, lane] -= factor * work.between[i, lane]
            work.change[i, lane] += factor * work.change[i - 1, lane]
    for lane in range(LANES):
        work.change[n_cell - 1, lane] /= work.diagonal[n_cell - 1, lane]
    for i in range(n_cell - 2, -1, -1):
        for lane in range(LANES):
            known = work.change[i, lane] + work.between[i + 1, lane] * work.change[i + 1, lane]
            work.change[i, lane] = known / work.diagonal[i, lane]


@_compiled
def _apply(trial: _Trial, work: _Work) -> bool:
    """Change the stress of every lane still iterating; return whether any has to go on."""
    for lane in range(LANES):
        work.worst[lane] = 0.0
    for i in range(trial.s.shape[0]):
        for lane in range(LANES):
            old = trial.s[i, lane]
            new = max(old - work.live[lane] * work.change[i, lane], 0.2 * old)  # stress stays positive
            work.worst[lane] = max(work.worst[lane], abs(new - old) / new)
            trial.s[i, lane] = new
    going = 0.0
    for lane in range(LANES):
        work.live[lane] = 1.0 if work.worst[lane] > _TOLERANCE else 0.0
        going = max(going, work.live[lane])
    return going > 0.0


@_compiled
def _first_target(span: float, state: _State, trial: _Trial, work: _Work) -> None:
    """Set out the first stage: from the state at the start of the step."""
    for i in range(trial.s.shape[0]):
        for lane in range(LANES):
            trial.target[i, lane] = state.w[i, lane]
    for lane in range(LANES):
        work.sunk[lane] = state.sunk[0, lane] + span * state.sunk[1, lane]


@_compiled
def _second_target(span: float, state: _State, trial: _Trial, work: _Work) -> None:
    """Set out the second stage: carry on through the first one."""
    for lane in range(LANES):
        work.sunk[lane] = 0.0
    for i in range(trial.s.shape[0]):
        for lane in range(LANES):
            gained = trial.w[i, lane] - state.w[i, lane]
            trial.target[i, lane] = state.w[i, lane] + _BEYOND * gained
            state.rate[i, lane] = (trial.s[i, lane] - state.s[i, lane]) / span
            work.sunk[lane] += state.mass[i, lane] * gained
    for lane in range(LANES):
        work.sunk[lane] = state.sunk[0, lane] + work.sunk[lane] / GAMMA


@_compiled
def _iterate(
    b: int, span: float, drains: bool, soil: Soil, faces: Faces, state: _State, trial: _Trial, work: _Work
) -> None:
    """Newton's method on the stress of all cells until every lane has settled down.

    Conductances are renewed but not differentiated, so the matrix stays symmetric.
    """
    _compress(b, soil, state, trial)
    for lane in range(LANES):
        work.live[lane] = 1.0
    for _ in range(_MOST_ITERATIONS):
        _conduct(b, span, drains, soil, faces, state, trial, work)
        _assemble(b, soil, state, trial, work)
        _solve(work)
        going = _apply(trial, work)
        _compress(b, soil, state, trial)
        if not going:
            return


@_compiled
def _finish(b: int, length: float, soil: Soil, state: _State, trial: _Trial) -> None:
    """Make the trial state the state; yielded cells take their stress as preconsolidation stress.

    A long step may carry the stress a little past the total, from where it would come back; the
    soil must not remember that, so no preconsolidation stress goes beyond the greatest total.
    """
    for lane in range(LANES):
        state.sunk[1, lane] = 0.0
    for i in range(trial.s.shape[0]):
        for lane in range(LANES):
            state.peak[i, lane] = max(state.peak[i, lane], trial.total[i, lane])
            state.sunk[1, lane] += state.mass[i, lane] * trial.w[i, lane]
            state.rate[i, lane] = (trial.s[i, lane] - state.s[i, lane]) / length
            state.s[i, lane] = trial.s[i, lane]
            state.x[i, lane] = trial.x[i, lane]
            state.w[i, lane] = trial.w[i, lane]
            remembered = natural_log(min(trial.s[i, lane], state.peak[i, lane]))
            further = max(remembered - state.xp[i, lane], 0.0)
            state.wp[i, lane] += soil.lam[b, i, lane] * further
            state.xp[i, lane] += further
    for lane in range(LANES):
        sunk = state.sunk[1, lane]
        state.sunk[1, lane] = (sunk - state.sunk[0, lane]) / length
        state.sunk[0, lane] = sunk


@_compiled
def _count_closed(b: int, soil: Soil, trial: _Trial, failed: IntArray) -> None:
    """Count the cells whose voids have closed: the compression line does not reach that far."""
    for i in range(trial.s.shape[0]):
        for lane in range(LANES):
            if soil.void_ratio[b, i, lane] - trial.w[i, lane] < LEAST_VOID_RATIO:
                failed[b, 1, lane] += 1


@_compiled
def consolidate_lanes(
    soil: Soil,
    faces: Faces,
    loading: Loading,
    schedule: Schedule,
    settlement: FloatArray,
    recorded: FloatArray,
    failed: IntArray,
) -> None:
    """March all blocks of lanes through all steps; see `consolidation.consolidate`.

    `settlement` (block, segment, step, lane) takes the settlement of every drainage segment at the end
    of each step and must hold zeros, `recorded`
    (block, slot, 2, cell, lane) effective and preconsolidation stress, `failed`
    (block, 2, lane) the number of stages that did not converge and of cells with closed voids.
    """
    n_block, n_cell, _ = soil.thickness.shape
    shape = (n_cell, LANES)
    state = _State(
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty((2, LANES)),
    )
    trial = _Trial(np.empty(shape), np.empty(shape), np.empty(shape), np.empty(shape), np.empty(shape))
    work = _Work(
        np.empty(shape),
        np.zeros(shape),
        np.zeros(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(LANES),
        np.empty(LANES),
        np.empty(LANES),
    )
    for b in range(n_block):
        _start(b, soil, state)
        for n in range(schedule.step.size):
            length = schedule.step[n]
            span = GAMMA * length
            for stage in range(2):
                if stage == 0:
                    _first_target(span, state, trial, work)
                    _guess(state, span, trial)
                else:
                    _second_target(span, state, trial, work)
                    _guess(state, length, trial)
                _add_load(b, schedule.knot[n, stage], schedule.weight[n, stage], soil, loading, trial, work)
                _iterate(b, span, schedule.drains[n], soil, faces, state, trial, work)
                for lane in range(LANES):
                    if not work.worst[lane] <= _TOLERANCE:  # also when it is not a number
                        failed[b, 0, lane] += 1
            _count_closed(b, soil, trial, failed)
            _finish(b, length, soil, state, trial)
            slot = schedule.record[n]
            for i in range(n_cell):
                segment = faces.segment[i]
                for lane in range(LANES):
                    settlement[b, segment, n, lane] += state.mass[i, lane] * state.w[i, lane]
            if slot >= 0:
                for i in range(n_cell):
                    for lane in range(LANES):
                        recorded[b, slot, 0, i, lane] = state.s[i, lane]
                        recorded[b, slot, 1, i, lane] = exponential(state.xp[i, lane])
