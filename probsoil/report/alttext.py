"""What each figure says, in words and numbers, for those who cannot see it."""

from dataclasses import dataclass
from typing import Any

from probsoil.report.ranking import SHIFT
from probsoil.report.text import (
    LEAST_FOR_TAILS,
    event_text,
    exceeding_word,
    list_text,
    number_text,
    pair_text,
    quantile_text,
    quantity_text,
    step_decimals,
    threshold_text,
    trimmed_text,
    with_unit,
)

_FAILURES = {"slip": "slip", "bearing": "bearing failure"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Words:
    """Title and description of a figure.

    Attributes
    ----------
    title : str
        What it shows.
    description : str
        What can be read from it, with numbers.
    """

    title: str
    description: str


def settlement(results: dict[str, Any]) -> Words:
    """Describe the band of settlement through time.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    words : Words
        Title and description.
    """
    data = results["settlement"]
    stages = data.get("stages") or []
    built = max((stage["end"] for stage in stages), default=data["times"][0])
    after = next((i for i, time in enumerate(data["times"]) if time >= built), 0)
    n = data.get("realisations") or results["realisations"]
    read = [_at(data, index, n) for index in sorted({after, len(data["times"]) - 1})]
    return Words(
        title=f"Settlement at the {data.get('station', 'centreline')} through time",
        description=f"Band of settlement, downwards, against time; {len(stages)} stages. {' '.join(read)}",
    )


def stability(results: dict[str, Any], key: str) -> Words:
    """Describe the factor of safety against slip or bearing failure, stage by stage.

    Parameters
    ----------
    results : dict
        The results of an assessment.
    key : str
        ``slip`` or ``bearing``.

    Returns
    -------
    words : Words
        Title and description.
    """
    parts = [
        f"{row['stage']}: median {quantile_text(row['quantiles']['0.5'], '-')}"
        f"{_tails(row['quantiles'], '-', results['realisations'])}"
        for row in results[key]
    ]
    return Words(
        title=f"Least factor of safety against {_FAILURES[key]} at the end of each stage",
        description="; ".join(parts) + f". {_FAILURES[key].capitalize()} is at 1.",
    )


def drivers(limit: dict[str, Any], rows: list[dict[str, Any]], measure: str = "spread") -> Words:
    """Describe the bars of the drivers of one limit.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    rows : list of dict
        The drivers the figure shows.
    measure : str
        ``spread`` or ``mean``: which elasticity it shows.

    Returns
    -------
    words : Words
        Title and description.
    """
    scale = 100.0 * SHIFT if measure == "mean" else 1.0
    parts = []
    for row in rows:
        ends = [
            None if end is None else scale * end for end in row.get(f"{measure}_interval") or (None, None)
        ]
        value = number_text(scale * row[f"{measure}_elasticity"])
        parts.append(f"{row['parameter']} {value} ({pair_text(ends)})")
    cause = (
        "when the mean moves up by a tenth of its standard deviation"
        if measure == "mean"
        else "for 1 % more spread"
    )
    return Words(
        title=f"What drives the chance that {event_text(limit)}",
        description=f"Change of the chance in per cent {cause}: {list_text(parts)}.",
    )


def ground(results: dict[str, Any]) -> Words:
    """Describe the drawing of the ground and its stresses.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    words : Words
        Title and description.
    """
    layers = [
        f"{layer['name']}, {layer['soil']}, {number_text(layer['top'])} to {number_text(layer['bottom'])} m"
        for layer in results["ground"]["layers"]
    ]
    profile = results["ground"].get("profile") or {}
    names = (
        ("initial_stress", "initial"),
        ("preconsolidation", "preconsolidation"),
        ("final_stress", "final"),
    )
    deepest = [f"{name} {number_text(profile[key][-1])} kPa" for key, name in names if profile.get(key)]
    at_depth = f" At {number_text(profile['depth'][-1])} m: {list_text(deepest)}." if deepest else ""
    return Words(
        title="Ground at the mean values", description=f"Layers from the top: {'; '.join(layers)}.{at_depth}"
    )


def curve(limit: dict[str, Any], chance: str) -> Words:
    """Describe the exceedance curve of one limit.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    chance : str
        Its exceedance probability in words.

    Returns
    -------
    words : Words
        Title and description.
    """
    ends = [limit["curve"]["threshold"][place] for place in (0, -1)]
    reach = with_unit(pair_text(ends, step_decimals(limit)), limit.get("unit", "-"))
    return Words(
        title=f"Chance that {quantity_text(limit)} is {exceeding_word(limit)} a threshold",
        description=f"Curve over thresholds of {reach}. At the limit, {threshold_text(limit)}: {chance}. "
        "The table below gives more points.",
    )


def _at(data: dict[str, Any], index: int, n: int) -> str:
    quantiles = {level: values[index] for level, values in data["quantiles"].items()}
    median = quantile_text(quantiles["0.5"], "m")
    return f"At {trimmed_text(data['times'][index])} years: median {median}{_tails(quantiles, 'm', n)}."


def _tails(quantiles: dict[str, Any], unit: str, n: int) -> str:
    if n < LEAST_FOR_TAILS:
        return ""
    low, high = (quantile_text(quantiles[level], unit) for level in ("0.05", "0.95"))
    return f", 5 to 95 % {low} to {high}"
