"""Parameter space: dependence, values, summary."""

import pickle
from dataclasses import dataclass

import numpy as np
import pytest

from probsoil.errors import DependenceError, ParameterError, ShapeError
from probsoil.parameters import correlation_blocks, latent_correlation, parameter_space, rank_correlation
from probsoil.scenario.distributions import Beta, Constant, Lognormal, Normal


@dataclass(frozen=True)
class Given:
    address: str
    distribution: object
    low: float = -np.inf
    high: float = np.inf
    averaging_length: float | None = None
    in_series: bool = False
    unit: str = "m"
    meaning: str = "a length"


QUANTITIES = [
    Given("site.water_table", Constant(value=1.0)),
    Given("clay.lambda", Lognormal(median=0.3, log_sd=0.2), 0.0),
    Given("clay.thickness", Normal(mean=7.0, sd=0.5), 0.0),
    Given("clay.kappa", Lognormal(median=0.05, log_sd=0.2), 0.0),
    Given("load.fill_phi", Beta(alpha=2.0, beta=3.0, low=30.0, high=40.0), 0.0, 60.0),
]
TIED = [("clay.lambda", "clay.kappa", 0.6), ("clay.thickness", "clay.kappa", -0.3)]


def test_names_constants_and_correlation():
    space = parameter_space(QUANTITIES, TIED)
    assert space.names == ("clay.lambda", "clay.thickness", "clay.kappa", "load.fill_phi")
    assert space.constants == {"site.water_table": 1.0}
    assert space.correlation[0, 2] == pytest.approx(2.0 * np.sin(np.pi / 10.0))
    assert space.correlation[1, 2] == pytest.approx(-2.0 * np.sin(np.pi / 20.0))
    np.testing.assert_allclose(space.triangle @ space.triangle.T, space.correlation, atol=1e-15)
    np.testing.assert_allclose(space.inverse_correlation @ space.correlation, np.eye(4), atol=1e-14)
    assert correlation_blocks(space.correlation) == [[0, 1, 2], [3]]


def test_rank_and_latent_correlation_undo_each_other():
    rho = np.linspace(-0.99, 0.99, 45)
    np.testing.assert_allclose(rank_correlation(latent_correlation(rho)), rho, atol=1e-14)


def test_correlated_is_the_triangular_product():
    space = parameter_space(QUANTITIES, TIED)
    u = np.random.default_rng(1).standard_normal((500, 4))
    np.testing.assert_allclose(space.correlated(u), u @ space.triangle.T, atol=1e-14)
    with pytest.raises(ShapeError, match=r"u must have shape \(n, 4\); got \(500, 3\)"):
        space.correlated(u[:, :3])


def test_a_space_can_be_sent_to_a_worker():
    space = parameter_space(QUANTITIES, TIED)
    z = space.correlated(np.random.default_rng(1).standard_normal((5, 4)))
    sent = pickle.loads(pickle.dumps(space))
    for address, value in space.values(z).items():
        np.testing.assert_array_equal(sent.values(z)[address], value)


def test_values_hold_every_number_once():
    space = parameter_space(QUANTITIES, TIED)
    z = space.correlated(np.random.default_rng(1).standard_normal((50, 4)))
    values = space.values(z)
    assert set(values) == {q.address for q in QUANTITIES}
    assert values["site.water_table"] == 1.0
    np.testing.assert_array_equal(values["clay.lambda"], 0.3 * np.exp(0.2 * z[:, 0]))
    with pytest.raises(ShapeError, match=r"z must have shape \(n, 4\)"):
        space.values(z[0])


def test_at_mean_and_median():
    space = parameter_space(QUANTITIES)
    assert space.at("median")["clay.lambda"] == 0.3
    assert space.at("mean")["clay.lambda"] == pytest.approx(0.3 * np.exp(0.02))
    assert space.at("mean")["load.fill_phi"] == pytest.approx(34.0)
    assert space.at("mean")["site.water_table"] == 1.0
    with pytest.raises(ParameterError, match="point must be 'mean' or 'median'; got 'mode'"):
        space.at("mode")


def test_summary_tells_what_is_drawn():
    space = parameter_space([Given("clay.thickness", Normal(mean=1.0, sd=0.5), 0.0)])
    (row,) = space.summary()
    assert row.cut_share == pytest.approx(0.02275, abs=5e-6)
    assert row.low == 0.0
    sample = space.marginals[0].quantile(np.random.default_rng(2).standard_normal(200_000))
    assert abs(sample.mean() - row.mean) < 4.0 * row.sd / np.sqrt(sample.size)
    for probability, percentile in ((0.05, row.p05), (0.5, row.p50), (0.95, row.p95)):
        error = np.sqrt(probability * (1.0 - probability) / sample.size)
        assert abs((sample <= percentile).mean() - probability) < 4.0 * error  # 4 s.e.: 1 in 16,000
    frame = space.to_frame()
    assert frame.loc[0, "text"].startswith("normal, mean 1 m")
    assert frame.loc[0, "p50"] == row.p50


def test_no_uncertain_parameter_is_allowed():
    space = parameter_space(QUANTITIES[:1])
    assert space.correlated(np.empty((3, 0))).shape == (3, 0)
    assert space.values(np.empty((3, 0))) == {"site.water_table": 1.0}
    assert space.to_frame().empty


@pytest.mark.parametrize(
    ("dependence", "message"),
    [
        ([("clay.lambda", "site.water_table", 0.5)], r"site\.water_table is not an uncertain parameter"),
        ([("clay.lambda", "clay.lambda", 0.5)], r"clay\.lambda cannot depend on itself"),
        ([("clay.lambda", "clay.kappa", 1.2)], r"must lie between -1 and 1; got 1\.2"),
        ([("clay.lambda", "clay.kappa", float("nan"))], r"must lie between -1 and 1; got nan"),
        ([("clay.lambda", "clay.kappa", 0.5), ("clay.kappa", "clay.lambda", 0.4)], "is given twice"),
    ],
)
def test_faults_of_dependence_are_named(dependence, message):
    with pytest.raises(DependenceError, match=message):
        parameter_space(QUANTITIES, dependence)


def test_correlations_that_cannot_hold_together_come_with_a_set_that_can():
    impossible = [
        ("clay.lambda", "clay.kappa", 0.9),
        ("clay.kappa", "clay.thickness", 0.9),
        ("clay.lambda", "clay.thickness", -0.5),
    ]
    with pytest.raises(DependenceError, match="these 3 rank correlations cannot hold together") as caught:
        parameter_space(QUANTITIES, impossible)
    lines = str(caught.value).splitlines()[1:]
    offered = [
        (*line.split(":")[0].strip().split(" and "), float(line.split("given,")[1].split()[0]))
        for line in lines
    ]
    assert len(offered) == 3
    parameter_space(QUANTITIES, offered)  # the set offered does hold together
    given = {frozenset(pair[:2]): pair[2] for pair in impossible}
    for first, second, rho in offered:
        assert abs(rho - given[frozenset((first, second))]) < 0.5  # and is near what was asked
