"""Updating against closed-form numbers worked out apart from the package.

Six digits are given, so 1e-6 is the tolerance.
"""

import numpy as np
import pytest
from evidence_cases import Parameter, lognormal, rank, result, updated

from probsoil.parameters.conditioning import conditioned
from probsoil.parameters.laws import LognormalLaw
from probsoil.parameters.local_parts import LocalPart, LocalParts
from probsoil.parameters.marginals import marginal
from probsoil.parameters.observations import PointLaw
from probsoil.parameters.point_variability import Field, PlacesOfTests, PointVariability
from probsoil.parameters.tested import _point_law
from probsoil.parameters.updating import update
from probsoil.scenario.spatial_averaging import point_weight, variance_function

DIGITS = 1e-6


@pytest.mark.parametrize(
    ("length", "scale", "expected"),
    [
        (3, 1.5, 0.377289),
        (6, 2, 0.277915),
        (6, 2.5, 0.330575),
        (40, 40, 0.567668),
        (30, 40, 0.642782),
        (3, 2, 0.455508),
    ],
)
def test_variance_function_of_the_exponential_correlation(
    length: float, scale: float, expected: float
) -> None:
    assert float(variance_function(length / scale)) == pytest.approx(expected, abs=DIGITS)


def test_weight_of_a_point_in_the_average() -> None:
    found = point_weight([3.0, 0.0], scale=2.0, length=6.0)
    np.testing.assert_allclose(found, [0.316738, 0.166254], atol=DIGITS)


@pytest.mark.parametrize(
    ("count", "resolved", "sd"),
    [(1, 0.457038, 0.199928), (2, 0.582460, 0.175322), (4, 0.675090, 0.154657), (8, 0.733408, 0.140091)],
)
def test_share_of_variance_that_tests_resolve(count: int, resolved: float, sd: float) -> None:
    tests = [result(0.4 + 0.02 * i, i, bias=np.sqrt(np.expm1(0.06**2))) for i in range(count)]
    space = updated([Parameter("clay.lambda", lognormal(0.45, 0.25, 0.20))], tests)
    whole = space.marginals[0].law.log_sd
    assert whole**2 == pytest.approx(0.073617, abs=DIGITS)
    assert space.updated is not None
    left = float(space.updated.score_sd[0, 0])
    assert left * whole == pytest.approx(sd, abs=DIGITS)
    assert 1.0 - left**2 == pytest.approx(resolved, abs=DIGITS)


def test_tests_without_end_leave_bias_and_the_ground_s_own_variability() -> None:
    tests = [result(0.45, i, bias=np.sqrt(np.expm1(0.06**2))) for i in range(400)]
    space = updated([Parameter("clay.lambda", lognormal(0.45, 0.25, 0.20))], tests)
    assert space.updated is not None
    left = float(space.updated.score_sd[0, 0]) * space.marginals[0].law.log_sd
    # 0.120501 is the limit; 400 tests leave (0.2^2 + 0.1^2) / 400 of variance besides
    assert 0.120501 < left < np.sqrt(0.120501**2 + 0.05 / 400)


def _two(tests: list, known: float = 0.6, local: float = 0.5) -> np.ndarray:
    """Covariance of the logarithms of lambda and kappa after tests of both kinds."""
    ratio = float(variance_function(3.0))
    spreads = np.sqrt([0.25**2 + ratio * 0.2**2, 0.35**2 + ratio * 0.3**2])
    share = ratio * np.array([0.2, 0.3]) ** 2 / spreads**2
    part = [
        LocalPart(parameter=p, share=share[p], latent=np.array([2 + p]), mixing=np.ones((1, 1)))
        for p in range(2)
    ]
    between = np.array([[1.0, known], [known, 1.0]])
    split = LocalParts(
        parts=tuple(part),
        shared_weight=np.sqrt(1.0 - share),
        local_weight=np.diag(np.sqrt(share)),
        shared_correlation=between,
        local_correlation=np.array([[1.0, local], [local, 1.0]]),
    )
    field = Field(layer="clay", ratio=ratio, vertical_scale=2.0, horizontal_scale=None, length=6.0)
    laws = []
    for place, (median, spread) in enumerate(zip((0.45, 0.06), spreads, strict=True)):
        quantity = Parameter(f"clay.{place}", lognormal(median, float(spread)))
        laws.append(PointLaw(marginal=marginal(quantity), spread=2.0))
    variability = PointVariability(
        split=split,
        fields=(field, field),
        positions=((0.0, 0.0),),
        tests=PlacesOfTests(
            layer=tuple(one.layer for one in tests),
            depth=np.array([one.below_top for one in tests]),
            spot=tuple(one.hole for one in tests),
        ),
    )
    found = update(variability, laws, [], tests, ["clay.lambda", "clay.kappa"])
    matrix = found.factor[0] @ found.correlation @ found.factor[0].T
    return matrix * np.outer(spreads, spreads)


