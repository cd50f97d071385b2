r"""Plastic flow of Modified Cam clay along a test path: one integral over the stress ratio.

On the yield ellipse the volume follows from p' and q/p' without integration. What a test path imposes
leaves one equation in the stress ratio alone, which ends at a stress ratio known beforehand (the critical
state, or that at rest). With :math:`q/p' = \eta_e - (\eta_e - \eta_0) e^{-w}` the integrand over w stays
smooth up to that end, also where its limit takes endless strain to reach.
"""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.element_flows import Flow

N_PANEL = 80
_BEFORE = 5  # panels spent on the part before the sign of q changes: a fifth of the others
_REACH = 30.0  # e^-30 of the distance is left: nothing more changes in double precision
_NODES = ((0.5 - np.sqrt(0.15), 5.0 / 18.0), (0.5, 8.0 / 18.0), (0.5 + np.sqrt(0.15), 5.0 / 18.0))
_STEPS = 14  # of a bracketed Newton iteration within a panel


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Passage:
    """A path of plastic flow, integrated.

    Attributes
    ----------
    flow : Flow
        What was integrated.
    edge : ndarray, shape (n, n_edge), [-]
        Edges of the panels in w.
    running : ndarray, shape (n, n_edge), [-]
        Running quantity at the edges, zero at first.
    driven : ndarray, shape (n, n_edge), [-]
        What the test drives at the edges.
    """

    flow: Flow
    edge: FloatArray
    running: FloatArray
    driven: FloatArray

    def reached(self, target: FloatArray) -> tuple[FloatArray, FloatArray]:
        """State once the test has been driven so far.

        Parameters
        ----------
        target : ndarray, shape (n, k), [-]
            Amounts of what the test drives, zero or more.

        Returns
        -------
        running, ratio : ndarray, shape (n, k), [-]
            Running quantity and stress ratio; where what is driven would fall back for a while, those
            past the fall. Not a number where the amount is never reached.
        """
        envelope = np.maximum.accumulate(self.driven, axis=1)
        place = np.zeros(target.shape, dtype=np.int64)
        for column in range(1, self.edge.shape[1]):
            place += envelope[:, column, None] <= target
        inside = np.minimum(place, self.edge.shape[1] - 2)
        first = (np.take_along_axis(self.edge, inside, 1), np.take_along_axis(self.running, inside, 1))
        far = np.take_along_axis(self.edge, inside + 1, 1)
        w = _solved(self.flow, first, far, target)
        running = first[1] + _increment(self.flow, first[0], w)
        beyond = place > inside
        if beyond.any():
            w, running = _continued(self, target, beyond, (w, running))
        return running, _ratio(self.flow, w)[0]

    def falls_back(self, target: FloatArray) -> BoolArray:
        """Whether what is driven falls back on the way.

        Parameters
        ----------
        target : ndarray, shape (n, k), [-]
            Amounts driven to.

        Returns
        -------
        falls : ndarray, shape (n,), [-]
            True where the clay cannot follow without a jump.
        """
        envelope = np.maximum.accumulate(self.driven, axis=1)
        dip = self.driven < envelope - 1e-12
        return np.asarray((dip & (envelope <= target.max(axis=1)[:, None])).any(axis=1))


def passage(flow: Flow, n_panel: int = N_PANEL) -> Passage:
    r"""Integrate a path of plastic flow.

    Parameters
    ----------
    flow : Flow
        What to integrate.
    n_panel : int, [-]
        Panels up to the end, narrow at first; a fifth more come before a change of the sign of q.

    Returns
    -------
    passage : Passage
        Table at the edges of panels.

    Notes
    -----
    Gauss's rule with three points in each panel: the error falls with the sixth power of the width.
    """
    start, end = flow.start, flow.end
    with np.errstate(divide="ignore", invalid="ignore"):
        turn = np.where(start * end < 0.0, np.log((end - start) / end), 0.0)[:, None]
    before = np.linspace(0.0, 1.0, n_panel // _BEFORE + 1)[:-1]
    after = _REACH * np.linspace(0.0, 1.0, n_panel + 1) ** 2
    edge = np.concatenate([turn * before, turn + after], axis=1)
    with np.errstate(all="ignore"):  # lanes without an answer carry not-a-number along
        step = _increment(flow, edge[:, :-1], edge[:, 1:])
        running = np.concatenate([np.zeros_like(turn), np.cumsum(step, axis=1)], axis=1)
        driven = flow.driven(running, _ratio(flow, edge)[0])
    return Passage(flow=flow, edge=edge, running=running, driven=driven)


def _ratio(flow: Flow, w: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Stress ratio at w, and what is left of the way to its end."""
    left = (flow.end - flow.start)[:, None] * np.exp(-w)
    return flow.end[:, None] - left, left


def _increment(flow: Flow, low: FloatArray, high: FloatArray) -> FloatArray:
    """Growth of the running quantity from one w to another, by Gauss's rule."""
    width = high - low
    total = np.zeros_like(width)
    for node, weight in _NODES:
        total = total + weight * flow.rate(*_ratio(flow, low + node * width))
    return np.asarray(width * total)


def _solved(
    flow: Flow, first: tuple[FloatArray, FloatArray], far: FloatArray, target: FloatArray
) -> FloatArray:
    """W at which the test has been driven to the target, within the panel that holds it."""
    low, high = first[0], far
    w = 0.5 * (low + high)
    with np.errstate(all="ignore"):
        for _ in range(_STEPS):
            ratio, left = _ratio(flow, w)
            excess = flow.driven(first[1] + _increment(flow, first[0], w), ratio) - target
            low, high = np.where(excess > 0.0, low, w), np.where(excess > 0.0, w, high)
            newton = w - excess / flow.driven_rate(flow.rate(ratio, left), ratio, left)
            w = np.where((newton >= low) & (newton <= high), newton, 0.5 * (low + high))
    return w


def _continued(
    table: Passage, target: FloatArray, beyond: BoolArray, within: tuple[FloatArray, FloatArray]
) -> tuple[FloatArray, FloatArray]:
    """Past the last edge the stress ratio has ended and the rest grows in proportion to w."""
    flow, last = table.flow, table.edge[:, -1:]
    ratio, left = _ratio(flow, last)
    with np.errstate(all="ignore"):
        rate = flow.rate(ratio, left)
        driven_rate = flow.driven_rate(rate, ratio, left)
        further = (target - table.driven[:, -1:]) / np.where(driven_rate > 1e-9, driven_rate, np.nan)
    w = np.where(beyond, last + further, within[0])
    return w, np.where(beyond, table.running[:, -1:] + rate * further, within[1])
