"""Updating against answers by other means: dense fields, importance sampling, quadrature, Student's t."""

import math

import numpy as np
import pytest
from evidence_cases import Parameter, cov, lognormal, ranged, rank, result, updated
from scipy import stats

from probsoil.ground.undrained_strength import (
    normally_consolidated_strength_ratio,
    plastic_volumetric_ratio,
    undrained_shear_strength,
)
from probsoil.parameters import ParameterSpace
from probsoil.parameters.observations import Observation
from probsoil.scenario.distributions import Lognormal, Normal, Uniform
from probsoil.scenario.spatial_averaging import point_weight, variance_function


def _scores(space: ParameterSpace) -> tuple[np.ndarray, np.ndarray]:
    """Mean and covariance of what is drawn at every station, the first parameter of all stations first."""
    assert space.updated is not None
    d = space.dimension
    stations = 1 if space.local is None else len(space.local.parts[0].latent)
    point = np.eye(d)
    matrix, mean = [], []
    for parameter in range(len(space.names)):
        for station in range(stations):
            at = space.updated.scores(np.vstack([np.zeros(d), point]), space.local, station)[:, parameter]
            mean.append(at[0])
            matrix.append(at[1:] - at[0])
    weights = np.array(matrix)
    return np.array(mean), weights @ space.correlation @ weights.T


CELLS = 120


def test_two_stations_and_two_holes_against_a_field_of_cells() -> None:  # noqa: PLR0915 - one case
    """The same Gaussian put together from 120 cells at every place and conditioned as a whole.

    The mean over cells misses the average over the layer by (h / delta)^2 / 3 of the variance or so, 2e-4.
    """
    stations, holes = [(0.0, 0.0), (25.0, 0.0)], [(10.0, 5.0), (60.0, 0.0)]
    known, inherent, tied = (0.15, 0.2), (0.25, 0.2), 0.5
    scales = {"vertical_scale": 2.0, "horizontal_scale": 40.0}
    parameters = [
        Parameter("clay.lambda", lognormal(0.4, known[0], inherent[0], **scales)),
        Parameter("clay.kappa", lognormal(0.05, known[1], inherent[1], **scales)),
    ]
    places = [
        (holes[0], 1.0, 0, 0.47),
        (holes[0], 3.5, 1, 0.06),
        (holes[1], 2.0, 0, 0.36),
        (holes[1], 2.0, 1, 0.045),
    ]
    names = ("lambda", "kappa")
    tests = [
        result(
            value,
            number,
            parameter=names[which],
            addresses=(f"clay.{names[which]}",),
            place=place,
            below_top=depth,
            bias=cov(0.05),
        )
        for number, (place, depth, which, value) in enumerate(places)
    ]
    space = updated(parameters, tests, [("clay.lambda", "clay.kappa", rank(tied))], stations)
    mean, covariance = _scores(space)

    depth = (np.arange(CELLS) + 0.5) * 6.0 / CELLS
    spots = [*stations, *holes]
    where = [(x, y, z) for x, y in spots for z in depth] + [(x, y, z) for (x, y), z, _, _ in places]
    x, y, z = np.array(where).T
    plan = np.hypot(np.subtract.outer(x, x), np.subtract.outer(y, y))
    field = np.exp(-2.0 * plan / 40.0) * np.exp(-2.0 * np.abs(np.subtract.outer(z, z)) / 2.0)
    ratio = float(variance_function(3.0))
    whole = np.sqrt([known[p] ** 2 + ratio * inherent[p] ** 2 for p in range(2)])
    local = np.sqrt(ratio) * np.array(inherent) / whole
    shared = np.array(known) / whole
    step = tied / (shared.prod() + local.prod())  # of both parts alike
    between = np.array([[1.0, step], [step, 1.0]])
    # rows: average at each station, then each test, for a parameter
    pick = np.zeros((2 + 4, len(where)))
    for s in range(2):
        pick[s, s * CELLS : (s + 1) * CELLS] = 1.0 / CELLS
    pick[2:, len(spots) * CELLS :] = np.eye(4)
    blocks = pick @ field @ pick.T
    chosen = [0, 0, 1, 1] + [one[2] for one in places]
    rows = [0, 1, 0, 1, 2, 3, 4, 5]
    joint = np.zeros((8, 8))
    for a in range(8):
        for b in range(8):
            p, q = chosen[a], chosen[b]
            joint[a, b] = between[p, q] * (
                known[p] * known[q] + inherent[p] * inherent[q] * blocks[rows[a], rows[b]]
            )
    errors = np.eye(4) * 0.10**2 + 0.05**2 * np.equal.outer(chosen[4:], chosen[4:])
    joint[4:, 4:] += errors
    expected = np.array([math.log((0.4, 0.05)[p]) - 0.5 * inherent[p] ** 2 for p in chosen[4:]])
    residual = np.log([one[3] for one in places]) - expected
    gain = joint[:4, 4:] @ np.linalg.inv(joint[4:, 4:])
    scale = np.repeat(whole, 2)
    np.testing.assert_allclose(mean, gain @ residual / scale, atol=2e-3)
    np.testing.assert_allclose(
        covariance, (joint[:4, :4] - gain @ joint[4:, :4]) / np.outer(scale, scale), atol=2e-3
    )


