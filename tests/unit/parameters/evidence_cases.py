"""Parameters and tests for the checks of updating."""

import math
from dataclasses import dataclass

from probsoil.parameters import ParameterSpace, parameter_space
from probsoil.parameters.observations import Observation
from probsoil.scenario.distributions import Distribution, Lognormal
from probsoil.scenario.inherent_range import root_mean_square_cov


def cov(log_sd: float) -> float:
    """Coefficient of variation of a lognormal with this standard deviation of the logarithm."""
    return math.sqrt(math.expm1(log_sd**2))


def rank(latent: float) -> float:
    """Rank correlation of normals with this correlation."""
    return 6.0 / math.pi * math.asin(latent / 2.0)


@dataclass(frozen=True)
class Parameter:
    """A parameter of a layer 6 m thick, without physical bounds that matter."""

    address: str
    distribution: Distribution
    averaging_length: float | None = 6.0
    in_series: bool = False
    low: float = -1e9
    high: float = 1e9
    unit: str = "-"
    meaning: str = "test"


def lognormal(median: float, known: float, inherent: float = 0.0, **scales: float) -> Lognormal:
    """Lognormal law by the standard deviations of its logarithm."""
    more = {"vertical_scale": 2.0, **scales} if inherent else {}
    return Lognormal(median=median, log_sd=known, inherent_cov=cov(inherent) if inherent else 0.0, **more)


def ranged(median: float, known: float, low: float, high: float, scale: float = 2.0) -> Lognormal:
    """Lognormal law whose variability from point to point is a range."""
    ends = cov(low), cov(high)
    return Lognormal(
        median=median,
        log_sd=known,
        inherent_cov=root_mean_square_cov(*ends),
        vertical_scale=scale,
        inherent_range=ends,
    )


def result(value: float, number: int = 0, **given: object) -> Observation:
    """One oedometer in a hole of its own, with the slope of the virgin line."""
    usual: dict[str, object] = {
        "test": f"oedometer {number}",
        "kind": "oedometer",
        "parameter": "lambda",
        "layer": "clay",
        "below_top": 2.0,
        "error": cov(0.10),
        "addresses": ("clay.lambda",),
        "hole": f"hole {number}",
    }
    return Observation(value=value, **{**usual, **given})  # type: ignore[arg-type]


def updated(
    parameters: list[Parameter],
    tests: list[Observation],
    dependence: list[tuple[str, str, float]] | None = None,
    positions: list[tuple[float, float]] | None = None,
) -> ParameterSpace:
    """Parameters after tests."""
    return parameter_space(parameters, dependence or (), positions=positions or (), observations=tests)
