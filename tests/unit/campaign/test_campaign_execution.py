"""Order, workers, window, and what happens when a chunk or its worker fails."""

import os
import threading
import time
import weakref
from collections.abc import Callable
from concurrent.futures import BrokenExecutor, Executor, Future, ThreadPoolExecutor
from pathlib import Path

import campaign_chunks
import numpy as np
import pytest

from probsoil.campaign import process_pool, run_campaign, worker_count
from probsoil.campaign.execution import WINDOW_PER_WORKER, Evaluate, Result
from probsoil.errors import ParameterError, ProbsoilError

N = campaign_chunks.N_CHUNKS


def bits(
    results: list[tuple[int, Result]],
) -> list[tuple[int, list[tuple[str, str, tuple[int, ...], bytes]]]]:
    """Return everything about results that could differ, to the bit."""
    return [
        (index, [(name, a.dtype.str, a.shape, a.tobytes()) for name, a in sorted(result.items())])
        for index, result in results
    ]


@pytest.fixture(scope="module")
def reference() -> object:
    return bits([(index, campaign_chunks.drawn(index)) for index in range(N)])


@pytest.mark.parametrize("workers", [1, 2, 3, 7, 40])
def test_any_number_of_threads_gives_the_same_bits_in_order(workers: int, reference: object) -> None:
    results = list(run_campaign(campaign_chunks.drawn, N, identity=campaign_chunks.OURS, workers=workers))
    assert bits(results) == reference


@pytest.mark.parametrize("workers", [1, 2])
def test_processes_give_the_same_bits_as_threads(workers: int, reference: object) -> None:
    factory = process_pool(workers)
    results = run_campaign(
        campaign_chunks.drawn, N, identity=campaign_chunks.OURS, workers=workers, executor_factory=factory
    )
    assert bits(list(results)) == reference


def test_results_come_in_order_whatever_the_order_of_finishing() -> None:
    finished: list[int] = []

    def evaluate(index: int) -> Result:
        time.sleep(0.08 if index % 4 == 0 else 0.0)
        finished.append(index)
        return {"index": np.array(index)}

    order = [index for index, _ in run_campaign(evaluate, 16, identity=campaign_chunks.OURS, workers=4)]
    assert order == list(range(16))
    assert finished != order  # otherwise this test proves nothing


def test_chunks_held_do_not_grow_with_the_number_of_chunks() -> None:
    alive = 0
    most = 0
    lock = threading.Lock()

    def forget() -> None:
        nonlocal alive
        with lock:
            alive -= 1

    def evaluate(index: int) -> Result:
        nonlocal alive, most
        if index == 0:  # everything behind a slow first chunk would pile up, were there no window
            time.sleep(0.3)
        array = np.zeros(8)
        weakref.finalize(array, forget)
        with lock:
            alive += 1
            most = max(most, alive)
        return {"array": array}

    for _index, _result in run_campaign(evaluate, 400, identity=campaign_chunks.OURS, workers=2):
        pass
    assert most <= WINDOW_PER_WORKER * 2 + 1  # the window, and the one in the consumer's hands
    assert most > 2  # the window was used


def test_progress_counts_every_chunk_once() -> None:
    seen: list[tuple[int, int]] = []
    run = run_campaign(
        campaign_chunks.drawn,
        N,
        identity=campaign_chunks.OURS,
        workers=2,
        progress=lambda *done: seen.append(done),
    )
    assert len(list(run)) == N
    assert seen == [(done, N) for done in range(1, N + 1)]


def test_failing_chunk_is_named_and_its_error_is_the_cause() -> None:
    run = run_campaign(campaign_chunks.faulty, N, identity=campaign_chunks.OURS, workers=2)
    with pytest.raises(
        ProbsoilError, match=r"chunk 5 of 12 failed: ZeroDivisionError: no clay here"
    ) as caught:
        list(run)
    assert isinstance(caught.value.__cause__, ZeroDivisionError)


def test_chunks_finished_beside_a_failing_one_are_kept(tmp_path: Path) -> None:
    run = run_campaign(
        campaign_chunks.faulty, 6, identity=campaign_chunks.OURS, workers=1, store=tmp_path / "chunks"
    )
    with pytest.raises(ProbsoilError, match="chunk 5 of 6 failed"):
        list(run)
    assert len(list((tmp_path / "chunks").glob("chunk-*.npz"))) == 5


def test_chunk_that_ends_its_worker_process_is_named_among_innocents(tmp_path: Path) -> None:
    store = tmp_path / "chunks"
    factory = process_pool(2)
    run = run_campaign(
        campaign_chunks.deadly,
        N,
        identity=campaign_chunks.OURS,
        workers=2,
        store=store,
        executor_factory=factory,
    )
    with pytest.raises(ProbsoilError, match="chunk 5 of 12 ended its worker, also when it ran alone"):
        list(run)
    kept = {path.name for path in store.glob("chunk-*.npz")}
    assert {f"chunk-{index:06d}.npz" for index in range(5)} <= kept
    assert "chunk-000005.npz" not in kept


