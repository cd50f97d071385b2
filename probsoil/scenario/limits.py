"""Limits: a quantity, a time and a threshold that it should respect."""

from typing import Annotated, ClassVar, Literal

from pydantic import BeforeValidator, ConfigDict, Field

from probsoil.scenario.base import Label, Name, Table
from probsoil.scenario.fields import Number, Ratio
from probsoil.scenario.slips import Slip, refuse
from probsoil.scenario.stations import pair_or_word

Sense = Literal["not more than", "not less than"]

TIME = Number(kind="time", low=0.0, high=1000.0, source="by definition", meaning="time; 0 to the horizon")
Time = Annotated[float, TIME]
OptionalTime = Annotated[float | None, TIME]


def _pair(raw: object) -> object:
    if not isinstance(raw, list | tuple) or len(raw) != 2:
        refuse([Slip(path=(), message="two times are needed", allowed='such as ["1 year", "30 years"]')])
    return tuple(raw)


TimePair = Annotated[tuple[Time, Time], BeforeValidator(_pair)]

TargetProbability = Annotated[
    float | None,
    Number(
        kind="number",
        low=0.0,
        high=1.0,
        open_low=True,
        open_high=True,
        source="by definition",
        meaning="greatest exceedance probability that is tolerated",
    ),
]
Cost = Annotated[
    float | None,
    Number(
        kind="number",
        low=0.0,
        high=1e15,
        source="by definition",
        meaning="cost if the limit is exceeded, in the scenario's currency",
    ),
]


class _Limit(Table):
    """What every limit has.

    Attributes
    ----------
    name : str
        Name, unique among the limits.
    target_probability : float or None, [-]
        Greatest exceedance probability that is tolerated.
    cost_if_exceeded : float or None
        Cost in the scenario's currency.
    """

    sense: ClassVar[Sense]
    name: Label = Field(description="name of the limit, unique")
    target_probability: TargetProbability = None
    cost_if_exceeded: Cost = None

    @property
    def threshold(self) -> float:
        """Threshold, in the unit of its key [m], [-] or [years]."""
        return float(getattr(self, self.sense.replace(" ", "_")))


class _OfLoad(_Limit):
    """What every limit has that may look at a further load.

    Attributes
    ----------
    load : str or None
        Name of the further load that it looks at; None for the load that is assessed.
    """

    load: Name | None = Field(
        default=None,
        description="name of the further load whose own settlement or safety is limited; if left out, [load]",
    )


def _settled(meaning: str) -> Number:
    return Number(
        kind="length", low=0.0, high=100.0, open_low=True, source="common practice", meaning=meaning
    )


def _safety(meaning: str) -> Number:
    return Number(kind="number", low=0.0, high=20.0, open_low=True, source="common practice", meaning=meaning)


ONE_TIME = ConfigDict(json_schema_extra={"oneOf": [{"required": ["at"]}, {"required": ["between"]}]})


class SettlementLimit(_OfLoad):
    """Settlement at a time, or between two times, that should not be more than a threshold.

    Attributes
    ----------
    quantity : str
        ``settlement``.
    at : float or None, [year]
        Time; either this or `between`.
    between : tuple of float or None, [year]
        Two times.
    station : str or None
        Name of a station, or ``any`` for the one that settles most; None for the first.
    not_more_than : float, [m]
        Threshold.
    """

    model_config = ONE_TIME

    sense: ClassVar[Sense] = "not more than"
    quantity: Literal["settlement"] = Field(description="what is limited")
    at: OptionalTime = None
    between: TimePair | None = Field(
        default=None, description="two times; the settlement from one to the other"
    )
    not_more_than: Annotated[
        float,
        _settled("settlement that should not be exceeded"),
    ]
    station: Label | None = Field(
        default=None,
        description='name of the station, or "any" for the one that settles most in each realisation; '
        "the first station if left out",
    )


_Compared = Annotated[tuple[Label, Label] | Literal["any", "neighbours"], BeforeValidator(pair_or_word)]


class DifferentialSettlementLimit(_Limit):
    """Difference of settlement between two stations that should not be more than a threshold.

    Attributes
    ----------
    quantity : str
        ``differential_settlement``.
    at : float or None, [year]
        Time; either this or `between`.
    between : tuple of float or None, [year]
        Two times.
    stations : tuple of str, or str
        Two names; ``any`` for the worst of all pairs, ``neighbours`` for the worst of those next to each
        other on a line.
    not_more_than : float, [m]
        Threshold.
    """

    model_config = ONE_TIME

    sense: ClassVar[Sense] = "not more than"
    quantity: Literal["differential_settlement"] = Field(description="what is limited")
    at: OptionalTime = None
    between: TimePair | None = Field(
        default=None, description="two times; the difference in what settles from one to the other"
    )
    stations: _Compared = Field(
        default="any",
        description='two names; or "any", the worst of all pairs in each realisation; or "neighbours", the '
        "worst of those next to each other on the line of the stations",
    )
    not_more_than: Annotated[
        float,
        _settled("difference of settlement that should not be exceeded"),
    ]


