"""Arrays of the consolidation kernel: what it is given, the state it carries and its scratch.

Names: s = effective stress, x = ln s, w = void ratio lost since the start, xp = ln of the current
preconsolidation stress, wp = w on the virgin line at xp, mass = cell thickness / (1 + e0).
"""

from typing import NamedTuple

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.ground._compiling import compiled


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
    """What all realisations share, arrays (cell,); see `conductivity.Conductivity` and `cells.Cells`."""

    follows: FloatArray
    power: IntArray
    joined: BoolArray
    drained: FloatArray
    segment: IntArray  # drainage segment of each cell, rising


class Loading(NamedTuple):
    """Added stress (block, knot, cell, lane), and what submergence takes off again."""

    stress: FloatArray
    spread: FloatArray  # (block, cell, lane), of what submergence takes off
    fill_spread: FloatArray  # the same, of fill that holds the level
    height: FloatArray  # (block, knot, lane), of fill
    water_depth: FloatArray  # (block, lane)
    water_weight: float  # zero where submergence does not count
    fill_weight: FloatArray  # (block, lane), of fill that holds the level; zero where none does
    granular: FloatArray  # (block, knot, lane), settlement of granular layers without that fill
    gain: FloatArray  # (block, lane), fill added per settlement without it


class Schedule(NamedTuple):
    """Steps: their length, the load interval and place in it of both stages, and record slots."""

    step: FloatArray  # (step,)
    knot: IntArray  # (step, stage)
    weight: FloatArray  # (step, stage)
    record: IntArray  # (step,), -1 for none
    drains: BoolArray  # (step,), whether vertical drains work
    held: BoolArray  # (step,), whether fill is added so that its level stays


class State(NamedTuple):
    """State of one block at the start of a step, arrays (cell, lane)."""

    s: FloatArray
    w: FloatArray
    xp: FloatArray
    wp: FloatArray
    rate: FloatArray  # of s
    mass: FloatArray
    peak: FloatArray  # greatest total so far, which no effective stress exceeds
    sunk: FloatArray  # (2, lane): settlement and its rate
    fill: FloatArray  # (lane,): thickness added so that the level stays


class Trial(NamedTuple):
    """State sought in one stage, arrays (cell, lane)."""

    s: FloatArray
    x: FloatArray
    w: FloatArray
    total: FloatArray  # initial effective stress plus added stress
    target: FloatArray  # w that the stage starts from


class Work(NamedTuple):
    """Scratch of the linear solve, arrays (cell, lane), (cell + 1, lane) or (lane,)."""

    half: FloatArray  # (cell, lane): resistance of half the cell
    leak: FloatArray  # (cell, lane): conductance to drained faces and drains
    between: FloatArray  # (cell + 1, lane) like the next two: conductance to the cell above
    pivot: FloatArray  # reciprocal, of the cell above
    known: FloatArray  # right-hand side, of the cell above
    resistance: FloatArray  # (lane,) like all that follow; of half the cell above
    excess: FloatArray
    diagonal: FloatArray
    change: FloatArray
    face: FloatArray
    voids: FloatArray
    live: FloatArray
    worst: FloatArray  # by how much a change of stress exceeds the tolerance
    sunk: FloatArray  # settlement foreseen, then the pressure it takes off
    fill: FloatArray  # thickness added so that the level stays, then its pressure


@compiled
def empty_state(n_cell: int, n_lane: int) -> State:
    """Room for the state of one block."""
    shape = (n_cell, n_lane)
    return State(
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty(shape),
        np.empty((2, n_lane)),
        np.empty(n_lane),
    )


@compiled
def empty_trial(n_cell: int, n_lane: int) -> Trial:
    """Room for the state sought."""
    shape = (n_cell, n_lane)
    return Trial(np.empty(shape), np.empty(shape), np.empty(shape), np.empty(shape), np.empty(shape))


@compiled
def empty_work(n_cell: int, n_lane: int) -> Work:
    """Room for the linear solve."""
    shape, one_more = (n_cell, n_lane), (n_cell + 1, n_lane)
    return Work(
        np.empty(shape),
        np.empty(shape),
        np.empty(one_more),
        np.empty(one_more),
        np.empty(one_more),
        np.empty(n_lane),
        np.empty(n_lane),
        np.empty(n_lane),
        np.empty(n_lane),
        np.empty(n_lane),
        np.empty(n_lane),
        np.empty(n_lane),
        np.empty(n_lane),
        np.empty(n_lane),
        np.empty(n_lane),
    )
