"""Triaxial tests, vane profiles and cone soundings, by hand."""

import math
from dataclasses import replace

import numpy as np
import pytest
import synthetic_tests as drawn

from probsoil.laboratory.cone import CONE_FACTOR, YIELD_FACTOR, interpreted_cone
from probsoil.laboratory.friction import compression_slope, friction_angle
from probsoil.laboratory.ground_column import assumed_column, scenario_column
from probsoil.laboratory.oedometer import interpreted_oedometer
from probsoil.laboratory.pooled_friction import pooled_friction
from probsoil.laboratory.sheets import ConeSheet, Place, TriaxialSheet, VaneSheet
from probsoil.laboratory.strength_ratio import slopes_exponent, strength_ratio
from probsoil.laboratory.triaxial import interpreted_triaxial
from probsoil.laboratory.vane import interpreted_vane, vane_correction
from probsoil.scenario import parse_scenario, starter_text

NAN = np.nan


def triaxial(kind: str, **more: object) -> TriaxialSheet:
    """A K0-consolidated undrained test with its numbers written out."""
    base = TriaxialSheet(
        test="T1",
        place=drawn.PLACE,
        origin=drawn.ORIGIN,
        kind=kind,  # type: ignore[arg-type]
        axial_stress=100.0,
        radial_stress=60.0,
        initial_void_ratio=1.2,
        axial_strain=np.array([0.0, 0.01, 0.04, 0.10]),
        deviator=np.array([40.0, 60.0, 66.0, 62.0]),
        pore_pressure_change=np.array([0.0, 10.0, 20.0, 29.0]),
        volumetric_strain=np.full(4, NAN),
    )
    return replace(base, **more)  # type: ignore[arg-type]


def test_stress_path_and_both_definitions_of_failure() -> None:
    result = interpreted_triaxial(triaxial("CAUC"))
    start = (100.0 + 2.0 * 60.0) / 3.0
    assert result.mean_stress == pytest.approx(
        [start, start + 20 / 3 - 10, start + 26 / 3 - 20, start + 22 / 3 - 29]
    )
    assert result.peak is not None
    assert result.greatest_ratio is not None
    assert (result.peak.strain, result.peak.deviator) == (0.04, 66.0)
    assert (result.greatest_ratio.strain, result.greatest_ratio.deviator) == (0.10, 62.0)
    at_ratio, at_peak = result.slope(result.greatest_ratio), result.slope(result.peak)
    assert at_ratio is not None
    assert at_peak is not None
    assert at_ratio.value == pytest.approx(62.0 / (start + 22 / 3 - 29))
    assert at_peak.value == pytest.approx(66.0 / (start + 26 / 3 - 20))
    assert result.slope_at_failure == at_ratio
    assert interpreted_triaxial(triaxial("CAUC"), failure="peak deviator").slope_at_failure == at_peak
    assert result.strength is not None
    assert result.strength.value == pytest.approx(33.0)
    assert result.strength_over_stress == pytest.approx(0.33)


def test_drained_test_gives_friction_and_no_strength() -> None:
    none = np.full(4, NAN)
    result = interpreted_triaxial(triaxial("CADC", pore_pressure_change=none))
    assert result.mean_stress == pytest.approx((220.0 + np.array([0.0, 20.0, 26.0, 22.0])) / 3.0)
    assert result.slope_at_failure is not None
    assert result.strength is None
    assert {row.parameter for row in result.observations()} == {"M"}


def test_unconsolidated_test_gives_strength_only() -> None:
    result = interpreted_triaxial(
        triaxial("UU", axial_stress=NAN, radial_stress=NAN, deviator=np.array([0.0, 30.0, 44.0, 40.0]))
    )
    assert [(row.parameter, row.value) for row in result.observations()] == [("su", 22.0)]
    assert result.strength_over_stress is None
    assert result.remarks == ()


