"""Folders that can be written, and files that are either whole or not there."""

import os
import tempfile
from contextlib import suppress
from pathlib import Path

from probsoil.errors import ResultsError

PROBE_BYTES = 65536  # a full disk takes an empty file gladly; this many it does not


def prepare_folder(folder: Path) -> Path:
    """Return the folder, made where missing, once it is known that it can be written.

    Parameters
    ----------
    folder : Path
        Folder to write to; parents are made too.

    Returns
    -------
    Path
        The same folder.

    Raises
    ------
    ResultsError
        If the folder cannot be made or a trial file cannot be written to it.
    """
    try:
        folder.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryFile(dir=folder) as stream:
            stream.write(bytes(PROBE_BYTES))
            stream.flush()
            os.fsync(stream.fileno())
    except OSError as fault:
        raise ResultsError(f"folder '{folder}' cannot be written: {_reason(folder, fault)}") from fault
    return folder


def write_durably(path: Path, content: bytes) -> None:
    """Write a file so that a crash leaves the old file, the new one or none, never a part of it.

    Parameters
    ----------
    path : Path
        File to write; an older one is replaced.
    content : bytes
        What to write.

    Raises
    ------
    ResultsError
        If the file cannot be written; an older file is then untouched.
    """
    temporary = temporary_name(path)
    try:
        with temporary.open("wb") as stream:
            stream.write(content)
            stream.flush()
            os.fsync(stream.fileno())
        temporary.replace(path)
    except OSError as fault:
        raise ResultsError(f"'{path}' cannot be written: {_reason(path, fault)}") from fault
    finally:
        with suppress(OSError):
            temporary.unlink(missing_ok=True)


def temporary_name(path: Path) -> Path:
    """Return the hidden name under which this process writes a file before it is renamed.

    Parameters
    ----------
    path : Path
        Final name.

    Returns
    -------
    Path
        Name in the same folder, so that the rename cannot cross a file system.
    """
    return path.with_name(f".{path.name}.{os.getpid()}.part")


def _reason(path: Path, fault: OSError) -> str:
    """Return why a path cannot be written, naming the file that stands in its way."""
    for part in (path, *path.parents):
        if part.is_file() and part != path:
            return f"'{part}' is a file, not a folder"
    if isinstance(fault, FileExistsError):
        return "it is a file, not a folder"
    return fault.strerror or str(fault)
