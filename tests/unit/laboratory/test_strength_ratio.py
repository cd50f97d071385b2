"""Strength over vertical stress: which tests it is made of, what they are called, and how sure it is."""

from dataclasses import replace

import numpy as np
import pytest
import synthetic_tests as drawn

from probsoil.laboratory.ground_column import assumed_column
from probsoil.laboratory.interpretation import Interpretation, interpreted_site
from probsoil.laboratory.sheets import Place, SiteSheets, TriaxialKind, TriaxialSheet
from probsoil.laboratory.strength_ratio import strength_ratio
from probsoil.laboratory.triaxial import TriaxialResult, interpreted_triaxial
from probsoil.laboratory.yield_profile import yield_profile

YIELD = 120.0


def shansep(
    name: str, consolidated: float, kind: TriaxialKind = "CIUC", law: tuple[float, float] = (0.3, 0.8)
) -> TriaxialSheet:
    """An undrained test whose strength is S OCR^Lambda exactly."""
    strength = law[0] * consolidated * max(YIELD / consolidated, 1.0) ** law[1]
    q = 2.0 * strength * np.array([0.0, 0.5, 0.8, 0.97, 1.0, 0.998, 0.995])
    return TriaxialSheet(
        test=name,
        place=Place(hole=f"hole of {name}", depth=consolidated / 10.0, stratum="clay"),
        origin=drawn.ORIGIN,
        kind=kind,
        axial_stress=consolidated,
        radial_stress=consolidated,
        initial_void_ratio=1.2,
        axial_strain=np.array([0.0, 0.005, 0.01, 0.03, 0.06, 0.09, 0.12]),
        deviator=q,
        pore_pressure_change=0.4 * q,
        volumetric_strain=np.full(q.size, np.nan),
    )


def interpreted(*sheets: TriaxialSheet) -> list[TriaxialResult]:
    return [interpreted_triaxial(one) for one in sheets]


def site(*sheets: TriaxialSheet) -> Interpretation:
    """Interpret tests in ground whose oedometer yields at 120 kPa, whatever the depth."""
    oedometer, _ = drawn.oedometer(np.random.default_rng(1))
    named = replace(oedometer, place=Place(hole="B", depth=5.0, stratum="clay"))
    return interpreted_site(SiteSheets(oedometers=(named,), triaxials=sheets))


def test_only_the_tests_that_gave_a_number_are_named() -> None:
    results = interpreted(shansep("over", 80.0), shansep("normal", 150.0), shansep("other", 200.0))
    found = strength_ratio("clay", results, [], lambda _: YIELD)
    assert found.tests == ("normal", "other")
    assert found.ocr == pytest.approx((1.0, 1.0))
    assert found.over_stress == pytest.approx((0.3, 0.3))
    nothing = strength_ratio("clay", results[:1], [], lambda _: YIELD)
    assert (nothing.tests, nothing.ratio) == ((), None)


def test_one_test_keeps_its_name_place_and_depth() -> None:
    done = site(shansep("over", 30.0), shansep("normal", 600.0))
    (row,) = [one for one in done.observations if one.parameter == "su_ratio"]
    assert (row.test, row.hole, row.depth) == ("normal", "hole of normal", 60.0)
    assert row.value == pytest.approx(0.3)


def test_several_tests_are_named_one_by_one() -> None:
    done = site(shansep("a", 500.0), shansep("b", 600.0), shansep("over", 30.0, "CAUC"))
    (row,) = [one for one in done.observations if one.parameter == "su_ratio"]
    assert (row.test, row.hole, row.depth) == ("a + b", "", 55.0)


def test_kinds_of_consolidation_are_never_in_one_regression() -> None:
    lower, upper = (0.24, 0.8), (0.30, 0.8)
    results = interpreted(
        shansep("a", 30.0, "CAUC", lower),
        shansep("b", 60.0, "CAUC", lower),
        shansep("c", 150.0, "CIUC", upper),
        shansep("d", 200.0, "CIUC", upper),
    )
    found = strength_ratio("clay", results, [], lambda _: YIELD)
    assert found.exponent is None  # two overconsolidated tests alone do not tell it
    assert found.tests == ("c", "d")
    assert found.isotropic
    assert found.ratio is not None
    assert found.ratio.value == pytest.approx(0.30)
    assert any(words.startswith("CAUC: ") and "no test was normally" in words for words in found.remarks)


