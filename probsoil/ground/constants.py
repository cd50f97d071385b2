"""Physical constants of the ground models, each in one place."""

WATER_UNIT_WEIGHT = 9.81
"""Unit weight of water, [kN/m3] (common practice; fresh water, standard gravity)."""

SECONDS_PER_YEAR = 365.25 * 86400.0
"""Seconds in a Julian year, [s]; turns permeability in m/s into m/year."""
