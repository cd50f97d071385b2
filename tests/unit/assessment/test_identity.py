"""A campaign is told from every other, and what differs is told in the words of the file."""

from pathlib import Path
from typing import Any

import pytest

import probsoil.assessment.identity as identities
from probsoil.assessment import assess
from probsoil.assessment.evaluation import Study, prepare
from probsoil.assessment.identity import identity_of, stated_values
from probsoil.campaign import open_store
from probsoil.campaign.identity import differences
from probsoil.errors import UnfitFolderError
from probsoil.scenario import Scenario, parse_scenario, starter_text


def test_values_stand_where_a_reader_of_the_file_looks_for_them(scenario: Scenario) -> None:
    values = stated_values(scenario)
    assert values["load.crest_width"] == 8.0
    assert values["seed"] == 5
    assert values['stage "fill": height'] == 1.8
    assert values['layer "clay": lambda.dist'] == "lognormal"
    assert values['layer "clay": thickness.mean'] == 4.0
    assert values['layer "sand": constrained_modulus'] == 20_000.0
    assert values["order of layers"] == "clay, sand"
    assert not any("Cc" in place for place in values)  # not given


def test_no_value_of_a_scenario_is_lost() -> None:
    """Each entry of the file, changed by itself, changes what is stated."""
    text = starter_text("embankment")
    base = stated_values(parse_scenario(text))
    changed = {
        "seed = 1 ": "seed = 2 ",
        "crest_width = 12.0": "crest_width = 12.5",
        "mean = 0.36, cov = 0.12": "mean = 0.36, cov = 0.13",
        "vertical_scale = 1.5": "vertical_scale = 1.6",
        "rank_correlation = 0.6": "rank_correlation = 0.61",
        'name = "sand"': 'name = "gravel"',
        "submergence = true": "submergence = false",
        '"105 weeks", "30 years"': '"105 weeks", "29 years"',
        "not_less_than = 0.80": "not_less_than = 0.81",
    }
    for old, new in changed.items():
        assert old in text
        assert stated_values(parse_scenario(text.replace(old, new, 1))) != base, old


def test_layers_in_another_order_are_another_campaign(scenario: Scenario) -> None:
    turned = scenario.model_copy(update={"layers": scenario.layers[::-1]})
    assert stated_values(turned) != stated_values(scenario)


class Lesser:
    """What of a study its identity is found from."""

    def __init__(self, scenario: Scenario, n: int) -> None:
        self.scenario = scenario
        self.points = type("Points", (), {"n": n})()


def test_differences_are_told_in_words(scenario: Scenario, monkeypatch: pytest.MonkeyPatch) -> None:
    first: Any = Lesser(scenario, 2048)
    load = scenario.load.model_copy(update={"crest_width": 8.5})
    other: Any = Lesser(scenario.model_copy(update={"seed": 9, "load": load}), 2048)
    before = identity_of(first).to_dict()
    monkeypatch.setattr(identities, "source_digest", lambda: "of other code")
    assert differences(before, identity_of(other)) == [
        "seed was 5, is 9",
        "load.crest_width was 8.0, is 8.5",
        "the program's own code has changed",
    ]


def stopped(scenario: Scenario, folder: Path) -> None:
    """Leave what a run that finished one chunk leaves."""
    study: Study = prepare(scenario)
    store = open_store(folder / "chunks", identity=identity_of(study), n_chunks=study.points.n_chunks)
    store.write(0, dict(study(0)))


def test_chunks_of_other_code_of_the_same_version_are_refused(
    scenario: Scenario, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    stopped(scenario, tmp_path)
    monkeypatch.setattr(identities, "source_digest", lambda: "of other code")
    with pytest.raises(UnfitFolderError, match="the program's own code has changed"):
        assess(scenario, out=tmp_path, workers=1)
    assert (tmp_path / "chunks" / "chunk-000000.npz").exists()
    assert not (tmp_path / "results.json").exists()
    assert assess(scenario, out=tmp_path, workers=1, force=True).results["realisations"] == 2048
    assert not (tmp_path / "chunks").exists()


def test_rounding_up_is_told_before_the_work_begins(
    scenario: Scenario, tmp_path: Path, caplog: pytest.LogCaptureFixture
) -> None:
    caplog.set_level("INFO", "probsoil")
    with pytest.raises(
        UnfitFolderError, match="no finished chunks to go on from"
    ):  # so that nothing is computed
        assess(scenario, out=tmp_path, realisations=20_000, draws="sobol", resume=True)
    assert (
        "20,000 realisations asked, 32,768 drawn: sobol takes 16 equal sets, each a power of two"
        in caplog.text
    )
    caplog.clear()
    with pytest.raises(UnfitFolderError, match="no finished chunks to go on from"):
        assess(scenario, out=tmp_path, realisations=20_000, resume=True)
    assert "drawn" not in caplog.text


def test_long_lists_of_values_are_told_apart_by_a_digest() -> None:
    text = starter_text("embankment")
    old = 'kappa = { dist = "lognormal", mean = 0.05, cov = 0.20 }'
    assert old in text

    def stated(values: list[float]) -> object:
        new = f'kappa = {{ dist = "empirical", values = {values} }}'
        return stated_values(parse_scenario(text.replace(old, new)))['layer "soft clay": kappa.values']

    assert stated([0.04, 0.05]) == (0.04, 0.05)
    many = [0.04 + 0.001 * i for i in range(20)]
    assert str(stated(many)).startswith("20 values of digest ")
    assert stated(many) != stated([*many[:-1], 0.0591])
