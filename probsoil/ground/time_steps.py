"""When the consolidation is computed: short steps after each change of load, then longer ones."""

from collections.abc import Sequence
from itertools import pairwise

import numpy as np

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError

GROWTH = 1.4
_RAMP_STEPS = 12  # within a ramp: clay that drains as fast as it is loaded yields at some time within it
_RAMP_GRADING = 1.25  # power of the time within a ramp, so that its first steps are shorter
_FIRST_SHARE = 0.0625  # of the ramp that ends where the steps begin
_SUDDEN_SHARE = 0.001  # of the horizon, for the length of a ramp where something sudden happens
_NEAR = 0.3  # a free step that ends this close (in steps) to a wanted time gives way


def time_axis(
    ramps: Sequence[tuple[float, float]],
    wanted: Sequence[float],
    horizon: float,
    *,
    restart: Sequence[float] = (),
    sudden_start: bool = False,
    refine: int = 1,
) -> FloatArray:
    """Return the times at which the ground is computed.

    Parameters
    ----------
    ramps : sequence of (float, float), [years]
        Start and end of each change of load; where two share a time, the later in the list says how fine
        the steps are there.
    wanted : sequence of float, [years]
        Further times that must be hit exactly.
    horizon : float, [years]
        End of the axis.
    restart : sequence of float, [years]
        Other times at which something sudden happens and the steps start anew.
    sudden_start : bool
        Whether the ground is out of balance at the start, as if loaded suddenly then.
    refine : int, [-]
        Steps are about this many times shorter.

    Returns
    -------
    times : ndarray, shape (n_time,), [years]
        Rising from 0 to `horizon`; every start and end of a ramp and every wanted time is on it.

    Raises
    ------
    ParameterError
        If a wanted time or a ramp lies outside 0 to `horizon`.

    Notes
    -----
    A ramp has a dozen steps. From its end the steps grow by a constant factor, beginning with a
    sixteenth of the ramp's length: excess pore pressure decays on every time scale at once, and
    a geometric sequence resolves them alike.
    """
    sudden = [time for time in restart if 0.0 < time < horizon]
    knots = sorted({0.0, horizon, *sudden, *(t for ramp in ramps for t in ramp)})
    if knots[0] < 0.0 or knots[-1] > horizon or any(not 0.0 <= t <= horizon for t in wanted):
        raise ParameterError(f"all times must lie from 0 to the horizon of {horizon:g} years")
    length = {start: end - start for start, end in ramps} | {end: end - start for start, end in ramps}
    length |= {time: _SUDDEN_SHARE * horizon for time in sudden if time not in length}
    if sudden_start:
        length[0.0] = min(_SUDDEN_SHARE * horizon, length.get(0.0, horizon))
    pieces = []
    for start, end in pairwise(knots):
        first = _FIRST_SHARE * length.get(start, (end - start) / _FIRST_SHARE) / refine
        growth = GROWTH ** (1.0 / refine)
        if any(ramp[0] <= start and end <= ramp[1] for ramp in ramps):
            in_ramp = start + (end - start) * _in_ramp(_RAMP_STEPS * refine)
            if sudden_start and start == 0.0:
                pieces.append(_piece(start, in_ramp[0], first, growth))
            pieces.append(in_ramp)
        else:
            pieces.append(_piece(start, end, first, growth))
    free = np.concatenate([[0.0], *pieces])
    fixed = np.unique(np.concatenate([knots, np.asarray(wanted, dtype=np.float64)]))
    return _with(free, fixed)


def _in_ramp(number: int) -> FloatArray:
    """Return ends of steps within a ramp, as shares of its length."""
    return np.asarray((np.arange(1, number + 1) / number) ** _RAMP_GRADING)


def _piece(start: float, end: float, first: float, growth: float) -> FloatArray:
    """Return step ends after `start` up to and with `end`, growing from about `first`."""
    span = end - start
    first = min(first, span)
    number = int(np.ceil(np.log1p(span * (growth - 1.0) / first) / np.log(growth) - 1e-9))
    steps = growth ** np.arange(number)
    ends = start + span * np.cumsum(steps) / steps.sum()
    ends[-1] = end
    return np.asarray(ends)


def _with(free: FloatArray, fixed: FloatArray) -> FloatArray:
    """Return `free` joined with `fixed`, without free times that crowd a fixed one."""
    step = np.gradient(free)
    nearest = np.abs(free[:, None] - fixed[None, :]).min(axis=1)
    return np.unique(np.concatenate([free[nearest > _NEAR * step], fixed]))