def test_weight_of_a_point_and_variance_function_in_simulated_fields() -> None:
    """40 000 first-order autoregressive profiles of 200 cells; bands of four standard errors."""
    generator = np.random.default_rng(7)
    count, cells, scale, length = 40_000, 200, 2.0, 6.0
    step = math.exp(-2.0 * length / cells / scale)
    field = np.empty((cells, count))
    field[0] = generator.standard_normal(count)
    for i in range(1, cells):
        field[i] = step * field[i - 1] + math.sqrt(1.0 - step**2) * generator.standard_normal(count)
    average = field.mean(axis=0)
    expected = float(variance_function(length / scale))
    assert average.var() == pytest.approx(expected, abs=4.0 * expected * math.sqrt(2.0 / count) + 1e-3)
    depth = (np.arange(cells) + 0.5) * length / cells
    weight = point_weight(depth, scale=scale, length=length)
    found = (field * average).mean(axis=1)
    band = 4.0 * np.sqrt((expected + weight**2) / count)
    assert (np.abs(found - weight) < band + 1e-3).all()
    assert weight.mean() == pytest.approx(expected, abs=1e-4)


def _strength(values: list[np.ndarray]) -> np.ndarray:
    friction, virgin, reloading, margin = values
    exponent = plastic_volumetric_ratio(virgin, reloading)
    ratio = normally_consolidated_strength_ratio(friction, exponent)
    return undrained_shear_strength(35.0, 35.0 + margin, ratio, exponent)


STRENGTH = ("clay.M", "clay.lambda", "clay.kappa", "clay.pop")


def test_strength_against_importance_sampling() -> None:
    """A curved relation of four parameters: 400 000 draws from the prior weighted by the exact likelihood.

    Linearised once, means may be off by a tenth of the spread before and spreads by a tenth of themselves.
    """
    parameters = [
        Parameter("clay.M", Normal(mean=1.02, sd=0.08)),
        Parameter("clay.lambda", lognormal(0.36, 0.15)),
        Parameter("clay.kappa", lognormal(0.05, 0.25)),
        Parameter("clay.pop", lognormal(18.0, 0.35, 0.25)),
    ]
    values = (17.0, 18.5, 16.0)
    tests = [
        result(
            v,
            i,
            kind="vane",
            parameter="su",
            addresses=STRENGTH,
            model=_strength,
            error=cov(0.12),
            bias=cov(0.08),
        )
        for i, v in enumerate(values)
    ]
    space = updated(parameters, tests)
    assert space.updated is not None
    generator = np.random.default_rng(11)
    n = 400_000
    law = space.marginals[3].law
    friction = 1.02 + 0.08 * generator.standard_normal(n)
    virgin, reloading = (
        m * np.exp(s * generator.standard_normal(n)) for m, s in ((0.36, 0.15), (0.05, 0.25))
    )
    knowledge = 0.35 * generator.standard_normal(n)
    average = 0.25 * math.sqrt(float(variance_function(3.0))) * generator.standard_normal(n)
    representative = law.median * np.exp(knowledge + average)
    log_weight = np.zeros(n)
    bias = 0.08 * generator.standard_normal(n)
    for value in values:  # each in a hole of its own, so its point tells nothing of the average
        point = 18.0 * np.exp(-0.5 * 0.25**2 + knowledge + 0.25 * generator.standard_normal(n))
        error = np.log(value / _strength([friction, virgin, reloading, point])) - bias
        log_weight -= 0.5 * (error / 0.12) ** 2
    weight = np.exp(log_weight - log_weight.max())
    weight /= weight.sum()
    effective = 1.0 / (weight**2).sum()
    assert effective > 20_000
    drawn = [friction, virgin, reloading, representative]
    for place, (row, sample, marginal) in enumerate(
        zip(space.summary(), drawn, space.marginals, strict=True)
    ):
        mean = float(weight @ sample)
        sd = math.sqrt(float(weight @ (sample - mean) ** 2))
        assert row.mean == pytest.approx(mean, abs=0.1 * marginal.sd), place
        assert row.sd == pytest.approx(sd, rel=0.1), place


