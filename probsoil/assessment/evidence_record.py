"""What the tests in hand have made of the parameters, in the form that results.json promises."""

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.description import Row
from probsoil.assessment.observed import observations_of
from probsoil.parameters import ParameterSpace
from probsoil.parameters.marginals import Marginal
from probsoil.parameters.observations import Observation
from probsoil.parameters.updated import SOURCES, Updated
from probsoil.scenario import Scenario
from probsoil.scenario.evidence_file import unit_of
from probsoil.scenario.test_results import TestParameter, TestResult

LEAST_CHANCE = 0.01
"""Chance of data as far from what was expected below which a conflict is told, [-]."""

FAR_OUT = 3.0
"""Standard deviations of what was expected beyond which a single result is told, [-]."""

_TOUCHED = 1e-4  # of a parameter's variance or, in its standard deviations, of its mean
_POINTS = 81
_LEVELS = (0.05, 0.5, 0.95)


def evidence_record(space: ParameterSpace, scenario: Scenario) -> Row:
    """Return what tests were used and what they changed.

    Parameters
    ----------
    space : ParameterSpace
        Parameters after the tests.
    scenario : Scenario
        The tests.

    Returns
    -------
    record : dict
        ``evidence`` ready for JSON; empty without tests.
    """
    found = space.updated
    if found is None or not scenario.test_results:
        return {}
    _, unused = observations_of(scenario)
    return {
        "evidence": {
            "tests": [_test_row(found, number) for number in range(len(found.observations))],
            "unused": [_result_row(one.result) | {"reason": one.reason} for one in unused],
            "parameters": [
                _parameter_row(space, found, place)
                for place in range(len(space.names))
                if _is_touched(found, place)
            ],
            "conflict": {"chance": found.chance, "far": found.chance < LEAST_CHANCE},
            "curvature": max((row.straying for row in found.rows), default=0.0),
        }
    }


def conflicts(space: ParameterSpace) -> list[tuple[str, str]]:
    """Return where tests and the laws of the scenario contradict each other.

    Parameters
    ----------
    space : ParameterSpace
        Parameters after the tests.

    Returns
    -------
    conflicts : list of tuple of str
        Code and message of each.
    """
    found = space.updated
    if found is None or not found.observations:
        return []
    told: list[tuple[str, str]] = []
    if found.chance < LEAST_CHANCE:
        told.append(
            (
                "evidence_far_from_prior",
                "the test results lie farther from what the distributions and the errors of the tests lead "
                f"one to expect than would happen by chance in a share of {found.chance:.2g} of cases: look "
                "again at the distributions, the errors and the tests themselves",
            )
        )
    for one, row, sd in zip(found.observations, found.rows, found.expected_sd, strict=True):
        if abs(row.residual) > FAR_OUT * sd:
            side = "above" if row.residual > 0.0 else "below"
            message = (
                f"{one.parameter} of {one.test} lies {abs(row.residual) / sd:.1f} standard deviations {side} "
                "what was expected of it"
            )
            told.append(("test_far_from_prior", message))
    return told


def tested_words(scenario: Scenario) -> tuple[str, ...]:
    """Return what the parameters stand on besides the distributions of the scenario.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    words : tuple of str
        One sentence where tests are in hand, none otherwise.
    """
    used, _ = observations_of(scenario)
    if not used:
        return ()
    kinds = sorted({one.kind for one in used})
    named = " and ".join([", ".join(kinds[:-1]), kinds[-1]] if len(kinds) > 1 else kinds)
    return (
        f"The distributions of the scenario have been updated with {len(used)} "
        f"{'result' if len(used) == 1 else 'results'} of {named} tests; means, medians and percentiles of "
        "parameters are those after the tests, at the first station where there are several. The stress in "
        "situ at the depth of a test is taken at its mean.",
    )


def _is_touched(found: Updated, place: int) -> bool:
    before, after = found.split.before[place].sum(), found.split.after[place].sum()
    moved = abs(found.weight @ found.score_mean[:, place] - found.prior_weight @ found.prior_mean[:, place])
    return bool(before - after > _TOUCHED * before or moved > _TOUCHED * np.sqrt(before))


def _result_row(result: TestResult) -> Row:
    return {
        "test": result.test,
        "kind": result.kind,
        "parameter": result.parameter,
        "layer": result.layer,
        "hole": result.hole,
        "depth": result.depth,
        "value": result.value,
        "unit": unit_of(result.parameter),
        "flag": result.flag,
    }


def _test_row(found: Updated, number: int) -> Row:
    one, row = found.observations[number], found.rows[number]
    parameter: TestParameter = one.parameter  # type: ignore[assignment]
    return {
        "test": one.test,
        "kind": one.kind,
        "parameter": one.parameter,
        "layer": one.layer,
        "hole": one.hole,
        "below_top": one.below_top,
        "value": one.value,
        "unit": unit_of(parameter),
        "standard_error": one.standard_error,
        "error_cov": one.error,
        "bias_cov": one.bias,
        "informs": list(one.addresses),
        "deviation": float(row.residual / found.expected_sd[number]),
    }


def _parameter_row(space: ParameterSpace, found: Updated, place: int) -> Row:
    law = space.marginals[place]
    mine = [one for one in found.observations if law.name in one.addresses]
    values = _span(found, place, law)
    return {
        "name": law.name,
        "unit": law.unit,
        "meaning": law.meaning,
        "tests": len(mine),
        "kinds": sorted({one.kind for one in mine}),
        "before": _numbers(found, place, law, before=True),
        "after": _numbers(found, place, law, before=False),
        "sources_before": _sources(found.split.before[place]),
        "sources_after": _sources(found.split.after[place]),
        "data": [_data(one) for one in mine if one.model is None],
        "density": {
            "value": values.tolist(),
            "before": _density(found, place, law, values, before=True),
            "after": _density(found, place, law, values, before=False),
        },
    }


def _data(one: Observation) -> Row:
    return {"test": one.test, "kind": one.kind, "value": one.value / one.factor}


def _numbers(found: Updated, place: int, law: Marginal, *, before: bool) -> Row:
    mean, sd = found.moments(place, law, before=before)
    low, middle, high = (
        float(law.quantile(found.percentile(place, level, before=before))) for level in _LEVELS
    )
    return {"mean": mean, "sd": sd, "p05": low, "p50": middle, "p95": high}


def _sources(variance: FloatArray) -> Row:
    """Return the parts of the variance of the normal score, which before the tests is one or near it."""
    return {name: max(float(part), 0.0) for name, part in zip(SOURCES, variance, strict=True)}


def _span(found: Updated, place: int, law: Marginal) -> FloatArray:
    ends = [
        float(law.quantile(found.percentile(place, level, before=before)))
        for level in (0.001, 0.999)
        for before in (True, False)
    ]
    return np.linspace(min(ends), max(ends), _POINTS)


def _density(found: Updated, place: int, law: Marginal, values: FloatArray, *, before: bool) -> list[float]:
    """Return the density at values by central differences of the distribution function."""
    step = 0.5 * float(values[1] - values[0])
    ends = np.array([[law.score(float(value) + side) for side in (-step, step)] for value in values])
    below = found.below(place, ends, before=before)
    return [float(one) for one in (below[:, 1] - below[:, 0]) / (2.0 * step)]
