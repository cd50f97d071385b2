"""What an oedometer sheet gives, and what it says where it gives nothing."""

from dataclasses import replace

import numpy as np
import pytest
import synthetic_tests as drawn

from probsoil.laboratory.compression_curve import branches
from probsoil.laboratory.disturbance import disturbance
from probsoil.laboratory.oedometer import OedometerResult, interpreted_oedometer
from probsoil.laboratory.preconsolidation import (
    carried_to_meeting,
    casagrande,
    log_log,
    preconsolidation_stress,
    work,
)
from probsoil.laboratory.sheets import OedometerSheet, TimeReadings
from probsoil.laboratory.two_branches import two_branch_fit

LAM, KAPPA, YIELD, E0 = 0.30, 0.03, 100.0, 1.5


def curve(stress: np.ndarray) -> np.ndarray:
    """Two straight branches with a sharp bend, 1.4 at 10 kPa."""
    x = np.log(stress / YIELD)
    return 1.4 - KAPPA * np.log(stress / 10.0) - (LAM - KAPPA) * np.maximum(x, 0.0)


def sheet(stress: list[float], void_ratio: np.ndarray | None = None, **more: object) -> OedometerSheet:
    loads = np.array(stress, dtype=float)
    base = OedometerSheet(
        test="O1",
        place=drawn.PLACE,
        origin=drawn.ORIGIN,
        initial_void_ratio=E0,
        initial_height=20.0,
        stress=loads,
        void_ratio=curve(loads) if void_ratio is None else void_ratio,
        reported_cv=np.full(loads.size, np.nan),
    )
    return replace(base, **more)  # type: ignore[arg-type]


LOADS = [10.0, 20.0, 40.0, 80.0, 160.0, 320.0, 640.0]


def test_sharp_branches_come_back() -> None:
    result = interpreted_oedometer(sheet(LOADS))
    assert result.lam is not None
    assert result.preconsolidation is not None
    assert result.kappa_initial is not None
    assert result.lam.value == pytest.approx(LAM, rel=0.02)
    assert result.kappa_initial.value == pytest.approx(KAPPA, rel=0.1)
    assert abs(result.preconsolidation.value - YIELD) < 2.0 * result.preconsolidation.standard_error
    assert result.preconsolidation.value == pytest.approx(YIELD, rel=0.05)


def test_work_method_is_exact_on_dense_readings_of_straight_branches() -> None:
    stress = np.geomspace(10.0, 640.0, 300)
    assert work(stress, curve(stress), E0).stress == pytest.approx(YIELD, rel=0.005)


def test_log_log_method_is_exact_on_its_own_law() -> None:
    x = np.log(np.geomspace(10.0, 640.0, 12))
    volume = 2.4 * np.exp(-0.01 * (x - x[0]) - 0.12 * np.maximum(x - np.log(YIELD), 0.0))
    found = log_log(np.exp(x), volume - 1.0)
    assert found.stress == pytest.approx(YIELD, rel=1e-6)


def test_casagrande_construction_meets_its_own_lines() -> None:
    stress = np.array(LOADS)
    made = casagrande(stress, curve(stress))
    assert made.stress is not None
    halved, virgin = made.lines[2], made.lines[3]
    start, end = np.log10(halved[:, 0]), halved[:, 1]
    on_halved = end[0] + (end[1] - end[0]) * (np.log10(made.stress) - start[0]) / (start[1] - start[0])
    assert virgin[0, 0] == pytest.approx(made.stress)
    assert virgin[0, 1] == pytest.approx(on_halved)


def test_branches_of_a_loop_and_of_the_last_unloading() -> None:
    found = branches(drawn.STRESSES)
    assert drawn.STRESSES[found.first].tolist() == [10, 20, 40, 80, 160, 320, 640, 1280]
    assert [drawn.STRESSES[leg].tolist() for leg in found.loops] == [[320, 160, 80, 40], [80, 160]]
    assert drawn.STRESSES[found.rebound].tolist() == [1280, 320, 80, 20]


