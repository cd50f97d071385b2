"""Sparse polynomial chaos: what it recovers, what it says of its error, what it refuses."""

import numpy as np
import pytest

from probsoil.errors import ParameterError, ShapeError
from probsoil.probability import (
    assembled_chaos,
    chaos_shares,
    group_shares,
    inert_variables,
    polynomial_chaos,
)
from probsoil.probability.matching_pursuit import least_squares, matching_pursuit
from probsoil.probability.polynomial_chaos import relative_squared_error


def normals(n, d, seed=0):
    return np.random.default_rng(seed).standard_normal((n, d))


def layered(u):
    """Three smooth parts a layer; the response has an edge in each layer."""
    parts = []
    for layer in range(u.shape[1] // 3):
        a, b, c = u[:, 3 * layer : 3 * layer + 3].T
        parts += [0.3 * np.exp(0.2 * a), 0.4 * np.exp(0.15 * b) - 0.2 * layer, 0.1 * c]
    return np.column_stack(parts)


def settled(parts):
    virgin, beyond, stiff = parts[:, ::3], parts[:, 1::3], parts[:, 2::3]
    return (virgin * np.maximum(beyond + stiff - 0.2, 0.0) + 0.05 * beyond).sum(axis=1)


def test_polynomial_within_the_set_is_recovered_to_rounding():
    u = normals(200, 6)
    values = 1.0 + 2.0 * u[:, 0] - 0.5 * u[:, 1] * u[:, 2] + 0.25 * (u[:, 3] ** 2 - 1.0)
    chaos = polynomial_chaos(u, values)
    assert chaos.mean[0] == pytest.approx(1.0, abs=1e-12)
    assert chaos.variance[0] == pytest.approx(4.0 + 0.25 + 0.0625 * 2.0, rel=1e-12)
    assert chaos.hold_out_error[0] < 1e-24
    assert len(chaos.indices) == 4
    shares = chaos_shares(chaos)
    assert (shares.total[4:, 0] == 0.0).all()
    assert shares.pair[1, 2, 0] == pytest.approx(0.25 / 4.375, rel=1e-10)


def test_several_outputs_share_one_list_of_terms():
    u = normals(300, 5)
    values = np.column_stack([u[:, 0], 3.0 + u[:, 1] * u[:, 0], np.full(300, 7.0)])
    chaos = polynomial_chaos(u, values)
    assert chaos.coefficients.shape == (len(chaos.indices), 3)
    np.testing.assert_allclose(chaos.mean, [0.0, 3.0, 7.0], atol=1e-12)
    np.testing.assert_allclose(chaos.predict(u), values, atol=1e-10)
    assert chaos.hold_out_error[2] == 0.0
    assert np.isnan(chaos_shares(chaos).first[:, 2]).all()
    alone = polynomial_chaos(u, values[:, 1])
    np.testing.assert_allclose(alone.predict(u)[:, 0], chaos.predict(u)[:, 1], atol=1e-12)


def test_prediction_has_the_same_bits_alone_and_among_others():
    u = normals(400, 8)
    chaos = polynomial_chaos(u, np.exp(0.3 * u[:, 0]) + np.abs(u[:, 1] + u[:, 2]))
    points = normals(5000, 8, seed=1)
    together = chaos.predict(points)
    for row in (0, 17, 4095, 4096, 4999):
        assert chaos.predict(points[row : row + 1]).tobytes() == together[row : row + 1].tobytes()


def test_hold_out_error_is_that_of_new_points_and_leave_one_out_is_not():
    """35 variables, few points: choosing among many terms deceives the leave-one-out error."""
    weight = np.exp(-0.1 * np.arange(35))

    def response(u):
        return np.exp(0.2 * u @ weight) + 0.3 * np.maximum(u[:, 0] + u[:, 1] + 0.5, 0.0) * u[:, 3]

    u, fresh = normals(700, 35), normals(20_000, 35, seed=1)
    held = (fresh[:1000], response(fresh[:1000]))
    chaos = polynomial_chaos(u, response(u), held_out=held)
    new = relative_squared_error(chaos.predict(fresh[1000:]), response(fresh[1000:])[:, np.newaxis])
    # squares of a skewed error: 1,000 points tell it to about a fifth
    assert chaos.hold_out_error[0] == pytest.approx(new[0], rel=0.6)
    assert chaos.held_out == 1000
    assert chaos.fitted == 700


def test_every_fifth_point_is_held_out_by_default_and_joins_the_last_fit():
    u = normals(500, 4)
    values = np.exp(0.5 * u[:, 0]) * (1.0 + 0.2 * u[:, 1])
    chaos = polynomial_chaos(u, values)
    assert (chaos.fitted, chaos.held_out) == (400, 100)
    used = chaos.coefficients[:, 0] != 0.0
    assert used.all()
    # normal equations of the fit to all points: what is left is at right angles to every term
    left = values - chaos.predict(u)[:, 0]
    tables = chaos.basis.tables(u, int(chaos.indices.max()))
    terms = np.array([np.prod([tables[i, a] for i, a in enumerate(row)], axis=0) for row in chaos.indices])
    assert np.abs(terms @ left).max() < 1e-9 * len(u)


def test_points_without_a_number_are_left_out_and_counted():
    u = normals(300, 3)
    values = 1.0 + u[:, 0]
    values[::7] = np.nan
    values[5] = np.inf
    chaos = polynomial_chaos(u, values)
    assert chaos.left_out == 44
    assert chaos.mean[0] == pytest.approx(1.0, abs=1e-12)


def test_known_inert_variables_have_exactly_nothing():
    def response(u):
        return np.where(u[:, 0] > 0.3, 1.0, 0.0) + np.sin(2.0 * u[:, 3])

    inert = inert_variables(response, 8)
    assert inert.tolist() == [False, True, True, False, True, True, True, True]
    u = normals(400, 8)
    chaos = polynomial_chaos(u, response(u), inert=inert)
    shares = chaos_shares(chaos)
    assert (shares.total[inert, 0] == 0.0).all()
    assert (shares.total[~inert, 0] > 0.1).all()


def test_nothing_but_inert_variables_leaves_the_mean():
    u = normals(50, 2)
    chaos = polynomial_chaos(u, u[:, 0], inert=np.array([True, True]))
    assert chaos.indices.tolist() == [[0, 0]]
    assert chaos.mean[0] == pytest.approx(u[:, 0].mean(), abs=1e-14)


def test_edge_assembled_exactly_beats_the_expansion_of_the_whole():
    u, fresh = normals(400, 9), normals(5000, 9, seed=1)
    parts = layered(u)
    whole = polynomial_chaos(u, settled(parts))
    grey = assembled_chaos(u, parts, settled(parts), settled)
    true = settled(layered(fresh))
    error = np.mean((grey.predict(fresh) - true) ** 2) / true.var()
    # the parts are exponentials, of which a degree of 3 to 5 leaves below 1e-3 squared
    assert error < 1e-4
    assert grey.hold_out_error < 1e-4
    assert (grey.parts.fitted, grey.parts.held_out) == (320, 80)
    assert error < 0.1 * np.mean((whole.predict(fresh)[:, 0] - true) ** 2) / true.var()
    again = grey.expanded(normals(4000, 9, seed=2))
    # mean and variance of 5,000 draws: four standard errors
    assert again.mean[0] == pytest.approx(true.mean(), abs=4.0 * true.std() / np.sqrt(5000))
    assert again.variance[0] == pytest.approx(true.var(), rel=0.15)


def test_hold_out_error_of_an_assembly_sees_what_the_assembly_leaves_out():
    u = normals(400, 9)
    parts = layered(u)
    fitted = assembled_chaos(u, parts, settled(parts), lambda part: settled(part) + 0.5)
    assert fitted.hold_out_error > 1.0


def test_shares_of_groups():
    u = normals(300, 4)
    chaos = polynomial_chaos(u, 2.0 * u[:, 0] + u[:, 1] * u[:, 2] + 0.5 * u[:, 0] * u[:, 3])
    found = group_shares(chaos, {"upper": [0, 1], "lower": [2, 3], "all": range(4)})
    total = 4.0 + 1.0 + 0.25
    np.testing.assert_allclose(found.closed[:, 0], np.array([4.0, 0.0, total]) / total, atol=1e-10)
    np.testing.assert_allclose(found.total[:, 0], np.array([total, 1.25, total]) / total, atol=1e-10)
    frame = found.to_frame()
    assert frame["group"].tolist() == ["upper", "lower", "all"]
    with pytest.raises(ParameterError, match="between 0 and 3"):
        group_shares(chaos, {"x": [4]})
    with pytest.raises(ParameterError, match="at least one group"):
        group_shares(chaos, {})


def test_tables_of_terms_and_shares():
    u = normals(100, 2)
    chaos = polynomial_chaos(u, np.column_stack([u[:, 0], u[:, 1]]))
    frame = chaos.to_frame()
    assert list(frame.columns) == ["degree_1", "degree_2", "output", "coefficient"]
    assert len(frame) == chaos.coefficients.size
    shares = chaos_shares(chaos).to_frame()
    assert shares.loc[(shares["variable"] == 1) & (shares["output"] == 1), "total"].item() == pytest.approx(
        1.0
    )


def test_pursuit_passes_over_terms_that_say_the_same():
    values = np.random.default_rng(3).standard_normal(60)
    column = np.random.default_rng(4).standard_normal(60)
    table = np.stack([np.ones(60), column, column, 2.0 * column, np.zeros(60), values])
    found = matching_pursuit(table, values + 3.0 * column)
    assert sorted(found.terms.tolist()) in ([0, 1, 5], [0, 2, 5], [0, 3, 5])
    coefficients = least_squares(table[:4], 3.0 * column)
    np.testing.assert_allclose(coefficients, [0.0, 3.0, 0.0, 0.0], atol=1e-12)


def test_values_that_have_nothing_to_do_with_the_points_are_left_to_the_mean():
    """496 terms on 200 points: the best of them always fits a little of noise."""
    kept = 0
    for seed in range(20):
        random = np.random.default_rng(seed)
        chaos = polynomial_chaos(
            random.standard_normal((200, 30)), random.standard_normal(200), candidates=[(2, 1.0, None)]
        )
        kept += len(chaos.indices) - 1
    assert kept <= 4  # one term in five fits; without the count of the terms offered it is dozens a fit


def test_pursuit_ends_where_the_terms_do():
    values = np.random.default_rng(3).standard_normal(30)
    only = matching_pursuit(np.ones((1, 30)), values)
    assert only.coefficients[0] == pytest.approx(values.mean())
    beside = np.stack([np.ones(30), np.ones(30), np.zeros(30)])  # nothing new after the first
    assert matching_pursuit(beside, values).terms.tolist() == [0]


def test_leave_one_out_error_is_that_of_leaving_one_out():
    """The leverages against fits with each point left out, for the terms that were chosen."""
    u = normals(40, 2)
    values = np.exp(u[:, 0]) + 0.3 * u[:, 1]
    table = np.stack([np.ones(40), u[:, 0], u[:, 1], u[:, 0] ** 2 - 1.0])
    found = matching_pursuit(table, values)
    chosen = table[found.terms]
    squares = 0.0
    for row in range(40):
        kept = np.arange(40) != row
        coefficients = np.linalg.lstsq(chosen[:, kept].T, values[kept], rcond=None)[0]
        squares += (values[row] - coefficients @ chosen[:, row]) ** 2
    n, terms = 40, len(found.terms)
    correction = n / (n - terms) * (1.0 + np.trace(np.linalg.inv(chosen @ chosen.T)))
    expected = squares / ((values - values.mean()) ** 2).sum() * correction
    assert found.leave_one_out == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize(
    ("points", "values", "options", "error", "words"),
    [
        (np.zeros((20, 2)), np.zeros(19), {}, ShapeError, "n_output"),
        (np.zeros(20), np.zeros(20), {}, ShapeError, "n_output"),
        (np.zeros((9, 2)), np.zeros(9), {}, ParameterError, "at least 10"),
        (np.zeros((20, 2)), np.full(20, np.nan), {}, ParameterError, "got 0"),
        (normals(20, 2), np.arange(20.0), {"candidates": []}, ParameterError, "at least one set"),
        (normals(20, 2), np.arange(20.0), {"inert": np.zeros(3, dtype=bool)}, ShapeError, "inert"),
        (
            normals(20, 2),
            np.arange(20.0),
            {"held_out": (normals(20, 3), np.arange(20.0))},
            ShapeError,
            "held-out",
        ),
        (normals(2000, 45), np.arange(2000.0), {"candidates": [(3, 1.0, None)]}, ParameterError, "too large"),
    ],
)
def test_what_is_refused(points, values, options, error, words):
    with pytest.raises(error, match=words):
        polynomial_chaos(points, values, **options)


def test_assembly_and_inert_refusals():
    u = normals(60, 2)
    with pytest.raises(ShapeError, match="do not match"):
        assembled_chaos(u, u, u, lambda part: part[:, 0])
    with pytest.raises(ShapeError, match="one value a row"):
        assembled_chaos(u, u, u[:, 0], lambda part: part)
    with pytest.raises(ParameterError, match="at least 1"):
        inert_variables(lambda v: v[:, 0], 2, points=0)


def test_error_of_values_that_do_not_vary():
    constant = np.full((5, 1), 3.0)
    assert relative_squared_error(constant, constant)[0] == 0.0
    assert np.isinf(relative_squared_error(constant + 1.0, constant)[0])
