"""How far a run is, on standard error."""

import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager

Progress = Callable[[str, int, int], None]
PLAIN_SECONDS = 10.0  # between two lines where there is no terminal


@contextmanager
def shown_progress(*, quiet: bool) -> Iterator[Progress | None]:
    """Show a bar on a terminal, or now and then a line where there is none.

    Parameters
    ----------
    quiet : bool
        Whether to show nothing.

    Yields
    ------
    callable or None
        To be called with the name of the stage, how much of it is done and how much there is.
    """
    if quiet:
        yield None
    elif sys.stderr.isatty():
        with _bar() as progress:
            yield progress
    else:
        yield plain_lines(time.monotonic)


def plain_lines(clock: Callable[[], float]) -> Progress:
    """Return a progress callback that prints a line at most every ten seconds.

    Parameters
    ----------
    clock : callable
        Returns the time now [s].

    Returns
    -------
    callable
        To be called with stage, done and total.
    """
    last = clock()

    def show(stage: str, done: int, total: int) -> None:
        nonlocal last
        now = clock()
        if now - last >= PLAIN_SECONDS:
            last = now
            share = f" ({100 * done // total} %)" if total else ""
            print(f"{stage}: {done} of {total}{share}", file=sys.stderr, flush=True)  # noqa: T201

    return show


@contextmanager
def _bar() -> Iterator[Progress]:
    from rich.console import Console
    from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeRemainingColumn

    stage = TextColumn("{task.description}", markup=False)
    columns = (stage, BarColumn(), MofNCompleteColumn(), TimeRemainingColumn())
    with Progress(*columns, console=Console(stderr=True, markup=False), transient=True) as bar:
        tasks = {}

        def show(stage: str, done: int, total: int) -> None:
            if stage not in tasks:
                tasks[stage] = bar.add_task(stage, total=total)
            bar.update(tasks[stage], completed=done, total=total)

        yield show
