"""M of the triaxial tests of a layer together."""

import math
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from probsoil.laboratory.regression import Estimate, widened
from probsoil.laboratory.triaxial import FailureBy, TriaxialResult

FRICTION_SCATTER = 0.07
"""Coefficient of variation of M between specimens of a layer, taken where there is one [-]; a judgement."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PooledFriction:
    """M of the triaxial tests of one layer together.

    Attributes
    ----------
    layer : str
        Layer; empty where not known.
    failure : str
        Definition of failure.
    tests : int, [-]
        Number of tests that give M by this definition.
    slope : Estimate, [-]
        M, the mean of q/p'.
    scatter : float, [-]
        Coefficient of variation of a test about it.
    """

    layer: str
    failure: FailureBy
    tests: int
    slope: Estimate
    scatter: float


def pooled_friction(
    layer: str, results: Iterable[TriaxialResult], failure: FailureBy
) -> PooledFriction | None:
    """Return M of several tests: the mean of q/p' at failure.

    Parameters
    ----------
    layer : str
        Their layer.
    results : iterable of TriaxialResult
        Tests of one layer.
    failure : str
        Definition of failure.

    Returns
    -------
    found : PooledFriction or None
        None without a test that gives M. Every test counts the same, as in a regression of q on p' through
        the origin whose scatter grows in proportion to p'. The error is Student's by the scatter found,
        however few the tests, and never below what the errors of reading make of the mean; of one test
        alone it is that of reading together with `FRICTION_SCATTER`. What the greatest of a curve lies too
        high is taken off each test; as unsure as it is large, and in all tests alike, it joins the error.
    """
    at = [(one, one.greatest_ratio if failure == "stress ratio" else one.peak) for one in results]
    found = [(one.slope(state), state.excess) for one, state in at if state is not None]
    known = [slope for slope, _ in found if slope is not None]
    if not known:
        return None
    values = np.array([one.value for one in known])
    reading = math.sqrt(sum(one.standard_error**2 for one in known)) / values.size
    mean = float(values.mean())
    if values.size == 1:
        scatter, error = FRICTION_SCATTER * mean, math.hypot(FRICTION_SCATTER * mean, reading)
    else:
        scatter = float(values.std(ddof=1))
        error = max(widened(scatter / math.sqrt(values.size), values.size - 1.0), reading)
    excess = float(np.mean([taken for slope, taken in found if slope is not None]))
    return PooledFriction(
        layer=layer,
        failure=failure,
        tests=values.size,
        slope=Estimate(value=mean, standard_error=math.hypot(error, excess)),
        scatter=scatter / mean,
    )
