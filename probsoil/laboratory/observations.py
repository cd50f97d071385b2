"""Observed numbers, one row each: what interpretation gives and updating takes."""

import csv
import io
from collections.abc import Iterable
from dataclasses import dataclass, fields
from typing import Literal

from probsoil.laboratory.sheets import Place

EvidenceKind = Literal["oedometer", "triaxial", "vane", "cone"]

UNITS = {
    "lambda": "-",
    "kappa": "-",
    "preconsolidation_stress": "kPa",
    "cv": "m2/year",
    "k": "m/s",
    "C_alpha_ratio": "-",
    "M": "-",
    "su": "kPa",
    "su_ratio": "-",
    "Lambda": "-",
    "void_ratio": "-",
    "q_net": "kPa",
}
"""Unit of each parameter that may be observed."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Observation:
    """One observed number.

    Attributes
    ----------
    kind : str
        Of the test: ``oedometer``, ``triaxial``, ``vane`` or ``cone``.
    test : str
        Name of the test.
    hole : str
        Borehole or sounding.
    x, y : float or None, [m]
        Plan position; None where not known.
    layer : str
        Layer of the scenario; empty where not known.
    depth : float, [m]
        Below ground level; of an average, the middle.
    parameter : str
        What was observed.
    value : float, [unit]
        The number.
    unit : str
        Its unit.
    standard_error : float or None, [unit]
        Of the interpretation alone; None where not known.
    flag : str
        Why the number is doubtful; empty where it is not.
    """

    kind: EvidenceKind
    test: str
    hole: str
    x: float | None
    y: float | None
    layer: str
    depth: float
    parameter: str
    value: float
    unit: str
    standard_error: float | None
    flag: str = ""


TOGETHER = " + "
"""Between the names of tests that gave a number together."""

EVIDENCE_COLUMNS = tuple(one.name for one in fields(Observation))
"""Header of the evidence table."""


def observation(
    kind: EvidenceKind,
    test: tuple[str, Place],
    parameter: str,
    value: float,
    standard_error: float | None,
    *,
    flag: str = "",
) -> Observation:
    """Return one observed number, its layer not yet known.

    Parameters
    ----------
    kind : str
        Of the test.
    test : tuple of str and Place
        Name of the test, and where it was made.
    parameter : str
        What was observed, among `UNITS`.
    value : float, [unit of the parameter]
        The number.
    standard_error : float or None, [unit of the parameter]
        Of the interpretation alone.
    flag : str
        Why it is doubtful.

    Returns
    -------
    observation : Observation
        One row.
    """
    name, place = test
    located = place.x is not None and place.y is not None  # half a position is none
    return Observation(
        kind=kind,
        test=name,
        hole=place.hole,
        x=place.x if located else None,
        y=place.y if located else None,
        layer="",
        depth=place.depth,
        parameter=parameter,
        value=value,
        unit=UNITS[parameter],
        standard_error=standard_error,
        flag=flag,
    )


def evidence_text(observations: Iterable[Observation]) -> str:
    """Return observed numbers as the evidence table that a scenario may name.

    Parameters
    ----------
    observations : iterable of Observation
        In order.

    Returns
    -------
    text : str
        Comma-separated values, one row per number; empty where something is not known.
    """
    page = io.StringIO()
    writer = csv.writer(page, lineterminator="\n")
    writer.writerow(EVIDENCE_COLUMNS)
    for one in observations:
        writer.writerow([_cell(getattr(one, name)) for name in EVIDENCE_COLUMNS])
    return page.getvalue()


def _cell(value: str | float | None) -> str:
    if value is None:
        return ""
    return value if isinstance(value, str) else f"{value:.6g}"
