"""What drives slip circles: the moment of the fill inside them and of the traffic on it.

Coordinates: x from the outer toe towards the embankment, y upward from ground level.
"""

from collections.abc import Sequence
from dataclasses import dataclass, fields
from itertools import pairwise

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.ground.embankment import EmbankmentSection
from probsoil.ground.slip_grid import Arcs

LEAST_DRIVING = 1e-9
"""Moment per unit weight of fill below which a circle turns over no fill, [m3]."""


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Circles(Arcs):
    """Circles and what drives them.

    Attributes
    ----------
    driving : ndarray, shape (n_circle,), [m3]
        Overturning moment per metre run and unit weight of fill.
    traffic : ndarray, shape (n_circle,), [m2]
        Overturning moment per metre run and kPa of pressure on the top.
    loaded_x : ndarray, shape (n_circle,), [m]
        Where traffic on the top that drives begins; where the circle enters if none does.
    """

    driving: FloatArray
    traffic: FloatArray
    loaded_x: FloatArray

    def __len__(self) -> int:
        return int(self.radius.size)

    def __getitem__(self, which: slice | BoolArray | IntArray) -> "Circles":
        return Circles(**{one.name: getattr(self, one.name)[which] for one in fields(Circles)})


def driven(section: EmbankmentSection, groups: Sequence[Arcs]) -> Circles:
    """Join arcs and add what drives them.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    groups : sequence of Arcs
        Circles through that section.

    Returns
    -------
    circles : Circles
        One group after the other; those that turn over no fill are left out.
    """
    circles = with_moments(section, groups)
    return circles[circles.driving > LEAST_DRIVING]


def with_moments(section: EmbankmentSection, groups: Sequence[Arcs]) -> Circles:
    """Join arcs and add what drives them, if anything.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    groups : sequence of Arcs
        Circles through that section.

    Returns
    -------
    circles : Circles
        One group after the other.
    """
    names = [one.name for one in fields(Arcs)]
    arcs = {name: np.concatenate([getattr(group, name) for group in groups]) for name in names}
    loaded, traffic = _traffic(section, Arcs(**arcs))
    driving = _fill_moment(section, Arcs(**arcs))
    return Circles(**arcs, driving=driving, traffic=traffic, loaded_x=loaded)


def _fill_moment(section: EmbankmentSection, arcs: Arcs) -> FloatArray:
    """Return the moment of the fill inside each circle about its centre per unit weight, [m3]."""
    first, last = np.maximum(arcs.exit_x, 0.0) - arcs.centre_x, arcs.entry_x - arcs.centre_x
    moment = np.zeros(first.size)
    for (x, y), (next_x, next_y) in pairwise(section.outline.tolist()):
        if next_x > x:
            rise = (next_y - y) / (next_x - x)
            a, b = (np.clip(end, x - arcs.centre_x, next_x - arcs.centre_x) for end in (first, last))
            level = y + rise * (arcs.centre_x - x)  # of this side of the surface, continued to the centre
            moment += level * (b * b - a * a) / 2.0 + rise * (b**3 - a**3) / 3.0
    ground = np.sqrt(np.maximum(arcs.radius**2 - arcs.centre_y**2, 0.0))  # the arc lies in the ground between
    left, right = np.maximum(np.minimum(-ground, last), first), np.minimum(np.maximum(ground, first), last)
    below = (
        _arc_moment(arcs, last)
        - _arc_moment(arcs, right)
        + _arc_moment(arcs, left)
        - _arc_moment(arcs, first)
    )
    return np.asarray(moment - below)


def _arc_moment(arcs: Arcs, u: FloatArray) -> FloatArray:
    """Return the integral of the arc's level times the distance u from the centre, up to u."""
    return np.asarray(arcs.centre_y * u * u / 2.0 + np.maximum(arcs.radius**2 - u * u, 0.0) ** 1.5 / 3.0)


def _traffic(section: EmbankmentSection, arcs: Arcs) -> tuple[FloatArray, FloatArray]:
    """Return where traffic on the top begins to drive, and its moment per kPa."""
    on_top = arcs.entry_y >= section.height
    first = np.minimum(np.maximum(section.shoulder, arcs.centre_x), arcs.entry_x)
    first = np.where(on_top, first, arcs.entry_x)
    arms = (arcs.entry_x - arcs.centre_x) ** 2 - (first - arcs.centre_x) ** 2
    return first, np.asarray(0.5 * arms)
