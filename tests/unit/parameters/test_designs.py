"""Designs: the same points in any order, and what each design promises."""

import numpy as np
import pytest
from scipy.special import ndtr
from scipy.stats import qmc

from probsoil.errors import ParameterError
from probsoil.parameters import LatinHypercube, MonteCarlo, ScrambledSobol, design

NAMES = ["monte carlo", "latin hypercube", "sobol"]


def drawn(plan, order=None):
    chunks = range(plan.n_chunks) if order is None else order
    return {i: plan.chunk(i) for i in chunks}


@pytest.mark.parametrize("name", NAMES)
def test_any_order_of_drawing_gives_the_same_points(name):
    plan = design(name, seed=7, n=40_000, dimension=3)
    forward = drawn(plan)
    again = drawn(design(name, seed=7, n=40_000, dimension=3), reversed(range(plan.n_chunks)))
    assert all(np.array_equal(forward[i], again[i]) for i in forward)
    assert not np.array_equal(forward[0], design(name, seed=8, n=40_000, dimension=3).chunk(0))


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("n", [1, 17, 1024, 20_000])
def test_sizes_replicates_and_bounds(name, n):
    plan = design(name, seed=1, n=n, dimension=2)
    points = np.concatenate(list(drawn(plan).values()))
    replicate = np.concatenate([plan.replicate_index(i) for i in range(plan.n_chunks)])
    assert plan.name == name
    assert points.shape == (plan.n, 2)
    assert replicate.shape == (plan.n,)
    assert plan.n >= n
    assert plan.n == n if name == "monte carlo" else plan.n < 2 * n + 16
    assert np.isfinite(points).all()
    assert all(len(plan.chunk(i)) <= plan.chunk_size == 1024 for i in range(plan.n_chunks))
    assert all(len(set(plan.replicate_index(i).tolist())) == 1 for i in range(plan.n_chunks))
    np.testing.assert_array_equal(np.bincount(replicate), np.full(plan.replicates, plan.n // plan.replicates))


def test_more_monte_carlo_points_begin_with_the_fewer():
    few, many = MonteCarlo(5, 1500, 4), MonteCarlo(5, 3000, 4)
    assert np.array_equal(few.chunk(1), many.chunk(1)[:476])


def test_each_latin_replicate_fills_every_cell_once():
    plan = LatinHypercube(3, 16 * 1500, 4)
    for replicate in (0, 15):
        chunks = [i for i in range(plan.n_chunks) if plan.replicate_index(i)[0] == replicate]
        points = np.concatenate([plan.chunk(i) for i in chunks])
        cells = np.sort(np.floor(ndtr(points) * 1500 + 1e-9).astype(int), axis=0)
        np.testing.assert_array_equal(cells, np.tile(np.arange(1500)[:, None], 4))
        within = ndtr(points) * 1500 % 1.0
        assert abs(within.mean() - 0.5) < 4.0 / np.sqrt(
            12.0 * within.size
        )  # random, not centred or at an edge
        assert within.std() == pytest.approx(np.sqrt(1.0 / 12.0), rel=0.05)


def test_latin_replicates_differ():
    plan = LatinHypercube(3, 160, 2)
    assert not np.array_equal(plan.chunk(0), plan.chunk(1))


def test_each_sobol_replicate_is_balanced_in_every_direction():
    plan = ScrambledSobol(3, 16 * 2000, 5)
    assert plan.n == 16 * 2048
    points = np.concatenate([plan.chunk(0), plan.chunk(1)])
    cells = np.sort(np.floor(ndtr(points) * 2048).astype(int), axis=0)
    np.testing.assert_array_equal(cells, np.tile(np.arange(2048)[:, None], 5))


def test_sobol_columns_are_in_a_random_order_per_replicate():
    """A fixed order can be worse than plain Monte Carlo; the scramble alone does not change it."""
    plan = ScrambledSobol(3, 16, 40)
    orders = set()
    for replicate in range(16):
        key = np.random.SeedSequence(3, spawn_key=(1, replicate))
        orders.add(tuple(np.random.default_rng(key).permutation(40)))
        key = np.random.SeedSequence(3, spawn_key=(0, replicate))
        plain = qmc.Sobol(40, bits=30, rng=np.random.default_rng(key)).random(1)
        np.testing.assert_allclose(np.sort(ndtr(plan.chunk(replicate)[0])), np.sort(plain[0]), atol=1e-9)
        assert not np.allclose(ndtr(plan.chunk(replicate)), plain)
    assert len(orders) == 16


@pytest.mark.parametrize("name", NAMES)
def test_points_are_standard_normal_and_independent(name):
    plan = design(name, seed=11, n=16_384, dimension=3)
    u = np.concatenate(list(drawn(plan).values()))
    bound = 4.0 / np.sqrt(plan.n)  # 4 standard errors of plain Monte Carlo, for 9 moments: 1 in 1,700
    assert np.abs(u.mean(axis=0)).max() < bound
    assert np.abs((u**2).mean(axis=0) - 1.0).max() < np.sqrt(2.0) * bound
    assert np.abs(np.corrcoef(u.T)[np.triu_indices(3, 1)]).max() < bound


@pytest.mark.parametrize("name", NAMES)
def test_no_dimension_is_allowed(name):
    assert design(name, seed=1, n=20, dimension=0).chunk(0).shape[1] == 0


def test_faults_are_named():
    with pytest.raises(ParameterError, match=r"draws must be one of 'monte carlo', .* got 'halton'"):
        design("halton", seed=1, n=10, dimension=2)
    with pytest.raises(ParameterError, match="realisations must be at least 1; got 0"):
        design("sobol", seed=1, n=0, dimension=2)
    with pytest.raises(ParameterError, match="parameters must be 0 or more; got -1"):
        design("latin hypercube", seed=1, n=10, dimension=-1)
    for name in NAMES:
        plan = design(name, seed=1, n=10, dimension=2)
        with pytest.raises(ParameterError, match=r"chunk must lie between 0 and \d+; got 99"):
            plan.chunk(99)
        with pytest.raises(ParameterError, match=r"chunk must lie between 0 and \d+; got -1"):
            plan.replicate_index(-1)
