"""Increments of an oedometer test in time: cv, k and secondary compression of the virgin branch."""

from dataclasses import dataclass

import numpy as np

from probsoil.laboratory.compression_curve import Branches
from probsoil.laboratory.regression import Estimate, line, pooled
from probsoil.laboratory.sheets import OedometerSheet, TimeReadings
from probsoil.laboratory.time_curve import TimeCurve, time_curve
from probsoil.scenario.mean_column import SECONDS_PER_YEAR, WATER_UNIT_WEIGHT

INCREMENT_SPREAD = 0.15
"""Standard deviation of ln cv and ln k between increments expected beforehand [-]; a judgement."""

CK_OVER_VOID_RATIO, CK_ERROR = 0.5, 0.2
"""ck over the initial void ratio where too few increments give it, and its relative standard error [-].

Tavenas, Jean, Leblond and Leroueil 1983, for void ratios below about 2.5; recalled, not opened; the error is
a judgement.
"""

LEAST_FOR_PERMEABILITY = 3
_RATIO_SPREAD = 0.005  # of C_alpha/Cc between increments, expected beforehand


@dataclass(frozen=True, slots=True, kw_only=True)
class Increment:
    """One increment of loading.

    Attributes
    ----------
    place : int, [-]
        Place in the sheet of its end.
    from_stress, to_stress : float, [kPa]
        Before and after.
    void_ratio : float, [-]
        Mean of the increment.
    mv : float, [m2/kN]
        Coefficient of volume compressibility.
    virgin : bool
        Whether it lies wholly on the virgin branch: from the preconsolidation stress on, and from the
        greatest stress so far.
    curve : TimeCurve
        Its compression against time, interpreted.
    k : float or None, [m/s]
        Permeability from cv and mv.
    creep_index : Estimate or None, [-]
        C_alpha: fall of void ratio per tenfold time in the tail.
    """

    place: int
    from_stress: float
    to_stress: float
    void_ratio: float
    mv: float
    virgin: bool
    curve: TimeCurve
    k: float | None
    creep_index: Estimate | None


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeAnswers:
    """What the virgin increments of a test give together.

    Attributes
    ----------
    cv : Estimate or None, [m2/year]
        Geometric mean.
    k : Estimate or None, [m/s]
        At the initial void ratio.
    ck : Estimate or None, [-]
        Fall of void ratio per tenfold fall of permeability.
    creep_ratio : Estimate or None, [-]
        C_alpha over Cc.
    remarks : tuple of str
        Why something is missing.
    """

    cv: Estimate | None = None
    k: Estimate | None = None
    ck: Estimate | None = None
    creep_ratio: Estimate | None = None
    remarks: tuple[str, ...] = ()


def increments(sheet: OedometerSheet, found: Branches, virgin_from: float | None) -> tuple[Increment, ...]:
    """Interpret each increment of first loading that has readings in time.

    Parameters
    ----------
    sheet : OedometerSheet
        The test.
    found : Branches
        Its branches.
    virgin_from : float or None, [kPa]
        Preconsolidation stress; None where not known.

    Returns
    -------
    increments : tuple of Increment
        In order.
    """
    made = []
    first = [int(one) for one in found.first]
    for place in first:
        readings = sheet.time_readings[place] if sheet.time_readings else None
        if readings is None:
            continue
        made.append(_increment(sheet, place, readings, virgin_from))
    return tuple(made)


def _increment(
    sheet: OedometerSheet, place: int, readings: TimeReadings, virgin_from: float | None
) -> Increment:
    start = float(sheet.void_ratio[place - 1] if place else sheet.initial_void_ratio)
    from_stress = float(sheet.stress[place - 1] if place else 0.0)
    end, to_stress = float(sheet.void_ratio[place]), float(sheet.stress[place])
    middle = 0.5 * (start + end)
    loaded = sheet.stress[:place]
    greatest = float(np.max(loaded[np.isfinite(loaded)], initial=0.0))
    solids = sheet.initial_height / (1.0 + sheet.initial_void_ratio)
    curve = time_curve(readings, solids * (1.0 + middle) / (2.0 if sheet.two_way else 1.0))
    mv = (start - end) / ((1.0 + start) * (to_stress - from_stress))
    k = None
    if curve.cv is not None and mv > 0.0:
        k = curve.cv.value * WATER_UNIT_WEIGHT * mv / SECONDS_PER_YEAR
    creep = curve.creep
    return Increment(
        place=place,
        from_stress=from_stress,
        to_stress=to_stress,
        void_ratio=middle,
        mv=mv,
        virgin=virgin_from is not None and from_stress >= max(virgin_from, greatest),
        curve=curve,
        k=k,
        creep_index=None
        if creep is None
        else Estimate(value=creep.value / solids, standard_error=creep.standard_error / solids),
    )


