"""The chain as a whole: same bits for any workers, the contract of results.json, resume."""

import json
import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from probsoil.assessment import Assessment, assess
from probsoil.assessment.evaluation import Study
from probsoil.campaign import process_pool
from probsoil.errors import ParameterError, ProbsoilError
from probsoil.report import render_report
from probsoil.report.validation import check_results
from probsoil.scenario import Scenario


@pytest.fixture(scope="module")
def whole(scenario: Scenario, tmp_path_factory: pytest.TempPathFactory) -> Assessment:
    return assess(scenario, out=tmp_path_factory.mktemp("whole"), workers=1)


def numbers(results: dict[str, Any]) -> str:
    return json.dumps({key: value for key, value in results.items() if key != "provenance"})


def test_two_threads_and_two_processes_give_the_same_bits_as_one(
    scenario: Scenario, whole: Assessment
) -> None:
    threads = assess(scenario, workers=2)
    processes = assess(scenario, workers=2, executor_factory=process_pool(2))
    assert numbers(threads.results) == numbers(whole.results)
    assert numbers(processes.results) == numbers(whole.results)
    assert np.array_equal(processes.sample.quantity, whole.sample.quantity)


def test_another_seed_gives_other_realisations(scenario: Scenario, whole: Assessment) -> None:
    other = assess(scenario, seed=6)
    assert not np.array_equal(other.sample.quantity, whole.sample.quantity)


def test_results_file_is_strict_json_and_equals_the_result(whole: Assessment) -> None:
    assert whole.folder is not None
    text = (whole.folder / "results.json").read_text(encoding="utf-8")
    read = json.loads(text, parse_constant=lambda name: pytest.fail(f"{name} is not JSON"))
    assert read == json.loads(json.dumps(whole.results))


def test_results_are_what_the_format_says(whole: Assessment) -> None:
    assert check_results(json.loads(json.dumps(whole.results)), "here")


@pytest.mark.parametrize("draws", ["monte carlo", "latin hypercube", "sobol"])
def test_scenario_without_anything_uncertain_runs_and_says_so(fixed_scenario: Scenario, draws: str) -> None:
    found = assess(fixed_scenario, realisations=50, draws=draws)
    results = found.results
    assert check_results(json.loads(json.dumps(results)), "here")
    assert results["parameters"] == results["drivers"] == []
    assert found.sample.quantity.shape == (results["realisations"], 5)
    assert (found.sample.quantity == found.sample.quantity[0]).all()
    for row in results["limits"]:
        assert row["probability"] in (0.0, 1.0)
        assert row["interval"] == [row["probability"]] * 2
        assert row["unseen_bound"] is None
        assert row["verdict"] in (None, "within target", "beyond target")
        assert "nothing is uncertain" in row["method"]
    assert any(row["code"] == "nothing_uncertain" for row in results["warnings"])
    assert results["discretisation"]["realisations"] == 1
    page = render_report(results)
    assert "nothing in this scenario is uncertain" in page


def test_ten_realisations_are_called_too_few_and_not_a_quantity_that_does_not_vary(
    scenario: Scenario,
) -> None:
    results = assess(scenario, realisations=10).results
    notes = [row["note"] for row in results["driver_quality"]]
    assert all("too few for 9 parameters" in note for note in notes)
    assert all(row["summary"]["quantiles"]["0.95"] is None for row in results["limits"])
    assert "too few realisations" in render_report(results)


def test_realisations_file_holds_the_counted_quantities(whole: Assessment) -> None:
    assert whole.folder is not None
    with np.load(whole.folder / "realisations.npz", allow_pickle=False) as stored:
        names, quantity = list(stored["limit"]), stored["quantity"]
    for index, row in enumerate(whole.results["limits"]):
        assert names[index] == row["name"]
        beyond = {"not more than": np.greater, "not less than": np.less}[row["sense"]]
        assert int(beyond(quantity[:, index], row["threshold"]).sum()) == row["exceeding"]


def test_headline_stands_in_the_curve(whole: Assessment) -> None:
    for row in whole.results["limits"]:
        place = row["curve"]["threshold"].index(row["threshold"])
        assert row["curve"]["exceeding"][place] == row["exceeding"]
        assert row["curve"]["low"][place] == row["interval"][0]
        assert row["curve"]["high"][place] == row["interval"][1]


def test_shares_of_every_limit_sum_to_one(whole: Assessment) -> None:
    for limit in whole.results["limits"]:
        shares = [row["share"] for row in whole.results["drivers"] if row["limit"] == limit["name"]]
        assert len(shares) == 9  # eight given and the mode factor by default
        assert sum(shares) == pytest.approx(1.0, abs=1e-9)


