"""Compiled finite-strain consolidation of many realisations at once.

Realisations run in lanes: the innermost axis of every array holds `lanes.LANES` of them, side
by side, so that the compiler turns each inner loop into vector instructions. A lane never looks
at its neighbours (each stops iterating by its own test), so a realisation gives the same bits
alone or in company. `consolidation` documents the physics and wraps this kernel; nothing is
checked here. `_consolidation_arrays` gives the names, `_newton_kernel` solves a stage.

Two habits keep the loops in vector instructions, and cost a factor of two to three where they
are forgotten: every function promises that its arrays are separate, and takes the number of lanes
from the arrays, for a loop of constant length is unrolled before anyone thinks of vectors.
`tests/benchmarks` holds the same arithmetic in C to compare with.
"""

import math

from probsoil._typing import FloatArray, IntArray
from probsoil.ground._cell_kernel import LEAST_STRESS
from probsoil.ground._compiling import compiled, kept
from probsoil.ground._consolidation_arrays import (
    Faces,
    Loading,
    Schedule,
    Soil,
    State,
    Trial,
    Work,
    empty_state,
    empty_trial,
    empty_work,
)
from probsoil.ground._elementary import exponential, natural_log
from probsoil.ground._newton_kernel import solve_stage
from probsoil.ground._separate_arrays import arrays_are_separate

GAMMA = 1.0 - 1.0 / math.sqrt(2.0)  # Alexander (1977): two-stage, L-stable, second order
_BEYOND = (1.0 - GAMMA) / GAMMA
_LEAST_LOGARITHM = -700.0  # of a stress that can be written as a number
LEAST_VOID_RATIO = 0.05  # below it no soil is left that the compression line could describe


@compiled
def _start(b: int, soil: Soil, state: State) -> None:
    arrays_are_separate()
    n_cell, n_lane = state.s.shape
    for i in range(n_cell):
        for lane in range(n_lane):
            x = natural_log(soil.stress[b, i, lane])
            xp = natural_log(soil.yield_stress[b, i, lane])
            state.s[i, lane] = soil.stress[b, i, lane]
            state.xp[i, lane] = xp
            state.wp[i, lane] = soil.kap[b, i, lane] * (xp - x)
            state.w[i, lane] = 0.0
            state.rate[i, lane] = 0.0
            state.peak[i, lane] = soil.stress[b, i, lane]
            state.mass[i, lane] = soil.thickness[b, i, lane] / (1.0 + soil.void_ratio[b, i, lane])
    for lane in range(n_lane):
        state.sunk[0, lane] = 0.0
        state.sunk[1, lane] = 0.0
        state.fill[lane] = 0.0


@compiled
def _guess(state: State, span: float, trial: Trial) -> None:
    """Carry the stress on at the latest rate, within a factor of two."""
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for i in range(n_cell):
        for lane in range(n_lane):
            s = state.s[i, lane]
            half, twice = 0.5 * s, 2.0 * s
            s += span * state.rate[i, lane]
            trial.s[i, lane] = min(max(s, min(half, twice)), max(half, twice))


@compiled
def _fill_up(b: int, j: int, share: float, loading: Loading, sunk: FloatArray, fill: FloatArray) -> None:
    """Thickness of fill that keeps the level at a settlement of the clay, between load knots j and j + 1."""
    arrays_are_separate()
    for lane in range(fill.size):
        granular = (1.0 - share) * loading.granular[b, j, lane] + share * loading.granular[b, j + 1, lane]
        fill[lane] = max(sunk[lane] + granular, 0.0) * loading.gain[b, lane]


@compiled
def _keep(before: FloatArray, fill: FloatArray) -> None:
    """Thickness of fill that was added before."""
    arrays_are_separate()
    for lane in range(fill.size):
        fill[lane] = before[lane]


@compiled
def _add_load(b: int, j: int, share: float, soil: Soil, loading: Loading, trial: Trial, work: Work) -> None:
    """Total of initial and added stress between load knots j and j + 1.

    What has sunk below the water table, first the ground above it and then the fill, loses the
    weight of water. Fill that holds the level is spread as the load is.
    """
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for lane in range(n_lane):
        height = (1.0 - share) * loading.height[b, j, lane] + share * loading.height[b, j + 1, lane]
        above_base = height + work.fill[lane]
        submerged = min(max(work.sunk[lane], 0.0), loading.water_depth[b, lane] + above_base)
        work.sunk[lane] = loading.water_weight * submerged
        work.fill[lane] *= loading.fill_weight[b, lane]
    for i in range(n_cell):
        for lane in range(n_lane):
            added = (1.0 - share) * loading.stress[b, j, i, lane] + share * loading.stress[b, j + 1, i, lane]
            added += work.fill[lane] * loading.fill_spread[b, i, lane]
            relief = min(work.sunk[lane] * loading.spread[b, i, lane], max(added, 0.0))
            trial.total[i, lane] = soil.stress[b, i, lane] + added - relief


