"""Further loads on the site, beside [load]: each adds stress below that one, and limits may look at it."""

from typing import Annotated, Literal

from pydantic import Field

from probsoil.scenario.base import Name, Table
from probsoil.scenario.distributions import Constant, Distribution
from probsoil.scenario.fields import Number
from probsoil.scenario.load_fields import depth_of_base, side, slope_run, width_of_top
from probsoil.scenario.loads import (
    BERM_HEIGHT,
    BERM_WIDTH,
    FILL_COHESION,
    FILL_PHI,
    FILL_WEIGHT,
    TRAFFIC,
    TRAFFIC_FROM,
    Contact,
)

_ACROSS = "across (along the width of [load])"


def _place(meaning: str) -> Number:
    return Number(kind="length", low=-2000.0, high=2000.0, source="by definition", meaning=meaning)


_X = _place(f"distance of its centre from that of [load], {_ACROSS}")
_Y = _place("distance of its centre from that of [load], along (the length of [load])")
_DEPTH = depth_of_base("depth of its base below ground level; stress is added from there down")
_AT_GROUND_LEVEL = Constant(value=0.0)


class _Further(Table):
    """What every further load has.

    Attributes
    ----------
    name : str
        Name, unique among the further loads.
    fill_unit_weight : Distribution or None, [kN/m3]
        Unit weight of what a stage adds by height; needed when a stage gives one.
    """

    name: Name = Field(description="name of the further load, unique; its stages give it as load")
    fill_unit_weight: Annotated[Distribution | None, FILL_WEIGHT] = None


class FurtherEmbankment(_Further):
    """A long embankment beside the load, parallel to its length.

    Attributes
    ----------
    shape : str
        ``embankment``.
    crest_width, side_slope : Distribution, [m], [-]
        Width of the top at the greatest height, run of the slope per unit of rise.
    fill_phi : Distribution or None, [degree]
        Friction angle of the fill; needed where a limit looks at its slip.
    fill_cohesion : Distribution, [kPa]
        Cohesion of the fill.
    berm_width, berm_height, traffic, traffic_from
        As of the load that is assessed.
    x : float, [m]
        Distance of its centreline from the centre of the load.
    """

    shape: Literal["embankment"] = Field(description="kind of load")
    crest_width: Annotated[Distribution, width_of_top()]
    side_slope: Annotated[Distribution, slope_run()]
    fill_phi: Annotated[Distribution | None, FILL_PHI] = None
    fill_cohesion: Annotated[Distribution, FILL_COHESION] = Constant(value=0.0)
    berm_width: Annotated[float | None, BERM_WIDTH] = None
    berm_height: Annotated[float | None, BERM_HEIGHT] = None
    traffic: Annotated[Distribution, TRAFFIC] = Constant(value=0.0)
    traffic_from: Annotated[float | None, TRAFFIC_FROM] = None
    x: Annotated[float, _X]


class FurtherArea(_Further):
    """A load over a wide area.

    Attributes
    ----------
    shape : str
        ``area``.
    """

    shape: Literal["area"] = Field(description="kind of load")


class _FurtherFoundation(_Further):
    """What every further foundation has.

    Attributes
    ----------
    depth : Distribution, [m]
        Depth of the base.
    contact : str
        ``rough`` or ``smooth``, for its own bearing.
    """

    depth: Annotated[Distribution, _DEPTH] = _AT_GROUND_LEVEL
    contact: Contact = "rough"


class FurtherStrip(_FurtherFoundation):
    """A long strip of uniform pressure, parallel to the length of the load.

    Attributes
    ----------
    shape : str
        ``strip``.
    width : Distribution, [m]
        Width of the strip.
    x : float, [m]
        Distance of its centreline from the centre of the load.
    """

    shape: Literal["strip"] = Field(description="kind of load")
    width: Annotated[Distribution, side("width of the strip")]
    x: Annotated[float, _X]


class FurtherRectangle(_FurtherFoundation):
    """A rectangle of uniform pressure.

    Attributes
    ----------
    shape : str
        ``rectangle``.
    width, length : Distribution, [m]
        Sides across and along.
    x, y : float, [m]
        Distances of its centre from that of the load.
    """

    shape: Literal["rectangle"] = Field(description="kind of load")
    width: Annotated[Distribution, side("side of the rectangle across")]
    length: Annotated[Distribution, side("side of the rectangle along")]
    x: Annotated[float, _X]
    y: Annotated[float, _Y] = 0.0


class FurtherCircle(_FurtherFoundation):
    """A circle of uniform pressure.

    Attributes
    ----------
    shape : str
        ``circle``.
    diameter : Distribution, [m]
        Its diameter.
    x, y : float, [m]
        Distances of its centre from that of the load.
    """

    shape: Literal["circle"] = Field(description="kind of load")
    diameter: Annotated[Distribution, side("diameter of the circle")]
    x: Annotated[float, _X]
    y: Annotated[float, _Y] = 0.0


FURTHER = (FurtherEmbankment, FurtherArea, FurtherStrip, FurtherRectangle, FurtherCircle)
"""Classes of further loads."""

FurtherLoad = Annotated[
    FurtherEmbankment | FurtherArea | FurtherStrip | FurtherRectangle | FurtherCircle,
    Field(discriminator="shape"),
]
