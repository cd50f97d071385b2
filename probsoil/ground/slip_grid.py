"""Where slip circles leave, enter and reach: geometry of the candidates, without any strength.

Coordinates: x from the outer toe towards the embankment, y upward from ground level.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from probsoil._typing import BoolArray, FloatArray, IntArray
from probsoil.ground.embankment import EmbankmentSection

_GROUND_EXITS, _FACE_EXITS, _BERM_POINTS = 24, 16, 10
_ENTRIES, _DEPTHS, _BENDS = 24, 48, 16
_REACH_IN_FILL = 2.5  # heights behind the shoulder; a circle in the fill enters nearer
_CLEAR = 1.0 - 1e-9  # a circle in the fill stays this little above ground level, clear of rounding


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Arcs:
    """Circles, each with the arc that lies in the ground and the fill.

    Attributes
    ----------
    centre_x, centre_y, radius : ndarray, shape (n_circle,), [m]
        Geometry.
    exit_x, exit_y : ndarray, shape (n_circle,), [m]
        Where the circle leaves, at its outer end.
    entry_x, entry_y : ndarray, shape (n_circle,), [m]
        Where it enters, at its upper end.
    """

    centre_x: FloatArray
    centre_y: FloatArray
    radius: FloatArray
    exit_x: FloatArray
    exit_y: FloatArray
    entry_x: FloatArray
    entry_y: FloatArray

    @property
    def touch(self) -> FloatArray:
        """Depth of the lowest point of the arc, negative above ground level, shape (n_circle,), [m]."""
        steep = self.centre_x < self.exit_x  # then the arc only rises
        return np.asarray(np.where(steep, -self.exit_y, self.radius - self.centre_y))


def ground_touches(depth: float, density: float, shallowest: float) -> FloatArray:
    """Return the depths that circles through the ground touch.

    Parameters
    ----------
    depth : float, [m]
        Greatest.
    density : float, [-]
        1 for campaigns, higher for checks.
    shallowest : float, [m]
        Least.

    Returns
    -------
    touch : ndarray, shape (n_touch,), [m]
        Rising, denser near the surface.
    """
    share = np.linspace(0.0, 1.0, round(_DEPTHS * density)) ** 1.5
    return np.asarray(shallowest + (depth - shallowest) * share)


def arcs_through_ground(
    section: EmbankmentSection, touch: FloatArray, *, reach: float, density: float
) -> Arcs:
    """Return circles that touch given depths below ground level.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    touch : ndarray, shape (n_touch,), [m]
        Depths, above zero.
    reach : float, [m]
        How far beyond the toe they leave, and how far behind the shoulder they enter, at most.
    density : float, [-]
        1 for campaigns, higher for checks.

    Returns
    -------
    arcs : Arcs
        Exits on the ground beyond the toe, at the toe, on the slopes and on the berm; entries on
        the top, up to the far shoulder, and on the berm.
    """
    leave, enter, depth = _mesh(_exits(section, reach, density), _entries(section, reach, density), touch)
    centre, radius = _touching(leave, enter, depth)
    return _sound_arcs(section, leave, enter, np.stack([centre, radius - depth], axis=1), radius)[0]


def arcs_beside(
    section: EmbankmentSection, arcs: Arcs, moves: FloatArray, step: FloatArray, greatest: float
) -> Arcs:
    """Return circles a little beside given ones.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    arcs : Arcs
        Circles through the ground.
    moves : ndarray, shape (n_move, 3), [-]
        Steps to take in where a circle leaves, where it enters and how deep it touches.
    step : ndarray, shape (3, n_circle), [m]
        Length of a step: along the surface (run and rise together) for the ends, in depth.
    greatest : float, [m]
        Depth that is not to be passed.

    Returns
    -------
    arcs : Arcs
        Up to `n_move` for each circle. Entries stay on the top or the berm they were on.
    """
    moved = moves[:, :, None] * step
    leave = surface_point(section, (arcs.exit_x + arcs.exit_y + moved[:, 0]).ravel())
    enter = surface_point(section, (arcs.entry_x + arcs.entry_y + moved[:, 1]).ravel())
    touch = (arcs.touch + moved[:, 2]).ravel()
    kept = (touch > 0.0) & (touch <= greatest * (1.0 + 1e-12)) & (leave < enter).all(axis=1)
    kept &= enter[:, 1] == np.tile(arcs.entry_y, len(moves))
    leave, enter, touch = leave[kept], enter[kept], touch[kept]
    centre, radius = _touching(leave, enter, touch)
    return _sound_arcs(section, leave, enter, np.stack([centre, radius - touch], axis=1), radius)[0]


def arcs_touching(
    section: EmbankmentSection, leave: FloatArray, enter: FloatArray, touch: FloatArray
) -> tuple[Arcs, IntArray]:
    """Return the circles through pairs of points that touch given depths.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    leave, enter : ndarray, shape (n_circle, 2), [m]
        Where they leave and enter.
    touch : ndarray, shape (n_circle,), [m]
        Depths, above zero.

    Returns
    -------
    arcs : Arcs
        Those that there are: they enter higher and further in than they leave, and do not come out between.
    number : ndarray of int, shape (n_arc,), [-]
        Which of the given circles they are.
    """
    number = np.flatnonzero((leave < enter).all(axis=1))
    leave, enter, touch = leave[number], enter[number], touch[number]
    across, radius = _touching(leave, enter, touch)
    centre = np.stack([across, radius - touch], axis=1)
    arcs, sound = _sound_arcs(section, leave, enter, centre, radius)
    return arcs, number[sound]


def surface_point(section: EmbankmentSection, way: FloatArray) -> FloatArray:
    """Return points on the near surface, from the ground beyond the toe to the far shoulder.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    way : ndarray, shape (n,), [m]
        Run and rise together from the toe, below zero beyond it: x + y, which tells points of a
        vertical slope apart too.

    Returns
    -------
    point : ndarray, shape (n, 2), [m]
        x and y.
    """
    far_shoulder = [section.base_width - section.shoulder, section.height]
    beyond = min(float(way.min(initial=0.0)), 0.0) - 1.0
    knots = np.concatenate([[[beyond, 0.0]], section.corners, [far_shoulder]])
    at = knots.sum(axis=1)
    return np.stack([np.interp(way, at, knots[:, 0]), np.interp(way, at, knots[:, 1])], axis=1)


def end_steps(section: EmbankmentSection, arcs: Arcs, reach: float) -> FloatArray:
    """Return how far apart candidates leave and enter near the ends of given circles.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    arcs : Arcs
        Circles.
    reach : float, [m]
        How far beyond the toe and behind the shoulder candidates go.

    Returns
    -------
    step : ndarray, shape (2, n_circle), [m]
        Run and rise together, for where they leave and where they enter, at a density of 1.
    """
    exits = np.unique(_exits(section, reach, 1.0).sum(axis=1))
    entries = np.unique(_entries(section, reach, 1.0).sum(axis=1))
    return np.stack(
        [
            np.interp(arcs.exit_x + arcs.exit_y, exits, np.gradient(exits)),
            np.interp(arcs.entry_x + arcs.entry_y, entries, np.gradient(entries)),
        ]
    )


def arcs_within_fill(section: EmbankmentSection, *, shallowest: float, density: float) -> Arcs:
    """Return circles that lie wholly in the fill.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    shallowest : float, [m]
        How deep they pass below the shoulder behind which they enter, at least.
    density : float, [-]
        1 for campaigns, higher for checks.

    Returns
    -------
    arcs : Arcs
        From nearly straight to those that touch ground level or enter vertically.
    """
    bend = np.linspace(0.0, 1.0, round(_BENDS * density) + 1)[1:]
    reach = _REACH_IN_FILL * section.height
    leave, enter, share = _mesh(_exits_on_fill(section, density), _entries(section, reach, density), bend)
    return arcs_bent(section, leave, enter, share, shallowest=shallowest)[0]


def arcs_bent(
    section: EmbankmentSection, leave: FloatArray, enter: FloatArray, share: FloatArray, *, shallowest: float
) -> tuple[Arcs, IntArray]:
    """Return circles in the fill through pairs of points.

    Parameters
    ----------
    section : EmbankmentSection
        Fill.
    leave, enter : ndarray, shape (n_circle, 2), [m]
        Where they leave and enter, entries higher and further in.
    share : ndarray, shape (n_circle,), [-]
        Bend, as a share of the greatest there is: of a circle that touches ground level or enters vertically.
    shallowest : float, [m]
        How deep they pass below the shoulder behind which they enter, at least.

    Returns
    -------
    arcs : Arcs
        Those that there are.
    number : ndarray of int, shape (n_arc,), [-]
        Which of the given circles they are.
    """
    half = share * _greatest_half_angle(leave, enter)
    run, rise = (enter - leave).T
    incline, chord = np.arctan2(rise, run), np.hypot(run, rise)
    radius = chord / (2.0 * np.sin(half))
    start = incline - half
    centre = leave + radius[:, None] * np.stack([-np.sin(start), np.cos(start)], axis=1)
    shoulder = np.where(enter[:, 1] < section.height, section.corners[1, 0], section.shoulder)
    lowest = centre[:, 1] - np.sqrt(np.maximum(radius**2 - (shoulder - centre[:, 0]) ** 2, 0.0))
    deep = (enter[:, 1] - lowest >= shallowest) & (leave[:, 0] <= shoulder)
    number = np.flatnonzero(deep)
    arcs, sound = _sound_arcs(section, *(part[number] for part in (leave, enter, centre, radius)))
    return arcs, number[sound]


def bend_of(arcs: Arcs) -> FloatArray:
    """Return the bend of circles in the fill.

    Parameters
    ----------
    arcs : Arcs
        Circles.

    Returns
    -------
    share : ndarray, shape (n_circle,), [-]
        As `arcs_bent` takes it.
    """
    leave = np.stack([arcs.exit_x, arcs.exit_y], axis=1)
    enter = np.stack([arcs.entry_x, arcs.entry_y], axis=1)
    chord = np.hypot(*(enter - leave).T)
    return np.asarray(np.arcsin(chord / (2.0 * arcs.radius)) / _greatest_half_angle(leave, enter))


def _greatest_half_angle(leave: FloatArray, enter: FloatArray) -> FloatArray:
    """Return half the angle of the arc that touches ground level or enters vertically."""
    run, rise = (enter - leave).T
    on_ground = _half_angle_on_ground(leave, enter, np.hypot(run, rise))
    return np.asarray(np.minimum(on_ground, 0.5 * np.pi - np.arctan2(rise, run)))


def _half_angle_on_ground(leave: FloatArray, enter: FloatArray, chord: FloatArray) -> FloatArray:
    """Return half the angle of the arc through two points that touches ground level; infinite if none."""
    at_toe = leave[:, 1] <= 0.0
    raised = leave + np.stack([np.zeros(len(leave)), np.where(at_toe, 1.0, 0.0)], axis=1)
    _, radius = _touching(raised, enter, np.zeros(len(leave)))
    with np.errstate(invalid="ignore"):
        touching = np.where(radius >= enter[:, 1], np.arcsin(chord / (2.0 * radius)), np.inf)
    tangent = np.arctan2(enter[:, 1] - leave[:, 1], enter[:, 0] - leave[:, 0])  # level where it leaves
    return np.asarray(_CLEAR * np.where(at_toe, tangent, touching))


def _exits(section: EmbankmentSection, reach: float, density: float) -> FloatArray:
    """Return points on the ground beyond the toe, denser near it, and on the fill, shape (n, 2), [m]."""
    far = -reach * np.linspace(0.0, 1.0, round(_GROUND_EXITS * density) + 1)[1:] ** 2
    return np.concatenate([np.stack([far, np.zeros_like(far)], axis=1), _exits_on_fill(section, density)])


def _exits_on_fill(section: EmbankmentSection, density: float) -> FloatArray:
    """Return points on the near surface short of the shoulder, denser at the ends of a slope, (n, 2)."""
    corners = section.corners
    parts = []
    for first, last in pairwise(corners):
        flat = last[1] <= first[1]
        count = round((_BERM_POINTS if flat else _FACE_EXITS) * density)
        share = np.linspace(0.0, 1.0, count + 1)[:-1, None]
        share = share if flat else 0.5 - 0.5 * np.cos(np.pi * share)
        parts.append(first + share * (last - first))
    return np.concatenate(parts)


def _entries(section: EmbankmentSection, reach: float, density: float) -> FloatArray:
    """Return points on the top, denser near the shoulder, and on the berm, shape (n, 2), [m]."""
    shoulder = section.shoulder
    run = min(section.base_width - 2.0 * shoulder, reach)
    x = shoulder + run * np.linspace(0.0, 1.0, round(_ENTRIES * density) + 1)[1:] ** 1.5
    top = np.stack([x, np.full_like(x, section.height)], axis=1)
    if not section.above_berms:
        return top
    first, last = section.corners[1:3]
    berm = first + np.linspace(0.0, 1.0, round(_BERM_POINTS * density) + 1)[1:, None] * (last - first)
    return np.concatenate([berm, top])


def _mesh(
    leave: FloatArray, enter: FloatArray, third: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return every combination of exits and entries, entries higher and further in, and a third number."""
    i, j, k = (index.ravel() for index in np.indices((len(leave), len(enter), len(third))))
    rising = (leave[i] < enter[j]).all(axis=1)
    return leave[i[rising]], enter[j[rising]], third[k[rising]]


