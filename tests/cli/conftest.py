"""A folder with a scenario, and a calculation that answers at once."""

import json
import sys
from pathlib import Path

import cli_fakes
import pytest

import probsoil.report
from probsoil.scenario import starter_text


@pytest.fixture
def desk(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return the working folder, with a good scenario `site.toml` and a bad one `bad.toml`."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setenv("COLUMNS", "100")
    monkeypatch.setattr("probsoil.cli._output.PLAIN_WIDTH", 400)  # so that no cell is folded
    text = starter_text("embankment")
    (tmp_path / "site.toml").write_text(text, encoding="utf-8")
    (tmp_path / "bad.toml").write_text(
        text.replace("kappa", "kapa").replace("seed = ", "sede = "), encoding="utf-8"
    )
    return tmp_path


@pytest.fixture
def calculation(monkeypatch: pytest.MonkeyPatch) -> cli_fakes.Calculation:
    """Return the stand-in for the calculation, put in its place along with those for the report."""
    fake = cli_fakes.Calculation()

    def write(folder: Path) -> None:
        (folder / "report.html").write_text("<p>report</p>")

    monkeypatch.setitem(sys.modules, "probsoil.assessment", fake)
    monkeypatch.setattr("probsoil.report.page.read_results", lambda path: json.loads(path.read_text()))
    monkeypatch.setattr(probsoil.report, "write_report", write)
    monkeypatch.setattr(
        probsoil.report,
        "write_tables",
        lambda results, folder: (folder / "limits.csv").write_text("name\n"),  # noqa: ARG005
    )
    return fake
