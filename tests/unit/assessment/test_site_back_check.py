"""Back-checks of a whole site: parameters pooled by layer, what is left out, what is told."""

from dataclasses import replace

import numpy as np
import pytest
from synthetic_specimens import KNOWN, STRAINS, STRESSES, oedometer, sheared, triaxial, void_ratios

from probsoil.assessment.back_check import BackCheckOptions
from probsoil.assessment.site_back_check import (
    USUAL_SCATTER,
    USUAL_WEIGHT,
    SiteBackChecks,
    site_back_checks,
)
from probsoil.laboratory.interpretation import Choices, Interpretation, interpreted_site
from probsoil.laboratory.sheets import Place, SiteSheets
from probsoil.report.back_check_section import back_check_figures, back_check_tables, back_check_view
from probsoil.report.interpretation_page import render_interpretation, write_interpretation

FEW = BackCheckOptions(realisations=100)


def at(sheet, name: str, depth: float, stratum: str = "clay"):
    return replace(sheet, test=name, place=Place(hole="B1", depth=depth, stratum=stratum))


def site(*, ground: Choices | None = None, more: tuple = ()) -> Interpretation:
    rng = np.random.default_rng(4)
    values = KNOWN.values(rng.standard_normal((3, 4)))
    measured = void_ratios(values) + 0.001 * rng.standard_normal((3, STRESSES.size))
    oedometers = [at(oedometer(one), f"O{k}", 3.0 + k) for k, one in enumerate(measured)]
    triaxials = [at(sheared(one), f"T{k}", 3.5 + k) for k, one in enumerate(values[:2])]
    sheets = SiteSheets(
        oedometers=tuple(oedometers + [one for one in more if hasattr(one, "stress")]),
        triaxials=tuple(triaxials + [one for one in more if hasattr(one, "deviator")]),
    )
    return interpreted_site(sheets, choices=ground)


def logs(interpretation: Interpretation, name: str) -> np.ndarray:
    return np.log([getattr(one, name).value for one in interpretation.oedometers])


def test_every_test_is_checked_with_the_parameters_of_its_layer() -> None:
    found = site_back_checks(site(), FEW)
    assert [one.test for one in found.checks] == ["O0", "O1", "O2", "T0", "T1"]
    assert set(found.layers) == {"clay"}
    assert found.remarks == ()
    assert [one.parameters.source for one in found.checks] == [
        *3 * ["clay: 2 oedometer tests, the one checked left out; M of 2 triaxial tests"],
        *2 * ["clay: 3 oedometer tests; M of 1 triaxial test, the one checked left out"],
    ]
    assert np.mean([one.share_inside for one in found.checks]) > 0.8


@pytest.mark.parametrize("place", [0, 1, 3])
def test_pooled_parameters_by_hand_leave_out_the_test_checked(place: int) -> None:
    done = site()
    parameters = site_back_checks(done, FEW).checks[place].parameters
    oedometers = [one for one in range(3) if one != place]
    triaxials = [one for one in range(2) if one != place - 3]
    rows = np.array([logs(done, name)[oedometers] for name in ("lam", "kappa", "preconsolidation")])
    slopes = np.log([one.slope_at_failure.value for one in done.triaxials])[triaxials]
    expected = [*rows[:2].mean(axis=1), slopes.mean(), rows[2].mean()]
    np.testing.assert_allclose(parameters.log_mean, expected)
    for place, values in ((0, rows[0]), (1, rows[1]), (2, slopes), (3, rows[2])):
        n = len(values)
        squares = USUAL_WEIGHT * USUAL_SCATTER[place] ** 2 + ((values - values.mean()) ** 2).sum()
        variance = squares / (USUAL_WEIGHT + n - 1.0) * (1.0 + 1.0 / n)
        assert parameters.log_sd[place] == pytest.approx(np.sqrt(variance))
    apart = rows - rows.mean(axis=1, keepdims=True)
    sums = apart @ apart.T + USUAL_WEIGHT * np.diag(USUAL_SCATTER[[0, 1, 3]] ** 2)
    assert parameters.correlation[0, 1] == pytest.approx(sums[0, 1] / np.sqrt(sums[0, 0] * sums[1, 1]))
    assert parameters.correlation[0, 3] == pytest.approx(sums[0, 2] / np.sqrt(sums[0, 0] * sums[2, 2]))
    np.testing.assert_array_equal(parameters.correlation[2], [0.0, 0.0, 1.0, 0.0])


def test_preconsolidation_is_in_proportion_to_the_stress_in_situ_where_that_is_known() -> None:
    done = site(ground=Choices(unit_weight=16.0))
    found = site_back_checks(done, FEW)
    medians = [one.parameters.median[3] for one in found.checks[:3]]
    stresses = np.array([one.in_situ_stress for one in done.oedometers])
    ratios = logs(done, "preconsolidation") - np.log(stresses)
    others = [np.exp(np.mean(np.delete(ratios, place))) for place in range(3)]
    np.testing.assert_allclose(medians / stresses, others)


def test_above_ground_the_stress_is_not_known_and_it_is_told() -> None:
    lost = at(sheared(KNOWN.median), "T9", 0.0)
    found = site_back_checks(site(ground=Choices(unit_weight=16.0), more=(lost,)), FEW)
    assert "T9" not in [one.test for one in found.checks]
    assert found.remarks == (
        "triaxial.csv, row 2: no back-check: T9: the stress in situ is not known at its depth",
    )


