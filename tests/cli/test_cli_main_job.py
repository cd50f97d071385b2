"""The whole program as a user runs it, the real calculation included, at few realisations."""

import csv
import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from probsoil.assessment.results_folder import FILES, OCCASIONAL
from probsoil.cli import main
from probsoil.cli._output import PLAIN_WIDTH

ROOT = Path(__file__).parents[2]
FEW = ["--realisations", "300"]


def read(folder: Path) -> dict[str, Any]:
    found: dict[str, Any] = json.loads((folder / "results.json").read_text(encoding="utf-8"))
    return found


def numbers(results: dict[str, Any]) -> dict[str, Any]:
    """Return all of a result but how and when it came about."""
    return {key: value for key, value in results.items() if key != "provenance"}


@pytest.fixture(scope="module")
def run(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, subprocess.CompletedProcess[str]]:
    """Run the starter scenario once, in a process of its own."""
    folder = tmp_path_factory.mktemp("job")
    assert main(["new", str(folder / "site.toml")]) == 0
    done = program(folder, "assess", "site.toml", *FEW, "--workers", "2")
    return folder, done


def program(folder: Path, *arguments: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "probsoil", *arguments],
        capture_output=True,
        text=True,
        encoding="utf-8",
        check=False,
        cwd=folder,
        env={**os.environ, "PYTHONPATH": str(ROOT), "PYTHONIOENCODING": "utf-8"},
    )


def test_run_leaves_everything_it_promises(run: tuple[Path, subprocess.CompletedProcess[str]]) -> None:
    folder, done = run
    assert done.returncode == 0, done.stderr
    out = folder / "results" / "site"
    names = {path.name for path in out.iterdir()}
    tables = {"limits.csv", "drivers.csv", "settlement.csv", "parameters.csv"}
    assert tables | {"results.json", "realisations.npz", "report.html", "scenario.toml", "log.txt"} <= names
    written = ({*FILES} - {*OCCASIONAL}) | {
        "together.csv"
    }  # it has several limits and nothing else occasional
    assert names == {*written, "figures", "log.txt"}  # what a run may overwrite is all that it writes
    assert list((out / "figures").glob("*.svg"))
    assert (out / "scenario.toml").read_bytes() == (folder / "site.toml").read_bytes()
    results = read(out)
    assert results["realisations"] == 300
    assert results["provenance"]["workers"] == 2
    assert results["provenance"]["command"] == "probsoil assess site.toml --realisations 300 --workers 2"
    with (out / "limits.csv").open(encoding="utf-8") as stream:
        assert len(list(csv.DictReader(stream))) == len(results["limits"])
    assert "Report: " in done.stdout
    for limit in results["limits"]:
        assert limit["name"].split()[0] in done.stdout
    assert max(map(len, done.stdout.splitlines())) <= PLAIN_WIDTH


def test_json_on_standard_output_is_the_file(
    run: tuple[Path, subprocess.CompletedProcess[str]], capsys: pytest.CaptureFixture[str]
) -> None:
    folder, _ = run
    capsys.readouterr()
    line = [
        "assess",
        str(folder / "site.toml"),
        "--out",
        str(folder / "again"),
        *FEW,
        "--json",
        "--workers",
        "1",
    ]
    assert main(line) == 0
    printed = json.loads(capsys.readouterr().out)
    assert printed == read(folder / "again")
    # and for one worker the numbers are those of two
    assert numbers(printed) == numbers(read(folder / "results" / "site"))


def test_report_is_the_same_when_written_again(run: tuple[Path, subprocess.CompletedProcess[str]]) -> None:
    folder, _ = run
    page = folder / "results" / "site" / "report.html"
    before = page.read_bytes()
    page.unlink()
    assert main(["report", str(folder / "results" / "site")]) == 0
    assert page.read_bytes() == before


def test_sheet_as_text_json_and_csv_tell_the_same(
    run: tuple[Path, subprocess.CompletedProcess[str]], capsys: pytest.CaptureFixture[str]
) -> None:
    folder, _ = run
    capsys.readouterr()
    assert main(["sheet", str(folder / "site.toml"), "--json"]) == 0
    sheet = json.loads(capsys.readouterr().out)
    assert main(["sheet", str(folder / "site.toml")]) == 0
    text = capsys.readouterr().out
    assert main(["sheet", str(folder / "site.toml"), "--csv"]) == 0
    first = capsys.readouterr().out.partition("\n\n")[0].splitlines()
    assert first[0] == "layers"
    rows = list(csv.DictReader(first[1:]))
    assert [row["layer"] for row in rows] == [layer["name"] for layer in sheet["layers"]]
    for row, layer in zip(rows, sheet["layers"], strict=True):
        assert float(row["settlement [m]"]) == layer["settlement"]
        assert layer["name"] in text
    assert f"{sheet['final_settlement']:.3f} m" in text
    for stage, safety in sheet["slip_safety"].items():
        assert stage in text
        assert f"{safety:.2f}" in text