def test_extension_is_carried_over_by_the_friction_angle() -> None:
    phi = math.radians(25.0)
    extension = 6.0 * math.sin(phi) / (3.0 + math.sin(phi))
    q = np.array([0.0, -20.0, -30.0, -30.0])
    p = 30.0 / extension
    pore = 100.0 + q / 3.0 - np.array([100.0, 80.0, p, p])
    result = interpreted_triaxial(
        triaxial("CIUE", axial_stress=100.0, radial_stress=100.0, deviator=q, pore_pressure_change=pore)
    )
    assert result.slope_at_failure is not None
    assert result.slope_at_failure.value == pytest.approx(6.0 * math.sin(phi) / (3.0 - math.sin(phi)))
    rows = {row.parameter: row.flag for row in result.observations()}
    assert "extension" in rows["M"]
    assert rows["su"] == "in extension"


def test_friction_angle_and_slope_undo_each_other() -> None:
    # CHECKS: M 0.888 for 22.75 degrees
    assert compression_slope(math.radians(22.75)) == pytest.approx(0.888, abs=5e-4)
    assert math.degrees(friction_angle(compression_slope(0.4))) == pytest.approx(math.degrees(0.4))


@pytest.mark.parametrize(
    ("more", "reason"),
    [
        ({"axial_strain": np.array([0.0, 0.01, NAN, NAN])}, "2 readings during shear"),
        ({"axial_strain": np.array([NAN, NAN, 0.04, NAN])}, "only the state at failure is given"),
        ({"axial_strain": np.array([0.0, 0.04, 0.01, 0.1])}, "does not go on in one direction"),
        ({"deviator": np.array([0.0, -10.0, -20.0, -30.0])}, "no deviator in the direction"),
        ({"deviator": np.array([40.0, 50.0, 60.0, 70.0])}, "still rises at the last reading"),
        ({"pore_pressure_change": np.array([0.0, 10.0, 20.0, 75.0])}, "a stress ratio no friction gives"),
        ({"pore_pressure_change": np.full(4, NAN)}, "pore pressure or consolidation stress is missing"),
    ],
)
def test_triaxial_remarks(more: dict[str, np.ndarray], reason: str) -> None:
    assert reason in " ".join(interpreted_triaxial(triaxial("CAUC", **more)).remarks)


def test_strength_is_evidence_only_from_the_stress_in_situ() -> None:
    for in_situ, wanted in ((90.0, True), (300.0, False)):
        rows = interpreted_triaxial(triaxial("CAUC"), in_situ).observations()
        assert ("su" in {row.parameter for row in rows}) is wanted
    flags = {row.parameter: row.flag for row in interpreted_triaxial(triaxial("CAUC")).observations()}
    assert "not known" in flags["su"]


def test_pooled_slope_is_the_mean_ratio_with_students_error() -> None:
    results = tuple(
        interpreted_triaxial(triaxial("CADC", deviator=np.array([40.0, 60.0, q, q])))
        for q in (80.0, 90.0, 100.0)
    )
    ratios = np.array([q / ((220.0 + q - 40.0) / 3.0) for q in (80.0, 90.0, 100.0)])
    found = pooled_friction("clay", results, "peak deviator")
    assert found is not None
    assert found.slope.value == pytest.approx(ratios.mean())
    student = 2.919986  # 95 % of Student's t with two degrees of freedom
    half = student * ratios.std(ddof=1) / math.sqrt(3.0)
    assert 1.644854 * found.slope.standard_error == pytest.approx(half, rel=1e-5)
    assert pooled_friction("clay", (), "stress ratio") is None


def shansep(ratio: float, exponent: float, yielding: float, consolidated: float) -> TriaxialSheet:
    strength = ratio * consolidated * max(yielding / consolidated, 1.0) ** exponent
    q = 2.0 * strength * np.array([0.0, 0.7, 1.0, 0.99])
    return triaxial(
        "CIUC",
        axial_stress=consolidated,
        radial_stress=consolidated,
        deviator=q,
        pore_pressure_change=0.4 * q,
    )