def test_known_drivers_point_the_right_way(whole: Assessment) -> None:
    direction = {(row["limit"], row["parameter"]): row["direction"] for row in whole.results["drivers"]}
    assert direction["settlement", "model_error.settlement"] == "raises"
    assert direction["settlement", "clay.pop"] == "lowers"
    assert direction["slip", "clay.pop"] == "lowers"
    assert direction["slip", "load.fill_unit_weight"] == "raises"
    assert direction["degree", "clay.k"] == "lowers"
    assert direction["time", "clay.k"] == "lowers"


def test_settlement_does_not_feel_strength(whole: Assessment) -> None:
    (row,) = (
        row
        for row in whole.results["drivers"]
        if (row["limit"], row["parameter"]) == ("settlement", "clay.M")
    )
    assert row["rank"] is None
    assert row["share_interval"][0] <= 0.0005


def test_expected_cost_is_chance_times_cost(whole: Assessment) -> None:
    row = whole.results["limits"][0]
    assert row["expected_cost"] == pytest.approx(1000.0 * row["probability"])
    assert whole.results["limits"][1]["expected_cost"] is None


def test_settlement_at_a_limit_time_agrees_with_the_band(whole: Assessment) -> None:
    band, row = whole.results["settlement"], whole.results["limits"][0]
    assert band["times"][-1] == 10.0
    # the band is kept in single precision
    assert band["quantiles"]["0.5"][-1] == pytest.approx(row["summary"]["quantiles"]["0.5"], rel=1e-6)


def test_slip_limit_is_the_least_over_the_stage_ends(whole: Assessment) -> None:
    assert np.array_equal(whole.sample.quantity[:, 2], whole.sample.slip.min(axis=1))


@pytest.mark.parametrize("draws", ["latin hypercube", "sobol"])
def test_other_draws_agree_within_their_intervals(scenario: Scenario, whole: Assessment, draws: str) -> None:
    other = assess(scenario, draws=draws)
    assert other.results["draws"] == draws
    for first, second in zip(whole.results["limits"], other.results["limits"], strict=True):
        # a 95 % interval is about four standard errors wide; four of the difference: 6 in 100,000
        errors = [(row["interval"][1] - row["interval"][0]) / 3.92 for row in (first, second)]
        assert abs(first["probability"] - second["probability"]) <= 4.0 * math.hypot(*errors)


def test_broken_run_goes_on_from_what_reached_the_disk(
    scenario: Scenario, whole: Assessment, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    evaluate = Study.__call__

    def failing(self: Study, chunk: int) -> Any:
        if chunk == 1:
            raise RuntimeError("power cut")
        return evaluate(self, chunk)

    monkeypatch.setattr(Study, "__call__", failing)
    with pytest.raises(ProbsoilError, match="chunk 1 of 2 failed"):
        assess(scenario, out=tmp_path, workers=1)
    assert not (tmp_path / "results.json").exists()

    def counting(self: Study, chunk: int) -> Any:
        evaluated.append(chunk)
        return evaluate(self, chunk)

    evaluated: list[int] = []
    monkeypatch.setattr(Study, "__call__", counting)
    again = assess(scenario, out=tmp_path, workers=1, resume=True)
    assert evaluated == [1]
    assert numbers(again.results) == numbers(whole.results)
    assert not (tmp_path / "chunks").exists()


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda scenario: assess(scenario, realisations=0), "realisations must be 1 to 100,000,000"),
        (
            lambda scenario: assess(scenario, realisations=100_000_001),
            "realisations must be 1 to 100,000,000; got 100,000,001",
        ),
        (lambda scenario: assess(scenario, seed=-1), "seed must be 0 to 9223372036854775807"),
        (lambda scenario: assess(scenario, seed=2**63), "seed must be 0 to 9223372036854775807"),
        (lambda scenario: assess(scenario, draws="dice"), "draws must be one of"),
    ],
)
def test_bad_overrides_are_refused(
    scenario: Scenario, call: Callable[[Scenario], Assessment], message: str
) -> None:
    with pytest.raises(ParameterError, match=message):
        call(scenario)


def test_frame_has_one_row_per_limit(whole: Assessment) -> None:
    frame = whole.to_frame()
    assert list(frame["name"]) == ["settlement", "residual", "slip", "degree", "time"]
    assert (frame["low"] <= frame["probability"]).all()
    assert "<table" in whole._repr_html_()