def time_answers(sheet: OedometerSheet, made: tuple[Increment, ...], lam: Estimate | None) -> TimeAnswers:
    """Return what the virgin increments give together.

    Parameters
    ----------
    sheet : OedometerSheet
        The test.
    made : tuple of Increment
        Its increments.
    lam : Estimate or None, [-]
        Slope of its virgin branch.

    Returns
    -------
    answers : TimeAnswers
        With a reason where one is missing.
    """
    virgin = [one for one in made if one.virgin and one.curve.cv is not None]
    if not made:
        return TimeAnswers()
    if not virgin:
        return TimeAnswers(remarks=("cv: no virgin increment whose compression against time can be read",))
    logs = np.log([one.curve.cv.value for one in virgin if one.curve.cv is not None])
    own = float(np.mean([one.curve.cv.relative_error for one in virgin if one.curve.cv is not None]))
    mean, between = pooled(logs, INCREMENT_SPREAD)
    value = float(np.exp(mean))
    k, ck, reason = _permeability(sheet.initial_void_ratio, virgin, own)
    ratio, why = _creep_ratio(virgin, lam)
    return TimeAnswers(
        cv=Estimate(value=value, standard_error=value * float(np.hypot(own, between))),
        k=k,
        ck=ck,
        creep_ratio=ratio,
        remarks=tuple(one for one in (reason, why) if one),
    )


def _permeability(
    void_ratio: float, virgin: list[Increment], own: float
) -> tuple[Estimate | None, Estimate | None, str]:
    """Extend ln k against void ratio to the void ratio before loading."""
    known = [(one.void_ratio, one.k) for one in virgin if one.k is not None]
    at, logs = np.array([one for one, _ in known]), np.log([k for _, k in known])
    if not known:
        return None, None, "k: no increment that compresses"
    if len(known) < LEAST_FOR_PERMEABILITY:
        ck = CK_OVER_VOID_RATIO * void_ratio
        mean, between = pooled(logs + np.log(10.0) * (void_ratio - at) / ck, INCREMENT_SPREAD)
        carried = float(np.log(10.0) * (void_ratio - at.mean()) / ck * CK_ERROR)
        value = float(np.exp(mean))
        error = float(np.sqrt(own**2 + between**2 + carried**2))
        noun = "increment" if len(known) == 1 else "increments"
        reason = f"k: only {len(known)} virgin {noun}, so carried to the initial void ratio by ck = 0.5 e0"
        return Estimate(value=value, standard_error=value * error), None, reason
    fit = line(at, logs, INCREMENT_SPREAD)
    slope = float(fit.coefficient[1])
    if slope <= 0.0:
        return None, None, "k: permeability does not fall with void ratio"
    reach = np.array([1.0, void_ratio])
    value = float(np.exp(reach @ fit.coefficient))
    error = float(np.hypot(np.sqrt(reach @ fit.covariance @ reach), own))
    ck = float(np.log(10.0)) / slope
    return (
        Estimate(value=value, standard_error=value * error),
        Estimate(value=ck, standard_error=ck * float(np.sqrt(fit.covariance[1, 1])) / slope),
        "",
    )


def _creep_ratio(virgin: list[Increment], lam: Estimate | None) -> tuple[Estimate | None, str]:
    crept = [one.creep_index for one in virgin if one.creep_index is not None]
    if not crept or lam is None:
        return (
            None,
            "C_alpha: no tail that goes on compressing" if not crept else "C_alpha/Cc: lambda not known",
        )
    cc = lam.value * float(np.log(10.0))
    mean, between = pooled(np.array([one.value for one in crept]) / cc, _RATIO_SPREAD)
    own = float(np.sqrt(np.mean([one.standard_error**2 for one in crept]) / len(crept))) / cc
    return Estimate(
        value=mean, standard_error=float(np.hypot(np.hypot(own, between), mean * lam.relative_error))
    ), ""
