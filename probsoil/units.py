"""Units of the numbers a user writes, converted to the base units used inside.

Usual engineering units are in a table of exact factors; anything else of the right
dimension is left to `pint`, which is imported only then because it is slow to load.
Base units: m, kPa, kN/m3, year of 365.25 days, m/s (permeability), m2/year
(coefficient of consolidation), m3/year (discharge capacity), m3/m (volume per metre run), degree.
"""

import math
import re
from difflib import get_close_matches
from functools import lru_cache

from probsoil.errors import ParameterError
from probsoil.unit_tables import (
    BASE_UNITS,
    DENSITIES,
    EASILY_CONFUSED,
    KINDS,
    PINT_BASES,
    TABLE,
    USUAL,
    Kind,
)

__all__ = [
    "BASE_UNITS",
    "KINDS",
    "NUMBER_PATTERN",
    "Kind",
    "UnitError",
    "allowed_text",
    "has_other_units",
    "kind_of_unit",
    "tabulated_units",
    "to_base",
    "usual_units",
]

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
    return USUAL[kind]


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
    return dict(TABLE[kind])


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
    return kind in PINT_BASES


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
    return f"a number in {USUAL[kind][0]}, or a string with a unit: {', '.join(USUAL[kind])}, ..."


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
        if spelt in TABLE[kind]:
            return kind
    return next((kind for kind in PINT_BASES if _by_pint(spelt, kind) is not None), None)


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
            hint=f'write {match[1]} without quotes, or "{match[1]} {USUAL[kind][0]}"',
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
    factor = TABLE[kind].get(spelt)
    if factor is None and spelt not in EASILY_CONFUSED:
        factor = _by_pint(spelt, kind)
    if factor is None:
        raise _wrong_unit(unit, spelt, kind)
    return factor


def _wrong_unit(unit: str, spelt: str, kind: Kind) -> UnitError:
    allowed = allowed_text(kind)
    if kind == "unit weight" and spelt in DENSITIES:
        factor = 9.81 * DENSITIES[spelt]
        return UnitError(
            f'unit "{unit}" is a unit of density, not of unit weight',
            allowed=allowed,
            hint=f"multiply by {factor:.4g} and give kN/m3 (gravity 9.81 m/s2)",
        )
    other = None if spelt in EASILY_CONFUSED else kind_of_unit(unit)
    what = f"is a unit of {other}, not of {kind}" if other else f"is not a unit of {kind}"
    nearest = (
        EASILY_CONFUSED.get(spelt) if EASILY_CONFUSED.get(spelt) in TABLE[kind] else _nearest(spelt, kind)
    )
    return UnitError(
        f'unit "{unit}" {what}', allowed=allowed, hint=f'did you mean "{nearest}"?' if nearest else None
    )


def _nearest(spelt: str, kind: Kind) -> str | None:
    """Nearest tabulated unit; usual units win a tie, and case is overlooked."""
    names = list(dict.fromkeys((*USUAL[kind], *TABLE[kind])))
    by_lower = {name.lower(): name for name in reversed(names)}
    found = get_close_matches(
        spelt.lower(), list(dict.fromkeys(name.lower() for name in names)), n=1, cutoff=0.6
    )
    return by_lower[found[0]] if found else None


def _by_pint(spelt: str, kind: Kind) -> float | None:
    """Factor to the base unit by pint, or None where the unit does not fit."""
    expression = re.sub(r"(?<=[A-Za-z])(-?[1-9])(?![0-9])", r"**\1", spelt)
    if kind not in PINT_BASES or len(expression) > 40 or not _SAFE_UNIT.fullmatch(expression):
        return None
    return _pint_factor(expression, PINT_BASES[kind])


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
