"""Undrained strength of Modified Cam clay, derived again by following the stress path.

Sources: K. H. Roscoe and J. B. Burland, On the generalized stress-strain behaviour of "wet" clay,
Engineering Plasticity, 1968 (the ellipse); C. P. Wroth, The interpretation of in situ soil tests,
Geotechnique 34(4), 1984 (the ratio after consolidation at rest); J. Jaky, 1944 (earth pressure at
rest); D. M. Wood, Soil Behaviour and Critical State Soil Mechanics, 1990. All from memory, none
opened: the closed forms are therefore not taken on trust but compared with an integration of
the model that does not use them.

The path. Undrained means no change of volume: kappa dp'/p' + (lambda - kappa) dpc/pc = 0. While
the clay yields, the state stays on q^2 = M^2 p' (pc - p'). The two rates follow numerically from
these statements as the stress ratio q/p' goes to M, where the strength is q/2.
"""

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from probsoil.ground.undrained_strength import (
    isotropic_strength_ratio,
    m_from_friction_angle,
    normally_consolidated_strength_ratio,
    plastic_volumetric_ratio,
    sine_of_friction_angle,
    undrained_shear_strength,
)

CLAYS = {"London": (0.161, 0.062, 0.888), "Weald": (0.093, 0.035, 0.95), "kaolin": (0.26, 0.05, 1.02)}
ANGLES = (20.0, 23.0, 25.0, 30.0, 35.0)
WROTH = (0.21493, 0.24199, 0.25917, 0.29909, 0.33466)  # su/s'v0 for Lambda = 0.8, worked out from the formula


def failure_deviator(mean, deviator, hardening, *, m, lam, kap):
    """Deviator stress at the critical state, from a state on the yield curve, by the undrained path."""

    def rates(eta, state):
        p, pc = state
        q = eta * p
        # rows: no change of volume; stay on the ellipse with dq = eta dp + p d(eta)
        matrix = np.array(
            [
                [kap / p, (lam - kap) / pc],
                [2.0 * q * eta - m * m * (pc - 2.0 * p), -m * m * p],
            ]
        )
        return np.linalg.solve(matrix, [0.0, -2.0 * q * p])

    path = solve_ivp(rates, (deviator / mean, m), (mean, hardening), method="DOP853", rtol=1e-11, atol=1e-12)
    assert path.success
    p, pc = path.y[:, -1]
    assert p == pytest.approx(pc / 2.0, rel=1e-7)  # the critical state is the top of the ellipse
    return m * p


@pytest.mark.parametrize("clay", CLAYS)
@pytest.mark.parametrize("overconsolidation", [1.0, 1.3, 1.8, 3.0, 8.0])
def test_isotropic_strength_follows_the_path(clay, overconsolidation):
    lam, kap, m = CLAYS[clay]
    p0, pc = 100.0, 100.0 * overconsolidation
    at_yield = m * np.sqrt(p0 * (pc - p0))  # elastic: p' does not change until the ellipse is met
    strength = failure_deviator(p0, at_yield, pc, m=m, lam=lam, kap=kap) / 2.0
    formula = isotropic_strength_ratio(m, plastic_volumetric_ratio(lam, kap), overconsolidation)
    assert float(formula) == pytest.approx(strength / p0, rel=1e-8)


@pytest.mark.parametrize("angle", ANGLES)
@pytest.mark.parametrize(("lam", "kap"), [(0.3, 0.06), (0.161, 0.062), (0.25, 0.01)])
def test_strength_after_consolidation_at_rest_follows_the_path(angle, lam, kap):
    m = float(m_from_friction_angle(angle))
    at_rest = 1.0 - np.sin(np.radians(angle))
    mean, deviator = (1.0 + 2.0 * at_rest) / 3.0, 1.0 - at_rest
    pc = mean + deviator**2 / (m * m * mean)  # the ellipse through the state
    strength = failure_deviator(mean, deviator, pc, m=m, lam=lam, kap=kap) / 2.0
    formula = normally_consolidated_strength_ratio(m, plastic_volumetric_ratio(lam, kap))
    assert float(formula) == pytest.approx(strength, rel=1e-8)


def test_wroths_ratio_for_common_friction_angles():
    ratio = normally_consolidated_strength_ratio(m_from_friction_angle(ANGLES), 0.8)
    assert ratio == pytest.approx(WROTH, abs=5.1e-6)


def test_isotropic_values():
    assert 2.0 * float(isotropic_strength_ratio(0.9, 0.8)) == pytest.approx(0.51691, abs=5.1e-6)
    assert float(isotropic_strength_ratio(0.9, 0.8, 2.0)) == pytest.approx(0.45, abs=1e-12)


@pytest.mark.parametrize("clay", CLAYS)
def test_strength_grows_with_the_power_of_overconsolidation(clay):
    lam, kap, m = CLAYS[clay]
    exponent = plastic_volumetric_ratio(lam, kap)
    once = isotropic_strength_ratio(m, exponent)
    swollen = undrained_shear_strength(40.0, 120.0, once, exponent)
    assert float(swollen) == pytest.approx(
        40.0 * float(isotropic_strength_ratio(m, exponent, 3.0)), rel=1e-12
    )


def test_friction_angle_and_slope_are_two_names_of_one_thing():
    # compression: s1' = s3' (1 + sin)/(1 - sin), q = s1' - s3', p' = (s1' + 2 s3')/3
    sine = np.sin(np.radians(np.array(ANGLES)))
    major = (1.0 + sine) / (1.0 - sine)
    by_mohr = (major - 1.0) / ((major + 2.0) / 3.0)
    assert m_from_friction_angle(ANGLES) == pytest.approx(by_mohr, rel=1e-12)
    assert sine_of_friction_angle(by_mohr) == pytest.approx(sine, rel=1e-12)
    # London clay: M = 0.888 goes with 22.75 degrees (Schofield and Wroth 1968, from memory)
    assert float(m_from_friction_angle(22.75)) == pytest.approx(0.888, abs=5e-4)
