"""Drivers of exceedance: which uncertain parameters decide whether a limit is exceeded."""

from probsoil.sensitivity.accumulate import GROUPS, DriverSums, Gathering, driver_sums, merge
from probsoil.sensitivity.drivers import Driver, Drivers, drivers
from probsoil.sensitivity.elasticities import Elasticity, elasticities
from probsoil.sensitivity.shapley import linear_shapley
from probsoil.sensitivity.shares import Shares, shares

__all__ = [
    "GROUPS",
    "Driver",
    "DriverSums",
    "Drivers",
    "Elasticity",
    "Gathering",
    "Shares",
    "driver_sums",
    "drivers",
    "elasticities",
    "linear_shapley",
    "merge",
    "shares",
]
