"""Compression of one increment against time: coefficient of consolidation and secondary compression."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray
from probsoil.laboratory.regression import PRIOR_READINGS, Estimate, widened
from probsoil.laboratory.sheets import TimeReadings

DIAL_SCATTER = 0.002
"""Standard deviation of a dial reading expected beforehand [mm]; a judgement."""

UNSTEADY = 0.15
"""Error of ln cv where a construction hangs on one reading [-]; a judgement."""

LOG_TIME_FACTOR, ROOT_TIME_FACTOR, ROOT_TIME_SLOPE = 0.197, 0.848, 1.155
"""Time factors at 50 and 90 % and the flatter line of the root-time method [-]."""

MM2_PER_MINUTE = 1e-6 * 365.25 * 1440.0
"""One mm2/min in m2/year."""

LEAST_READINGS = 8
_STRAIGHT = 0.55  # share of primary compression up to which it is straight against the root of time
_TAIL = 2.5  # tail begins at so many times the crossing of the two tangents
_FINE = np.linspace(0.0, 1.0, 33)


class _Unfit(Exception):  # noqa: N818 - not an error: the reason is told to the user
    """A construction cannot be made."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LogTime:
    """Casagrande's construction.

    Attributes
    ----------
    start, middle, end : float, [mm]
        Compression at 0, 50 and 100 % of primary consolidation.
    time : float, [min]
        At 50 %.
    tangent, tail : tuple of float, [mm]
        Intercept and slope against log10 of minutes: steepest tangent, and line through the tail.
    crossing : float, [min]
        Where the two meet.
    """

    start: float
    middle: float
    end: float
    time: float
    tangent: tuple[float, float]
    tail: tuple[float, float]
    crossing: float


@dataclass(frozen=True, slots=True, kw_only=True)
class RootTime:
    """Taylor's construction.

    Attributes
    ----------
    start, at_90, end : float, [mm]
        Compression at 0, 90 and 100 % of primary consolidation.
    time : float, [min]
        At 90 %.
    slope : float, [mm/min^0.5]
        Of the straight line against the root of time.
    """

    start: float
    at_90: float
    end: float
    time: float
    slope: float


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeCurve:
    """What one increment gives.

    Attributes
    ----------
    path : float, [mm]
        Length of the drainage path, mean of the increment.
    log_time : LogTime or None
        Casagrande's construction.
    root_time : RootTime or None
        Taylor's construction.
    cv_log_time, cv_root_time : Estimate or None, [m2/year]
        Of each construction, by the scatter of the readings alone.
    cv : Estimate or None, [m2/year]
        Geometric mean of both; its error joins the scatter of the readings with half the difference.
    creep : Estimate or None, [mm]
        Compression per tenfold time in the tail.
    remarks : tuple of str
        Why something is missing.
    """

    path: float
    log_time: LogTime | None = None
    root_time: RootTime | None = None
    cv_log_time: Estimate | None = None
    cv_root_time: Estimate | None = None
    cv: Estimate | None = None
    creep: Estimate | None = None
    remarks: tuple[str, ...] = ()


def log_time(time: FloatArray, compression: FloatArray) -> LogTime:
    """Make Casagrande's construction on compression against the logarithm of time.

    Parameters
    ----------
    time : ndarray, shape (n,), [min]
        Above zero, rising.
    compression : ndarray, shape (n,), [mm]
        Of the specimen.

    Returns
    -------
    construction : LogTime
        Start by the parabola (as much before a time as between it and four times it), end where the
        steepest tangent and the line through the tail meet.

    References
    ----------
    Casagrande, A. and Fadum, R.E. (1940). Notes on soil testing for engineering purposes. Harvard
    University, Soil Mechanics Series 8. Recalled; not opened.
    """
    log = np.log10(time)
    threes = (
        np.stack([log[:-2], log[1:-1], log[2:]]),
        np.stack([compression[k : k + log.size - 2] for k in range(3)]),
    )
    intercept, slope = _line(*threes)
    steepest = int(np.argmax(slope))
    tangent = float(intercept[steepest]), float(slope[steepest])
    crossing, tail = _tail(log, compression, tangent)
    end = tail[0] + tail[1] * crossing
    start = _start(time, compression, end)
    middle = 0.5 * (start + end)
    return LogTime(
        start=start,
        middle=middle,
        end=end,
        time=float(10.0 ** _reached(log, compression, np.full(log.size, middle))),
        tangent=tangent,
        tail=tail,
        crossing=float(10.0**crossing),
    )


