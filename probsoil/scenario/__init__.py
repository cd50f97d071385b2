"""What the user writes: the scenario file, read and checked in full."""

from probsoil.scenario.distributions import (
    Beta,
    Constant,
    Distribution,
    Lognormal,
    Normal,
    Triangular,
    TruncatedNormal,
    Uniform,
)
from probsoil.scenario.layers import ClayLayer, GranularLayer, Permeability, Preconsolidation, Strength
from probsoil.scenario.limits import (
    AddedFillLimit,
    AngularDistortionLimit,
    BearingSafetyLimit,
    ConsolidationLimit,
    ConsolidationTimeLimit,
    DifferentialSettlementLimit,
    SettlementLimit,
    SlipSafetyLimit,
)
from probsoil.scenario.listed_distributions import Discrete, Empirical, Percentiles
from probsoil.scenario.loads import AreaLoad, CircleLoad, EmbankmentLoad, RectangleLoad, Stage, StripLoad
from probsoil.scenario.models import Dependence, ModelError, Scenario, Site
from probsoil.scenario.quantities import Quantity
from probsoil.scenario.reader import parse_scenario, read_scenario
from probsoil.scenario.reference import reference_table
from probsoil.scenario.remarks import remarks
from probsoil.scenario.schema import scenario_schema
from probsoil.scenario.skewed_distributions import Gamma, Gumbel
from probsoil.scenario.starters import STARTERS, starter_text
from probsoil.scenario.stations import Station, StationLine

__all__ = [
    "STARTERS",
    "AddedFillLimit",
    "AngularDistortionLimit",
    "AreaLoad",
    "BearingSafetyLimit",
    "Beta",
    "CircleLoad",
    "ClayLayer",
    "ConsolidationLimit",
    "ConsolidationTimeLimit",
    "Constant",
    "Dependence",
    "DifferentialSettlementLimit",
    "Discrete",
    "Distribution",
    "EmbankmentLoad",
    "Empirical",
    "Gamma",
    "GranularLayer",
    "Gumbel",
    "Lognormal",
    "ModelError",
    "Normal",
    "Percentiles",
    "Permeability",
    "Preconsolidation",
    "Quantity",
    "RectangleLoad",
    "Scenario",
    "SettlementLimit",
    "Site",
    "SlipSafetyLimit",
    "Stage",
    "Station",
    "StationLine",
    "Strength",
    "StripLoad",
    "Triangular",
    "TruncatedNormal",
    "Uniform",
    "parse_scenario",
    "read_scenario",
    "reference_table",
    "remarks",
    "scenario_schema",
    "starter_text",
]