@compiled
def _first_target(span: float, state: State, trial: Trial, work: Work) -> None:
    """Set out the first stage: from the state at the start of the step."""
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for i in range(n_cell):
        for lane in range(n_lane):
            trial.target[i, lane] = state.w[i, lane]
    for lane in range(n_lane):
        work.sunk[lane] = state.sunk[0, lane] + span * state.sunk[1, lane]


@compiled
def _second_target(span: float, state: State, trial: Trial, work: Work) -> None:
    """Set out the second stage: carry on through the first one."""
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for lane in range(n_lane):
        work.sunk[lane] = 0.0
    for i in range(n_cell):
        for lane in range(n_lane):
            gained = trial.w[i, lane] - state.w[i, lane]
            trial.target[i, lane] = state.w[i, lane] + _BEYOND * gained
            state.rate[i, lane] = (trial.s[i, lane] - state.s[i, lane]) / span
            work.sunk[lane] += state.mass[i, lane] * gained
    for lane in range(n_lane):
        work.sunk[lane] = state.sunk[0, lane] + work.sunk[lane] / GAMMA


@compiled
def _finish(b: int, length: float, soil: Soil, state: State, trial: Trial) -> None:
    """Make the trial state the state; yielded cells take their stress as preconsolidation stress.

    A long step may carry the stress a little past the total, from where it would come back; the
    soil must not remember that, so no preconsolidation stress goes beyond the greatest total.
    """
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for lane in range(n_lane):
        state.sunk[1, lane] = 0.0
    for i in range(n_cell):
        for lane in range(n_lane):
            state.peak[i, lane] = max(state.peak[i, lane], trial.total[i, lane])
            state.sunk[1, lane] += state.mass[i, lane] * trial.w[i, lane]
            state.rate[i, lane] = (trial.s[i, lane] - state.s[i, lane]) / length
            state.s[i, lane] = trial.s[i, lane]
            state.w[i, lane] = trial.w[i, lane]
            remembered = min(trial.x[i, lane], natural_log(state.peak[i, lane]))
            further = max(remembered - state.xp[i, lane], 0.0)
            state.wp[i, lane] += soil.lam[b, i, lane] * further
            state.xp[i, lane] += further
    for lane in range(n_lane):
        sunk = state.sunk[1, lane]
        state.sunk[1, lane] = (sunk - state.sunk[0, lane]) / length
        state.sunk[0, lane] = sunk


@compiled
def _count_closed(b: int, soil: Soil, trial: Trial, failed: IntArray) -> None:
    """Count the cells whose voids have closed: the compression line does not reach that far."""
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for i in range(n_cell):
        for lane in range(n_lane):
            if soil.void_ratio[b, i, lane] - trial.w[i, lane] < LEAST_VOID_RATIO:
                failed[b, 1, lane] += 1


@kept
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
    arrays_are_separate()
    n_block, n_cell, n_lane = soil.thickness.shape
    state, trial = empty_state(n_cell, n_lane), empty_trial(n_cell, n_lane)
    work = empty_work(n_cell, n_lane)
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
                j, share = schedule.knot[n, stage], schedule.weight[n, stage]
                if schedule.held[n]:
                    _fill_up(b, j, share, loading, work.sunk, work.fill)
                else:
                    _keep(state.fill, work.fill)
                _add_load(b, j, share, soil, loading, trial, work)
                solve_stage(b, span, schedule.drains[n], soil, faces, state, trial, work)
                for lane in range(n_lane):
                    if not work.worst[lane] <= 0.0:  # also when it is not a number
                        failed[b, 0, lane] += 1
            _count_closed(b, soil, trial, failed)
            _finish(b, length, soil, state, trial)
            if schedule.held[n]:
                _fill_up(b, schedule.knot[n, 1], schedule.weight[n, 1], loading, state.sunk[0], state.fill)
            slot = schedule.record[n]
            for i in range(n_cell):
                segment = faces.segment[i]
                for lane in range(n_lane):
                    settlement[b, segment, n, lane] += state.mass[i, lane] * state.w[i, lane]
            if slot >= 0:
                for i in range(n_cell):
                    for lane in range(n_lane):
                        s = state.s[i, lane]
                        if s <= LEAST_STRESS:
                            s = exponential(max(trial.x[i, lane], _LEAST_LOGARITHM))
                        recorded[b, slot, 0, i, lane] = s
                        recorded[b, slot, 1, i, lane] = exponential(state.xp[i, lane])
