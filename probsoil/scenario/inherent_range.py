"""Variability from point to point that is not known itself: two percentage points in place of one number."""

import math

from probsoil.scenario.distribution_keys import GREATEST_COV
from probsoil.scenario.slips import Slip

ENDS = ("low", "high")
ALLOWED = (
    "a number, or with a lognormal distribution { low = 0.10, high = 0.40 }, its 5 % and 95 % points, above "
    f"0 and at most {GREATEST_COV:g}"
)
_POINT_95 = 1.6448536269514722  # 95 % point of the standard normal
_KEY = "inherent_cov"


def log_sd_law(low: float, high: float) -> tuple[float, float]:
    """Lognormal law of a standard deviation of a logarithm that is not known.

    Parameters
    ----------
    low, high : float, [-]
        Coefficients of variation at 5 % and 95 %.

    Returns
    -------
    median, log_sd : float, [-]
        Of the standard deviation of the logarithm.
    """
    ends = [math.sqrt(math.log1p(cov * cov)) for cov in (low, high)]
    return math.sqrt(ends[0] * ends[1]), math.log(ends[1] / ends[0]) / (2.0 * _POINT_95)


def root_mean_square_cov(low: float, high: float) -> float:
    """Coefficient of variation whose log variance is the mean of that of a range.

    Parameters
    ----------
    low, high : float, [-]
        Coefficients of variation at 5 % and 95 %.

    Returns
    -------
    cov : float, [-]
        Between them, nearer to the higher one.
    """
    median, log_sd = log_sd_law(low, high)
    return math.sqrt(math.expm1((median * math.exp(log_sd**2)) ** 2))


def read_range(table: dict[str, object], name: str) -> tuple[float, float] | list[Slip]:
    """Return the two points of a range as written, or every mistake in it.

    Parameters
    ----------
    table : dict
        What stands under ``inherent_cov``.
    name : str
        Name of the distribution.

    Returns
    -------
    ends : tuple of float, or list of Slip, [-]
        5 % and 95 % point of the coefficient of variation.
    """
    if name != "lognormal":
        return [_slip((), f"with a {name} distribution this is one number")]
    if set(table) != set(ENDS):
        return [_slip((), "low and high are needed, and nothing else")]
    slips = [
        _slip((key,), f"{key} is no coefficient of variation")
        for key in ENDS
        if not isinstance(table[key], int | float)
        or isinstance(table[key], bool)
        or not 0.0 < float(str(table[key])) <= GREATEST_COV
    ]
    if slips:
        return slips
    low, high = (float(str(table[key])) for key in ENDS)
    return (low, high) if low < high else [_slip(("high",), f"high is {high:g} and low is {low:g}")]


def _slip(path: tuple[str, ...], message: str) -> Slip:
    return Slip(path=(_KEY, *path), message=message, allowed=ALLOWED)
