"""The drivers of each limit in words and rows."""

from typing import Any

from probsoil.report import text
from probsoil.report.drawing import ordered_drivers

_LEADERS = 3
_DIRECTIONS = {
    "raises": "a larger value raises the chance",
    "lowers": "a larger value lowers the chance",
    "unclear": "direction not clear",
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
    return {
        "number": number,
        "name": limit["name"],
        "event": text.event_text(limit),
        "leaders": [_leader(row) for row in ranked[:_LEADERS]],
        "indistinguishable": text.list_text([row["parameter"] for row in rows if row.get("rank") is None]),
        "any_ranked": bool(ranked),
        "rows": [_row(row) for row in rows],
        "quality": _quality(quality),
        "figure": f"drivers-{number}",
    }


def _leader(row: dict[str, Any]) -> dict[str, str]:
    elasticity, ends = row.get("spread_elasticity"), row.get("spread_interval")
    size = text.MISSING if elasticity is None else text.rounded(abs(elasticity), 2)
    way = "falls" if (elasticity or 0.0) >= 0 else "rises"
    return {
        "parameter": row["parameter"],
        "sentence": f"{_direction(row)}; with 1 % less spread the chance {way} by about {size} % of its "
        f"value (elasticity {text.pair_text(ends)}); share {_shares(row)}",
    }


def _row(row: dict[str, Any]) -> list[str]:
    return [
        row["parameter"],
        "–" if row.get("rank") is None else str(row["rank"]),
        _number(row.get("spread_elasticity")),
        text.pair_text(row.get("spread_interval")),
        _number(row.get("mean_elasticity")),
        text.pair_text(row.get("mean_interval")),
        _shares(row),
        _direction(row),
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
    parts = [f"Read from {text.count_text(row.get('exceeding'))} exceeding realisations."]
    if row.get("r_squared") is not None:
        parts.append(
            f"The fit behind the shares explains {text.percent_text(row['r_squared'], 0)} of the variance of "
            "the quantity."
        )
    note = (row.get("note") or "").rstrip(".")
    return " ".join([*parts, *([f"{note[0].upper()}{note[1:]}."] if note else [])])
