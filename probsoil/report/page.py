"""The page: one file without a request to anywhere, readable without scripts, on paper and by ear."""

import json
from pathlib import Path
from typing import Any

from probsoil.errors import ResultsError
from probsoil.report.drawing import figures
from probsoil.report.templating import content_hash, page_environment, page_style, replace_file, template_text
from probsoil.report.validation import check_results
from probsoil.report.views import page_view


def write_report(folder: Path) -> Path:
    """Write the report and its figures into a results folder from the results stored there.

    Parameters
    ----------
    folder : Path
        Folder that holds ``results.json``.

    Returns
    -------
    path : Path
        The page, ``report.html`` in that folder; the figures are beside it in ``figures``.

    Raises
    ------
    ResultsError
        If the results are missing, cannot be read, are of another kind or format or not as the format says,
        or the folder cannot be written.
    """
    folder = Path(folder)
    results = read_results(folder / "results.json")
    drawings = figures(results)
    page = _render(results, drawings)
    path = folder / "report.html"
    try:
        (folder / "figures").mkdir(exist_ok=True)
        for name, drawing in drawings.items():
            replace_file(folder / "figures" / f"{name}.svg", drawing)
        replace_file(path, page)
    except OSError as error:
        raise ResultsError(f"the report cannot be written to {folder}: {error}") from error
    return path


def render_report(results: dict[str, Any]) -> str:
    """Render the page of an assessment.

    Parameters
    ----------
    results : dict
        The results, as ``results.json`` holds them.

    Returns
    -------
    page : str
        HTML document; the same results give the same bytes.

    Raises
    ------
    ResultsError
        If the results are of another kind or format, are not as the format says or contradict themselves.
    """
    check_results(results, "the results")
    return _render(results, figures(results))


def read_results(path: Path) -> dict[str, Any]:
    """Read the results of an assessment.

    Parameters
    ----------
    path : Path
        File written by an assessment.

    Returns
    -------
    results : dict
        Its contents; not-a-number and infinity, should there be any, as None.

    Raises
    ------
    ResultsError
        If the file is missing, cannot be read, is of another kind or format or not as the format says.
    """
    try:
        results = json.loads(path.read_text(encoding="utf-8"), parse_constant=lambda _: None)
    except OSError as error:
        raise ResultsError(f"the results cannot be read: {error}") from error
    except ValueError as error:
        raise ResultsError(f"{path} is not a results file: {error}") from error
    return check_results(results, str(path))


def _render(results: dict[str, Any], drawings: dict[str, str]) -> str:
    from markupsafe import Markup

    style, script = page_style(), template_text("report.js")
    return (
        page_environment()
        .get_template("report.html")
        .render(
            page_view(results),
            figures={name: Markup(drawing) for name, drawing in drawings.items()},
            style=Markup(style),
            style_hash=content_hash(style),
            script=Markup(script),
            script_hash=content_hash(script),
        )
    )
