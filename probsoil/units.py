"""Units of the numbers a user writes, converted to the base units used inside.

Usual engineering units are in a table of exact factors; anything else of the right
dimension is left to `pint`, which is imported only then because it is slow to load.
Base units: m, kPa, kN/m3, year of 365.25 days, m/s (permeability), m2/year
(coefficient of consolidation), m3/year (discharge capacity), degree.
"""

import math
import re
from difflib import get_close_matches
from functools import lru_cache
from typing import Literal, get_args

from probsoil.errors import ParameterError

Kind = Literal[
    "length",
    "pressure",
    "unit weight",
    "time",
    "permeability",
    "coefficient of consolidation",
    "discharge capacity",
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


_TABLE: dict[Kind, dict[str, float]] = {
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
_USUAL: dict[Kind, tuple[str, ...]] = {
    "length": ("m", "cm", "mm", "ft", "in"),
    "pressure": ("kPa", "MPa", "kN/m2", "bar", "psf", "psi"),
    "unit weight": ("kN/m3", "N/m3", "MN/m3", "lbf/ft3", "pcf"),
    "time": ("years", "months", "weeks", "days"),
    "permeability": ("m/s", "cm/s", "mm/s", "m/day", "m/year", "ft/day"),
    "coefficient of consolidation": ("m2/year", "m2/s", "cm2/s", "mm2/s", "m2/day", "ft2/day"),
    "discharge capacity": ("m3/year", "m3/s", "cm3/s", "m3/day", "ft3/year"),
    "angle": ("degrees", "rad"),
    "number": ("%",),
}
_DENSITIES = {
    "Mg/m3": 1.0,
    "t/m3": 1.0,
    "g/cm3": 1.0,
    "kg/m3": 1e-3,
    "lb/ft3": 0.45359237e-3 / _FOOT**3,
}  # Mg/m3
_EASILY_CONFUSED = {"mPa": "MPa", "kpa": "kPa", "Kpa": "kPa", "KPa": "kPa", "mpa": "MPa", "KN/m3": "kN/m3"}
_PINT_BASES: dict[Kind, str] = {
    "length": "meter",
    "pressure": "kilopascal",
    "unit weight": "kilonewton / meter ** 3",
    "time": "julian_year",
    "permeability": "meter / second",
    "coefficient of consolidation": "meter ** 2 / julian_year",
    "discharge capacity": "meter ** 3 / julian_year",
}

_SUPERSCRIPTS = str.maketrans("²³·μµ", "23*uu")

NUMBER_PATTERN = r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?"
_QUANTITY = re.compile(rf"\s*({NUMBER_PATTERN})\s*(.*?)\s*", re.DOTALL)
_WORD = r"[A-Za-z_µ°%‰]+(?:\*\*-?[1-9])?"
_SAFE_UNIT = re.compile(rf"{_WORD}(?:[*/ ]{_WORD})*")


class UnitError(ParameterError):
    """A quantity cannot be read, or its unit is of another kind.

    Attributes
    ----------
    message : str
        What is wrong.
    allowed : str
        The rule.
    hint : str or None
        Remedy.
    """

    def __init__(self, message: str, *, allowed: str, hint: str | None = None) -> None:
        super().__init__(message)
        self.message = message
        self.allowed = allowed
        self.hint = hint


def usual_units(kind: Kind) -> tuple[str, ...]:
    """Return the units shown to users for one kind of quantity.

    Parameters
    ----------
    kind : str
        Kind of quantity.

    Returns
    -------
    units : tuple of str
        Unit names, the base unit or its plural first where one exists.
    """
    return _USUAL[kind]


def tabulated_units(kind: Kind) -> dict[str, float]:
    """Return every unit of the table with its factor.

    Parameters
    ----------
    kind : str
        Kind of quantity.

    Returns
    -------
    factors : dict of str to float
        Base units in one of the unit, [base unit].
    """
    return dict(_TABLE[kind])


def has_other_units(kind: Kind) -> bool:
    """Return whether units beyond the table are understood for one kind of quantity.

    Parameters
    ----------
    kind : str
        Kind of quantity.

    Returns
    -------
    open : bool
        False for angles and bare numbers, which have no dimension to check.
    """
    return kind in _PINT_BASES


def allowed_text(kind: Kind) -> str:
    """Return in words what may be written for one kind of quantity.

    Parameters
    ----------
    kind : str
        Kind of quantity.

    Returns
    -------
    text : str
        Sentence fragment for an error message.
    """
    if kind == "number":
        return 'a bare number, or a string such as "20 %"'
    return f"a number in {_USUAL[kind][0]}, or a string with a unit: {', '.join(_USUAL[kind])}, ..."


def to_base(value: float | str, kind: Kind) -> float:
    """Return a written quantity in the base unit of its kind.

    Parameters
    ----------
    value : float or str, [base unit of `kind`]
        Bare number (already in the base unit) or text such as ``"6 weeks"``.
    kind : str
        Kind of quantity the key asks for.

    Returns
    -------
    number : float, [base unit of `kind`]
        Finite number.

    Raises
    ------
    UnitError
        If the text is not a number with a unit of that kind, or the number is not finite.
    """
    if isinstance(value, str):
        return _finite(_from_text(value, kind), kind)
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise UnitError("this is not a number", allowed=allowed_text(kind))
    try:
        return _finite(float(value), kind)
    except OverflowError:
        raise UnitError("the number is too large", allowed=allowed_text(kind)) from None


def kind_of_unit(unit: str) -> Kind | None:
    """Return the kind of quantity a unit measures.

    Parameters
    ----------
    unit : str
        Unit as written by the user.

    Returns
    -------
    kind : str or None
        None where the unit is unknown or of no kind used here.
    """
    spelt = _normalised(unit)
    for kind in KINDS:
        if spelt in _TABLE[kind]:
            return kind
    return next((kind for kind in _PINT_BASES if _by_pint(spelt, kind) is not None), None)


def _finite(number: float, kind: Kind) -> float:
    if math.isfinite(number):
        return number
    said = "this is not a number (nan)" if math.isnan(number) else "the number is infinite"
    raise UnitError(said, allowed=f"a finite number; {allowed_text(kind)}")


def _from_text(text: str, kind: Kind) -> float:
    match = _QUANTITY.fullmatch(text)
    if match is None:
        raise UnitError("this is not a number with a unit", allowed=allowed_text(kind), hint=_text_hint(text))
    number, unit = float(match[1]), match[2]
    if not unit:
        raise UnitError(
            "a string must carry a unit",
            allowed=allowed_text(kind),
            hint=f'write {match[1]} without quotes, or "{match[1]} {_USUAL[kind][0]}"',
        )
    if unit[0] == ",":
        raise UnitError(
            "a comma is not a decimal sign here", allowed=allowed_text(kind), hint="use a decimal point"
        )
    return number * _factor(unit, kind)


def _text_hint(text: str) -> str | None:
    return "use a decimal point" if re.match(r"\s*[+-]?,\d", text) else None


def _normalised(unit: str) -> str:
    """Spell a unit as the table does: superscripts, carets and blanks taken out."""
    spelt = unit.strip().translate(_SUPERSCRIPTS)
    spelt = re.sub(r"\s+per\s+", "/", spelt)
    spelt = re.sub(r"\s*([*/^]+)\s*", r"\1", spelt)
    return re.sub(r"(?:\^|\*\*)(?=\d)", "", spelt)


def _factor(unit: str, kind: Kind) -> float:
    spelt = _normalised(unit)
    factor = _TABLE[kind].get(spelt)
    if factor is None and spelt not in _EASILY_CONFUSED:
        factor = _by_pint(spelt, kind)
    if factor is None:
        raise _wrong_unit(unit, spelt, kind)
    return factor


def _wrong_unit(unit: str, spelt: str, kind: Kind) -> UnitError:
    allowed = allowed_text(kind)
    if kind == "unit weight" and spelt in _DENSITIES:
        factor = 9.81 * _DENSITIES[spelt]
        return UnitError(
            f'unit "{unit}" is a unit of density, not of unit weight',
            allowed=allowed,
            hint=f"multiply by {factor:.4g} and give kN/m3 (gravity 9.81 m/s2)",
        )
    other = None if spelt in _EASILY_CONFUSED else kind_of_unit(unit)
    what = f"is a unit of {other}, not of {kind}" if other else f"is not a unit of {kind}"
    nearest = (
        _EASILY_CONFUSED.get(spelt) if _EASILY_CONFUSED.get(spelt) in _TABLE[kind] else _nearest(spelt, kind)
    )
    return UnitError(
        f'unit "{unit}" {what}', allowed=allowed, hint=f'did you mean "{nearest}"?' if nearest else None
    )


def _nearest(spelt: str, kind: Kind) -> str | None:
    """Nearest tabulated unit; usual units win a tie, and case is overlooked."""
    names = list(dict.fromkeys((*_USUAL[kind], *_TABLE[kind])))
    by_lower = {name.lower(): name for name in reversed(names)}
    found = get_close_matches(
        spelt.lower(), list(dict.fromkeys(name.lower() for name in names)), n=1, cutoff=0.6
    )
    return by_lower[found[0]] if found else None


def _by_pint(spelt: str, kind: Kind) -> float | None:
    """Factor to the base unit by pint, or None where the unit does not fit."""
    expression = re.sub(r"(?<=[A-Za-z])(-?[1-9])(?![0-9])", r"**\1", spelt)
    if kind not in _PINT_BASES or len(expression) > 40 or not _SAFE_UNIT.fullmatch(expression):
        return None
    return _pint_factor(expression, _PINT_BASES[kind])


@lru_cache(maxsize=256)
def _pint_factor(expression: str, base: str) -> float | None:
    registry, failures = _pint()
    try:
        factor = float(registry.Quantity(1.0, registry.parse_units(expression)).to(base).magnitude)
    except failures:
        return None
    return factor if math.isfinite(factor) and factor > 0.0 else None


@lru_cache(maxsize=1)
def _pint():  # type: ignore[no-untyped-def]  # pint's registry is generic over run-time classes
    """Make the registry once; it takes about half a second."""
    import pint

    return pint.UnitRegistry(), (
        pint.errors.PintError,
        ArithmeticError,
        TypeError,
        ValueError,
        AttributeError,
    )
