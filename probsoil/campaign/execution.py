"""Runs a campaign: chunks over workers, results in order, a bounded number held at a time."""

import logging
from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import FIRST_COMPLETED, BrokenExecutor, CancelledError, Executor, Future, wait
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from probsoil.campaign.identity import Identity
from probsoil.campaign.interruption import StopRequest
from probsoil.campaign.store import ChunkStore, open_store
from probsoil.campaign.workers import thread_pool, worker_count
from probsoil.errors import ParameterError, ProbsoilError, StoppedEarly

Result = dict[str, NDArray[np.generic]]
Evaluate = Callable[[int], Mapping[str, NDArray[np.generic]]]
Progress = Callable[[int, int], None]

WINDOW_PER_WORKER = 4  # chunks in flight or waiting their turn, for each worker
POLL_SECONDS = 0.2  # how long a wish to stop may go unheard

logger = logging.getLogger(__name__)


def run_campaign(  # noqa: PLR0913 - one call with named options, each with a default
    evaluate: Evaluate,
    n_chunks: int,
    *,
    identity: Identity,
    workers: int | None = None,
    store: Path | None = None,
    resume: bool = False,
    force: bool = False,
    executor_factory: Callable[[], Executor] | None = None,
    progress: Progress | None = None,
) -> Iterator[tuple[int, Result]]:
    """Return the chunks 0, 1, ..., n_chunks - 1 in this order, evaluated over all workers.

    The folder is checked at the call; evaluation starts with the first item asked for. At most
    four chunks per worker are held at a time, whatever the number of chunks.

    Parameters
    ----------
    evaluate : callable
        Maps a chunk number to arrays by name. It must depend on the number alone, and for a
        process pool it must be picklable.
    n_chunks : int, [-]
        Number of chunks.
    identity : Identity
        Identity of the campaign, see `campaign_identity`; guards what is on disk.
    workers : int or None, [-]
        Number of workers; None for every core.
    store : Path or None
        Folder where finished chunks are kept; None to keep none. Those of the same campaign that
        are there already are taken as done.
    resume : bool
        Whether to insist that there are chunks to go on from.
    force : bool
        Whether chunks of another campaign in `store` are removed rather than the call refused.
    executor_factory : callable or None
        Makes a `concurrent.futures.Executor`; called again should that one break. None for threads.
    progress : callable or None
        Called in this thread with the number of chunks done and `n_chunks`.

    Returns
    -------
    iterator of (int, dict of ndarray), [-], [any], shape (...,)
        Chunk number and its arrays by name, in rising order; units and shapes are those of `evaluate`.

    Raises
    ------
    ParameterError
        If `n_chunks` or `workers` is below 1.
    ResultsError
        If `store` cannot be written.
    UnfitFolderError
        If `store` holds chunks of another campaign, or none where `resume` insists.
    ProbsoilError
        While iterating: a chunk failed or ended its worker; the message names it.
    StoppedEarly
        While iterating: the user interrupted; the message says what is kept.
    """
    if n_chunks < 1:
        raise ParameterError(f"the number of chunks must be at least 1, not {n_chunks}")
    count = worker_count(workers)
    kept = None
    if store is not None:
        kept = open_store(store, identity=identity, n_chunks=n_chunks, resume=resume, force=force)
    campaign = _Campaign(evaluate, n_chunks, kept, progress or _unheard)
    return campaign.results(executor_factory or thread_pool(count), WINDOW_PER_WORKER * count)


def _unheard(done: int, total: int) -> None:
    """Take the place of a progress callback."""


