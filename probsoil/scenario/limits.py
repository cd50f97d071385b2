"""Limits: a quantity, a time and a threshold that it should respect."""

from typing import Annotated, ClassVar, Literal

from pydantic import BeforeValidator, ConfigDict, Field

from probsoil.scenario.base import Label, Table
from probsoil.scenario.fields import Number
from probsoil.scenario.slips import Slip, refuse

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


class SettlementLimit(_Limit):
    """Settlement at a time, or between two times, that should not be more than a threshold.

    Attributes
    ----------
    quantity : str
        ``settlement``.
    at : float or None, [year]
        Time; either this or `between`.
    between : tuple of float or None, [year]
        Two times.
    not_more_than : float, [m]
        Threshold.
    """

    model_config = ConfigDict(json_schema_extra={"oneOf": [{"required": ["at"]}, {"required": ["between"]}]})

    sense: ClassVar[Sense] = "not more than"
    quantity: Literal["settlement"] = Field(description="what is limited")
    at: OptionalTime = None
    between: TimePair | None = Field(
        default=None, description="two times; the settlement from one to the other"
    )
    not_more_than: Annotated[
        float,
        Number(
            kind="length",
            low=0.0,
            high=100.0,
            open_low=True,
            source="common practice",
            meaning="settlement that should not be exceeded",
        ),
    ]

    @property
    def threshold(self) -> float:
        """Threshold [m]."""
        return self.not_more_than


class SlipSafetyLimit(_Limit):
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
        Number(
            kind="number",
            low=0.0,
            high=20.0,
            open_low=True,
            source="common practice",
            meaning="least tolerable factor of safety against a slip",
        ),
    ]

    @property
    def threshold(self) -> float:
        """Threshold [-]."""
        return self.not_less_than


class BearingSafetyLimit(_Limit):
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
        Number(
            kind="number",
            low=0.0,
            high=20.0,
            open_low=True,
            source="common practice",
            meaning="least tolerable factor of safety against undrained bearing failure",
        ),
    ]

    @property
    def threshold(self) -> float:
        """Threshold [-]."""
        return self.not_less_than


class ConsolidationLimit(_Limit):
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

    @property
    def threshold(self) -> float:
        """Threshold [-]."""
        return self.not_less_than


class ConsolidationTimeLimit(_Limit):
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

    @property
    def threshold(self) -> float:
        """Threshold [year]."""
        return self.not_more_than


Limit = Annotated[
    SettlementLimit | SlipSafetyLimit | BearingSafetyLimit | ConsolidationLimit | ConsolidationTimeLimit,
    Field(discriminator="quantity"),
]