def test_lambda_and_ratio_from_tests_at_several_overconsolidation_ratios() -> None:
    results = [interpreted_triaxial(shansep(0.24, 0.8, 120.0, one)) for one in (30.0, 60.0, 120.0, 200.0)]
    found = strength_ratio("clay", results, [], lambda _: 120.0)
    assert found.ocr == pytest.approx((4.0, 2.0, 1.0, 1.0))
    assert found.ratio is not None
    assert found.exponent is not None
    assert found.ratio.value == pytest.approx(0.24)
    assert found.exponent.value == pytest.approx(0.8)
    assert found.exponent.standard_error > 0.0


def test_ratio_alone_where_overconsolidation_ratios_do_not_differ() -> None:
    results = [interpreted_triaxial(shansep(0.24, 0.8, 120.0, one)) for one in (120.0, 150.0)]
    found = strength_ratio("clay", results, [], lambda _: 120.0)
    assert found.exponent is None
    assert found.ratio is not None
    assert found.ratio.value == pytest.approx(0.24)
    assert "differ by a factor of 2" in found.remarks[0]
    assert found.correlation is None
    over = [interpreted_triaxial(shansep(0.24, 0.8, 120.0, 60.0))]
    assert "no test was normally consolidated" in strength_ratio("clay", over, [], lambda _: 120.0).remarks[0]
    assert "no preconsolidation stress known" in strength_ratio("clay", over, [], None).remarks[0]


def test_lambda_from_the_slopes_of_oedometer_tests() -> None:
    sheet, clay = drawn.oedometer(np.random.default_rng(7))
    found = slopes_exponent([interpreted_oedometer(sheet)])
    assert found is not None
    assert found.value == pytest.approx(1.0 - clay.kappa / clay.lam, abs=0.03)
    assert slopes_exponent([]) is None


def vane(corrected: bool | None, index: float = 60.0) -> VaneSheet:
    return VaneSheet(
        test="V1",
        place=Place(hole="V1", depth=2.0),
        origin=drawn.ORIGIN,
        corrected=corrected,
        depth=np.array([2.0, 3.0]),
        strength=np.array([20.0, 25.0]),
        remoulded=np.array([5.0, NAN]),
        plasticity_index=np.array([index, NAN]),
    )


def test_vane_correction_has_the_values_recalled() -> None:
    # 20 .997, 40 .835, 60 .740, 80 .672, 100 .620
    found = vane_correction(np.array([20.0, 40.0, 60.0, 80.0, 100.0]))
    assert found == pytest.approx([0.997, 0.835, 0.740, 0.672, 0.620], abs=5e-4)
    assert vane_correction(np.array([5.0]))[0] == 1.0
    assert np.isnan(vane_correction(np.array([NAN, 0.0, -3.0]))).all()


def test_vane_is_corrected_where_it_is_not_yet() -> None:
    result = interpreted_vane(vane(corrected=False))
    rows = result.observations()
    assert [(row.depth, row.parameter) for row in rows] == [(2.0, "su")]
    assert rows[0].value == pytest.approx(20.0 * (1.7 - 0.54 * math.log10(60.0)))
    steep = 20.0 * 0.54 * (math.log10(65.0) - math.log10(55.0)) / 2.0
    assert rows[0].standard_error == pytest.approx(steep, rel=0.01)
    assert "no plasticity index for 1 of 2" in result.remarks[0]
    assert result.sensitivity[0] == 4.0
    assert np.isnan(result.sensitivity[1])


def test_vane_says_what_it_was_told() -> None:
    assert [row.value for row in interpreted_vane(vane(corrected=True)).observations()] == [20.0, 25.0]
    told = interpreted_vane(vane(corrected=None), corrected=True)
    assert [row.standard_error for row in told.observations()] == [None, None]
    silent = interpreted_vane(vane(corrected=None))
    assert silent.observations() == ()
    assert "--vane-as-measured" in silent.remarks[0]
    far = interpreted_vane(vane(corrected=False, index=150.0)).observations()
    assert "outside the range" in far[0].flag