def _line(x: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return intercept and slope of least-squares lines, readings along the first axis."""
    middle = x.mean(axis=0)
    off = x - middle
    slope = (off * y).sum(axis=0) / (off * off).sum(axis=0)
    return y.mean(axis=0) - slope * middle, slope


def _tail(
    log: FloatArray, compression: FloatArray, tangent: tuple[float, float]
) -> tuple[float, tuple[float, float]]:
    first = log.size - 3
    for _ in range(4):
        intercept, slope = (float(one) for one in _line(log[first:], compression[first:]))
        if slope > 0.5 * tangent[1]:
            raise _Unfit("no tail: the readings end before the curve flattens")
        crossing = (intercept - tangent[0]) / (tangent[1] - slope)
        used, first = first, min(int(np.searchsorted(log, crossing + np.log10(_TAIL))), log.size - 2)
        if first == used:
            break
    if log[-2] < crossing + np.log10(_TAIL) - 1e-9:
        raise _Unfit("no tail: fewer than two readings after primary consolidation")
    return crossing, (intercept, slope)


def _start(time: FloatArray, compression: FloatArray, end: float) -> float:
    """Return the compression at which the parabola of early time begins."""
    root, limit = np.sqrt(time), compression[0] + 0.5 * (end - compression[0])
    later = np.interp(2.0 * root, root, compression)
    early = (later <= limit) & (4.0 * time <= time[-1])
    if not early.any():
        raise _Unfit("no parabola at early time: the first readings come too late")
    return float((2.0 * compression - later)[early][:4].mean())


def root_time(time: FloatArray, compression: FloatArray) -> RootTime:
    """Make Taylor's construction on compression against the root of time.

    Parameters
    ----------
    time : ndarray, shape (n,), [min]
        Above zero, rising.
    compression : ndarray, shape (n,), [mm]
        Of the specimen.

    Returns
    -------
    construction : RootTime
        A straight line through early readings, and where the curve meets the line 1.155 times as far out.

    References
    ----------
    Taylor, D.W. (1948). Fundamentals of soil mechanics. Wiley, New York. Recalled; not opened.
    """
    root = np.sqrt(time)
    start, end = float(compression[0]), float(compression[-1])
    early = np.zeros(root.size, dtype=bool)
    for _ in range(6):
        used, early = early, compression <= start + _STRAIGHT * (end - start)
        if np.array_equal(used, early):
            break
        if early.sum() < 3:
            raise _Unfit("fewer than three readings on the straight part against the root of time")
        start, slope = (float(one) for one in _line(root[early], compression[early]))
        if slope <= 0.0:
            raise _Unfit("no straight part against the root of time")
        flatter = start + slope / ROOT_TIME_SLOPE * root
        at = _reached(root, compression - flatter, np.zeros(root.size), falling=True)
        at_90 = start + slope / ROOT_TIME_SLOPE * at
        end = start + (at_90 - start) / 0.9
    return RootTime(start=start, at_90=at_90, end=end, time=at**2, slope=slope)


def _reached(x: FloatArray, y: FloatArray, level: FloatArray, *, falling: bool = False) -> float:
    """Return where a curve through readings first passes a level, by a cubic through the nearest four."""
    over = (y < level) if falling else (y > level)
    over[:2] = False
    if not over.any():
        raise _Unfit("the readings end before the construction meets the curve")
    after = int(np.argmax(over))
    first = min(max(after - 2, 0), max(x.size - 4, 0))
    near = slice(first, first + 4)
    at = x[after - 1] + _FINE * (x[after] - x[after - 1])
    height = _cubic(x[near], y[near] - level[near], at)
    sign = -1.0 if falling else 1.0
    return float(np.interp(0.0, np.maximum.accumulate(sign * height), at))


def _cubic(x: FloatArray, y: FloatArray, at: FloatArray) -> FloatArray:
    """Evaluate Lagrange's polynomial."""
    apart = x[:, None] - x[None, :]
    np.fill_diagonal(apart, 1.0)
    off = np.repeat((at[:, None] - x)[:, None, :], x.size, axis=1)  # a factor of each term that is not there
    off[:, np.arange(x.size), np.arange(x.size)] = 1.0
    return np.asarray((y / apart.prod(axis=1) * off.prod(axis=2)).sum(axis=1))


def time_curve(readings: TimeReadings, path: float) -> TimeCurve:
    """Interpret one increment.

    Parameters
    ----------
    readings : TimeReadings
        Compression against time.
    path : float, [mm]
        Length of the drainage path, mean of the increment.

    Returns
    -------
    curve : TimeCurve
        Both constructions with what each gives; a reason where one cannot be made. Standard errors come
        from shifting every reading by turns and making the construction again.
    """
    usable = np.isfinite(readings.time) & np.isfinite(readings.compression) & (readings.time > 0.0)
    time, compression = readings.time[usable], readings.compression[usable]
    reason = _unreadable(readings.time[np.isfinite(readings.time)], time, compression)
    if reason:
        return TimeCurve(path=path, remarks=(reason,))
    made: dict[str, LogTime | RootTime] = {}
    remarks = []
    for name, construct in (("log-time", log_time), ("root-time", root_time)):
        try:
            made[name] = construct(time, compression)
        except _Unfit as reason_why:
            remarks.append(f"{name}: {reason_why}")
    return _estimated(time, compression, path, made, tuple(remarks))


def _unreadable(given: FloatArray, time: FloatArray, compression: FloatArray) -> str:
    if np.any(np.diff(given) <= 0.0):
        return "times do not rise"
    if time.size < LEAST_READINGS:
        return f"{time.size} readings after time zero; at least {LEAST_READINGS} are needed"
    if compression[-1] - compression[0] <= 10.0 * DIAL_SCATTER:
        return "the specimen hardly compresses in this increment: nothing to construct on"
    return ""


def _estimated(
    time: FloatArray,
    compression: FloatArray,
    path: float,
    made: dict[str, LogTime | RootTime],
    remarks: tuple[str, ...],
) -> TimeCurve:
    by_log, by_root = made.get("log-time"), made.get("root-time")
    logarithmic = by_log if isinstance(by_log, LogTime) else None
    root = by_root if isinstance(by_root, RootTime) else None
    if logarithmic is None and root is None:
        return TimeCurve(path=path, remarks=remarks)
    scatter, freedom = _dial_scatter(time, compression, logarithmic, root)
    methods = [
        (construct, factor)
        for one, construct, factor in (
            (logarithmic, log_time, LOG_TIME_FACTOR),
            (root, root_time, ROOT_TIME_FACTOR),
        )
        if one is not None
    ]

    def logs(readings: FloatArray) -> FloatArray:
        return np.array(
            [np.log(factor * path**2 / construct(time, readings).time) for construct, factor in methods]
        )

    middle, moved = logs(compression), _moved(logs, compression, scatter)
    covariance = moved.T @ moved
    apart = [widened(float(np.sqrt(one)), freedom) for one in np.diag(covariance)]
    each = dict(zip((one[1] for one in methods), zip(middle, apart, strict=True), strict=True))
    mean, nature = float(middle.mean()), 0.5 * float(np.ptp(middle))
    common = widened(float(np.sqrt(covariance.mean())), freedom)
    return TimeCurve(
        path=path,
        log_time=logarithmic,
        root_time=root,
        cv_log_time=_from_logs(each.get(LOG_TIME_FACTOR)),
        cv_root_time=_from_logs(each.get(ROOT_TIME_FACTOR)),
        cv=_from_logs((mean, float(np.hypot(common, nature)))),
        creep=None if logarithmic is None else _creep(time, logarithmic, scatter, freedom),
        remarks=remarks,
    )


def _from_logs(found: tuple[float, float] | None) -> Estimate | None:
    if found is None:
        return None
    value = MM2_PER_MINUTE * float(np.exp(found[0]))
    return Estimate(value=value, standard_error=value * found[1])


def _moved(logs: Callable[[FloatArray], FloatArray], compression: FloatArray, scatter: float) -> FloatArray:
    """Return how far each answer moves when one reading after another is off by the scatter."""
    moved = []
    for place in range(compression.size):
        off = np.zeros_like(compression)
        off[place] = scatter
        try:
            moved.append(0.5 * (logs(compression + off) - logs(compression - off)))
        except _Unfit:  # the construction hangs on this reading alone
            moved.append(np.full(logs(compression).shape, UNSTEADY))
    return np.array(moved)


def _dial_scatter(
    time: FloatArray, compression: FloatArray, logarithmic: LogTime | None, root: RootTime | None
) -> tuple[float, float]:
    """Return the scatter of the readings about the straight parts, and its degrees of freedom."""
    squares, freedom = PRIOR_READINGS * DIAL_SCATTER**2, PRIOR_READINGS
    if root is not None:
        early = compression <= root.start + _STRAIGHT * (root.end - root.start)
        left = compression[early] - root.start - root.slope * np.sqrt(time[early])
        squares, freedom = squares + float(left @ left), freedom + max(int(early.sum()) - 2, 0)
    if logarithmic is not None:
        late = time >= _TAIL * logarithmic.crossing
        left = compression[late] - logarithmic.tail[0] - logarithmic.tail[1] * np.log10(time[late])
        squares, freedom = squares + float(left @ left), freedom + max(int(late.sum()) - 2, 0)
    return float(np.sqrt(squares / freedom)), freedom


def _creep(time: FloatArray, logarithmic: LogTime, scatter: float, freedom: float) -> Estimate | None:
    late = np.log10(time[time >= _TAIL * logarithmic.crossing])
    spread = float(((late - late.mean()) ** 2).sum())
    if logarithmic.tail[1] <= 0.0 or spread == 0.0:
        return None
    return Estimate(
        value=logarithmic.tail[1], standard_error=widened(scatter / float(np.sqrt(spread)), freedom)
    )
