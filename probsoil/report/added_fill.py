"""Fill added to hold its level, in words."""

from typing import Any

from probsoil.report import text

_PER = {"m3/m": "per metre run", "m3/m2": "per square metre"}


def added_fill_sentences(results: dict[str, Any]) -> list[str]:
    """Say how much fill holding the level takes.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    sentences : list of str
        Volume and thickness with their spread; none where no level is held.
    """
    return [_sentence(row, results["realisations"]) for row in results.get("added_fill") or []]


def _sentence(row: dict[str, Any], n: int) -> str:
    volume, thickness = _spread(row["volume"], "m3", n), _spread(row["thickness"], "m", n)
    said = (
        f"Until {text.trimmed_text(row['until'])} years fill is added as the ground settles, so that its "
        f"level stays as designed. Volume {_PER[row['unit']]}: {volume}. Thickness on the centreline: "
        f"{thickness}."
    )
    if row["mean_width"] is None:
        return said
    width = text.value_text(row["mean_width"], "m")
    own = (
        " (in each realisation its own; this is that of the mean section)" if row.get("width_varies") else ""
    )
    return (
        f"{said} The volume is the thickness times {width}, the mean width of the section{own}: the fill "
        "added is taken to be everywhere in the same proportion to the fill above it."
    )


def _spread(part: dict[str, Any], unit: str, n: int) -> str:
    quantiles = part["quantiles"]
    ends = text.range_text(quantiles["0.05"], quantiles["0.95"], unit, n)
    middle = text.quantile_text(quantiles["0.5"], unit)
    return f"mean {text.quantile_text(part['mean'], unit)}, median {middle}; {ends}"