class AngularDistortionLimit(_Limit):
    """Difference of settlement over distance that should not be more than a threshold.

    Attributes
    ----------
    quantity : str
        ``angular_distortion``.
    at : float or None, [year]
        Time; either this or `between`.
    between : tuple of float or None, [year]
        Two times.
    stations : tuple of str, or str
        As for a differential settlement.
    tilt : str
        ``kept``, or ``removed``: the slope from end to end of the line is taken off first.
    not_more_than : float, [-]
        Threshold.
    """

    model_config = ONE_TIME

    sense: ClassVar[Sense] = "not more than"
    quantity: Literal["angular_distortion"] = Field(description="what is limited")
    at: OptionalTime = None
    between: TimePair | None = Field(
        default=None, description="two times; from what settles from one to the other"
    )
    stations: _Compared = Field(
        default="any",
        description='two names; or "any", the worst of all pairs in each realisation; or "neighbours", the '
        "worst of those next to each other on the line of the stations (on a line the same as any)",
    )
    tilt: Literal["kept", "removed"] = Field(
        default="kept",
        description="whether the slope from end to end of the line of stations, its tilt as a rigid body, "
        "is taken off first",
    )
    not_more_than: Annotated[
        float,
        Ratio(
            kind="number",
            low=0.0,
            high=1.0,
            open_low=True,
            source="by definition",
            meaning="difference of settlement over distance in plan that should not be exceeded, such as "
            '0.002 or "1/500"',
        ),
    ]


class SlipSafetyLimit(_OfLoad):
    """Factor of safety against a slip, at one time or the least over the stage ends.

    Attributes
    ----------
    quantity : str
        ``slip_safety``.
    at : float or None, [year]
        Time; None for the least over the stage ends.
    not_less_than : float, [-]
        Threshold.
    """

    sense: ClassVar[Sense] = "not less than"
    quantity: Literal["slip_safety"] = Field(description="what is limited")
    at: OptionalTime = None
    not_less_than: Annotated[
        float,
        _safety("least tolerable factor of safety against a slip"),
    ]


class BearingSafetyLimit(_OfLoad):
    """Factor of safety against bearing failure, at one time or the least over the stage ends.

    Attributes
    ----------
    quantity : str
        ``bearing_safety``.
    at : float or None, [year]
        Time; None for the least over the stage ends.
    not_less_than : float, [-]
        Threshold.
    """

    sense: ClassVar[Sense] = "not less than"
    quantity: Literal["bearing_safety"] = Field(description="what is limited")
    at: OptionalTime = None
    not_less_than: Annotated[
        float,
        _safety("least tolerable factor of safety against undrained bearing failure"),
    ]


class ConsolidationLimit(_OfLoad):
    """Degree of consolidation that should be reached by a time.

    Attributes
    ----------
    quantity : str
        ``degree_of_consolidation``.
    at : float, [year]
        Time.
    not_less_than : float, [-]
        Threshold.
    """

    sense: ClassVar[Sense] = "not less than"
    quantity: Literal["degree_of_consolidation"] = Field(description="what is limited")
    at: Time
    not_less_than: Annotated[
        float,
        Number(
            kind="number",
            low=0.0,
            high=1.0,
            open_low=True,
            open_high=True,
            source="by definition",
            meaning="degree of consolidation that should be reached",
        ),
    ]


class ConsolidationTimeLimit(_OfLoad):
    """Time by which a degree of consolidation should be reached.

    Attributes
    ----------
    quantity : str
        ``time_to_consolidation``.
    degree : float, [-]
        Degree of consolidation.
    not_more_than : float, [year]
        Threshold.
    """

    sense: ClassVar[Sense] = "not more than"
    quantity: Literal["time_to_consolidation"] = Field(description="what is limited")
    degree: Annotated[
        float,
        Number(
            kind="number",
            low=0.0,
            high=1.0,
            open_low=True,
            open_high=True,
            source="by definition",
            meaning="degree of consolidation whose time is limited",
        ),
    ] = 0.9
    not_more_than: Annotated[
        float,
        Number(
            kind="time",
            low=0.0,
            high=1000.0,
            open_low=True,
            source="by definition",
            meaning="time by which the degree should be reached; not beyond the horizon",
        ),
    ]


class AddedFillLimit(_Limit):
    """Volume of the fill that holds the level of an embankment.

    Attributes
    ----------
    quantity : str
        ``added_fill``.
    not_more_than : float, [m3/m]
        Threshold, per metre run.
    """

    sense: ClassVar[Sense] = "not more than"
    quantity: Literal["added_fill"] = Field(description="what is limited")
    not_more_than: Annotated[
        float,
        Number(
            kind="volume per metre",
            low=0.0,
            high=1e5,
            open_low=True,
            source="common practice",
            meaning="volume of fill per metre run of the embankment, in all, that should not be exceeded in "
            "holding its level",
        ),
    ]


OnSettlement = SettlementLimit | DifferentialSettlementLimit | AngularDistortionLimit
ON_SETTLEMENT = (SettlementLimit, DifferentialSettlementLimit, AngularDistortionLimit)
"""Classes of limits on what settles by a time or between two."""

Limit = Annotated[
    SettlementLimit
    | DifferentialSettlementLimit
    | AngularDistortionLimit
    | SlipSafetyLimit
    | BearingSafetyLimit
    | ConsolidationLimit
    | ConsolidationTimeLimit
    | AddedFillLimit,
    Field(discriminator="quantity"),
]
