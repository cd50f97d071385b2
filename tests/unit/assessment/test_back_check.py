"""Back-check: specimens of known truth, and specimens of which something is wrong on purpose."""

from dataclasses import replace

import numpy as np
import pytest
from synthetic_specimens import (
    CORRELATION,
    KNOWN,
    MEAN,
    READING,
    SD,
    STRAINS,
    STRESSES,
    oedometer,
    sheared,
    sheets_of,
    triaxial,
    void_ratios,
)

from probsoil.assessment.back_check import BackCheckOptions, back_check
from probsoil.assessment.measured_bands import band_curve
from probsoil.assessment.specimen_parameters import SpecimenParameters, specimen_parameters
from probsoil.errors import DependenceError, ParameterError, ShapeError

MEDIAN = KNOWN.median
MANY = BackCheckOptions(realisations=2000)
SECOND = {"U": "pore_pressure_change", "D": "volumetric_strain"}


def drawn(n: int, seed: int) -> np.ndarray:
    return KNOWN.values(np.random.default_rng(seed).standard_normal((n, 4)))


def test_the_band_holds_the_readings_of_oedometers_of_the_same_clay() -> None:
    rng = np.random.default_rng(11)
    measured = void_ratios(drawn(400, 12), rng.uniform(size=400))
    measured = measured + READING * rng.standard_normal(measured.shape)
    band = back_check(oedometer(measured[0]), KNOWN, options=MANY).curves[0]
    # all start from their own first reading, and the band moves with it
    moved = measured - measured[:, :1] + measured[0, 0]
    inside = [replace(band, measured=one).inside[band.counted] for one in moved]
    assert 0.85 <= np.mean(inside) <= 0.97


@pytest.mark.parametrize(
    ("kind", "stresses"),
    [("CAUC", (45.0, 30.0)), ("CIUC", (120.0, 120.0)), ("CIUE", (120.0, 120.0)), ("CADC", (45.0, 30.0))],
)
def test_the_band_holds_the_readings_of_triaxial_tests_of_the_same_clay(
    kind: str, stresses: tuple[float, float]
) -> None:
    sheets = sheets_of(drawn(400, 13), kind, stresses, error=0.5)
    for place, name in enumerate(("deviator", SECOND[kind[2]])):
        band = back_check(sheets[0], KNOWN, options=MANY).curves[place]
        assert band.quantity == name
        inside = [replace(band, measured=getattr(one, name)).inside for one in sheets]
        assert 0.85 <= np.mean(inside) <= 0.97


def test_the_share_is_that_of_the_counted_readings_within() -> None:
    check = back_check(sheets_of(drawn(3, 13), "CAUC", (45.0, 30.0), error=3.0)[2], KNOWN)
    inside = [curve.inside[curve.counted] for curve in check.curves]
    assert 0.0 < check.share_inside < 1.0
    assert check.share_inside == pytest.approx(np.mean(np.concatenate(inside)))


def test_the_specimen_of_the_medians_lies_within_and_nothing_is_said() -> None:
    for sheet in (oedometer(void_ratios(MEDIAN)), sheared(MEDIAN), sheared(MEDIAN, "CADC")):
        check = back_check(sheet, KNOWN)
        assert check.share_inside == 1.0
        assert check.words == ()
        assert check.without_answer == 0


def test_a_structured_specimen_is_told() -> None:
    """Bonds hold the void ratio up to twice the yield stress, then break over a fourfold stress."""
    stress = np.maximum.accumulate(STRESSES)
    twice = 2.0 * MEDIAN[3]
    held = MEDIAN[0] * np.maximum(np.log(np.minimum(stress, twice) / MEDIAN[3]), 0.0)
    left = np.clip(1.0 - np.log(stress / twice) / np.log(4.0), 0.0, 1.0)
    check = back_check(oedometer(void_ratios(MEDIAN) + held * left), KNOWN)
    assert any("above the band" in one for one in check.words)
    assert "looks structured" in check.words[-1]


def test_a_disturbed_specimen_is_told() -> None:
    """A curve that bends early and stays flat: half the virgin slope from a quarter of the yield stress."""
    first = np.maximum.accumulate(STRESSES)
    early = 0.5 * MEDIAN[0] * np.log(np.maximum(first / (MEDIAN[3] / 4.0), 1.0))
    swelling = MEDIAN[1] * np.log(first / STRESSES)
    void_ratio = 1.8 - MEDIAN[1] * np.log(first / first[0]) - early + swelling
    check = back_check(oedometer(void_ratio), KNOWN)
    assert any("below the band" in one for one in check.words)
    assert "looks disturbed" in check.words[-1]


def test_other_swelling_alone_is_told() -> None:
    """Right in first loading, four times the swelling."""
    void_ratio = void_ratios(MEDIAN)
    swelling = 3.0 * MEDIAN[1] * np.log(np.maximum.accumulate(STRESSES) / STRESSES)
    check = back_check(oedometer(void_ratio + swelling), KNOWN)
    assert "kappa of this specimen" in check.words[-1]


