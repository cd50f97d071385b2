"""The figures of an assessment, as vector graphics that come out the same, byte for byte, on every run."""

import io
import warnings
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import partial
from typing import TYPE_CHECKING, Any

from probsoil.report import alttext
from probsoil.report.evidence import evidence_words
from probsoil.report.palette import LIGHT
from probsoil.report.plot_bars import plot_drivers, plot_factors
from probsoil.report.plot_convergence import convergence_words, plot_convergence
from probsoil.report.plot_evidence import plot_evidence
from probsoil.report.plot_ground import plot_ground
from probsoil.report.plot_section import plot_section
from probsoil.report.plot_settlement import plot_settlement
from probsoil.report.plot_stations import plot_stations
from probsoil.report.ranking import ranked_by
from probsoil.report.section import drawn_check, section_words
from probsoil.report.stations import stations_words
from probsoil.report.svg import tidy_svg
from probsoil.report.text import is_number

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from probsoil.report.alttext import Words

_WIDTH = 7.6  # inches; one unit of the graphic's own coordinates is 1/72 of that
_SHOWN_DRIVERS = 12
_STYLE: dict[Any, Any] = {
    "svg.fonttype": "none",
    "text.parse_math": False,
    "font.size": 10.0,
    "axes.edgecolor": LIGHT["muted"],
    "axes.labelcolor": LIGHT["ink"],
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.facecolor": "none",
    "figure.facecolor": "none",
    "savefig.facecolor": "none",
    "grid.color": LIGHT["line"],
    "grid.linewidth": 0.7,
    "axes.axisbelow": True,
    "text.color": LIGHT["ink"],
    "xtick.color": LIGHT["muted"],
    "ytick.color": LIGHT["muted"],
    "xtick.labelcolor": LIGHT["ink"],
    "ytick.labelcolor": LIGHT["ink"],
    "hatch.color": LIGHT["muted"],
    "hatch.linewidth": 0.6,
    "figure.constrained_layout.use": True,
}


def figures(results: dict[str, Any]) -> dict[str, str]:
    """Draw every figure the results have numbers for.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    drawings : dict of str to str
        Vector graphic by name: ``settlement``, ``stations`` (with two or more), ``slip`` (with ``section``)
        or ``bearing``, ``ground``, ``evidence-1``, ``evidence-2``, ... for the parameters that tests changed,
        ``convergence-1``, ... for the limits that further runs were made for,
        and ``drivers-1``, ``drivers-2``, ... for the limits in their order.
    """
    drawn: dict[str, str] = {}
    drawn |= _settlement_figures(results)
    for key in ("slip", "bearing"):
        if results.get(key):
            words = alttext.stability(results, key)
            drawn[key] = drawn_figure(key, words, partial(plot_factors, failure=key), results[key])
    shown_check = drawn_check(results)
    if shown_check is not None and (results.get("ground") or {}).get("layers"):
        words, data = section_words(shown_check), (shown_check, results["ground"])
        drawn["section"] = drawn_figure("section", words, plot_section, data)
    if (results.get("ground") or {}).get("layers"):
        drawn["ground"] = drawn_figure("ground", alttext.ground(results), plot_ground, results["ground"])
    drawn |= _convergence_figures(results)
    drawn |= _evidence_figures(results)
    for number, limit in enumerate(results["limits"], start=1):
        shown = shown_drivers(results, limit["name"])
        if shown:
            name = f"drivers-{number}"
            measure = ranked_by(results, limit["name"])
            draw = partial(plot_drivers, measure=measure)
            drawn[name] = drawn_figure(name, alttext.drivers(limit, shown, measure), draw, shown)
    return drawn


def _settlement_figures(results: dict[str, Any]) -> dict[str, str]:
    """Draw settlement through time, and over the stations where there are several."""
    data, drawn = results.get("settlement") or {}, {}
    if data.get("times"):
        drawn["settlement"] = drawn_figure(
            "settlement", alttext.settlement(results), plot_settlement, results
        )
    if len(data.get("stations") or []) > 1:
        drawn["stations"] = drawn_figure("stations", stations_words(results), plot_stations, data)
    return drawn


def _convergence_figures(results: dict[str, Any]) -> dict[str, str]:
    """Draw the way to every estimate that further runs were made for."""
    drawn: dict[str, str] = {}
    for number, row in enumerate((results.get("precision") or {}).get("limits") or [], start=1):
        if len(row["path"]) > 1:
            name = f"convergence-{number}"
            drawn[name] = drawn_figure(name, convergence_words(row), plot_convergence, row)
    return drawn


def _evidence_figures(results: dict[str, Any]) -> dict[str, str]:
    """Draw every parameter that tests changed."""
    drawn: dict[str, str] = {}
    for number, row in enumerate((results.get("evidence") or {}).get("parameters") or [], start=1):
        name = f"evidence-{number}"
        drawn[name] = drawn_figure(name, evidence_words(row), plot_evidence, row)
    return drawn


def shown_drivers(results: dict[str, Any], limit_name: str) -> list[dict[str, Any]]:
    """Choose the drivers of a limit that its figure shows: the leading ones that have a number.

    Parameters
    ----------
    results : dict
        The results of an assessment.
    limit_name : str
        Name of the limit.

    Returns
    -------
    rows : list of dict
        At most 12 entries of ``drivers``, ranked ones first.
    """
    key = f"{ranked_by(results, limit_name)}_elasticity"
    rows = [row for row in ordered_drivers(results, limit_name) if is_number(row.get(key))]
    return rows[:_SHOWN_DRIVERS]


def ordered_drivers(results: dict[str, Any], limit_name: str) -> list[dict[str, Any]]:
    """Put the drivers of one limit in order: by rank, then those without one by the size of their number.

    Parameters
    ----------
    results : dict
        The results of an assessment.
    limit_name : str
        Name of the limit.

    Returns
    -------
    rows : list of dict
        Entries of ``drivers`` of that limit.
    """
    rows = [row for row in results.get("drivers") or [] if row["limit"] == limit_name]
    key = f"{ranked_by(results, limit_name)}_elasticity"

    def place(row: dict[str, Any]) -> tuple[float, float]:
        rank = row.get("rank")
        return (float("inf") if rank is None else float(rank), -abs(row.get(key) or 0.0))

    return sorted(rows, key=place)


@contextmanager
def _quiet_glyphs() -> Iterator[None]:
    # The page's own font draws the text; that the measuring font lacks a letter of a name is of no account.
    with warnings.catch_warnings():
        warnings.filterwarnings("ignore", message="Glyph .* missing from")
        yield


def drawn_figure(name: str, words: "Words", draw: "Callable[[Figure, Any], None]", data: object) -> str:
    """Draw one figure.

    Parameters
    ----------
    name : str
        Its name, unique on the page.
    words : Words
        Title and description for those who cannot see it.
    draw : callable
        Draws on an empty figure.
    data : object
        What it draws.

    Returns
    -------
    svg : str
        One ``svg`` element.
    """
    from matplotlib import rc_context
    from matplotlib.figure import Figure

    with rc_context({**_STYLE, "svg.hashsalt": f"probsoil {name}"}), _quiet_glyphs():
        figure = Figure(figsize=(_WIDTH, 3.8))
        draw(figure, data)
        buffer = io.StringIO()
        figure.savefig(buffer, format="svg", metadata={"Date": None, "Creator": None})
    return tidy_svg(buffer.getvalue(), name=name, title=words.title, description=words.description)
