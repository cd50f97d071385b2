"""Functions that campaigns of the tests evaluate, importable by worker processes."""

import os
import signal
import time

import numpy as np
from numpy.typing import NDArray

from probsoil.campaign import Identity, campaign_identity

GUILTY = 5
N_CHUNKS = 12


def named(name: str) -> Identity:
    """Return an identity that differs from others by a name."""
    return campaign_identity({"name": name})


OURS = named("ours")


def drawn(index: int) -> dict[str, NDArray[np.generic]]:
    """Return a chunk whose last digits betray any change of order or of generator."""
    generator = np.random.default_rng(np.random.SeedSequence(41, spawn_key=(1, index)))
    z = generator.standard_normal((257, 3))
    return {"value": np.exp(z).sum(axis=1), "over": z[:, 0] > 1.0, "index": np.array(index)}


def slow(index: int) -> dict[str, NDArray[np.generic]]:
    """Return the same chunk later, so that there is time to interrupt."""
    time.sleep(0.15)
    return drawn(index)


def deadly(index: int) -> dict[str, NDArray[np.generic]]:
    """End the worker process in one chunk."""
    if index == GUILTY:
        os._exit(7)
    return drawn(index)


def faulty(index: int) -> dict[str, NDArray[np.generic]]:
    """Fail in one chunk."""
    if index == GUILTY:
        raise ZeroDivisionError("no clay here")
    return drawn(index)


def killed_once(index: int) -> dict[str, NDArray[np.generic]]:
    """End the worker process in one chunk, but only the first time (a marker file tells)."""
    marker = os.environ["PROBSOIL_TEST_MARKER"]
    if index == GUILTY and not os.path.exists(marker):  # noqa: PTH110
        with open(marker, "w"):  # noqa: PTH123
            pass
        os.kill(os.getpid(), signal.SIGKILL)
    return drawn(index)
