"""Preconsolidation stress of a layer with depth, from its oedometer tests."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from probsoil.laboratory.ground_column import GroundColumn
from probsoil.laboratory.oedometer import OedometerResult
from probsoil.laboratory.regression import pooled

YIELD_SCATTER = 0.20
"""Standard deviation of ln of the preconsolidation stress between specimens [-]; a judgement."""


@dataclass(frozen=True, slots=True, kw_only=True)
class YieldProfile:
    """Preconsolidation stress of one layer.

    Attributes
    ----------
    stress : callable
        Of a depth [m], the preconsolidation stress [kPa].
    relative_error : float, [-]
        Standard error of its logarithm, the same at every depth.
    """

    stress: Callable[[float], float]
    relative_error: float


def yield_profile(oedometers: Sequence[OedometerResult], column: GroundColumn | None) -> YieldProfile | None:
    """Return preconsolidation stress with depth: one overconsolidation ratio, or one stress, for a layer.

    Parameters
    ----------
    oedometers : sequence of OedometerResult
        Tests of one layer.
    column : GroundColumn or None
        Stresses in situ.

    Returns
    -------
    profile : YieldProfile or None
        With one overconsolidation ratio where the stress in situ is known for every test; None where no test
        gives the preconsolidation stress.
    """
    known = [(one.preconsolidation.value, one.in_situ_stress) for one in oedometers if one.preconsolidation]
    if not known:
        return None
    stresses = np.log([value for value, _ in known])
    in_situ = [stress for _, stress in known if stress is not None]
    if column is not None and len(in_situ) == len(known):
        ratio, error = pooled(stresses - np.log(in_situ), YIELD_SCATTER)
        ocr = float(np.exp(ratio))
        return YieldProfile(stress=lambda depth: ocr * column.effective_stress(depth), relative_error=error)
    mean, error = pooled(stresses, YIELD_SCATTER)
    level = float(np.exp(mean))
    return YieldProfile(stress=lambda depth: level, relative_error=error)  # noqa: ARG005 - the same at every depth
