"""Stations: plan positions at which settlement is computed."""

import math
from collections.abc import Sequence
from typing import Annotated, Any

from pydantic import BeforeValidator, Field, ValidationError, WithJsonSchema

from probsoil.scenario.base import Label, Table
from probsoil.scenario.fields import Number
from probsoil.scenario.slips import Slip, refuse

ANY, NEIGHBOURS = "any", "neighbours"
GREATEST_COUNT = 50
"""Most stations of one scenario, [-]."""
LEAST_APART = 0.01
"""Least distance between two stations, [m]."""

_ACROSS = Number(
    kind="length",
    low=-1000.0,
    high=1000.0,
    source="by definition",
    meaning="distance across, from the centreline or centre of the load (of a rectangle, along its width)",
)
_REACH = 100_000.0


def _along(meaning: str) -> Number:
    return Number(kind="length", low=-_REACH, high=_REACH, source="by definition", meaning=meaning)


THICKNESS = Number(
    kind="length",
    low=0.05,
    high=200.0,
    source="common practice",
    meaning="mean thickness of the layer at this station",
)


def _by_layer(raw: object) -> object:
    """Read a table of thicknesses; inside, nothing may change, so it becomes pairs."""
    if isinstance(raw, tuple):
        return raw
    if not isinstance(raw, dict):
        refuse(
            [
                Slip(
                    path=(),
                    message="this is not a table of thicknesses",
                    allowed="layer = mean thickness here",
                    hint='such as { "soft clay" = 4.5 }',
                )
            ]
        )
    pairs, slips = [], []
    for name, value in raw.items():
        try:
            pairs.append((str(name), THICKNESS.read(value)))
        except ValidationError as error:
            slips += [one["ctx"]["slip"].below((name,)) for one in error.errors()]
    if slips:
        refuse(slips)
    return tuple(pairs)


Thicknesses = Annotated[
    tuple[tuple[str, float], ...],
    BeforeValidator(_by_layer),
    WithJsonSchema(
        {"type": "object", "additionalProperties": {"anyOf": [{"type": "number"}, {"type": "string"}]}}
    ),
]


class Station(Table):
    """A plan position at which settlement is computed, with its own layer averages.

    Attributes
    ----------
    name : str
        Name, unique among the stations.
    x, y : float, [m]
        Distances from the centreline or centre of the load, across and along.
    thickness : tuple of (str, float), [m]
        Mean thickness here of the layers that differ from what is given under the layers.
    """

    name: Label = Field(description="name of the station, unique")
    x: Annotated[float, _ACROSS] = 0.0
    y: Annotated[float, _along("distance along the load (of a rectangle, along its length)")] = 0.0
    thickness: Thicknesses = Field(
        default=(),
        description="mean thickness at this station of layers that differ here, by name, such as "
        '{ "soft clay" = 4.5 }; an uncertain thickness departs from its mean by the same ratio at '
        "all stations",
    )


class StationLine(Table):
    """Stations at even distances along the load.

    Attributes
    ----------
    name : str
        First word of their names.
    x : float, [m]
        Distance across, the same for all.
    from_, to : float, [m]
        Distances along of the first and the last.
    number : int or None, [-]
        How many; either this or `spacing`.
    spacing : float or None, [m]
        Distance from one to the next.
    """

    name: Label = Field(default="line", description="first word of the names: line 0 m, line 10 m, ...")
    x: Annotated[float, _ACROSS] = 0.0
    from_: Annotated[float, _along("distance along at which the line begins")] = Field(alias="from")
    to: Annotated[float, _along("distance along at which the line ends")]
    number: int | None = Field(
        default=None, ge=2, le=GREATEST_COUNT, description="number of stations; or spacing"
    )
    spacing: Annotated[
        float | None,
        Number(
            kind="length",
            low=LEAST_APART,
            high=2.0 * _REACH,
            source="by definition",
            meaning="distance from one station to the next, of which the line is a whole number; or number",
        ),
    ] = None

    @property
    def count(self) -> float:
        """Number of stations, [-]; not a whole number where the spacing does not go into the line."""
        if self.number is not None:
            return float(self.number)
        return 1.0 + abs(self.to - self.from_) / float(self.spacing or math.inf)

    def stations(self) -> tuple[Station, ...]:
        """Return the stations of the line.

        Returns
        -------
        stations : tuple of Station
            From the beginning to the end.
        """
        count = round(self.count)
        step = (self.to - self.from_) / (count - 1)
        places = [round(self.from_ + index * step, 6) for index in range(count)]
        return tuple(Station(name=f"{self.name} {place:.10g} m", x=self.x, y=place) for place in places)


def along_line(positions: Sequence[tuple[float, float]]) -> list[int] | None:
    """Return the order of plan positions along the straight line they lie on.

    Parameters
    ----------
    positions : sequence of (float, float), [m]
        Plan positions x and y.

    Returns
    -------
    order : list of int or None, [-]
        From the end with the least y (of these, the least x); None where they do not lie on one line to
        within a thousandth of its length, or are fewer than two.
    """
    if len(positions) < 2:
        return None
    first = min(positions, key=lambda place: (place[1], place[0]))
    start = max(positions, key=lambda place: (math.dist(place, first), place))
    last = max(positions, key=lambda place: (math.dist(place, start), place))
    length = math.dist(start, last)
    if length == 0.0:
        return None
    if (start[1], start[0]) > (last[1], last[0]):
        start, last = last, start
    unit = ((last[0] - start[0]) / length, (last[1] - start[1]) / length)
    away = [(x - start[0], y - start[1]) for x, y in positions]
    if any(abs(dx * unit[1] - dy * unit[0]) > 1e-3 * length for dx, dy in away):
        return None
    return sorted(range(len(positions)), key=lambda i: away[i][0] * unit[0] + away[i][1] * unit[1])


def pair_or_word(raw: object) -> Any:
    """Read which stations a limit compares.

    Parameters
    ----------
    raw : object
        Value from the file.

    Returns
    -------
    stations : tuple of str, or str
        Two names, ``any`` or ``neighbours``.

    Raises
    ------
    ValidationError
        If it is neither.
    """
    named = isinstance(raw, list | tuple) and len(raw) == 2 and all(isinstance(name, str) for name in raw)
    if raw not in (ANY, NEIGHBOURS) and not named:
        allowed = f'two names such as ["pier", "approach"], or "{ANY}", or "{NEIGHBOURS}"'
        refuse([Slip(path=(), message="this does not say which stations are compared", allowed=allowed)])
    return tuple(raw) if isinstance(raw, list) else raw
