"""How the kernels are compiled, and what tells numba that a kept one has gone stale.

Numba keeps a compiled function on disk beside a stamp of the file that holds it, and does not notice when
a function or a constant that it takes from another file has changed. A kept function therefore carries
a digest of every file that kernels are made of in its name, which is where numba looks it up.
"""

import hashlib
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar, cast

from numba import njit

Kernel = TypeVar("Kernel", bound=Callable[..., Any])

_OPTIONS: dict[str, Any] = {"nogil": True, "error_model": "numpy", "fastmath": {"contract"}}


def compiled(function: Kernel) -> Kernel:
    """Compile a function that only kernels call, together with whatever calls it.

    Parameters
    ----------
    function : callable
        Part of a kernel.

    Returns
    -------
    compiled : callable
        The same, compiled for each kernel.
    """
    return cast("Kernel", njit(**_OPTIONS)(function))


def kernel_sources(folder: Path) -> list[Path]:
    """Return the files that kernels are made of: the private modules and the number of lanes.

    Parameters
    ----------
    folder : Path
        This room.

    Returns
    -------
    sources : list of Path
        In order of their names.
    """
    return sorted([*folder.glob("_*.py"), folder / "lanes.py"])


def digest(sources: list[Path]) -> str:
    """Return eight hexadecimal digits that change when a file does.

    Parameters
    ----------
    sources : list of Path
        Files.

    Returns
    -------
    digits : str
        From the names and contents of the files.
    """
    found = hashlib.blake2b(digest_size=4)
    for source in sources:
        found.update(source.name.encode() + source.read_bytes())
    return found.hexdigest()


_DIGEST = digest(kernel_sources(Path(__file__).parent))


def kept(function: Kernel) -> Kernel:
    """Compile a kernel that Python calls, and keep it on disk for the next process.

    Parameters
    ----------
    function : callable
        Kernel.

    Returns
    -------
    compiled : callable
        The same, compiled when it is first called or taken from disk.
    """
    function.__qualname__ = f"{function.__qualname__}_{_DIGEST}"
    return cast("Kernel", njit(cache=True, **_OPTIONS)(function))
