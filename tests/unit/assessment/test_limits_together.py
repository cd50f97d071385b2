"""Limits together and bands of whole curves in the results of a run, counted again from its realisations."""

import numpy as np
import pytest

from probsoil.assessment import Assessment, assess
from probsoil.probability import exceeds, simultaneous_limits
from probsoil.report.page import render_report
from probsoil.report.tables import tables
from probsoil.report.validation import check_results
from probsoil.scenario import Scenario


@pytest.fixture(scope="module")
def run(scenario: Scenario) -> Assessment:
    return assess(scenario, realisations=512, workers=1)


def exceeded(run: Assessment) -> np.ndarray:
    rows = run.results["limits"]
    columns = [
        exceeds(run.sample.quantity[:, i], row["threshold"], row["sense"]) for i, row in enumerate(rows)
    ]
    return np.column_stack(columns)


def test_any_all_and_numbers_are_counts_of_realisations(run: Assessment) -> None:
    table, together = exceeded(run), run.results["together"]
    assert together["any"]["exceeding"] == np.count_nonzero(table.any(axis=1))
    assert together["all"]["exceeding"] == np.count_nonzero(table.all(axis=1))
    assert together["number"] == [np.count_nonzero(table.sum(axis=1) == k) for k in range(6)]
    assert together["any"]["interval"][0] < together["any"]["probability"] < together["any"]["interval"][1]


def test_pairs_are_conditional_counts(run: Assessment) -> None:
    table = exceeded(run)
    names = [row["name"] for row in run.results["limits"]]
    assert len(run.results["together"]["pairs"]) == 20
    for pair in run.results["together"]["pairs"]:
        where, also = (table[:, names.index(pair[key])] for key in ("where", "also"))
        assert pair["both_exceeded"] == np.count_nonzero(where & also)
        if where.any():
            assert pair["conditional"] == pytest.approx(also[where].mean(), abs=1e-15)
            assert pair["interval"][0] <= pair["conditional"] <= pair["interval"][1]
        else:
            assert (pair["conditional"], pair["interval"]) == (None, [0.0, 1.0])


def test_band_holds_the_interval_of_no_threshold_narrower(run: Assessment) -> None:
    for row in run.results["limits"]:
        curve = row["curve"]
        low, high = simultaneous_limits(curve["exceeding"], 512)
        assert (curve["band_low"], curve["band_high"]) == (low.tolist(), high.tolist())
        assert all(a <= b for a, b in zip(curve["band_low"], curve["probability"], strict=True))
        assert all(a >= b for a, b in zip(curve["band_high"], curve["probability"], strict=True))


def test_results_pass_and_the_page_and_tables_tell_them(run: Assessment) -> None:
    check_results(run.results, "the results")
    page = render_report(run.results)
    assert "Chance that any of the 5 limits is exceeded: " in page
    assert "confidence it leaves them at no threshold" in page
    assert page.count('class="whole"') == 10  # two scales of five limits
    found = tables(run.results)
    assert len(found["together"]) == 22
    assert found["curves"]["whole curve high [-]"].notna().all()


def test_replicated_designs_have_no_band_and_say_that_pairs_are_a_guide(scenario: Scenario) -> None:
    results = assess(scenario, realisations=512, draws="latin hypercube", workers=1).results
    assert all("band_low" not in row["curve"] for row in results["limits"])
    page = render_report(results)
    assert "those of the pairs are a guide" in page
    assert 'class="whole"' not in page


def test_one_limit_or_nothing_uncertain_has_nothing_together(
    scenario: Scenario, fixed_scenario: Scenario
) -> None:
    alone = scenario.model_copy(update={"limits": scenario.limits[:1]})
    assert "together" not in assess(alone, realisations=64, workers=1).results
    results = assess(fixed_scenario, realisations=64, workers=1).results
    assert "together" not in results
    assert "band_low" not in results["limits"][0]["curve"]
