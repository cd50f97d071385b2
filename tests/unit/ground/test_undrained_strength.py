"""Undrained strength: what it must follow and what it refuses (the model itself: tests/published)."""

import numpy as np
import pytest

from probsoil.errors import ParameterError
from probsoil.ground.undrained_strength import (
    isotropic_strength_ratio,
    m_from_friction_angle,
    normally_consolidated_strength_ratio,
    plastic_volumetric_ratio,
    sine_of_friction_angle,
    undrained_shear_strength,
)


def test_normally_consolidated_strength_is_a_share_of_the_stress():
    assert undrained_shear_strength([20.0, 80.0], [20.0, 80.0], 0.25, 0.8) == pytest.approx(
        [5.0, 20.0], rel=1e-12
    )


def test_swelling_keeps_part_of_the_strength():
    """From 80 to 20 kPa: 20 x 0.25 x 4^0.8."""
    assert float(undrained_shear_strength(20.0, 80.0, 0.25, 0.8)) == pytest.approx(5.0 * 4.0**0.8, rel=1e-12)


def test_arrays_are_taken_element_by_element():
    m, ratio = np.array([0.8, 1.0, 1.2]), np.array([0.7, 0.8, 0.9])
    one_by_one = [float(normally_consolidated_strength_ratio(a, b)) for a, b in zip(m, ratio, strict=True)]
    assert normally_consolidated_strength_ratio(m, ratio).tolist() == one_by_one


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: sine_of_friction_angle(0.0), "^m must be finite and above 0"),
        (lambda: m_from_friction_angle(-1.0), "^angle must be finite and at least 0"),
        (lambda: plastic_volumetric_ratio(0.0, 0.1), "^lam must be finite and above 0"),
        (lambda: plastic_volumetric_ratio(0.2, -0.1), "^kap must be finite and at least 0"),
        (lambda: isotropic_strength_ratio(1.0, 0.8, 0.5), "^overconsolidation must be finite and at least 1"),
        (lambda: isotropic_strength_ratio(1.0, np.nan), "^ratio must be finite"),
        (lambda: normally_consolidated_strength_ratio(np.inf, 0.8), "^m must be finite and above 0"),
        (lambda: undrained_shear_strength(0.0, 10.0, 0.2, 0.8), "^stress must be finite and above 0"),
        (lambda: undrained_shear_strength(10.0, 9.0, 0.2, 0.8), "yield_stress must not be below stress"),
        (lambda: undrained_shear_strength(10.0, 10.0, np.nan, 0.8), "^strength_ratio must be finite"),
    ],
)
def test_impossible_arguments_are_refused(call, message):
    with pytest.raises(ParameterError, match=message):
        call()