def test_another_virgin_slope_is_told() -> None:
    check = back_check(oedometer(void_ratios(MEDIAN * [0.6, 1.0, 1.0, 1.0])), KNOWN)
    assert "lambda or the preconsolidation stress" in check.words[-1]


def test_a_sensitive_specimen_is_told() -> None:
    deviator = sheared(MEDIAN).deviator
    fall = 1.25 - 0.6 * np.clip((STRAINS - 0.01) / 0.05, 0.0, 1.0)
    check = back_check(triaxial(deviator * fall), KNOWN)
    assert "structured or sensitive" in check.words[-1]


def test_a_soft_start_is_told() -> None:
    sheet = sheared(MEDIAN)
    late = np.interp(STRAINS / 4.0, STRAINS, sheet.deviator, left=sheet.deviator[0])
    check = back_check(triaxial(late), KNOWN)
    assert "looks disturbed" in check.words[-1]


def test_another_strength_is_told() -> None:
    check = back_check(sheared(MEDIAN * [1.0, 1.0, 1.35, 1.0], "CIUC", (120.0, 120.0)), KNOWN)
    assert "M or the preconsolidation stress" in check.words[-1]


def test_a_stiff_start_alone_is_told() -> None:
    sheet = sheared(MEDIAN)
    share = np.clip(STRAINS / 0.02, 0.0, 1.0)
    early = np.minimum(sheet.deviator * (1.6 - 0.6 * share), sheet.deviator.max())
    check = back_check(triaxial(early), KNOWN)
    assert "the way to it does not" in check.words[-1]


def test_a_heavily_overconsolidated_specimen_that_stays_below_is_told() -> None:
    sheet = sheared(MEDIAN, "CIUC", (8.0, 8.0))
    check = back_check(triaxial(0.6 * sheet.deviator, "CIUC", (8.0, 8.0)), KNOWN)
    assert check.dry_share > 0.9
    assert "heavily overconsolidated" in check.words[-1]


def test_extension_is_judged_by_the_size_of_the_deviator() -> None:
    sheet = sheared(MEDIAN, "CIUE", (120.0, 120.0))
    assert (sheet.deviator < 0.0).all()
    check = back_check(triaxial(1.4 * sheet.deviator, "CIUE", (120.0, 120.0), axial_strain=-STRAINS), KNOWN)
    assert "M or the preconsolidation stress" in check.words[-1]


def test_the_same_numbers_again_and_others_for_another_test() -> None:
    sheet = oedometer(void_ratios(MEDIAN))
    first, again, other = (back_check(sheet, KNOWN, number=number) for number in (4, 4, 5))
    np.testing.assert_array_equal(first.curves[0].high, again.curves[0].high)
    assert (first.curves[0].high != other.curves[0].high)[1:].all()


def test_errors_of_reading_widen_the_band() -> None:
    sheet = sheared(MEDIAN)
    narrow = back_check(sheet, KNOWN, options=BackCheckOptions(stress_error=0.0)).curves[0]
    wide = back_check(sheet, KNOWN, options=BackCheckOptions(stress_error=5.0)).curves[0]
    assert (wide.high - wide.low > narrow.high - narrow.low).all()


def test_readings_the_element_starts_from_and_gaps_do_not_count() -> None:
    check = back_check(oedometer(void_ratios(MEDIAN)), KNOWN)
    assert not check.curves[0].counted[0]
    assert check.curves[0].counted[1:].all()
    assert check.curves[0].low[0] == check.curves[0].high[0] == check.curves[0].measured[0]
    deviator = sheared(MEDIAN).deviator.copy()
    deviator[4] = np.nan
    strain = STRAINS.copy()
    strain[0] = 0.0
    gaps = back_check(triaxial(deviator, axial_strain=strain), KNOWN)
    assert list(np.flatnonzero(~gaps.curves[0].counted)) == [0, 4]
    assert len(gaps.curves) == 1  # pore pressure was not measured


def test_void_ratio_of_a_triaxial_sheet_that_does_not_say() -> None:
    sheet = sheared(MEDIAN)
    silent = triaxial(sheet.deviator, initial_void_ratio=np.nan)
    with pytest.raises(ParameterError, match="B1-3: the void ratio after consolidation is not known"):
        back_check(silent, KNOWN)
    given, said = back_check(silent, KNOWN, void_ratio=1.7), back_check(triaxial(sheet.deviator), KNOWN)
    np.testing.assert_array_equal(given.curves[0].high, said.curves[0].high)


@pytest.mark.parametrize(
    ("sheet", "message"),
    [
        (triaxial(STRAINS, "UU"), "B1-3: an unconsolidated test states no effective stress"),
        (
            triaxial(STRAINS, stresses=(50.0, 0.0)),
            "B1-3: stresses at the end of consolidation must be above 0",
        ),
        (triaxial(STRAINS, "CIUE"), "B1-3: a CIUE test needs at least 3 readings with negative axial strain"),
        (
            oedometer(np.array([1.8, 1.7]), np.array([10.0, 20.0])),
            "B1-2: at least 3 increments are needed; got 2",
        ),
    ],
)
def test_tests_that_cannot_be_run_again_are_refused(sheet, message: str) -> None:
    with pytest.raises(ParameterError, match=message):
        back_check(sheet, KNOWN)


