"""The user's wish to stop, heard at a moment when stopping loses nothing."""

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType, TracebackType
from typing import Self


class StopRequest:
    """Turns the first interrupt or termination signal into a flag while it is entered.

    A second signal meets the handlers that were there before, so an impatient user is obeyed at
    once. Outside the main thread, where Python delivers no signal, the flag stays down.

    Attributes
    ----------
    asked : bool
        Whether a stop was asked for.
    """

    def __init__(self) -> None:
        self.asked = False
        self._previous: dict[int, signal.Handlers | object] = {}

    def __enter__(self) -> Self:
        """Start to listen."""
        if threading.current_thread() is threading.main_thread():
            for number in (signal.SIGINT, signal.SIGTERM):
                previous = signal.getsignal(number)
                if previous is signal.SIG_IGN:  # as under nohup: ignored it stays
                    continue
                self._previous[number] = previous
                signal.signal(number, self._ask)
        return self

    def __exit__(
        self, kind: type[BaseException] | None, value: BaseException | None, trace: TracebackType | None
    ) -> None:
        """Put the former handlers back."""
        self._restore()

    def _ask(self, number: int, frame: FrameType | None) -> None:  # noqa: ARG002 - the handler's signature
        self.asked = True
        self._restore()

    def _restore(self) -> None:
        if threading.current_thread() is not threading.main_thread():
            return
        while self._previous:
            number, previous = self._previous.popitem()
            # None stands for a handler not set from Python, which Python cannot set again.
            signal.signal(number, previous if callable(previous) else signal.SIG_DFL)


@contextmanager
def deferred_interrupt() -> Iterator[None]:
    """Let what is done meanwhile end before an interruption is heard; a second one is heard at once.

    For work that loads compiled code: where an interruption meets a callback from there it is lost.

    Yields
    ------
    None
        While it holds.

    Raises
    ------
    KeyboardInterrupt
        At the end, if an interruption came.
    """
    with StopRequest() as request:
        yield
    if request.asked:
        raise KeyboardInterrupt


@contextmanager
def termination_as_interrupt() -> Iterator[None]:
    """Let a termination signal end what is done meanwhile as Ctrl-C does: by `KeyboardInterrupt`.

    Otherwise the process would end without a word. Outside the main thread nothing is changed.

    Yields
    ------
    None
        While it holds.
    """
    main = threading.current_thread() is threading.main_thread()
    if not main or signal.getsignal(signal.SIGTERM) is not signal.SIG_DFL:
        yield
        return
    signal.signal(signal.SIGTERM, signal.default_int_handler)
    try:
        yield
    finally:
        signal.signal(signal.SIGTERM, signal.SIG_DFL)


def is_interrupt(fault: BaseException | None) -> bool:
    """Return whether an interruption lies behind an error: compiled code wraps it in errors of its own.

    Parameters
    ----------
    fault : BaseException or None
        Error as caught.

    Returns
    -------
    bool
        True where it, or what caused it, is a `KeyboardInterrupt`.
    """
    while fault is not None:
        if isinstance(fault, KeyboardInterrupt):
            return True
        fault = fault.__cause__ or fault.__context__
    return False
