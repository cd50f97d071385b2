"""The page: one file without a request to anywhere, readable without scripts, on paper and by ear."""

import base64
import hashlib
import json
import re
from importlib import resources
from pathlib import Path
from typing import TYPE_CHECKING, Any

from probsoil.errors import ResultsError
from probsoil.report.drawing import figures
from probsoil.report.palette import DARK, LIGHT, figure_rules, style_variables
from probsoil.report.views import page_view

if TYPE_CHECKING:
    from markupsafe import Markup

_FORMAT = 1
_UNIT_GAP = re.compile(r"(?<=\d) (?=(?:%|m|kPa|years|×)(?:\W|$))|(?<=×) (?=10)")
_REQUIRED = ("title", "realisations", "limits")


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
        If the results are missing, cannot be read or are of another kind or format, or the folder cannot be
        written.
    """
    folder = Path(folder)
    results = read_results(folder / "results.json")
    drawings = figures(results)
    page = _render(results, drawings)
    path = folder / "report.html"
    try:
        (folder / "figures").mkdir(exist_ok=True)
        for name, drawing in drawings.items():
            _replace(folder / "figures" / f"{name}.svg", drawing)
        _replace(path, page)
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
        If the results are of another kind or format, lack a part the page cannot do without, or contradict
        themselves.
    """
    return _render(results, figures(_checked(results, "the results")))


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
        If the file is missing, cannot be read or is of another kind or format.
    """
    try:
        results = json.loads(path.read_text(encoding="utf-8"), parse_constant=lambda _: None)
    except OSError as error:
        raise ResultsError(f"the results cannot be read: {error}") from error
    except ValueError as error:
        raise ResultsError(f"{path} is not a results file: {error}") from error
    return _checked(results, str(path))


def _checked(results: object, where: str) -> dict[str, Any]:
    if not isinstance(results, dict) or results.get("kind") != "assess" or results.get("format") != _FORMAT:
        raise ResultsError(f"{where}: not the results of an assessment in format {_FORMAT}")
    missing = [key for key in _REQUIRED if results.get(key) is None]
    if missing:
        raise ResultsError(f"{where}: no {', '.join(missing)} in the results")
    return results


def _render(results: dict[str, Any], drawings: dict[str, str]) -> str:
    from jinja2 import Environment, PackageLoader, StrictUndefined
    from markupsafe import Markup

    environment = Environment(
        loader=PackageLoader("probsoil.report", "templates"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
        finalize=_keep_units,
    )
    environment.filters["breakable"] = _breakable
    style, script = _style(), _template("report.js")
    return environment.get_template("report.html").render(
        page_view(results),
        figures={name: Markup(drawing) for name, drawing in drawings.items()},
        style=Markup(style),
        style_hash=_hash(style),
        script=Markup(script),
        script_hash=_hash(script),
    )


def _keep_units(value: object) -> object:
    # A number and its unit stay on one line; markup is left as it is.
    return _UNIT_GAP.sub("\u00a0", value) if type(value) is str else value


def _breakable(name: str) -> "Markup":
    from markupsafe import Markup, escape

    return Markup("<wbr>").join(escape(part) for part in re.split(r"(?<=[._])", name))


def _style() -> str:
    dark = f"@media screen and (prefers-color-scheme:dark){{:root{{{style_variables(DARK)}}}}}"
    return "\n".join([f":root{{{style_variables(LIGHT)}}}", dark, _template("report.css"), figure_rules()])


def _template(name: str) -> str:
    return resources.files("probsoil.report").joinpath("templates", name).read_text(encoding="utf-8")


def _hash(text: str) -> str:
    return f"sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()}"


def _replace(path: Path, text: str) -> None:
    temporary = path.with_name(path.name + ".part")
    temporary.write_text(text, encoding="utf-8", newline="\n")
    temporary.replace(path)