def test_kappa_is_that_of_the_loop_then_of_the_rebound_then_of_first_loading() -> None:
    whole, _ = drawn.oedometer(np.random.default_rng(1))
    no_loop = np.r_[0:6, 12:17]
    only_loading = np.r_[0:6, 12:14]
    for places, wanted in ((slice(None), "loop"), (no_loop, "rebound"), (only_loading, "initial branch")):
        part = replace(
            whole,
            stress=whole.stress[places],
            void_ratio=whole.void_ratio[places],
            reported_cv=whole.reported_cv[places],
        )
        result = interpreted_oedometer(part)
        assert result.kappa_from == wanted
        assert result.kappa is not None
    assert "no unloading" in " ".join(result.remarks)
    flags = [row.flag for row in result.observations() if row.parameter == "kappa"]
    assert flags == ["from the initial branch, no unloading"]


@pytest.mark.parametrize(
    ("loads", "reason"),
    [
        ([10, 20, 160, 320], "4 increments of first loading; at least 5 are needed"),
        ([10, 20, 30, 40, 60, 80], "one straight line fits as well"),
        ([10, 20, 30, 40, 80, 150], "no virgin branch reached"),
        ([90, 160, 320, 640, 1280], "no branch before"),
        ([160, 320, 640, 1280, 2560], "one straight line fits as well"),
        ([], "0 increments"),
    ],
)
def test_a_curve_that_cannot_be_told_gives_the_reason_and_no_value(loads: list[float], reason: str) -> None:
    result = interpreted_oedometer(sheet(loads))
    assert result.lam is None
    assert result.preconsolidation is None
    assert reason in " ".join(result.remarks)
    assert {row.parameter for row in result.observations()} == {"void_ratio"}


def test_void_ratio_that_does_not_rise_on_unloading_gives_no_kappa() -> None:
    loads = [*LOADS, 160.0, 40.0]
    fallen = np.concatenate([curve(np.array(LOADS)), [0.5, 0.4]])
    result = interpreted_oedometer(sheet(loads, fallen))
    assert result.kappa_rebound is None
    assert "does not rise on unloading" in " ".join(result.remarks)


def test_readings_that_are_no_numbers_are_passed_over() -> None:
    holed = curve(np.array(LOADS))
    holed[2] = np.nan
    assert interpreted_oedometer(sheet(LOADS, holed)).lam is not None


def test_fit_says_more_error_where_readings_are_fewer() -> None:
    few, many = np.array(LOADS), np.geomspace(10.0, 640.0, 25)
    errors = []
    for stress in (few, many):
        fit = two_branch_fit(stress, curve(stress), 0.003)
        assert not isinstance(fit, str)
        errors.append(fit.lam.standard_error)
    assert errors[1] < errors[0]


def test_reading_error_is_in_the_answer() -> None:
    rough, fine = (
        interpreted_oedometer(sheet(LOADS, reading_sd=one)).preconsolidation for one in (0.02, 0.001)
    )
    assert rough is not None
    assert fine is not None
    assert rough.standard_error > 3.0 * fine.standard_error


@pytest.mark.parametrize(
    ("change", "ocr", "quality"),
    [
        (0.03, 1.5, "very good to excellent"),
        (0.035, 2.5, "good to fair"),
        (0.04, 2.0, "good to fair"),
        (0.08, 1.0, "poor"),
        (0.2, 3.0, "very poor"),
        (0.01, 6.0, ""),
    ],
)
def test_disturbance_classes(change: float, ocr: float, quality: str) -> None:
    found = disturbance(1.5, 1.5 * (1.0 - change), ocr)
    assert found.quality == quality
    assert found.strain == pytest.approx(change * 1.5 / 2.5)


