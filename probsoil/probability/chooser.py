"""Which estimator answers a question of probability, from its target, a pilot and what may be spent."""

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal, TypeAlias

import numpy as np
from scipy.special import ndtri

from probsoil.errors import ParameterError
from probsoil.probability.binomial import clopper_pearson
from probsoil.probability.plans import Allowance
from probsoil.probability.ranking import TAIL_RUNS, training_runs

if TYPE_CHECKING:
    import pandas as pd

MethodName: TypeAlias = Literal["monte carlo", "stratified by score"]

RAREST = 1e-3  # probability of interest where nothing better is known
FEW_SEEN = 10  # exceedances of a pilot from which its share is taken as the probability
# runs from the pool that reached 20 % in tests/benchmarks/test_rare_failures.py, far strata among them
RANKED_RUNS = 1700
_RANKED_WITHIN = 0.2


@dataclass(frozen=True, slots=True, kw_only=True)
class Pilot:
    """What a few first realisations have shown.

    Attributes
    ----------
    runs : int, [-]
        Independent realisations.
    exceeding : int, [-]
        Those that exceed.
    seconds_per_run : float, [s]
        Time of one realisation on all workers together.
    """

    runs: int
    exceeding: int
    seconds_per_run: float

    def __post_init__(self) -> None:
        if self.runs < 1 or not 0 <= self.exceeding <= self.runs:
            raise ParameterError(
                f"a pilot has 0 to n exceedances in n of at least 1; got {self.exceeding} in {self.runs}"
            )
        if not self.seconds_per_run >= 0.0:
            raise ParameterError(f"the time of a run must be 0 or more; got {self.seconds_per_run:g}")


