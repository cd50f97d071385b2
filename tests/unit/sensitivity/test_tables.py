"""Drivers of any sample and any function, tables in and tables out."""

import doctest
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from scipy import stats

import probsoil.sensitivity.tables as module
from probsoil.errors import ParameterError, ShapeError
from probsoil.sensitivity import LimitOn, driver_sums, drivers, function_drivers, sample_drivers

NAMES = ["compression", "thickness", "crust"]
CORRELATION = pd.DataFrame([[1.0, 0.5, 0.0], [0.5, 1.0, 0.0], [0.0, 0.0, 1.0]], index=NAMES, columns=NAMES)
LAWS = {
    "compression": stats.lognorm(0.3, scale=0.4),
    "thickness": stats.norm(6.0, 0.5),
    "crust": stats.uniform(1.0, 2.0),
}
LIMIT = LimitOn(threshold=3.6, groups={"clay": ["compression", "thickness"], "crust": ["crust"]})


def settlement(soil):
    return soil["compression"] * soil["thickness"]


def sample(n=4000, seed=1):
    z = np.random.default_rng(seed).standard_normal((n, 3)) @ np.linalg.cholesky(CORRELATION).T
    soil = pd.DataFrame({name: LAWS[name].ppf(stats.norm.cdf(z[:, i])) for i, name in enumerate(NAMES)})
    return z, soil


def test_examples_of_the_documentation():
    found = doctest.testmod(module)
    assert found.attempted >= 8
    assert found.failed == 0


def test_example_of_the_theory_page(capsys):
    page = Path(__file__).parents[3] / "docs" / "theory" / "drivers.md"
    exec(page.read_text(encoding="utf-8").split("```python\n")[1].split("```")[0], {})
    printed = capsys.readouterr().out
    assert "modulus" in printed.splitlines()[1]
    assert "difference_low" in printed


def test_sample_with_known_laws_is_what_the_arrays_give():
    z, soil = sample()
    found = sample_drivers(
        soil,
        settlement(soil),
        LIMIT,
        correlation=CORRELATION.loc[NAMES[::-1], NAMES[::-1]],  # by name, not by place
        laws={name: law.cdf for name, law in LAWS.items()},
    )
    flag = settlement(soil).to_numpy() > 3.6
    matrix = CORRELATION.to_numpy()
    sums = driver_sums(z, np.linalg.inv(matrix), settlement(soil).to_numpy(), flag)
    expected = drivers(sums, matrix, NAMES).to_frame()
    pd.testing.assert_frame_equal(found.drivers, expected, rtol=1e-6)
    assert found.probability == flag.mean()
    assert found.groups["group"].tolist() == ["clay", "crust"]
    assert found.groups["share"].sum() == pytest.approx(1.0)
    assert found.profile["parameter"].tolist() == NAMES


def test_sample_alone_by_ranks_and_its_own_correlation():
    _, soil = sample()
    found = sample_drivers(
        soil.set_index(np.arange(4000) + 7), settlement(soil).set_axis(np.arange(4000) + 7), LIMIT
    )
    # Bonferroni over three pairs leaves independent ones at exactly zero
    assert found.correlation.loc["crust", "compression"] == 0.0
    # s.e. of a correlation of 0.5 from 4,000: 0.75/63 = 0.012
    assert found.correlation.loc["compression", "thickness"] == pytest.approx(0.5, abs=0.05)
    known = sample_drivers(soil, settlement(soil), LIMIT, correlation=CORRELATION).drivers
    merged = found.drivers.merge(known, on="parameter")
    width = known["spread_elasticity_high"] - known["spread_elasticity_low"]
    gap = (merged["spread_elasticity_x"] - merged["spread_elasticity_y"]).abs()
    assert (gap < width.max()).all()
    assert found.drivers["parameter"].tolist()[0] == "compression"
    assert found.drivers.set_index("parameter").loc["crust", "rank"] is pd.NA


def test_function_of_dependent_parameters():
    found = function_drivers(settlement, LAWS, LIMIT, correlation=CORRELATION, draws=(5000, 3))
    assert found.sample.drivers["parameter"].tolist()[0] == "compression"
    assert found.shapley["share"].sum() == pytest.approx(1.0)
    assert found.shapley.set_index("name").loc["crust", "share"] == pytest.approx(0.0, abs=1e-3)
    assert found.halved["name"].tolist()[0] == "compression"
    assert (found.halved["difference"][:2] < 0.0).all()
    assert found.at_values["change"].tolist()[:2] == ["at its 10 % value", "at its 90 % value"]
    again = function_drivers(settlement, LAWS, LIMIT, correlation=CORRELATION, draws=(5000, 3))
    pd.testing.assert_frame_equal(found.halved, again.halved)


def test_function_that_no_chaos_follows_says_so():
    found = function_drivers(
        lambda soil: np.sign(np.sin(30.0 * soil["a"]) * np.sin(30.0 * soil["b"])),
        {"a": stats.norm(), "b": stats.norm()},
        LimitOn(threshold=0.5),
        draws=(1000, 1),
        others="follow",
    )
    assert found.shapley["share"].isna().all()
    assert any("no shares" in note and "unexplained" in note for note in found.notes)
    assert set(found.halved["others"]) == {"follow"}


def test_correlation_of_which_little_is_left_out_stays_positive():
    """Leaving the weakest pair of a chain out would break it, so all pairs stay."""
    random = np.random.default_rng(6)
    common = random.standard_normal((60, 1))
    noise = random.standard_normal((60, 3))
    soil = pd.DataFrame(common * [1.0, 1.0, 0.35] + noise * [0.3, 0.3, 1.0], columns=list("abc"))
    found = sample_drivers(soil, soil["a"], LimitOn(threshold=0.0))
    assert np.linalg.eigvalsh(found.correlation)[0] > 0.0


def test_wrong_arguments():
    _, soil = sample(50)
    value = settlement(soil)
    with pytest.raises(ShapeError, match="same index"):
        sample_drivers(soil, value.iloc[1:], LIMIT)
    with pytest.raises(ParameterError, match="'crust' must be finite and must vary"):
        sample_drivers(soil.assign(crust=1.0), value, LIMIT)
    with pytest.raises(ParameterError, match="do not exist: sand"):
        sample_drivers(soil, value, LimitOn(threshold=1.0, groups={"x": ["sand"]}))
    with pytest.raises(ParameterError, match="level 0 or 1"):
        sample_drivers(soil, value, LIMIT, laws={"crust": lambda x: np.where(x > 2.0, 1.0, 0.5)})
    with pytest.raises(ShapeError, match="index and columns"):
        sample_drivers(soil, value, LIMIT, correlation=CORRELATION.iloc[:2, :2])
    with pytest.raises(ParameterError, match="symmetric with ones"):
        sample_drivers(soil, value, LIMIT, correlation=2.0 * CORRELATION)
    with pytest.raises(ParameterError, match="not positive definite"):
        sample_drivers(soil.assign(thickness=soil["compression"]), value, LIMIT)
    with pytest.raises(ParameterError, match="at least one parameter"):
        function_drivers(settlement, {}, LIMIT)
