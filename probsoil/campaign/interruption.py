"""The user's wish to stop, heard at a moment when stopping loses nothing."""

import signal
import threading
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
