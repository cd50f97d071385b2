"""Standard output that takes no more: a reader that went away, a full disk."""

import io
import os
import subprocess
import sys
from pathlib import Path

import cli_fakes
import pytest

from probsoil.cli import main

ROOT = Path(__file__).parents[2]
FULL = Path("/dev/full")


def program(output: int, *arguments: str) -> tuple[int, str]:
    done = subprocess.run(
        [sys.executable, "-m", "probsoil", *arguments],
        stdout=output,
        stderr=subprocess.PIPE,
        text=True,
        check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )
    return done.returncode, done.stderr


@pytest.mark.skipif(os.name == "nt", reason="POSIX pipes")
@pytest.mark.parametrize("command", ["schema", "check site.toml", "--version"])
def test_reader_that_has_seen_enough_ends_the_program_quietly(desk: Path, command: str) -> None:
    reader, writer = os.pipe()
    os.close(reader)
    words = [str(desk / word) if word.endswith(".toml") else word for word in command.split()]
    code, err = program(writer, *words)
    os.close(writer)
    assert err == ""
    assert code == (1 if command == "--version" else 0)  # the latter is typer's own


@pytest.mark.skipif(not FULL.exists(), reason="needs /dev/full")
@pytest.mark.parametrize("command", ["schema", "check site.toml", "--version", "--help"])
def test_full_disk_is_one_line_of_error(desk: Path, command: str) -> None:
    words = [str(desk / word) if word.endswith(".toml") else word for word in command.split()]
    with FULL.open("w") as output:
        code, err = program(output.fileno(), *words)
    assert code == 1
    assert err == "Error: the answer cannot be written to standard output: No space left on device\n"


class Gone:
    """An output whose reader is gone."""

    encoding = "utf-8"

    def isatty(self) -> bool:
        return False

    def write(self, text: str) -> int:  # noqa: ARG002
        raise BrokenPipeError

    def fileno(self) -> int:
        raise io.UnsupportedOperation

    def flush(self) -> None:
        """Do nothing: nothing was written."""


@pytest.mark.parametrize("options", [[], ["--json"]])
def test_results_are_safe_and_the_log_clean_where_nobody_reads_the_answer(
    desk: Path,
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    options: list[str],
) -> None:
    monkeypatch.setattr(sys, "stdout", Gone())
    assert main(["assess", "site.toml", *options]) == 0
    assert capsys.readouterr().err == ""
    log = (desk / "results" / "site" / "log.txt").read_text()
    assert "Traceback" not in log
    assert log.rstrip().endswith("done")
    assert (desk / "results" / "site" / "report.html").exists()
