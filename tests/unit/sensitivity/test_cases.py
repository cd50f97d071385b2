"""Profile of the exceeding cases and elasticities of groups, against closed forms of a linear limit."""

import numpy as np
import pytest
from scipy.special import ndtr, ndtri

from probsoil.errors import ParameterError, ShapeError
from probsoil.sensitivity import (
    case_sums,
    driver_sums,
    elasticities,
    exceeding_profile,
    group_elasticities,
    merged_cases,
)

CORRELATION = np.array(
    [[1.0, 0.6, 0.0, 0.3], [0.6, 1.0, 0.0, 0.0], [0.0, 0.0, 1.0, -0.4], [0.3, 0.0, -0.4, 1.0]]
)
INVERSE = np.linalg.inv(CORRELATION)
WEIGHT = np.array([1.0, 0.5, -0.8, 0.0])
NAMES = ["a", "b", "c", "bystander"]
GROUPS = {"top": [0, 1], "base": [2, 3], "testable": [0, 2]}
SCALE = np.sqrt(WEIGHT @ CORRELATION @ WEIGHT)
SURE = 1.0 - 2.0 * ndtr(-4.0)


def sampled(n, probability, seed=1):
    z = np.random.default_rng(seed).standard_normal((n, 4)) @ np.linalg.cholesky(CORRELATION).T
    return z, z @ WEIGHT > -ndtri(probability) * SCALE


def hazard(probability):
    beta = -ndtri(probability)
    return np.exp(-0.5 * beta**2) / np.sqrt(2.0 * np.pi) / probability, beta


@pytest.mark.parametrize("probability", [0.01, 0.9])
def test_profile_of_a_linear_limit(probability):
    """E[z | exceeded] = R b / s times the hazard: the bystander moves as well, and that is said."""
    z, flag = sampled(100_000, probability)
    found = exceeding_profile(case_sums(z, INVERSE, flag), NAMES, confidence=SURE)
    mean = CORRELATION @ WEIGHT / SCALE * hazard(probability)[0]
    for row, value in zip(found.rows, mean, strict=True):
        assert row.interval[0] <= ndtr(value) <= row.interval[1]
        assert row.spread == pytest.approx(z[flag][:, NAMES.index(row.parameter)].std(ddof=1), rel=1e-9)
    assert found.rows[3].interval[0] > 0.5
    assert "correlation included" in found.label
    assert found.note is None
    frame = found.to_frame()
    assert frame["parameter"].tolist() == NAMES
    assert frame["level"].tolist() == [row.level for row in found.rows]


def test_group_elasticity_is_the_sum_with_the_error_of_the_sum():
    z, flag = sampled(200_000, 0.02)
    found = group_elasticities(case_sums(z, INVERSE, flag, GROUPS))
    spread, _ = elasticities(driver_sums(z, INVERSE, z[:, 0], flag))
    for i, members in enumerate(GROUPS.values()):
        assert found.value[i] == pytest.approx(spread.value[members].sum(), rel=1e-9)
    h, beta = hazard(0.02)
    exact = h * beta * WEIGHT * (CORRELATION @ WEIGHT) / SCALE**2
    for i, members in enumerate(GROUPS.values()):
        assert abs(found.value[i] - exact[members].sum()) < 4.0 * found.error[i]
    # members of one group are correlated, so the error of the sum is not that of independent ones
    assert found.error[0] != pytest.approx(np.hypot(*spread.error[[0, 1]]), rel=0.01)


def test_group_elasticity_against_central_differences_of_a_million():
    z = np.random.default_rng(3).standard_normal((1_000_000, 4)) @ np.linalg.cholesky(CORRELATION).T

    def curved(z):
        return np.exp(0.4 * z[:, 0] + 0.2 * z[:, 1]) * (2.0 + 0.3 * z[:, 2]) + 0.1 * z[:, 1] ** 2 > 5.0

    flag = curved(z)
    found = group_elasticities(case_sums(z, INVERSE, flag, GROUPS))
    for i, members in enumerate(GROUPS.values()):
        share = []
        for step in (0.05, -0.05):
            moved = z.copy()
            moved[:, members] *= 1.0 + step
            share.append(curved(moved).mean())
        difference = (share[0] - share[1]) / 0.1 / flag.mean()
        noise = np.sqrt((share[0] + share[1]) * 0.1 / len(z)) / 0.1 / flag.mean()
        # third derivative: a cubic in the step of 0.05, 3 % is generous
        assert abs(found.value[i] - difference) < 4.0 * np.hypot(found.error[i], noise) + 0.03 * abs(
            difference
        )


def test_chunks_add_up():
    z, flag = sampled(3000, 0.1)
    parts = [case_sums(z[i : i + 1000], INVERSE, flag[i : i + 1000], GROUPS) for i in (0, 1000, 2000)]
    found = merged_cases(merged_cases(parts[0], parts[1]), parts[2])
    whole = case_sums(z, INVERSE, flag, GROUPS)
    for name in ("count", "latent", "latent_square", "group_score", "group_square"):
        np.testing.assert_allclose(getattr(found, name), getattr(whole, name), rtol=1e-9)


def test_few_or_no_cases_have_no_limits():
    z = np.random.default_rng(1).standard_normal((200, 4))
    found = exceeding_profile(case_sums(z, INVERSE, np.arange(200) < 4), NAMES)
    assert "only 4" in found.note
    assert found.rows[0].interval == (0.0, 1.0)
    none = exceeding_profile(case_sums(z, INVERSE, np.zeros(200, dtype=bool)), NAMES)
    assert np.isnan(none.rows[0].level)
    assert np.isnan(none.rows[0].spread)


def test_wrong_arguments():
    z, flag = sampled(10, 0.5)
    with pytest.raises(ShapeError, match="do not match"):
        case_sums(z, INVERSE, flag[:3])
    with pytest.raises(ParameterError, match="latent normals must lie"):
        case_sums(z, INVERSE, flag, {"x": [4]})
    with pytest.raises(ShapeError, match="names do not match"):
        exceeding_profile(case_sums(z, INVERSE, flag), ["a"])
