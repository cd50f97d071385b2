"""Preconsolidation stress by published constructions, and one answer from them and the two-branch fit."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.laboratory.regression import Estimate
from probsoil.laboratory.two_branches import TwoBranchFit

_SHEET_SHAPE = 1.5  # width over height of the sheet of paper that the curve is drawn on
_N_CURVE = 801
_KEPT_OUT = 1.3  # readings within this factor of the bend belong to neither straight line


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Construction:
    """One construction of the preconsolidation stress.

    Attributes
    ----------
    method : str
        Trade name.
    stress : float or None, [kPa]
        What it gives; None where it cannot be made.
    reason : str
        Why it cannot.
    lines : tuple of ndarray, shape (m, 2), [axes of the method]
        Lines drawn, as points.
    points : ndarray, shape (n, 2), [axes of the method]
        Readings in the axes of the method.
    axes : tuple of str
        Names of the two axes, with units.
    """

    method: str
    stress: float | None
    reason: str = ""
    lines: tuple[FloatArray, ...] = ()
    points: FloatArray
    axes: tuple[str, str]


def casagrande(stress: FloatArray, void_ratio: FloatArray) -> Construction:
    """Return the preconsolidation stress by Casagrande's construction.

    Parameters
    ----------
    stress : ndarray, shape (n,), [kPa]
        Of first loading, rising.
    void_ratio : ndarray, shape (n,), [-]
        At the end of each increment.

    Returns
    -------
    construction : Construction
        On void ratio against the logarithm of stress.

    Notes
    -----
    A natural cubic spline through the readings stands for the curve drawn by hand. At its point of
    greatest curvature the angle between tangent and horizontal is halved; the halving line meets the
    steepest chord of the curve, extended, at the preconsolidation stress. Where the curvature is greatest
    depends on the scales; the sheet of paper is taken 1.5 times as wide as high, the readings filling it.

    References
    ----------
    Casagrande, A. (1936). The determination of the preconsolidation load and its practical significance.
    Proc. 1st Int. Conf. Soil Mechanics, Cambridge, 3, 60-64. Recalled; not opened.
    """
    from scipy.interpolate import CubicSpline

    x = np.log10(stress)
    wide, high = x[-1] - x[0], void_ratio.max() - void_ratio.min()
    across, up = _SHEET_SHAPE * (x - x[0]) / wide, (void_ratio - void_ratio.min()) / high
    spline = CubicSpline(across, up, bc_type="natural")
    fine = np.linspace(across[0], across[-1], _N_CURVE)
    steep = np.diff(up) / np.diff(across)
    last = int(np.argmin(steep))
    slope, curving = spline(fine, 1), spline(fine, 2)
    curvature = np.where(fine <= across[last], -curving / (1.0 + slope**2) ** 1.5, -np.inf)
    top = int(np.argmax(curvature))

    def on_paper(at: FloatArray, height: FloatArray) -> FloatArray:
        return np.stack([10.0 ** (x[0] + at * wide / _SHEET_SHAPE), void_ratio.min() + height * high], axis=1)

    def unfinished(reason: str) -> Construction:
        return Construction(method="Casagrande", stress=None, reason=reason, points=points, axes=axes)

    points, axes = on_paper(across, up), ("effective vertical stress [kPa]", "void ratio [-]")
    if curvature[top] <= 0.0 or last == 0:
        return unfinished("the curve has no point of greatest curvature before its steepest part")
    start, level, tangent = fine[top], float(spline(fine[top])), float(slope[top])
    halved = np.tan(0.5 * np.arctan(tangent))
    meeting = (up[last] - steep[last] * across[last] - level + halved * start) / (halved - steep[last])
    if not across[0] < meeting < across[-1]:
        return unfinished("the halving line meets the virgin line outside the readings")
    reach = np.array([start, min(start + 0.4, across[-1])])
    lines = [on_paper(reach, level + one * (reach - start)) for one in (0.0, tangent, halved)]
    extended = np.array([meeting, across[-1]])
    lines.append(on_paper(extended, up[last] + steep[last] * (extended - across[last])))
    lines.append(on_paper(fine, spline(fine)))
    return Construction(
        method="Casagrande",
        stress=float(10.0 ** (x[0] + meeting * wide / _SHEET_SHAPE)),
        lines=tuple(lines),
        points=points,
        axes=axes,
    )


def work(stress: FloatArray, void_ratio: FloatArray, initial_void_ratio: float) -> Construction:
    """Return the preconsolidation stress by the work method.

    Parameters
    ----------
    stress : ndarray, shape (n,), [kPa]
        Of first loading, rising.
    void_ratio : ndarray, shape (n,), [-]
        At the end of each increment.
    initial_void_ratio : float, [-]
        Before loading.

    Returns
    -------
    construction : Construction
        On work per unit volume against stress.

    Notes
    -----
    The work of an increment is the mean of the stresses at its ends times its strain; summed and drawn
    against the stress at the end of the increment it makes two lines, which meet at the preconsolidation
    stress. Each reading counts by its relative error: weight 1/stress squared.

    References
    ----------
    Becker, D.E., Crooks, J.H.A., Been, K. and Jefferies, M.G. (1987). Work as a criterion for determining
    in situ and yield stresses in clays. Canadian Geotechnical Journal 24, 549-564. Recalled; not opened.
    """
    strain = (initial_void_ratio - void_ratio) / (1.0 + initial_void_ratio)
    done = np.concatenate([[0.0], np.cumsum(0.5 * (stress[1:] + stress[:-1]) * np.diff(strain))])
    done += 0.5 * stress[0] * strain[0]
    return _two_lines(
        "work", (stress, done, 1.0 / stress), ("effective vertical stress [kPa]", "work [kJ/m3]"), float
    )


def log_log(stress: FloatArray, void_ratio: FloatArray) -> Construction:
    """Return the preconsolidation stress where two lines of ln(1 + e) against ln stress meet.

    Parameters
    ----------
    stress : ndarray, shape (n,), [kPa]
        Of first loading, rising.
    void_ratio : ndarray, shape (n,), [-]
        At the end of each increment.

    Returns
    -------
    construction : Construction
        On the logarithm of specific volume against that of stress.

    References
    ----------
    Butterfield, R. (1979). A natural compression law for soils. Geotechnique 29, 469-480; Onitsuka, K.,
    Hong, Z., Hara, Y. and Yoshitake, S. (1995). Interpretation of oedometer test data for natural clays.
    Soils and Foundations 35(3), 61-70. Recalled; not opened.
    """
    axes = ("ln of effective vertical stress [ln kPa]", "ln(1 + void ratio) [-]")
    columns = (np.log(stress), np.log1p(void_ratio), np.ones_like(stress))
    return _two_lines("log-log", columns, axes, np.exp)


def _two_lines(
    method: str,
    columns: tuple[FloatArray, FloatArray, FloatArray],
    axes: tuple[str, str],
    to_stress: Callable[[float], float],
) -> Construction:
    """Fit two lines to readings split where squares sum up to least, the bend left out; cross them."""
    x, y, _ = columns
    points = np.stack([x, y], axis=1)
    splits = [_split(columns, np.arange(x.size) < k, np.arange(x.size) >= k) for k in range(2, x.size - 1)]
    _, before, after = min(splits, key=lambda one: one[0])
    meeting = _crossing(before, after)
    stress = np.array([to_stress(float(one)) for one in x])
    if meeting is not None:
        at = to_stress(meeting)
        low, high = stress < at / _KEPT_OUT, stress > at * _KEPT_OUT
        if min(low.sum(), high.sum()) >= 2:
            _, before, after = _split(columns, low, high)
            meeting = _crossing(before, after)
    if meeting is None or not x[0] < meeting < x[-1]:
        reason = "the two lines do not meet within the readings"
        return Construction(method=method, stress=None, reason=reason, points=points, axes=axes)
    lines = [
        np.stack([ends, fit[0] + fit[1] * ends], axis=1)
        for fit, ends in (
            (before, np.array([x[0], meeting + 0.1 * (x[-1] - meeting)])),
            (after, np.array([meeting - 0.1 * (meeting - x[0]), x[-1]])),
        )
    ]
    return Construction(
        method=method, stress=float(to_stress(meeting)), lines=tuple(lines), points=points, axes=axes
    )


def _split(
    columns: tuple[FloatArray, FloatArray, FloatArray], low: BoolArray, high: BoolArray
) -> tuple[float, FloatArray, FloatArray]:
    x, y, weight = columns
    total, fits = 0.0, list[FloatArray]()
    for chosen in (low, high):
        design = np.stack([weight[chosen], weight[chosen] * x[chosen]], axis=1)
        target = weight[chosen] * y[chosen]
        fit = np.asarray(np.linalg.lstsq(design, target, rcond=None)[0], dtype=np.float64)
        total += float(((target - design @ fit) ** 2).sum())
        fits.append(fit)
    return total, fits[0], fits[1]


def _crossing(before: FloatArray, after: FloatArray) -> float | None:
    if before[1] == after[1]:
        return None
    return float((after[0] - before[0]) / (before[1] - after[1]))


def constructions(
    stress: FloatArray, void_ratio: FloatArray, initial_void_ratio: float
) -> tuple[Construction, ...]:
    """Make every construction.

    Parameters
    ----------
    stress : ndarray, shape (n,), [kPa]
        Of first loading, rising.
    void_ratio : ndarray, shape (n,), [-]
        At the end of each increment.
    initial_void_ratio : float, [-]
        Before loading.

    Returns
    -------
    constructions : tuple of Construction
        Casagrande, work and log-log.
    """
    return (
        casagrande(stress, void_ratio),
        work(stress, void_ratio, initial_void_ratio),
        log_log(stress, void_ratio),
    )


def carried_to_meeting(
    fit: TwoBranchFit, found: tuple[Construction, ...], stress: FloatArray, initial_void_ratio: float
) -> dict[str, float]:
    """Return each construction rid of what it is known to miss the meeting of the branches by.

    Parameters
    ----------
    fit : TwoBranchFit
        Two branches by least squares.
    found : tuple of Construction
        Those without a value are left aside.
    stress : ndarray, shape (n,), [kPa]
        Of first loading, rising.
    initial_void_ratio : float, [-]
        Before loading.

    Returns
    -------
    carried : dict of str to float, [kPa]
        By method: as drawn, times the meeting over what the same construction gives on the fitted curve.
    """
    smooth = constructions(stress, fit.void_ratio(stress), initial_void_ratio)
    meeting = float(np.exp(fit.ln_break.value))
    return {
        one.method: one.stress / known.stress * meeting
        for one, known in zip(found, smooth, strict=True)
        if one.stress is not None and known.stress is not None
    }


def preconsolidation_stress(fit: TwoBranchFit, carried: dict[str, float]) -> Estimate:
    """Return one preconsolidation stress from the fit and the constructions.

    Parameters
    ----------
    fit : TwoBranchFit
        Two branches by least squares.
    carried : dict of str to float, [kPa]
        Constructions carried to the meeting of the branches.

    Returns
    -------
    estimate : Estimate, [kPa]
        Where the two branches meet: geometric mean of all methods. The error joins that of the fit, which
        the readings give and all methods share, with the standard deviation between methods; not that of
        their mean, since all are made from the same readings.
    """
    logs = [fit.ln_break.value, *np.log(list(carried.values()))]
    between = float(np.std(logs, ddof=1)) if carried else 0.0
    value = float(np.exp(np.mean(logs)))
    return Estimate(value=value, standard_error=value * float(np.hypot(fit.ln_break.standard_error, between)))