def test_a_layer_without_triaxial_tests_takes_m_of_the_others_or_the_usual() -> None:
    other = at(oedometer(void_ratios(KNOWN.median)), "O9", 9.0, "peat")
    done = site(more=(other,))
    found = {one.test: one for one in site_back_checks(done, FEW).checks}
    assert found["O9"].parameters.log_mean[2] == pytest.approx(found["O0"].parameters.log_mean[2])
    alone = interpreted_site(SiteSheets(oedometers=(other,)))
    parameters = site_back_checks(alone, FEW).checks[0].parameters
    assert parameters.median[2] == pytest.approx(1.0)
    assert parameters.source == (
        "peat: 1 oedometer test, the one checked itself; M taken as 1.0, no triaxial test tells it"
    )


def test_source_names_the_ground_that_m_is_borrowed_from() -> None:
    other = at(oedometer(void_ratios(KNOWN.median)), "O9", 9.0, "peat")
    found = {one.test: one for one in site_back_checks(site(more=(other,)), FEW).checks}
    assert found["O9"].parameters.source == (
        "peat: 1 oedometer test, the one checked itself; "
        "M of 2 triaxial tests of other ground, for want of one here"
    )


def test_a_test_that_alone_tells_something_stays_among_them_and_it_is_told() -> None:
    done = site()
    flagged = tuple(
        replace(one, flag="doubtful")
        if (one.test, one.parameter) in (("O1", "kappa"), ("O2", "kappa"))
        else one
        for one in done.observations
    )
    found = {one.test: one for one in site_back_checks(replace(done, observations=flagged), FEW).checks}
    alone = found["O0"].parameters
    assert alone.source.startswith(
        "clay: 3 oedometer tests, the one checked among them, as it alone tells all;"
    )
    assert alone.log_mean[0] == pytest.approx(logs(done, "lam").mean())
    assert found["O1"].parameters.source.startswith("clay: 2 oedometer tests, the one checked left out")
    assert found["O1"].parameters.log_mean[1] == pytest.approx(logs(done, "kappa")[0])


def test_a_layer_without_oedometer_tests_cannot_be_checked_and_it_is_told() -> None:
    lone = at(sheared(KNOWN.median), "T9", 9.0, "silt")
    found = site_back_checks(site(more=(lone,)), FEW)
    assert found.remarks == (
        "triaxial.csv, row 2: no back-check: no oedometer test of silt gives lambda, kappa and "
        "preconsolidation stress without doubt",
    )


def test_tests_that_cannot_be_run_again_are_told() -> None:
    quick = at(triaxial(40.0 + 100.0 * STRAINS, "UU", (np.nan, np.nan)), "T9", 4.0)
    found = site_back_checks(site(more=(quick,)), FEW)
    assert any("T9: an unconsolidated test" in one for one in found.remarks)


def test_doubtful_numbers_are_left_out() -> None:
    done = site()
    flagged = tuple(
        replace(one, flag="doubtful") if (one.test, one.parameter) == ("O1", "lambda") else one
        for one in done.observations
    )
    parameters = site_back_checks(replace(done, observations=flagged), FEW).checks[3].parameters
    kept = logs(done, "lam")[[0, 2]]
    assert parameters.log_mean[0] == pytest.approx(kept.mean())
    assert parameters.log_mean[1] == pytest.approx(logs(done, "kappa").mean())


def test_the_void_ratio_of_the_layer_stands_in_where_a_sheet_does_not_say() -> None:
    silent = at(triaxial(sheared(KNOWN.median).deviator, initial_void_ratio=np.nan), "T9", 4.0)
    found = site_back_checks(site(more=(silent,)), FEW)
    assert "T9" in [one.test for one in found.checks]


def test_a_site_without_specimens_has_nothing_to_check() -> None:
    found = site_back_checks(interpreted_site(SiteSheets()))
    assert (found.checks, found.layers, found.remarks) == ((), (), ())


def small(done: Interpretation) -> Interpretation:
    """One test of each kind: drawing takes time."""
    return replace(done, oedometers=done.oedometers[-1:], triaxials=done.triaxials[:1])


def test_tables_figures_and_page(tmp_path) -> None:
    done = small(site())
    found = site_back_checks(done, FEW)
    frames = back_check_tables(found)
    assert list(frames) == ["back_check", "back_check_readings"]
    assert list(frames["back_check"]["test"]) == ["O2", "T0"]
    counted = sum(curve.counted.size for one in found.checks for curve in one.curves)
    assert len(frames["back_check_readings"]) == counted
    figures = back_check_figures(found)
    assert [one.name for one in figures] == ["back-check-o2", "back-check-t0"]
    assert all(one.svg.startswith("<svg") for one in figures)
    page = write_interpretation(done, tmp_path / "out", found)
    text = page.read_text(encoding="utf-8")
    assert 'id="back-check"' in text
    assert "readings within the band" in text
    assert (tmp_path / "out" / "figures" / "back-check-o2.svg").exists()
    assert (tmp_path / "out" / "tables" / "back_check_readings.csv").exists()
    # written again without checks, nothing of them is left
    write_interpretation(done, tmp_path / "out")
    assert not (tmp_path / "out" / "figures" / "back-check-o2.svg").exists()
    assert not (tmp_path / "out" / "tables" / "back_check.csv").exists()
    assert 'id="back-check"' not in page.read_text(encoding="utf-8")


def test_a_test_that_leaves_is_drawn_and_told_on_the_page() -> None:
    done = site(more=(at(oedometer(void_ratios(KNOWN.median * [0.4, 1.0, 1.0, 1.0])), "O9", 4.0),))
    found = site_back_checks(done, FEW)
    check = next(one for one in found.checks if one.test == "O9")
    done, found = small(done), replace(found, checks=(check,), layers=("clay",))
    assert check.words
    figures = back_check_figures(found)
    view = back_check_view(found, figures)
    assert view["within"] == 0
    page = render_interpretation(done, checks=view)
    assert check.words[-1] in page
    assert back_check_tables(SiteBackChecks()) == {}
