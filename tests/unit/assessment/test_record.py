"""Summaries where some realisations have no finite value: never better than the truth."""

from dataclasses import fields, replace

import numpy as np
import pytest

from probsoil.assessment.caveats import warning_rows
from probsoil.assessment.description import quantiles
from probsoil.assessment.discretisation import DiscretisationError
from probsoil.assessment.evaluation import Study, prepare
from probsoil.assessment.record import CampaignSample, driver_rows, limit_rows, settlement_record, slip_rows
from probsoil.probability import exceedance
from probsoil.scenario import Constant, Scenario
from probsoil.sensitivity import driver_sums, drivers

N = 1000
LEVELS = ("0.05", "0.25", "0.5", "0.75", "0.95")


@pytest.fixture(scope="module")
def study(scenario: Scenario) -> Study:
    return prepare(scenario)


def sample_of(study: Study, **arrays: np.ndarray) -> CampaignSample:
    """Return a sample of N realisations in which all is one and nothing went wrong, but for `arrays`."""
    whole = {field.name: np.zeros(N, dtype=bool) for field in fields(CampaignSample)} | {
        "quantity": np.ones((N, len(study.scenario.limits))),
        "slip": np.ones((N, len(study.site.slip_times))),
        "bearing": np.ones((N, len(study.site.bearing_times))),
        "secondary": np.zeros((N, len(study.scenario.limits))),
        "final": np.ones(N),
        "settlement": np.ones((N, len(study.site.times)), dtype=np.float32),
        "converged": np.ones(N, dtype=bool),
        "replicate": np.zeros(N, dtype=np.int64),
    }
    return CampaignSample(**(whole | arrays))  # type: ignore[arg-type]


def test_quantiles_of_finite_values_are_the_usual_ones() -> None:
    values = np.random.default_rng(1).lognormal(size=(501, 3))
    found = quantiles(values)
    for level in LEVELS:
        np.testing.assert_allclose(found[level], np.quantile(values, float(level), axis=0), rtol=1e-14)
    assert quantiles(np.array([])) == dict.fromkeys(LEVELS, None)


@pytest.mark.parametrize("n", [1, 5, 39])
def test_tails_of_few_realisations_are_withheld(n: int) -> None:
    values = np.arange(1.0, n + 1.0)
    found = quantiles(values)
    assert (found["0.05"], found["0.95"]) == (None, None)
    for level in ("0.25", "0.5", "0.75"):
        assert found[level] == pytest.approx(np.quantile(values, float(level)))
    both = quantiles(np.stack([values, values], axis=1))
    assert both["0.95"] == [None, None]
    assert None not in quantiles(np.arange(40.0)).values()


def test_times_never_reached_are_the_longest_and_not_left_out() -> None:
    """36 % never reach the degree: the median is that of the whole and the 95 % point has no number."""
    whole = np.random.default_rng(2).lognormal(1.0, 0.8, 2001)
    never = np.where(whole > np.quantile(whole, 0.64), np.inf, whole)
    found = quantiles(never)
    for level in ("0.05", "0.25", "0.5"):
        assert found[level] == pytest.approx(np.quantile(whole, float(level)), rel=1e-14)
    assert found["0.75"] is None
    assert found["0.95"] is None
    assert found["0.5"] > 1.2 * np.median(never[np.isfinite(never)])  # what leaving them out would say


def test_a_quantile_between_a_number_and_infinity_has_no_number() -> None:
    assert quantiles(np.array([1.0, 2.0, np.inf]))["0.5"] == 2.0
    assert quantiles(np.array([1.0, 2.0, np.inf]))["0.75"] is None
    assert quantiles(np.array([1.0, 2.0, 3.0, np.inf, np.inf]), levels=[0.5, 0.6]) == {
        "0.5": 3.0,
        "0.6": None,
    }
    assert quantiles(np.array([-np.inf, 1.0, 2.0]))["0.25"] is None


def test_what_did_not_converge_sorts_as_the_worst() -> None:
    values = np.repeat([np.nan, np.nan, 1.0, 2.0, 3.0], 21)  # 105 values: quantiles fall on them
    assert quantiles(values) == {"0.05": 1.0, "0.25": 2.0, "0.5": 3.0, "0.75": None, "0.95": None}
    low = quantiles(values, worst=-np.inf)
    assert low == {"0.05": None, "0.25": None, "0.5": 1.0, "0.75": 2.0, "0.95": 3.0}


