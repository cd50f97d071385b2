"""The scenario: what is assessed, on which ground, under which load, against which limits."""

from typing import TYPE_CHECKING, Annotated, Literal

from pydantic import BeforeValidator, Field, StringConstraints, model_validator

from probsoil.scenario.base import Label, Table
from probsoil.scenario.checks import cross_checks
from probsoil.scenario.distributions import Constant, Distribution, Normal
from probsoil.scenario.drains import Drains
from probsoil.scenario.evidence import Evidence, TestErrors
from probsoil.scenario.fields import Number, Uncertain
from probsoil.scenario.further_loads import FurtherLoad
from probsoil.scenario.groundwater import BaseHead
from probsoil.scenario.layers import Layer
from probsoil.scenario.limits import Limit
from probsoil.scenario.loads import Load, Stage
from probsoil.scenario.slips import Slip, refuse
from probsoil.scenario.stations import Station, StationLine
from probsoil.scenario.test_results import TestResult

if TYPE_CHECKING:
    from probsoil.scenario.quantities import Quantity

Draws = Literal["monte carlo", "latin hypercube", "sobol"]


def _list(raw: object) -> object:
    """TOML gives lists; inside, nothing may change."""
    return tuple(raw) if isinstance(raw, list) else raw


def _some(raw: object) -> object:
    if raw in ([], ()):
        refuse([Slip(path=(), message="the list is empty", allowed="at least one")])
    return _list(raw)


def _addresses(raw: object) -> object:
    if not isinstance(raw, list | tuple) or len(raw) != 2 or not all(isinstance(part, str) for part in raw):
        refuse(
            [
                Slip(
                    path=(),
                    message="two addresses are needed",
                    allowed='such as ["clay.lambda", "clay.kappa"]',
                )
            ]
        )
    return tuple(raw)


class Site(Table):
    """What holds for the whole site.

    Attributes
    ----------
    water_table : Distribution, [m]
        Depth below ground level.
    base : str
        What lies under the last layer: ``drained`` or ``undrained``.
    base_head : Distribution or None, [m]
        Piezometric level at the bottom of the last layer, as depth below ground level; None for the water
        table.
    mode_factor : Distribution, [-]
        Undrained strength along a slip surface over that in triaxial compression.
    """

    water_table: Annotated[
        Distribution,
        Uncertain(
            kind="length",
            low=0.0,
            high=100.0,
            source="common practice",
            meaning="depth of the water table below ground level; 0 also where the ground is flooded",
        ),
    ]
    base: Literal["drained", "undrained"] = Field(description="what lies under the last layer")
    base_head: BaseHead = None
    mode_factor: Annotated[
        Distribution,
        Uncertain(
            kind="number",
            low=0.2,
            high=1.5,
            source="common practice",
            meaning="undrained strength along a slip surface / that in triaxial compression; "
            "the default is a judgement, to be replaced by local experience",
        ),
    ] = Normal(mean=0.80, sd=0.08 * 0.80)


class Dependence(Table):
    """Rank correlation between two uncertain numbers.

    Attributes
    ----------
    between : tuple of str
        Two addresses.
    rank_correlation : float, [-]
        Spearman's rank correlation.
    """

    between: Annotated[tuple[str, str], BeforeValidator(_addresses)] = Field(
        description="addresses of two uncertain numbers, such as soft clay.lambda"
    )
    rank_correlation: Annotated[
        float,
        Number(
            kind="number",
            low=-1.0,
            high=1.0,
            open_low=True,
            open_high=True,
            source="by definition",
            meaning="Spearman's rank correlation of the two",
        ),
    ]


def _model_error(meaning: str) -> Uncertain:
    return Uncertain(kind="number", low=0.1, high=10.0, source="common practice", meaning=meaning)


class ModelError(Table):
    """Error of the calculation itself, measured over computed.

    Attributes
    ----------
    settlement, stability : Distribution, [-]
        Factors on the computed settlement and factor of safety.
    """

    settlement: Annotated[Distribution, _model_error("measured / computed settlement")] = Constant(value=1.0)
    stability: Annotated[Distribution, _model_error("true / computed factor of safety")] = Constant(value=1.0)


