"""Observed numbers that stand apart from the others of their layer: flagged with the reason, not left out."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from probsoil._typing import FloatArray
from probsoil.laboratory.observations import Observation

LEAST_NUMBERS = 5
"""Numbers of one parameter in one layer from which one can be told to stand apart."""

GREATEST_SCORE = 3.5
"""Robust score beyond which a number is flagged [-] (Iglewicz and Hoaglin 1993; recalled, not opened)."""

LEAST_SCATTER = 0.05
"""Scatter of logarithms taken at least [-], lest numbers that happen to agree make a near one stand apart."""

_LEAST_FOR_TREND = 8
_WITH_DEPTH = {"su", "q_net", "preconsolidation_stress"}


def flagged(
    observations: Sequence[Observation], grounds: Sequence[str] | None = None
) -> tuple[Observation, ...]:
    """Flag the numbers that stand apart within layer, kind of test and parameter.

    Parameters
    ----------
    observations : sequence of Observation
        Of the whole site.
    grounds : sequence of str or None
        Names of the ground each is compared within; None for their layers.

    Returns
    -------
    observations : tuple of Observation
        The same, in the same order.

    Notes
    -----
    The score is 0.6745 times the distance of the logarithm from the median, over the median of such
    distances. Strengths, resistances and preconsolidation stresses, where eight or more are known, are
    compared with a line with depth through the median of the slopes between pairs.
    """
    groups: dict[tuple[str, str, str], list[int]] = {}
    named = [one.layer for one in observations] if grounds is None else grounds
    for place, (one, ground) in enumerate(zip(observations, named, strict=True)):
        if one.value > 0.0:
            groups.setdefault((ground, one.kind, one.parameter), []).append(place)
    rows = list(observations)
    for (layer, _, parameter), places in groups.items():
        if len(places) < LEAST_NUMBERS:
            continue
        logs = np.log([rows[place].value for place in places])
        depth = np.array([rows[place].depth for place in places])
        usual = _usual(logs, depth, trend=parameter in _WITH_DEPTH and len(places) >= _LEAST_FOR_TREND)
        off = logs - usual
        scatter = max(float(np.median(np.abs(off))) / 0.6745, LEAST_SCATTER)
        for place, distance in zip(places, off, strict=True):
            if abs(distance) > GREATEST_SCORE * scatter:
                words = (
                    f"stands apart: {np.exp(distance):.2f} times what is usual "
                    f"{f'in {layer}' if layer else 'among the tests'} "
                    f"(robust score {abs(distance) / scatter:.1f})"
                )
                joined = "; ".join(part for part in (rows[place].flag, words) if part)
                rows[place] = replace(rows[place], flag=joined)
    return tuple(rows)


def _usual(logs: FloatArray, depth: FloatArray, *, trend: bool) -> FloatArray:
    slope = 0.0
    if trend:
        first, second = np.triu_indices(depth.size, 1)
        apart = depth[second] - depth[first]
        known = apart != 0.0
        if known.any():
            slope = float(np.median((logs[second] - logs[first])[known] / apart[known]))
    level = float(np.median(logs - slope * depth))
    return np.asarray(level + slope * depth)
