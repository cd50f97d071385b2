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
from probsoil.campaign.identity import Identity, differences
from probsoil.errors import ProbsoilError, ResultsError, UnfitFolderError

FORMAT = 2
MANIFEST = "manifest.json"
NOTICE = 25
"""Level of what a user is told in passing: above information, below a warning."""
MOST_DIFFERENCES = 12  # named in a refusal; the rest are counted
GUARD_LENGTH = 64  # hexadecimal digits of a SHA-256

logging.addLevelName(NOTICE, "NOTICE")
logger = logging.getLogger(__name__)


class ChunkStore:
    """The chunks of one campaign that reached disk.

    Use `open_store`, which checks the folder first.

    Parameters
    ----------
    folder : Path
        Folder of the chunk files; it exists.
    identity : Identity
        Identity of the campaign.
    n_chunks : int, [-]
        Number of chunks of the campaign.

    Attributes
    ----------
    folder : Path
        Folder of the chunk files.
    """

    def __init__(self, folder: Path, *, identity: Identity, n_chunks: int) -> None:
        self.folder = folder
        self._identity = identity.digest
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


def open_store(
    folder: Path, *, identity: Identity, n_chunks: int, resume: bool = False, force: bool = False
) -> ChunkStore:
    """Return a store that is known to be writable and to belong to this campaign.

    Chunks of this campaign that are in the folder already are gone on from.

    Parameters
    ----------
    folder : Path
        Folder of the chunk files, made where missing.
    identity : Identity
        Identity of the campaign, see `campaign_identity`.
    n_chunks : int, [-]
        Number of chunks of the campaign.
    resume : bool
        Whether to insist that there are chunks to go on from.
    force : bool
        Whether to remove chunks of another campaign rather than refuse.

    Returns
    -------
    ChunkStore
        The store.

    Raises
    ------
    ResultsError
        If the folder cannot be written.
    UnfitFolderError
        If the folder holds chunks of another campaign, or none where `resume` insists; nothing in
        it is then touched.
    """
    store = ChunkStore(folder, identity=identity, n_chunks=n_chunks)
    kept = kept_chunks(folder)
    if kept:
        differing = _differences(folder / MANIFEST, identity, n_chunks)
        if differing is None:
            return _gone_on_from(store, kept, n_chunks)
        if resume or not force:
            raise UnfitFolderError(_refusal(folder, kept, differing))
    elif resume:
        raise UnfitFolderError(
            f"'{folder}' holds no finished chunks to go on from (a run that was completed leaves none); "
            "run the same without resuming (--resume)"
        )
    if len(store):
        logger.warning("%d chunks of another run in '%s' are not used and removed", len(store), folder)
    discard_chunks(folder)
    prepare_folder(folder)
    manifest = {"format": FORMAT, "n_chunks": n_chunks, **identity.to_dict()}
    write_durably(folder / MANIFEST, (json.dumps(manifest, indent=1) + "\n").encode())
    return store


def _gone_on_from(store: ChunkStore, kept: int, n_chunks: int) -> ChunkStore:
    """Return a store whose chunks are this campaign's, and say so."""
    prepare_folder(store.folder)
    _remove(store.folder, ".chunk-*.part")
    logger.log(
        NOTICE, "Going on from %d of %d chunks that are finished in '%s'", kept, n_chunks, store.folder
    )
    return store


def kept_chunks(folder: Path) -> int:
    """Return how many finished chunks a folder holds that a campaign can go on from.

    Parameters
    ----------
    folder : Path
        Folder given to `open_store`.

    Returns
    -------
    int, [-]
        Number of chunk files; 0 where no manifest says whose they are.
    """
    return sum(1 for _ in folder.glob("chunk-*.npz")) if (folder / MANIFEST).exists() else 0


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


def _differences(path: Path, identity: Identity, n_chunks: int) -> list[str] | None:
    """Return how a stored manifest differs from what is asked for; None where it does not."""
    try:
        found = json.loads(path.read_bytes())
    except (OSError, ValueError) as fault:
        return [f"'{path.name}', which says whose they are, cannot be read ({fault})"]
    if not isinstance(found, Mapping) or found.get("format") != FORMAT:
        return [f"'{path.name}', which says whose they are, is of another form"]
    listed = differences(found, identity)
    if not listed and found.get("n_chunks") != n_chunks:
        listed = [f"the number of chunks was {found.get('n_chunks')}, is {n_chunks}"]
    return listed or None


def _refusal(folder: Path, kept: int, differing: list[str]) -> str:
    """Say why chunks cannot be gone on from, and what to do."""
    lines = [f"  {phrase}" for phrase in differing[:MOST_DIFFERENCES]]
    if len(differing) > MOST_DIFFERENCES:
        lines.append(f"  and {len(differing) - MOST_DIFFERENCES} more differences")
    chunks = "1 finished chunk" if kept == 1 else f"{kept} finished chunks"
    return "\n".join(
        [
            f"'{folder}' holds {chunks} of another run, not of the one asked for:",
            *lines,
            "ask for that run again to go on from there, name another folder, or let what was kept be "
            "removed (--force)",
        ]
    )


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
