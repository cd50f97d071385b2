"""How many workers, and the pools that hold them."""

import multiprocessing
import os
import signal
import threading
from collections.abc import Callable
from concurrent.futures import Executor, ProcessPoolExecutor, ThreadPoolExecutor
from functools import partial

from probsoil.errors import ParameterError


def worker_count(workers: int | None = None) -> int:
    """Return the number of workers to use.

    Parameters
    ----------
    workers : int or None, [-]
        The number wished for; None for every processor core this process may use.

    Returns
    -------
    int, [-]
        At least 1.

    Raises
    ------
    ParameterError
        If fewer than one is wished for.

    Examples
    --------
    >>> worker_count(3)
    3
    """
    if workers is None:
        if hasattr(os, "sched_getaffinity"):
            return len(os.sched_getaffinity(0))
        return os.cpu_count() or 1
    if workers < 1:
        raise ParameterError(f"the number of workers must be at least 1, not {workers}")
    return workers


def thread_pool(workers: int | None = None) -> Callable[[], Executor]:
    """Return a factory of thread pools, right for work that releases the interpreter lock.

    Parameters
    ----------
    workers : int or None, [-]
        Number of threads; None for every core.

    Returns
    -------
    callable
        Makes a new pool at every call.

    Raises
    ------
    ParameterError
        If `workers` is below 1.
    """
    return partial(ThreadPoolExecutor, max_workers=worker_count(workers), thread_name_prefix="probsoil")


def process_pool(workers: int | None = None) -> Callable[[], Executor]:
    """Return a factory of process pools, right for work that holds the interpreter lock.

    The function evaluated must be importable in a fresh interpreter (processes are spawned, not
    forked, because a fork copies locks that other threads hold).

    Parameters
    ----------
    workers : int or None, [-]
        Number of processes; None for every core.

    Returns
    -------
    callable
        Makes a new pool at every call.

    Raises
    ------
    ParameterError
        If `workers` is below 1.
    """
    return partial(
        ProcessPoolExecutor,
        max_workers=worker_count(workers),
        mp_context=multiprocessing.get_context("spawn"),
        initializer=_enter_worker,
    )


def _enter_worker() -> None:
    """Leave interruptions to the main process, and end when it ends."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    threading.Thread(target=_follow_parent, name="follow parent", daemon=True).start()


def _follow_parent() -> None:
    """End this worker once its parent is gone; after a SIGKILL nothing else would."""
    parent = multiprocessing.parent_process()
    if parent is not None:
        parent.join()
        os._exit(1)
