"""The page of an interpretation: the evidence first, then every test with its constructions."""

from pathlib import Path
from typing import TYPE_CHECKING, Any

from probsoil.assessment.site_back_check import SiteBackChecks
from probsoil.errors import ResultsError, UnfitFolderError
from probsoil.laboratory.interpretation import Interpretation
from probsoil.report import back_check_section as back
from probsoil.report.interpretation_figures import TestFigure, interpretation_figures
from probsoil.report.interpretation_tables import interpretation_tables
from probsoil.report.templating import content_hash, page_environment, page_style, replace_file
from probsoil.report.text import number_text

if TYPE_CHECKING:
    import pandas as pd

PAGE, EVIDENCE = "interpretation.html", "evidence.csv"
_MARK = '<p class="kind">From test sheets to evidence</p>'

_KINDS: tuple[tuple[str, str, tuple[str, ...]], ...] = (
    ("oedometer", "Oedometer tests", ("oedometer_summary", "disturbance", "increments")),
    ("triaxial", "Triaxial tests", ("triaxial", "friction", "strength_ratio")),
    ("vane", "Vane profiles", ("vane",)),
    ("cone", "Cone soundings", ("cone",)),
)
_LONG = 24  # rows; longer tables are shown when asked for
_TITLES = {
    "oedometer_summary": "Test by test; every estimate with its error stands in tables/oedometer.csv",
    "disturbance": "Disturbance of the specimens",
    "increments": "Increments in time",
    "triaxial": "Test by test, failure by both definitions",
    "friction": "M by layer, regression through the origin",
    "strength_ratio": "Strength over vertical stress by layer",
    "vane": "Strength by depth",
    "cone": "Averages of net resistance; what factors make of it is shown, not evidence",
}


def require_own_folder(folder: Path) -> None:
    """Refuse to write over an evidence table or a page that no interpretation wrote.

    Parameters
    ----------
    folder : Path
        Folder to write to; need not exist.

    Raises
    ------
    UnfitFolderError
        If it holds such a file.
    """
    page = Path(folder) / PAGE
    try:
        own = _MARK in page.read_text(encoding="utf-8")
    except (OSError, ValueError):
        own = False
    strange = [path for path in (Path(folder) / EVIDENCE, page) if path.exists()]
    if strange and not own:
        raise UnfitFolderError(
            f"'{folder}' holds no earlier interpretation, but '{strange[0].name}', which this one would "
            "overwrite; name another folder, or let it be overwritten (--force)"
        )


def _clear_earlier(folder: Path) -> None:
    """Take away figures and tables of an earlier interpretation, whose tests may have been others."""
    for kind, _, names in (*_KINDS, (back.KIND, "", back.TABLES)):
        for path in (folder / "figures").glob(f"{kind}-*.svg"):
            path.unlink()
        for name in {kind, *names}:
            (folder / "tables" / f"{name}.csv").unlink(missing_ok=True)


def write_interpretation(
    interpretation: Interpretation, folder: Path, checks: SiteBackChecks | None = None
) -> Path:
    """Write evidence, tables, figures and the page of an interpretation.

    Parameters
    ----------
    interpretation : Interpretation
        The tests.
    folder : Path
        Folder to write to; made where missing.
    checks : SiteBackChecks or None
        Back-checks of its tests; None for none.

    Returns
    -------
    path : Path
        The page; beside it ``evidence.csv``, one table per kind in ``tables`` and one figure per test in
        ``figures``.

    Raises
    ------
    ResultsError
        If the folder cannot be written.
    """
    folder = Path(folder)
    frames, drawn = interpretation_tables(interpretation), interpretation_figures(interpretation)
    checks = SiteBackChecks() if checks is None else checks
    rechecked = back.back_check_figures(checks)
    view = back.back_check_view(checks, rechecked)
    page = render_interpretation(interpretation, frames, drawn, checks=view)
    frames |= back.back_check_tables(checks)
    try:
        _clear_earlier(folder)
        for name in ("tables", "figures"):
            (folder / name).mkdir(parents=True, exist_ok=True)
        for name, frame in frames.items():
            if name != "evidence":
                text = frame.to_csv(index=False, lineterminator="\n")
                replace_file(folder / "tables" / f"{name}.csv", text)
        for one in (*drawn, *rechecked):
            replace_file(folder / "figures" / f"{one.name}.svg", one.svg)
        replace_file(folder / EVIDENCE, interpretation.evidence())
        replace_file(folder / PAGE, page)
    except OSError as error:
        raise ResultsError(f"the interpretation cannot be written to {folder}: {error}") from error
    return folder / PAGE


