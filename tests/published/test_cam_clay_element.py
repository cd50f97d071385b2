"""One element of Modified Cam clay against the closed forms of critical state soil mechanics.

Sources: K. H. Roscoe and J. B. Burland, On the generalised stress-strain behaviour of "wet" clay, Engineering
Plasticity, 1968; A. Schofield and P. Wroth, Critical State Soil Mechanics, 1968 (parameters of the named
clays); C. P. Wroth, The interpretation of in situ soil tests, Geotechnique 34(4), 1984; D. M. Wood, Soil
Behaviour and Critical State Soil Mechanics, 1990 (stress ratio at rest). All from memory, none opened. The
closed forms follow from the ellipse and are written out below; the numbers in tables were worked out from
them apart from the package, with five printed digits.
"""

import numpy as np
import pytest

from probsoil.ground.cam_clay import CamClay, consolidated_state, isotropic_state
from probsoil.ground.element_paths import (
    earth_pressure_at_rest,
    oedometer_path,
    state_at_rest,
    triaxial_path,
)
from probsoil.ground.undrained_strength import m_from_friction_angle

CLAYS = {"London": (0.161, 0.062, 0.888), "Weald": (0.093, 0.035, 0.95), "kaolin": (0.26, 0.05, 1.02)}
STRENGTH = {"London": 0.28992, "Weald": 0.30829, "kaolin": 0.29136}  # su/p'0, isotropic, R = 1
ANGLES = (20.0, 23.0, 25.0, 30.0)
AT_REST = (0.80825, 0.75877, 0.72533, 0.64287)  # K0 of the model, Lambda = 0.8, nu = 0.25
WROTH = (0.21493, 0.24199, 0.25917, 0.29909)  # su/s'v0 with K0 = 1 - sin phi', Lambda = 0.8
FAR = [0.5]  # strain at which nothing changes any more, undrained


def clay_of(lam: float, kap: float, m: float, **more: float) -> CamClay:
    return CamClay(lam=[lam], kap=[kap], m=[m], **more)


@pytest.mark.parametrize("clay", CLAYS)
@pytest.mark.parametrize("over", [1.0, 1.5, 2.0, 4.0, 12.0, 40.0])
def test_undrained_strength_at_any_overconsolidation(clay: str, over: float) -> None:
    """su/p'0 = (M/2) (R/2)^Lambda, wet and dry of critical alike."""
    lam, kap, m = CLAYS[clay]
    element = clay_of(lam, kap, m)
    path = triaxial_path(element, isotropic_state(element, 80.0, over, 1.2), FAR, drained=False)
    expected = 0.5 * m * (0.5 * over) ** (1.0 - kap / lam)
    assert path.deviator[0, 0] / 2.0 / 80.0 == pytest.approx(expected, rel=1e-6)
    if over == 1.0:
        assert path.deviator[0, 0] / 2.0 / 80.0 == pytest.approx(STRENGTH[clay], abs=6e-6)


@pytest.mark.parametrize(("over", "printed"), [(1.0, 0.51691), (2.0, 0.9000)])
def test_deviator_at_failure_as_worked_out(over: float, printed: float) -> None:
    element = clay_of(0.25, 0.05, 0.9)
    path = triaxial_path(element, isotropic_state(element, 100.0, over, 1.2), FAR, drained=False)
    assert path.deviator[0, 0] / 100.0 == pytest.approx(printed, abs=6e-6)


@pytest.mark.parametrize("sign", [1.0, -1.0])
@pytest.mark.parametrize("over", [1.0, 1.3, 5.0])
def test_undrained_path_in_the_stress_plane(over: float, sign: float) -> None:
    """After yielding p' ((M^2 + eta^2)/M^2)^Lambda stays, before it p' does."""
    lam, kap, m = CLAYS["kaolin"]
    element = clay_of(lam, kap, m, m_extension=[0.8])
    slope = m if sign > 0.0 else 0.8
    strain = sign * np.array([1e-4, 5e-4, 0.002, 0.01, 0.03, 0.08, 0.2, 0.5])
    path = triaxial_path(element, isotropic_state(element, 100.0, over, 1.2), strain, drained=False)
    ratio, at_yield = path.deviator[0] / path.mean_stress[0], slope * np.sqrt(over - 1.0)
    yielded = path.yield_size[0] != 100.0 * over
    share = (slope**2 + at_yield**2) / (slope**2 + ratio**2)
    expected = np.where(yielded, 100.0 * share ** (1.0 - kap / lam), 100.0)
    np.testing.assert_allclose(path.mean_stress[0], expected, rtol=1e-12)
    assert abs(ratio[-1]) == pytest.approx(slope, rel=1e-3)
    assert (ratio * sign > 0.0).all()


