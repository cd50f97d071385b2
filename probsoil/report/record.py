"""Ground, parameters, trust and provenance of an assessment arranged for the page."""

from decimal import ROUND_CEILING
from typing import Any

from probsoil.report import text
from probsoil.report.chance import is_certain, limit_margin

_DRAWS = {"monte carlo": "Monte Carlo", "latin hypercube": "Latin hypercube", "sobol": "scrambled Sobol'"}
_PROFILE_ROWS = 14
_NO_PROPERTY = {"symbol": "", "meaning": "", "text": ""}


def record_view(results: dict[str, Any]) -> dict[str, Any]:
    """Arrange what the answer rests on: ground, parameters, method, margins of error, provenance.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    view : dict
        What the template asks for in those sections; parts the results lack are empty.
    """
    return {
        "ground": _ground(results.get("ground") or {}),
        "parameters": [_parameter(row) for row in results.get("parameters") or []],
        "dependence": [_dependence(row) for row in results.get("dependence") or []],
        "trust": _trust(results),
        "warnings": [text.warning_text(row) for row in results.get("warnings") or []],
        "assumptions": results.get("assumptions") or [],
        "cautions": results.get("cautions") or [],
        "method": _method(results["limits"]),
        "replicated": any("replicate" in limit["method"] for limit in results["limits"]),
        "provenance": _provenance(results),
    }


def _method(limits: list[dict[str, Any]]) -> list[str]:
    """Say by what each limit was estimated; limits by the same means together."""
    numbers: dict[str, list[str]] = {}
    for number, limit in enumerate(limits, start=1):
        numbers.setdefault(limit["method"], []).append(str(number))
    if len(numbers) == 1:
        return [f"{method}." for method in numbers]
    return [
        f"Limit{'' if len(those) == 1 else 's'} {text.list_text(those)}: {method}."
        for method, those in numbers.items()
    ]


def stage_view(number: int, stage: dict[str, Any]) -> dict[str, Any]:
    """Arrange one stage for the page.

    Parameters
    ----------
    number : int, [-]
        Its number, from 1.
    stage : dict
        One entry of ``stages`` of the ground or of the settlement.

    Returns
    -------
    view : dict
        Number, name, times in years and weeks, change and state afterwards, in words.
    """
    height, pressure = stage.get("height_after"), stage.get("pressure_after")
    after = [
        f"{text.number_text(height)} m of fill" if height is not None else "",
        f"{text.number_text(pressure)} kPa" if pressure is not None else "",
    ]
    weeks = [text.rounded(stage[key] * 365.25 / 7.0, 1) for key in ("start", "end")]
    return {
        "number": f"S{number}",
        "name": stage["name"],
        "start": text.trimmed_text(stage["start"]),
        "end": text.trimmed_text(stage["end"]),
        "weeks": f"{weeks[0]} to {weeks[1]}",
        "change": stage.get("change_text") or "",
        "after": text.list_text([part for part in after if part]),
    }


def metres_text(value: float | None) -> str:
    """Write a length to the millimetre without its unit.

    Parameters
    ----------
    value : float or None, [m]
        Length.

    Returns
    -------
    text : str
        For example ``0.412``.
    """
    return text.MISSING if value is None else text.rounded(value, 3)


def share_text(share: float | None) -> str:
    """Write a counted share, in words where it is none or all.

    Parameters
    ----------
    share : float or None, [-]
        From 0 to 1.

    Returns
    -------
    text : str
        For example ``1.3 %``, ``none`` or ``all``.
    """
    if share is None:
        return text.MISSING
    return "none" if share <= 0 else "all" if share >= 1 else text.percent_text(share)


def slip_share(row: dict[str, Any]) -> list[str]:
    """Write the share of realisations that slip or fail in bearing, and its interval.

    Parameters
    ----------
    row : dict
        One entry of ``slip`` or ``bearing`` of the results.

    Returns
    -------
    cells : list of str
        For example ``1.3 %`` and ``1.1 to 1.5 %``.
    """
    share, ends = row["probability_below_one"], row.get("interval_below_one")
    return [share_text(share), text.interval_text(share, *ends) if ends else text.MISSING]


