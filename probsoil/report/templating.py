"""What every page shares: templates, style and the writing of a file."""

import base64
import hashlib
import re
from importlib import resources
from pathlib import Path
from typing import TYPE_CHECKING

from probsoil.report.palette import DARK, LIGHT, figure_rules, style_variables

if TYPE_CHECKING:
    from jinja2 import Environment
    from markupsafe import Markup

_UNIT_GAP = re.compile(r"(?<=\d) (?=(?:%|m|kPa|years|×)(?:\W|$))|(?<=×) (?=10)")


def page_environment() -> "Environment":
    """Return the environment that pages are rendered in.

    Returns
    -------
    environment : jinja2.Environment
        Text is escaped; a number and its unit stay on one line.
    """
    from jinja2 import Environment, PackageLoader, StrictUndefined

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
    return environment


def _keep_units(value: object) -> object:
    # A number and its unit stay on one line; markup is left as it is.
    return _UNIT_GAP.sub("\u00a0", value) if type(value) is str else value


def _breakable(name: str) -> "Markup":
    from markupsafe import Markup, escape

    return Markup("<wbr>").join(escape(part) for part in re.split(r"(?<=[._])", name))


def page_style(*more: str) -> str:
    """Return the style sheet of a page.

    Parameters
    ----------
    more : str
        Names of further style sheets among the templates.

    Returns
    -------
    css : str
        Colours of both settings, the common rules, then the further ones.
    """
    dark = f"@media screen and (prefers-color-scheme:dark){{:root{{{style_variables(DARK)}}}}}"
    sheets = [template_text(name) for name in ("report.css", *more)]
    return "\n".join([f":root{{{style_variables(LIGHT)}}}", dark, *sheets, figure_rules()])


def template_text(name: str) -> str:
    """Return a file among the templates.

    Parameters
    ----------
    name : str
        Its name.

    Returns
    -------
    text : str
        Its contents.
    """
    return resources.files("probsoil.report").joinpath("templates", name).read_text(encoding="utf-8")


def content_hash(text: str) -> str:
    """Return the hash by which a page allows one style sheet or script of its own.

    Parameters
    ----------
    text : str
        Contents of the element.

    Returns
    -------
    source : str
        For the page's content security policy.
    """
    return f"sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()}"


def replace_file(path: Path, text: str) -> None:
    """Write a file whole or not at all.

    Parameters
    ----------
    path : Path
        Where to.
    text : str
        Its contents.

    Raises
    ------
    OSError
        If it cannot be written.
    """
    temporary = path.with_name(path.name + ".part")
    temporary.write_text(text, encoding="utf-8", newline="\n")
    temporary.replace(path)
