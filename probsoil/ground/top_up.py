"""Fill added while the ground settles, so that its level stays as designed until a stated time."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class LevelHeld:
    """What fixes how much fill a settlement asks for, as the consolidation needs it.

    Attributes
    ----------
    until : float, [years]
        Time until which the level is held; afterwards what was added stays.
    unit_weight : ndarray, shape (n_sample,), [kN/m3]
        Of the fill.
    spread : ndarray, shape (n_sample, n_cell), [-]
        Share of a change of weight at the surface that reaches each clay cell.
    granular : ndarray, shape (n_knot, n_sample), [m]
        Settlement of the granular layers at the load knots without the fill that is added.
    granular_share : ndarray, shape (n_sample,), [-]
        What the granular layers settle further under one metre of added fill, below 1.
    """

    until: float
    unit_weight: FloatArray
    spread: FloatArray
    granular: FloatArray
    granular_share: FloatArray

    @property
    def possible(self) -> BoolArray:
        """Whether a metre of fill sinks the granular layers by less than a metre, shape (n_sample,)."""
        return np.asarray(self.granular_share < 1.0)

    @property
    def gain(self) -> FloatArray:
        """Thickness added per settlement without it, shape (n_sample,), [-].

        The series 1 + g + g^2 + ... summed; 1 where no level can be held.
        """
        return np.asarray(1.0 / (1.0 - np.where(self.possible, self.granular_share, 0.0)))


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class AddedFill:
    """Fill added through time on the centreline.

    Attributes
    ----------
    unit_weight : ndarray, shape (n_sample,), [kN/m3]
        Of the fill.
    times : ndarray, shape (n_time,), [years]
        Time axis.
    thickness : ndarray, shape (n_sample, n_time), [m]
        Added since the start.
    """

    unit_weight: FloatArray
    times: FloatArray
    thickness: FloatArray

    def at(self, time: float) -> FloatArray:
        """Return the thickness added by a time.

        Parameters
        ----------
        time : float, [years]
            Time.

        Returns
        -------
        thickness : ndarray, shape (n_sample,), [m]
            Linear between the times of the axis.
        """
        after = int(np.clip(np.searchsorted(self.times, time), 1, self.times.size - 1))
        share = (time - self.times[after - 1]) / (self.times[after] - self.times[after - 1])
        before, behind = self.thickness[:, after - 1], self.thickness[:, after]
        return np.asarray((1.0 - share) * before + share * behind, dtype=np.float64)


def added_fill(held: LevelHeld, times: FloatArray, clay: FloatArray, granular: FloatArray) -> AddedFill:
    """Return the fill that holding the level took.

    Parameters
    ----------
    held : LevelHeld
        Until when, and what the granular layers do.
    times : ndarray, shape (n_time,), [years]
        Time axis, `held.until` on it.
    clay : ndarray, shape (n_sample, n_time), [m]
        Settlement of the clay.
    granular : ndarray, shape (n_sample, n_time), [m]
        Settlement of the granular layers without the fill that is added.

    Returns
    -------
    added : AddedFill
        As much as the ground has settled in all, and constant after `held.until`; none where the ground
        has risen, or where there is no number for want of convergence.
    """
    last = int(np.searchsorted(times, held.until))
    wanted = held.gain[:, None] * (clay + granular)
    thickness = np.where(wanted > 0.0, wanted, 0.0)
    thickness[:, last:] = thickness[:, last, None]
    return AddedFill(unit_weight=held.unit_weight, times=times, thickness=thickness)
