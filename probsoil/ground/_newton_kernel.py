"""Newton's method of the consolidation kernel: one stage of one time step, for a block of lanes.

See `_consolidation_arrays` for the names.
"""

from probsoil.ground._cell_kernel import LEAST_STRESS, compress, lessened, log_stress, resist
from probsoil.ground._compiling import compiled
from probsoil.ground._consolidation_arrays import Faces, Soil, State, Trial, Work
from probsoil.ground._full_newton_kernel import TOLERANCE, solve_fully
from probsoil.ground._separate_arrays import arrays_are_separate

_USUAL_ITERATIONS = 15  # what needs more has conductances that must be differentiated


@compiled
def _eliminate(b: int, soil: Soil, faces: Faces, state: State, trial: Trial, work: Work) -> None:
    """Imbalance of water, its derivative by the stress of each cell, and elimination, from the top down.

    The matrix is symmetric and tridiagonal, its off-diagonals minus the conductances `between` a cell
    and the one above. What is known of the cell above is carried along until the flow between the two
    completes it. The right-hand side and the reciprocal of the pivot of a cell are kept one row below
    the cell's own, so that every loop writes rows that it does not read.
    """
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for lane in range(n_lane):  # a cell above the first, which no flow joins to it
        work.resistance[lane] = 1.0
        work.excess[lane] = 0.0
        work.diagonal[lane] = 1.0
        work.change[lane] = 0.0
    for i in range(n_cell):
        joined = 1.0 if faces.joined[i] else 0.0
        for lane in range(n_lane):
            excess = trial.total[i, lane] - trial.s[i, lane]
            between = joined / (work.resistance[lane] + work.half[i, lane])
            flow = between * (excess - work.excess[lane])
            pivot = 1.0 / (work.diagonal[lane] + between)
            rest = work.diagonal[lane] * pivot  # that is 1 - between * pivot, without the cancellation
            virgin = trial.x[i, lane] >= state.xp[i, lane]
            slope = soil.lam[b, i, lane] if virgin else soil.kap[b, i, lane]
            capacity = state.mass[i, lane] * slope / max(trial.s[i, lane], LEAST_STRESS) + work.leak[i, lane]
            stored = state.mass[i, lane] * (trial.w[i, lane] - trial.target[i, lane])
            work.between[i, lane] = between
            work.pivot[i, lane] = pivot
            work.known[i, lane] = work.change[lane] + flow
            inflow = between * pivot * work.change[lane] - rest * flow
            work.diagonal[lane] = capacity + rest * between
            work.change[lane] = stored - work.leak[i, lane] * excess + inflow
            work.resistance[lane] = work.half[i, lane]
            work.excess[lane] = excess
    for lane in range(n_lane):
        work.pivot[n_cell, lane] = 1.0 / work.diagonal[lane]
        work.known[n_cell, lane] = work.change[lane]


@compiled
def _substitute(b: int, soil: Soil, state: State, trial: Trial, work: Work) -> bool:
    """Solve from the bottom up, change the stress of every lane still iterating, and compress.

    Return whether any lane has to go on.
    """
    arrays_are_separate()
    n_cell, n_lane = trial.s.shape
    for lane in range(n_lane):
        work.change[lane] = 0.0
        work.worst[lane] = 0.0
    for i in range(n_cell - 1, -1, -1):
        for lane in range(n_lane):
            change = (work.known[i + 1, lane] + work.change[lane]) * work.pivot[i + 1, lane]
            work.change[lane] = work.between[i, lane] * change
            old = trial.s[i, lane]
            new = lessened(old, work.live[lane] * change)
            worst = abs(new - old) - TOLERANCE * max(new, LEAST_STRESS)
            work.worst[lane] = max(work.worst[lane], worst)
            x = log_stress(new)
            past = x - state.xp[i, lane]
            trial.s[i, lane] = new
            trial.x[i, lane] = x
            trial.w[i, lane] = (
                state.wp[i, lane]
                + soil.kap[b, i, lane] * min(past, 0.0)
                + soil.lam[b, i, lane] * max(past, 0.0)
            )
    going = 0.0
    for lane in range(n_lane):
        work.live[lane] = 1.0 if work.worst[lane] > 0.0 else 0.0
        going = max(going, work.live[lane])
    return going > 0.0


@compiled
def solve_stage(
    b: int, span: float, drains: bool, soil: Soil, faces: Faces, state: State, trial: Trial, work: Work
) -> None:
    """Newton's method on the stress of all cells until every lane has settled down.

    Conductances are renewed but not differentiated, so the matrix stays symmetric. Lanes that this does
    not settle go on with conductances differentiated as well.
    """
    arrays_are_separate()
    n_lane = trial.s.shape[1]
    compress(b, soil, state, trial)
    for lane in range(n_lane):
        work.live[lane] = 1.0
    for _ in range(_USUAL_ITERATIONS):
        resist(b, span, drains, soil, faces, state, trial, work)
        _eliminate(b, soil, faces, state, trial, work)
        if not _substitute(b, soil, state, trial, work):
            return
    solve_fully(b, span, drains, soil, faces, state, trial, work)
