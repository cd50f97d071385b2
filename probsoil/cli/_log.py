"""The log of a run, kept in its results folder."""

import logging
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

LOG_NAME = "log.txt"
_FORM = logging.Formatter("%(asctime)s %(levelname)-7s %(name)s: %(message)s")


class FolderLog(logging.Handler):
    """Writes to a file of a folder from the moment it is told to begin; never makes the folder.

    So a run that is refused before it begins leaves nothing behind, in a folder of other things as well.

    Parameters
    ----------
    path : Path
        Log file.

    Attributes
    ----------
    path : Path
        Log file.
    begun : bool
        Whether records are written.
    """

    def __init__(self, path: Path) -> None:
        super().__init__(logging.INFO)
        self.path = path
        self.begun = False
        self._waiting: list[str] = []
        self.setFormatter(_FORM)

    def emit(self, record: logging.LogRecord) -> None:
        """Write a record, or keep it until the run has begun.

        Parameters
        ----------
        record : logging.LogRecord
            What happened.
        """
        self._waiting.append(self.format(record))
        self._write()

    def begin(self) -> None:
        """Write what is waiting, and from now on every record at once."""
        self.begun = True
        self._write()

    def close(self) -> None:
        """Write what is still waiting, if the run has begun, and close."""
        if self._waiting:
            self._write()
        super().close()

    def _write(self) -> None:
        if not self.begun or not self.path.parent.is_dir():
            return
        try:
            with self.path.open("a", encoding="utf-8") as stream:
                stream.writelines(f"{line}\n" for line in self._waiting)
        except OSError:  # a full disk is reported by what cannot do without it
            return
        self._waiting.clear()


@contextmanager
def logged_run(folder: Path, command: str, *, quiet: bool) -> Iterator[FolderLog]:
    """Log a run to its folder, warnings of Python included; notices and warnings of ours to standard error.

    Parameters
    ----------
    folder : Path
        Results folder; need not exist yet.
    command : str
        Command line, for the first line.
    quiet : bool
        Whether to leave standard error alone.

    Yields
    ------
    FolderLog
        The log, which writes nothing before its `begin` is called. An unexpected error that passes is
        logged with its traceback and carries the path of the log as attribute `log`.
    """
    root = logging.getLogger("probsoil")
    log = FolderLog(folder / LOG_NAME)
    handlers: list[logging.Handler] = [log]
    if not quiet:
        handlers.append(logging.StreamHandler())
        handlers[-1].setLevel(logging.INFO + 1)  # notices lie between information and warnings
    level = root.level
    root.setLevel(logging.INFO)
    for handler in handlers:
        root.addHandler(handler)
    try:
        with warnings.catch_warnings():
            warnings.showwarning = _log_warning
            root.info("%s", command)
            yield log
            root.info("done")
    except (Exception, KeyboardInterrupt) as fault:
        _log_fault(root, log, fault)
        raise
    finally:
        root.setLevel(level)
        for handler in handlers:
            root.removeHandler(handler)
            handler.close()


def _log_warning(
    message: Warning | str,
    category: type[Warning],
    filename: str,
    lineno: int,
    file: object = None,  # noqa: ARG001
    line: str | None = None,  # noqa: ARG001
) -> None:
    logging.getLogger("probsoil").info("%s: %s (%s, line %d)", category.__name__, message, filename, lineno)


def _log_fault(root: logging.Logger, log: FolderLog, fault: BaseException) -> None:
    """Log what ended a run: in a line if it was foreseen, else with the traceback."""
    from probsoil.campaign.interruption import is_interrupt
    from probsoil.errors import ProbsoilError

    if is_interrupt(fault) or isinstance(fault, ProbsoilError):
        root.info("ended: %s", str(fault) or "interrupted")
        return
    record = root.makeRecord(root.name, logging.INFO, __file__, 0, "failed unexpectedly", (), None)
    record.exc_info = (type(fault), fault, fault.__traceback__)
    log.emit(record)
    if log.begun and log.path.is_file():
        fault.log = log.path  # type: ignore[attr-defined]
