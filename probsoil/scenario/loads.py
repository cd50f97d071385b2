"""The load and the stages in which it is placed and taken off."""

from typing import Annotated, Literal

from pydantic import BeforeValidator, ConfigDict, Field

from probsoil.scenario.base import Name, Table
from probsoil.scenario.distributions import Constant, Distribution
from probsoil.scenario.fields import Number, Uncertain
from probsoil.scenario.load_fields import depth_of_base, side, slope_run, width_of_top
from probsoil.scenario.slips import Slip, refuse

FILL_WEIGHT = Uncertain(
    kind="unit weight", low=0.2, high=30.0, source="common practice", meaning="bulk unit weight of the fill"
)
"""Field of the unit weight of fill."""
FILL_PHI = Uncertain(
    kind="angle", low=0.0, high=60.0, source="common practice", meaning="friction angle of the fill"
)
"""Field of the friction angle of fill."""
FILL_COHESION = Uncertain(
    kind="pressure", low=0.0, high=500.0, source="common practice", meaning="cohesion of the fill"
)
"""Field of the cohesion of fill."""
BERM_WIDTH = Number(
    kind="length",
    low=0.0,
    high=1000.0,
    open_low=True,
    source="common practice",
    meaning="width of the flat top of a berm on each side, of the same fill and with the same side "
    "slope; goes with berm_height",
)
"""Field of the width of berms."""
BERM_HEIGHT = Number(
    kind="length",
    low=0.0,
    high=100.0,
    open_low=True,
    source="common practice",
    meaning="height of the berms, below the greatest height of fill; they rise with the fill until "
    "they reach it, and sink with the fill where it is taken below it",
)
"""Field of the height of berms."""
TRAFFIC = Uncertain(
    kind="pressure",
    low=0.0,
    high=200.0,
    source="common practice",
    meaning="pressure of traffic or plant on the top; drives a slip, not the settlement",
)
"""Field of the pressure of traffic."""
TRAFFIC_FROM = Number(
    kind="time",
    low=0.0,
    high=1000.0,
    open_low=True,
    source="by definition",
    meaning="time from which traffic counts; if left out, from the end of the stage that first "
    "reaches the greatest height",
)
"""Field of the time from which traffic counts."""
Contact = Annotated[
    Literal["rough", "smooth"],
    Field(
        description="whether the base holds the soil under it (cast concrete) or lets it slide outward (a "
        "flexible tank floor); for bearing",
    ),
]
Submergence = Annotated[
    bool,
    Field(description="whether ground and fill that sink below the water table lose the weight of water"),
]

HoldLevel = Annotated[
    float | None,
    Number(
        kind="time",
        low=0.0,
        high=1000.0,
        open_low=True,
        source="by definition",
        meaning="time until which fill is added as the ground settles, so that its level stays as the stages "
        "give it; if left out, none is added",
    ),
]


