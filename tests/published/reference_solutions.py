"""Closed forms of consolidation theory, and uniform columns of clay to set against them.

The series are written here from the theory and share nothing with the package. The columns
use the package's public kernel wrapper with plain numbers.
"""

from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq

from probsoil.ground.cells import Cells, graded_cells
from probsoil.ground.conductivity import Conductivity, conductivity_from_cv
from probsoil.ground.consolidation import ClayState, ConsolidationResult, LoadHistory, consolidate
from probsoil.ground.time_steps import time_axis

# What a test allows for space and time steps, as a share of the final value, fixed before any run:
# the program's own promise on its default grid, and a fifth of it on a grid four times finer.
DEFAULT_ALLOWANCE, FINE_ALLOWANCE = 0.005, 0.001
SUDDEN = 1e-6  # length of the ramp that stands for a sudden load, as a time factor
_ROOT = (2.0 * np.arange(400) + 1.0) * np.pi / 2.0  # exp(-M^2 T) vanishes long before at T >= 1e-4


def _decay(time_factor):
    return np.exp(-np.multiply.outer(np.asarray(time_factor, dtype=float), _ROOT**2))


def degree_uniform(time_factor):
    """Terzaghi's degree of consolidation, uniform initial excess pressure."""
    return 1.0 - (2.0 / _ROOT**2 * _decay(time_factor)).sum(axis=-1)


def degree_triangular(time_factor):
    """The same for a triangle that is zero at the drained face."""
    sign = (-1.0) ** np.arange(_ROOT.size)
    return 1.0 - (4.0 * sign / _ROOT**3 * _decay(time_factor)).sum(axis=-1)


def degree_sine(time_factor):
    """The same for a quarter of a sine wave that is zero at the drained face."""
    return 1.0 - np.exp(-(np.pi**2) / 4.0 * np.asarray(time_factor, dtype=float))


def isochrone(depth_ratio, time_factor):
    """Excess over initial pressure at a depth (share of the drainage path), uniform initially."""
    shape = np.sin(np.multiply.outer(np.asarray(depth_ratio, dtype=float), _ROOT))
    return (2.0 / _ROOT * shape * _decay(time_factor)).sum(axis=-1)


def degree_ramp(time_factor, end):
    """Degree of consolidation relative to the final load of a single ramp that ends at `end`."""
    t = np.asarray(time_factor, dtype=float)[..., None]
    during = t / end - (2.0 / (end * _ROOT**4) * -np.expm1(-(_ROOT**2) * t)).sum(axis=-1, keepdims=True)
    past = np.maximum(t - end, 0.0)
    rest = 2.0 / (end * _ROOT**4) * (np.exp(-(_ROOT**2) * past) - np.exp(-(_ROOT**2) * t))
    return np.where(t <= end, during, 1.0 - rest.sum(axis=-1, keepdims=True))[..., 0]


@dataclass(frozen=True)
class Soil:
    """Permeability (as k over the unit weight of water), compressibility mv and thickness of a layer."""

    k: float
    mv: float
    thickness: float

    @property
    def cv(self):
        return self.k / self.mv


def degree_two_layers(upper, lower, time):
    """Settlement degree of two linear layers, drained at the top only, by eigenfunctions.

    Modes are sin(s z/sqrt(cv1)) above and cos(s y/sqrt(cv2)) below (y up from the base), joined by
    equal pressure and equal flow; weights follow from orthogonality with mv as the weight function.
    """
    p, q = 1.0 / np.sqrt(upper.cv), 1.0 / np.sqrt(lower.cv)

    def closure(s):
        a, b = s * upper.thickness * p, s * lower.thickness * q
        return upper.k * p * np.cos(a) * np.cos(b) - lower.k * q * np.sin(a) * np.sin(b)

    grid = np.linspace(1e-6, 260.0 * np.pi / (upper.thickness * p + lower.thickness * q), 20001)
    value = closure(grid)
    pairs = np.flatnonzero(value[:-1] * value[1:] < 0.0)
    s = np.array([brentq(closure, grid[i], grid[i + 1], xtol=1e-14) for i in pairs])
    a, b = s * upper.thickness * p, s * lower.thickness * q
    # amplitude of the upper part, from pressure or from flow, whichever does not divide by a zero
    by_flow = lower.k * q * np.sin(b) / np.where(np.abs(np.cos(a)) > 1e-3, upper.k * p * np.cos(a), 1.0)
    by_pressure = np.cos(b) / np.where(np.abs(np.sin(a)) > 1e-3, np.sin(a), 1.0)
    amplitude = np.where(np.abs(np.sin(a)) > 0.5, by_pressure, by_flow)
    water = upper.mv * amplitude * (1.0 - np.cos(a)) / (s * p) + lower.mv * np.sin(b) / (s * q)
    norm = upper.mv * amplitude**2 * (upper.thickness / 2.0 - np.sin(2.0 * a) / (4.0 * s * p))
    norm += lower.mv * (lower.thickness / 2.0 + np.sin(2.0 * b) / (4.0 * s * q))
    total = upper.mv * upper.thickness + lower.mv * lower.thickness
    left = (water**2 / norm * np.exp(-np.multiply.outer(np.asarray(time, dtype=float), s**2))).sum(axis=-1)
    return 1.0 - left / total


