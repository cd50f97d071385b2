"""What an interrupted `probsoil assess` leaves behind, told to the user."""

import shlex
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from probsoil.errors import StoppedEarly

_CHUNKS, _RESULTS = "chunks", "results.json"


@contextmanager
def told_interruption(folder: Path) -> Iterator[None]:
    """Turn an interruption at any moment of a run into an ending that says what is kept.

    Parameters
    ----------
    folder : Path
        Results folder; need not exist yet.

    Yields
    ------
    None
        While the run goes on.

    Raises
    ------
    StoppedEarly
        In place of an interruption.
    """
    from probsoil.campaign.interruption import is_interrupt, termination_as_interrupt

    before = _written(folder / _RESULTS)
    try:
        with termination_as_interrupt():
            yield
    except StoppedEarly:
        raise
    except BaseException as fault:
        if not is_interrupt(fault):
            raise
        raise _ending(folder, new_results=_written(folder / _RESULTS) != before) from None


def _written(path: Path) -> int | None:
    try:
        return path.stat().st_mtime_ns
    except OSError:
        return None


def _ending(folder: Path, *, new_results: bool) -> StoppedEarly:
    if new_results:
        return StoppedEarly(
            f"Interrupted after the last realisation; the results are kept in '{folder}'. "
            f"Write what is missing of the report: probsoil report {shlex.quote(str(folder))}"
        )
    from probsoil.campaign.store import kept_chunks

    kept = kept_chunks(folder / _CHUNKS)
    if not kept:
        return StoppedEarly("Interrupted before any realisation was finished; nothing is kept.", kept=False)
    chunks = "1 finished chunk is" if kept == 1 else f"{kept} finished chunks are"
    return StoppedEarly(
        f"Interrupted; {chunks} kept in '{folder / _CHUNKS}': run the same again to go on from there."
    )
