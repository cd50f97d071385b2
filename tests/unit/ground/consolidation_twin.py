"""Consolidation by the method of lines, written from the equations and slow on purpose.

Nothing of the package is used: stresses in situ, compression curve, permeability and the balance
of water are written out again for one realisation, and scipy's stiff integrator marches in time.

With a the depth before loading and w = e0 - e:

    (1/(1 + e0)) dw/dt = d/da [ (k/gw) (1 + e0)/(1 + e) du/da ],   u = s0 + added - s'
    w = kappa ln(s'/s0) up to the preconsolidation stress sp, then lambda ln(s'/sp) on top
    k = k0 10^(-w/ck)          or          k = cv gw lambda/[(1 + e) max(s', sp)]

The preconsolidation stress is brought up to the stress at the end of each of many short spans of time.
"""

from dataclasses import dataclass

import numpy as np
from scipy.integrate import solve_ivp

WATER, YEAR = 9.81, 365.25 * 24.0 * 3600.0


@dataclass(frozen=True)
class TwinLayer:
    """Clay: `flow` is ("cv", m2/year) or ("k", m/s, ck); sand has no lam."""

    thickness: float
    weight: float
    void_ratio: float = 0.0
    lam: float = 0.0
    kap: float = 0.0
    pop: float = 0.0
    flow: tuple = ("cv", 1.0)


def edges_of(layers, n_cell):
    """Boundaries of cells: sine spacing within each layer, finer at its faces."""
    edges, owner, top = [0.0], [], 0.0
    for index, layer in enumerate(layers):
        inner = 0.5 * (1.0 - np.cos(np.pi * np.linspace(0.0, 1.0, n_cell + 1)))
        edges.extend(top + layer.thickness * inner[1:])
        owner.extend([index] * n_cell)
        top += layer.thickness
    return np.array(edges), np.array(owner)


def twin_settlement(layers, knots, times, *, water_table, base_drained, n_cell=60, span_count=40):
    """Settlement of the clay at `times` under an added pressure given at `knots` [(time, kPa), ...]."""
    edges, owner = edges_of(layers, n_cell)
    size, depth = np.diff(edges), 0.5 * (edges[1:] + edges[:-1])

    def of(name):
        return np.array([getattr(layer, name) for layer in layers])[owner]

    weight, e0, lam, kap, pop = (of(name) for name in ("weight", "void_ratio", "lam", "kap", "pop"))
    total = np.array([(weight * np.clip(z - edges[:-1], 0.0, size)).sum() for z in depth])
    stress0 = total - WATER * np.maximum(depth - water_table, 0.0)
    clay = lam > 0.0
    by_cv = np.array([layer.flow[0] == "cv" for layer in layers])[owner]
    first = np.array([layer.flow[1] for layer in layers])[owner]
    ck = np.array([layer.flow[2] if layer.flow[0] == "k" else 1.0 for layer in layers])[owner]
    knot_time, knot_load = np.array(knots).T
    safe = np.where(clay, lam, 1.0), np.where(clay, kap, 1.0)

    def stress_of(lost, yielding, lost_at_yield):
        slope = np.where(lost > lost_at_yield, safe[0], safe[1])
        return yielding * np.exp((lost - lost_at_yield) / slope)

    def rates(time, lost, yielding, lost_at_yield):
        stress = stress_of(lost, yielding, lost_at_yield)
        excess = stress0 + np.interp(time, knot_time, knot_load) - stress
        e = e0 - lost
        k = np.where(
            by_cv,
            first * WATER * safe[0] / ((1.0 + e) * np.maximum(stress, yielding)),
            first * YEAR * 10.0 ** (-lost / ck),
        )
        half = 0.5 * size / (k / WATER * (1.0 + e0) / (1.0 + e))  # resistance from the centre to a face
        flow = np.zeros(size.size + 1)  # downward through each edge
        flow[1:-1] = (excess[:-1] - excess[1:]) / (half[:-1] + half[1:])
        flow[0] = -excess[0] / half[0]
        flow[-1] = excess[-1] / half[-1] if base_drained else 0.0
        # a granular layer holds no excess pressure: its edges are drained faces of the clay beside it
        drains_below = np.flatnonzero(clay[:-1] & ~clay[1:])
        drains_above = np.flatnonzero(~clay[:-1] & clay[1:])
        out = np.diff(flow)
        out[drains_below] += excess[drains_below] / half[drains_below] - flow[drains_below + 1]
        out[drains_above + 1] += excess[drains_above + 1] / half[drains_above + 1] + flow[drains_above + 1]
        return np.where(clay, out * (1.0 + e0) / size, 0.0)

    lost, yielding = np.zeros(size.size), stress0 + pop
    lost_at_yield = kap * np.log(yielding / stress0)
    stops = {0.0, *knot_time, *times}
    for start, end in zip(knot_time[:-1], knot_time[1:], strict=True):
        # a kink of the load is followed by fast changes
        stops |= set(start + (end - start) * np.geomspace(1e-4, 1.0, span_count))
    stops = np.unique(np.round([t for t in stops if t <= max(times)], 12))
    answer = {0.0: 0.0}
    for start, end in zip(stops[:-1], stops[1:], strict=True):
        march = solve_ivp(
            rates,
            (start, end),
            lost,
            method="LSODA",
            rtol=1e-6,
            atol=1e-8,
            args=(yielding, lost_at_yield),
            lband=1,
            uband=1,
        )
        assert march.success
        lost = march.y[:, -1]
        stress = stress_of(lost, yielding, lost_at_yield)
        further = clay & (lost > lost_at_yield)
        yielding = np.where(further, stress, yielding)
        lost_at_yield = np.where(further, lost, lost_at_yield)
        answer[end] = float((size / (1.0 + e0) * lost)[clay].sum())
    return np.array([answer[np.round(time, 12)] for time in times])
