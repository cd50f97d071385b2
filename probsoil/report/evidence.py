"""What the tests in hand changed, arranged for the page, the tables and the figures."""

from typing import Any

from probsoil.report import text
from probsoil.report.alttext import Words

SOURCES = {
    "knowledge": "knowledge of the layer mean",
    "inherent": "the ground's own variability",
    "measurement": "measurement error",
    "bias": "bias of the kind of test",
}
"""The four sources of uncertainty in words."""

_REMEDY = {
    "knowledge": "more tests in this layer would reduce it",
    "inherent": "tests elsewhere would not reduce it, only tests at the structure itself",
    "measurement": "more tests of the same kind would average it out",
    "bias": "only tests of another kind would reduce it",
}


def evidence_view(results: dict[str, Any]) -> dict[str, Any] | None:
    """Arrange what the tests in hand changed.

    Parameters
    ----------
    results : dict
        The results of an assessment.

    Returns
    -------
    view : dict or None
        What the template asks for; None without tests.
    """
    data = results.get("evidence")
    if not data:
        return None
    return {
        "summary": _summary(data),
        "conflict": _conflict(data["conflict"]),
        "curvature": _curvature(data["curvature"]),
        "parameters": [_parameter(number, row) for number, row in enumerate(data["parameters"], start=1)],
        "tests": [_test(row) for row in data["tests"]],
        "unused": [_unused(row) for row in data["unused"]],
    }


def evidence_words(row: dict[str, Any]) -> Words:
    """Describe the figure of one parameter before and after the tests.

    Parameters
    ----------
    row : dict
        One entry of ``parameters`` of ``evidence`` of the results.

    Returns
    -------
    words : Words
        Title and description.
    """
    values = [text.number_text(one["value"]) for one in row["data"]]
    shown = f" Measured: {text.list_text(values)}." if values else " No test measured it alone."
    before, after = (_spread(row[when], row["unit"]) for when in ("before", "after"))
    return Words(
        title=f"{row['name']} before and after the tests",
        description=f"Before: {before}. After: {after}.{shown}",
    )


def test_rows(data: dict[str, Any]) -> list[dict[str, Any]]:
    """Arrange the tests as a table for a spreadsheet.

    Parameters
    ----------
    data : dict
        ``evidence`` of the results.

    Returns
    -------
    rows : list of dict
        Those used and those not.
    """
    return [
        {
            "test": row["test"],
            "kind": row["kind"],
            "parameter": row["parameter"],
            "layer": row["layer"],
            "hole": row["hole"],
            "value [unit]": row["value"],
            "unit": row["unit"],
            "standard error [unit]": row.get("standard_error"),
            "error cov [-]": row.get("error_cov"),
            "bias cov [-]": row.get("bias_cov"),
            "informs": "; ".join(row.get("informs") or []),
            "standard deviations from what was expected [-]": row.get("deviation"),
            "not used because": row.get("reason"),
        }
        for row in [*data["tests"], *data["unused"]]
    ]


def parameter_rows(data: dict[str, Any]) -> list[dict[str, Any]]:
    """Arrange what the tests changed as a table for a spreadsheet.

    Parameters
    ----------
    data : dict
        ``evidence`` of the results.

    Returns
    -------
    rows : list of dict
        One per parameter.
    """
    rows = []
    for row in data["parameters"]:
        columns: dict[str, Any] = {"parameter": row["name"], "unit": row["unit"], "tests [-]": row["tests"]}
        for when in ("before", "after"):
            for key in ("mean", "sd", "p05", "p50", "p95"):
                columns[f"{key} {when} [unit]"] = row[when][key]
            for key, words in SOURCES.items():
                columns[f"variance {when} from {words} [-]"] = row[f"sources_{when}"][key]
        rows.append(columns)
    return rows