@pytest.mark.parametrize(
    ("values", "error"), [((0.38,), 0.05), ((0.55,), 0.10), ((0.22,), 0.3), ((0.30, 0.36, 0.33, 0.28), 0.25)]
)
def test_bounded_parameter_against_exact_bayes(values: tuple[float, ...], error: float) -> None:
    """A uniform parameter: one test, also beyond its end, or four whose error is as wide as it.

    The mean within a tenth of the spread before, the spread within a tenth of itself.
    """
    parameters = [Parameter("clay.lambda", Uniform(low=0.2, high=0.5))]
    space = updated(parameters, [result(one, i, error=error) for i, one in enumerate(values)])
    value = np.linspace(0.2, 0.5, 20_001)
    density = np.exp(-0.5 * sum(((value - one) / (error * one)) ** 2 for one in values))
    density /= density.sum()
    mean = float(density @ value)
    sd = math.sqrt(float(density @ (value - mean) ** 2))
    row = space.summary()[0]
    assert row.mean == pytest.approx(mean, abs=0.1 * space.marginals[0].sd)
    assert row.sd == pytest.approx(sd, rel=0.1)


VALUES = (0.47, 0.39, 0.52, 0.44, 0.41)


@pytest.mark.parametrize(
    ("count", "variability", "spread"),
    [
        (0, 0.218, 0.280),
        (1, 0.204, 0.203),
        (2, 0.193, 0.171),
        (3, 0.185, 0.152),
        (4, 0.168, 0.133),
        (5, 0.157, 0.120),
    ],
)
def test_unknown_variability_with_few_tests(count: int, variability: float, spread: float) -> None:
    """Mean of the variability and spread left, to the three digits worked out apart from the package.

    There the average over the layer had its median kept and here its mean, which moves the spread by the
    spread of half the variance of the average, 0.004 at most: squares add, so by less than 0.001.
    """
    space = updated(
        [Parameter("clay.lambda", ranged(0.45, 0.25, 0.10, 0.40))],
        [result(VALUES[i], i) for i in range(count)],
    )
    found = space.updated
    assert found is not None
    law = space.marginals[0].law
    reference = math.sqrt(math.log1p(ranged(0.45, 0.25, 0.10, 0.40).inherent_cov ** 2))
    assert found.weight @ found.part_scale[:, 0] * reference == pytest.approx(variability, abs=1e-3)
    mean = found.weight @ found.score_mean[:, 0]
    square = found.weight @ (found.score_sd[:, 0] ** 2 + found.score_mean[:, 0] ** 2)
    assert math.sqrt(square - mean**2) * law.log_sd == pytest.approx(spread, abs=1.5e-3)


def test_unknown_variability_against_quadrature() -> None:
    """Chance below each of five values by a sum over the variability and the layer mean, 1e-3."""
    count = 3
    space = updated(
        [Parameter("clay.lambda", ranged(0.45, 0.25, 0.10, 0.40))],
        [result(VALUES[i], i) for i in range(count)],
    )
    ratio = float(variance_function(3.0))
    spread = math.log(4.0) / (2.0 * 1.6448536)
    sizes = 0.2 * np.exp(spread * np.linspace(-4.0, 4.0, 401))
    known = np.linspace(-1.4, 1.4, 1401)
    weight = np.exp(-0.5 * (np.log(sizes / 0.2) / spread) ** 2)[:, None] * np.exp(-0.5 * (known / 0.25) ** 2)
    for value in VALUES[:count]:
        centre = math.log(0.45) - 0.5 * sizes[:, None] ** 2 + known
        sd = np.sqrt(sizes[:, None] ** 2 + 0.10**2)
        weight = weight * stats.norm.pdf(math.log(value), centre, sd)
    weight /= weight.sum()
    for probability in (0.05, 0.25, 0.5, 0.75, 0.95):
        value = float(space.marginals[0].quantile(space.updated.percentile(0, probability)))  # type: ignore[union-attr]
        centre = math.log(0.45) - 0.5 * ratio * sizes[:, None] ** 2 + known
        below = stats.norm.cdf(math.log(value), centre, sizes[:, None] * math.sqrt(ratio))
        assert float((weight * below).sum()) == pytest.approx(probability, abs=1e-3)


