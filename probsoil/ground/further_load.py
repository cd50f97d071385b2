"""Vertical stress of any load at any point of the plan, and further loads beside the one assessed.

Plan positions are measured from the centre of the load that is assessed: x across (along the width of a
foundation), y along.
"""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.amounts import Amount, beside_depths, greater
from probsoil.ground.embankment import Embankment
from probsoil.ground.foundation import Foundation
from probsoil.ground.load_stress import trapezia_influence

_GAUSS_POINTS = 6


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Places:
    """Depths at which stress is looked at.

    Attributes
    ----------
    depth, half : ndarray, shape (n_sample, n_point), [m]
        Depths, and half the thickness that each stands for.
    thick : ndarray of bool or None, shape (n_point,), [-]
        Points that stand for so much (a quarter of a granular layer) that the stress of a foundation is
        averaged over it; None for none.
    """

    depth: FloatArray
    half: FloatArray
    thick: BoolArray | None = None


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class FurtherLoadForm:
    """A further load: its shape and place.

    Attributes
    ----------
    name, address : str
        Its name, and the first part of its addresses.
    embankment : Embankment or None
        None for any other load.
    foundation : Foundation or None
        Strip, rectangle or circle; None for an embankment or a wide area.
    x, y : float, [m]
        Its centre.
    """

    name: str
    address: str
    embankment: Embankment | None
    foundation: Foundation | None
    x: float
    y: float

    def fill_influence(self, places: Places, point: tuple[float, float], height: Amount) -> FloatArray:
        """Return the stress per unit weight of fill at a height of fill.

        Parameters
        ----------
        places : Places
            Depths.
        point : tuple of float, [m]
            Plan position x, y.
        height : float or ndarray, shape (n_sample,), [m]
            Height of fill.

        Returns
        -------
        influence : ndarray, shape (n_sample, n_point), [m]
            Of a foundation or an area the height times the influence of its pressure.
        """
        height = beside_depths(height)
        if self.embankment is None:
            return np.asarray(height * self.pressure_influence(places, point))
        trapezia = self.embankment.beside_depths.trapezia(greater(height, 0.0))
        return trapezia_influence(places.depth, point[0] - self.x, trapezia)

    def pressure_influence(self, places: Places, point: tuple[float, float]) -> FloatArray:
        """Return the stress as a share of the pressure, of an embankment that of its greatest height.

        Parameters
        ----------
        places : Places
            Depths.
        point : tuple of float, [m]
            Plan position x, y.

        Returns
        -------
        influence : ndarray, shape (n_sample, n_point), [-]
            Boussinesq half-space; 1 below a wide area.
        """
        if self.embankment is not None:
            full = self.embankment.full_height
            return np.asarray(self.fill_influence(places, point, full) / beside_depths(full))
        if self.foundation is None:
            return np.ones_like(places.depth)
        return foundation_influence(self.foundation, places, point[0] - self.x, point[1] - self.y)


def foundation_influence(shape: Foundation, places: Places, x: Amount, y: Amount) -> FloatArray:
    """Return the stress below a point of the plan as a share of the pressure of a foundation.

    Parameters
    ----------
    shape : Foundation
        Plan and depth.
    places : Places
        Depths.
    x, y : float or ndarray, shape (n_sample,), [m]
        Distances of the point from the centre along `width` and `length`.

    Returns
    -------
    influence : ndarray, shape (n_sample, n_point), [-]
        None above the base; where the base cuts through a thickness, the part below it counts.
    """
    depth, half, thick = places.depth, places.half, places.thick
    shape, x, y = shape.beside_depths, beside_depths(x), beside_depths(y)
    loaded, below = below_base(places, shape.depth)
    found = np.asarray(loaded * shape.influence(below, x, y))
    if thick is not None and thick.any():
        found[:, thick] = _mean_influence(shape, depth[:, thick], half[:, thick], (x, y))
    return found


def below_base(places: Places, base: Amount) -> tuple[FloatArray, FloatArray]:
    """Return what lies below a base.

    Parameters
    ----------
    places : Places
        Depths.
    base : float or ndarray, shape (n_sample,), [m]
        Depth of the base.

    Returns
    -------
    loaded : ndarray, shape (n_sample, n_point), [-]
        Share of each thickness that lies below it.
    below : ndarray, shape (n_sample, n_point), [m]
        Depth of the middle of that share below the base.
    """
    depth, half, base = places.depth, places.half, beside_depths(base)
    top, bottom = np.maximum(depth - half, base), np.maximum(depth + half, base)
    return 1.0 - share_above(base, depth, half), np.asarray(0.5 * (top + bottom) - base)


def _mean_influence(
    shape: Foundation, depth: FloatArray, half: FloatArray, point: tuple[Amount, Amount]
) -> FloatArray:
    """Return the influence averaged over a thickness (Gauss and Legendre)."""
    top, bottom = np.maximum(depth - half, shape.depth), np.maximum(depth + half, shape.depth)
    middle, reach = 0.5 * (top + bottom) - shape.depth, 0.5 * (bottom - top)
    place, weight = np.polynomial.legendre.leggauss(_GAUSS_POINTS)
    mean = np.zeros_like(depth)
    for one, part in zip(place, weight, strict=True):
        mean += 0.5 * part * shape.influence(middle + one * reach, *point)
    return np.asarray(mean * reach / half)


def share_above(base: Amount, depth: FloatArray, half: FloatArray) -> FloatArray:
    """Return the share of a thickness that lies above a level.

    Parameters
    ----------
    base : float or ndarray, shape (n_sample,), [m]
        Depth of the level.
    depth, half : ndarray, shape (n_sample, n_point), [m]
        Depth of the middle, and half the thickness.

    Returns
    -------
    share : ndarray, shape (n_sample, n_point), [-]
        From 0 below the level to 1 above it.
    """
    whole = np.where(half > 0.0, 2.0 * half, 1.0)
    base = beside_depths(base)
    within = np.clip((base - depth + half) / whole, 0.0, 1.0)
    return np.asarray(np.where(half > 0.0, within, depth < base), dtype=np.float64)
