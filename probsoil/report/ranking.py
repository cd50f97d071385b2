"""How the drivers of a limit were ranked and what that says of each, in words for page and terminal."""

from collections.abc import Sequence
from typing import Any

from probsoil.report import text

SHIFT = 0.1  # part of a standard deviation by which a sentence or a bar moves a mean

_STANDING = "when all parameters are judged together"


def ranked_by(results: dict[str, Any], limit_name: str) -> str:
    """Tell which elasticity the drivers of a limit were ranked by.

    Parameters
    ----------
    results : dict
        The results of an assessment.
    limit_name : str
        Name of the limit.

    Returns
    -------
    measure : str
        ``spread`` or ``mean``.
    """
    qualities: list[dict[str, Any]] = results.get("driver_quality") or []
    quality = next((row for row in qualities if row["limit"] == limit_name), {})
    return "mean" if quality.get("ranked_by") == "mean" else "spread"


def basis_text(limit: dict[str, Any], measure: str) -> str:
    """Say what the ranks of a limit's drivers go by.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    measure : str
        ``spread`` or ``mean``.

    Returns
    -------
    text : str
        A clause without a full stop.
    """
    if measure == "mean":
        return (
            "ranked by how much a shift of a parameter's mean changes the chance; neither exceeding nor "
            "meeting the limit is rare here, and spread then says little"
        )
    if _mostly_exceeded(limit):
        return (
            "ranked by how much more spread in a parameter raises the chance of meeting the limit, "
            "the rarer outcome here"
        )
    return "ranked by how much more spread in a parameter raises the chance of exceeding the limit"


def none_ranked_text(limit: dict[str, Any], measure: str, rows: Sequence[dict[str, Any]]) -> str:
    """Say why no driver of a limit has a rank.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    measure : str
        ``spread`` or ``mean``.
    rows : sequence of dict
        Entries of ``drivers`` of that limit.

    Returns
    -------
    text : str
        A clause without a full stop.
    """
    if not rows:
        return "no parameter is uncertain, so none drives the chance"
    if all(row.get("spread_clear") is None for row in rows):
        return "no parameter could be judged, and none has a rank"
    side = "meeting" if _mostly_exceeded(limit) else "exceeding"
    effect = (
        "a shift of the mean distinguishably change the chance"
        if measure == "mean"
        else f"more spread distinguishably raise the chance of {side} the limit"
    )
    return f"no parameter has a rank: for none does {effect} {_STANDING}"


def leader_text(row: dict[str, Any], limit: dict[str, Any], measure: str) -> str:
    """Say what a ranked driver does to the chance, as a slope.

    Parameters
    ----------
    row : dict
        One entry of ``drivers`` of the results.
    limit : dict
        The entry of ``limits`` it belongs to.
    measure : str
        ``spread`` or ``mean``.

    Returns
    -------
    text : str
        A clause without a full stop.
    """
    return _mean_clause(row) if measure == "mean" else _spread_clause(row, limit)


def unranked_texts(rows: Sequence[dict[str, Any]], measure: str) -> list[str]:
    """Say of drivers without a rank what is known of them all the same, and which are not distinguishable.

    Parameters
    ----------
    rows : sequence of dict
        Entries of ``drivers`` of one limit.
    measure : str
        ``spread`` or ``mean``.

    Returns
    -------
    sentences : list of str
        None where every parameter has a rank or none could be judged.
    """
    judged = [row for row in rows if row.get("rank") is None and row.get("spread_clear") is not None]
    spread = [row for row in judged if row["spread_clear"]]
    shifted = [row["parameter"] for row in judged if not row["spread_clear"] and row.get("mean_clear")]
    rest = [row["parameter"] for row in judged if not row["spread_clear"] and not row.get("mean_clear")]
    sentences = [_unranked_spread(row, measure) for row in spread]
    if shifted:
        sentences.append(
            "Without a rank, since their spread has no distinguishable effect on the chance, though a shift "
            f"of their mean has one: {text.list_text(shifted)}."
        )
    if rest:
        sentences.append(
            f"Not distinguishable from no effect {_STANDING}, and so without a rank: {text.list_text(rest)}."
        )
    return sentences


def turned(row: dict[str, Any]) -> bool:
    """Tell whether more spread in a driver distinguishably makes the rarer outcome rarer.

    Parameters
    ----------
    row : dict
        One entry of ``drivers`` of a limit that was ranked by spread.

    Returns
    -------
    turned : bool
        True if it has no rank although the effect of its spread is distinguishable.
    """
    return row.get("rank") is None and bool(row.get("spread_clear"))


def _mostly_exceeded(limit: dict[str, Any]) -> bool:
    return bool(limit["probability"] > 0.5)


def _spread_clause(row: dict[str, Any], limit: dict[str, Any]) -> str:
    elasticity, ends = row.get("spread_elasticity"), text.pair_text(row.get("spread_interval"))
    way = "falls" if (elasticity or 0.0) >= 0 else "rises"
    said = (
        f"with 1 % less spread the chance {way} by about {_size(elasticity)} % of its value "
        f"(elasticity {ends})"
    )
    if elasticity is None or not _mostly_exceeded(limit) or limit["probability"] >= 1:
        return said
    meeting = -elasticity * limit["probability"] / (1.0 - limit["probability"])
    other = "falls" if meeting >= 0 else "rises"
    return f"{said} and that of meeting the limit {other} by about {_size(meeting)} % of its own"


def _mean_clause(row: dict[str, Any]) -> str:
    elasticity, ends = row.get("mean_elasticity"), text.pair_text(row.get("mean_interval"))
    way = "raises" if (elasticity or 0.0) >= 0 else "lowers"
    size = _size(None if elasticity is None else 100.0 * SHIFT * elasticity)
    return (
        f"a shift of its mean upwards by a tenth of its standard deviation {way} the chance by about "
        f"{size} % of its value (a slope; elasticity {ends} per standard deviation)"
    )


def _unranked_spread(row: dict[str, Any], measure: str) -> str:
    name, elasticity = row["parameter"], row["spread_elasticity"]
    way = "raises" if elasticity > 0 else "lowers"
    why = (
        "since a shift of its mean has none that is distinguishable"
        if measure == "mean"
        else "since more spread in it makes the rarer outcome rarer still"
    )
    return (
        f"{name} has an effect but no rank, {why}: 1 % more spread {way} the chance of exceeding by about "
        f"{_size(elasticity)} % of its value (elasticity {text.pair_text(row.get('spread_interval'))})."
    )


def _size(value: float | None) -> str:
    return text.MISSING if value is None else text.number_text(abs(value), 2)
