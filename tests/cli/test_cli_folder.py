"""What `probsoil assess` does with a folder that is in use, half done, blocked, or somebody's own."""

import json
import logging
import os
import signal
from collections.abc import Callable
from pathlib import Path

import cli_fakes
import pytest

import probsoil.report
from probsoil.campaign import LOCK, NOTICE, campaign_identity, locked_folder, open_store
from probsoil.cli import main


def contents(folder: Path) -> dict[str, bytes | None]:
    return {
        str(path.relative_to(folder)): None if path.is_dir() else path.read_bytes()
        for path in folder.rglob("*")
    }


def keep_chunks(folder: Path, count: int) -> None:
    """Leave what an interrupted run leaves."""
    store = open_store(folder / "chunks", identity=campaign_identity({"seed": 1}), n_chunks=9)
    for index in range(count):
        store.write(index, {})


def test_folder_that_another_run_holds_is_refused_and_not_touched(
    desk: Path,
    calculation: cli_fakes.Calculation,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    with locked_folder(desk / "out"):
        monkeypatch.setattr("threading.get_ident", lambda: -1)  # as if this were another run
        before = contents(desk)
        assert main(["assess", "site.toml", "--out", "out"]) == 1
        assert main(["report", "out"]) == 1
        assert contents(desk) == before
    err = capsys.readouterr().err
    assert err.count("Error: another run is at work in 'out'") == 2
    assert f"delete '{Path('out', LOCK)}'" in err
    assert calculation.calls == []


def test_folder_is_held_until_the_report_is_written_and_then_let_go(
    desk: Path, calculation: cli_fakes.Calculation, monkeypatch: pytest.MonkeyPatch
) -> None:
    held = []

    def write(folder: Path) -> None:
        held.append((folder / LOCK).exists())

    calculation.ending = lambda: held.append((desk / "out" / LOCK).exists())
    monkeypatch.setattr(probsoil.report, "write_report", write)
    assert main(["assess", "site.toml", "--out", "out", "--quiet"]) == 0
    assert held == [True, True]
    assert not (desk / "out" / LOCK).exists()


@pytest.mark.parametrize(
    "name", ["report.html", "limits.csv", "results.json", "scenario.toml", "figures/a.svg"]
)
def test_files_of_others_are_not_overwritten_unless_forced(
    desk: Path, calculation: cli_fakes.Calculation, capsys: pytest.CaptureFixture[str], name: str
) -> None:
    path = desk / "mine" / name
    path.parent.mkdir(parents=True)
    path.write_text("a year of work")
    before = contents(desk)
    assert main(["assess", "site.toml", "--out", "mine"]) == 2
    err = capsys.readouterr().err
    assert f"'{Path('mine', name)}'" in err
    assert "--force" in err
    assert contents(desk) == before
    assert calculation.calls == []
    assert main(["assess", "site.toml", "--out", "mine", "--force", "--quiet"]) == 0


def test_folder_with_other_files_or_with_the_scenario_itself_is_welcome(
    desk: Path,
    calculation: cli_fakes.Calculation,  # noqa: ARG001
) -> None:
    (desk / "work").mkdir()
    (desk / "work" / "notes.txt").write_text("mine")
    (desk / "site.toml").rename(desk / "work" / "scenario.toml")
    assert main(["assess", "work/scenario.toml", "--out", "work", "--quiet"]) == 0
    assert (desk / "work" / "notes.txt").read_text() == "mine"


def test_results_and_chunks_of_earlier_runs_make_a_folder_ours(
    desk: Path,
    calculation: cli_fakes.Calculation,  # noqa: ARG001
) -> None:
    for _ in range(2):
        assert main(["assess", "site.toml", "--out", "done", "--quiet"]) == 0
    keep_chunks(desk / "begun", 1)
    (desk / "begun" / "report.html").write_text("of the run before")
    assert main(["assess", "site.toml", "--out", "begun", "--quiet"]) == 0


@pytest.mark.parametrize(
    ("name", "is_folder"),
    [("results.json", True), ("report.html", True), ("log.txt", True), ("figures", False), ("chunks", False)],
)
@pytest.mark.parametrize("force", [[], ["--force"]])
def test_what_blocks_the_results_is_found_before_anything_is_computed(
    desk: Path,
    calculation: cli_fakes.Calculation,
    capsys: pytest.CaptureFixture[str],
    name: str,
    is_folder: bool,
    force: list[str],
) -> None:
    (desk / "out").mkdir()
    (desk / "out" / name).mkdir() if is_folder else (desk / "out" / name).write_text("")
    before = contents(desk)
    assert main(["assess", "site.toml", "--out", "out", *force]) == 1
    err = capsys.readouterr().err
    assert f"Error: '{Path('out', name)}' is a {'folder' if is_folder else 'file'}" in err
    assert contents(desk) == before
    assert calculation.calls == []


def test_notices_are_told_unless_quiet(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,
    capsys: pytest.CaptureFixture[str],
) -> None:
    calculation.ending = lambda: logging.getLogger("probsoil.campaign").log(NOTICE, "Going on from 3")
    assert main(["assess", "site.toml", "--json"]) == 0
    out, err = capsys.readouterr()
    assert json.loads(out)
    assert err == "Going on from 3\n"
    assert main(["assess", "site.toml", "--quiet"]) == 0
    assert capsys.readouterr() == ("", "")


def interrupt() -> None:
    raise KeyboardInterrupt


def wrapped_interrupt() -> None:
    try:
        interrupt()
    except KeyboardInterrupt as fault:
        raise RuntimeError("no compiled object yet") from fault


def terminate() -> None:
    os.kill(os.getpid(), signal.SIGTERM)
    signal.pause()


@pytest.mark.parametrize("ending", [interrupt, wrapped_interrupt, terminate])
@pytest.mark.parametrize(("kept", "code"), [(0, 1), (1, 3), (4, 3)])
def test_interrupt_during_the_calculation_says_what_is_kept(
    desk: Path,
    calculation: cli_fakes.Calculation,
    capsys: pytest.CaptureFixture[str],
    ending: Callable[[], None],
    kept: int,
    code: int,
) -> None:
    keep_chunks(desk / "out", kept)
    (desk / "out" / "results.json").write_text(json.dumps(cli_fakes.results()))  # of an earlier run
    calculation.ending = ending
    assert main(["assess", "site.toml", "--out", "out", "--quiet"]) == code
    out, err = capsys.readouterr()
    assert out == ""
    if kept:
        chunks = "1 finished chunk is" if kept == 1 else "4 finished chunks are"
        assert err == (
            f"Interrupted; {chunks} kept in '{Path('out', 'chunks')}': run the same again to go on "
            "from there.\n"
        )
    else:
        assert err == "Interrupted before any realisation was finished; nothing is kept.\n"
    log = (desk / "out" / "log.txt").read_text()
    assert "ended: " in log
    assert "Traceback" not in log
    assert not (desk / "out" / LOCK).exists()


def test_interrupt_while_the_report_is_written_keeps_the_results_and_says_how_to_go_on(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setattr(probsoil.report, "write_report", lambda folder: interrupt())  # noqa: ARG005
    assert main(["assess", "site.toml", "--out", "a b", "--quiet"]) == 3
    err = capsys.readouterr().err
    assert "Interrupted after the last realisation; the results are kept in 'a b'" in err
    assert "probsoil report 'a b'" in err


def test_interrupt_before_anything_began_leaves_nothing(
    desk: Path,
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setattr("probsoil.scenario.read_scenario", lambda file: interrupt())  # noqa: ARG005
    before = contents(desk)
    assert main(["assess", "site.toml", "--out", "out"]) == 1
    assert capsys.readouterr().err == "Interrupted before any realisation was finished; nothing is kept.\n"
    assert contents(desk) == before


@pytest.mark.parametrize("command", ["check", "sheet"])
def test_interrupt_of_another_command_has_a_message(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    command: str,
) -> None:
    monkeypatch.setattr("probsoil.scenario.read_scenario", lambda file: interrupt())  # noqa: ARG005
    assert main([command, "site.toml"]) == 1
    assert capsys.readouterr() == ("", "Interrupted; nothing is kept.\n")
