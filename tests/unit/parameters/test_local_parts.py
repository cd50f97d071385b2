"""Layer averages at several stations: covariances in closed form, and what may not be asked."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.errors import DependenceError, ParameterError
from probsoil.parameters import parameter_space
from probsoil.parameters.local_parts import horizontal_correlation, mixing_matrix, station_order
from probsoil.parameters.space import ParameterSpace
from probsoil.scenario.distributions import Constant, Distribution, Lognormal, Normal
from probsoil.scenario.quantities import Quantity
from probsoil.scenario.spatial_averaging import local_share, variance_function

PLACES = ((0.0, 0.0), (0.0, 12.0), (5.0, 12.0), (0.0, 40.0))


def quantity(name: str, law: Distribution, length: float | None = 6.0) -> Quantity:
    return Quantity(
        address=name, unit="-", distribution=law, low=-1e9, high=1e9, meaning="", averaging_length=length
    )


def lognormal(inherent: float = 0.2, horizontal: float | None = 30.0, log_sd: float = 0.12) -> Lognormal:
    scales = {"vertical_scale": 2.0, "horizontal_scale": horizontal} if inherent else {}
    return Lognormal(median=0.3, log_sd=log_sd, inherent_cov=inherent, **scales)


def covariance(space: ParameterSpace, count: int) -> np.ndarray:
    """Exact covariance of the normal scores of all parameters at all stations, station by station."""
    z = space.triangle.T  # rows are images of independent normals: sums of squares are variances
    scores = z if space.local is None else None
    rows = [scores if scores is not None else space.local.scores(z, place) for place in range(count)]
    all_scores = np.concatenate(rows, axis=1)
    return all_scores.T @ all_scores


def test_difference_of_two_stations_has_the_variance_of_the_closed_form() -> None:
    """2 sigma^2 Gamma^2 (1 - rho) of the logarithm; exact but for rounding."""
    law = lognormal()
    space = parameter_space([quantity("clay.lambda", law)], positions=PLACES)
    gamma = float(variance_function(6.0 / 2.0))
    whole = law.log_sd**2 + gamma * np.log1p(0.2**2)
    scores = covariance(space, len(PLACES))
    for first in range(4):
        for second in range(first):
            distance = np.hypot(*np.subtract(PLACES[first], PLACES[second]))
            rho = np.exp(-2.0 * distance / 30.0)
            found = scores[first, first] + scores[second, second] - 2.0 * scores[first, second]
            expected = 2.0 * gamma * np.log1p(0.2**2) * (1.0 - rho)
            assert whole * found == pytest.approx(expected, rel=1e-11)


def test_values_of_a_normal_law_differ_by_the_same_closed_form() -> None:
    """Sampled: 20,000 draws give a variance to 1 %, one standard error; the band is 4 of them."""
    law = Normal(mean=10.0, sd=1.0, inherent_cov=0.3, vertical_scale=2.0, horizontal_scale=30.0)
    space = parameter_space([quantity("clay.phi", law)], positions=PLACES)
    z = space.correlated(np.random.default_rng(5).standard_normal((20_000, space.dimension)))
    first, second = (space.values(z, place)["clay.phi"] for place in (0, 3))
    expected = 2.0 * float(variance_function(3.0)) * 3.0**2 * (1.0 - np.exp(-2.0 * 40.0 / 30.0))
    assert np.var(first - second) == pytest.approx(expected, rel=0.04)
    assert np.std(first) == pytest.approx(np.sqrt(1.0 + float(variance_function(3.0)) * 9.0), rel=0.02)


@pytest.mark.parametrize(("scale", "alike"), [(1e9, 1.0), (1e-3, 0.0)])
def test_ends_of_the_horizontal_scale(scale: float, alike: float) -> None:
    """As one place over a vast scale, unrelated over a tiny one (to 1e-6 of the variance)."""
    space = parameter_space([quantity("clay.lambda", lognormal(horizontal=scale))], positions=PLACES)
    share = local_share(lognormal(), 6.0)
    scores = covariance(space, len(PLACES))
    off = scores[~np.eye(4, dtype=bool)]
    np.testing.assert_allclose(off, 1.0 - share + alike * share, atol=1e-6)


def correlated(ranks: tuple[tuple[str, str, float], ...], places=PLACES) -> ParameterSpace:
    laws = {
        "clay.lambda": lognormal(),
        "clay.kappa": lognormal(0.0),
        "clay.pop": lognormal(0.35, log_sd=0.2),
        "clay.void_ratio": Normal(mean=2.0, sd=0.1),
        "load.fill": Normal(mean=19.0, sd=0.5),
    }
    return parameter_space(
        [quantity(name, law, None if name.startswith("load") else 6.0) for name, law in laws.items()],
        ranks,
        positions=places,
    )


RANKS = (
    ("clay.lambda", "clay.kappa", 0.6),
    ("clay.lambda", "clay.void_ratio", 0.5),
    ("clay.lambda", "clay.pop", -0.3),
    ("clay.pop", "load.fill", 0.1),
)


@settings(max_examples=40, deadline=None, derandomize=True)
@given(
    ranks=st.lists(st.floats(-0.45, 0.45), min_size=4, max_size=4),
    places=st.lists(
        st.tuples(st.integers(-40, 40), st.integers(-500, 500)), min_size=2, max_size=6, unique=True
    ),
)
def test_correlations_hold_at_every_station_and_the_whole_is_positive_definite(
    ranks: list[float], places: list[tuple[int, int]]
) -> None:
    where = [(float(x), float(y)) for x, y in places]
    pairs = tuple((a, b, rho) for (a, b, _), rho in zip(RANKS, ranks, strict=True))
    space, alone = correlated(pairs, where), correlated(pairs, where[:1])
    scores = covariance(space, len(where))
    for place in range(len(where)):
        block = scores[5 * place : 5 * place + 5, 5 * place : 5 * place + 5]
        np.testing.assert_allclose(block, alone.correlation, atol=1e-12)
    assert np.linalg.eigvalsh(scores)[0] > -1e-12
    assert np.linalg.eigvalsh(space.correlation)[0] > 0.0


def test_a_parameter_follows_the_one_it_is_correlated_with() -> None:
    space = correlated(RANKS)
    scores = covariance(space, len(PLACES))
    lam, kappa, fill = 0, 1, 4
    r = space.at_station[lam, kappa]
    own = scores[lam, lam] - scores[lam, 5 + lam]  # what of lambda differs from station 1 to 2
    assert scores[kappa, kappa] - scores[kappa, 5 + kappa] > 0.2 * r**2 * own
    assert scores[fill, 5 + fill] == pytest.approx(1.0, abs=1e-12)  # the fill is the same everywhere


def test_a_parameter_tied_to_one_local_part_alone_follows_by_its_square() -> None:
    space = correlated(RANKS[:1])
    scores = covariance(space, len(PLACES))
    own = scores[0, 0] - scores[0, 5]
    assert scores[1, 1] - scores[1, 6] == pytest.approx(space.at_station[0, 1] ** 2 * own, rel=1e-11)


def test_another_station_leaves_the_others_as_they_were() -> None:
    few, more = correlated(RANKS, PLACES[:3]), correlated(RANKS, PLACES)
    np.testing.assert_allclose(covariance(few, 3), covariance(more, 4)[:15, :15], atol=1e-12)


@settings(max_examples=25, deadline=None, derandomize=True)
@given(order=st.permutations(range(4)))
def test_the_order_of_stations_changes_no_bit(order: list[int]) -> None:
    space, other = correlated(RANKS), correlated(RANKS, [PLACES[index] for index in order])
    z = space.correlated(np.random.default_rng(1).standard_normal((7, space.dimension)))
    for place, index in enumerate(order):
        here, there = space.values(z, index), other.values(z, place)
        assert all(np.array_equal(here[name], there[name]) for name in here)


def test_a_realisation_alone_has_the_bits_of_the_batch() -> None:
    space = correlated(RANKS)
    u = np.random.default_rng(2).standard_normal((9, space.dimension))
    batch = space.values(space.correlated(u), 2)
    for row in range(9):
        alone = space.values(space.correlated(u[row : row + 1]), 2)
        assert all(alone[name][0] == batch[name][row] for name in space.names)


@pytest.mark.parametrize("places", [(), PLACES[:1]])
def test_one_station_is_the_space_without_stations(places: tuple) -> None:
    plain, one = correlated(RANKS, ()), correlated(RANKS, places)
    assert one.local is None
    assert one.dimension == plain.dimension == 5
    assert np.array_equal(one.triangle, plain.triangle)
    assert np.array_equal(one.at_station, one.correlation)


def test_nothing_varies_without_variability_from_point_to_point() -> None:
    space = parameter_space([quantity("clay.kappa", lognormal(0.0))], positions=PLACES)
    assert space.local is None
    fixed = parameter_space([quantity("clay.M", Constant(value=1.0))], positions=PLACES)
    assert fixed.dimension == 0


def test_a_scale_in_plan_is_needed() -> None:
    with pytest.raises(ParameterError, match=r"clay.lambda varies .* there are 4 stations: it needs horizo"):
        parameter_space([quantity("clay.lambda", lognormal(horizontal=None))], positions=PLACES)
    with pytest.raises(ParameterError, match="horizontal scale of fluctuation must be above zero; got 0 m"):
        horizontal_correlation(PLACES, 0.0)


def test_correlated_parts_need_one_scale() -> None:
    laws = [quantity("clay.lambda", lognormal()), quantity("clay.pop", lognormal(horizontal=50.0))]
    with pytest.raises(DependenceError, match=r"clay.lambda and clay.pop .* need the same horizontal_scale"):
        parameter_space(laws, [("clay.lambda", "clay.pop", 0.3)], positions=PLACES)
    apart = parameter_space(laws, positions=PLACES)  # uncorrelated: each over its own
    assert len(apart.local.parts) == 2


def test_what_is_the_same_everywhere_cannot_follow_too_closely() -> None:
    laws = [
        quantity("clay.lambda", lognormal(0.6, log_sd=0.05)),
        quantity("model_error.settlement", lognormal(0.0)),
    ]
    pair = [("clay.lambda", "model_error.settlement", 0.9)]
    with pytest.raises(DependenceError, match="cannot hold at every station, since what varies from place"):
        parameter_space(laws, pair, positions=PLACES)
    assert parameter_space(laws, pair).dimension == 2


def test_the_mixture_gives_the_correlation_in_the_order_given() -> None:
    mixing = mixing_matrix(PLACES[::-1], 30.0)
    np.testing.assert_allclose(mixing @ mixing.T, horizontal_correlation(PLACES[::-1], 30.0), atol=1e-14)
    assert station_order(PLACES[::-1]) == [3, 2, 1, 0]