def test_options_out_of_range_are_refused() -> None:
    with pytest.raises(ParameterError, match="realisations must be at least 20"):
        BackCheckOptions(realisations=5)
    with pytest.raises(ParameterError, match="stress_error and volume_error"):
        BackCheckOptions(stress_error=-1.0)


def test_realisations_without_an_answer_are_counted() -> None:
    loose = specimen_parameters([0.3, 0.25, 1.05, 60.0], [0.03, 0.08, 0.06, 9.0])
    check = back_check(oedometer(void_ratios(MEDIAN)), loose)
    assert 50 < check.without_answer < 300
    hopeless = specimen_parameters([0.05, 0.25, 1.05, 60.0], [0.001, 0.001, 0.06, 9.0])
    with pytest.raises(ParameterError, match="in no realisation is kappa below lambda"):
        back_check(oedometer(void_ratios(MEDIAN)), hopeless)
    steep = specimen_parameters([0.25, 0.24, 1.05, 60.0], [0.0] * 4)
    with pytest.raises(ParameterError, match="in no realisation does the element swell as stated"):
        back_check(oedometer(void_ratios(MEDIAN)), steep)


def test_no_answer_at_all_is_refused() -> None:
    steep = specimen_parameters([0.2, 0.01, 1.4, 500.0], [0.0] * 4)
    sheet = oedometer(np.array([1.0, 0.9, 0.8]), np.array([1e-3, 10.0, 20.0]))
    with pytest.raises(ParameterError, match="no realisation of the parameters has an answer"):
        back_check(sheet, steep, options=BackCheckOptions(poisson=0.45))


def test_frame_has_a_row_per_reading() -> None:
    frame = back_check(sheared(MEDIAN), KNOWN).to_frame()
    assert len(frame) == 2 * STRAINS.size
    assert set(frame["quantity"]) == {"deviator", "pore_pressure_change"}
    assert list(frame["unit"].unique()) == ["kPa"]
    assert frame["inside"].all()
    assert list(frame["test"].unique()) == ["B1-3"]


def test_stated_moments_are_those_of_the_draws() -> None:
    values = KNOWN.values(np.random.default_rng(2).standard_normal((200_000, 4)))
    # five standard errors of mean, of standard deviation and of correlation
    np.testing.assert_array_less(np.abs(values.mean(axis=0) - MEAN), 5.0 * SD / np.sqrt(2e5))
    np.testing.assert_allclose(values.std(axis=0), SD, rtol=5.0 * 0.8 / np.sqrt(2e5))
    np.testing.assert_allclose(np.corrcoef(np.log(values.T)), CORRELATION, atol=5.0 / np.sqrt(2e5))


def test_draws_are_the_same_alone_and_together_and_exist_for_full_dependence() -> None:
    normals = np.random.default_rng(2).standard_normal((50, 4))
    np.testing.assert_array_equal(KNOWN.values(normals)[7:8], KNOWN.values(normals[7:8]))
    bound = specimen_parameters(MEAN, SD, np.ones((4, 4))).values(normals)
    assert np.corrcoef(np.log(bound.T)).min() == pytest.approx(1.0)


def test_impossible_laws_are_refused() -> None:
    with pytest.raises(ParameterError, match="mean must be above 0 and sd at least 0"):
        specimen_parameters(MEAN, -SD)
    with pytest.raises(ParameterError, match="mean must be above 0"):
        specimen_parameters(-MEAN, SD)
    with pytest.raises(DependenceError, match="without a negative eigenvalue"):
        specimen_parameters(MEAN, SD, np.eye(4) * 2.0 - 1.0)
    with pytest.raises(DependenceError, match="correlation must be symmetric"):
        specimen_parameters(MEAN, SD, np.eye(4) + np.eye(4, k=1))
    with pytest.raises(ShapeError, match=r"log_sd must have shape \(4,\)"):
        SpecimenParameters(log_mean=MEAN, log_sd=SD[:3], correlation=np.eye(4), source="")
    with pytest.raises(ParameterError, match="log_mean must be finite"):
        SpecimenParameters(log_mean=MEAN * np.nan, log_sd=SD, correlation=np.eye(4), source="")


def test_predictions_must_fit_the_readings_and_may_all_be_missing() -> None:
    at, counted = np.arange(3.0), np.ones(3, dtype=bool)
    with pytest.raises(ShapeError, match="deviator: readings"):
        band_curve("deviator", at, at, np.zeros((5, 4)), counted=counted)
    empty = band_curve("deviator", at, at, np.full((5, 3), np.nan), counted=counted)
    assert np.isnan(empty.high).all()
    assert not empty.inside.any()
    assert empty.runs() == []
