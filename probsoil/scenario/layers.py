"""Layers of the ground, from ground level down."""

from typing import Annotated, Literal

from pydantic import ConfigDict, Field

from probsoil.scenario.base import Name, Table
from probsoil.scenario.distributions import Constant, Distribution
from probsoil.scenario.fields import Uncertain
from probsoil.scenario.groundwater import InitialExcess, LayerHead
from probsoil.scenario.undrained_modulus import UndrainedModulus

Thickness = Annotated[
    Distribution,
    Uncertain(
        kind="length", low=0.05, high=200.0, source="common practice", meaning="thickness of the layer"
    ),
]
UnitWeight = Annotated[
    Distribution,
    Uncertain(
        kind="unit weight",
        low=10.0,
        high=25.0,
        source="common practice",
        meaning="bulk unit weight (below the water table, saturated); more than that of water",
        spatial=True,
    ),
]
UnitWeightAbove = Annotated[
    Distribution | None,
    Uncertain(
        kind="unit weight",
        low=5.0,
        high=25.0,
        source="common practice",
        meaning="bulk unit weight of the part above the water table; unit_weight if left out",
        spatial=True,
    ),
]
VoidRatio = Annotated[
    Distribution,
    Uncertain(
        kind="number",
        low=0.2,
        high=12.0,
        source="common practice",
        meaning="void ratio in situ",
        spatial=True,
    ),
]


def _slope(low: float, high: float, meaning: str) -> Uncertain:
    return Uncertain(
        kind="number", low=low, high=high, source="common practice", meaning=meaning, spatial=True
    )


FrictionM = Annotated[
    Distribution | None,
    Uncertain(
        kind="number",
        low=0.15,
        high=2.5,
        source="common practice",
        meaning="slope q/p' of the critical state line in compression (below 3 by definition)",
        spatial=True,
    ),
]
FrictionAngle = Annotated[
    Distribution | None,
    Uncertain(
        kind="angle",
        low=4.0,
        high=60.0,
        source="common practice",
        meaning="critical-state friction angle; given instead of M",
        spatial=True,
    ),
]


class Preconsolidation(Table):
    """Preconsolidation stress, in one of three forms.

    Attributes
    ----------
    stress : Distribution or None, [kPa]
        Effective vertical preconsolidation stress.
    ocr : Distribution or None, [-]
        Preconsolidation stress over the effective vertical stress in situ.
    pop : Distribution or None, [kPa]
        Preconsolidation stress less the effective vertical stress in situ.
    """

    model_config = ConfigDict(
        json_schema_extra={"oneOf": [{"required": [key]} for key in ("stress", "ocr", "pop")]}
    )

    stress: Annotated[
        Distribution | None,
        Uncertain(
            kind="pressure",
            low=1.0,
            high=5000.0,
            source="common practice",
            meaning="effective vertical preconsolidation stress, one value for the layer",
            symbol="preconsolidation",
            spatial=True,
        ),
    ] = None
    ocr: Annotated[
        Distribution | None,
        Uncertain(
            kind="number",
            low=0.5,
            high=100.0,
            source="common practice",
            meaning="preconsolidation stress / vertical effective stress in situ; draws below 1 act as 1",
            spatial=True,
        ),
    ] = None
    pop: Annotated[
        Distribution | None,
        Uncertain(
            kind="pressure",
            low=0.0,
            high=2000.0,
            source="by definition",
            meaning="preconsolidation stress less vertical effective stress in situ",
            spatial=True,
        ),
    ] = None


