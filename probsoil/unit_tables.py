"""Units by kind of quantity, with their factors to the base units."""

import math
from typing import Literal, get_args

Kind = Literal[
    "length",
    "pressure",
    "unit weight",
    "time",
    "permeability",
    "coefficient of consolidation",
    "discharge capacity",
    "volume per metre",
    "angle",
    "number",
]
KINDS: tuple[Kind, ...] = get_args(Kind)

BASE_UNITS: dict[Kind, str] = {
    "length": "m",
    "pressure": "kPa",
    "unit weight": "kN/m3",
    "time": "year",
    "permeability": "m/s",
    "coefficient of consolidation": "m2/year",
    "discharge capacity": "m3/year",
    "volume per metre": "m3/m",
    "angle": "degree",
    "number": "-",
}

# Exact by definition: international foot and pound, standard gravity, Julian year.
_FOOT = 0.3048
_INCH = 0.0254
_POUND_FORCE = 0.45359237 * 9.80665e-3  # kN
_TONNE_FORCE = 9.80665  # kN
_DAY = 1.0 / 365.25  # year
_HOUR = _DAY / 24.0
_MINUTE = _HOUR / 60.0
_SECOND = _MINUTE / 60.0

_TIMES = {
    name: factor
    for names, factor in (
        ("s second seconds", _SECOND),
        ("min minute minutes", _MINUTE),
        ("h hr hour hours", _HOUR),
        ("d day days", _DAY),
        ("week weeks", 7.0 * _DAY),
        ("month months", 1.0 / 12.0),
        ("year years yr yrs y a", 1.0),
    )
    for name in names.split()
}
_LENGTHS = {
    "m": 1.0,
    "mm": 1e-3,
    "cm": 1e-2,
    "km": 1e3,
    "um": 1e-6,
    "in": _INCH,
    "inch": _INCH,
    "ft": _FOOT,
    "foot": _FOOT,
    "feet": _FOOT,
    "yd": 3.0 * _FOOT,
}
_FORCES = {
    "N": 1e-3,
    "kN": 1.0,
    "MN": 1e3,
    "lbf": _POUND_FORCE,
    "kgf": 1e-3 * _TONNE_FORCE,
    "tf": _TONNE_FORCE,
}


def _rates(lengths: tuple[str, ...], power: int, base_time: str) -> dict[str, float]:
    """Every `length ** power` per time, relative to m ** power per `base_time`."""
    suffix = "" if power == 1 else str(power)
    return {
        f"{length}{suffix}/{time}": _LENGTHS[length] ** power / (factor / _TIMES[base_time])
        for length in lengths
        for time, factor in _TIMES.items()
    }


TABLE: dict[Kind, dict[str, float]] = {
    "length": _LENGTHS,
    "pressure": {
        "kPa": 1.0,
        "Pa": 1e-3,
        "MPa": 1e3,
        "GPa": 1e6,
        "bar": 100.0,
        "mbar": 0.1,
        **{f"{force}/m2": factor for force, factor in _FORCES.items()},
        "N/mm2": 1e3,
        "kgf/cm2": 1e4 * _FORCES["kgf"],
        "psi": _POUND_FORCE / _INCH**2,
        "lbf/in2": _POUND_FORCE / _INCH**2,
        "psf": _POUND_FORCE / _FOOT**2,
        "lbf/ft2": _POUND_FORCE / _FOOT**2,
        "ksf": 1e3 * _POUND_FORCE / _FOOT**2,
        "tsf": 2e3 * _POUND_FORCE / _FOOT**2,
    },
    "unit weight": {
        **{f"{force}/m3": factor for force, factor in _FORCES.items()},
        "lbf/ft3": _POUND_FORCE / _FOOT**3,
        "pcf": _POUND_FORCE / _FOOT**3,
    },
    "time": _TIMES,
    "permeability": _rates(("m", "mm", "cm", "um", "ft", "in"), 1, "s"),
    "coefficient of consolidation": _rates(("m", "mm", "cm", "ft", "in"), 2, "year"),
    "discharge capacity": _rates(("m", "mm", "cm", "ft"), 3, "year"),
    "volume per metre": {
        "m3/m": 1.0,
        "yd3/yd": (3.0 * _FOOT) ** 2,
        "ft3/ft": _FOOT**2,
        "yd3/ft": 27.0 * _FOOT**2,
    },
    "angle": {
        "degree": 1.0,
        "degrees": 1.0,
        "deg": 1.0,
        "°": 1.0,
        "rad": 180.0 / math.pi,
        "radian": 180.0 / math.pi,
        "gon": 0.9,
    },
    "number": {"%": 0.01, "percent": 0.01, "‰": 0.001},
}
# Shown first in an error, so that the list of allowed units stays readable.
USUAL: dict[Kind, tuple[str, ...]] = {
    "length": ("m", "cm", "mm", "ft", "in"),
    "pressure": ("kPa", "MPa", "kN/m2", "bar", "psf", "psi"),
    "unit weight": ("kN/m3", "N/m3", "MN/m3", "lbf/ft3", "pcf"),
    "time": ("years", "months", "weeks", "days"),
    "permeability": ("m/s", "cm/s", "mm/s", "m/day", "m/year", "ft/day"),
    "coefficient of consolidation": ("m2/year", "m2/s", "cm2/s", "mm2/s", "m2/day", "ft2/day"),
    "discharge capacity": ("m3/year", "m3/s", "cm3/s", "m3/day", "ft3/year"),
    "volume per metre": ("m3/m", "yd3/ft", "ft3/ft"),
    "angle": ("degrees", "rad"),
    "number": ("%",),
}
DENSITIES = {
    "Mg/m3": 1.0,
    "t/m3": 1.0,
    "g/cm3": 1.0,
    "kg/m3": 1e-3,
    "lb/ft3": 0.45359237e-3 / _FOOT**3,
}  # Mg/m3
EASILY_CONFUSED = {"mPa": "MPa", "kpa": "kPa", "Kpa": "kPa", "KPa": "kPa", "mpa": "MPa", "KN/m3": "kN/m3"}
PINT_BASES: dict[Kind, str] = {
    "length": "meter",
    "pressure": "kilopascal",
    "unit weight": "kilonewton / meter ** 3",
    "time": "julian_year",
    "permeability": "meter / second",
    "coefficient of consolidation": "meter ** 2 / julian_year",
    "discharge capacity": "meter ** 3 / julian_year",
    "volume per metre": "meter ** 2",
}