def _log_cov(sd: float) -> float:
    return float(np.sqrt(np.expm1(sd**2)))


@pytest.mark.parametrize(
    ("both", "sd", "correlation"),
    [
        (None, (0.271324, 0.384073), 0.583806),
        (False, (0.199928, 0.351813), 0.463130),
        (True, (0.199198, 0.302460), 0.489792),
    ],
)
def test_one_oedometer_informs_two_correlated_parameters(
    both: bool | None, sd: tuple[float, float], correlation: float
) -> None:
    tests = [] if both is None else [result(0.5, error=_log_cov(0.10), bias=_log_cov(0.06))]
    if both:
        kappa = {"parameter": "kappa", "addresses": ("clay.kappa",)}
        tests.append(result(0.07, error=_log_cov(0.22), bias=_log_cov(0.15), **kappa))
    matrix = _two(tests)
    np.testing.assert_allclose(np.sqrt(np.diag(matrix)), sd, atol=DIGITS)
    assert matrix[0, 1] / np.prod(np.sqrt(np.diag(matrix))) == pytest.approx(correlation, abs=DIGITS)


def test_laboratory_in_one_layer_calibrates_the_cone_for_the_other() -> None:
    strengths = [Parameter(f"{name}.su", lognormal(20.0, 0.20)) for name in ("upper", "lower")]
    tied = [("upper.su", "lower.su", rank(0.3))]

    def test(layer: str, kind: str, error: float, bias: float) -> object:
        return result(
            20.0,
            kind=kind,
            parameter="su",
            layer=layer,
            addresses=(f"{layer}.su",),
            error=_log_cov(error),
            bias=_log_cov(bias),
        )

    cone = [test("upper", "cone", 0.05, 0.25), test("lower", "cone", 0.05, 0.25)]
    laboratory = [test("upper", "triaxial", 0.06, 0.0)]
    for tests, expected in (
        (cone, (0.140055, 0.140055)),
        (laboratory, (0.057470, 0.191565)),
        (cone + laboratory, (0.055152, 0.081812)),
    ):
        space = updated(strengths, tests, tied)
        assert space.updated is not None
        np.testing.assert_allclose(space.updated.score_sd[0] * 0.20, expected, atol=DIGITS)


def test_update_of_the_average_over_a_section() -> None:
    """Two oedometers beside a section 40 m wide; the blocks of the covariance from the formulas."""
    ratio = float(variance_function(3.0) * variance_function(1.0))
    outside = 0.5 * (np.exp(-2.0 * 30.0 / 40.0) - np.exp(-2.0 * 70.0 / 40.0))  # 30 m from its nearer end
    weight = point_weight([1.5, 4.5], scale=2.0, length=6.0) * outside
    known = np.outer([0.25, 0.35], [0.25, 0.35]) * [[1.0, 0.6], [0.6, 1.0]]
    local = np.outer([0.2, 0.3], [0.2, 0.3]) * [[1.0, 0.5], [0.5, 1.0]]
    apart = np.exp(-2.0 * np.abs(np.subtract.outer([1.5, 4.5], [1.5, 4.5])) / 2.0)
    data = np.kron(np.ones((2, 2)), known) + np.kron(apart, local)
    data += np.kron(np.ones((2, 2)), np.diag([0.06, 0.15]) ** 2) + np.kron(
        np.eye(2), np.diag([0.10, 0.22]) ** 2
    )
    cross = np.hstack([known + one * local for one in weight])
    prior = known + ratio * local
    np.testing.assert_allclose(np.sqrt(np.diag(prior)), [0.262318, 0.369728], atol=DIGITS)
    residual = np.log(np.array([0.52, 0.055, 0.47, 0.070]) / [0.45, 0.06, 0.45, 0.06])
    found = conditioned(prior, cross, data, residual)
    sd = np.sqrt(np.diag(found.covariance))
    np.testing.assert_allclose([0.45, 0.06] * np.exp(found.mean), [0.479562, 0.062190], atol=DIGITS)
    np.testing.assert_allclose(sd, [0.156872, 0.248393], atol=DIGITS)
    assert found.covariance[0, 1] / sd.prod() == pytest.approx(0.440753, abs=DIGITS)
    resolved = prior - found.covariance
    np.testing.assert_allclose(resolved, [[0.044202, 0.040059], [0.040059, 0.075000]], atol=DIGITS)


@pytest.mark.parametrize(("in_series", "expected"), [(False, 1.094459), (True, 0.913693)])
def test_average_over_the_median_of_points(in_series: bool, expected: float) -> None:
    quantity = Parameter("clay.k", lognormal(1.0, 0.3, 0.5), in_series=in_series)
    law = marginal(quantity)
    point = _point_law(quantity, law)
    assert isinstance(law.law, LognormalLaw)
    assert float(np.exp(-point.centre * law.law.log_sd)) == pytest.approx(expected, abs=DIGITS)
