"""Time and error of the polynomial chaos, coverage of the cross-checks; they print and fail on no stopwatch.

Run with ``pytest -m benchmark -s tests/benchmarks/test_chaos_and_cross_checks.py``.
"""

import statistics
import time
from collections.abc import Callable

import chaospy
import numpy as np
import pytest
from scipy.integrate import quad
from scipy.special import ndtr, ndtri

from probsoil.probability import (
    LimitState,
    assembled_chaos,
    first_order,
    hermite_basis,
    importance_sampling,
    multi_indices,
    polynomial_chaos,
    subset_simulation,
)
from probsoil.probability.matching_pursuit import _Growth, least_squares
from probsoil.probability.multi_indices import term_values
from probsoil.probability.polynomial_chaos import CANDIDATES, RICHER, relative_squared_error

pytestmark = pytest.mark.benchmark


def seconds(work: Callable[[], object], times: int = 3) -> float:
    took = []
    for _ in range(times):
        start = time.process_time()
        work()
        took.append(time.process_time() - start)
    return statistics.median(took)


def layers(u):
    """Smooth parts of each layer of five variables: stiffnesses, stresses, thickness."""
    parts = []
    for layer in range(u.shape[1] // 5):
        a, b, c, d, e = u[:, 5 * layer : 5 * layer + 5].T
        start = 20.0 + 15.0 * layer
        ratio = np.log1p(60.0 * np.exp(0.15 * c) / (1.0 + 0.3 * layer) / start)
        beyond = np.log(1.2 + 0.5 * np.exp(0.3 * d) * (0.6 + 0.6 * layer))
        thickness = (2.0 + 0.2 * e) / 2.2
        parts += [np.log(0.3) + 0.2 * a, np.log(0.045) + 0.25 * b, ratio, beyond, thickness]
    return np.column_stack(parts)


def settlement(parts):
    virgin, again, ratio, beyond, thickness = (parts[:, i::5] for i in range(5))
    virgin_part = np.exp(virgin) * np.maximum(ratio - beyond, 0.0)
    return (thickness * (np.exp(again) * np.minimum(ratio, beyond) + virgin_part)).sum(axis=1)


def smooth(u):
    weight = 0.05 * np.exp(-0.1 * np.arange(u.shape[1] - 5))
    front = np.exp(0.2 * u[:, 0] - 0.1 * u[:, 1]) * (1.0 + 0.1 * u[:, 2] * u[:, 3])
    return front / (1.0 + np.exp(-0.5 * u[:, 4])) + u[:, 5:] @ weight


def test_speed_beside_chaospy_with_35_variables():
    n, d = 1000, 35
    u = np.random.default_rng(1).standard_normal((n, d))
    values = settlement(layers(u))
    law = chaospy.J(*[chaospy.Normal(0, 1) for _ in range(d)])
    found = {}

    def theirs():
        expansion = chaospy.generate_expansion(3, law, normed=True, cross_truncation=0.7)
        found["theirs"] = chaospy.fit_regression(expansion, u.T, values)

    def ours():
        indices = multi_indices(d, 3, 0.7)
        table = term_values(hermite_basis(d, 3).tables(u, 3), indices)
        found["table"], found["coefficients"] = table, least_squares(table, values)

    slow, quick = seconds(theirs, 1), seconds(ours)
    again = found["coefficients"] @ found["table"]
    np.testing.assert_allclose(again, found["theirs"](*u.T), rtol=1e-7)
    sparse = seconds(lambda: polynomial_chaos(u, values))
    chaos = polynomial_chaos(u, values)
    fresh = np.random.default_rng(2).standard_normal((100_000, d))
    predicted, others = seconds(lambda: chaos.predict(fresh)), seconds(lambda: found["theirs"](*fresh.T), 1)
    print(f"\n35 variables, 1,000 points, 701 terms: chaospy {slow:.2f} s,", end=" ")
    print(f"ours {quick:.3f} s, {slow / quick:.0f}x")
    print(f"sparse, five sets of up to 3,151 terms: {sparse:.2f} s, {len(chaos.indices)} terms kept")
    print(f"100,000 predictions: chaospy (701 terms) {others:.2f} s, ours (sparse) {predicted:.2f} s")


@pytest.mark.parametrize(("name", "d"), [("layers", 15), ("layers", 35), ("smooth", 16)])
@pytest.mark.parametrize("n", [300, 1000])
def test_error_by_criterion_and_by_leave_one_out(name, d, n):
    response = smooth if name == "smooth" else lambda u: settlement(layers(u))
    fresh = np.random.default_rng(99).standard_normal((20_000, d))
    true = response(fresh)
    rows = []
    for seed in range(3):
        u = np.random.default_rng(seed).standard_normal((n, d))
        values = response(u)
        chaos = polynomial_chaos(u, values, candidates=CANDIDATES + RICHER)
        error = relative_squared_error(chaos.predict(fresh), true[:, np.newaxis])[0]
        row = [
            error,
            chaos.hold_out_error[0],
            chaos.leave_one_out[0],
            _by_leave_one_out(u, values, fresh, true),
        ]
        if name == "layers":
            grey = assembled_chaos(u, layers(u), values, settlement)
            row += [np.mean((grey.predict(fresh) - true) ** 2) / true.var(), grey.hold_out_error]
        rows.append(row)
    mean = np.mean(rows, axis=0)
    print(
        f"\n{name} d={d} n={n}: true {mean[0]:.4f}, hold-out {mean[1]:.4f}, leave-one-out {mean[2]:.4f};",
        end=" ",
    )
    print(f"chosen by leave-one-out: true {mean[3]:.4f}", end="")
    print(f"; assembled: true {mean[4]:.1e}, hold-out {mean[5]:.1e}" if name == "layers" else "")


def _by_leave_one_out(u, values, fresh, true):
    """True error of the terms that the least corrected leave-one-out error chooses."""
    best = (np.inf, np.inf)
    for degree, norm, interaction in CANDIDATES + RICHER:
        indices = multi_indices(u.shape[1], degree, norm, interaction=interaction)
        basis = hermite_basis(u.shape[1], degree)
        growth = _Growth(
            term_values(basis.tables(u, degree), indices), values, min(len(indices), len(u) // 2)
        )
        errors = [growth.corrected_error()]
        while growth.take_next():
            errors.append(growth.corrected_error())
        count = int(np.argmin(errors)) + 1
        terms = indices[growth.taken[:count]]
        predicted = growth.coefficients(count) @ term_values(basis.tables(fresh, degree), terms)
        best = min(best, (errors[count - 1], np.mean((predicted - true) ** 2) / true.var()))
    return best[1]


def four_branches(u):
    a, b = u[:, 0], u[:, 1]
    bent, along, far = 3.0 + 0.1 * (a - b) ** 2, (a + b) / np.sqrt(2.0), 7.0 / np.sqrt(2.0)
    return np.min([bent - along, bent + along, a - b + far, b - a + far], axis=0)


def _branches_exact():
    density = lambda b: np.exp(-0.5 * b * b) / np.sqrt(2.0 * np.pi)  # noqa: E731
    bounds = lambda b: ndtr(3.0 + 0.2 * b * b) - ndtr(-3.0 - 0.2 * b * b)  # noqa: E731
    return 1.0 - quad(lambda b: density(b) * bounds(b), -3.5, 3.5, epsabs=1e-14)[0]


WEIGHT = np.exp(-0.05 * np.arange(35)) / np.linalg.norm(np.exp(-0.05 * np.arange(35)))
JUMP = float(ndtr(-2.6))
CASES = {
    "plane, 35 variables, 1e-2": (lambda u: -float(ndtri(1e-2)) - u @ WEIGHT, 35, 1e-2),
    "plane, 35 variables, 1e-3": (lambda u: -float(ndtri(1e-3)) - u @ WEIGHT, 35, 1e-3),
    "plane, 35 variables, 1e-4": (lambda u: -float(ndtri(1e-4)) - u @ WEIGHT, 35, 1e-4),
    "four branches, 2.2e-3": (four_branches, 2, _branches_exact()),
    "plane 1e-3 and a jump of 4.7e-3": (
        lambda u: np.where(u[:, 2] > 2.6, -1.0, -float(ndtri(1e-3)) - u[:, 0]),
        5,
        1e-3 + JUMP - 1e-3 * JUMP,
    ),
}


@pytest.mark.parametrize("name", CASES)
def test_coverage_of_the_cross_checks(name):
    performance, d, exact = CASES[name]
    state = LimitState(performance=performance, dimension=d)
    first = first_order(state)
    print(f"\n{name}: first order {first.probability:.3g} ({first.model_runs} runs), exact {exact:.4g}")
    for title, method, repeats in (
        ("importance sampling", lambda s: importance_sampling(state, first, seed=s), 400),
        ("subset simulation", lambda s: subset_simulation(state, seed=s), 200),
    ):
        found = [method(s) for s in range(repeats)]
        inside = np.mean([one.interval[0] <= exact <= one.interval[1] for one in found])
        bounded = np.mean([one.interval[0] <= exact <= one.interval[1] + one.unseen_bound for one in found])
        ratio = np.array([one.probability for one in found]) / exact
        runs = np.mean([one.model_runs for one in found])
        print(f"  {title}: {runs:.0f} runs, bias {ratio.mean() - 1:+.1%}, cov {ratio.std():.1%},", end=" ")
        print(f"covered {inside:.3f}, with the unseen bound {bounded:.3f}")
        assert bounded > 0.9
