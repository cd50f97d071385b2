"""A run that is killed or interrupted continues from what it kept, to the same bits."""

import os
import signal
import subprocess
import sys
import threading
import time
from collections.abc import Iterator
from pathlib import Path

import campaign_chunks
import pytest

from probsoil.campaign import deferred_interrupt, is_interrupt, run_campaign, termination_as_interrupt
from probsoil.campaign.execution import Result
from probsoil.errors import StoppedEarly

N = 24
HERE = Path(__file__).parent
SCRIPT = """
import sys
from pathlib import Path
import campaign_chunks
from probsoil.campaign import process_pool, run_campaign
if __name__ == "__main__":
    factory = process_pool(2) if sys.argv[2] == "processes" else None
    for _ in run_campaign(campaign_chunks.slow, 24, identity=campaign_chunks.OURS, workers=2,
                          store=Path(sys.argv[1]), executor_factory=factory):
        pass
"""


@pytest.fixture(autouse=True)
def heard_interrupts() -> Iterator[None]:
    """Let interrupts be heard also where the tests run in the background, which has them ignored."""
    before = signal.signal(signal.SIGINT, signal.default_int_handler)
    yield
    signal.signal(signal.SIGINT, before)


def begin(folder: Path, kind: str) -> subprocess.Popen[bytes]:
    """Start the campaign in a process of its own and return once four chunks are on disk."""
    script = folder / "script.py"
    script.write_text(SCRIPT)
    root = HERE.parents[2]
    with (folder / "errors.txt").open("w") as errors:  # a pipe would stay open while any worker lives
        process = subprocess.Popen(
            [sys.executable, str(script), str(folder / "chunks"), kind],
            env={**os.environ, "PYTHONPATH": os.pathsep.join([str(root), str(HERE)])},
            stderr=errors,
            start_new_session=True,
        )
    deadline = time.monotonic() + 60
    while len(list((folder / "chunks").glob("chunk-*.npz"))) < 4:
        assert process.poll() is None, (folder / "errors.txt").read_text()
        assert time.monotonic() < deadline, "no chunk in a minute"
        time.sleep(0.02)
    return process


def resumed(folder: Path) -> tuple[list[tuple[int, Result]], int]:
    """Resume in this process; return the results and how many chunks were evaluated here."""
    evaluated = []

    def evaluate(index: int) -> Result:
        evaluated.append(index)
        return campaign_chunks.drawn(index)

    run = run_campaign(
        evaluate, N, identity=campaign_chunks.OURS, workers=2, store=folder / "chunks", resume=True
    )
    return list(run), len(evaluated)


def assert_uninterrupted(results: list[tuple[int, Result]]) -> None:
    assert [index for index, _ in results] == list(range(N))
    for index, result in results:
        whole = campaign_chunks.drawn(index)
        assert list(result) == list(whole)
        for name, array in whole.items():
            assert result[name].dtype == array.dtype
            assert result[name].tobytes() == array.tobytes()


@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
@pytest.mark.parametrize("kind", ["threads", "processes"])
def test_killed_run_resumes_to_the_same_bits(tmp_path: Path, kind: str) -> None:
    process = begin(tmp_path, kind)
    process.kill()
    process.wait()
    torn = (
        tmp_path / "chunks" / "chunk-000001.npz"
    )  # as a kill amid a write would leave it, were it not renamed
    torn.write_bytes(torn.read_bytes()[:-200])
    (tmp_path / "chunks" / ".chunk-000023.npz.1.part").write_bytes(b"half")
    results, n_evaluated = resumed(tmp_path)
    assert_uninterrupted(results)
    assert 1 < n_evaluated <= N - 3
    assert not list((tmp_path / "chunks").glob(".*.part"))


def worker_ids(parent: int) -> list[int]:
    """Return the live child processes of a process (Linux)."""
    return [int(text) for text in Path(f"/proc/{parent}/task/{parent}/children").read_text().split()]


