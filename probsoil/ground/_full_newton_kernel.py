"""Newton's method with every derivative, for the stages that the usual one does not settle.

Where the water of heavily loaded ground takes almost all effective stress from the ground beside it,
the flow depends on the void ratio there much more than on the stress, and the usual iteration, which
leaves that dependence to the next round, swings to and fro. Slow, and seldom needed.

See `_consolidation_arrays` for the names.
"""

from typing import NamedTuple

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground._cell_kernel import LEAST_STRESS, compress, lessened, resist
from probsoil.ground._compiling import compiled
from probsoil.ground._consolidation_arrays import Faces, Soil, State, Trial, Work
from probsoil.ground._separate_arrays import arrays_are_separate

TOLERANCE = 1e-4  # relative change of stress at which iteration stops; what is left is far less
_MOST_ITERATIONS = 40
_MOST_HALVINGS = 10
_LEAST_GAIN = 0.1  # of the imbalance, for a full step; a shorter one has to gain that much less
_DIFFERENCE = 1e-6  # of a stress, over which derivatives are taken


class _System(NamedTuple):
    """Tridiagonal system, arrays (cell, lane) or (lane,)."""

    origin: FloatArray  # s at which it is taken
    above: FloatArray  # derivative of a cell's imbalance by s of the cell above, then by its own, and below
    own: FloatArray
    below: FloatArray
    imbalance: FloatArray  # then the change of s that removes it
    factor: FloatArray  # (lane,): share of the change that is made
    left: FloatArray  # (lane,): sum of imbalances, regardless of sign


@compiled
def _imbalance(
    b: int,
    span: float,
    drains: bool,
    soil: Soil,
    faces: Faces,
    state: State,
    trial: Trial,
    work: Work,
    out: FloatArray,
) -> None:
    """Water that a cell has lost and that has not left it."""
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    compress(b, soil, state, trial)
    resist(b, span, drains, soil, faces, state, trial, work)
    for i in range(n_cell):
        for lane in range(n_lane):
            stored = state.mass[i, lane] * (trial.w[i, lane] - trial.target[i, lane])
            out[i, lane] = stored - work.leak[i, lane] * (trial.total[i, lane] - trial.s[i, lane])
    for i in range(1, n_cell):
        if faces.joined[i]:
            for lane in range(n_lane):
                lower = trial.total[i, lane] - trial.s[i, lane]
                upper = trial.total[i - 1, lane] - trial.s[i - 1, lane]
                flow = (lower - upper) / (work.half[i - 1, lane] + work.half[i, lane])
                out[i, lane] -= flow
                out[i - 1, lane] += flow


@compiled
def _difference(s: float) -> float:
    return _DIFFERENCE * max(abs(s), LEAST_STRESS)


@compiled
def _linearise(
    b: int,
    span: float,
    drains: bool,
    soil: Soil,
    faces: Faces,
    state: State,
    trial: Trial,
    work: Work,
    system: _System,
    moved: FloatArray,
) -> None:
    """Take derivatives by differences, every third cell at once, for a cell knows its neighbours only."""
    n_cell, n_lane = trial.s.shape
    for i in range(n_cell):  # written out: a copy by slice brings in all the text of its errors to compile
        for lane in range(n_lane):
            system.origin[i, lane] = trial.s[i, lane]
    _imbalance(b, span, drains, soil, faces, state, trial, work, system.imbalance)
    for first in range(3):
        for i in range(first, n_cell, 3):
            for lane in range(n_lane):
                trial.s[i, lane] += _difference(trial.s[i, lane])
        _imbalance(b, span, drains, soil, faces, state, trial, work, moved)
        for i in range(first, n_cell, 3):
            for lane in range(n_lane):
                difference = trial.s[i, lane] - system.origin[i, lane]
                system.own[i, lane] = (moved[i, lane] - system.imbalance[i, lane]) / difference
                if i > 0:
                    change = moved[i - 1, lane] - system.imbalance[i - 1, lane]
                    system.below[i - 1, lane] = change / difference
                if i < n_cell - 1:
                    change = moved[i + 1, lane] - system.imbalance[i + 1, lane]
                    system.above[i + 1, lane] = change / difference
                trial.s[i, lane] = system.origin[i, lane]


