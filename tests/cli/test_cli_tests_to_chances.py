"""From test sheets to exceedance probabilities in two commands, as the README says it of the demo."""

import json
import re
import shutil
from pathlib import Path

import pytest

from probsoil.cli import main

ROOT = Path(__file__).parents[2]


def commands() -> list[list[str]]:
    """Return the two commands of the README, without the name of the program."""
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    block = re.search(r"<!-- sheets to chances -->\n```bash\n(.*?)```", text, re.DOTALL)
    assert block is not None
    lines = block[1].replace("\\\n", " ").splitlines()
    return [line.split()[1:] for line in lines if line]


@pytest.fixture
def desk(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    shutil.copytree(
        ROOT / "scenarios", tmp_path / "scenarios", ignore=shutil.ignore_patterns("interpreted", "results")
    )
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_a_scenario_says_that_its_tests_are_still_to_be_interpreted(
    desk: Path,  # noqa: ARG001
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert main(["check", "scenarios/tern_marsh/tern_marsh.toml"]) == 2
    said = " ".join(capsys.readouterr().err.split())
    assert "there is no file interpreted/evidence.csv" in said
    assert "probsoil interpret writes one from test sheets" in said


@pytest.mark.slow
def test_two_commands_lead_from_sheets_to_probabilities(
    desk: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    first, second = commands()
    assert (first[0], second[0]) == ("interpret", "assess")
    assert main(first) == 0
    assert main([*second, "--realisations", "2000", "--workers", "1"]) == 0
    capsys.readouterr()
    results = json.loads((desk / "results/tern_marsh/results.json").read_text(encoding="utf-8"))
    assert {limit["name"] for limit in results["limits"]} >= {"slip while filling"}
    assert all(0.0 <= limit["probability"] <= 1.0 for limit in results["limits"])
    assert main(first) == 0  # an interpretation may be made again
    assert main(["check", first[first.index("--layers") + 1]]) == 0
