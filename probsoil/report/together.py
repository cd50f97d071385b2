"""What is said of several limits at once: in sentences, in a table of pairs, in the terminal."""

from typing import Any

from probsoil.report.chance import margin_text
from probsoil.report.text import (
    count_text,
    interval_text,
    number_text,
    percent_text,
    plain_percent,
    probability_text,
    realisations_text,
)

_UNKNOWN = "not known"


def any_text(results: dict[str, Any]) -> str:
    """Write the chance that any limit is exceeded.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    text : str
        For example ``23.1 % (22.5 to 23.7 %)``; empty with a single limit or where nothing is uncertain.
    """
    together = results.get("together")
    return _chance_text(together["any"], results) if together else ""


def together_view(results: dict[str, Any]) -> dict[str, Any] | None:
    """Arrange what is known of limits together for the page.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    view : dict or None
        What the template asks for; None with a single limit or where nothing is uncertain.
    """
    together = results.get("together")
    if not together:
        return None
    count = len(results["limits"])
    which = "either of the two limits" if count == 2 else f"any of the {count} limits"
    every = "both are" if count == 2 else "all are"
    numbers = [
        f"{_how_many(place)} in {count_text(seen)}" for place, seen in enumerate(together["number"]) if seen
    ]
    independent = results["draws"] == "monte carlo"
    return {
        "sentences": [
            f"Chance that {which} is exceeded: {_chance_text(together['any'], results)}. "
            f"Chance that {every}: {_chance_text(together['all'], results)}.",
            f"Of {realisations_text(results['realisations'])} "
            + ", ".join([*numbers[:-1], f"{'and ' if len(numbers) > 1 else ''}{numbers[-1]}"])
            + ".",
        ],
        "pairs": [_pair(row) for row in together["pairs"]],
        "note": f"Each interval holds with {plain_percent(results['confidence'])} confidence by itself"
        + ("." if independent else "; as the points are not independent, those of the pairs are a guide."),
    }


def together_rows(together: dict[str, Any]) -> list[dict[str, Any]]:
    """Arrange limits together for a spreadsheet.

    Parameters
    ----------
    together : dict
        ``together`` of the results.

    Returns
    -------
    rows : list of dict
        Any and all of the limits, then one row per ordered pair.
    """
    whole = [
        {
            "where exceeded": "",
            "also exceeded": f"{name} of the limits",
            "both [realisations]": together[name]["exceeding"],
            "probability [-]": together[name]["probability"],
            "probability low [-]": together[name]["interval"][0],
            "probability high [-]": together[name]["interval"][1],
        }
        for name in ("any", "all")
    ]
    return whole + [
        {
            "where exceeded": row["where"],
            "also exceeded": row["also"],
            "where [realisations]": row["where_exceeded"],
            "both [realisations]": row["both_exceeded"],
            "both if unrelated [realisations]": row["if_unrelated"],
            "probability [-]": row["conditional"],
            "probability low [-]": row["interval"][0],
            "probability high [-]": row["interval"][1],
        }
        for row in together["pairs"]
    ]


def _chance_text(row: dict[str, Any], results: dict[str, Any]) -> str:
    probability, n, confidence = row["probability"], row["model_runs"], results["confidence"]
    margin = margin_text(probability, row["interval"], n, confidence)
    sure = "" if 0 < probability < 1 else f" with {plain_percent(confidence)} confidence"
    return f"{probability_text(probability, n)} ({margin}{sure})"


def _how_many(place: int) -> str:
    if place == 0:
        return "no limit is exceeded"
    return "one limit is exceeded" if place == 1 else f"{place} limits are"


def _pair(row: dict[str, Any]) -> list[str]:
    known = row["conditional"] is not None
    return [
        row["where"],
        row["also"],
        count_text(row["where_exceeded"]),
        count_text(row["both_exceeded"]),
        number_text(row["if_unrelated"]),
        percent_text(row["conditional"]) if known else _UNKNOWN,
        interval_text(row["conditional"], *row["interval"]) if known else _UNKNOWN,
    ]
