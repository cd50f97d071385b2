"""Water that is not at rest and undrained distortion, from the scenario to the report and the sheet."""

import re
from pathlib import Path

import numpy as np
import pytest

from probsoil.assessment import assess, sheet
from probsoil.assessment.statements import assumptions
from probsoil.cli import main
from probsoil.ground.site_model import site_model
from probsoil.report import render_report
from probsoil.scenario import Scenario, parse_scenario, starter_text

N = 256
HEAD = 'head = { dist = "normal", mean = -3.0, sd = 0.8 }\n'
EXCESS = 'initial_excess = { pressure = { dist = "lognormal", mean = 4, cov = 0.3 } }\n'


def artesian(*, excess: str = "") -> str:
    """The starter of an embankment with artesian water in its sand, or none, and clay still consolidating."""
    text = re.sub(r"realisations = \d+", f"realisations = {N}", starter_text("embankment"))
    sand, clay = 'soil = "granular"', 'soil = "clay"'
    head, _, rest = text.partition(sand)
    assert rest
    before, _, last_clay = head.rpartition(clay)
    head = f"{before}{clay}\n{excess}{last_clay.lstrip(' ')}" if excess else head
    comment, _, rest = rest.partition("\n")
    return f"{head}{sand}{comment}\n{HEAD}{rest}"


@pytest.fixture(scope="module")
def results() -> dict:
    return assess(parse_scenario(artesian(excess=EXCESS)), workers=1).results


def words(results: dict) -> str:
    return " ".join(re.sub(r"<[^>]+>", " ", render_report(results)).split())


def test_uplift_is_counted_and_said(results: dict) -> None:
    rows = {row["code"]: row for row in results["warnings"]}
    assert 0.0 < rows["uplift"]["share"] < 1.0
    assert "no less than the weight of the ground" in words(results)


def test_levels_and_excess_are_parameters_like_any_other(results: dict) -> None:
    names = {row["name"] for row in results["parameters"]}
    assert len([name for name in names if name.endswith((".head", ".initial_excess"))]) == 2
    said = " ".join(results["assumptions"])
    assert "seeps steadily" in said
    assert "has not finished consolidating" in said
    assert results["ground"]["base_head"] is None


def test_settlement_counts_from_the_start(results: dict) -> None:
    early = next(mean for time, mean in zip(*parts(results), strict=True) if time > 0.0)
    assert early > 0.0


def parts(results: dict) -> tuple[list[float], list[float]]:
    return results["settlement"]["times"], results["settlement"]["mean"]


@pytest.fixture(scope="module")
def footing() -> Scenario:
    text = re.sub(r"realisations = \d+", f"realisations = {N}", starter_text("footing"))
    head, clay, rest = text.rpartition('soil = "clay"\n')
    modulus = 'undrained_modulus = { ratio = { dist = "lognormal", mean = 300, cov = 0.4 } }\n'
    return parse_scenario(f"{head}{clay}{modulus}{rest}")


def test_distortion_is_a_part_of_every_settlement_limit(footing: Scenario) -> None:
    found = assess(footing, workers=1)
    for place, (limit, row) in enumerate(zip(footing.limits, found.results["limits"], strict=True)):
        if limit.quantity != "settlement":
            assert row["distortion_mean"] is None
            assert np.isnan(found.sample.distortion[:, place]).all()
            continue
        assert row["distortion_mean"] == pytest.approx(found.sample.distortion[:, place].mean())
        assert row["distortion_share"] is None or 0.0 <= row["distortion_share"] < 1.0
    assert any(row["distortion_mean"] for row in found.results["limits"])
    page = words(found.results)
    assert "Undrained distortion in it" in page
    assert "distortion at constant volume" in page


def test_nothing_is_said_of_what_is_not_computed() -> None:
    scenario = parse_scenario(re.sub(r"realisations = \d+", f"realisations = {N}", starter_text("footing")))
    found = assess(scenario, workers=1)
    assert found.sample.distortion.size == 0
    assert {row["distortion_mean"] for row in found.results["limits"]} == {None}
    said = " ".join(assumptions(site_model(scenario)))
    assert "no settlement from shear distortion" in said
    assert "seeps steadily" not in said
    assert "Undrained distortion in it" not in words(found.results)


def test_sheet_names_every_table() -> None:
    content = sheet(parse_scenario(artesian(excess=EXCESS))).to_dict()
    assert [row["layer"] for row in content["seepage"]] == [row["name"] for row in content["layers"]]
    names = {line["name"] for line in content["formulas"]}
    assert {"pore pressure in seepage", "level of water"} <= names


def test_check_prints_the_level_below(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = starter_text("tank").replace('base = "drained"', 'base = "drained"\nbase_head = "20 cm"')
    assert "base_head" in text
    path = tmp_path / "tank.toml"
    path.write_text(text, encoding="utf-8")
    assert main(["check", str(path)]) == 0
    said = " ".join(capsys.readouterr().out.split())
    assert "water there at 0.20 m (mean)" in said
    assert "site.base_head" in said
