"""One run at a time in a folder; what a dead run left behind is in nobody's way."""

import json
import os
import socket
import subprocess
import sys
import threading
from pathlib import Path

import pytest

from probsoil.campaign import LOCK, locked_folder
from probsoil.errors import ResultsError

ROOT = Path(__file__).parents[3]
HOLD = """
import sys
from pathlib import Path
from probsoil.campaign import locked_folder
with locked_folder(Path(sys.argv[1])):
    print("held", flush=True)
    sys.stdin.read()
"""


def holding(folder: Path) -> subprocess.Popen[str]:
    """Start a process that holds a folder until its standard input is closed."""
    process = subprocess.Popen(
        [sys.executable, "-c", HOLD, str(folder)],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )
    assert process.stdout is not None
    assert process.stdout.readline() == "held\n"
    return process


def enter(folder: Path) -> None:
    with locked_folder(folder):
        pass


def test_folder_is_locked_while_it_is_held_and_free_afterwards(tmp_path: Path) -> None:
    with locked_folder(tmp_path / "out") as folder:
        (folder / "kept.txt").write_text("")
        held = json.loads((folder / LOCK).read_text())
        assert (held["pid"], held["host"]) == (os.getpid(), socket.gethostname())
    assert [path.name for path in (tmp_path / "out").iterdir()] == ["kept.txt"]


def test_folder_made_for_nothing_is_gone_again_and_one_that_was_there_stays(tmp_path: Path) -> None:
    (tmp_path / "old").mkdir()
    for name in ("new", "old"):
        enter(tmp_path / name)
    assert [path.name for path in tmp_path.iterdir()] == ["old"]


def test_another_process_is_refused_told_who_holds_it_and_touches_nothing(tmp_path: Path) -> None:
    process = holding(tmp_path)
    try:
        before = (tmp_path / LOCK).read_bytes()
        with pytest.raises(ResultsError, match=rf"process {process.pid} on this machine") as caught:
            enter(tmp_path)
        assert f"delete '{tmp_path / LOCK}'" in str(caught.value)
        assert "name another folder" in str(caught.value)
        assert {path.name: path.read_bytes() for path in tmp_path.iterdir()} == {LOCK: before}
    finally:
        process.communicate("", timeout=30)
    enter(tmp_path)  # let go at the end of the process


def test_lock_of_a_killed_process_is_taken_over(tmp_path: Path) -> None:
    process = holding(tmp_path)
    process.kill()
    process.communicate(timeout=30)
    assert (tmp_path / LOCK).exists()
    with locked_folder(tmp_path):
        assert json.loads((tmp_path / LOCK).read_text())["pid"] == os.getpid()
    assert list(tmp_path.iterdir()) == []


def left(folder: Path, **changes: object) -> None:
    """Leave a lock of this very process, with changes."""
    with locked_folder(folder):
        found = json.loads((folder / LOCK).read_text())
    (folder / LOCK).write_text(json.dumps(found | changes))


def test_lock_with_our_own_number_from_a_process_before_us_is_taken_over(tmp_path: Path) -> None:
    left(tmp_path, process_started="1")
    enter(tmp_path)
    left(tmp_path)
    enter(tmp_path)
    assert list(tmp_path.iterdir()) == []


@pytest.mark.skipif(not Path("/proc/self/stat").exists(), reason="needs Linux's /proc")
def test_number_that_another_process_has_taken_since_does_not_hold_a_folder(tmp_path: Path) -> None:
    process = holding(tmp_path / "elsewhere")
    try:
        left(tmp_path, pid=process.pid, process_started="1")
        enter(tmp_path)
    finally:
        process.communicate("", timeout=30)


@pytest.mark.parametrize(
    ("content", "who"),
    [
        ('{"pid": 1, "host": "elsewhere", "since": "noon"}', "process 1 on host 'elsewhere', since noon"),
        ("", "unknown"),
        ("[]", "unknown"),
        ("\x00", "unknown"),
    ],
)
def test_lock_that_cannot_be_judged_is_respected(tmp_path: Path, content: str, who: str) -> None:
    (tmp_path / LOCK).write_text(content)
    with pytest.raises(ResultsError, match=who):
        enter(tmp_path)
    assert (tmp_path / LOCK).read_text() == content


def test_thread_that_holds_a_folder_may_enter_again_and_lets_go_once(tmp_path: Path) -> None:
    with locked_folder(tmp_path):
        enter(tmp_path / "x" / "..")
        assert (tmp_path / LOCK).exists()
    assert not (tmp_path / LOCK).exists()


def test_another_thread_of_the_same_process_is_refused(tmp_path: Path) -> None:
    faults: list[str] = []

    def attempt() -> None:
        try:
            enter(tmp_path)
        except ResultsError as fault:
            faults.append(str(fault))

    with locked_folder(tmp_path):
        thread = threading.Thread(target=attempt)
        thread.start()
        thread.join()
        assert len(faults) == 1
        assert f"process {os.getpid()}" in faults[0]
        assert (tmp_path / LOCK).exists()


def test_lock_put_in_our_place_meanwhile_is_left_alone(tmp_path: Path) -> None:
    with locked_folder(tmp_path):
        (tmp_path / LOCK).write_text("theirs")
    assert (tmp_path / LOCK).read_text() == "theirs"


def test_of_many_threads_at_once_one_gets_the_folder(tmp_path: Path) -> None:
    left(tmp_path, pid=2**22 + 7)  # beyond the greatest number of a Linux process: certainly gone
    start = threading.Barrier(8)
    entered, faults = [], []
    release = threading.Event()

    def attempt() -> None:
        start.wait()
        try:
            with locked_folder(tmp_path):
                entered.append(1)
                release.wait(10)
        except ResultsError:
            faults.append(1)
            if len(faults) == 7:
                release.set()

    threads = [threading.Thread(target=attempt) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert (len(entered), len(faults)) == (1, 7)
