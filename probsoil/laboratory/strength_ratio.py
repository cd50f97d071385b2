"""Undrained strength over vertical stress, and how it grows with overconsolidation, from several tests."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from probsoil.laboratory.oedometer import OedometerResult
from probsoil.laboratory.regression import Estimate, line, pooled
from probsoil.laboratory.triaxial import TriaxialResult

RATIO_SCATTER = 0.10
"""Standard deviation of ln(su/s'v) between specimens expected beforehand [-]; a judgement."""

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
        Undrained compression tests used.
    ocr : tuple of float, [-]
        Overconsolidation ratio at which each was sheared.
    over_stress : tuple of float, [-]
        Strength over axial consolidation stress of each.
    ratio : Estimate or None, [-]
        The same, normally consolidated.
    exponent : Estimate or None, [-]
        Lambda, from tests at several overconsolidation ratios.
    exponent_from_slopes : Estimate or None, [-]
        1 - kappa/lambda, from oedometer tests.
    isotropic : bool
        Whether specimens consolidated under equal stresses are among the tests.
    remarks : tuple of str
        What could not be interpreted, and why.
    """

    layer: str
    tests: tuple[str, ...]
    ocr: tuple[float, ...]
    over_stress: tuple[float, ...]
    ratio: Estimate | None
    exponent: Estimate | None
    exponent_from_slopes: Estimate | None
    isotropic: bool
    remarks: tuple[str, ...] = ()


def strength_ratio(
    layer: str,
    triaxials: Sequence[TriaxialResult],
    oedometers: Sequence[OedometerResult],
    preconsolidation: Callable[[float], float] | None,
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

    Returns
    -------
    found : StrengthRatio
        ``su/s'v = S OCR^Lambda`` by regression in logarithms where overconsolidation ratios differ enough;
        else S alone from tests that were normally consolidated. Specimens consolidated under equal
        stresses, which give more than those under stresses as in the ground, are used only where the
        others alone give nothing.
    """
    found = _of_kinds(layer, ("CAUC",), triaxials, oedometers, preconsolidation)
    if found.ratio is None:
        found = _of_kinds(layer, ("CAUC", "CIUC"), triaxials, oedometers, preconsolidation)
    return found


def _of_kinds(
    layer: str,
    kinds: tuple[str, ...],
    triaxials: Sequence[TriaxialResult],
    oedometers: Sequence[OedometerResult],
    preconsolidation: Callable[[float], float] | None,
) -> StrengthRatio:
    used = [one for one in triaxials if one.sheet.kind in kinds and one.strength_over_stress is not None]
    slopes = slopes_exponent(oedometers)
    over = tuple(one.strength_over_stress for one in used if one.strength_over_stress is not None)
    known = preconsolidation is not None and bool(used)
    ocr: tuple[float, ...] = ()
    ratio = exponent = None
    remarks = []
    if used and preconsolidation is None:
        remarks.append("su/s'v: no preconsolidation stress known, so overconsolidation ratios are not either")
    if known and preconsolidation is not None:
        ocr = tuple(
            max(preconsolidation(one.sheet.place.depth) / one.sheet.axial_stress, 1.0) for one in used
        )
        ratio, exponent, reason = _fitted(np.array(ocr), np.log(over))
        remarks += [reason] if reason else []
    return StrengthRatio(
        layer=layer,
        tests=tuple(one.sheet.test for one in used),
        ocr=ocr,
        over_stress=over,
        ratio=ratio,
        exponent=exponent,
        exponent_from_slopes=slopes,
        isotropic=any(one.sheet.kind == "CIUC" for one in used),
        remarks=tuple(remarks),
    )


def _fitted(ocr: np.ndarray, logs: np.ndarray) -> tuple[Estimate | None, Estimate | None, str]:
    span = np.log(ocr)
    if ocr.size >= _LEAST_TESTS and np.ptp(span) >= _LEAST_RANGE:
        fit = line(span, logs, RATIO_SCATTER)
        value = float(np.exp(fit.coefficient[0]))
        error = value * float(np.sqrt(fit.covariance[0, 0]))
        return Estimate(value=value, standard_error=error), fit.estimate(1), ""
    normal = ocr <= _NORMAL
    reason = (
        f"Lambda: needs at least {_LEAST_TESTS} tests whose overconsolidation ratios differ by a factor of 2"
    )
    if not normal.any():
        return None, None, f"{reason}; su/s'v: no test was normally consolidated"
    mean, error = pooled(logs[normal], RATIO_SCATTER)
    value = float(np.exp(mean))
    return Estimate(value=value, standard_error=value * error), None, reason


def slopes_exponent(oedometers: Sequence[OedometerResult]) -> Estimate | None:
    """Return Lambda = 1 - kappa/lambda of several tests.

    Parameters
    ----------
    oedometers : sequence of OedometerResult
        Tests of one layer.

    Returns
    -------
    exponent : Estimate or None, [-]
        Mean; None where no test gives both slopes.
    """
    found = [(one.kappa, one.lam) for one in oedometers]
    both = [(kappa, lam) for kappa, lam in found if kappa is not None and lam is not None]
    if not both:
        return None
    logs = np.array([np.log(kappa.value / lam.value) for kappa, lam in both])
    own = np.mean([kappa.relative_error**2 + lam.relative_error**2 for kappa, lam in both]) / len(both)
    mean, between = pooled(logs, 0.3)
    part = float(np.exp(mean))
    return Estimate(value=1.0 - part, standard_error=part * float(np.hypot(between, np.sqrt(own))))
