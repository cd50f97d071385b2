"""When a degree of consolidation is reached, between computed times."""

import numpy as np

from probsoil._typing import FloatArray


def time_to_degree(times: FloatArray, degree: FloatArray, wanted: float) -> FloatArray:
    """Return when a degree of consolidation is first reached, infinite if never.

    Parameters
    ----------
    times : ndarray, shape (n_time,), [years]
        Computed times, rising.
    degree : ndarray, shape (n_sample, n_time), [-]
        Degree of consolidation at these times.
    wanted : float, [-]
        Degree.

    Returns
    -------
    time : ndarray, shape (n_sample,), [years]
        Between two computed times the time factor that Terzaghi's theory gives the degree is taken
        as linear in time.
    """
    reached = degree >= wanted
    index = np.where(reached.any(axis=1), reached.argmax(axis=1), -1)
    rows, before = np.arange(index.size), np.maximum(index - 1, 0)
    low, high = _straightened(degree[rows, before]), _straightened(degree[rows, index])
    share = (_straightened(np.array(wanted)) - low) / np.where(high > low, high - low, 1.0)
    time = times[before] + np.clip(share, 0.0, 1.0) * (times[index] - times[before])
    return np.asarray(np.where(index < 0, np.inf, time), dtype=np.float64)


def _straightened(degree: FloatArray) -> FloatArray:
    """Return the time factor that Terzaghi's theory gives a degree, nearly straight in time.

    Its two usual forms, the parabola up to 60 % and the exponential tail beyond.
    """
    tail = -np.log(np.maximum(1.0 - degree, 1e-9))
    start = 0.6
    joined = np.pi / 4.0 * start**2 + (tail + np.log(1.0 - start)) * 4.0 / np.pi**2
    return np.asarray(np.where(degree <= start, np.pi / 4.0 * degree**2, joined))