@dataclass(frozen=True)
class Column:
    """Clay from ground level down that is drained at the top (and at the base if so said)."""

    cells: Cells
    state: ClayState
    depth: np.ndarray  # of the cell centres

    @property
    def n_cell(self):
        return self.cells.n_cell


def clay_column(
    thickness=(1.0,),
    *,
    stress=100.0,
    yielding=None,
    void_ratio=1.0,
    lam=(1e-4,),
    kap=None,
    grid=1,
    base=False,
):
    """One realisation of layers with the given thicknesses and slopes, all under one initial stress."""
    thickness, lam = np.asarray(thickness, dtype=float), np.asarray(lam, dtype=float)
    is_clay = np.ones(thickness.size, dtype=bool)
    cells = graded_cells(thickness, is_clay, base_drained=base, target=40 * grid)
    top = np.concatenate([[0.0], np.cumsum(thickness)])[cells.layer]
    size = cells.share * thickness[cells.layer]
    slope = lam[cells.layer][None, :]
    every = np.ones((1, cells.n_cell))
    state = ClayState(
        thickness=size[None, :],
        stress=stress * every,
        yield_stress=(stress if yielding is None else yielding) * every,
        void_ratio=void_ratio * every,
        lam=slope,
        kap=0.5 * slope if kap is None else kap * every,
    )
    return Column(cells, state, top + cells.centre * thickness[cells.layer])


def constant_cv(column, cv):
    """The law of flow with a constant cv on the virgin line (one number, or one per layer)."""
    each = np.broadcast_to(np.asarray(cv, dtype=float), (int(column.cells.layer.max()) + 1,))
    coefficient = each[column.cells.layer][None, :]
    return Conductivity(
        log_value=conductivity_from_cv(coefficient, column.state.lam, column.state.void_ratio),
        decline=np.zeros((1, column.n_cell)),
        follows=np.ones(column.n_cell),
        power=np.full(column.n_cell, 2, dtype=np.int64),
    )


def loaded(column, flow, added, *, end, wanted, grid=1) -> tuple[np.ndarray, ConsolidationResult]:
    """Settlement at the wanted times, and the stresses then, under a ramp from 0 to `end`."""
    wanted = np.unique(np.asarray(wanted, dtype=float))
    horizon = float(wanted[-1])
    final = np.broadcast_to(np.asarray(added, dtype=float), (1, column.n_cell))
    knots = sorted({0.0, end, horizon})
    stress = np.stack([min(time / end, 1.0) * final for time in knots])
    history = LoadHistory(
        time=np.array(knots),
        stress=stress,
    )
    times = time_axis([(0.0, min(end, horizon))], wanted, horizon, refine=grid)
    result = consolidate(column.state, flow, column.cells, history, times=times, record=wanted)
    assert result.converged.all()
    return result.settlement[0, np.searchsorted(times, wanted)], result


def final_settlement(column, added):
    """Settlement of normally consolidated clay once all excess pressure has gone."""
    state = column.state
    strain = state.lam / (1.0 + state.void_ratio) * np.log1p(added / state.stress)
    return float((state.thickness * strain).sum())