class _Campaign:
    """State of one run: what is in flight, what is finished and waits for its turn."""

    def __init__(
        self,
        evaluate: Evaluate,
        n_chunks: int,
        store: ChunkStore | None,
        progress: Callable[[int, int], None],
    ) -> None:
        self._evaluate = evaluate
        self._n_chunks = n_chunks
        self._store = store
        self._progress = progress
        self._stop = StopRequest()
        self._flight: dict[Future[Mapping[str, NDArray[np.generic]]], int] = {}
        self._finished: dict[int, Result] = {}
        self._next = 0
        self._n_done = 0

    def results(self, factory: Callable[[], Executor], window: int) -> Iterator[tuple[int, Result]]:
        """Yield every chunk in order; the finished ones never number more than the window."""
        self._factory = factory
        self._executor = factory()
        patient = True
        try:
            with self._stop:
                for index in range(self._n_chunks):
                    self._fill(min(index + window, self._n_chunks))
                    while index not in self._finished:
                        self._stop_if_asked()
                        self._collect()
                        self._fill(min(index + window, self._n_chunks))
                    yield index, self._finished.pop(index)
                if self._stop.asked:  # while the last chunk was in the caller's hands
                    raise self._stopped()
        except KeyboardInterrupt:  # a second signal: stop without waiting for what is in flight
            patient = False
            raise self._stopped() from None
        except BrokenExecutor as fault:
            raise ProbsoilError(f"the workers cannot be started: {fault}") from fault
        finally:
            for future in self._flight:
                future.cancel()
            self._executor.shutdown(wait=patient)

    def _fill(self, end: int) -> None:
        """Take stored chunks and submit the others up to the end of the window."""
        while self._next < end and not self._stop.asked:
            stored = None if self._store is None else self._store.read(self._next)
            if stored is not None:
                self._hold(self._next, stored)
            elif not self._submit(self._next):
                return
            self._next += 1

    def _submit(self, index: int) -> bool:
        """Send a chunk to the workers; false if the pool is broken and chunks in flight must be saved."""
        try:
            self._flight[self._executor.submit(self._evaluate, index)] = index
        except BrokenExecutor:
            if self._flight:
                return False
            self._renew()
            self._flight[self._executor.submit(self._evaluate, index)] = index
        return True

    def _collect(self) -> None:
        """Take what has finished since last asked; a fault is raised after the rest is kept."""
        done, _ = wait(self._flight, timeout=POLL_SECONDS, return_when=FIRST_COMPLETED)
        suspects = []
        failure: ProbsoilError | None = None
        for future in sorted(done, key=self._flight.__getitem__):
            index = self._flight.pop(future)
            try:
                self._take(index, future)
            except BrokenExecutor:
                suspects.append(index)
            except ProbsoilError as fault:
                failure = failure or fault
        if failure is not None:
            raise failure
        if suspects:
            self._rerun_alone(suspects)

    def _take(self, index: int, future: Future[Mapping[str, NDArray[np.generic]]]) -> None:
        """Keep the result of a finished chunk, or raise what ended it."""
        fault = future.exception()
        if isinstance(fault, BrokenExecutor):
            raise fault
        if fault is not None:
            raise ProbsoilError(
                f"chunk {index} of {self._n_chunks} failed: {type(fault).__name__}: {fault}"
            ) from fault
        result = {name: np.asarray(array) for name, array in future.result().items()}
        if self._store is not None:
            self._store.write(index, result)
        self._hold(index, result)

    def _hold(self, index: int, result: Result) -> None:
        self._finished[index] = result
        self._n_done += 1
        self._progress(self._n_done, self._n_chunks)

    def _renew(self) -> None:
        self._executor.shutdown(wait=False)
        self._executor = self._factory()

    def _rerun_alone(self, suspects: list[int]) -> None:
        """Run the chunks a broken pool had in flight one at a time, so that the guilty one is known."""
        suspects = sorted([*suspects, *self._flight.values()])
        logger.warning("a pool of workers broke; chunks %s run again one at a time", suspects)
        self._flight.clear()
        self._renew()
        for index in suspects:
            future = self._executor.submit(self._evaluate, index)
            self._flight[future] = index
            while not future.done():
                self._stop_if_asked()
                wait([future], timeout=POLL_SECONDS)
            del self._flight[future]
            try:
                self._take(index, future)
            except BrokenExecutor as fault:
                raise ProbsoilError(
                    f"chunk {index} of {self._n_chunks} ended its worker, also when it ran alone"
                ) from fault

    def _stop_if_asked(self) -> None:
        """Once a stop is asked for, keep what still finishes and raise."""
        if not self._stop.asked:
            return
        running = [future for future in self._flight if not future.cancel()]
        wait(running)
        for future in running:
            index = self._flight[future]
            try:
                self._take(index, future)
            except (BrokenExecutor, CancelledError, ProbsoilError) as fault:
                logger.warning("chunk %d was running when the stop came and is not kept: %s", index, fault)
        self._flight.clear()
        raise self._stopped()

    def _stopped(self) -> StoppedEarly:
        head = f"stopped early after {self._n_done} of {self._n_chunks} chunks"
        if self._store is None:
            return StoppedEarly(f"{head}; nothing is kept, because no folder was given", kept=False)
        kept = len(self._store)
        if not kept:
            return StoppedEarly(f"{head}; nothing is kept", kept=False)
        return StoppedEarly(
            f"{head}; {kept} {'is' if kept == 1 else 'are'} kept in '{self._store.folder}': "
            "run the same again to go on from there (with --resume it never begins anew)"
        )
