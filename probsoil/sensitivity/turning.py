"""Value of a parameter at which the verdict on a limit turns."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr

from probsoil.errors import ParameterError
from probsoil.sensitivity.changes import Others, Trials, probability_of
from probsoil.sensitivity.what_if import chosen_names

RANGE = 3.0  # latent standard deviations either side of the median within which a verdict may turn
_TOLERANCE = 0.01


@dataclass(frozen=True, slots=True, kw_only=True)
class TurningValue:
    """Value of a parameter at which the verdict on a limit turns.

    Attributes
    ----------
    name : str
        Parameter or group.
    others : {"keep", "follow"}
        What the other parameters do.
    target : float, [-]
        Probability that is tolerated.
    latent : float or None, [-]
        Latent normal at which the probability equals the target; None where that is beyond three standard
        deviations either side.
    level : float or None, [-]
        Level of its distribution there.
    interval : tuple of float, [-]
        Limits of the latent normal; infinite where the limits of the probability do not meet the target
        within the range.
    within_target : {"below", "above", "everywhere", "nowhere"}
        Where the probability is within the target.
    note : str or None
        What to beware of.
    """

    name: str
    others: Others
    target: float
    latent: float | None
    level: float | None
    interval: tuple[float, float]
    within_target: str
    note: str | None


def turning_value(trials: Trials, name: str, target: float) -> TurningValue:
    """Value of a parameter at which the probability of exceedance meets the target.

    Parameters
    ----------
    trials : Trials
        Realisations and function.
    name : str
        Parameter or group, all of whose members stand at the same latent value.
    target : float, [-]
        Probability that is tolerated.

    Returns
    -------
    turning : TurningValue
        Latent value, its limits, and on which side the verdict is good.

    Raises
    ------
    ParameterError
        If the target lies outside 0 to 1 or the name is unknown.

    Notes
    -----
    The probability P(v) with the parameter at v is found with the same realisations at v = -3, -2, ..., 3;
    steps in which it meets the target are halved down to 0.01. The limits are the values at which the exact
    binomial limits of P(v) meet the target. They hold the turning value with the stated confidence where P(v)
    rises or falls throughout. Where it turns more than once the value nearest the median is given, with a
    note.
    """
    if not 0.0 < target < 1.0:
        raise ParameterError(f"the target probability must lie between 0 and 1; got {target:g}")
    (known,) = chosen_names(trials, [name])
    seen: dict[float, tuple[float, float, float]] = {}

    def excess(v: float) -> tuple[float, float, float]:
        """Estimate, lower and upper limit of P(v), less the target."""
        if v not in seen:
            middle, (low, high) = probability_of(trials.changed(known, 0.0, v), trials.confidence)
            seen[v] = (middle - target, low - target, high - target)
        return seen[v]

    estimate, lower, upper = (_crossings(_column(excess, which)) for which in range(3))
    if not estimate:
        above = excess(0.0)[0] > 0.0
        return TurningValue(
            name=name,
            others=trials.others,
            target=target,
            latent=None,
            level=None,
            interval=(-np.inf, np.inf),
            within_target="nowhere" if above else "everywhere",
            note="the probability does not meet the target within three standard deviations of the median",
        )
    left, right, rising = min(estimate, key=lambda found: abs(found[0] + found[1]))
    first, last = (upper, lower) if rising else (lower, upper)
    latent = 0.5 * (left + right)
    return TurningValue(
        name=name,
        others=trials.others,
        target=target,
        latent=latent,
        level=float(ndtr(latent)),
        interval=(
            max((found[0] for found in first if found[0] <= latent), default=-np.inf),
            min((found[1] for found in last if found[1] >= latent), default=np.inf),
        ),
        within_target="below" if rising else "above",
        note="the verdict turns more than once; nearest the median" if len(estimate) > 1 else None,
    )


def _column(function: Callable[[float], tuple[float, float, float]], which: int) -> Callable[[float], float]:
    return lambda v: function(v)[which]


def _crossings(function: Callable[[float], float]) -> list[tuple[float, float, bool]]:
    """Where a function changes sign: left and right end of a short step, and whether it rises there."""
    grid = np.arange(-RANGE, RANGE + 0.5)
    found = []
    for left, right in zip(grid[:-1].tolist(), grid[1:].tolist(), strict=True):
        rising = function(left) <= 0.0
        if rising == (function(right) <= 0.0):
            continue
        a, b = left, right
        while b - a > _TOLERANCE:
            middle = 0.5 * (a + b)
            a, b = (middle, b) if (function(middle) <= 0.0) == rising else (a, middle)
        found.append((a, b, rising))
    return found
