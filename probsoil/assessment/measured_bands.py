"""A measured curve beside the band of what realisations predict for its readings."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.errors import ShapeError

UNITS = {"void_ratio": "-", "deviator": "kPa", "pore_pressure_change": "kPa", "volumetric_strain": "-"}
"""Unit of each quantity that is checked."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class BandCurve:
    """Readings of one quantity and the band predicted for them.

    Attributes
    ----------
    quantity : str
        Among `UNITS`.
    at : ndarray, shape (n,), [kPa or -]
        Axial stress of an oedometer, axial strain of a triaxial test, in the order of the test.
    measured : ndarray, shape (n,), [unit of the quantity]
        Readings.
    low, median, high : ndarray, shape (n,), [unit of the quantity]
        5, 50 and 95 % of the realisations, errors of reading included.
    counted : ndarray, shape (n,), [-]
        Whether a reading is held against the band: not those the element starts from.
    """

    quantity: str
    at: FloatArray
    measured: FloatArray
    low: FloatArray
    median: FloatArray
    high: FloatArray
    counted: BoolArray

    @property
    def unit(self) -> str:
        """Unit of the quantity."""
        return UNITS[self.quantity]

    @property
    def side(self) -> FloatArray:
        """Side on which a counted reading leaves the band [-], shape (n,): 1 above, -1 below, else 0."""
        side = np.where(self.measured > self.high, 1.0, np.where(self.measured < self.low, -1.0, 0.0))
        return np.where(self.counted, side, 0.0)

    @property
    def inside(self) -> BoolArray:
        """Whether a reading lies within the band, shape (n,)."""
        return np.asarray((self.measured >= self.low) & (self.measured <= self.high))

    @property
    def far(self) -> BoolArray:
        """Whether a reading lies outside by more than half the width of the band, shape (n,)."""
        beyond = np.maximum(self.measured - self.high, self.low - self.measured)
        return np.asarray(beyond > 0.5 * (self.high - self.low))

    def runs(self) -> list[tuple[int, int, float]]:
        """Stretches of the curve outside the band.

        Returns
        -------
        runs : list of tuple of int, int and float, [-]
            First and last reading, and side, of counted readings in succession on one side: two or more, or
            one that lies far outside. A single reading a little outside is one of the ten in a hundred.
        """
        found: list[tuple[int, int, float]] = []
        side, far, first = self.side, self.far, 0
        for place in range(1, side.size + 1):
            if place == side.size or side[place] != side[first]:
                if side[first] != 0.0 and (place - first > 1 or far[first]):
                    found.append((first, place - 1, float(side[first])))
                first = place
        return found

    def rows(self) -> list[dict[str, object]]:
        """Return the readings as rows of a table.

        Returns
        -------
        rows : list of dict
            Quantity, unit, place, reading, band, and whether it counts and lies within.
        """
        names = ("at", "measured", "low", "median", "high", "counted", "inside")
        columns = [getattr(self, name).tolist() for name in names]
        fixed = {"quantity": self.quantity, "unit": self.unit}
        return [fixed | dict(zip(names, row, strict=True)) for row in zip(*columns, strict=True)]


def band_curve(
    quantity: str, at: FloatArray, measured: FloatArray, predicted: FloatArray, *, counted: BoolArray
) -> BandCurve:
    """Return the band of predictions beside the readings.

    Parameters
    ----------
    quantity : str
        Among `UNITS`.
    at : ndarray, shape (n,), [kPa or -]
        Where the readings were taken.
    measured : ndarray, shape (n,), [unit of the quantity]
        Readings.
    predicted : ndarray, shape (n_sample, n), [unit of the quantity]
        Of each realisation; not a number where it has no answer.
    counted : ndarray, shape (n,), [-]
        Whether a reading is held against the band.

    Returns
    -------
    curve : BandCurve
        With 5, 50 and 95 % of the realisations that have an answer at every reading.

    Raises
    ------
    ShapeError
        If the arrays do not fit.
    """
    if not at.shape == measured.shape == counted.shape == predicted.shape[1:]:
        raise ShapeError(f"{quantity}: readings {measured.shape} and predictions {predicted.shape} differ")
    answered = predicted[np.isfinite(predicted).all(axis=1)]
    none = np.full((3, at.size), np.nan)
    low, median, high = np.quantile(answered, (0.05, 0.5, 0.95), axis=0) if len(answered) else none
    return BandCurve(
        quantity=quantity, at=at, measured=measured, low=low, median=median, high=high, counted=counted
    )
