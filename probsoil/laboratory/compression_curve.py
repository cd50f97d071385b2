"""Compression curve of an oedometer test: its branches, evenly spaced, and the slope of unloading."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.laboratory.regression import Regression, regression
from probsoil.laboratory.sheets import OedometerSheet

CURVE_SCATTER = 1e-3
"""Departure of a real curve from two straight branches, as strain [-]; a judgement."""

EVEN = float(np.log(10.0)) / 10.0
"""Distance in ln stress to which closely spaced readings are evened out [-]: ten to a tenfold stress."""

_RELOADED = 0.7  # of the largest stress known: nearer to it, reloading already bends
_CLOSE = 1.5  # times as many readings as that are evened out


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Branches:
    """Readings of a test by branch, as places in the sheet.

    Attributes
    ----------
    first : ndarray of int, shape (n,), [-]
        First loading: each beyond every stress before it.
    loops : tuple of ndarray of int, shape (n,) each, [-]
        Legs of unloading and of reloading inside loops, each in order.
    rebound : ndarray of int, shape (m,), [-]
        Last unloading, its start included; empty where there is none.
    """

    first: IntArray
    loops: tuple[IntArray, ...]
    rebound: IntArray


def expected_scatter(sheet: OedometerSheet) -> float:
    """Return the scatter of void ratios expected of a test.

    Parameters
    ----------
    sheet : OedometerSheet
        The test.

    Returns
    -------
    scatter : float, [-]
        Reading error of the sheet and departure of real curves from straight branches.
    """
    return float(np.hypot(sheet.reading_sd, CURVE_SCATTER * (1.0 + sheet.initial_void_ratio)))


def branches(stress: FloatArray) -> Branches:
    """Sort the readings of a test by branch.

    Parameters
    ----------
    stress : ndarray, shape (n,), [kPa]
        In the order tested; readings without stress belong to no branch.

    Returns
    -------
    branches : Branches
        Places in the order tested.
    """
    first: list[int] = []
    runs: list[list[int]] = []
    for place, value in enumerate(stress):
        if value <= 0.0:
            continue
        if not first or value > 1.001 * stress[first[-1]]:
            first.append(place)
            runs.append([place])
        else:
            runs[-1].append(place)
    legs = [_legs(stress, np.array(run)) for run in runs]
    loops = [leg for unloading, reloading in legs if reloading is not None for leg in (unloading, reloading)]
    last = legs[-1] if legs else (np.zeros(0, dtype=int), None)
    return Branches(
        first=np.array(first, dtype=int),
        loops=tuple(leg for leg in loops if leg.size > 1),
        rebound=last[0] if last[1] is None and last[0].size > 1 else np.zeros(0, dtype=int),
    )


def _legs(stress: FloatArray, run: IntArray) -> tuple[IntArray, IntArray | None]:
    """Split a run that starts at its largest stress into unloading and, if it turns, reloading."""
    lowest = int(np.argmin(stress[run]))
    back = run[lowest + 1 :]
    if back.size == 0:
        return run, None
    return run[: lowest + 1], back[stress[back] <= _RELOADED * stress[run[0]]]


def evened(stress: FloatArray, void_ratio: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return a branch with closely spaced readings drawn together.

    Parameters
    ----------
    stress : ndarray, shape (n,), [kPa]
        Of one branch, rising or falling.
    void_ratio : ndarray, shape (n,), [-]
        Its readings.

    Returns
    -------
    stress, void_ratio : ndarray, shape (m,), [kPa], [-]
        As given where there are at most about fifteen to a tenfold stress; else means over equal distances
        of ln stress, about ten to a tenfold. Constructions by hand are made for such spacing, and the errors
        of readings closer together are the same error.
    """
    x = np.log(stress)
    if stress.size < 3 or x[-1] == x[0] or stress.size - 1 <= _CLOSE * abs(x[-1] - x[0]) / EVEN:
        return stress, void_ratio
    n_part = max(int(np.ceil(abs(x[-1] - x[0]) / EVEN)), 1)
    part = np.minimum((np.abs(x - x[0]) / abs(x[-1] - x[0]) * n_part).astype(int), n_part - 1)
    count = np.bincount(part)
    held = count > 0
    middle, mean = (np.bincount(part, weights=one)[held] / count[held] for one in (x, void_ratio))
    return np.exp(middle), mean


def reading_place(stress: FloatArray) -> FloatArray:
    """Return where readings of a branch lie to one another for the correlation of their errors.

    Parameters
    ----------
    stress : ndarray, shape (n,), [kPa]
        Of one branch, in order.

    Returns
    -------
    place : ndarray, shape (n,), [-]
        One apart where the stress doubles or halves; no two nearer than ten readings to a tenfold stress.
    """
    steps = np.maximum(np.abs(np.diff(np.log(stress))), EVEN) / np.log(2.0)
    return np.concatenate([[0.0], np.cumsum(steps)])


def legs_slope(sheet: OedometerSheet, legs: tuple[IntArray, ...]) -> Regression:
    """Return the slope that legs of unloading and reloading share, each at its own level.

    Parameters
    ----------
    sheet : OedometerSheet
        The test.
    legs : tuple of ndarray of int, shape (n,) each, [-]
        Places of each leg, at least two in one.

    Returns
    -------
    fit : Regression
        The fall of void ratio per unit of ln stress first.
    """
    even = [evened(sheet.stress[leg], sheet.void_ratio[leg]) for leg in legs]
    owner = np.repeat(np.arange(len(even)), [stress.size for stress, _ in even])
    level = (owner[:, None] == np.arange(len(even))[None, :]).astype(np.float64)
    place, start = [], 0.0
    for stress, _ in even:
        place.append(start + reading_place(stress))
        start = place[-1][-1] + 1.0
    design = np.column_stack([-np.log(np.concatenate([stress for stress, _ in even])), level])
    read = np.concatenate([void_ratio for _, void_ratio in even])
    return regression(design, read, expected_scatter(sheet), place=np.concatenate(place))