def test_each_column_has_quantiles_of_its_own() -> None:
    values = np.array([[1.0, 1.0], [2.0, np.inf], [3.0, np.nan]])
    assert quantiles(values)["0.5"] == [2.0, None]


@pytest.mark.parametrize("name", ["time", "settlement", "slip", "degree"])
def test_summary_of_a_limit_agrees_with_its_probability(study: Study, name: str) -> None:
    """The median lies beyond a threshold exactly if more than half exceed it, whatever has no number."""
    place = next(i for i, limit in enumerate(study.scenario.limits) if limit.name == name)
    sense = study.scenario.limits[place].sense
    values = np.random.default_rng(3).lognormal(0.0, 0.4, N)
    values[:200], values[200:330] = np.nan, np.inf
    quantity = np.ones((N, len(study.scenario.limits)))
    quantity[:, place] = values
    summary = limit_rows(study, sample_of(study, quantity=quantity))[place]["summary"]
    assert summary["mean"] is None
    assert summary["sd"] is None
    median = summary["quantiles"]["0.5"]
    worse = 1.0 if sense == "not more than" else -1.0
    assert exceedance(values, median - 1e-3 * worse, sense).probability > 0.5
    assert exceedance(values, median + 1e-3 * worse, sense).probability < 0.5
    # a fifth did not converge, 13 % are infinite: above, all of them together or the infinite alone
    beyond = {
        "not more than": (False, False, False, True, True),
        "not less than": (True, False, False, False, True),
    }
    assert tuple(summary["quantiles"][level] is None for level in LEVELS) == beyond[sense]


def test_summary_of_finite_values_has_mean_and_sd(study: Study) -> None:
    values = np.random.default_rng(4).lognormal(size=(N, len(study.scenario.limits)))
    for place, row in enumerate(limit_rows(study, sample_of(study, quantity=values))):
        assert row["summary"]["mean"] == pytest.approx(values[:, place].mean())
        assert row["summary"]["sd"] == pytest.approx(values[:, place].std(ddof=1))


def test_settlement_band_counts_what_did_not_converge_as_the_deepest(study: Study) -> None:
    settlement = np.tile(np.arange(1.0, N + 1.0, dtype=np.float32)[:, None], (1, len(study.site.times)))
    settlement[-300:, 2:] = np.nan
    final = settlement[:, -1].astype(np.float64)
    record = settlement_record(study, sample_of(study, settlement=settlement, final=final))
    assert record["realisations"] == N
    assert record["mean"][:3] == [500.5, 500.5, None]
    assert record["quantiles"]["0.5"][:3] == [500.5, 500.5, 500.5]
    assert record["quantiles"]["0.75"][:3] == [pytest.approx(750.25), pytest.approx(750.25), None]
    assert record["final"]["mean"] is None
    assert record["final"]["quantiles"]["0.5"] == 500.5
    assert record["final"]["quantiles"]["0.95"] is None


def test_slip_without_fill_is_above_every_number_and_not_converged_below(study: Study) -> None:
    slip = np.tile(np.arange(1.0, N + 1.0)[:, None], (1, len(study.site.slip_times)))
    slip[-300:, 0] = np.inf
    slip[:100, 1] = np.nan
    first, second = slip_rows(study, sample_of(study, slip=slip))[:2]
    assert first["mean"] is None
    assert first["quantiles"]["0.5"] == 500.5
    assert first["quantiles"]["0.75"] is None
    assert first["quantiles"]["0.05"] == pytest.approx(50.95)
    assert second["mean"] is None
    assert second["quantiles"]["0.05"] is None
    assert second["quantiles"]["0.95"] == pytest.approx(950.05)


def test_slip_with_no_fill_at_all_has_no_number_and_no_failure(study: Study) -> None:
    rows = slip_rows(study, sample_of(study, slip=np.full((N, len(study.site.slip_times)), np.inf)))
    assert all(row["quantiles"] == dict.fromkeys(LEVELS, None) and row["mean"] is None for row in rows)
    assert all(row["probability_below_one"] == 0.0 for row in rows)
    assert all(row["interval_below_one"] == [0.0, pytest.approx(1 - 0.025 ** (1 / N))] for row in rows)


