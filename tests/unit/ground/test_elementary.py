"""Logarithm and exponential of the kernels against the library's, over their whole range."""

import numpy as np
import pytest
from numba import njit

from probsoil.ground._elementary import exponential, natural_log

ULPS = 4.0  # "a few units in the last place"


@njit
def logarithms(x, out):
    for i in range(x.size):
        out[i] = natural_log(x[i])


@njit
def exponentials(x, out):
    for i in range(x.size):
        out[i] = exponential(x[i])


def evaluated(loop, x):
    out = np.empty_like(x)
    loop(x, out)
    return out


def ulps_apart(computed, exact):
    return np.abs(computed - exact) / np.spacing(np.abs(exact))


def test_logarithm_over_all_magnitudes():
    rng = np.random.default_rng(np.random.SeedSequence(1, spawn_key=(1,)))
    x = np.concatenate([10.0 ** rng.uniform(-307, 308, 200_000), 10.0 ** rng.uniform(-4, 6, 200_000)])
    assert ulps_apart(evaluated(logarithms, x), np.log(x)).max() <= ULPS


def test_logarithm_near_one_and_near_the_change_of_exponent():
    steps = np.linspace(-1e-3, 1e-3, 40_001)
    # the library's own log near 1 is the reference, so compare with what log1p says of the same number
    near_one = 1.0 + steps[steps != 0.0]
    assert ulps_apart(evaluated(logarithms, near_one), np.log1p(near_one - 1.0)).max() <= ULPS
    for edge in (np.sqrt(0.5), np.sqrt(2.0), 0.5, 2.0, 1024.0):
        x = edge * (1.0 + steps * 1e-10)
        assert ulps_apart(evaluated(logarithms, x), np.log(x)).max() <= ULPS


def test_logarithm_of_one_is_nothing():
    assert natural_log(1.0) == 0.0


def test_exponential_over_its_whole_range():
    rng = np.random.default_rng(np.random.SeedSequence(1, spawn_key=(2,)))
    x = np.concatenate(
        [rng.uniform(-700, 700, 200_000), rng.uniform(-30, 30, 200_000), rng.uniform(-1, 1, 50_000)]
    )
    assert ulps_apart(evaluated(exponentials, x), np.exp(x)).max() <= ULPS


def test_exponential_at_the_ends_and_in_the_middle():
    x = np.array([-700.0, -0.5 * np.log(2.0), -1e-300, 0.0, 1e-300, 0.5 * np.log(2.0), 700.0])
    assert ulps_apart(evaluated(exponentials, x), np.exp(x)).max() <= ULPS
    assert exponential(0.0) == 1.0


def test_one_undoes_the_other():
    x = np.linspace(-20.0, 20.0, 10_001)
    assert evaluated(logarithms, evaluated(exponentials, x)) == pytest.approx(x, abs=2e-15 * 20.0)
