"""The section of an interpretation that holds each test against the parameters of its layer."""

from typing import TYPE_CHECKING, Any

from probsoil.assessment.site_back_check import SiteBackChecks
from probsoil.report.drawing import drawn_figure
from probsoil.report.interpretation_figures import TestFigure, free_name
from probsoil.report.plot_back_check import back_check_words, plot_back_check

if TYPE_CHECKING:
    import pandas as pd

KIND = "back-check"
TABLES = ("back_check", "back_check_readings")
"""Names of the tables."""


def back_check_tables(found: SiteBackChecks) -> "dict[str, pd.DataFrame]":
    """Arrange back-checks as tables.

    Parameters
    ----------
    found : SiteBackChecks
        Back-checks of a site.

    Returns
    -------
    frames : dict of str to DataFrame
        ``back_check``, a row per test, and ``back_check_readings``, a row per reading; empty without checks.
    """
    import pandas as pd

    if not found.checks:
        return {}
    summary = [
        {
            "test": check.test,
            "layer": layer or "not known",
            "parameters from": check.parameters.source,
            "readings [-]": sum(int(curve.counted.sum()) for curve in check.curves),
            "within the band [%]": 100.0 * check.share_inside,
            "yields dry of critical [%]": 100.0 * check.dry_share,
            "realisations without an answer [-]": check.without_answer,
            "what it looks like": "; ".join(check.words) or "as the others",
        }
        for check, layer in zip(found.checks, found.layers, strict=True)
    ]
    readings = pd.concat([check.to_frame() for check in found.checks], ignore_index=True)
    return dict(zip(TABLES, (pd.DataFrame(summary), readings), strict=True))


def back_check_figures(found: SiteBackChecks) -> tuple[TestFigure, ...]:
    """Draw back-checks.

    Parameters
    ----------
    found : SiteBackChecks
        Back-checks of a site.

    Returns
    -------
    figures : tuple of TestFigure
        One per test.
    """
    taken: set[str] = set()
    drawn = []
    for check in found.checks:
        name, words = free_name(f"{KIND}-{check.test}", taken), back_check_words(check)
        svg = drawn_figure(name, words, plot_back_check, check)
        drawn.append(TestFigure(kind=KIND, test=check.test, name=name, words=words, svg=svg))
    return tuple(drawn)


def back_check_view(found: SiteBackChecks, drawn: tuple[TestFigure, ...]) -> dict[str, Any]:
    """Arrange back-checks for the page.

    Parameters
    ----------
    found : SiteBackChecks
        Back-checks of a site.
    drawn : tuple of TestFigure
        Their figures.

    Returns
    -------
    view : dict
        Tests with figure and words, and how many stay within.
    """
    from markupsafe import Markup

    tests = [
        {
            "name": one.test,
            "title": one.words.title,
            "words": one.words.description,
            "svg": Markup(one.svg),
            "remarks": check.words,
        }
        for check, one in zip(found.checks, drawn, strict=True)
    ]
    within = sum(not check.words for check in found.checks)
    return {"tests": tests, "within": within, "remarks": found.remarks}
