"""Cross-section of an embankment and its berms.

Coordinates: x from the outer toe towards the embankment, y upward from ground level.
"""

from dataclasses import dataclass, replace

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.amounts import Amount, beside_depths, greater, lesser, one_of
from probsoil.ground.load_stress import Trapezium


@dataclass(frozen=True, slots=True, kw_only=True)
class EmbankmentSection:
    """Cross-section of the fill at one time, symmetrical about its centre line.

    Attributes
    ----------
    height : float, [m]
        Height of fill, above zero.
    side_slope : float, [-]
        Horizontal run per unit of rise of every slope, zero or more.
    base_width : float, [m]
        Width at ground level, berms included.
    full_height : float, [m]
        Greatest height the embankment ever has; it sets where the zone under the slope ends.
    berm_width : float, [m]
        Width of the flat top of the berm on each side; 0 for none.
    berm_height : float, [m]
        Height of the berms when complete; they are never higher than the fill.
    """

    height: float
    side_slope: float
    base_width: float
    full_height: float
    berm_width: float = 0.0
    berm_height: float = 0.0

    @property
    def above_berms(self) -> bool:
        """Whether the fill stands above berms beside it."""
        return self.berm_width > 0.0 and self.height > self.berm_height

    @property
    def shoulder(self) -> float:
        """Distance from the outer toe to the near edge of the present top, [m]."""
        beside = self.berm_width if self.above_berms else 0.0
        return beside + self.side_slope * self.height

    @property
    def berm_zone(self) -> float:
        """Distance from the outer toe to where the zone under the slope begins, [m]; 0 without berms."""
        return self.berm_width + self.side_slope * self.berm_height if self.berm_width > 0.0 else 0.0

    @property
    def slope_zone(self) -> float:
        """Distance from the outer toe to where the zone under the crest begins, [m]."""
        return self.berm_width + self.side_slope * self.full_height

    @property
    def n_zone(self) -> int:
        """Number of zones of strength, [-]: beyond the toe, under slope and crest, and under berms if any."""
        return 4 if self.berm_width > 0.0 else 3

    @property
    def corners(self) -> FloatArray:
        """Corners of the near half of the surface, from the outer toe to the shoulder, (n, 2), [m]."""
        top = [self.shoulder, self.height]
        if not self.above_berms:
            return np.array([[0.0, 0.0], top])
        run = self.side_slope * self.berm_height
        berm = [[run, self.berm_height], [run + self.berm_width, self.berm_height]]
        return np.array([[0.0, 0.0], *berm, top])

    @property
    def outline(self) -> FloatArray:
        """Corners of the whole surface from toe to toe, shape (n_corner, 2), [m]."""
        near = self.corners
        far = near[::-1] * [-1.0, 1.0] + [self.base_width, 0.0]
        return np.concatenate([near, far])


@dataclass(frozen=True, slots=True, kw_only=True)
class Embankment:
    """A long embankment with or without berms, whatever its height at the time.

    Attributes
    ----------
    crest_width : float or ndarray, shape (n_sample,), [m]
        Width of the top at the greatest height.
    side_slope : float or ndarray, shape (n_sample,), [-]
        Horizontal run per unit of rise.
    full_height : float or ndarray, shape (n_sample,), [m]
        Greatest height.
    berm_width : float, [m]
        Width of the flat top of the berm on each side; 0 for none.
    berm_height : float or ndarray, shape (n_sample,), [m]
        Height of the berms when complete; they rise with the fill and are never higher than it.
    pit : float, [m]
        Depth to which the ground below its whole base is dug out and replaced by fill; heights count
        from ground level all the same.
    """

    crest_width: Amount
    side_slope: Amount
    full_height: Amount
    berm_width: float = 0.0
    berm_height: Amount = 0.0
    pit: float = 0.0

    @property
    def beside_depths(self) -> "Embankment":
        """The same with every number in the shape that goes with arrays over depth."""
        return replace(
            self,
            crest_width=beside_depths(self.crest_width),
            side_slope=beside_depths(self.side_slope),
            full_height=beside_depths(self.full_height),
            berm_height=beside_depths(self.berm_height),
        )

    @property
    def base_width(self) -> Amount:
        """Width at ground level, berms included, the same while the fill rises, [m]."""
        return self.crest_width + 2.0 * (self.side_slope * self.full_height + self.berm_width)

    @property
    def mean_width(self) -> Amount:
        """Area of the section at its greatest height over that height, with what fills the pit, [m]."""
        parts = self.trapezia(self.full_height)
        area = sum((0.5 * (part.base_width + part.top_width) * part.height for part in parts), 0.0)
        return (area + self.base_width * self.pit) / (self.full_height + self.pit)

    def section(self, height: Amount) -> EmbankmentSection:
        """Return the cross-section at a fill height.

        Parameters
        ----------
        height : float, [m]
            Height of fill.

        Returns
        -------
        section : EmbankmentSection
            For slip circles.
        """
        return EmbankmentSection(
            height=float(height),
            side_slope=float(self.side_slope),
            base_width=float(self.base_width),
            full_height=float(self.full_height),
            berm_width=self.berm_width,
            berm_height=float(self.berm_height),
        )

    def alone(self, place: int) -> "Embankment":
        """Return the embankment of one realisation.

        Parameters
        ----------
        place : int, [-]
            Which.

        Returns
        -------
        embankment : Embankment
            All plain numbers.
        """
        return replace(
            self,
            crest_width=one_of(self.crest_width, place),
            side_slope=one_of(self.side_slope, place),
            full_height=one_of(self.full_height, place),
            berm_height=one_of(self.berm_height, place),
        )

    @property
    def berm_zone(self) -> Amount:
        """Distance from the outer toe to where the zone under the slope begins, [m]; 0 without berms."""
        return self.berm_width + self.side_slope * self.berm_height if self.berm_width > 0.0 else 0.0

    @property
    def slope_zone(self) -> Amount:
        """Distance from the outer toe to where the zone under the crest begins, [m]."""
        return self.berm_width + self.side_slope * self.full_height

    def trapezia(self, height: Amount) -> tuple[Trapezium, ...]:
        """Return the trapezia that make up the section at a fill height, from the ground up.

        Parameters
        ----------
        height : float or ndarray, shape (n_sample,) or (n_sample, 1), [m]
            Height of fill, zero or more.

        Returns
        -------
        trapezia : tuple of Trapezium
            One, or the berms with the fill between them and what stands above.
        """
        bermed = self.berm_width > 0.0
        lower = lesser(height, self.berm_height) if bermed else height
        parts = [_trapezium(self.base_width, self.side_slope, lower)]
        if bermed and np.any(height > lower):
            inner = self.base_width - 2.0 * (self.berm_width + self.side_slope * lower)
            parts.append(_trapezium(inner, self.side_slope, height - lower))
        return tuple(parts)


def _trapezium(base_width: Amount, side_slope: Amount, height: Amount) -> Trapezium:
    top = greater(base_width - 2.0 * side_slope * height, 0.0)
    return Trapezium(base_width=base_width, top_width=top, height=height)