class Permeability(Table):
    """How fast water leaves: a virgin coefficient of consolidation, or a permeability and its change.

    Attributes
    ----------
    cv : Distribution or None, [m2/year]
        Coefficient of consolidation on the virgin line.
    k : Distribution or None, [m/s]
        Vertical permeability at the void ratio in situ.
    ck : Distribution or None, [-]
        Drop of void ratio per tenfold drop of permeability.
    """

    model_config = ConfigDict(
        json_schema_extra={
            "oneOf": [
                {"required": ["cv"], "not": {"anyOf": [{"required": ["k"]}, {"required": ["ck"]}]}},
                {"required": ["k", "ck"], "not": {"required": ["cv"]}},
            ]
        }
    )

    cv: Annotated[
        Distribution | None,
        Uncertain(
            kind="coefficient of consolidation",
            low=1e-3,
            high=1e3,
            source="common practice",
            meaning="coefficient of consolidation on the virgin compression line",
            spatial=True,
            in_series=True,
        ),
    ] = None
    k: Annotated[
        Distribution | None,
        Uncertain(
            kind="permeability",
            low=1e-13,
            high=1e-5,
            source="common practice",
            meaning="vertical permeability at the void ratio in situ; needs ck",
            spatial=True,
            in_series=True,
        ),
    ] = None
    ck: Annotated[
        Distribution | None,
        Uncertain(
            kind="number",
            low=0.02,
            high=10.0,
            source="common practice",
            meaning="drop of void ratio per tenfold drop of permeability; needs k",
            spatial=True,
        ),
    ] = None


class Strength(Table):
    """Undrained strength ratio given outright: su = S s'v OCR^m.

    Attributes
    ----------
    S : Distribution, [-]
        Strength over effective vertical stress where normally consolidated.
    m : Distribution, [-]
        Exponent of the overconsolidation ratio.
    """

    S: Annotated[
        Distribution,
        Uncertain(
            kind="number",
            low=0.02,
            high=1.5,
            source="common practice",
            meaning="undrained strength / vertical effective stress, normally consolidated",
            symbol="strength_S",
            spatial=True,
        ),
    ]
    m: Annotated[
        Distribution,
        Uncertain(
            kind="number",
            low=0.0,
            high=1.5,
            source="common practice",
            meaning="exponent of the overconsolidation ratio in the undrained strength",
            symbol="strength_m",
            spatial=True,
        ),
    ]