def _summary(data: dict[str, Any]) -> str:
    used, kinds = len(data["tests"]), sorted({row["kind"] for row in data["tests"]})
    number = f"{used} {'result' if used == 1 else 'results'} of {text.list_text(kinds)} tests"
    left = len(data["unused"])
    also = (
        f"; {left} more {'was' if left == 1 else 'were'} left out, for the reasons given below"
        if left
        else ""
    )
    return (
        f"{number} {'has' if used == 1 else 'have'} updated {len(data['parameters'])} parameters{also}. All "
        "that follows in this report stands on the parameters after the tests."
    )


def _conflict(data: dict[str, Any]) -> str:
    chance = text.percent_text(data["chance"])
    if data["far"]:
        return (
            f"The results contradict what was expected of them: data as far off or farther would turn up in "
            f"only {chance} of cases. Either the distributions of the scenario, the errors of the tests or "
            "some test is wrong, and the parameters after the tests deserve no trust before that is settled."
        )
    return (
        f"The results agree with what was expected of them: data as far off or farther would turn up in "
        f"{chance} of cases."
    )


def _curvature(value: float) -> str:
    if value < 0.005:
        return ""
    return (
        "Relations between several parameters and what a test measures were taken as straight; what this "
        f"leaves out, up to {text.percent_text(value)} of the measured value, counts as measurement error."
    )


def _spread(numbers: dict[str, float], unit: str) -> str:
    low, middle, high = (text.value_text(numbers[key], unit) for key in ("p05", "p50", "p95"))
    return f"median {middle}, 9 in 10 from {low} to {high}"


def _parameter(number: int, row: dict[str, Any]) -> dict[str, Any]:
    tests = row["tests"]
    behind = (
        "no test of its own; it follows the parameters it is correlated with"
        if tests == 0
        else f"{tests} {'result' if tests == 1 else 'results'} ({text.list_text(row['kinds'])})"
    )
    return {
        "figure": f"evidence-{number}",
        "name": row["name"],
        "meaning": row["meaning"],
        "unit": row["unit"],
        "behind": behind,
        "before": [text.number_text(row["before"][key]) for key in ("p50", "p05", "p95", "sd")],
        "after": [text.number_text(row["after"][key]) for key in ("p50", "p05", "p95", "sd")],
        "sources": [
            [words, _share(row, "before", key), _share(row, "after", key), _REMEDY[key]]
            for key, words in SOURCES.items()
        ],
        "left": _left(row),
    }


def _share(row: dict[str, Any], when: str, key: str) -> str:
    """Write a source as a share of the variance before the tests."""
    whole = sum(row["sources_before"].values())
    share = row[f"sources_{when}"][key] / whole if whole > 0.0 else 0.0
    return "none" if share == 0.0 else text.percent_text(share)


def _left(row: dict[str, Any]) -> str:
    before, after = (sum(row[f"sources_{when}"].values()) for when in ("before", "after"))
    if not before or not after:
        return ""
    bought = sum(row["sources_after"][key] for key in ("knowledge", "measurement")) / after
    return (
        f"{text.percent_text(min(after / before, 1.0))} of the variance is left; of that "
        f"{text.percent_text(min(bought, 1.0))} could be bought away with more tests of the kinds in hand."
    )


def _test(row: dict[str, Any]) -> list[str]:
    where = f"{row['layer']}, {text.rounded(row['below_top'], 1)} m below its top"
    return [
        f"{row['test']}{', ' + row['hole'] if row['hole'] else ''}",
        f"{row['kind']}, {row['parameter']}",
        where,
        text.value_text(row["value"], row["unit"]),
        f"{text.percent_text(row['error_cov'])}, {text.percent_text(row['bias_cov'])}",
        text.list_text(row["informs"]),
        text.rounded(row["deviation"], 1),
    ]


def _unused(row: dict[str, Any]) -> list[str]:
    return [
        row["test"],
        f"{row['kind']}, {row['parameter']}",
        text.value_text(row["value"], row["unit"]),
        row["reason"],
    ]
