"""The folder of one assessment: what a run writes there, and when it may."""

import json
import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from probsoil.campaign import kept_chunks, locked_folder
from probsoil.errors import ResultsError, UnfitFolderError

CHUNKS = "chunks"
RESULTS = "results.json"
COPY = "scenario.toml"
REALISATIONS_FILE = "realisations.npz"
FIGURES = "figures"
EVIDENCE_COPIES = "evidence_*.csv"
"""Copies of the files of test results that the scenario names."""

_TABLES = ("limits.csv", "curves.csv", "drivers.csv", "settlement.csv", "parameters.csv")
OCCASIONAL = (
    "together.csv",
    "precision.csv",
    "stations.csv",
    "station_pairs.csv",
    "added_fill.csv",
    "tests.csv",
    "updated_parameters.csv",
)
"""Tables that only some scenarios have."""

FILES = (RESULTS, REALISATIONS_FILE, COPY, "report.html", *_TABLES, *OCCASIONAL)


@contextmanager
def claimed_folder(folder: Path, *, source: Path | None = None, force: bool = False) -> Iterator[Path]:
    """Hold a folder for a run, once it is known that the run may write there.

    Parameters
    ----------
    folder : Path
        Results folder, made where missing.
    source : Path or None
        Scenario file; it may lie in the folder.
    force : bool
        Whether files that are not a run's may be overwritten.

    Yields
    ------
    Path
        The same folder, locked.

    Raises
    ------
    ResultsError
        If the folder cannot be written, another run is at work in it, or something stands where a
        file or folder of the results is to be.
    UnfitFolderError
        If the run would overwrite files that no run wrote, unless `force`.
    """
    with locked_folder(folder):
        _require_free(folder)
        if not force:
            _require_ours(folder, source)
        yield folder


def _require_free(folder: Path) -> None:
    """Find what blocks the results before anything is computed for them."""
    for name in (*FILES, "log.txt"):
        if (folder / name).is_dir():
            raise ResultsError(
                f"'{folder / name}' is a folder, where the results need a file of that name: "
                "move it away or name another folder"
            )
    for name in (FIGURES, CHUNKS):
        path = folder / name
        if path.is_dir():
            if not os.access(path, os.W_OK | os.X_OK):
                raise ResultsError(f"'{path}' cannot be written: no permission")
        elif os.path.lexists(path):
            raise ResultsError(
                f"'{path}' is a file, where the results need a folder of that name: "
                "move it away or name another folder"
            )


def _require_ours(folder: Path, source: Path | None) -> None:
    """Refuse to overwrite what somebody else wrote."""
    if kept_chunks(folder / CHUNKS) or _is_result(folder / RESULTS):
        return
    read = None if source is None else source.resolve()
    paths = [folder / name for name in FILES] + sorted((folder / FIGURES).glob("*.svg"))
    paths += sorted(folder.glob(EVIDENCE_COPIES))
    strange = [path for path in paths if os.path.lexists(path) and path.resolve() != read]
    if strange:
        named = ", ".join(f"'{path}'" for path in strange[:4]) + (", ..." if len(strange) > 4 else "")
        raise UnfitFolderError(
            f"'{folder}' holds no results of an earlier run, but files that this run would overwrite: "
            f"{named}; name another folder, or let them be overwritten (--force)"
        )


def _is_result(path: Path) -> bool:
    try:
        found = json.loads(path.read_bytes())
    except (OSError, ValueError):
        return False
    return isinstance(found, dict) and found.get("kind") == "assess"