def test_slip_shares_have_the_interval_of_their_count(study: Study) -> None:
    slip = np.ones((N, len(study.site.slip_times)))
    slip[:30, 0], slip[30:35, 0] = 0.9, np.nan  # what did not converge counts as below one
    row = slip_rows(study, sample_of(study, slip=slip))[0]
    expected = exceedance(slip[:, 0], 1.0, "not less than")
    assert row["probability_below_one"] == 0.035
    assert row["interval_below_one"] == list(expected.interval)


def test_median_has_limits_by_order_and_costs_the_limits_of_their_chance(study: Study) -> None:
    quantity = np.tile(np.arange(1.0, N + 1.0)[:, None], (1, len(study.scenario.limits)))
    quantity[-520:, 1] = np.inf
    first, second = limit_rows(study, sample_of(study, quantity=quantity / 1e4))[:2]
    assert first["summary"]["median_interval"] == [pytest.approx(0.0469), pytest.approx(0.0532)]
    assert second["summary"]["median_interval"] == [pytest.approx(0.0469), None]
    low, high = first["interval"]
    assert first["expected_cost_interval"] == [1000.0 * low, 1000.0 * high]
    assert second["expected_cost_interval"] is None


def warned(study: Study, **arrays: np.ndarray) -> dict[str, list[dict[str, object]]]:
    error = DiscretisationError(
        realisations=1,
        cells=1,
        steps=1,
        settlement_error=0.0,
        settlement_error_share=0.0,
        slip_error_share=None,
    )
    found: dict[str, list[dict[str, object]]] = {}
    for row in warning_rows(study, sample_of(study, **arrays), error):
        found.setdefault(str(row["code"]), []).append(row)
    return found


def test_what_lies_outside_the_published_ranges_is_warned_of(study: Study) -> None:
    assert "published_range" not in warned(study)
    clay = study.scenario.layers[0].model_copy(update={"kh_kv": Constant(value=9.0)})
    odd = study.scenario.model_copy(update={"layers": (clay, *study.scenario.layers[1:])})
    (row,) = warned(replace(study, scenario=odd))["published_range"]
    assert "kh_kv: a mean kh/kv of 9 lies above what is published" in str(row["message"])
    assert row["share"] is None


def test_settlement_judged_after_a_slip_is_warned_of(study: Study) -> None:
    """A slip at the first check comes before every limit, one at the second after the degree at 1 year."""
    slip = np.full((N, len(study.site.slip_times)), 1.5)
    assert "slipped_before" not in warned(study, slip=slip)
    slip[:20, 0] = 0.99
    slip[20:25, 0] = np.nan  # not converged, and no slip
    (row,) = warned(study, slip=slip)["slipped_before"]
    assert row["share"] == 0.02
    assert row["share_of"] == "all realisations"
    assert "limits settlement, residual, degree, time;" in str(row["message"])
    late = int(np.argmax(study.site.slip_times > 1.0))
    slip[100:110, late] = 0.5
    rows = {str(row["message"]): row["share"] for row in warned(study, slip=slip)["slipped_before"]}
    assert sorted(rows.values()) == [0.02, 0.03]
    assert any("time of limit degree;" in message and share == 0.02 for message, share in rows.items())
    assert not any("slip," in message.split("time of")[1] for message in rows)


def test_driver_rows_say_what_ranks_and_what_is_clear(study: Study) -> None:
    z = np.random.default_rng(5).standard_normal((4000, 1))
    limits = study.scenario.limits[:2]
    sums = [driver_sums(z, np.eye(1), z[:, 0], z[:, 0] > threshold) for threshold in (0.0, 1.5)]
    found = [drivers(one, np.eye(1), ("clay.lambda",)) for one in sums]
    rows, quality = driver_rows(limits, found)
    assert [row["ranked_by"] for row in quality] == ["mean", "spread"]
    assert [row["rank"] for row in rows] == [1, 1]
    assert [(row["spread_clear"], row["mean_clear"]) for row in rows] == [(False, True), (True, True)]