class Scenario(Table):
    """Everything a user says of one case; read it with `read_scenario`.

    Attributes
    ----------
    format : int, [-]
        Version of the file format.
    title : str
        Title of the report.
    seed : int, [-]
        Seed of the random numbers.
    realisations : int, [-]
        Number of draws.
    draws : str
        How they are drawn.
    horizon : float, [year]
        End of the time axis.
    currency : str
        Currency of all costs.
    site : Site
        What holds for the whole site.
    layers : tuple of ClayLayer or GranularLayer
        From ground level down.
    load : EmbankmentLoad, AreaLoad, StripLoad, RectangleLoad or CircleLoad
        The load that is assessed.
    further_loads : tuple of further loads
        Others, which add stress below it.
    stages : tuple of Stage
        In order of time.
    drains : Drains or None
        Vertical drains.
    stations : tuple of Station
        Plan positions at which settlement is computed.
    station_line : StationLine or None
        More of them, evenly along the load.
    dependence : tuple of Dependence
        Rank correlations.
    evidence : tuple of Evidence
        Test results in hand.
    test_errors : tuple of TestErrors
        Errors of kinds of test, in place of the defaults.
    model_error : ModelError
        Error of the calculation itself.
    limits : tuple of limits
        What should not be exceeded.
    """

    format: Literal[1] = Field(description="version of the file format")
    title: Label = Field(description="title of the report")
    seed: int = Field(ge=0, lt=2**63, description="seed of the random numbers")
    realisations: int = Field(default=20_000, ge=1, le=100_000_000, description="number of draws")
    draws: Draws = Field(default="monte carlo", description="how the realisations are drawn")
    horizon: Annotated[
        float,
        Number(
            kind="time",
            low=0.0,
            high=1000.0,
            open_low=True,
            source="common practice",
            meaning="end of the time axis",
        ),
    ]
    currency: Annotated[str, StringConstraints(pattern=r"^\S{1,8}$")] = Field(
        default="EUR", description="currency of all costs"
    )
    site: Site = Field(description="what holds for the whole site")
    layers: Annotated[tuple[Layer, ...], BeforeValidator(_some)] = Field(
        json_schema_extra={"minItems": 1}, description="layers from ground level down"
    )
    load: Load = Field(description="the load")
    further_loads: Annotated[tuple[FurtherLoad, ...], BeforeValidator(_list)] = Field(
        default=(), description="further loads on the site, which add stress below the load"
    )
    stages: Annotated[tuple[Stage, ...], BeforeValidator(_some)] = Field(
        json_schema_extra={"minItems": 1}, description="stages of loading in order of time"
    )
    drains: Drains | None = Field(default=None, description="prefabricated vertical drains")
    stations: Annotated[tuple[Station, ...], BeforeValidator(_list)] = Field(
        default=(),
        description="plan positions at which settlement is computed; if left out, with station_line, the "
        "centreline or centre",
    )
    station_line: StationLine | None = Field(default=None, description="stations evenly along the load")
    dependence: Annotated[tuple[Dependence, ...], BeforeValidator(_list)] = Field(
        default=(), description="rank correlations"
    )
    evidence: Annotated[tuple[Evidence, ...], BeforeValidator(_list)] = Field(
        default=(), description="test results in hand, by which the parameters are updated"
    )
    test_errors: Annotated[tuple[TestErrors, ...], BeforeValidator(_list)] = Field(
        default=(), description="errors of kinds of test, in place of the defaults"
    )
    model_error: ModelError = Field(default=ModelError(), description="error of the calculation itself")
    limits: Annotated[tuple[Limit, ...], BeforeValidator(_some)] = Field(
        json_schema_extra={"minItems": 1}, description="what should not be exceeded"
    )

    @model_validator(mode="after")
    def _hold_together(self) -> "Scenario":
        slips = cross_checks(self)
        if slips:
            refuse(slips, absolute=True)
        return self

    @property
    def all_stations(self) -> tuple[Station, ...]:
        """Stations listed, then those of the line; the first is the one of reference."""
        return self.stations + (() if self.station_line is None else self.station_line.stations())

    @property
    def test_results(self) -> tuple[TestResult, ...]:
        """Every result of a test that is to be used, in the order of the file."""
        return tuple(
            result for number, one in enumerate(self.evidence, start=1) for result in one.results(number)
        )

    def quantities(self) -> "tuple[Quantity, ...]":
        """Return every number that may be uncertain, fixed or not.

        Returns
        -------
        quantities : tuple of Quantity
            In the order site, layers from the top, load, model error.
        """
        from probsoil.scenario.quantities import quantities_of

        return quantities_of(self)