def test_disturbed_specimen_is_flagged() -> None:
    result = interpreted_oedometer(sheet(LOADS), 60.0)
    assert result.disturbance is not None
    assert result.disturbance.change == pytest.approx((E0 - curve(np.array([60.0]))[0]) / E0, rel=1e-6)
    rows = {row.parameter: row.flag for row in result.observations()}
    assert rows["lambda"] == "specimen quality poor"
    assert rows["void_ratio"] == ""


def with_times(cvs: dict[int, float], creep: float = 0.0) -> OedometerResult:
    """Increments in time of a virgin clay whose cv per increment is known."""
    loads = np.array(LOADS)
    e = curve(loads)
    solids, before = 20.0 / (1.0 + E0), np.concatenate([[E0], e[:-1]])
    readings: list[TimeReadings | None] = []
    for place in range(loads.size):
        if place not in cvs:
            readings.append(None)
            continue
        path = 0.5 * solids * (1.0 + 0.5 * (before[place] + e[place]))
        per_minute = cvs[place] * 1e6 / (365.25 * 1440.0) / path**2
        crept = solids * creep * np.log10(1.0 + drawn.TIMES * per_minute)
        primary = solids * (before[place] - e[place]) * drawn.degree(per_minute * drawn.TIMES)
        readings.append(TimeReadings(time=drawn.TIMES, compression=primary + crept))
    return interpreted_oedometer(sheet(LOADS, time_readings=tuple(readings)))


def test_cv_k_and_creep_of_the_virgin_increments() -> None:
    result = with_times({3: 4.0, 5: 0.8, 6: 0.8}, creep=0.02)
    assert [one.virgin for one in result.increments] == [False, True, True]
    assert result.time.cv is not None
    assert result.time.cv.value == pytest.approx(0.8, rel=0.05)  # creep blurs the end of primary compression
    assert result.time.creep_ratio is not None
    assert result.time.creep_ratio.value == pytest.approx(0.02 / (LAM * np.log(10.0)), rel=0.15)
    assert result.time.ck is None
    assert "by ck = 0.5 e0" in " ".join(result.remarks)
    logs = [
        np.log(one.k * 10.0 ** ((E0 - one.void_ratio) / (0.5 * E0))) for one in result.increments[1:] if one.k
    ]
    assert result.time.k is not None
    assert result.time.k.value == pytest.approx(np.exp(np.mean(logs)))
    k = result.increments[1].k
    one = result.increments[1]
    assert k is not None
    assert one.curve.cv is not None
    assert one.mv == pytest.approx(
        (curve(np.array([160.0]))[0] - curve(np.array([320.0]))[0])
        / (1.0 + curve(np.array([160.0]))[0])
        / 160.0
    )
    assert k == pytest.approx(one.curve.cv.value * 9.81 * one.mv / (365.25 * 86400.0))


def test_permeability_at_the_initial_void_ratio_follows_ck() -> None:
    loads = np.array([*LOADS, 1280.0])
    e, ck, k0 = curve(loads), 0.6, 1e-9
    before = np.concatenate([[E0], e[:-1]])
    cvs, readings = {}, []
    for place in range(loads.size):
        if place < 5:
            readings.append(None)
            continue
        middle = 0.5 * (before[place] + e[place])
        mv = (before[place] - e[place]) / (1.0 + before[place]) / (loads[place] - loads[place - 1])
        cvs[place] = k0 * 10.0 ** ((middle - E0) / ck) * 365.25 * 86400.0 / 9.81 / mv
        path = 0.5 * 20.0 / (1.0 + E0) * (1.0 + middle)
        factor = cvs[place] * 1e6 / (365.25 * 1440.0) / path**2 * drawn.TIMES
        readings.append(TimeReadings(time=drawn.TIMES, compression=drawn.degree(factor)))
    found = interpreted_oedometer(sheet(list(loads), time_readings=tuple(readings)))
    assert found.time.k is not None
    assert found.time.ck is not None
    assert found.time.ck.value == pytest.approx(ck, rel=0.05)
    assert found.time.k.value == pytest.approx(k0, rel=0.15)  # a tenth of a decade of cv error, carried back