class EmbankmentLoad(Table):
    """A long embankment, a trapezoid in section, symmetrical about its centre line, with or without berms.

    Attributes
    ----------
    shape : str
        ``embankment``.
    crest_width : Distribution, [m]
        Width of the top at the greatest height reached.
    side_slope : Distribution, [-]
        Horizontal run per unit of rise; the base stays the same while the fill rises.
    fill_unit_weight : Distribution, [kN/m3]
        Bulk unit weight of the fill.
    fill_phi : Distribution, [degree]
        Friction angle of the fill.
    fill_cohesion : Distribution, [kPa]
        Cohesion of the fill.
    berm_width, berm_height : float or None, [m]
        Width of the flat top of the berm on each side, outside the slope, and its height; both or none.
    traffic : Distribution, [kPa]
        Pressure on the top that drives a slip.
    traffic_from : float or None, [year]
        Time from which it counts; None from the end of the stage that first reaches the greatest height.
    submergence : bool
        Whether what sinks below the water table loses the weight of water.
    hold_level_until : float or None, [year]
        Time until which fill is added so that its level stays as the ground settles.
    """

    shape: Literal["embankment"] = Field(description="kind of load")
    crest_width: Annotated[Distribution, width_of_top()]
    side_slope: Annotated[Distribution, slope_run()]
    fill_unit_weight: Annotated[Distribution, FILL_WEIGHT]
    fill_phi: Annotated[Distribution, FILL_PHI]
    fill_cohesion: Annotated[Distribution, FILL_COHESION] = Constant(value=0.0)
    berm_width: Annotated[float | None, BERM_WIDTH] = None
    berm_height: Annotated[float | None, BERM_HEIGHT] = None
    traffic: Annotated[Distribution, TRAFFIC] = Constant(value=0.0)
    traffic_from: Annotated[float | None, TRAFFIC_FROM] = None
    submergence: Submergence = True
    hold_level_until: HoldLevel = None


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
    hold_level_until : float or None, [year]
        Time until which fill is added so that its level stays as the ground settles.
    """

    shape: Literal["area"] = Field(description="kind of load")
    fill_unit_weight: Annotated[Distribution | None, FILL_WEIGHT] = None
    submergence: Submergence = True
    hold_level_until: HoldLevel = None


def _distance(meaning: str, low: float = 0.0) -> Number:
    return Number(kind="length", low=low, high=1000.0, source="by definition", meaning=meaning)


_PLAN_DISTANCE = _distance("distance from the centre of the rectangle", low=-1000.0)


def _point(raw: object) -> object:
    if not isinstance(raw, list | tuple) or len(raw) != 2:
        refuse([Slip(path=(), message="two distances are needed", allowed="such as [1.5, 0.0]")])
    return tuple(raw)


class _Foundation(Table):
    """What every foundation has: a load of uniform net pressure at some depth.

    Attributes
    ----------
    depth : Distribution, [m]
        Depth of the base below ground level.
    contact : str
        ``rough`` or ``smooth``: whether the base holds the soil under it against sliding outward.
    fill_unit_weight : Distribution or None, [kN/m3]
        Unit weight of what a stage adds by height; needed when a stage gives one.
    submergence : bool
        Whether what sinks below the water table loses the weight of water.
    """

    depth: Annotated[
        Distribution,
        depth_of_base(
            "depth of the base below ground level; stress is added from there down, and the stages "
            "give the net pressure, in excess of the weight of soil dug out"
        ),
    ] = Constant(value=0.0)
    contact: Contact = "rough"
    fill_unit_weight: Annotated[Distribution | None, FILL_WEIGHT] = None
    submergence: Submergence = True


class StripLoad(_Foundation):
    """A long strip of uniform pressure.

    Attributes
    ----------
    shape : str
        ``strip``.
    width : Distribution, [m]
        Width of the strip.
    at : float, [m]
        Distance from the centreline at which settlement is reported.
    """

    shape: Literal["strip"] = Field(description="kind of load")
    width: Annotated[Distribution, side("width of the strip")]
    at: Annotated[float, _distance("distance from the centreline at which settlement is reported")] = 0.0


class RectangleLoad(_Foundation):
    """A rectangle of uniform pressure.

    Attributes
    ----------
    shape : str
        ``rectangle``.
    width, length : Distribution, [m]
        Its sides; either may be the longer.
    at : tuple of float, [m]
        Point at which settlement is reported: distances from the centre along the width and the length.
    """

    shape: Literal["rectangle"] = Field(description="kind of load")
    width: Annotated[Distribution, side("width of the rectangle")]
    length: Annotated[Distribution, side("length of the rectangle")]
    at: Annotated[
        tuple[Annotated[float, _PLAN_DISTANCE], Annotated[float, _PLAN_DISTANCE]], BeforeValidator(_point)
    ] = Field(
        default=(0.0, 0.0),
        description="point at which settlement is reported: distances from the centre along the width and "
        "along the length",
    )


class CircleLoad(_Foundation):
    """A circle of uniform pressure, such as a tank.

    Attributes
    ----------
    shape : str
        ``circle``.
    diameter : Distribution, [m]
        Its diameter.
    at : float, [m]
        Distance from the centre at which settlement is reported.
    """

    shape: Literal["circle"] = Field(description="kind of load")
    diameter: Annotated[Distribution, side("diameter of the circle")]
    at: Annotated[float, _distance("distance from the centre at which settlement is reported")] = 0.0


FOUNDATIONS = (StripLoad, RectangleLoad, CircleLoad)
"""Classes of loads that can fail in bearing."""

Load = Annotated[
    EmbankmentLoad | AreaLoad | StripLoad | RectangleLoad | CircleLoad, Field(discriminator="shape")
]


class Stage(Table):
    """Fill or pressure added (or, where negative, removed), or soil dug out, evenly between two times.

    Attributes
    ----------
    name : str
        Name, unique among the stages.
    height : Distribution or None, [m]
        Height of fill; of one sign.
    pressure : Distribution or None, [kPa]
        Pressure; of one sign; not with the load shape ``embankment``.
    start, end : float, [year]
        Times.
    load : str or None
        Which of the further loads; None for the load that is assessed.
    excavate : float or None, [m]
        Depth of soil dug out over the plan of the load.
    """

    model_config = ConfigDict(
        json_schema_extra={
            "oneOf": [{"required": ["height"]}, {"required": ["pressure"]}, {"required": ["excavate"]}]
        }
    )

    name: Name = Field(description="name of the stage, unique")
    load: Name | None = Field(
        default=None, description="which of the further loads the stage belongs to; if left out, [load]"
    )
    height: Annotated[
        Distribution | None,
        Uncertain(
            kind="length",
            low=-100.0,
            high=100.0,
            source="common practice",
            of_works=True,
            meaning="height of fill (or of what fills a tank) placed; negative is removal",
        ),
    ] = None
    pressure: Annotated[
        Distribution | None,
        Uncertain(
            kind="pressure",
            low=-5000.0,
            high=5000.0,
            source="common practice",
            of_works=True,
            meaning="pressure added, net of soil dug out unless a stage digs it out; not with "
            'shape = "embankment"; negative is removal',
        ),
    ] = None
    excavate: Annotated[
        float | None,
        Number(
            kind="length",
            low=0.0,
            high=50.0,
            open_low=True,
            source="common practice",
            meaning="depth of soil dug out over the plan of the load; with it, pressures and heights are "
            "those of all that is placed on the bottom",
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