def draws_text(results: dict[str, Any]) -> str:
    """Name the way the realisations were drawn.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    text : str
        For example ``Monte Carlo``.
    """
    draws = str(results.get("draws") or "drawn at random")
    return _DRAWS.get(draws, draws)


def _ground(data: dict[str, Any]) -> dict[str, Any] | None:
    if not data.get("layers"):
        return None
    profile = data.get("profile") or {}
    keys = ("depth", "initial_stress", "preconsolidation", "final_stress")
    columns = [profile.get(key) or [] for key in keys]
    every = max(1, len(columns[0]) // _PROFILE_ROWS)
    rows = [[text.number_text(value) for value in row] for row in zip(*columns, strict=True)]
    load = data.get("load") or {}
    return {
        "water_table": text.described_text(data.get("water_table", text.MISSING)),
        "base": data.get("base", text.MISSING),
        "base_head": text.described_text(data["base_head"]) if data.get("base_head") else None,
        "drains": data.get("drains"),
        "load": "; ".join(
            [
                load.get("text") or load.get("shape") or "",
                *(f"further load {one['name']}: {one['text']}" for one in data.get("further_loads") or []),
            ]
        ),
        "layers": [
            {
                "number": number,
                "name": layer["name"],
                "soil": layer["soil"],
                "depths": f"{text.rounded(layer['top'], 2)} to {text.rounded(layer['bottom'], 2)}",
                "properties": [
                    item | {"text": text.described_text(item["text"])}
                    for item in layer.get("properties") or [_NO_PROPERTY]
                ],
            }
            for number, layer in enumerate(data["layers"], start=1)
        ],
        "stages": [
            stage_view(number, stage) for number, stage in enumerate(data.get("stages") or [], start=1)
        ],
        "profile": [row for place, row in enumerate(rows) if place % every == 0 or place == len(rows) - 1],
    }


def _parameter(row: dict[str, Any]) -> dict[str, Any]:
    cut = row.get("cut_share") or 0.0
    return {
        "name": row["name"],
        "meaning": row.get("meaning") or "",
        "unit": row.get("unit") or "-",
        "text": text.described_text(row.get("text") or "") + _local_text(row.get("local_share")),
        "numbers": [text.number_text(row.get(key)) for key in ("mean", "sd", "p05", "p50", "p95")],
        "range": _range(row.get("low"), row.get("high")),
        "cut": text.percent_text(cut) if cut > 0 else "nothing",
    }


def _local_text(share: float | None) -> str:
    """Say how much of a parameter differs between stations, where some of it does."""
    return f"; {text.percent_text(share)} of its variance differs between stations" if share else ""


def _range(low: float | None, high: float | None) -> str:
    if low is None and high is None:
        return "no bound"
    if high is None:
        return f"above {text.trimmed_text(low)}"
    if low is None:
        return f"below {text.trimmed_text(high)}"
    return f"{text.trimmed_text(low)} to {text.trimmed_text(high)}"


def _dependence(row: dict[str, Any]) -> list[str]:
    first, second = row["between"]
    return [first, second, *(metres_text(row.get(key)) for key in ("rank_correlation", "latent_correlation"))]


def _trust(results: dict[str, Any]) -> list[tuple[str, str]]:
    rows = [
        ("Sampling", _sampling(results)),
        ("Discretisation", _discretisation(results.get("discretisation") or {})),
    ]
    cut = [row for row in results.get("parameters") or [] if (row.get("cut_share") or 0.0) > 0.0]
    if cut:
        parts = [f"{row['name']} {text.percent_text(row['cut_share'])}" for row in cut]
        rows.append(
            (
                "Truncation",
                f"These distributions reach beyond what is physical and were cut: {text.list_text(parts)}.",
            )
        )
    stuck = max((limit.get("not_converged") or 0 for limit in results["limits"]), default=0)
    rows.append(("Convergence", _convergence(stuck)))
    rows.append(("Drivers", _driver_quality(results)))
    return [(label, value) for label, value in rows if value]


def _driver_quality(results: dict[str, Any]) -> str:
    numbers = {limit["name"]: number for number, limit in enumerate(results["limits"], start=1)}
    parts = []
    for row in results.get("driver_quality") or []:
        fit = row.get("r_squared")
        said = "" if fit is None else f", fit {text.percent_text(fit, 0)}"
        count = text.count_text(row.get("exceeding"))
        parts.append(f"limit {numbers.get(row['limit'], row['limit'])}: {count} exceeding{said}")
    if not parts:
        return ""
    return (
        "Elasticities rest on the exceeding realisations and shares on a fit to all; few of the one or a "
        f"poor fit means wide margins ({'; '.join(parts)} of the variance explained)."
    )


def _sampling(results: dict[str, Any]) -> str:
    limits = results["limits"]
    if all(is_certain(limit) for limit in limits):
        return (
            "Nothing in this scenario is uncertain, so other realisations would give the same and there are "
            "no intervals."
        )
    parts = [
        f"limit {number}: {limit_margin(limit, results)}" for number, limit in enumerate(limits, start=1)
    ]
    confidence = text.plain_percent(results.get("confidence") or 0.95)
    return (
        "Intervals and bounds say how far the chances could shift if as many other realisations were drawn, "
        f"{text.count_text(results['realisations'])} ({confidence} confidence; {'; '.join(parts)}). They say "
        "nothing of whether the distributions put into the scenario are right."
    )


def _discretisation(data: dict[str, Any]) -> str:
    if not data:
        return ""
    share, slip = data.get("settlement_error_share"), data.get("slip_error_share")
    text_slip = (
        ""
        if slip is None
        else f" The factor of safety against slip differed by at most {text.percent_text(slip)} of that over "
        "a denser family of circles on the finer grid. A family of circles may miss the worst circle, "
        "so the factor it finds is too high if anything, and the denser family's may be so too."
    )
    bearing = data.get("bearing_error_share")
    if bearing is not None:
        text_slip += (
            f" The factor of safety against bearing failure differed by at most {text.percent_text(bearing)}."
        )
    n = data["realisations"]
    again = f"{text.realisations_text(n)} {'was' if n == 1 else 'were'}"
    return (
        f"{again} repeated on a finer grid than the {text.count_text(data.get('cells'))} cells and "
        f"{text.count_text(data.get('steps'))} time steps used. From the difference, raised for what the "
        "finer grid itself leaves, the greatest error of the settlement among them, at any time and to "
        f"either side, is put at {text.rounded(data['settlement_error'], 3, rounding=ROUND_CEILING)} m, and "
        f"at {text.percent_text(share)} of the final settlement of the same realisation.{text_slip}"
    )


def _convergence(stuck: int) -> str:
    if not stuck:
        return "Every realisation converged."
    return (
        f"For at least one limit {text.realisations_text(stuck)} did not converge, counted as exceeding, "
        "which can only raise the chances."
    )


def _provenance(results: dict[str, Any]) -> dict[str, Any]:
    origin = results.get("provenance") or {}
    packages = origin.get("packages") or {}
    seconds = origin.get("seconds") or {}
    rows = [
        ("Scenario file", origin.get("scenario_file")),
        ("SHA-256 of the scenario", origin.get("scenario_sha256")),
        ("Seed", results.get("seed")),
        ("Realisations", text.count_text(results["realisations"])),
        ("Draws", draws_text(results)),
        ("Program", f"probsoil {origin['version']}" if origin.get("version") else None),
        ("Packages", ", ".join(f"{name} {version}" for name, version in packages.items()) or None),
        ("Python", origin.get("python")),
        ("Platform", origin.get("platform")),
        ("Processor features", ", ".join(origin.get("cpu_features") or []) or None),
        ("Started", origin.get("started")),
        (
            "Seconds",
            ", ".join(f"{part} {text.number_text(value)}" for part, value in seconds.items()) or None,
        ),
        ("Workers", origin.get("workers")),
        ("Chunks", origin.get("chunks")),
    ]
    return {
        "rows": [(label, str(value)) for label, value in rows if value is not None],
        "command": origin.get("command"),
    }
