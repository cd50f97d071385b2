"""Drivers of exceedance: which uncertain parameters decide whether a limit is exceeded."""

from probsoil.sensitivity.accumulate import GROUPS, DriverSums, Gathering, driver_sums, merge
from probsoil.sensitivity.cases import (
    CaseSums,
    Profile,
    ProfileRow,
    case_sums,
    exceeding_profile,
    group_elasticities,
    merged_cases,
)
from probsoil.sensitivity.changes import Trials, trials
from probsoil.sensitivity.chaos_shapley import ShapleyShares, shapley_shares
from probsoil.sensitivity.drivers import Driver, Drivers, drivers
from probsoil.sensitivity.elasticities import Elasticity, elasticities
from probsoil.sensitivity.interactions import ModelShares, Pair, model_shares, strongest_pairs
from probsoil.sensitivity.reweighting import reweighted_halving
from probsoil.sensitivity.shapley import linear_shapley
from probsoil.sensitivity.shares import Shares, shares
from probsoil.sensitivity.stratified import Strata, stratified_drivers, stratified_group_elasticities
from probsoil.sensitivity.tables import (
    FunctionDrivers,
    LimitOn,
    SampleDrivers,
    function_drivers,
    sample_drivers,
)
from probsoil.sensitivity.turning import TurningValue, turning_value
from probsoil.sensitivity.what_if import WhatIf, halved_knowledge, probability_at_values, what_if_frame

__all__ = [
    "GROUPS",
    "CaseSums",
    "Driver",
    "DriverSums",
    "Drivers",
    "Elasticity",
    "FunctionDrivers",
    "Gathering",
    "LimitOn",
    "ModelShares",
    "Pair",
    "Profile",
    "ProfileRow",
    "SampleDrivers",
    "ShapleyShares",
    "Shares",
    "Strata",
    "Trials",
    "TurningValue",
    "WhatIf",
    "case_sums",
    "driver_sums",
    "drivers",
    "elasticities",
    "exceeding_profile",
    "function_drivers",
    "group_elasticities",
    "halved_knowledge",
    "linear_shapley",
    "merge",
    "merged_cases",
    "model_shares",
    "probability_at_values",
    "reweighted_halving",
    "sample_drivers",
    "shapley_shares",
    "shares",
    "stratified_drivers",
    "stratified_group_elasticities",
    "strongest_pairs",
    "trials",
    "turning_value",
    "what_if_frame",
]