def cone(**more: object) -> ConeSheet:
    depth = np.arange(0.5, 8.0, 0.05)
    base = ConeSheet(
        test="C1",
        place=Place(hole="C1", depth=0.5, x=3.0, y=4.0),
        origin=drawn.ORIGIN,
        area_ratio=0.75,
        depth=depth,
        cone_resistance=150.0 + 50.0 * depth,
        sleeve_friction=np.full(depth.size, NAN),
        pore_pressure=20.0 * depth,
    )
    return replace(base, **more)  # type: ignore[arg-type]


def test_net_resistance_by_hand() -> None:
    result = interpreted_cone(cone(), assumed_column(16.0, 1.0))
    depth = cone().depth
    assert result.net_resistance == pytest.approx(150.0 + 50.0 * depth + 0.25 * 20.0 * depth - 16.0 * depth)
    first = result.averages[1]
    inside = (depth >= 1.0) & (depth < 2.0)
    assert first.readings == inside.sum()
    assert first.net_resistance == pytest.approx(result.net_resistance[inside].mean())
    assert first.strength == pytest.approx(first.net_resistance / CONE_FACTOR)
    assert first.preconsolidation == pytest.approx(YIELD_FACTOR * first.net_resistance)
    assert {row.parameter for row in result.observations()} == {"q_net"}
    assert result.flag == ""


def test_cone_is_averaged_by_the_layers_of_a_scenario() -> None:
    column = scenario_column(parse_scenario(starter_text("embankment")))
    result = interpreted_cone(cone(), column)
    names = [one.layer for one in result.averages]
    assert names == [name for name, top, bottom in column.layers if top < 7.6 and bottom - top > 0.6]
    top, bottom = next((top, bottom) for name, top, bottom in column.layers if name == names[1])
    assert result.averages[1].top >= top + 0.2
    assert result.averages[1].bottom <= bottom - 0.2


def test_alike_neighbours_count_for_less() -> None:
    rng = np.random.default_rng(2)
    depth = np.arange(0.5, 8.0, 0.05)
    rough = 10.0 * rng.standard_normal(depth.size)
    smooth = np.convolve(rough, np.ones(9) / 3.0, mode="same")
    column = assumed_column(16.0, 1.0)
    counts = [
        interpreted_cone(cone(cone_resistance=500.0 + noise), column).averages[2].independent
        for noise in (rough, smooth)
    ]
    assert counts[1] < 0.5 * counts[0]


def test_cone_remarks_and_flags() -> None:
    column = assumed_column(16.0, 1.0)
    assert "give the layers or a unit weight" in interpreted_cone(cone(), None).remarks[0]
    without = interpreted_cone(cone(area_ratio=None), column)
    assert "0.8 taken" in without.flag
    assert without.averages[0].standard_error > 0.0
    dry = interpreted_cone(cone(pore_pressure=np.full(cone().depth.size, NAN)), column)
    assert "not corrected" in dry.flag
    weak = interpreted_cone(cone(cone_resistance=np.full(cone().depth.size, 30.0)), column)
    assert "not above zero" in weak.remarks[-1]
    assert all(one.net_resistance > 0.0 for one in weak.averages)
    few = replace(
        cone(),
        depth=np.array([1.0, 2.0]),
        cone_resistance=np.array([300.0, 310.0]),
        sleeve_friction=np.full(2, NAN),
        pore_pressure=np.full(2, NAN),
    )
    assert "no layer with 5 readings" in interpreted_cone(few, column).remarks[0]


def test_zero_reading_of_a_cone_is_part_of_its_error() -> None:
    # 15 to 35 kPa of good soundings, in every layer of the sounding, whatever the number of readings
    for one in interpreted_cone(cone(), assumed_column(16.0, 1.0)).averages:
        assert one.standard_error >= 15.0
