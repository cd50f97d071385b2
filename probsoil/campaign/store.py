"""Finished chunks on disk: one guarded file per chunk and a manifest that says whose they are.

A chunk file is an ordinary npz archive, readable by `numpy.load` alone. Its zip comment, the last
64 bytes, is the SHA-256 of the campaign's identity, the chunk number and all bytes before it, so a
file that was cut short, altered, or copied from another campaign or chunk is told apart before
any of it is parsed, and is computed again.
"""

import hashlib
import io
import json
import logging
import shutil
import zipfile
from collections.abc import Mapping
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from probsoil.campaign.files import prepare_folder, write_durably
from probsoil.errors import ProbsoilError, ResultsError

FORMAT = 1
MANIFEST = "manifest.json"
GUARD_LENGTH = 64  # hexadecimal digits of a SHA-256

logger = logging.getLogger(__name__)


def campaign_identity(content: str | bytes, **settings: str | float) -> str:
    """Return a text that is the same for two campaigns only if their results are the same.

    Parameters
    ----------
    content : str or bytes
        What is computed, such as the text of the input file.
    **settings : str or float
        Everything else the results depend on (seed, number of realisations, version, ...).

    Returns
    -------
    str
        SHA-256 of content and settings, with the settings written out for people to read.

    Examples
    --------
    >>> campaign_identity("a = 1", seed=3)[-8:]
    '(seed 3)'
    """
    data = content.encode() if isinstance(content, str) else content
    stated = json.dumps(settings, sort_keys=True)
    digest = hashlib.sha256(hashlib.sha256(data).digest() + stated.encode()).hexdigest()
    return f"{digest} ({', '.join(f'{key} {value}' for key, value in settings.items())})"


class ChunkStore:
    """The chunks of one campaign that reached disk.

    Use `open_store`, which checks the folder first.

    Parameters
    ----------
    folder : Path
        Folder of the chunk files; it exists.
    identity : str
        Identity of the campaign.
    n_chunks : int, [-]
        Number of chunks of the campaign.

    Attributes
    ----------
    folder : Path
        Folder of the chunk files.
    """

    def __init__(self, folder: Path, *, identity: str, n_chunks: int) -> None:
        self.folder = folder
        self._identity = identity
        self._n_chunks = n_chunks
        self._room_checked = False

    def __len__(self) -> int:
        """Return how many chunk files are in the folder."""
        return sum(1 for _ in self.folder.glob("chunk-*.npz"))

    def path(self, index: int) -> Path:
        """Return the file of a chunk.

        Parameters
        ----------
        index : int, [-]
            Chunk number from 0.

        Returns
        -------
        Path
            Its file, whether there or not.
        """
        return self.folder / f"chunk-{index:06d}.npz"

    def read(self, index: int) -> dict[str, NDArray[np.generic]] | None:
        """Return a stored chunk, or None where there is no whole one of this campaign.

        Parameters
        ----------
        index : int, [-]
            Chunk number from 0.

        Returns
        -------
        dict of ndarray or None
            The arrays by name, bit for bit as they were written.
        """
        path = self.path(index)
        try:
            data = path.read_bytes()
        except FileNotFoundError:
            return None
        except OSError as fault:
            logger.warning("%s cannot be read (%s); the chunk is computed again", path, fault.strerror)
            return None
        if data[-GUARD_LENGTH:] != self._guard(index, data[:-GUARD_LENGTH]):
            logger.warning("%s is damaged or not of this campaign; the chunk is computed again", path)
            return None
        with np.load(io.BytesIO(data), allow_pickle=False) as archive:
            return {name: archive[name] for name in archive.files}

    def write(self, index: int, result: Mapping[str, NDArray[np.generic]]) -> None:
        """Keep a finished chunk.

        Parameters
        ----------
        index : int, [-]
            Chunk number from 0.
        result : mapping of ndarray
            The arrays by name; no Python objects.

        Raises
        ------
        ProbsoilError
            If an array holds Python objects.
        ResultsError
            If the file cannot be written, or the disk has no room for the chunks to come.
        """
        body = _archive(index, result)
        data = body + self._guard(index, body)
        self._check_room(len(data))
        write_durably(self.path(index), data)

    def _guard(self, index: int, body: bytes) -> bytes:
        """Return the guard of a chunk file's body."""
        digest = hashlib.sha256(f"{self._identity}\n{index}\n".encode())
        digest.update(body)
        return digest.hexdigest().encode()

    def _check_room(self, size: int) -> None:
        """Refuse at the first chunk what would fill the disk at the last: chunks are alike in size."""
        if self._room_checked:
            return
        self._room_checked = True
        needed = size * (self._n_chunks - len(self))
        free = shutil.disk_usage(self.folder).free
        if needed > free:
            raise ResultsError(
                f"no room for the chunks in '{self.folder}': "
                f"{needed / 1e6:.1f} MB needed, {free / 1e6:.1f} MB free"
            )


