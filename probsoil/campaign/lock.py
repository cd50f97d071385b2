"""One run at a time in a folder: a lock file that says which process holds it."""

import json
import os
import socket
import threading
from collections.abc import Iterator, Mapping
from contextlib import contextmanager, suppress
from datetime import datetime
from pathlib import Path

from probsoil.campaign.files import prepare_folder
from probsoil.errors import ResultsError

LOCK = "run.lock"

# Folders this process holds, and the thread that locked each: only that thread may enter again.
_held: dict[Path, int] = {}
_taking = threading.Lock()


@contextmanager
def locked_folder(folder: Path) -> Iterator[Path]:
    """Hold a folder, made where missing, so that no other run writes to it.

    The thread that holds a folder may lock it once more; only the outermost lock is let go.

    Parameters
    ----------
    folder : Path
        Folder to write to.

    Yields
    ------
    Path
        The same folder, known to be writable.

    Raises
    ------
    ResultsError
        If the folder cannot be written, or another run holds it; nothing in it is then touched.
    """
    place = folder.resolve()
    if _held.get(place) == threading.get_ident():
        yield folder
        return
    made = not folder.exists()
    prepare_folder(folder)
    lock = folder / LOCK
    with _taking:
        mine = _acquire(lock)
        _held[place] = threading.get_ident()
    try:
        yield folder
    finally:
        del _held[place]
        if _content(lock) == mine:
            with suppress(OSError):
                lock.unlink()
        if made:
            with suppress(OSError):  # not empty: there is something to keep
                folder.rmdir()


def _acquire(lock: Path) -> str:
    """Make the lock file and return what stands in it."""
    mine = json.dumps(_holder())
    for _ in range(3):  # once, and again where a lock was left behind or let go in between
        try:
            descriptor = os.open(lock, os.O_CREAT | os.O_EXCL | os.O_WRONLY, 0o644)
        except FileExistsError:
            found = _content(lock)
            if found is not None and not _is_left_behind(lock, found):
                raise ResultsError(_refusal(lock, found)) from None
            if found is not None:
                _remove(lock, found)
            continue
        except OSError as fault:
            raise ResultsError(f"'{lock}' cannot be written: {fault.strerror}") from fault
        with os.fdopen(descriptor, "w", encoding="utf-8") as stream:
            stream.write(mine)
        return mine
    raise ResultsError(f"'{lock}' comes and goes: other runs are using this folder; name another one")


def _holder() -> dict[str, object]:
    """Return what tells this process from every other."""
    return {
        "pid": os.getpid(),
        "host": socket.gethostname(),
        "process_started": _process_started(os.getpid()),
        "since": datetime.now().astimezone().isoformat(timespec="seconds"),
    }


def _content(lock: Path) -> str | None:
    """Return what stands in a lock file, None where there is none."""
    try:
        return lock.read_text(encoding="utf-8")
    except FileNotFoundError:
        return None
    except (OSError, ValueError):
        return ""


def _read(content: str) -> Mapping[str, object]:
    try:
        found = json.loads(content)
    except ValueError:
        return {}
    return found if isinstance(found, dict) else {}


def _is_left_behind(lock: Path, content: str) -> bool:
    """Whether the process that made a lock is certain to be gone."""
    found = _read(content)
    pid = found.get("pid")
    if found.get("host") != socket.gethostname() or not isinstance(pid, int) or pid < 1:
        return False
    if pid == os.getpid():  # a process before this one had the same number, as in a container
        return lock.parent.resolve() not in _held
    return not _is_alive(pid) or found.get("process_started") != _process_started(pid)


def _is_alive(pid: int) -> bool:
    if os.name == "nt":  # signal 0 would be an interrupt there
        return True
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    except OSError:  # it is there, and another user's
        return True
    return True


def _process_started(pid: int) -> str | None:
    """Return when a process began, in the system's own count; None where the system does not say."""
    try:
        text = Path(f"/proc/{pid}/stat").read_text(encoding="utf-8", errors="replace")
    except OSError:
        return None
    # The name of the program may hold blanks and brackets; the 20th field after it is the start.
    fields = text.rpartition(")")[2].split()
    return fields[19] if len(fields) > 19 else None


def _remove(lock: Path, judged: str) -> None:
    """Remove a lock that was left behind, and no other that may have taken its place since."""
    aside = lock.with_name(f"{lock.name}.{os.getpid()}")
    with suppress(OSError):
        lock.rename(aside)
        if _content(aside) != judged:
            aside.rename(lock)
            return
        aside.unlink()


def _refusal(lock: Path, content: str) -> str:
    found = _read(content)
    machine = "this machine" if found.get("host") == socket.gethostname() else f"host '{found.get('host')}'"
    by = f"process {found['pid']} on {machine}, since {found.get('since')}" if "pid" in found else "unknown"
    return (
        f"another run is at work in '{lock.parent}' ({by}): wait for it to end or name another folder; "
        f"if you are sure that it is over, delete '{lock}'"
    )
