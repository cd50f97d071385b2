"""Results that are not what their format says are refused by the name of the key, and nothing is written."""

import copy
import json
import re

import pytest
from sample_results import sample

from probsoil.errors import ResultsError
from probsoil.report import render_report, write_report
from probsoil.report.validation import RESULTS, check_results


@pytest.fixture(scope="module")
def results():
    return sample(n=300)


def holder(results, path):
    """The object or list that holds the last part of a path such as ``limits.0.interval``."""
    *parents, last = (int(part) if part.isdigit() else part for part in path.split("/"))
    for part in parents:
        results = results[part]
    return results, last


def test_sound_results_pass_as_they_are(results):
    assert check_results(results, "here") is results


def paths(rule, value, stem=""):
    """Every key that the format asks for, by its path in some results."""
    if isinstance(rule, list):
        yield from paths(rule[0], value[0], f"{stem}0/") if value else ()
    elif isinstance(rule, dict):
        for key, inner in rule.items():
            if not key.endswith("?"):
                yield f"{stem}{key}"
                yield from paths(inner, value[key], f"{stem}{key}/")


def test_any_key_that_is_missing_is_named(results):
    asked = list(paths(RESULTS, results))
    assert len(asked) > 120
    for path in asked:
        broken = copy.deepcopy(results)
        parent, last = holder(broken, path)
        del parent[last]
        name = re.sub(r"/(\d+)(?=/|$)", r"[\1]", path).replace("/", ".")
        with pytest.raises(ResultsError, match="is missing") as caught:
            check_results(broken, "here")
        assert str(caught.value) == f"here: {name} is missing"


def test_any_part_of_another_type_is_named(results):
    for path in paths(RESULTS, results):
        broken = copy.deepcopy(results)
        parent, last = holder(broken, path)
        parent[last] = {"odd"}
        name = re.sub(r"/(\d+)(?=/|$)", r"[\1]", path).replace("/", ".")
        with pytest.raises(ResultsError, match="must be") as caught:
            check_results(broken, "here")
        assert str(caught.value).startswith(f"here: {name} must be ")


@pytest.mark.parametrize(
    ("path", "value", "message"),
    [
        ("limits", [], "limits must name at least one limit"),
        ("limits", {}, "limits must be a list; got {}"),
        ("limits/0", 7, r"limits\[0\] must be an object; got 7"),
        ("limits/1/probability", 1.2, r"limits\[1\]\.probability must be a number from 0 to 1; got 1\.2"),
        ("limits/1/probability", "0.1", r"limits\[1\]\.probability must be a number from 0 to 1; got '0\.1'"),
        ("limits/1/probability", True, r"limits\[1\]\.probability must be a number from 0 to 1; got True"),
        ("limits/0/probability", None, r"limits\[0\]\.probability must be a number from 0 to 1; got None"),
        ("limits/0/interval", [0.2, 0.1], r"limits\[0\]\.interval must be two numbers from 0 to 1"),
        ("limits/0/interval", [0.2], r"limits\[0\]\.interval must be two numbers from 0 to 1"),
        ("limits/0/interval", [0.9, 0.95], r"limits\[0\]\.interval must hold the probability"),
        ("limits/0/exceeding", 301, r"limits\[0\]\.exceeding must not be more than the model runs, 300"),
        ("limits/0/exceeding", 1.5, r"limits\[0\]\.exceeding must be a whole number, 0 or more; got 1\.5"),
        ("limits/0/curve/low", [0.1], r"limits\[0\]\.curve\.low must have as many values as threshold"),
        ("limits/0/curve/high/3", -0.1, r"limits\[0\]\.curve\.high\[3\] must be a number from 0 to 1"),
        ("limits/0/expected_cost_interval", [3, 2], r"expected_cost_interval must be two numbers, the lower"),
        ("realisations", 0, "realisations must be a whole number, 1 or more; got 0"),
        ("settlement/mean", [0.1], r"settlement\.mean must have as many values as times"),
        ("settlement/quantiles/0.5", [0.1], r"settlement\.quantiles\.0\.5 must have as many values as times"),
        (
            "ground/profile/final_stress",
            [],
            r"ground\.profile\.final_stress must have as many values as depth",
        ),
        ("drivers/0/limit", "nobody", r"drivers\[0\]\.limit must be the name of a limit; got 'nobody'"),
        ("slip/0/quantiles", None, r"slip\[0\]\.quantiles must be an object; got None"),
        ("provenance", None, "provenance must be an object; got None"),
        ("title", 5, "title must be text; got 5"),
    ],
)
def test_what_cannot_be_is_refused_by_name_and_nothing_is_written(results, tmp_path, path, value, message):
    broken = copy.deepcopy(results)
    parent, last = holder(broken, path)
    parent[last] = value
    with pytest.raises(ResultsError, match=message):
        render_report(broken)
    (tmp_path / "results.json").write_text(json.dumps(broken), encoding="utf-8")
    with pytest.raises(ResultsError, match=message):
        write_report(tmp_path)
    assert [entry.name for entry in tmp_path.iterdir()] == ["results.json"]


def test_keys_that_came_later_may_be_absent_and_unknown_ones_present(results):
    older = copy.deepcopy(results)
    for limit in older["limits"]:
        del limit["expected_cost_interval"], limit["summary"]["median_interval"]
    for row in older["slip"]:
        del row["interval_below_one"]
    older["limits"][0]["colour"] = "blue"
    assert "not available" in render_report(older)