def open_store(folder: Path, *, identity: str, n_chunks: int, resume: bool) -> ChunkStore:
    """Return a store that is known to be writable and to belong to this campaign.

    Parameters
    ----------
    folder : Path
        Folder of the chunk files, made where missing.
    identity : str
        Identity of the campaign, see `campaign_identity`.
    n_chunks : int, [-]
        Number of chunks of the campaign.
    resume : bool
        Whether to go on from chunks found in the folder. Where false, they are removed.

    Returns
    -------
    ChunkStore
        The store.

    Raises
    ------
    ResultsError
        If the folder cannot be written, or is to be resumed and is of another campaign.
    """
    prepare_folder(folder)
    store = ChunkStore(folder, identity=identity, n_chunks=n_chunks)
    manifest = {"format": FORMAT, "identity": identity, "n_chunks": n_chunks}
    found = folder / MANIFEST
    if resume and found.exists():
        _require_same(found, manifest)
        logger.info("going on from %d of %d chunks in '%s'", len(store), n_chunks, folder)
        _remove(folder, ".chunk-*.part")
        return store
    if len(store):
        logger.warning("%d chunks of an earlier run in '%s' are not used and removed", len(store), folder)
    discard_chunks(folder)
    prepare_folder(folder)
    write_durably(found, (json.dumps(manifest, indent=2) + "\n").encode())
    return store


def discard_chunks(folder: Path) -> None:
    """Remove a campaign's chunk files and manifest, and the folder if nothing else is in it.

    Parameters
    ----------
    folder : Path
        Folder given to `open_store`; files of other kinds are left alone.

    Raises
    ------
    ResultsError
        If a file cannot be removed.
    """
    # The manifest goes first: chunk files without one are never resumed from.
    _remove(folder, MANIFEST, f".{MANIFEST}.*.part", ".chunk-*.part", "chunk-*.npz")
    try:
        if folder.is_dir() and not any(folder.iterdir()):
            folder.rmdir()
    except OSError as fault:
        raise ResultsError(f"'{folder}' cannot be removed: {fault.strerror}") from fault


def _remove(folder: Path, *patterns: str) -> None:
    """Remove the files of a folder that match any of the patterns, in their order."""
    for pattern in patterns:
        for path in folder.glob(pattern):
            try:
                path.unlink(missing_ok=True)
            except OSError as fault:
                raise ResultsError(f"'{path}' cannot be removed: {fault.strerror}") from fault


def _require_same(path: Path, expected: Mapping[str, object]) -> None:
    """Refuse a manifest of another campaign."""
    try:
        found = json.loads(path.read_bytes())
    except (OSError, ValueError) as fault:
        raise ResultsError(
            f"'{path}' cannot be read ({fault}); start anew without resuming, or name another folder"
        ) from fault
    if found != expected:
        raise ResultsError(
            f"the chunks in '{path.parent}' are of another campaign and cannot be resumed:\n"
            f"  in the folder: {_named(found)}\n  asked for:     {_named(expected)}\n"
            "start anew without resuming, or name another folder"
        )


def _named(manifest: object) -> str:
    """Return a manifest in one line."""
    if not isinstance(manifest, Mapping):
        return repr(manifest)
    return f"format {manifest.get('format')}, {manifest.get('n_chunks')} chunks, {manifest.get('identity')}"


def _archive(index: int, result: Mapping[str, NDArray[np.generic]]) -> bytes:
    """Return the npz archive of a chunk up to its zip comment, which is left for the guard."""
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w") as archive:
        for name, array in result.items():
            if array.dtype.hasobject:
                raise ProbsoilError(f"chunk {index}: array '{name}' holds Python objects and cannot be kept")
            # A bare ZipInfo has a fixed date, so equal chunks make equal files.
            with archive.open(zipfile.ZipInfo(f"{name}.npy"), "w", force_zip64=True) as member:
                np.lib.format.write_array(member, array, allow_pickle=False)
        archive.comment = bytes(GUARD_LENGTH)
    return stream.getvalue()[:-GUARD_LENGTH]