@pytest.mark.parametrize("out", ["site.toml", "site.toml/below"])
def test_folder_that_cannot_be_written_fails_before_any_work(
    run: tuple[Path, subprocess.CompletedProcess[str]], capsys: pytest.CaptureFixture[str], out: str
) -> None:
    folder, _ = run
    began = time.monotonic()
    assert (
        main(["assess", str(folder / "site.toml"), "--out", str(folder / out), "--realisations", "1000000"])
        == 1
    )
    assert time.monotonic() - began < 60  # a million realisations take far longer
    captured = capsys.readouterr()
    assert captured.out == ""
    assert captured.err.startswith("Error: folder '")
    assert "is a file, not a folder" in captured.err


LINE = ["assess", "site.toml", "--realisations", "6000", "--workers", "1", "--out"]


@pytest.fixture(scope="module")
def stopped(
    run: tuple[Path, subprocess.CompletedProcess[str]],
) -> tuple[Path, subprocess.CompletedProcess[str]]:
    """Interrupt a run after its first chunk; return the folder, and how a second run meanwhile ended."""
    folder, _ = run
    process = subprocess.Popen(
        [sys.executable, "-m", "probsoil", *LINE, "stopped", "--quiet"],
        cwd=folder,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
    try:
        deadline = time.monotonic() + 120
        while not list((folder / "stopped" / "chunks").glob("chunk-*.npz")):
            assert process.poll() is None, "ended before it could be interrupted"
            assert time.monotonic() < deadline
            time.sleep(0.02)
        process.send_signal(signal.SIGSTOP)  # so that it is still at work when the second one comes
        before = contents(folder / "stopped")
        second = program(folder, *LINE, "stopped", "--quiet")
        assert contents(folder / "stopped") == before
        assert f"another run is at work in 'stopped' (process {process.pid} on this machine" in second.stderr
        assert second.returncode == 1
        process.send_signal(signal.SIGTERM)
        process.send_signal(signal.SIGCONT)
        out, err = process.communicate(timeout=120)
    finally:
        process.kill()
        process.communicate()
    return folder, subprocess.CompletedProcess(process.args, process.returncode, out, err)


def contents(folder: Path) -> dict[str, bytes]:
    return {str(path.relative_to(folder)): path.read_bytes() for path in folder.rglob("*") if path.is_file()}


needs_signals = pytest.mark.skipif(os.name == "nt", reason="POSIX signals")


@pytest.mark.slow
@needs_signals
def test_interrupted_run_says_what_it_keeps(stopped: tuple[Path, subprocess.CompletedProcess[str]]) -> None:
    folder, done = stopped
    assert done.returncode == 3, done.stderr
    assert done.stdout == ""
    assert done.stderr.startswith("stopped early after ")
    assert "run the same again" in done.stderr
    assert "Traceback" not in done.stderr
    assert not (folder / "stopped" / "run.lock").exists()
    assert not (folder / "stopped" / "results.json").exists()
    assert "stopped early" in (folder / "stopped" / "log.txt").read_text(encoding="utf-8")


@pytest.mark.slow
@needs_signals
@pytest.mark.parametrize("option", [[], ["--resume"]])
def test_interrupted_run_is_not_mixed_with_another(
    stopped: tuple[Path, subprocess.CompletedProcess[str]], option: list[str]
) -> None:
    folder, _ = stopped
    before = contents(folder / "stopped" / "chunks")
    other = program(folder, *LINE, "stopped", "--quiet", "--seed", "99", *option)
    assert other.returncode == 2
    assert "  seed was 1, is 99\n" in other.stderr
    assert "--force" in other.stderr
    assert contents(folder / "stopped" / "chunks") == before


@pytest.mark.slow
@needs_signals
def test_interrupted_run_is_gone_on_from_to_the_same_numbers(
    stopped: tuple[Path, subprocess.CompletedProcess[str]],
) -> None:
    folder, _ = stopped
    kept = len(list((folder / "stopped" / "chunks").glob("chunk-*.npz")))
    assert program(folder, *LINE, "whole", "--resume").returncode == 2  # nothing to go on from
    again = program(folder, *LINE, "stopped")
    assert again.returncode == 0
    assert f"Going on from {kept} of 6 chunks that are finished" in again.stderr
    assert program(folder, *LINE, "whole", "--quiet").returncode == 0
    assert numbers(read(folder / "stopped")) == numbers(read(folder / "whole"))
    with (
        np.load(folder / "stopped" / "realisations.npz") as one,
        np.load(folder / "whole" / "realisations.npz") as two,
    ):
        assert one.files == two.files
        for name in one.files:
            assert one[name].tobytes() == two[name].tobytes()


def test_sheet_as_a_page(
    run: tuple[Path, subprocess.CompletedProcess[str]], capsys: pytest.CaptureFixture[str]
) -> None:
    folder, _ = run
    page = folder / "sheet.html"
    capsys.readouterr()
    assert main(["sheet", str(folder / "site.toml"), "--page", str(page)]) == 0
    assert capsys.readouterr().out == f"Wrote {page}\n"
    assert page.read_text(encoding="utf-8").startswith("<!DOCTYPE html>")
    assert main(["sheet", str(folder / "site.toml"), "--json", "--page", str(page)]) == 0
    assert json.loads(capsys.readouterr().out)["sublayers"]
    assert main(["sheet", str(folder / "site.toml"), "--page", str(folder / "none" / "sheet.html")]) == 1
    assert "the sheet cannot be written" in capsys.readouterr().err