def test_few_tests_and_no_prior_leave_a_student_t() -> None:
    """Vague mean, variability over decades: the average is a t of n - 1 degrees, s sqrt(1/n + ratio).

    The range is no flat prior of the logarithm: a tenth is allowed on the width at 5 and 95 %.
    """
    values = np.array([0.47, 0.39, 0.52, 0.44, 0.41])
    vague = ranged(0.45, 2.9, 0.004, 1.2)
    tests = [result(v, i, error=1e-4) for i, v in enumerate(values)]
    parameter = Parameter("clay.lambda", vague)
    space = updated([parameter], tests)
    assert space.updated is not None
    scatter = np.log(values).std(ddof=1)
    width = stats.t.ppf(0.95, 4) * scatter * math.sqrt(0.2 + float(variance_function(3.0)))
    low, high = (float(space.marginals[0].quantile(space.updated.percentile(0, p))) for p in (0.05, 0.95))
    assert 0.5 * math.log(high / low) == pytest.approx(width, rel=0.1)


def test_conjugate_normal_updating_against_scipy() -> None:
    """One normal parameter, n independent tests: the textbook posterior, drawn percentiles by scipy."""
    space = updated(
        [Parameter("clay.M", Normal(mean=1.0, sd=0.10))],
        [
            result(v, i, parameter="M", addresses=("clay.M",), error=0.05)
            for i, v in enumerate((1.1, 1.05, 1.12))
        ],
    )
    precision = 1.0 / 0.10**2 + 3.0 / 0.05**2
    mean = (1.0 / 0.10**2 + (1.1 + 1.05 + 1.12) / 0.05**2) / precision
    exact = stats.norm(mean, 1.0 / math.sqrt(precision))
    row = space.summary()[0]
    assert row.mean == pytest.approx(exact.mean(), abs=1e-12)
    assert row.sd == pytest.approx(exact.std(), rel=1e-9)
    assert (row.p05, row.p95) == pytest.approx(exact.ppf([0.05, 0.95]), abs=1e-12)


def test_drawn_values_follow_the_mixture() -> None:
    """100 000 draws; mean, sd and percentiles within four standard errors."""
    space = updated(
        [
            Parameter("clay.lambda", ranged(0.45, 0.25, 0.10, 0.40)),
            Parameter("clay.kappa", lognormal(0.05, 0.3)),
        ],
        [result(VALUES[i], i) for i in range(3)],
        [("clay.lambda", "clay.kappa", 0.6)],
    )
    n = 100_000
    u = np.random.default_rng(3).standard_normal((n, space.dimension))
    values = space.values(space.correlated(u))
    for row in space.summary():
        drawn = np.asarray(values[row.name])
        assert drawn.mean() == pytest.approx(row.mean, abs=4.0 * row.sd / math.sqrt(n))
        assert drawn.std() == pytest.approx(row.sd, rel=4.0 * math.sqrt(2.0 / n))
        for value, p in ((row.p05, 0.05), (row.p50, 0.5), (row.p95, 0.95)):
            assert (drawn < value).mean() == pytest.approx(p, abs=4.0 * math.sqrt(p * (1.0 - p) / n))
    alone = space.values(space.correlated(u[17:18]))
    for name, array in values.items():
        assert np.asarray(array)[17] == np.asarray(alone[name])[0]


def test_truncated_and_harmonic_laws_take_tests_too() -> None:
    law = Lognormal(median=1e-9, log_sd=0.5, inherent_cov=0.5, vertical_scale=2.0)
    parameter = Parameter("clay.k", law, in_series=True, low=2e-10, high=5e-9)
    test = result(3e-9, parameter="k", addresses=("clay.k",), error=0.3)
    before, after = updated([parameter], []), updated([parameter], [test])
    assert before.updated is None
    assert before.summary()[0].mean < after.summary()[0].mean < 3e-9
    assert after.summary()[0].p95 < 5e-9
    assert isinstance(test, Observation)
