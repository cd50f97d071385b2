"""Upper bounds of the bearing capacity of a strip on layered clay, written without the package.

Circles: any circle through the far edge, centre and radius by an optimiser. Discontinuity layout (C. Smith
and M. Gilbert, Proc. Roy. Soc. A 463, 2007; from memory, not opened): sliding along straight lines between
the nodes of a grid, the set of least dissipation by linear programming. Sliding of clay without friction
changes no volume, so that every result is a strict upper bound of plasticity theory. Width one, half of the
symmetric problem. A rough base and a smooth one were found to carry the same on clay of one strength.
"""

from math import gcd

import numpy as np
from scipy import sparse
from scipy.optimize import linprog, minimize


def circle_bound(edges, strengths):
    """Least over circles; slices of strength that begin at the given depths, the first at 0."""
    edges, strengths = np.append(edges, np.inf), np.asarray(strengths)

    def carried(at):
        aside, above = at
        if aside <= -0.49 or above < 0.0:
            return np.inf
        radius = np.hypot(aside + 1.0, above)
        below = np.arccos(np.minimum((above + edges) / radius, 1.0))
        return 2.0 * radius**2 * (strengths * (below[:-1] - below[1:])).sum() / (aside + 0.5)

    starts = [(a, y) for a in (-0.2, 0.1, 0.4, 0.8, 1.4) for y in (0.1, 0.4, 0.8, 1.5)]
    starts = sorted(starts, key=carried)[:4]
    return min(minimize(carried, one, method="Nelder-Mead", options={"xatol": 1e-5}).fun for one in starts)


def layout_lines(n, width, depth, longest):
    """Ends of every line between two nodes with none between them, as columns and rows of the grid."""
    columns, rows = round(width * n), round(depth * n)
    found = []
    for across in range(columns + 1):
        for down in range(-rows, rows + 1):
            if (
                gcd(across, abs(down)) != 1
                or (across == 0 and down < 0)
                or np.hypot(across, down) > longest * n
            ):
                continue
            i, j = np.meshgrid(
                np.arange(columns + 1 - across),
                np.arange(max(0, -down), rows + 1 - max(0, down)),
                indexing="ij",
            )
            found.append(np.stack([i, j, i + across, j + down], axis=-1).reshape(-1, 4))
    return np.concatenate(found), rows


def layout_bound(total, n=8, width=2.5, depth=1.5, longest=1.5):
    """Least dissipation over the velocity of a rough footing; `total` integrates strength to a depth."""
    lines, rows = layout_lines(n, width, depth, longest)
    on_top = (lines[:, 1] == 0) & (lines[:, 3] == 0)
    under = on_top & (lines[:, 0] < n // 2)
    length = np.hypot(lines[:, 2] - lines[:, 0], lines[:, 3] - lines[:, 1]) / n
    along = (lines[:, 2:] - lines[:, :2]) / (n * length[:, None])
    upper, lower = lines[:, 1] / n, lines[:, 3] / n
    tiny = 1e-7
    level = np.minimum(
        total(upper + tiny) - total(upper),
        np.where(upper > 0.0, total(upper) - total(np.maximum(upper - tiny, 0.0)), np.inf),
    )
    flat = lines[:, 1] == lines[:, 3]
    mean = np.where(flat, level / tiny, (total(lower) - total(upper)) / np.where(flat, 1.0, lower - upper))
    axis = (lines[:, 0] == 0) & (lines[:, 2] == 0)
    cost = np.where(axis | (on_top & ~under), 0.0, mean * length)
    inner, top = np.flatnonzero(~on_top), np.flatnonzero(on_top)
    first, last = (lines[:, k] * (rows + 1) + lines[:, k + 1] for k in (0, 2))
    n_node = int(max(first.max(), last.max())) + 1

    def jumps(chosen, direction):
        place = np.concatenate([2 * first, 2 * first + 1, 2 * last, 2 * last + 1]).reshape(4, -1)[:, chosen]
        value = np.stack([direction[:, 0], direction[:, 1], -direction[:, 0], -direction[:, 1]])
        column = np.tile(np.arange(chosen.size), 4)
        return sparse.csr_matrix((value.ravel(), (place.ravel(), column)), shape=(2 * n_node, chosen.size))

    slide, drag = jumps(inner, along[inner]), jumps(top, along[top])
    part = jumps(top, np.stack([-along[top, 1], along[top, 0]], axis=-1))
    equations = np.ones(2 * n_node, dtype=bool)
    equations[2 * np.arange(rows + 1) + 1] = False  # on the axis of symmetry the mirror image closes them
    free = [(0.0, None)] * (2 * inner.size + 2 * top.size)
    free += [(1.0, 1.0) if one else (None, None) for one in under[top]]
    found = linprog(
        np.concatenate([cost[inner], cost[inner], cost[top], cost[top], np.zeros(top.size)]),
        A_eq=sparse.hstack([slide, -slide, drag, -drag, part]).tocsr()[equations],
        b_eq=np.zeros(int(equations.sum())),
        bounds=free,
        method="highs-ipm",
    )
    return 2.0 * found.fun
