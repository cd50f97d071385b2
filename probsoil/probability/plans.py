"""What an estimate of a probability is to reach and may spend."""

from dataclasses import dataclass

from probsoil.errors import ParameterError


@dataclass(frozen=True, slots=True, kw_only=True)
class Allowance:
    """What an estimate is to reach and may spend.

    Attributes
    ----------
    within : float, [-]
        Longer arm of the interval over the probability.
    confidence : float, [-]
        Confidence of the interval.
    runs : int or None, [-]
        Realisations at most; None for no limit of their number.
    seconds : float or None, [s]
        Time at most; None for no limit.
    """

    within: float = 0.2
    confidence: float = 0.95
    runs: int | None = None
    seconds: float | None = None

    def __post_init__(self) -> None:
        _check(self.within, self.confidence)
        if self.runs is None and self.seconds is None:
            raise ParameterError("a number of runs or a time must be allowed; got neither")
        if (self.runs is not None and self.runs < 1) or (self.seconds is not None and self.seconds <= 0.0):
            raise ParameterError(f"what is allowed must be above 0; got {self.runs} runs, {self.seconds} s")


@dataclass(frozen=True, slots=True, kw_only=True)
class MonteCarloPlan:
    """What plain Monte Carlo is to reach and may spend.

    Attributes
    ----------
    within : float, [-]
        Longer arm of the interval over the probability at which to stop.
    confidence : float, [-]
        Confidence of the limits.
    most_runs : int, [-]
        Realisations at most.
    first_look : int, [-]
        Realisations at the first look; each of the next is a quarter more.
    """

    within: float = 0.2
    confidence: float = 0.95
    most_runs: int = 100_000
    first_look: int = 1024

    def __post_init__(self) -> None:
        _check(self.within, self.confidence)
        if self.most_runs < 1 or self.first_look < 1:
            raise ParameterError(f"at least 1 run is needed; got {min(self.most_runs, self.first_look)}")


@dataclass(frozen=True, slots=True, kw_only=True)
class StratifiedPlan:
    """What a stratified estimate is to reach and may spend.

    Attributes
    ----------
    within : float, [-]
        Longer arm of the interval over the probability at which to stop.
    confidence : float, [-]
        Confidence of the limits.
    most_runs : int, [-]
        Runs that may be made; those kept from earlier limits and designs are free.
    pilot : int, [-]
        First runs in each stratum.
    far_runs : int, [-]
        Runs spread over the strata far from the limit, which bound what the ranking did not foresee.
    """

    within: float = 0.2
    confidence: float = 0.95
    most_runs: int = 2000
    pilot: int = 8
    far_runs: int = 300

    def __post_init__(self) -> None:
        _check(self.within, self.confidence)
        if self.pilot < 2 or self.far_runs < 1:
            raise ParameterError(
                f"at least 2 pilot runs and 1 far run are needed; got {self.pilot} and {self.far_runs}"
            )


def _check(within: float, confidence: float) -> None:
    if not 0.0 < within < 1.0:
        raise ParameterError(f"the precision must lie between 0 and 1; got {within:g}")
    if not 0.0 < confidence < 1.0:
        raise ParameterError(f"confidence must lie between 0 and 1; got {confidence:g}")
