"""What the cells of the consolidation kernel do at a trial stress: void ratio lost and resistance to flow.

See `_consolidation_arrays` for the names.
"""

import math

import numpy as np
from numba import njit

from probsoil.ground._compiling import compiled
from probsoil.ground._consolidation_arrays import Faces, Soil, State, Trial, Work
from probsoil.ground._elementary import exponential, natural_log
from probsoil.ground._separate_arrays import arrays_are_separate

# kPa; from here down the recompression line goes on straight in stress, no longer in its logarithm
LEAST_STRESS = 1e-3
_PER_LEAST = 1.0 / LEAST_STRESS
_LOG_LEAST = math.log(LEAST_STRESS)


@njit(inline="always", error_model="numpy")
def log_stress(s: float) -> float:
    """Logarithm of the stress at which the compression line gives the void ratio that s gives.

    Where water is pressed from ground under more load into ground under less, it takes almost all
    effective stress there, and the logarithm of what is left falls without end. On its tangent below
    `LEAST_STRESS` the stress passes through zero instead, a thousandth of a kilopascal off.
    """
    return natural_log(max(s, LEAST_STRESS)) + min(s * _PER_LEAST - 1.0, 0.0)


@njit(inline="always", error_model="numpy")
def lessened(old: float, change: float) -> float:
    """Stress less a change, but not down to less than a fifth at once: the line is steeper there."""
    return max(old - change, 0.2 * old if old > LEAST_STRESS else -np.inf)


@compiled
def compress(b: int, soil: Soil, state: State, trial: Trial) -> None:
    """Void ratio lost at the trial stress."""
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for i in range(n_cell):
        for lane in range(n_lane):
            x = log_stress(trial.s[i, lane])
            past = x - state.xp[i, lane]
            trial.x[i, lane] = x
            trial.w[i, lane] = (
                state.wp[i, lane]
                + soil.kap[b, i, lane] * min(past, 0.0)
                + soil.lam[b, i, lane] * max(past, 0.0)
            )


@compiled
def resist(
    b: int, span: float, drains: bool, soil: Soil, faces: Faces, state: State, trial: Trial, work: Work
) -> None:
    """Resistance of half of every cell over `span`, and the conductance of its ways out of the clay.

    Clay that swells further below `LEAST_STRESS` conducts no better for it.
    """
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for i in range(n_cell):
        follows = faces.follows[i]
        for lane in range(n_lane):
            x = trial.x[i, lane]
            w = trial.w[i, lane] + soil.kap[b, i, lane] * max(_LOG_LEAST - x, 0.0)
            exponent = soil.decline[b, i, lane] * w - soil.log_conductivity[b, i, lane]
            exponent += follows * max(x, state.xp[i, lane])
            work.half[i, lane] = exponential(exponent) * soil.thickness[b, i, lane] / (2.0 * span)
            work.leak[i, lane] = 0.0
        for _ in range(faces.power[i]):
            for lane in range(n_lane):
                work.half[i, lane] *= 1.0 + soil.void_ratio[b, i, lane] - trial.w[i, lane]
        if drains:
            for lane in range(n_lane):
                # the cell gets lower as it is squeezed, and its flow paths upward shorter
                voids = 1.0 + soil.void_ratio[b, i, lane]
                shortened = (voids - trial.w[i, lane]) / voids
                work.leak[i, lane] = soil.radial[b, i, lane] * shortened * shortened / work.half[i, lane]
        if faces.drained[i] > 0.0:
            _leak(b, i, span, soil, faces, state, trial, work)


@compiled
def _leak(
    b: int, i: int, span: float, soil: Soil, faces: Faces, state: State, trial: Trial, work: Work
) -> None:
    """Conductance from a cell to its drained face, which carries the full stress.

    It takes the mean of the logarithms at the face and at the cell's centre.
    """
    arrays_are_separate()
    n_lane = trial.s.shape[1]
    follows = 0.5 * faces.follows[i]
    for lane in range(n_lane):
        x, xp = log_stress(trial.total[i, lane]), state.xp[i, lane]
        past = x - xp
        w = state.wp[i, lane] + soil.kap[b, i, lane] * min(past, 0.0) + soil.lam[b, i, lane] * max(past, 0.0)
        mean = 0.5 * (trial.w[i, lane] + w)
        exponent = soil.decline[b, i, lane] * mean - soil.log_conductivity[b, i, lane]
        exponent += follows * (max(trial.x[i, lane], xp) + max(x, xp))
        work.face[lane] = exponential(exponent) * soil.thickness[b, i, lane] / (2.0 * span)
        work.voids[lane] = 1.0 + soil.void_ratio[b, i, lane] - mean
    for _ in range(faces.power[i]):
        for lane in range(n_lane):
            work.face[lane] *= work.voids[lane]
    for lane in range(n_lane):
        work.leak[i, lane] += faces.drained[i] / work.face[lane]
