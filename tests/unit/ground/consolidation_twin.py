"""Consolidation by the method of lines, written from the equations and slow on purpose.

Nothing of the package is used: stresses in situ, compression curve, permeability and the balance
of water are written out again for one realisation, and scipy's stiff integrator marches in time.

With a the depth before loading and w = e0 - e:

    (1/(1 + e0)) dw/dt = d/da [ (k/gw) (1 + e0)/(1 + e) du/da ],   u = s0 + u0 + added - s'
    w = kappa ln(s'/s0) up to the preconsolidation stress sp, then lambda ln(s'/sp) on top
    k = k0 10^(-w/ck)          or          k = cv gw lambda/[(1 + e) max(s', sp)]

Clay that swells below an effective stress of 0.001 kPa conducts as it does there, by agreement.
with u0 the excess pore pressure at the start, which s0 is the lower for, and a pore pressure at rest that
may rise faster with depth than that of still water.

The preconsolidation stress is brought up to the stress at the end of each of many short spans of time.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from scipy.integrate import solve_ivp

WATER, YEAR = 9.81, 365.25 * 24.0 * 3600.0
LEAST_STRESS = 1.0  # kPa, by agreement, in the first centimetres below ground level
LEAST_FOR_FLOW = 1e-3  # kPa, by agreement


@dataclass(frozen=True)
class TwinLayer:
    """Clay: `flow` is ("cv", m2/year) or ("k", m/s, ck); sand has no lam. `excess` is even over the layer."""

    thickness: float
    weight: float
    void_ratio: float = 0.0
    lam: float = 0.0
    kap: float = 0.0
    pop: float = 0.0
    flow: tuple = ("cv", 1.0)
    excess: float = 0.0


def edges_of(layers, n_cell):
    """Boundaries of cells: sine spacing within each layer, finer at its faces."""
    edges, owner, top = [0.0], [], 0.0
    for index, layer in enumerate(layers):
        inner = 0.5 * (1.0 - np.cos(np.pi * np.linspace(0.0, 1.0, n_cell + 1)))
        edges.extend(top + layer.thickness * inner[1:])
        owner.extend([index] * n_cell)
        top += layer.thickness
    return np.array(edges), np.array(owner)


class Profile:
    """One realisation as cells, with its balance of water."""

    def __init__(self, layers, *, water_table, base_drained, n_cell, base_level=None, spread=np.ones_like):
        edges, owner = edges_of(layers, n_cell)
        self.size, depth = np.diff(edges), 0.5 * (edges[1:] + edges[:-1])

        def of(value):
            return np.array([value(layer) for layer in layers])[owner]

        weight = of(lambda layer: layer.weight)
        total = np.array([(weight * np.clip(z - edges[:-1], 0.0, self.size)).sum() for z in depth])
        level = np.full(depth.size, water_table)
        if base_level is not None:  # one clay, so the level falls or rises evenly below the water table
            level += (base_level - water_table) * np.clip(
                (depth - water_table) / (edges[-1] - water_table), 0, 1
            )
        steady = np.maximum(total - WATER * np.maximum(depth - level, 0.0), LEAST_STRESS)
        self.stress0 = np.maximum(steady - of(lambda layer: layer.excess), LEAST_STRESS)
        self.underway = steady - self.stress0
        self.e0, self.pop = of(lambda layer: layer.void_ratio), of(lambda layer: layer.pop)
        self.clay = of(lambda layer: layer.lam > 0.0)
        self.lam = np.where(self.clay, of(lambda layer: layer.lam), 1.0)  # stand-ins in sand, never used
        self.kap = np.where(self.clay, of(lambda layer: layer.kap), 1.0)
        self.by_cv = of(lambda layer: layer.flow[0] == "cv")
        self.first = of(lambda layer: layer.flow[1])
        self.ck = of(lambda layer: layer.flow[2] if layer.flow[0] == "k" else 1.0)
        self.base_drained = base_drained
        self.spread = spread(depth)

    def stress(self, lost, yielding, lost_at_yield):
        """Effective stress for a void ratio lost: the compression curve read backwards."""
        slope = np.where(lost > lost_at_yield, self.lam, self.kap)
        return yielding * np.exp((lost - lost_at_yield) / slope)

    def rates(self, lost, added, yielding, lost_at_yield):
        """Rate at which each cell loses void ratio under an added pressure at the surface."""
        stress = self.stress(lost, yielding, lost_at_yield)
        excess = self.stress0 + self.underway + added * self.spread - stress
        lost = np.maximum(lost, lost_at_yield + self.kap * np.log(LEAST_FOR_FLOW / yielding))
        e = self.e0 - lost
        by_cv = self.first * WATER * self.lam / ((1.0 + e) * np.maximum(stress, yielding))
        k = np.where(self.by_cv, by_cv, self.first * YEAR * 10.0 ** (-lost / self.ck))
        half = 0.5 * self.size / (k / WATER * (1.0 + self.e0) / (1.0 + e))  # resistance, centre to face
        flow = np.zeros(self.size.size + 1)  # downward through each edge
        flow[1:-1] = (excess[:-1] - excess[1:]) / (half[:-1] + half[1:])
        flow[0] = -excess[0] / half[0]
        flow[-1] = excess[-1] / half[-1] if self.base_drained else 0.0
        out = np.diff(flow)
        # a granular layer holds no excess pressure: its edges are drained faces of the clay beside it
        above = np.flatnonzero(self.clay[:-1] & ~self.clay[1:])
        below = np.flatnonzero(~self.clay[:-1] & self.clay[1:]) + 1
        out[above] += excess[above] / half[above] - flow[above + 1]
        out[below] += excess[below] / half[below] + flow[below]
        return np.where(self.clay, out * (1.0 + self.e0) / self.size, 0.0)

    def settlement(self, lost):
        """Settlement of the clay."""
        return float((self.size / (1.0 + self.e0) * lost)[self.clay].sum())


def stops_for(knot_time, times, span_count, *, sudden=False):
    """Ends of the short spans: a kink of the load is followed by fast changes."""
    stops = {0.0, *knot_time, *times}
    if sudden:  # the ground is out of balance at the start
        stops |= set(np.geomspace(1e-5, 1.0, span_count) * knot_time[1])
    for start, end in pairwise(knot_time):
        stops |= set(start + (end - start) * np.geomspace(1e-4, 1.0, span_count))
    return np.unique(np.round([t for t in stops if t <= max(times)], 12))


def twin_settlement(layers, knots, times, *, span_count=40, filled_up=None, **ground):
    """Settlement of the clay at `times` under an added pressure given at `knots` [(time, kPa), ...].

    `ground` is passed on to `Profile`; `spread` there is the share of the pressure that reaches a depth.
    With `filled_up` (kN/m3, until) the pressure grows besides, at every moment, by that unit weight times
    the settlement of the clay so far, and from then on by what it was; no sand may settle.
    """
    profile = Profile(layers, **({"n_cell": 60} | ground))
    knot_time, knot_load = np.array(knots).T
    lost, yielding = np.zeros(profile.size.size), profile.stress0 + profile.pop
    lost_at_yield = profile.kap * np.log(yielding / profile.stress0)

    weight, until = filled_up or (0.0, -1.0)
    band = {} if filled_up else {"lband": 1, "uband": 1}  # a load that follows the settlement joins all cells
    kept = 0.0

    def rates(time, lost, yielding, lost_at_yield):
        added = np.interp(time, knot_time, knot_load)
        added += weight * (profile.settlement(lost) if end <= until else kept)
        return profile.rates(lost, added, yielding, lost_at_yield)

    answer = {0.0: 0.0}
    for start, end in pairwise(stops_for(knot_time, times, span_count, sudden=profile.underway.any())):
        march = solve_ivp(
            rates,
            (start, end),
            lost,
            method="LSODA",
            rtol=1e-6,
            atol=1e-8,
            args=(yielding, lost_at_yield),
            **band,
        )
        assert march.success
        lost = march.y[:, -1]
        further = profile.clay & (lost > lost_at_yield)
        yielding = np.where(further, profile.stress(lost, yielding, lost_at_yield), yielding)
        lost_at_yield = np.where(further, lost, lost_at_yield)
        answer[end] = profile.settlement(lost)
        kept = answer[end] if end <= until else kept
    return np.array([answer[np.round(time, 12)] for time in times])
