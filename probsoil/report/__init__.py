"""The report of an assessment: words, tables, figures and one page. It draws, and computes nothing.

Names are resolved when asked for, so that the terminal can use the words without loading what draws.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from probsoil.report.drawing import figures
    from probsoil.report.page import render_report, write_report
    from probsoil.report.tables import write_tables

__all__ = ["figures", "render_report", "write_report", "write_tables"]

_PLACES = {
    "figures": "probsoil.report.drawing",
    "render_report": "probsoil.report.page",
    "write_report": "probsoil.report.page",
    "write_tables": "probsoil.report.tables",
}


def __getattr__(name: str) -> object:
    """Import a public name on first use."""
    if name not in _PLACES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    value = getattr(import_module(_PLACES[name]), name)
    globals()[name] = value
    return value