@compiled
def _solve(system: _System) -> None:
    """Elimination from the top down, substitution from the bottom up."""
    arrays_are_separate()
    n_cell, n_lane = system.own.shape
    for i in range(1, n_cell):
        for lane in range(n_lane):
            factor = system.above[i, lane] / system.own[i - 1, lane]
            system.own[i, lane] -= factor * system.below[i - 1, lane]
            system.imbalance[i, lane] -= factor * system.imbalance[i - 1, lane]
    for lane in range(n_lane):
        system.imbalance[n_cell - 1, lane] /= system.own[n_cell - 1, lane]
    for i in range(n_cell - 2, -1, -1):
        for lane in range(n_lane):
            known = system.imbalance[i, lane] - system.below[i, lane] * system.imbalance[i + 1, lane]
            system.imbalance[i, lane] = known / system.own[i, lane]


@compiled
def _sum_imbalance(imbalance: FloatArray, total: FloatArray) -> None:
    arrays_are_separate()
    n_cell, n_lane = imbalance.shape
    for lane in range(n_lane):
        total[lane] = 0.0
    for i in range(n_cell):
        for lane in range(n_lane):
            total[lane] += abs(imbalance[i, lane])


@compiled
def _find_live(system: _System, trial: Trial, work: Work) -> bool:
    """Find the lanes that a full change still moves; return whether there are any."""
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for lane in range(n_lane):
        work.worst[lane] = 0.0
        system.factor[lane] = work.live[lane]
    for i in range(n_cell):
        for lane in range(n_lane):
            old = system.origin[i, lane]
            change = system.imbalance[i, lane] if work.live[lane] > 0.0 else 0.0
            new = lessened(old, change)
            worst = abs(new - old) - TOLERANCE * max(new, LEAST_STRESS)
            work.worst[lane] = max(work.worst[lane], worst)
            trial.s[i, lane] = new
    going = 0.0
    for lane in range(n_lane):
        work.live[lane] = 1.0 if work.worst[lane] > 0.0 else 0.0
        going = max(going, work.live[lane])
    return going > 0.0


@compiled
def _shorten(system: _System, now: FloatArray, trial: Trial, work: Work) -> bool:
    """Halve the change of the live lanes in which too much imbalance is left; return whether any is."""
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    any_short = 0.0
    for lane in range(n_lane):
        enough = now[lane] <= (1.0 - _LEAST_GAIN * system.factor[lane]) * system.left[lane]
        short = 0.0 if enough else work.live[lane]
        system.factor[lane] *= 1.0 - 0.5 * short
        any_short = max(any_short, short)
    for i in range(n_cell):
        for lane in range(n_lane):
            if work.live[lane] > 0.0:
                change = system.factor[lane] * system.imbalance[i, lane]
                trial.s[i, lane] = lessened(system.origin[i, lane], change)
    return any_short > 0.0


@compiled
def solve_fully(
    b: int, span: float, drains: bool, soil: Soil, faces: Faces, state: State, trial: Trial, work: Work
) -> None:
    """Carry on in the lanes still iterating until every one has settled down.

    A change that does not lessen the imbalance is halved until it does.
    """
    shape, n_lane = trial.s.shape, trial.s.shape[1]
    system = _System(
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(n_lane),
        np.empty(n_lane),
    )
    moved, now = np.empty(shape), np.empty(n_lane)
    for _ in range(_MOST_ITERATIONS):
        _linearise(b, span, drains, soil, faces, state, trial, work, system, moved)
        _sum_imbalance(system.imbalance, system.left)
        _solve(system)
        if not _find_live(system, trial, work):
            break
        for _ in range(_MOST_HALVINGS):
            _imbalance(b, span, drains, soil, faces, state, trial, work, moved)
            _sum_imbalance(moved, now)
            if not _shorten(system, now, trial, work):
                break
    compress(b, soil, state, trial)