class ClayLayer(Table):
    """A layer of clay, which consolidates.

    Attributes
    ----------
    name : str
        Name, unique among the layers.
    soil : str
        ``clay``.
    thickness, unit_weight, unit_weight_above, void_ratio : Distribution
        State in situ, [m], [kN/m3], [kN/m3], [-].
    lambda_, Cc, CR : Distribution or None, [-]
        Virgin compression, in one of three forms.
    kappa, Cs, RR : Distribution or None, [-]
        Unloading and reloading, in the matching or another form.
    preconsolidation : Preconsolidation
        Preconsolidation stress.
    M, phi : Distribution or None, [-], [degree]
        Critical-state friction, one of the two.
    permeability : Permeability
        Flow of water.
    kh_kv : Distribution, [-]
        Horizontal over vertical permeability, for flow to vertical drains.
    C_alpha_ratio : Distribution or None, [-]
        Secondary compression index over compression index; None for no creep, or where given otherwise.
    C_alpha : Distribution or None, [-]
        Secondary compression index, drop of void ratio per tenfold time.
    strength : Strength or None
        Replaces the undrained strength that follows from M, lambda and kappa.
    initial_excess : InitialExcess or None
        Pore pressure that is still to dissipate when the works begin; None for none.
    undrained_modulus : UndrainedModulus or None
        For settlement by undrained distortion; None to leave it out.
    """

    model_config = ConfigDict(
        json_schema_extra={
            "allOf": [
                {"oneOf": [{"required": [key]} for key in keys]}
                for keys in (("lambda", "Cc", "CR"), ("kappa", "Cs", "RR"), ("M", "phi"))
            ],
            "not": {"required": ["C_alpha_ratio", "C_alpha"]},
        }
    )

    name: Name = Field(description="name of the layer, unique")
    soil: Literal["clay"] = Field(description="kind of soil")
    thickness: Thickness
    unit_weight: UnitWeight
    unit_weight_above: UnitWeightAbove = None
    void_ratio: VoidRatio
    lambda_: Annotated[
        Distribution | None,
        _slope(0.005, 5.0, "drop of void ratio per unit of ln stress, virgin; or Cc, or CR"),
    ] = Field(default=None, alias="lambda")
    Cc: Annotated[
        Distribution | None,
        _slope(0.01, 12.0, "drop of void ratio per tenfold stress, virgin; given for lambda"),
    ] = None
    CR: Annotated[
        Distribution | None,
        _slope(0.005, 1.0, "strain per tenfold stress, virgin, Cc/(1+e0); given for lambda"),
    ] = None
    kappa: Annotated[
        Distribution | None,
        _slope(0.0005, 2.0, "drop of void ratio per unit of ln stress, reloading; or Cs, or RR"),
    ] = None
    Cs: Annotated[
        Distribution | None,
        _slope(0.001, 4.0, "drop of void ratio per tenfold stress, reloading; given for kappa"),
    ] = None
    RR: Annotated[
        Distribution | None,
        _slope(0.0005, 0.5, "strain per tenfold stress, reloading, Cs/(1+e0); given for kappa"),
    ] = None
    preconsolidation: Preconsolidation = Field(description="preconsolidation stress: one of stress, ocr, pop")
    M: FrictionM = None
    phi: FrictionAngle = None
    permeability: Permeability = Field(description="cv alone, or k with ck")
    kh_kv: Annotated[
        Distribution,
        Uncertain(
            kind="number",
            low=0.2,
            high=50.0,
            source="common practice",
            meaning="horizontal / vertical permeability, for flow to vertical drains",
        ),
    ] = Constant(value=1.0)
    C_alpha_ratio: Annotated[
        Distribution | None,
        Uncertain(
            kind="number",
            low=0.0,
            high=0.15,
            source="common practice",
            meaning="secondary compression index / compression index; no creep if left out",
        ),
    ] = None
    C_alpha: Annotated[
        Distribution | None,
        Uncertain(
            kind="number",
            low=0.0,
            high=2.0,
            source="common practice",
            meaning="secondary compression index, fall of void ratio per tenfold time; or C_alpha_ratio",
        ),
    ] = None
    strength: Strength | None = Field(
        default=None, description="overrides the strength from M, lambda and kappa"
    )
    initial_excess: InitialExcess | None = Field(
        default=None,
        description="excess pore pressure when the works begin: pressure alone or with shape, or degree with "
        "load; none if left out",
    )
    undrained_modulus: UndrainedModulus | None = Field(
        default=None, description="Eu or ratio; no settlement by undrained distortion if left out"
    )


class GranularLayer(Table):
    """A layer of sand or gravel, which drains freely and settles at once.

    Attributes
    ----------
    name : str
        Name, unique among the layers.
    soil : str
        ``granular``.
    thickness, unit_weight, unit_weight_above : Distribution
        State in situ, [m], [kN/m3], [kN/m3].
    constrained_modulus : Distribution, [kPa]
        Stress per vertical strain without lateral strain.
    phi : Distribution, [degree]
        Friction angle.
    head : Distribution or None, [m]
        Piezometric level in the layer, as depth below ground level; None where it follows from the rest.
    """

    name: Name = Field(description="name of the layer, unique")
    soil: Literal["granular"] = Field(description="kind of soil")
    thickness: Thickness
    unit_weight: UnitWeight
    unit_weight_above: UnitWeightAbove = None
    constrained_modulus: Annotated[
        Distribution,
        Uncertain(
            kind="pressure",
            low=100.0,
            high=2e6,
            source="common practice",
            meaning="vertical stress per vertical strain without lateral strain",
            spatial=True,
        ),
    ]
    phi: Annotated[
        Distribution,
        Uncertain(
            kind="angle",
            low=15.0,
            high=60.0,
            source="common practice",
            meaning="friction angle",
            spatial=True,
        ),
    ]
    head: LayerHead = None


Layer = Annotated[ClayLayer | GranularLayer, Field(discriminator="soil")]
