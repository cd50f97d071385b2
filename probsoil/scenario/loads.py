"""The load and the stages in which it is placed and taken off."""

from typing import Annotated, Literal

from pydantic import ConfigDict, Field

from probsoil.scenario.base import Name, Table
from probsoil.scenario.distributions import Constant, Distribution
from probsoil.scenario.fields import Number, Uncertain

_FILL_WEIGHT = Uncertain(
    kind="unit weight", low=0.2, high=30.0, source="common practice", meaning="bulk unit weight of the fill"
)
Submergence = Annotated[
    bool,
    Field(description="whether ground and fill that sink below the water table lose the weight of water"),
]


class EmbankmentLoad(Table):
    """A long embankment, a trapezoid in section, symmetrical about its centre line.

    Attributes
    ----------
    shape : str
        ``embankment``.
    crest_width : float, [m]
        Width of the top at the greatest height reached.
    side_slope : float, [-]
        Horizontal run per unit of rise; the base stays the same while the fill rises.
    fill_unit_weight : Distribution, [kN/m3]
        Bulk unit weight of the fill.
    fill_phi : Distribution, [degree]
        Friction angle of the fill.
    fill_cohesion : Distribution, [kPa]
        Cohesion of the fill.
    submergence : bool
        Whether what sinks below the water table loses the weight of water.
    """

    shape: Literal["embankment"] = Field(description="kind of load")
    crest_width: Annotated[
        float,
        Number(
            kind="length",
            low=0.0,
            high=1000.0,
            open_low=True,
            source="by definition",
            meaning="width of the top of the embankment at its greatest height",
        ),
    ]
    side_slope: Annotated[
        float,
        Number(
            kind="number",
            low=0.0,
            high=20.0,
            source="common practice",
            meaning="horizontal run of the side slope per unit of rise; 0 is a vertical side",
        ),
    ]
    fill_unit_weight: Annotated[Distribution, _FILL_WEIGHT]
    fill_phi: Annotated[
        Distribution,
        Uncertain(
            kind="angle", low=0.0, high=60.0, source="common practice", meaning="friction angle of the fill"
        ),
    ]
    fill_cohesion: Annotated[
        Distribution,
        Uncertain(
            kind="pressure", low=0.0, high=500.0, source="common practice", meaning="cohesion of the fill"
        ),
    ] = Constant(value=0.0)
    submergence: Submergence = True


class AreaLoad(Table):
    """A load much wider than the clay is thick: the same stress increase at every depth.

    Attributes
    ----------
    shape : str
        ``area``.
    fill_unit_weight : Distribution or None, [kN/m3]
        Bulk unit weight of the fill; needed when a stage gives a height.
    submergence : bool
        Whether what sinks below the water table loses the weight of water.
    """

    shape: Literal["area"] = Field(description="kind of load")
    fill_unit_weight: Annotated[Distribution | None, _FILL_WEIGHT] = None
    submergence: Submergence = True


Load = Annotated[EmbankmentLoad | AreaLoad, Field(discriminator="shape")]


class Stage(Table):
    """Fill or pressure added (or, where negative, removed) evenly between two times.

    Attributes
    ----------
    name : str
        Name, unique among the stages.
    height : float or None, [m]
        Height of fill.
    pressure : float or None, [kPa]
        Pressure; only with the load shape ``area``.
    start, end : float, [year]
        Times.
    """

    model_config = ConfigDict(
        json_schema_extra={"oneOf": [{"required": ["height"]}, {"required": ["pressure"]}]}
    )

    name: Name = Field(description="name of the stage, unique")
    height: Annotated[
        float | None,
        Number(
            kind="length",
            low=-100.0,
            high=100.0,
            source="common practice",
            meaning="height of fill placed; negative is removal",
        ),
    ] = None
    pressure: Annotated[
        float | None,
        Number(
            kind="pressure",
            low=-5000.0,
            high=5000.0,
            source="common practice",
            meaning='pressure added, only with shape = "area"; negative is removal',
        ),
    ] = None
    start: Annotated[
        float,
        Number(
            kind="time",
            low=0.0,
            high=1000.0,
            source="by definition",
            meaning="time at which the stage starts",
        ),
    ]
    end: Annotated[
        float,
        Number(
            kind="time", low=0.0, high=1000.0, source="by definition", meaning="time at which the stage ends"
        ),
    ]
