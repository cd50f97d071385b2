"""What is said of further runs: how precise each chance became, by what, and on what condition."""

from typing import Any

from probsoil.report.percentages import percent_decimals
from probsoil.report.text import (
    count_text,
    interval_text,
    list_text,
    number_text,
    percent_text,
    plain_percent,
    realisations_text,
)

_METHODS = {"monte carlo": "plain Monte Carlo", "stratified by score": "strata by a score"}
_VERDICTS = {
    "within target": "within the target",
    "beyond target": "beyond the target",
    "not conclusive": "not conclusive against the target",
}
_LONGEST_PATH = 12
_MINUTE = 60.0


def precision_view(results: dict[str, Any]) -> dict[str, Any] | None:
    """Arrange the further runs for the page.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    view : dict or None
        What the template asks for; None where no precision was asked.
    """
    precision = results.get("precision")
    if not precision:
        return None
    return {
        "sentence": _asked(precision) + " " + _spent(precision),
        "rows": [
            [
                row["limit"],
                _chance(row),
                interval_text(row["probability"], *row["interval"]),
                "not known" if row["reached"] is None else percent_text(row["reached"], 0),
                "yes" if row["met"] else "no",
                _METHODS[row["method"]],
                count_text(row["model_runs"]),
            ]
            for row in precision["limits"]
        ],
        "limits": [
            {
                "number": number,
                "name": row["limit"],
                "sentences": _sentences(row, results),
                "surprises": _surprises(row),
                "path": _path(row["path"]),
            }
            for number, row in enumerate(precision["limits"], start=1)
            if row["model_runs"] != results["realisations"] or not row["met"]
        ],
    }


def precision_lines(results: dict[str, Any]) -> list[tuple[str, str, str, str, str]]:
    """Arrange the further runs for the terminal.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    rows : list of tuple of str
        Limit, chance with its interval, precision reached, how, and runs; none where no precision was asked.
    """
    return [
        (
            row["limit"],
            f"{_chance(row)} ({interval_text(row['probability'], *row['interval'])})",
            "not known" if row["reached"] is None else percent_text(row["reached"], 0),
            _METHODS[row["method"]] + (", on a condition" if _is_conditional(row) else ""),
            count_text(row["model_runs"]),
        )
        for row in (results.get("precision") or {"limits": []})["limits"]
    ]


def precision_text(name: str, results: dict[str, Any]) -> str:
    """Write what further runs make of the chance of one limit.

    Parameters
    ----------
    name : str
        Name of the limit.
    results : dict
        The results of an assessment.

    Returns
    -------
    text : str
        Chance, interval, method, runs and verdict; empty where the realisations were enough or no precision
        was asked.
    """
    for row in (results.get("precision") or {"limits": []})["limits"]:
        if row["limit"] == name and row["model_runs"] != results["realisations"]:
            verdict = _VERDICTS.get(row["verdict"] or "")
            return (
                f"{_chance(row)} ({interval_text(row['probability'], *row['interval'])}) by "
                f"{_METHODS[row['method']]}, {count_text(row['model_runs'])} runs"
                + (f"; {verdict}" if verdict else "")
                + (", if the score misses no way of exceeding" if _is_conditional(row) else "")
            )
    return ""


def precision_rows(precision: dict[str, Any]) -> list[dict[str, Any]]:
    """Arrange the further runs for a spreadsheet.

    Parameters
    ----------
    precision : dict
        ``precision`` of the results.

    Returns
    -------
    rows : list of dict
        One row per limit and step of its way to the estimate; the last one of a limit is the estimate.
    """
    return [
        {
            "limit": row["limit"],
            "method": row["method"],
            "runs [realisations]": step["runs"],
            "probability [-]": step["probability"],
            "probability low [-]": step["interval"][0],
            "probability high [-]": step["interval"][1],
        }
        for row in precision["limits"]
        for step in [*row["path"][:-1], {**row, "runs": row["model_runs"]}]
    ]


def _asked(precision: dict[str, Any]) -> str:
    asked = (
        f"The chance of each limit was to be known within {plain_percent(precision['within'])} of itself: "
        "the longer arm of its interval over the chance."
    )
    limit = precision["time_limit"]
    return asked if limit is None else f"{asked} Time allowed: {number_text(limit / _MINUTE)} minutes."


def _spent(precision: dict[str, Any]) -> str:
    if not precision["further_runs"]:
        return "No further runs were made."
    return (
        f"Besides the realisations, {count_text(precision['further_runs'])} further runs were made; they "
        "serve these chances only, and everything else in this report is from the realisations."
    )


def _chance(row: dict[str, Any]) -> str:
    if row["probability"] in (0.0, 1.0):
        return f"{'none' if row['probability'] == 0.0 else 'all'} of {realisations_text(row['model_runs'])}"
    return percent_text(row["probability"])


def _is_conditional(row: dict[str, Any]) -> bool:
    return bool(row["method"] == "stratified by score" and row["unseen_bound"] > 0.0)


def _sentences(row: dict[str, Any], results: dict[str, Any]) -> list[str]:
    said = [row["reason"]]
    if row["score"]:
        said.append(
            f"The score is the fit called {row['score']}, for which {count_text(row['score_runs'])} runs "
            "were made; it only ranks points and gives no number."
        )
    if _is_conditional(row):
        bound = percent_text(row["unseen_bound"], percent_decimals(row["unseen_bound"]))
        said.append(
            "The interval holds on the condition that the score misses no way of exceeding. Without it, "
            f"these runs alone bound what was missed to {bound} with {plain_percent(results['confidence'])} "
            "confidence, and the realisations bound the whole chance as the verdict says."
        )
    verdict = _VERDICTS.get(row["verdict"] or "")
    if verdict:
        condition = ", on that condition," if _is_conditional(row) else ""
        said.append(f"By this interval{condition} the chance is {verdict}.")
    if row["not_converged"]:
        said.append(f"{count_text(row['not_converged'])} runs did not converge and count as exceeding.")
    return said + [f"{warning[0].upper()}{warning[1:]}." for warning in row["warnings"]]


def _surprises(row: dict[str, Any]) -> list[str]:
    return [
        list_text([f"{name} = {number_text(value)}" for name, value in point.items()])
        for point in row["surprises"]
    ]


def _path(steps: list[dict[str, Any]]) -> list[list[str]]:
    every = max(1, -(-len(steps) // _LONGEST_PATH))
    kept = sorted({*range(0, len(steps), every), len(steps) - 1})
    return [
        [
            count_text(steps[place]["runs"]),
            percent_text(steps[place]["probability"]),
            interval_text(steps[place]["probability"], *steps[place]["interval"]),
        ]
        for place in kept
    ]
