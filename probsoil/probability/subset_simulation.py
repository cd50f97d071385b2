"""Subset simulation: a rare probability as a product of common ones."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from scipy.special import stdtrit

from probsoil._typing import FloatArray
from probsoil.errors import ParameterError
from probsoil.probability.binomial import unseen_bound
from probsoil.probability.limit_state import CountedMargin, LimitState, generator

if TYPE_CHECKING:
    import pandas as pd

STAGE = 13
ASSUMPTION = (
    "every way to exceed is reached by sinking thresholds: one that a plain draw has no hint of is found "
    "only by the first draws, and the unseen bound is what may lie there. Sampling error only, from repeats"
)
_SHARE = 0.1  # conditional probability of a level
_LEVELS = 12  # a probability below 1e-12 is not followed
_WANTED = 0.44  # acceptance of moves at which chains of normals mix best
_STEP = 0.6
_STEPS = (0.05, 1.0)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SubsetSimulation:
    """Probability by subset simulation, repeated independently.

    Attributes
    ----------
    probability : float, [-]
        Mean of the repeats.
    interval : tuple of float, [-]
        Limits from the spread of the repeats; where none of them reached the exceeding region, zero and the
        unseen bound.
    confidence : float, [-]
        Confidence of the limits.
    repeat : ndarray, shape (n_repeat,), [-]
        Estimate of each repeat; zero where it did not reach the exceeding region.
    unseen_bound : float, [-]
        Upper limit of what exceeds without a hint, from the plain draws of all first levels.
    model_runs : int, [-]
        Runs spent.
    assumption : str
        What the interval takes for granted.
    """

    probability: float
    interval: tuple[float, float]
    confidence: float
    repeat: FloatArray
    unseen_bound: float
    model_runs: int
    assumption: str = ASSUMPTION

    def to_frame(self) -> "pd.DataFrame":
        """Return the result as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row; the limits in columns of their own.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        names = ("probability", "confidence", "unseen_bound", "model_runs", "assumption")
        row = {name: getattr(self, name) for name in names} | {"repeats": len(self.repeat)}
        row["low"], row["high"] = self.interval
        return pd.DataFrame([row])


def subset_simulation(
    limit: LimitState, *, sample: int = 1000, repeats: int = 8, seed: int = 0, confidence: float = 0.95
) -> SubsetSimulation:
    r"""Probability by subset simulation.

    Parameters
    ----------
    limit : LimitState
        Performance function and limit.
    sample : int, [-]
        Points of a level, a multiple of ten and at least 100.
    repeats : int, [-]
        Independent repeats, at least 3.
    seed : int, [-]
        Seed; each repeat has a stream of its own.
    confidence : float, [-]
        Confidence of the limits.

    Returns
    -------
    result : SubsetSimulation
        Probability, limits from the repeats, and what may lie unseen.

    Raises
    ------
    ParameterError
        If an argument is out of range.

    Notes
    -----
    The threshold of each level leaves a tenth of the points beyond it [1]_. From these, chains move by
    :math:`v = \sqrt{1 - s^2}\, u + s \xi`, which keeps the normal law, and stay where v is not
    beyond the threshold; s is adapted to an acceptance of 0.44 [2]_. Points of chains depend on each
    other, so the error is not worked out from within but taken from the spread of the repeats:
    :math:`\bar p \exp(\pm t s / (\bar p \sqrt R))`.

    References
    ----------
    .. [1] S. K. Au and J. L. Beck, "Estimation of small failure probabilities in high dimensions by subset
       simulation", Probabilistic Engineering Mechanics, 16, 2001 (recalled; not opened).
    .. [2] I. Papaioannou, W. Betz, K. Zwirglmaier and D. Straub, "MCMC algorithms for subset simulation",
       Probabilistic Engineering Mechanics, 41, 2015 (recalled; not opened).
    """
    if sample < 100 or sample % 10:
        raise ParameterError(f"sample must be a multiple of ten and at least 100; got {sample}")
    if repeats < 3:
        raise ParameterError(f"repeats must be at least 3; got {repeats}")
    counted = CountedMargin(limit)
    found = np.array(
        [_Levels(counted, sample, generator(seed, STAGE, r)).probability() for r in range(repeats)]
    )
    bound = unseen_bound(sample * repeats, confidence)
    mean = float(found.mean())
    interval = (0.0, bound)
    if mean > 0.0:
        factor = float(stdtrit(repeats - 1, 0.5 * (1.0 + confidence)))
        reach = float(np.exp(factor * found.std(ddof=1) / (mean * np.sqrt(repeats))))
        interval = (mean / reach, min(mean * reach, 1.0))
    return SubsetSimulation(
        probability=mean,
        interval=interval,
        confidence=confidence,
        repeat=found,
        unseen_bound=bound,
        model_runs=counted.runs,
    )


class _Levels:
    """One repeat: its points and their margins, sinking level by level."""

    def __init__(self, margin: CountedMargin, sample: int, random: np.random.Generator) -> None:
        self.margin, self.random, self.step = margin, random, _STEP
        self.u = random.standard_normal((sample, margin.limit.dimension))
        self.value = margin(self.u)

    def probability(self) -> float:
        seeds = round(_SHARE * len(self.value))
        probability = 1.0
        for _ in range(_LEVELS):
            order = np.argsort(self.value, kind="stable")
            threshold = float(self.value[order[seeds - 1]])
            if threshold < 0.0:
                return probability * float((self.value < 0.0).mean())
            beyond = float((self.value <= threshold).mean())  # more than a tenth where margins are alike
            if beyond == 1.0:
                break
            probability *= beyond
            self._chains(order[:seeds], threshold)
        return probability * float((self.value < 0.0).mean())

    def _chains(self, seeds: "np.ndarray[tuple[int], np.dtype[np.intp]]", threshold: float) -> None:
        u, value = self.u[seeds], self.value[seeds]
        points, values = [u], [value]
        for count in range(1, round(1.0 / _SHARE)):
            kept = np.sqrt(1.0 - self.step**2)
            moved = kept * u + self.step * self.random.standard_normal(u.shape)
            margin = self.margin(moved)
            accepted = margin <= threshold
            u = np.where(accepted[:, np.newaxis], moved, u)
            value = np.where(accepted, margin, value)
            points.append(u)
            values.append(value)
            change = np.exp((float(accepted.mean()) - _WANTED) / np.sqrt(count))
            self.step = float(np.clip(self.step * change, *_STEPS))
        self.u, self.value = np.concatenate(points), np.concatenate(values)