def render_interpretation(
    interpretation: Interpretation,
    frames: "dict[str, pd.DataFrame] | None" = None,
    drawn: tuple[TestFigure, ...] | None = None,
    *,
    checks: dict[str, Any] | None = None,
) -> str:
    """Render the page of an interpretation.

    Parameters
    ----------
    interpretation : Interpretation
        The tests.
    frames : dict of str to DataFrame or None
        Its tables; None to arrange them.
    drawn : tuple of TestFigure or None
        Its figures; None to draw them.
    checks : dict or None
        Back-checks as `back_check_view` arranges them; None for none.

    Returns
    -------
    page : str
        HTML document without scripts and without a request to anywhere.
    """
    from markupsafe import Markup

    frames = interpretation_tables(interpretation) if frames is None else frames
    drawn = interpretation_figures(interpretation) if drawn is None else drawn
    style = page_style("sheet.css", "interpretation.css")
    return (
        page_environment()
        .get_template("interpretation.html")
        .render(
            block=_block(interpretation),
            evidence=_view(frames["evidence"], "Observed numbers, as in evidence.csv"),
            flags=[one for one in interpretation.observations if one.flag],
            kinds=[
                _kind(one, interpretation, frames, drawn) for one in _KINDS if _count(one[0], interpretation)
            ],
            remarks=(*interpretation.remarks, *(checks or {}).get("remarks", ())),
            checks=checks,
            style=Markup(style),
            style_hash=content_hash(style),
        )
    )


def _count(kind: str, interpretation: Interpretation) -> int:
    return len(getattr(interpretation, f"{kind}s"))


def _block(interpretation: Interpretation) -> list[tuple[str, str]]:
    counts = [
        f"{_count(kind, interpretation)} {title.lower()}"
        for kind, title, _ in _KINDS
        if _count(kind, interpretation)
    ]
    column = interpretation.column
    return [
        ("Tests", ", ".join(counts) or "none"),
        ("Stresses in situ from", "not known" if column is None else column.source),
        (
            "M taken at",
            "the greatest stress ratio"
            if interpretation.choices.failure == "stress ratio"
            else "the peak deviator",
        ),
        ("Observed numbers", str(len(interpretation.observations))),
    ]


def _kind(
    shape: tuple[str, str, tuple[str, ...]],
    interpretation: Interpretation,
    frames: "dict[str, pd.DataFrame]",
    drawn: tuple[TestFigure, ...],
) -> dict[str, Any]:
    from markupsafe import Markup

    kind, title, tables = shape
    tests: dict[str, list[dict[str, Any]]] = {}
    for one in drawn:
        if one.kind == kind:
            shown = {"title": one.words.title, "words": one.words.description, "svg": Markup(one.svg)}
            tests.setdefault(one.test, []).append(shown)
    remarks = {
        result.sheet.test: result.remarks for result in getattr(interpretation, f"{kind}s") if result.remarks
    }
    return {
        "id": kind,
        "title": title,
        "tables": [_view(frames[name], _TITLES[name]) for name in tables if name in frames],
        "tests": [
            {"name": name, "figure": shown[0], "more": shown[1:], "remarks": remarks.get(name, ())}
            for name, shown in tests.items()
        ],
    }


def _view(frame: "pd.DataFrame", title: str) -> dict[str, Any]:
    numeric = [bool(kind.kind in "fi") for kind in frame.dtypes]
    return {
        "title": title,
        "long": len(frame) > _LONG,
        "headings": list(zip([str(one) for one in frame.columns], numeric, strict=True)),
        "rows": [
            [(_text(cell), number) for cell, number in zip(row, numeric, strict=True)]
            for row in frame.itertuples(index=False, name=None)
        ],
    }


def _text(cell: object) -> str:
    if cell is None or cell != cell:
        return "-"
    if isinstance(cell, int):
        return f"{cell:,d}"
    return number_text(float(cell)) if isinstance(cell, float) else str(cell)