@pytest.mark.skipif(
    not Path(f"/proc/self/task/{os.getpid()}/children").exists(), reason="needs Linux's /proc"
)
def test_workers_of_a_killed_run_end_too(tmp_path: Path) -> None:
    process = begin(tmp_path, "processes")
    workers = worker_ids(process.pid)
    assert len(workers) >= 2
    process.kill()
    process.wait()
    deadline = time.monotonic() + 20
    while any(is_running(worker) for worker in workers):
        assert time.monotonic() < deadline, "workers outlive their campaign"
        time.sleep(0.05)


def is_running(number: int) -> bool:
    try:
        state = Path(f"/proc/{number}/stat").read_text().rpartition(")")[2].split()[0]
    except (FileNotFoundError, ProcessLookupError):
        return False
    return state != "Z"


@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
@pytest.mark.parametrize(
    ("kind", "number", "at_keyboard"),
    [
        ("threads", signal.SIGINT, False),
        ("threads", signal.SIGTERM, False),
        ("processes", signal.SIGTERM, False),
        ("processes", signal.SIGINT, True),  # the terminal sends it to the workers too
    ],
)
def test_interrupted_run_says_what_it_kept_and_resumes(
    tmp_path: Path, kind: str, number: signal.Signals, at_keyboard: bool
) -> None:
    process = begin(tmp_path, kind)
    os.killpg(process.pid, number) if at_keyboard else process.send_signal(number)
    process.wait(timeout=60)
    errors = (tmp_path / "errors.txt").read_text()
    kept = len(list((tmp_path / "chunks").glob("chunk-*.npz")))
    assert f"StoppedEarly: stopped early after {kept} of {N} chunks; {kept} are kept in " in errors
    assert "--resume" in errors
    assert errors.count("Traceback") == 1  # the script's own; workers end without one
    results, n_evaluated = resumed(tmp_path)
    assert_uninterrupted(results)
    assert n_evaluated == N - kept


def interrupt_after(seconds: float) -> threading.Thread:
    def send() -> None:
        time.sleep(seconds)
        os.kill(os.getpid(), signal.SIGINT)

    thread = threading.Thread(target=send)
    thread.start()
    return thread


def test_chunks_that_run_when_the_stop_comes_are_kept(tmp_path: Path) -> None:
    thread = interrupt_after(0.2)

    def evaluate(index: int) -> Result:
        time.sleep(0.5)
        return campaign_chunks.drawn(index)

    before = signal.getsignal(signal.SIGINT)
    with pytest.raises(StoppedEarly, match="stopped early after 2 of 24 chunks; 2 are kept"):
        list(run_campaign(evaluate, N, identity=campaign_chunks.OURS, workers=2, store=tmp_path / "chunks"))
    thread.join()
    assert signal.getsignal(signal.SIGINT) is before
    assert len(list((tmp_path / "chunks").glob("chunk-*.npz"))) == 2


def test_chunk_that_fails_after_the_stop_does_not_hide_that_it_was_a_stop(tmp_path: Path) -> None:
    thread = interrupt_after(0.2)

    def evaluate(index: int) -> Result:
        time.sleep(0.5)
        raise ValueError(index)

    with pytest.raises(StoppedEarly, match="stopped early after 0 of 24 chunks; nothing is kept"):
        list(run_campaign(evaluate, N, identity=campaign_chunks.OURS, workers=2, store=tmp_path / "chunks"))
    thread.join()


@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
def test_ignored_interrupt_stays_ignored() -> None:
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)  # as for a job in the background
    try:
        run = run_campaign(campaign_chunks.drawn, N, identity=campaign_chunks.OURS, workers=1)
        next(run)
        os.kill(os.getpid(), signal.SIGINT)
        assert len(list(run)) == N - 1
        assert signal.getsignal(signal.SIGINT) is signal.SIG_IGN
    finally:
        signal.signal(signal.SIGINT, before)


def test_second_interrupt_does_not_wait_for_chunks_that_run(tmp_path: Path) -> None:
    usual = signal.getsignal(signal.SIGINT)
    started, release = threading.Event(), threading.Event()

    def evaluate(index: int) -> Result:
        started.set()
        release.wait(60)
        return campaign_chunks.drawn(index)

    def interrupt_twice() -> None:
        started.wait(60)
        os.kill(os.getpid(), signal.SIGINT)
        while signal.getsignal(signal.SIGINT) is not usual:  # sent at once, two would count as one
            time.sleep(0.01)
        os.kill(os.getpid(), signal.SIGINT)

    thread = threading.Thread(target=interrupt_twice)
    began = time.monotonic()
    thread.start()
    with pytest.raises(StoppedEarly, match="stopped early after 0 of 24 chunks; nothing is kept"):
        list(run_campaign(evaluate, N, identity=campaign_chunks.OURS, workers=1, store=tmp_path / "chunks"))
    waited = time.monotonic() - began
    release.set()
    thread.join()
    assert waited < 30


