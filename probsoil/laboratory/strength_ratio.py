"""Undrained strength over vertical stress, and how it grows with overconsolidation, from several tests."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray
from probsoil.laboratory.oedometer import OedometerResult
from probsoil.laboratory.regression import Estimate, pooled, regression
from probsoil.laboratory.triaxial import TriaxialResult

RATIO_SCATTER = 0.10
"""Standard deviation of ln(su/s'v) between specimens expected beforehand [-]; a judgement."""

USUAL_EXPONENT = 0.8
"""Lambda where tests do not tell it: how an error of OCR reaches strength over stress [-]; a judgement."""

KAPPA_MEANING = 0.45
"""Standard deviation of ln kappa/lambda for what kappa is meant [-]; a judgement.

Kappa of an oedometer is over ln of the vertical stress; over ln of the mean stress, which Lambda means, it is
about 1.6 times as large, as the radial stress falls less.
"""

_KINDS = ("CAUC", "CIUC")  # as the stresses in the ground first
_NORMAL = 1.1  # overconsolidation ratio up to which a specimen counts as normally consolidated
_LEAST_TESTS = 3
_LEAST_RANGE = np.log(2.0)  # of ln OCR, to tell an exponent


@dataclass(frozen=True, slots=True, kw_only=True)
class StrengthRatio:
    """Strength of the tests of one layer, put in proportion.

    Attributes
    ----------
    layer : str
        Layer.
    tests : tuple of str
        Undrained compression tests that gave the numbers, all consolidated in one way; none where none did.
    ocr : tuple of float, [-]
        Overconsolidation ratio at which each was sheared.
    over_stress : tuple of float, [-]
        Strength over axial consolidation stress of each.
    ratio : Estimate or None, [-]
        The same, normally consolidated.
    exponent : Estimate or None, [-]
        Lambda, from tests at several overconsolidation ratios.
    correlation : float or None, [-]
        Of the errors of ratio and exponent; None where there are not both.
    exponent_from_slopes : Estimate or None, [-]
        1 - kappa/lambda, from oedometer tests, kappa over ln of the vertical stress.
    isotropic : bool
        Whether the tests were consolidated under equal stresses.
    remarks : tuple of str
        What could not be interpreted, and why.
    """

    layer: str
    tests: tuple[str, ...]
    ocr: tuple[float, ...]
    over_stress: tuple[float, ...]
    ratio: Estimate | None
    exponent: Estimate | None
    correlation: float | None
    exponent_from_slopes: Estimate | None
    isotropic: bool
    remarks: tuple[str, ...] = ()


def strength_ratio(
    layer: str,
    triaxials: Sequence[TriaxialResult],
    oedometers: Sequence[OedometerResult],
    preconsolidation: Callable[[float], float] | None,
    *,
    stress_error: float = 0.0,
) -> StrengthRatio:
    """Put the strengths of one layer in proportion.

    Parameters
    ----------
    layer : str
        Its name.
    triaxials : sequence of TriaxialResult
        Its triaxial tests; only consolidated undrained compression counts.
    oedometers : sequence of OedometerResult
        Its oedometer tests.
    preconsolidation : callable or None
        Of a depth [m], the preconsolidation stress [kPa]; None where not known.
    stress_error : float, [-]
        Relative standard error of the preconsolidation stress, common to all tests.

    Returns
    -------
    found : StrengthRatio
        ``su/s'v = S OCR^Lambda`` by regression in logarithms where overconsolidation ratios differ enough;
        else S alone from the tests that were normally consolidated. Specimens consolidated under equal
        stresses give more than those under stresses as in the ground: they are never mixed, and used only
        where the others give nothing.
    """
    remarks: list[str] = []
    fit, tests = _NOTHING, []
    for kind in _KINDS:
        of_kind = [
            one for one in triaxials if one.sheet.kind == kind and one.strength_over_stress is not None
        ]
        if not of_kind or fit.ratio is not None:
            continue
        if preconsolidation is None:
            words = "no preconsolidation stress known, so overconsolidation ratios are not either"
            remarks.append(f"{kind}: su/s'v: {words}")
            continue
        of_kind = [
            one for one in of_kind if preconsolidation(one.sheet.place.depth) > 0.0
        ]  # none above ground
        if not of_kind:
            continue
        ocr = [preconsolidation(one.sheet.place.depth) / one.sheet.axial_stress for one in of_kind]
        fit, used = _fitted(np.log(ocr), np.log([_over_stress(one) for one in of_kind]), stress_error)
        tests = [(one, max(ratio, 1.0)) for one, ratio, on in zip(of_kind, ocr, used, strict=True) if on]
        remarks += [f"{kind}: {fit.reason}"] if fit.reason else []
    return StrengthRatio(
        layer=layer,
        tests=tuple(one.sheet.test for one, _ in tests),
        ocr=tuple(ratio for _, ratio in tests),
        over_stress=tuple(_over_stress(one) for one, _ in tests),
        ratio=fit.ratio,
        exponent=fit.exponent,
        correlation=fit.correlation,
        exponent_from_slopes=slopes_exponent(oedometers),
        isotropic=any(one.sheet.kind == "CIUC" for one, _ in tests),
        remarks=tuple(remarks),
    )


def _over_stress(result: TriaxialResult) -> float:
    found = result.strength_over_stress
    return float("nan") if found is None else found


@dataclass(frozen=True, slots=True, kw_only=True)
class _Fit:
    ratio: Estimate | None = None
    exponent: Estimate | None = None
    correlation: float | None = None
    reason: str = ""


_NOTHING = _Fit()


def _fitted(span: FloatArray, logs: FloatArray, stress_error: float) -> tuple[_Fit, FloatArray]:
    """Return the fit, and which tests it is made of; an error of ln OCR common to all moves all together."""
    within = np.maximum(span, 0.0)
    if span.size >= _LEAST_TESTS and np.ptp(within) >= _LEAST_RANGE:
        return _regression(span, logs, stress_error), np.ones(span.size, dtype=bool)
    normal = within <= np.log(_NORMAL)
    reason = (
        f"Lambda: needs at least {_LEAST_TESTS} tests whose overconsolidation ratios differ by a factor of 2"
    )
    if not normal.any():
        return _Fit(reason=f"{reason}; su/s'v: no test was normally consolidated"), normal
    mean, error = pooled(logs[normal], RATIO_SCATTER)
    moved = np.maximum(span[normal] + stress_error, 0.0) - np.maximum(span[normal] - stress_error, 0.0)
    error = float(np.hypot(error, 0.5 * USUAL_EXPONENT * moved.mean()))
    value = float(np.exp(mean))
    return _Fit(ratio=Estimate(value=value, standard_error=value * error), reason=reason), normal


def _regression(span: FloatArray, logs: FloatArray, stress_error: float) -> _Fit:
    """Fit the line; specimens err independently of one another, whatever their order."""

    def line(shift: float) -> tuple[FloatArray, FloatArray]:
        inside = np.maximum(span + shift, 0.0)
        design = np.stack([np.ones_like(inside), inside], axis=1)
        found = regression(design, logs, RATIO_SCATTER, correlation=0.0)
        return found.coefficient, found.covariance

    best, covariance = line(0.0)
    moved = 0.5 * (line(stress_error)[0] - line(-stress_error)[0])
    covariance = covariance + np.outer(moved, moved)
    error = np.sqrt(np.diag(covariance))
    value = float(np.exp(best[0]))
    return _Fit(
        ratio=Estimate(value=value, standard_error=value * float(error[0])),
        exponent=Estimate(value=float(best[1]), standard_error=float(error[1])),
        correlation=float(covariance[0, 1] / (error[0] * error[1])),
    )


def slopes_exponent(oedometers: Sequence[OedometerResult]) -> Estimate | None:
    """Return Lambda = 1 - kappa/lambda of several tests.

    Parameters
    ----------
    oedometers : sequence of OedometerResult
        Tests of one layer.

    Returns
    -------
    exponent : Estimate or None, [-]
        Mean; None where no test gives both slopes. The error holds what `KAPPA_MEANING` says, which is common
        to all tests.
    """
    found = [(one.kappa, one.lam) for one in oedometers]
    both = [(kappa, lam) for kappa, lam in found if kappa is not None and lam is not None]
    if not both:
        return None
    logs = np.array([np.log(kappa.value / lam.value) for kappa, lam in both])
    own = np.mean([kappa.relative_error**2 + lam.relative_error**2 for kappa, lam in both]) / len(both)
    mean, between = pooled(logs, 0.3)
    part = float(np.exp(mean))
    return Estimate(
        value=1.0 - part, standard_error=part * float(np.sqrt(between**2 + own + KAPPA_MEANING**2))
    )
