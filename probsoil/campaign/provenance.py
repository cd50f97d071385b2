"""What a result was made with: enough to run it again and to see why another machine differs."""

import hashlib
import platform
from collections.abc import Mapping, Sequence
from datetime import datetime
from importlib import metadata
from pathlib import Path

import numpy as np

PACKAGES = ("numpy", "scipy", "numba", "pandas", "pydantic", "matplotlib")


def provenance(
    about: Mapping[str, object],
    *,
    started: datetime,
    seconds: Mapping[str, float],
    workers: int,
    command: str | None = None,
    packages: Sequence[str] = PACKAGES,
) -> dict[str, object]:
    """Return the record that goes with a result, ready for JSON.

    Parameters
    ----------
    about : mapping
        What only the caller knows (scenario file and digest, number of chunks, ...); goes in as it is.
    started : datetime
        When the run began, with its time zone.
    seconds : mapping of float, [s]
        Wall time by part of the run, `total` among them.
    workers : int, [-]
        Number of workers.
    command : str or None
        Command line, where there was one.
    packages : sequence of str
        Distributions whose versions the numbers depend on; those not installed are left out.

    Returns
    -------
    dict
        Keys `version`, `packages`, `python`, `platform`, `cpu_features`, `started`, `seconds`,
        `workers`, `command` and those of `about`.
    """
    return {
        **about,
        "version": _versions(("probsoil",)).get("probsoil", "not installed"),
        "packages": _versions(packages),
        "python": platform.python_version(),
        "platform": platform.platform(),
        "cpu_features": cpu_features(),
        "started": started.isoformat(timespec="seconds"),
        "seconds": {part: round(float(value), 3) for part, value in seconds.items()},
        "workers": workers,
        "command": command,
    }


def cpu_features() -> list[str]:
    """Return the processor's instruction sets that NumPy found and uses.

    Elementary functions can differ in the last digit between machines that differ here.

    Returns
    -------
    list of str
        Names as NumPy gives them, baseline first.
    """
    extensions = np.show_config(mode="dicts")["SIMD Extensions"]
    return [*extensions.get("baseline", []), *extensions.get("found", [])]


def file_digest(path: Path) -> str:
    """Return the SHA-256 of a file.

    Parameters
    ----------
    path : Path
        File to read.

    Returns
    -------
    str
        64 hexadecimal digits.
    """
    with path.open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()


def _versions(packages: Sequence[str]) -> dict[str, str]:
    versions = {}
    for name in packages:
        try:
            versions[name] = metadata.version(name)
        except metadata.PackageNotFoundError:
            continue
    return versions
