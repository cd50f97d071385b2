"""The critical slip circles in words: where they leave, how deep they go, where they enter."""

from typing import Any

from probsoil.report import text
from probsoil.report.alttext import Words


def drawn_check(results: dict[str, Any]) -> dict[str, Any] | None:
    """Choose the check whose circles the section shows: that with the least factor at the medians.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    row : dict or None
        Entry of ``slip``; None where none says where its circle lies.
    """
    known = [row for row in results.get("slip") or [] if (row.get("circle") or {}).get("at_medians")]
    return min(known, key=_factor, default=None)


def _factor(row: dict[str, Any]) -> float:
    factor = row["circle"]["at_medians"]["factor"]
    return float(factor) if text.is_number(factor) else float("inf")


def section_words(row: dict[str, Any]) -> Words:
    """Describe the section for those who cannot see it.

    Parameters
    ----------
    row : dict
        Entry of ``slip`` that it shows.

    Returns
    -------
    words : Words
        Title and description.
    """
    circle = row["circle"]
    spread = "; ".join(
        f"{what} {_range(circle[key], circle['realisations'])} m" for key, what in _COLUMNS.items()
    )
    return Words(
        title=f"Section with the critical slip circle of stage {row['stage']}",
        description=f"{_sentence(row)} Median and 5 to 95 % of "
        f"{text.realisations_text(circle['realisations'])}: {spread}.",
    )


_COLUMNS = {"touch_depth": "lowest point at a depth of", "exit": "leaves at", "entry": "enters at"}


def section_view(results: dict[str, Any]) -> dict[str, Any] | None:
    """Arrange where the critical circles lie for the page.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    view : dict or None
        Sentence, caption and table; None where the results do not say where a circle lies.
    """
    shown = drawn_check(results)
    if shown is None:
        return None
    rows = [row for row in results["slip"] if (row.get("circle") or {}).get("at_medians")]
    return {
        "sentence": _sentence(shown),
        "stage": shown["stage"],
        "others": len(shown["circle"]["others"]),
        "rows": [_cells(row) for row in rows],
        "n": text.realisations_text(shown["circle"]["realisations"]),
    }


def _sentence(row: dict[str, Any]) -> str:
    """Say where the circle at the medians lies."""
    one = row["circle"]["at_medians"]
    (x, y), (back, up), deep = one["exit"], one["entry"], one["touch_depth"]
    leaves = f"{_metres(-x)} beyond the toe" if x < 0.0 else "at the toe"
    if x > 0.0 or y > 0.0:
        leaves = f"on the fill, {_metres(y)} above ground level"
    depth = f"reaches {_metres(deep)} below ground level" if deep > 0.0 else "stays in the fill"
    return (
        f"With every parameter at its median, the critical circle of stage {row['stage']} leaves {leaves}, "
        f"{depth} and enters {_metres(back)} inside the toe, {_metres(up)} above ground level; its factor "
        f"of safety is {text.value_text(one['factor'], '-')}."
    )


def _cells(row: dict[str, Any]) -> list[str]:
    circle = row["circle"]
    one = circle["at_medians"]
    return [
        row["stage"],
        *(_range(circle[key], circle["realisations"]) for key in _COLUMNS),
        f"{_signed(one['centre'][0])}; {_signed(one['centre'][1])}",
        _signed(one["radius"]),
    ]


def _range(quantiles: dict[str, Any], n: int) -> str:
    median, low, high = (quantiles.get(level) for level in ("0.5", "0.05", "0.95"))
    if not text.is_number(median):
        return text.UNCOMPUTED
    if n < text.LEAST_FOR_TAILS or not text.is_number(low) or not text.is_number(high):
        return _signed(median)
    return f"{_signed(median)} ({_signed(low)} to {_signed(high)})"


def _signed(value: float) -> str:
    """Write a length to the decimetre, which is as fine as circles are chosen."""
    return text.rounded(value, 1).replace("-", "−")


def _metres(value: float) -> str:
    return f"{_signed(value)} m"
