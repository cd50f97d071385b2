"""Shares of an additive linear quantity of independent inputs against Sobol' indices by SALib."""

import numpy as np
from SALib.analyze import sobol as analyze
from SALib.sample import sobol as sample

from probsoil.sensitivity import driver_sums, shares

WEIGHT = np.array([1.0, -2.0, 0.5, 0.0])


def test_shares_equal_sobol_indices_when_independent():
    problem = {"num_vars": 4, "names": list("abcd"), "bounds": [[0.0, 1.0]] * 4, "dists": ["norm"] * 4}
    points = sample.sample(problem, 1024, calc_second_order=False, seed=1)
    indices = analyze.analyze(problem, points @ WEIGHT, calc_second_order=False, num_resamples=100, seed=1)
    z = np.random.default_rng(1).standard_normal((2000, 4))
    found = shares(driver_sums(z, np.eye(4), z @ WEIGHT, z[:, 0] > 1.0), np.eye(4))
    for key in ("S1", "ST"):
        error = np.asarray(indices[f"{key}_conf"]) / 1.96
        # 4 standard errors as SALib's bootstrap gives them; the floor is for the inert input, which has none
        assert (np.abs(found.share - indices[key]) < 4.0 * error + 1e-6).all()
        assert error.max() < 0.05