def test_both_numbers_from_isotropic_specimens_are_flagged() -> None:
    names = ("a", "b", "c", "d")
    done = site(*(shansep(n, s) for n, s in zip(names, (20.0, 40.0, 400.0, 500.0), strict=True)))
    flags = {one.parameter: one.flag for one in done.observations if one.test == "a + b + c + d"}
    assert set(flags) == {"su_ratio", "Lambda"}
    assert all("equal stresses" in words for words in flags.values())


def test_order_of_the_tests_does_not_matter() -> None:
    rng = np.random.default_rng(4)
    sheets = [
        shansep(f"{s}", s, law=(0.3 * np.exp(0.1 * rng.standard_normal()), 0.8))
        for s in (15.0, 30.0, 60.0, 120.0, 200.0)
    ]
    first, other = (
        strength_ratio("clay", interpreted(*some), [], lambda _: YIELD)
        for some in (sheets, [sheets[k] for k in (3, 0, 4, 2, 1)])
    )
    assert first.exponent is not None
    assert other.exponent is not None
    assert other.exponent.value == pytest.approx(first.exponent.value, rel=1e-9)
    assert other.exponent.standard_error == pytest.approx(first.exponent.standard_error, rel=1e-9)


def test_error_of_the_preconsolidation_stress_reaches_ratio_and_exponent() -> None:
    # all specimens overconsolidated: a stress 10 % too high lowers S by 10 % to the power Lambda
    results = interpreted(*(shansep(f"{s}", s) for s in (10.0, 20.0, 40.0, 80.0)))
    sure, unsure = (
        strength_ratio("clay", results, [], lambda _: YIELD, stress_error=error) for error in (0.0, 0.1)
    )
    assert sure.ratio is not None
    assert unsure.ratio is not None
    added = unsure.ratio.relative_error**2 - sure.ratio.relative_error**2
    assert np.sqrt(added) == pytest.approx(0.8 * 0.1, rel=0.01)
    mixed = interpreted(*(shansep(f"{s}", s) for s in (20.0, 40.0, 300.0, 500.0)))
    sure, unsure = (
        strength_ratio("clay", mixed, [], lambda _: YIELD, stress_error=error) for error in (0.0, 0.1)
    )
    assert sure.exponent is not None
    assert unsure.exponent is not None
    assert unsure.exponent.standard_error > sure.exponent.standard_error
    assert sure.correlation is not None
    assert -1.0 < sure.correlation < 0.0


def test_ratio_alone_carries_the_doubt_whether_a_test_was_normally_consolidated() -> None:
    results = interpreted(shansep("a", 121.0), shansep("b", 121.0))
    sure, unsure = (
        strength_ratio("clay", results, [], lambda _: YIELD, stress_error=error) for error in (0.0, 0.2)
    )
    far = interpreted(shansep("a", 400.0), shansep("b", 400.0))
    beyond = strength_ratio("clay", far, [], lambda _: YIELD, stress_error=0.2)
    assert sure.ratio is not None
    assert unsure.ratio is not None
    assert beyond.ratio is not None
    assert unsure.ratio.standard_error > sure.ratio.standard_error
    assert beyond.ratio.standard_error == pytest.approx(sure.ratio.standard_error)


def test_preconsolidation_stress_of_a_layer_has_an_error() -> None:
    from probsoil.laboratory.oedometer import interpreted_oedometer

    rng = np.random.default_rng(5)
    sheets = [drawn.oedometer(rng)[0] for _ in range(4)]
    column = assumed_column(16.0, 1.0)
    alone, weighed = (
        yield_profile([interpreted_oedometer(one, stress) for one in sheets], column)
        for stress in (None, 40.0)
    )
    assert alone is not None
    assert weighed is not None
    assert alone.stress(2.0) == alone.stress(9.0)
    assert weighed.stress(9.0) / weighed.stress(2.0) == pytest.approx(
        column.effective_stress(9.0) / column.effective_stress(2.0)
    )
    assert 0.02 < alone.relative_error < 0.5
    one = yield_profile([interpreted_oedometer(sheets[0])], None)
    assert one is not None
    assert one.relative_error > 0.1
    assert yield_profile([], column) is None


def test_test_above_ground_tells_no_ratio() -> None:
    results = interpreted(shansep("a", 150.0), shansep("b", 200.0))
    found = strength_ratio("clay", results, [], lambda depth: YIELD if depth > 16.0 else 0.0)
    assert found.tests == ("b",)
    assert strength_ratio("clay", results, [], lambda _: 0.0).tests == ()