@pytest.mark.parametrize(
    ("readings", "reason"),
    [
        (
            TimeReadings(time=[0, 1, 1, 2, 4, 8, 15, 30, 60, 120], compression=np.linspace(0, 1, 10)),
            "times do not rise",
        ),
        (TimeReadings(time=[0, 1, 2, 4], compression=[0, 0.1, 0.2, 0.3]), "3 readings after time zero"),
        (TimeReadings(time=drawn.TIMES, compression=np.zeros(15)), "hardly compresses"),
        (TimeReadings(time=drawn.TIMES[:10], compression=np.sqrt(drawn.TIMES[:10])), "no tail"),
        (TimeReadings(time=drawn.TIMES[:10], compression=np.sqrt(drawn.TIMES[:10])), "readings end before"),
        (
            TimeReadings(time=drawn.TIMES + 100.0, compression=1.0 - np.exp(-drawn.TIMES)),
            "first readings come too late",
        ),
    ],
)
def test_increment_that_cannot_be_read_gives_the_reason(readings: TimeReadings, reason: str) -> None:
    empty: list[TimeReadings | None] = [None] * (len(LOADS) - 1)
    result = interpreted_oedometer(sheet(LOADS, time_readings=(*empty, readings)))
    assert reason in " ".join(result.remarks)
    assert "320 to 640 kPa" in " ".join(result.remarks)


def test_constructions_that_cannot_be_made_say_why() -> None:
    stress = np.array(LOADS)
    flattening = 1.4 - np.array([0.0, 0.3, 0.5, 0.62, 0.70, 0.75, 0.78])
    drawn_by_hand = casagrande(stress, flattening)
    assert drawn_by_hand.stress is None
    assert "no point of greatest curvature" in drawn_by_hand.reason
    straight = np.expm1(1.0 - 0.125 * np.arange(7.0))  # steps of one size, exact in binary
    doubling = np.exp(np.arange(7.0))
    parallel = log_log(doubling, straight)
    assert parallel.stress is None
    assert "do not meet" in parallel.reason
    assert work(stress, flattening, 1.5).points.shape == (7, 2)


def test_fit_stands_where_no_construction_does() -> None:
    fit = two_branch_fit(np.array(LOADS), curve(np.array(LOADS)), 0.003)
    assert not isinstance(fit, str)
    nothing = casagrande(np.array(LOADS), 1.4 - np.array([0.0, 0.3, 0.5, 0.62, 0.70, 0.75, 0.78]))
    carried = carried_to_meeting(fit, (nothing, nothing, nothing), np.array(LOADS), E0)
    assert carried == {}
    found = preconsolidation_stress(fit, carried)
    assert found.value == pytest.approx(np.exp(fit.ln_break.value))
    assert found.relative_error == pytest.approx(fit.ln_break.standard_error)


def test_one_virgin_increment_without_cv_gives_the_reason() -> None:
    steady = TimeReadings(time=drawn.TIMES, compression=np.zeros(15))
    empty: list[TimeReadings | None] = [None] * (len(LOADS) - 1)
    result = interpreted_oedometer(sheet(LOADS, time_readings=(*empty, steady)))
    assert result.time.cv is None
    assert "no virgin increment whose compression against time can be read" in " ".join(result.remarks)


def test_one_way_drainage_makes_the_path_twice_as_long() -> None:
    whole, _ = drawn.oedometer(np.random.default_rng(4))
    readings, _, _ = drawn.time_readings(np.random.default_rng(4))
    timed = (*[None] * 13, readings, None, None, None)
    both, one = (
        interpreted_oedometer(replace(whole, time_readings=timed, two_way=way)).increments[0].curve.path
        for way in (True, False)
    )
    assert one == pytest.approx(2.0 * both)