def test_without_a_folder_it_is_said_that_nothing_is_kept() -> None:
    thread = interrupt_after(0.2)
    with pytest.raises(StoppedEarly, match="nothing is kept, because no folder was given"):
        list(run_campaign(campaign_chunks.slow, 200, identity=campaign_chunks.OURS, workers=1))
    thread.join()


def test_interrupt_while_the_consumer_works_is_heard_at_the_next_chunk() -> None:
    run = run_campaign(campaign_chunks.drawn, N, identity=campaign_chunks.OURS, workers=1)
    next(run)
    os.kill(os.getpid(), signal.SIGINT)
    time.sleep(0.05)  # the consumer's own work goes on unharmed
    with pytest.raises(StoppedEarly, match="stopped early after"):
        list(run)


@pytest.mark.parametrize("kept", [False, True])
def test_interrupt_while_the_consumer_has_the_last_chunk_is_heard(tmp_path: Path, kept: bool) -> None:
    store = tmp_path / "chunks" if kept else None
    run = run_campaign(campaign_chunks.drawn, 2, identity=campaign_chunks.OURS, workers=1, store=store)
    next(run)
    next(run)
    os.kill(os.getpid(), signal.SIGINT)
    time.sleep(0.05)
    with pytest.raises(StoppedEarly, match="stopped early after 2 of 2 chunks") as caught:
        next(run)
    assert caught.value.kept is kept


@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
def test_termination_ends_as_an_interrupt_does_and_the_former_handler_comes_back() -> None:
    before = signal.getsignal(signal.SIGTERM)

    def terminated() -> None:
        with termination_as_interrupt():
            os.kill(os.getpid(), signal.SIGTERM)
            time.sleep(1)

    with pytest.raises(KeyboardInterrupt, match=r"^$"):
        terminated()
    assert signal.getsignal(signal.SIGTERM) is before


def test_interrupt_is_deferred_until_the_work_is_done() -> None:
    done = []

    def work() -> None:
        with deferred_interrupt():
            os.kill(os.getpid(), signal.SIGINT)
            time.sleep(0.05)
            done.append(1)
        done.append(2)

    before = signal.getsignal(signal.SIGINT)
    with pytest.raises(KeyboardInterrupt, match=r"^$"):
        work()
    assert done == [1]
    assert signal.getsignal(signal.SIGINT) is before


@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
def test_termination_that_is_handled_or_ignored_already_is_left_so() -> None:
    before = signal.signal(signal.SIGTERM, signal.SIG_IGN)
    try:
        with termination_as_interrupt():
            os.kill(os.getpid(), signal.SIGTERM)
            assert signal.getsignal(signal.SIGTERM) is signal.SIG_IGN
    finally:
        signal.signal(signal.SIGTERM, before)


def test_interrupt_is_found_behind_other_errors() -> None:
    def wrapped(inner: BaseException) -> BaseException:
        outer = RuntimeError("not compiled")
        outer.__context__ = ValueError("on the way")
        outer.__context__.__cause__ = inner
        return outer

    assert is_interrupt(KeyboardInterrupt())
    assert is_interrupt(wrapped(KeyboardInterrupt()))
    assert not is_interrupt(wrapped(ValueError()))


def test_campaign_in_another_thread_leaves_signals_alone() -> None:
    before = signal.getsignal(signal.SIGINT)
    results: list[tuple[int, Result]] = []
    thread = threading.Thread(
        target=lambda: results.extend(
            run_campaign(campaign_chunks.drawn, N, identity=campaign_chunks.OURS, workers=2)
        )
    )
    thread.start()
    thread.join()
    assert_uninterrupted(results)
    assert signal.getsignal(signal.SIGINT) is before
