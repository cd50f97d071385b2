"""What holds for every parameter, whatever its law."""

import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.special import ndtr, ndtri

from probsoil.errors import DependenceError, ParameterError
from probsoil.parameters import marginal, parameter_space, variance_function
from probsoil.scenario.distributions import Beta, Lognormal, Normal, Triangular, TruncatedNormal, Uniform
from probsoil.scenario.listed_distributions import Discrete, Empirical, Percentiles
from probsoil.scenario.skewed_distributions import Gamma, Gumbel

REPEATABLE = settings(derandomize=True, deadline=None, max_examples=60)

positive = st.floats(0.05, 20.0)
share = st.floats(0.0, 1.0)


class Given:
    averaging_length, unit, meaning = 3.0, "-", "property"
    in_series = False

    def __init__(self, distribution, low=-np.inf, high=np.inf, address="clay.property"):
        self.distribution, self.low, self.high, self.address = distribution, low, high, address


@st.composite
def percentiles(draw):
    """Two to six percentiles, with open and closed tails."""
    rank = sorted(draw(st.lists(st.integers(1, 99), min_size=2, max_size=6, unique=True)))
    steps = draw(st.lists(st.floats(0.01, 1.0), min_size=len(rank), max_size=len(rank)))
    values = tuple(float(value) for value in np.cumsum(steps))
    low = draw(st.one_of(st.none(), st.floats(0.1, 0.9).map(lambda part: part * values[0])))
    high = draw(st.one_of(st.none(), st.floats(1.1, 3.0).map(lambda part: part * values[-1])))
    # a wide logarithmic tail leaves so few digits of a score that nothing could be said of it
    narrow = np.diff(np.log(values)) / np.diff(ndtri(np.array(rank) / 100.0)) < 2.0
    fit = draw(st.sampled_from(["value", "logarithm"])) if narrow.all() else "value"
    return Percentiles(percent=tuple(map(float, rank)), values=values, low=low, high=high, fit=fit)


@st.composite
def values_with_probabilities(draw):
    """Discrete and empirical distributions, with values that stand several times."""
    values = sorted(draw(st.lists(st.integers(-20, 20), min_size=2, max_size=12)))
    assume(values[0] < values[-1])
    if draw(st.booleans()):
        return Empirical(
            values=tuple(map(float, values)), smoothing=draw(st.sampled_from(["none", "linear"]))
        )
    different = sorted(set(values))
    weight = np.array(draw(st.lists(st.floats(0.01, 1.0), min_size=len(different), max_size=len(different))))
    return Discrete(
        values=tuple(map(float, different)), probabilities=tuple(float(w) for w in weight / weight.sum())
    )


@st.composite
def distributions(draw):
    low = draw(st.floats(-10.0, 10.0))
    high = low + draw(positive)
    scale = {"inherent_cov": draw(st.floats(0.0, 0.5)), "vertical_scale": draw(positive)}
    return draw(
        st.sampled_from(
            [
                Normal(mean=low, sd=draw(positive), **scale),
                Lognormal(median=draw(positive), log_sd=draw(st.floats(0.01, 1.5)), **scale),
                Uniform(low=low, high=high),
                Triangular(low=low, mode=low + draw(share) * (high - low), high=high),
                TruncatedNormal(mean=low + draw(share) * (high - low), sd=draw(positive), low=low, high=high),
                Gamma(shape=draw(st.floats(0.3, 400.0)), scale=draw(positive)),
                Gumbel(mode=low, scale=draw(positive)),
                draw(percentiles()),
                Beta(alpha=draw(positive), beta=draw(positive), low=low, high=high),
            ]
        )
    )


@REPEATABLE
@given(distributions(), st.floats(-10.0, 5.0), positive)
def test_values_rise_with_z_and_never_leave_the_bounds(distribution, low, width):
    try:
        law = marginal(Given(distribution, low, low + width))
    except ParameterError:
        assume(False)
    value = law.quantile(np.linspace(-9.5, 9.5, 400))
    assert (np.diff(value) >= -1e-12 * np.abs(value).max()).all()
    assert value.min() >= low
    assert value.max() <= low + width
    assert 0.0 <= law.cut_share <= 0.5
    assert value[0] - 1e-9 <= law.mean <= value[-1] + 1e-9
    assert law.sd <= 0.5 * width * (1.0 + 1e-9)  # no law on an interval is wider than its two ends


