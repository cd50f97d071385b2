"""Shapley effects of linear functions of correlated normals in closed form.

A. B. Owen and C. Prieur, 2017, and B. Iooss and C. Prieur, 2019 (recalled, not opened): two inputs,
Sh1 = [b1^2 s1^2 (1 - r^2/2) + r b1 b2 s1 s2 + b2^2 s2^2 r^2/2] / Var; three inputs, two of them correlated.
The numbers come from the closed form, to the digits given.
"""

import numpy as np
import pytest

from probsoil.sensitivity import linear_shapley

THREE = {  # correlation of inputs 2 and 3: (shares, variance) for standard deviations 1, 1, 2
    0.0: ((0.16667, 0.16667, 0.66667), 6.0),
    0.5: ((0.125, 0.29688, 0.57812), 8.0),
    0.9: ((0.10417, 0.41823, 0.47760), 9.6),
    -0.5: ((0.25, 0.09375, 0.65625), 4.0),
}


def shares_of(scaled, correlation):
    effects, _ = linear_shapley(np.asarray(scaled, dtype=float)[:, np.newaxis], correlation)
    return effects[:, 0] / effects.sum(), effects.sum()


def test_two_inputs_as_printed():
    share, _ = shares_of([1.0, 2.0], np.array([[1.0, 0.5], [0.5, 1.0]]))
    np.testing.assert_allclose(share, [0.33929, 0.66071], atol=5e-6)


@pytest.mark.parametrize("r", [-0.9, -0.3, 0.0, 0.4, 0.99])
@pytest.mark.parametrize("scaled", [(1.0, 2.0), (3.0, -1.0), (1.0, 0.0)])
def test_two_inputs_by_the_formula(scaled, r):
    first, second = scaled  # b1 s1 and b2 s2
    variance = first**2 + second**2 + 2.0 * r * first * second
    expected = (first**2 * (1.0 - r**2 / 2.0) + r * first * second + second**2 * r**2 / 2.0) / variance
    share, total = shares_of(scaled, np.array([[1.0, r], [r, 1.0]]))
    assert share[0] == pytest.approx(expected, rel=1e-12)
    assert total == pytest.approx(variance, rel=1e-12)


@pytest.mark.parametrize("r", THREE)
def test_three_inputs(r):
    correlation = np.eye(3)
    correlation[1, 2] = correlation[2, 1] = r
    share, total = shares_of([1.0, 1.0, 2.0], correlation)
    np.testing.assert_allclose(share, THREE[r][0], atol=5.1e-6)  # half of the last digit given
    assert total == pytest.approx(THREE[r][1], rel=1e-12)