def test_worker_killed_once_costs_nothing_but_time(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, reference: object
) -> None:
    monkeypatch.setenv("PROBSOIL_TEST_MARKER", str(tmp_path / "killed"))
    run = run_campaign(
        campaign_chunks.killed_once,
        N,
        identity=campaign_chunks.OURS,
        workers=2,
        executor_factory=process_pool(2),
    )
    assert bits(list(run)) == reference
    assert (tmp_path / "killed").exists()


class BrokenAtFirst(ThreadPoolExecutor):
    """A pool whose first instance refuses every chunk after the third."""

    made = 0

    def __init__(self) -> None:
        super().__init__(2)
        type(self).made += 1
        self._taken = 0

    def submit(self, *arguments: object) -> Future[object]:  # type: ignore[override]
        self._taken += 1
        if self.made == 1 and self._taken > 3:
            raise BrokenExecutor("no more")
        return super().submit(*arguments)  # type: ignore[arg-type]


def test_pool_that_breaks_between_chunks_is_made_anew(
    monkeypatch: pytest.MonkeyPatch, reference: object
) -> None:
    monkeypatch.setattr(BrokenAtFirst, "made", 0)
    run = run_campaign(
        campaign_chunks.drawn, N, identity=campaign_chunks.OURS, executor_factory=BrokenAtFirst
    )
    assert bits(list(run)) == reference
    assert BrokenAtFirst.made == 2


class HalfBroken(Executor):
    """A pool whose first instance breaks under its first chunk and never answers for the others."""

    made = 0

    def __init__(self) -> None:
        type(self).made += 1
        self._first = self.made == 1
        self._taken = 0

    def submit(self, function: object, /, *arguments: object) -> Future[object]:  # type: ignore[override]
        future: Future[object] = Future()
        self._taken += 1
        if not self._first:
            future.set_result(function(*arguments))  # type: ignore[operator]
        elif self._taken == 1:
            future.set_exception(BrokenExecutor("gone"))
        return future


def test_chunks_a_broken_pool_never_answers_for_run_again(
    monkeypatch: pytest.MonkeyPatch, reference: object
) -> None:
    monkeypatch.setattr(HalfBroken, "made", 0)
    run = run_campaign(
        campaign_chunks.drawn, N, identity=campaign_chunks.OURS, workers=2, executor_factory=HalfBroken
    )
    assert bits(list(run)) == reference


def test_pool_that_never_starts_is_said_so() -> None:
    def refuse() -> None:
        raise OSError("no cores today")

    def factory() -> Executor:
        return ThreadPoolExecutor(1, initializer=refuse)

    run = run_campaign(
        campaign_chunks.drawn, N, identity=campaign_chunks.OURS, workers=1, executor_factory=factory
    )
    with pytest.raises(ProbsoilError, match=r"ended its worker|workers cannot be started"):
        list(run)


def test_consumer_that_walks_away_leaves_no_thread_behind() -> None:
    before = threading.active_count()
    run = run_campaign(campaign_chunks.slow, N, identity=campaign_chunks.OURS, workers=2)
    next(run)
    run.close()  # type: ignore[attr-defined]
    assert threading.active_count() == before


@pytest.mark.parametrize(
    ("n_chunks", "workers", "message"),
    [
        (0, 1, "number of chunks must be at least 1, not 0"),
        (1, 0, "number of workers must be at least 1, not 0"),
    ],
)
def test_senseless_counts_are_refused_at_the_call(n_chunks: int, workers: int, message: str) -> None:
    with pytest.raises(ParameterError, match=message):
        run_campaign(campaign_chunks.drawn, n_chunks, identity=campaign_chunks.OURS, workers=workers)


def test_default_is_every_core(monkeypatch: pytest.MonkeyPatch) -> None:
    assert worker_count() >= 1
    monkeypatch.delattr(os, "sched_getaffinity", raising=False)
    assert worker_count() == os.cpu_count()


def test_result_with_python_objects_is_refused_by_name(tmp_path: Path) -> None:
    evaluate: Evaluate = lambda index: {"thing": np.array([object()])}  # noqa: E731, ARG005
    run: Callable[[], object] = lambda: list(  # noqa: E731
        run_campaign(evaluate, 1, identity=campaign_chunks.OURS, workers=1, store=tmp_path / "chunks")
    )
    with pytest.raises(ProbsoilError, match="chunk 0: array 'thing' holds Python objects"):
        run()