def _touching(leave: FloatArray, enter: FloatArray, touch: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return centre x and radius of the circles through two points whose lowest point is `touch` deep.

    With heights a and b of the points above the lowest and the centre at c, ``(c - leave)^2 = 2 R a - a^2``
    and ``(enter - c)^2 = 2 R b - b^2``; eliminating R leaves a quadratic in c. It is not a number where
    no circle is lowest between the points.
    """
    out, back = leave[:, 0], enter[:, 0]
    a, b = leave[:, 1] + touch, enter[:, 1] + touch
    ratio = b / a
    # (back - c)^2 = ratio * (c - out)^2 + rest
    rest = a * b - b * b
    p = ratio - 1.0
    q = -2.0 * ratio * out + 2.0 * back
    r = ratio * out * out + rest - back * back
    with np.errstate(invalid="ignore"):
        centre = (-q + np.sqrt(q * q - 4.0 * p * r)) / (2.0 * p)
        centre = np.where((centre > out) & (centre < back), centre, np.nan)
    return centre, ((centre - out) ** 2 + a * a) / (2.0 * a)


def _sound_arcs(
    section: EmbankmentSection, leave: FloatArray, enter: FloatArray, centre: FloatArray, radius: FloatArray
) -> tuple[Arcs, IntArray]:
    """Keep circles whose upper end does not overhang and that do not come out on the way; say which."""
    with np.errstate(invalid="ignore"):
        good = (
            np.isfinite(radius) & (centre[:, 1] >= enter[:, 1]) & ~_comes_out(section, leave, enter, centre)
        )
    arcs = Arcs(
        centre_x=centre[good, 0],
        centre_y=centre[good, 1],
        radius=radius[good],
        exit_x=leave[good, 0],
        exit_y=leave[good, 1],
        entry_x=enter[good, 0],
        entry_y=enter[good, 1],
    )
    return arcs, np.flatnonzero(good)


def _comes_out(
    section: EmbankmentSection, leave: FloatArray, enter: FloatArray, centre: FloatArray
) -> BoolArray:
    """Return whether an arc passes above a corner that points inward: the toe or the back of the berm."""
    inward = section.corners[0:3:2] if section.above_berms else section.corners[:1]
    square = ((leave - centre) ** 2).sum(axis=1)
    found = np.zeros(len(leave), dtype=bool)
    for x, y in inward:
        spans = (leave[:, 0] < x) & (enter[:, 0] > x)
        drop = np.sqrt(np.maximum(square - (x - centre[:, 0]) ** 2, 0.0))
        found |= spans & (centre[:, 1] - drop > y)
    return found
