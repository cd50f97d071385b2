"""A foundation: its plan, its depth and the stress that it adds to the ground."""

from dataclasses import dataclass, field
from typing import Literal

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.load_displacement import (
    circle_displacement,
    rectangle_displacement,
    strip_displacement,
)
from probsoil.ground.load_stress import circle_influence, rectangle_influence, strip_influence
from probsoil.scenario.further_loads import FurtherCircle, FurtherRectangle, FurtherStrip
from probsoil.scenario.loads import CircleLoad, RectangleLoad, StripLoad

Contact = Literal["rough", "smooth"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Foundation:
    """Plan and depth of a foundation of uniform net pressure.

    Attributes
    ----------
    shape : {"strip", "rectangle", "circle"}
        Its plan.
    width : float, [m]
        Width of the strip, shorter side of the rectangle, or diameter.
    length : float, [m]
        Longer side of the rectangle; infinite for a strip, the diameter for a circle.
    depth : float, [m]
        Depth of the base below ground level.
    contact : {"rough", "smooth"}
        Whether the base holds the soil under it.
    at : tuple of float, [m]
        Where settlement is reported: distances from the centre along the width and the length.
    turned : bool
        Whether the rectangle was given with its longer side first, so that its width lies along the plan.
    """

    shape: Literal["strip", "rectangle", "circle"]
    width: float
    length: float
    depth: float
    contact: Contact
    at: tuple[float, float]
    turned: bool = field(default=False, compare=False)

    def influence(self, depth: FloatArray, x: float, y: float) -> FloatArray:
        """Return the vertical stress at a plan position, as a share of the net pressure.

        Parameters
        ----------
        depth : ndarray, shape (...,), [m]
            Depth below the base.
        x, y : float, [m]
            Distances from the centre along the width and along the length.

        Returns
        -------
        influence : ndarray, shape (...,), [-]
            Boussinesq half-space.
        """
        if self.shape == "strip":
            return strip_influence(depth, x, width=self.width)
        if self.shape == "rectangle":
            return rectangle_influence(depth, x, y, width=self.width, length=self.length)
        return circle_influence(depth, float(np.hypot(x, y)), diameter=self.width)

    def displacement(self, depth: FloatArray, x: float, y: float) -> FloatArray:
        """Return the vertical displacement of an incompressible half-space, times modulus over pressure.

        Parameters
        ----------
        depth : ndarray, shape (...,), [m]
            Depth below the base.
        x, y : float, [m]
            Distances from the centre along the width and along the length.

        Returns
        -------
        displacement : ndarray, shape (...,), [m]
            Below a strip up to a constant.
        """
        if self.shape == "strip":
            return strip_displacement(depth, x, width=self.width)
        if self.shape == "rectangle":
            return rectangle_displacement(depth, x, y, width=self.width, length=self.length)
        return circle_displacement(depth, float(np.hypot(x, y)), diameter=self.width)

    def spread_area(self, below: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return width and share of the pressure at a depth, spread at 2 vertical to 1 horizontal.

        Parameters
        ----------
        below : ndarray, shape (...,), [m]
            Depth below the base.

        Returns
        -------
        width : ndarray, shape (...,), [m]
            Width of the spread foundation.
        share : ndarray, shape (...,), [-]
            Its pressure over that at the base.
        """
        width = self.width + below
        share = self.width / width
        if self.shape == "rectangle":
            share = share * self.length / (self.length + below)
        return width, share * share if self.shape == "circle" else share

    @property
    def plan_point(self) -> tuple[float, float]:
        """Where settlement is reported: distances from the centre across and along the load, [m]."""
        return (self.at[1], self.at[0]) if self.turned else self.at

    @property
    def title(self) -> str:
        """Sides and depth in words."""
        plan = {
            "strip": f"{self.width:g} m wide",
            "rectangle": f"{self.width:g} m wide, {self.length:g} m long",
            "circle": f"{self.width:g} m in diameter",
        }[self.shape]
        level = f"base {self.depth:g} m below ground level" if self.depth > 0.0 else "base at ground level"
        return f"{plan}, {level}, {self.contact} contact, uniform net pressure"

    @property
    def station(self) -> str:
        """Where settlement is reported, in words."""
        middle = "centreline" if self.shape == "strip" else "centre"
        if not any(self.at):
            return middle
        if self.shape == "rectangle":
            across, along = self.at
            return f"point {across:g} m across and {along:g} m along from the centre"
        return f"point {self.at[0]:g} m from the {middle}"


def foundation_of(load: object) -> Foundation | None:
    """Return the foundation that a load is.

    Parameters
    ----------
    load : Load
        Load of a scenario.

    Returns
    -------
    foundation : Foundation or None
        None for an embankment or an area; the sides of a rectangle in order.
    """
    if not isinstance(load, StripLoad | RectangleLoad | CircleLoad):
        return None
    turned = False
    if isinstance(load, RectangleLoad):
        width, length, at = load.width, load.length, load.at
        if turned := width > length:
            width, length, at = length, width, (at[1], at[0])
    elif isinstance(load, StripLoad):
        width, length, at = load.width, float("inf"), (load.at, 0.0)
    else:
        width, length, at = load.diameter, load.diameter, (load.at, 0.0)
    return Foundation(
        shape=load.shape,
        width=width,
        length=length,
        depth=load.depth,
        contact=load.contact,
        at=at,
        turned=turned,
    )


def further_foundation(load: object) -> Foundation | None:
    """Return the foundation that a further load is.

    Parameters
    ----------
    load : FurtherLoad
        Further load of a scenario.

    Returns
    -------
    foundation : Foundation or None
        None for an embankment or an area; its width across and its length along, whichever is longer.
    """
    if isinstance(load, FurtherRectangle):
        width, length = load.width, load.length
    elif isinstance(load, FurtherStrip):
        width, length = load.width, float("inf")
    elif isinstance(load, FurtherCircle):
        width, length = load.diameter, load.diameter
    else:
        return None
    return Foundation(
        shape=load.shape, width=width, length=length, depth=load.depth, contact=load.contact, at=(0.0, 0.0)
    )