@REPEATABLE
@given(distributions(), st.floats(-3.0, 3.0))
def test_score_undoes_quantile(distribution, z):
    law = marginal(Given(distribution))
    value = float(law.quantile(z))
    step = float(law.quantile(z + 1e-3)) - float(law.quantile(z - 1e-3))
    assume(step > 1e-9 * max(abs(value), 1.0))  # where the law is all but flat the score is not determined
    assert abs(law.score(value) - z) < 1e-5


@REPEATABLE
@given(
    st.integers(1, 6).flatmap(
        lambda d: st.tuples(st.just(d), st.lists(st.floats(-0.9, 0.9), min_size=15, max_size=15))
    ),
    st.integers(1, 40),
)
def test_a_row_alone_is_the_row_in_a_batch_bit_for_bit(given_correlation, size):
    d, rho = given_correlation
    names = [f"clay.p{i}" for i in range(d)]
    pairs = [(names[i], names[j]) for i in range(d) for j in range(i)]
    quantities = [Given(Normal(mean=0.0, sd=1.0), address=name) for name in names]
    try:
        space = parameter_space(quantities, [(*pair, r) for pair, r in zip(pairs, rho, strict=False)])
    except DependenceError:
        assume(False)
    u = np.random.default_rng(size).standard_normal((size, d))
    batch = space.correlated(u)
    for row in range(size):
        assert np.array_equal(space.correlated(u[row : row + 1]), batch[row : row + 1])
    assert np.array_equal(space.correlated(np.asfortranarray(u)), batch)


@REPEATABLE
@given(st.floats(0.0, 1e6), st.floats(0.0, 1e6))
def test_averaging_over_more_never_leaves_more_variance(first, second):
    short, long = sorted((first, second))
    left = variance_function([short, long])
    assert 0.0 < left[1] <= left[0] * (1.0 + 1e-14) <= 1.0 + 1e-14


@REPEATABLE
@given(percentiles(), st.floats(-4.0, 4.0), st.floats(0.0, 0.5))
def test_a_fit_passes_through_its_percentiles_and_rises(distribution, z, step):
    law = marginal(Given(distribution))
    found = law.percentile(np.array(distribution.percent) / 100.0)
    # exact, save for the rounding of a logarithm
    np.testing.assert_allclose(
        found, distribution.values, rtol=1e-15 if distribution.fit == "value" else 1e-14
    )
    before, after = (float(value) for value in law.quantile(np.array([z, z + step])))
    assert before <= after * (1.0 + 1e-12)
    for end, reached in ((distribution.low, before), (distribution.high, -after)):
        assert end is None or reached >= (end if end == distribution.low else -end) * (1.0 - 1e-12) - 1e-12


@REPEATABLE
@given(values_with_probabilities(), st.floats(-5.0, 5.0), st.floats(0.0, 2.0))
def test_a_value_stands_for_the_middle_of_its_ranks(distribution, z, step):
    law = marginal(Given(distribution))
    drawn = law.quantile(np.linspace(-8.0, 8.0, 999))
    assert (np.diff(drawn) >= 0.0).all()
    for value in set(distribution.values):
        below, above = (distribution.probability_outside(*ends) for ends in ((value, 1e9), (-1e9, value)))
        assert abs(ndtr(law.score(value)) - (below + 0.5 * (1.0 - below - above))) < 1e-12
        if np.isfinite(law.score(value)):
            assert abs(float(law.quantile(law.score(value))) - value) < 1e-12 * 20.0
    if isinstance(distribution, Discrete) or distribution.smoothing == "none":
        assert set(drawn) <= set(distribution.values)
    assert float(law.quantile(z)) <= float(law.quantile(z + step))


@REPEATABLE
@given(st.one_of(distributions(), values_with_probabilities()))
def test_mean_of_the_two_rooms_is_one(distribution):
    """The scenario says it before, the law after averaging over a layer, which keeps it."""
    law = marginal(Given(distribution))
    assert abs(law.mean - distribution.expectation) <= 1e-9 * max(abs(law.mean), law.sd)
