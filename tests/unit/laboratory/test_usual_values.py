"""Observed numbers outside the published ranges: flagged with range and source, kept."""

import numpy as np
import pytest

from probsoil.laboratory.interpretation import interpreted_site
from probsoil.laboratory.observations import Observation, observation
from probsoil.laboratory.sheets import Origin, Place, SiteSheets, TriaxialSheet
from probsoil.laboratory.usual_values import unusual_flagged


def seen(parameter: str, value: float, *, test: str = "T1", flag: str = "") -> Observation:
    return observation("triaxial", (test, Place(hole="B", depth=4.0)), parameter, value, None, flag=flag)


@pytest.mark.parametrize(
    ("parameter", "value", "words"),
    [
        # tan phi' of 0.24 and 0.73: sin of 0.23338 and 0.58961
        (
            "M",
            0.32,
            "M of 0.32 is outside what is published, 0.506 to 1.47 (the least: organic clay and silt, ",
        ),
        ("M", 1.54, "M of 1.54 is outside what is published, 0.506 to 1.47 (the greatest: soft clay, "),
        ("lambda", 0.034, "lambda of 0.034 is outside what is published, 0.087 to 1.74"),
        ("Lambda", 0.95, "Lambda of 0.95 is outside what is published, 0.46 to 0.9"),
        ("su_ratio", 0.5, "su_ratio of 0.5 is outside what is published, 0.19 to 0.35"),
        (
            "cv",
            60.0,
            "cv of 60 is outside what is published, 0.1 to 18 m2/year (the greatest: clay, medium plastic, ",
        ),
        ("C_alpha_ratio", 0.01, "C_alpha_ratio of 0.01 is outside what is published, 0.03 to 0.07"),
    ],
)
def test_what_lies_outside_is_flagged(parameter: str, value: float, words: str) -> None:
    (row,) = unusual_flagged([seen(parameter, value)])
    assert row.flag.startswith(words)
    assert row.flag.endswith("(recalled, not opened))") or "(opened))" in row.flag
    assert (row.parameter, row.value) == (parameter, value)


@pytest.mark.parametrize(
    ("parameter", "value"),
    [("M", 0.51), ("M", 1.46), ("lambda", 0.3), ("cv", 2.0), ("su", 500.0), ("kappa", 0.9), ("q_net", 1e5)],
)
def test_what_lies_within_or_cannot_be_compared_is_not(parameter: str, value: float) -> None:
    assert unusual_flagged([seen(parameter, value)]) == [seen(parameter, value)]


def test_kappa_is_compared_with_lambda_of_its_own_test() -> None:
    rows = [
        seen("lambda", 0.3),
        seen("kappa", 0.2),
        seen("lambda", 1.0, test="T2"),
        seen("kappa", 0.2, test="T2"),
    ]
    found = unusual_flagged(rows)
    assert found[1].flag.startswith("kappa/lambda of 0.667 is outside what is published, 0.02 to 0.385")
    assert [one.flag for one in (found[0], found[2], found[3])] == ["", "", ""]


def test_flag_is_added_to_what_is_there() -> None:
    (row,) = unusual_flagged([seen("M", 1.54, flag="from extension")])
    assert row.flag.startswith("from extension; M of 1.54")


def test_interpretation_flags_them() -> None:
    """A reversed sign of the pore pressure gives an M that no clay has."""
    sheet = TriaxialSheet(
        test="T1",
        place=Place(hole="B", depth=4.0),
        origin=Origin(file="triaxial.csv", row=2),
        kind="CIUC",
        axial_stress=60.0,
        radial_stress=60.0,
        initial_void_ratio=1.9,
        axial_strain=np.array([0.1]),  # the state at failure alone: M is q/p' itself
        deviator=np.array([40.0]),
        pore_pressure_change=np.array([-36.0]),
        volumetric_strain=np.array([np.nan]),
    )
    rows = interpreted_site(SiteSheets(triaxials=(sheet,))).observations
    (slope,) = (one for one in rows if one.parameter == "M")
    assert slope.value == pytest.approx(40.0 / (60.0 + 40.0 / 3.0 + 36.0), rel=1e-6)
    assert "M of 0.366 is outside what is published" in slope.flag
