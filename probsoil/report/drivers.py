"""The drivers of each limit in words and rows."""

from typing import Any

from probsoil.report import text
from probsoil.report.drawing import ordered_drivers
from probsoil.report.ranking import (
    basis_text,
    leader_text,
    none_ranked_text,
    ranked_by,
    turned,
    unranked_texts,
)

_LEADERS = 3
_DIRECTIONS = {
    "raises": "a larger value raises the chance",
    "lowers": "a larger value lowers the chance",
    "unclear": "direction not clear",
}


_CAPTIONS = {
    "spread": "Elasticity of the chance of exceeding to the spread of each parameter, with interval. "
    "A bar to the left: more spread lowers that chance. Dashed outline: no rank.",
    "mean": "Change of the chance of exceeding, in per cent of itself, when the mean of each parameter "
    "moves up by a tenth of its standard deviation, with interval. Dashed outline: no rank.",
}


def drivers_view(number: int, limit: dict[str, Any], results: dict[str, Any]) -> dict[str, Any] | None:
    """Arrange the drivers of one limit for the page.

    Parameters
    ----------
    number : int, [-]
        Number of the limit on the page, from 1.
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    view : dict or None
        What the template needs; None where the results hold nothing on this limit.
    """
    rows = ordered_drivers(results, limit["name"])
    qualities: list[dict[str, Any]] = results.get("driver_quality") or []
    quality = next((row for row in qualities if row["limit"] == limit["name"]), {})
    if not rows and not quality:
        return None
    ranked = [row for row in rows if row.get("rank") is not None]
    measure = ranked_by(results, limit["name"])
    basis = basis_text(limit, measure) if ranked else none_ranked_text(limit, measure, rows)
    return {
        "number": number,
        "name": limit["name"],
        "event": text.event_text(limit),
        "basis": f"{basis[0].upper()}{basis[1:]}.",
        "leaders": [_leader(row, limit, measure) for row in ranked[:_LEADERS]],
        "unranked": unranked_texts(rows, measure),
        "rows": [_row(row, measure) for row in rows],
        "quality": _quality(quality),
        "figure": f"drivers-{number}",
        "caption": _CAPTIONS[measure],
    }


def _leader(row: dict[str, Any], limit: dict[str, Any], measure: str) -> dict[str, str]:
    effect = leader_text(row, limit, measure)
    said = effect if measure == "mean" else f"{_direction(row)}; {effect}"
    return {"parameter": row["parameter"], "sentence": f"{said}; share {_shares(row)}"}


def _row(row: dict[str, Any], measure: str) -> list[str]:
    contrary = measure == "spread" and turned(row)
    return [
        row["parameter"],
        "–" if row.get("rank") is None else str(row["rank"]),
        _number(row.get("spread_elasticity")),
        text.pair_text(row.get("spread_interval")),
        _number(row.get("mean_elasticity")),
        text.pair_text(row.get("mean_interval")),
        _shares(row),
        f"{_direction(row)}; more spread makes the rarer outcome rarer" if contrary else _direction(row),
    ]


def _direction(row: dict[str, Any]) -> str:
    return _DIRECTIONS.get(row.get("direction") or "unclear", _DIRECTIONS["unclear"])


def _number(value: float | None) -> str:
    return text.MISSING if value is None else text.rounded(value, 2)


def _shares(row: dict[str, Any]) -> str:
    share, ends = row.get("share"), row.get("share_interval")
    if share is None:
        return text.MISSING
    inner = f" ({text.pair_text([None if end is None else 100 * end for end in ends], 1)} %)" if ends else ""
    return f"{text.percent_text(share, 1)}{inner}"


def _quality(row: dict[str, Any]) -> str:
    if not row:
        return ""
    count = row["exceeding"]
    parts = [f"Read from {text.count_text(count)} exceeding realisation{'' if count == 1 else 's'}."]
    if row.get("r_squared") is not None:
        parts.append(
            f"The fit behind the shares explains {text.percent_text(row['r_squared'], 0)} of the variance of "
            "the quantity."
        )
    note = (row.get("note") or "").rstrip(".")
    return " ".join([*parts, *([f"{note[0].upper()}{note[1:]}."] if note else [])])
