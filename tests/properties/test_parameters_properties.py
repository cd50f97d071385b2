"""What holds for every parameter, whatever its law."""

import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from probsoil.errors import DependenceError, ParameterError
from probsoil.parameters import marginal, parameter_space, variance_function
from probsoil.scenario.distributions import Beta, Lognormal, Normal, Triangular, TruncatedNormal, Uniform

REPEATABLE = settings(derandomize=True, deadline=None, max_examples=60)

positive = st.floats(0.05, 20.0)
share = st.floats(0.0, 1.0)


class Given:
    averaging_length, unit, meaning = 3.0, "-", "property"
    in_series = False

    def __init__(self, distribution, low=-np.inf, high=np.inf, address="clay.property"):
        self.distribution, self.low, self.high, self.address = distribution, low, high, address


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
