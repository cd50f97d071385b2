"""Where stations are, and which of them are compared."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations, pairwise

import numpy as np

from probsoil.scenario.stations import NEIGHBOURS, Station, along_line

Pairs = tuple[tuple[int, int], ...]


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class StationLayout:
    """Where the stations are.

    Attributes
    ----------
    names : tuple of str
        In the order given; the first is the one of reference.
    positions : tuple of (float, float), [m]
        Across and along, from the centreline or centre of the load.
    """

    names: tuple[str, ...]
    positions: tuple[tuple[float, float], ...]

    @property
    def order(self) -> list[int] | None:
        """Stations along the straight line they lie on, [-]; None where they lie on none."""
        return along_line(self.positions)

    def distance(self, first: int, second: int) -> float:
        """Return the distance in plan between two stations.

        Parameters
        ----------
        first, second : int, [-]
            Stations in the order given.

        Returns
        -------
        distance : float, [m]
            Above zero.
        """
        (x, y), (other_x, other_y) = self.positions[first], self.positions[second]
        return float(np.hypot(x - other_x, y - other_y))

    @property
    def shown_pairs(self) -> Pairs:
        """Pairs a reader is shown: neighbours on a line, or else the first station with every other."""
        if self.order is not None:
            return self.pairs(NEIGHBOURS)
        return tuple((0, other) for other in range(1, len(self.names)))

    def pairs(self, compared: tuple[str, str] | str) -> Pairs:
        """Return the pairs of stations that a limit compares.

        Parameters
        ----------
        compared : tuple of str, or str
            Two names, ``any`` or ``neighbours``.

        Returns
        -------
        pairs : tuple of (int, int), [-]
            Stations in the order given, no pair twice.
        """
        if isinstance(compared, tuple):
            return ((self.names.index(compared[0]), self.names.index(compared[1])),)
        order = self.order
        if compared == NEIGHBOURS and order is not None:
            return tuple(pairwise(order))
        return tuple(combinations(range(len(self.names)), 2))


def station_layout(stations: Sequence[Station]) -> StationLayout:
    """Return where stations are.

    Parameters
    ----------
    stations : sequence of Station
        In the order given.

    Returns
    -------
    layout : StationLayout
        Names and positions.
    """
    return StationLayout(
        names=tuple(station.name for station in stations),
        positions=tuple((station.x, station.y) for station in stations),
    )