@pytest.mark.parametrize("over", [1.0, 1.8, 6.0])
def test_drained_failure_and_volume_change(over: float) -> None:
    """p'f = 3 p'0/(3 - M), q = M p'f; v = Gamma - lambda ln p' with Gamma = N - (lambda - kappa) ln 2."""
    lam, kap, m = 0.25, 0.05, 0.9
    element = clay_of(lam, kap, m)
    state = isotropic_state(element, 100.0, over, 1.2)
    path = triaxial_path(element, state, [0.999999], drained=True)
    assert path.mean_stress[0, 0] == pytest.approx(142.857, abs=5e-4)
    assert path.deviator[0, 0] == pytest.approx(128.571, abs=5e-4)
    critical = 2.2 + kap * np.log(100.0) + (lam - kap) * np.log(100.0 * over / 2.0)
    assert 1.0 + path.void_ratio[0, 0] == pytest.approx(critical - lam * np.log(300.0 / 2.1), abs=1e-5)
    if over == 1.0:
        assert path.void_ratio[0, 0] - 1.2 == pytest.approx(-0.22780, abs=6e-6)


@pytest.mark.parametrize("over", [1.0, 1.8, 6.0])
def test_drained_extension_at_failure(over: float) -> None:
    """p'f = 3 p'0/(3 + M), q = -M p'f, with M of extension."""
    element = clay_of(0.25, 0.05, 0.9, m_extension=[0.7])
    path = triaxial_path(element, isotropic_state(element, 100.0, over, 1.2), [-20.0], drained=True)
    assert path.mean_stress[0, 0] == pytest.approx(300.0 / 3.7, rel=1e-6)
    assert path.deviator[0, 0] == pytest.approx(-210.0 / 3.7, rel=1e-6)


def test_slope_in_extension_is_that_of_the_same_friction_angle() -> None:
    for angle in ANGLES:
        sine = np.sin(np.radians(angle))
        element = clay_of(0.25, 0.05, float(m_from_friction_angle(angle)))
        assert np.asarray(element.m_extension)[0] == pytest.approx(6.0 * sine / (3.0 + sine), rel=1e-12)


@pytest.mark.parametrize(("angle", "printed"), list(zip(ANGLES, AT_REST, strict=True)))
def test_stress_ratio_at_rest_is_that_of_the_model(angle: float, printed: float) -> None:
    element = clay_of(0.25, 0.05, float(m_from_friction_angle(angle)), poisson=0.25)
    at_rest = float(earth_pressure_at_rest(element)[0])
    assert at_rest == pytest.approx(printed, abs=6e-6)
    # a specimen far from rest is led there by virgin compression
    path = oedometer_path(element, isotropic_state(element, 10.0, 1.0, 2.5), [20.0, 5000.0])
    assert path.radial_stress[0, 1] / path.axial_stress[0, 1] == pytest.approx(at_rest, rel=1e-6)


@pytest.mark.parametrize(("angle", "printed"), list(zip(ANGLES, WROTH, strict=True)))
def test_strength_after_consolidation_at_rest(angle: float, printed: float) -> None:
    element = clay_of(0.25, 0.05, float(m_from_friction_angle(angle)))
    radial = 70.0 * (1.0 - np.sin(np.radians(angle)))
    state = consolidated_state(element, (70.0, radial), 70.0, 1.2)
    path = triaxial_path(element, state, FAR, drained=False)
    assert path.deviator[0, 0] / 2.0 / 70.0 == pytest.approx(printed, abs=6e-6)


def test_oedometer_slopes() -> None:
    """Lambda on the virgin line, where the stress ratio stays; kappa of ln p' in swelling."""
    lam, kap = 0.25, 0.05
    element = clay_of(lam, kap, 0.9)
    path = oedometer_path(
        element, state_at_rest(element, 10.0, 60.0, 1.6), [120.0, 240.0, 480.0, 240.0, 150.0]
    )
    void_ratio, mean = path.void_ratio[0], path.mean_stress[0]
    np.testing.assert_allclose(-np.diff(void_ratio[:3]), lam * np.log(2.0), rtol=1e-6)
    swelling = -np.diff(void_ratio[2:]) / np.diff(np.log(mean[2:]))
    np.testing.assert_allclose(swelling, kap, rtol=1e-9)
    # of ln s'a the slope is smaller, as K0 rises: Cs is then less than kappa ln 10
    assert (void_ratio[4] - void_ratio[2]) / np.log(480.0 / 150.0) < kap
