"""Progress is on standard error: a bar on a terminal, seldom a line elsewhere, nothing when quiet."""

import os
import pty
import sys
from collections.abc import Iterator
from contextlib import suppress

import pytest

from probsoil.cli._progress import plain_lines, shown_progress


def test_lines_come_every_ten_seconds(capsys: pytest.CaptureFixture[str]) -> None:
    times: Iterator[float] = iter([100.0, 101.0, 109.9, 110.0, 119.0, 120.5, 131.0])
    progress = plain_lines(lambda: next(times))
    for done in range(5):
        progress("realisations", done, 20)
    progress("report", 0, 0)
    out, err = capsys.readouterr()
    assert out == ""
    assert err.splitlines() == [
        "realisations: 2 of 20 (10 %)",
        "realisations: 4 of 20 (20 %)",
        "report: 0 of 0",
    ]


def test_quiet_shows_nothing() -> None:
    with shown_progress(quiet=True) as progress:
        assert progress is None


def test_no_terminal_no_bar(capsys: pytest.CaptureFixture[str]) -> None:
    with shown_progress(quiet=False) as progress:
        assert progress is not None
        for done in range(11):
            progress("realisations", done, 10)
    assert capsys.readouterr() == ("", "")  # a run shorter than ten seconds needs no line


@pytest.mark.skipif(os.name == "nt", reason="needs a pseudo-terminal")
def test_bar_on_a_terminal(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    monkeypatch.setenv("TERM", "xterm")
    reader, writer = pty.openpty()
    with os.fdopen(writer, "w") as terminal:
        monkeypatch.setattr(sys, "stderr", terminal)
        with shown_progress(quiet=False) as progress:
            assert progress is not None
            progress("realisations [x]", 1, 4)
            progress("realisations [x]", 4, 4)
    shown = b""
    with suppress(OSError):  # how the end of a pseudo-terminal shows
        while piece := os.read(reader, 65536):
            shown += piece
    os.close(reader)
    assert b"realisations [x]" in shown
    assert b"4/4" in shown
    assert capsys.readouterr().out == ""
