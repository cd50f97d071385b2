"""The figures of an interpretation: each test with its constructions drawn on it."""

import re
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from probsoil.laboratory.interpretation import Interpretation
from probsoil.report.alttext import Words
from probsoil.report.drawing import drawn_figure
from probsoil.report.plot_oedometer import plot_oedometer, plot_time_curve
from probsoil.report.plot_soundings import plot_cone, plot_triaxial, plot_vane
from probsoil.report.text import number_text

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from probsoil.laboratory.oedometer import OedometerResult


@dataclass(frozen=True, slots=True, kw_only=True)
class TestFigure:
    """One figure of one test.

    Attributes
    ----------
    kind : str
        Of the test.
    test : str
        Name of the test.
    name : str
        Of the figure, fit for a file.
    words : Words
        Title and description.
    svg : str
        Vector graphic.
    """

    __test__ = False  # no test of pytest's

    kind: str
    test: str
    name: str
    words: Words
    svg: str


_Draw = Callable[["Figure", Any], None]


def interpretation_figures(interpretation: Interpretation) -> tuple[TestFigure, ...]:
    """Draw every test.

    Parameters
    ----------
    interpretation : Interpretation
        The tests.

    Returns
    -------
    figures : tuple of TestFigure
        In the order of the tests; of an oedometer test also one for each virgin increment read in time, or
        for every increment where none is virgin.
    """
    drawn: list[TestFigure] = []
    taken: set[str] = set()
    for kind, test, words, draw, data in _wanted(interpretation):
        name = free_name(f"{kind}-{test}", taken)
        drawn.append(
            TestFigure(
                kind=kind, test=test, name=name, words=words, svg=drawn_figure(name, words, draw, data)
            )
        )
    return tuple(drawn)


def _wanted(interpretation: Interpretation) -> Iterator[tuple[str, str, Words, _Draw, object]]:
    for oedometer in interpretation.oedometers:
        yield from _oedometer(oedometer)
    for triaxial in interpretation.triaxials:
        sheet, slope = triaxial.sheet, triaxial.slope_at_failure
        said = [
            f"{triaxial.peak.deviator:.3g} kPa at most" if triaxial.peak else "failure cannot be told",
            f"M {number_text(slope.value)}" if slope else "",
        ]
        words = Words(title=f"{sheet.kind} test {sheet.test}", description=f"Deviator: {_joined(said)}.")
        yield "triaxial", sheet.test, words, plot_triaxial, triaxial
    for vane in interpretation.vanes:
        words = Words(
            title=f"Vane profile {vane.sheet.test}",
            description=f"{vane.sheet.depth.size} tests, {vane.corrected_by}.",
        )
        yield "vane", vane.sheet.test, words, plot_vane, vane
    for cone in interpretation.cones:
        said = [f"{one.layer or 'slice'} {one.net_resistance:.0f} kPa" for one in cone.averages]
        words = Words(
            title=f"Cone sounding {cone.sheet.test}",
            description=f"Average net resistance: {_joined(said) or 'not known'}.",
        )
        yield "cone", cone.sheet.test, words, plot_cone, cone


def _oedometer(result: "OedometerResult") -> Iterator[tuple[str, str, Words, _Draw, object]]:
    said = [
        f"{name} {number_text(found.value)}{unit}"
        for name, found, unit in (
            ("lambda", result.lam, ""),
            ("kappa", result.kappa, ""),
            ("preconsolidation stress", result.preconsolidation, " kPa"),
        )
        if found is not None
    ]
    words = Words(
        title=f"Oedometer test {result.sheet.test}",
        description=f"Void ratio against stress: {_joined(said) or 'no branch can be told'}.",
    )
    yield "oedometer", result.sheet.test, words, plot_oedometer, result
    virgin = [one for one in result.increments if one.virgin]
    for increment in virgin or result.increments:
        cv = increment.curve.cv
        step = f"{increment.from_stress:g} to {increment.to_stress:g} kPa"
        words = Words(
            title=f"Oedometer test {result.sheet.test}, {step}",
            description=f"cv {number_text(cv.value)} m2/year." if cv else "cv cannot be read off.",
        )
        data = (result.sheet.time_readings[increment.place], increment)
        yield "oedometer", result.sheet.test, words, plot_time_curve, data


def _joined(parts: Iterable[str]) -> str:
    return ", ".join(part for part in parts if part)


def free_name(wanted: str, taken: set[str]) -> str:
    """Return a name fit for a file and not yet taken, whatever the alphabet and case of the test's own.

    Parameters
    ----------
    wanted : str
        Name to make fit.
    taken : set of str
        Names in use; the new one is put in.

    Returns
    -------
    name : str
        Lower case letters, digits and hyphens.
    """
    plain = re.sub(r"[^a-z0-9]+", "-", wanted.lower()).strip("-")
    name, number = plain, 1
    while name in taken:
        number += 1
        name = f"{plain}-{number}"
    taken.add(name)
    return name