@dataclass(frozen=True, slots=True, kw_only=True)
class MethodChoice:
    """Estimator chosen, and why.

    Attributes
    ----------
    method : {"monte carlo", "stratified by score"}
        The estimator.
    most_runs : int, [-]
        Realisations it may use.
    probability : float, [-]
        Probability that the choice is made for.
    runs_needed : int, [-]
        Realisations that plain Monte Carlo would need for the precision asked.
    expected_within : float, [-]
        Precision to expect at `probability`; infinite where only an upper limit can be expected.
    reason : str
        Sentence for the report.
    """

    method: MethodName
    most_runs: int
    probability: float
    runs_needed: int
    expected_within: float
    reason: str

    def to_frame(self) -> "pd.DataFrame":
        """Return the choice as a table.

        Returns
        -------
        frame : pandas.DataFrame
            One row.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        return pd.DataFrame([{name: getattr(self, name) for name in self.__slots__}])


def chosen_method(
    pilot: Pilot,
    allowance: Allowance,
    *,
    dimension: int,
    target: float | None = None,
    has_score: bool = False,
) -> MethodChoice:
    """Choose the estimator of a small or not so small probability.

    Parameters
    ----------
    pilot : Pilot
        First realisations.
    allowance : Allowance
        Precision and budget.
    dimension : int, [-]
        Number of uncertain parameters.
    target : float, [-], optional
        Target probability of the limit.
    has_score : bool
        Whether a cheap score is known beforehand, so that none has to be fitted.

    Returns
    -------
    choice : MethodChoice
        Estimator, budget and the reason in words.

    Raises
    ------
    ParameterError
        If the target lies outside 0 to 1 or there are no parameters.

    Notes
    -----
    Plain Monte Carlo is chosen whenever it reaches the precision: it needs no assumption and answers for
    all limits and thresholds at once. If it does not, strata by a score are, provided they can be
    afforded; if not, plain Monte Carlo again, for what it gives. The probability that the choice is made
    for is the pilot's share where it saw ten exceedances, else the target, else 0.001, but never more than
    the pilot's upper limit.
    """
    if target is not None and not 0.0 < target < 1.0:
        raise ParameterError(f"the target probability must lie between 0 and 1; got {target:g}")
    if dimension < 1:
        raise ParameterError(f"the number of parameters must be at least 1; got {dimension}")
    probability = expected_probability(pilot, target)
    affordable = _affordable(pilot, allowance)
    needed = monte_carlo_runs(probability, allowance.within, allowance.confidence)
    ranked = ranked_runs(dimension, allowance.within, has_score=has_score)
    about = f"about {_digits(probability)}"
    within = f"within {100.0 * allowance.within:.3g} %"
    if affordable >= needed:
        method: MethodName = "monte carlo"
        expected = allowance.within
        reason = (
            f"Plain Monte Carlo: for a probability of {about}, {needed:,} realisations give it {within}"
            f", and {affordable:,} are allowed."
        )
    elif affordable >= ranked:
        method, expected = "stratified by score", allowance.within
        reason = (
            f"Strata by a score: for a probability of {about}, plain Monte Carlo would need {needed:,}"
            f" realisations {within}, and {affordable:,} are allowed; strata need some {ranked:,} if the"
            " score ranks well."
        )
    else:
        method, expected = "monte carlo", _expected_within(probability, affordable, allowance.confidence)
        reason = (
            f"Plain Monte Carlo: {affordable:,} realisations are allowed, fewer than the {ranked:,} that"
            f" strata by a score need and the {needed:,} of plain Monte Carlo {within}; " + _words(expected)
        )
    return MethodChoice(
        method=method,
        most_runs=affordable,
        probability=probability,
        runs_needed=needed,
        expected_within=expected,
        reason=reason,
    )


def expected_probability(pilot: Pilot, target: float | None) -> float:
    """Probability that an estimator should be fit for.

    Parameters
    ----------
    pilot : Pilot
        First realisations.
    target : float or None, [-]
        Target probability.

    Returns
    -------
    probability : float, [-]
        Between 0 and 1, without either.
    """
    if FEW_SEEN <= pilot.exceeding < pilot.runs:
        return pilot.exceeding / pilot.runs
    high = float(clopper_pearson(pilot.exceeding, pilot.runs)[1])
    return min(RAREST if target is None else target, high)


def monte_carlo_runs(probability: float, within: float, confidence: float = 0.95) -> int:
    """Realisations of plain Monte Carlo for a precision.

    Parameters
    ----------
    probability : float, [-]
        Probability sought.
    within : float, [-]
        Longer arm of the interval over the probability.
    confidence : float, [-]
        Confidence of the interval.

    Returns
    -------
    n : int, [-]
        Realisations with which the expected count gives the exact upper arm, to first order beyond
        the normal one.
    """
    z = float(ndtri(0.5 * (1.0 + confidence)))
    normal = z**2 * (1.0 - probability) / (probability * within**2)
    # the upper arm of a count k is z sqrt(k) + (z^2 + 2)/3 + ...; solved for k and divided by p
    skew = (z**2 + 2.0) / 3.0
    count = ((z + np.sqrt(z**2 + 4.0 * within * skew)) / (2.0 * within)) ** 2
    return int(np.ceil(max(normal, count * (1.0 - probability) / probability)))


def ranked_runs(dimension: int, within: float, *, has_score: bool = False) -> int:
    """Realisations that strata by a score need if the score ranks well.

    Parameters
    ----------
    dimension : int, [-]
        Number of uncertain parameters.
    within : float, [-]
        Longer arm of the interval over the probability.
    has_score : bool
        Whether a score is known beforehand.

    Returns
    -------
    n : int, [-]
        Measured at 20 % and carried to other precisions by the square.
    """
    learning = 0 if has_score else training_runs(dimension) + TAIL_RUNS
    return learning + int(np.ceil(RANKED_RUNS * max(1.0, (_RANKED_WITHIN / within) ** 2)))


def _affordable(pilot: Pilot, allowance: Allowance) -> int:
    by_number = np.inf if allowance.runs is None else allowance.runs
    by_time = np.inf
    if allowance.seconds is not None and pilot.seconds_per_run > 0.0:
        by_time = allowance.seconds / pilot.seconds_per_run
    return int(max(1.0, min(by_number, by_time, 1e12)))


def _expected_within(probability: float, n: int, confidence: float) -> float:
    k = round(n * probability)
    if k == 0:
        return float("inf")
    return float(clopper_pearson(k, n, confidence)[1]) * n / k - 1.0


def _words(expected: float) -> str:
    if np.isinf(expected):
        return "expect an upper limit of the probability, not a number."
    return f"expect the probability within some {100.0 * expected:.0f} %."


def _digits(probability: float) -> str:
    return np.format_float_positional(probability, precision=2, fractional=False, trim="-")
