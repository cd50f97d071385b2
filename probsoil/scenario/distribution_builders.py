"""From the entries of a distribution's table, each in order by itself, to the distribution."""

import math
from collections.abc import Callable, Mapping
from typing import Any

from probsoil.scenario.distribution_keys import GREATEST_LOG_SD
from probsoil.scenario.distributions import (
    Beta,
    Distribution,
    Lognormal,
    Normal,
    Triangular,
    TruncatedNormal,
    Uniform,
)
from probsoil.scenario.listed_distributions import Discrete, Empirical, Percentiles
from probsoil.scenario.skewed_distributions import EULER, Gamma, Gumbel
from probsoil.scenario.slips import Slip

LEAST_SHAPE, GREATEST_SHAPE = 0.1, 1e6  # of a gamma distribution

Entries = Mapping[str, Any]
"""Numbers [base unit], lists of them and words, by key."""


def _spread(entries: Entries) -> float:
    return float(entries["sd"] if "sd" in entries else entries["cov"] * entries["mean"])


def _spatial(entries: Entries) -> tuple[float, float | None, float | None]:
    return entries.get("inherent_cov", 0.0), entries.get("vertical_scale"), entries.get("horizontal_scale")


def _normal(entries: Entries) -> Distribution:
    inherent, vertical, horizontal = _spatial(entries)
    return Normal(
        mean=entries["mean"],
        sd=_spread(entries),
        inherent_cov=inherent,
        vertical_scale=vertical,
        horizontal_scale=horizontal,
    )


def _lognormal(entries: Entries) -> Distribution | list[Slip]:
    if "median" in entries:
        median, log_sd = entries["median"], entries["log_sd"]
    else:
        log_sd = math.sqrt(math.log1p((_spread(entries) / entries["mean"]) ** 2))
        if log_sd > GREATEST_LOG_SD:
            return [
                Slip(
                    path=("sd",),
                    message="sd is too large for this mean",
                    allowed="sd at most 90 times the mean",
                )
            ]
        median = entries["mean"] * math.exp(-0.5 * log_sd**2)
    inherent, vertical, horizontal = _spatial(entries)
    return Lognormal(
        median=median,
        log_sd=log_sd,
        inherent_cov=inherent,
        vertical_scale=vertical,
        horizontal_scale=horizontal,
        inherent_range=entries.get("inherent_range"),
    )


def _uniform(entries: Entries) -> Distribution:
    return Uniform(low=entries["low"], high=entries["high"])


def _triangular(entries: Entries) -> Distribution:
    return Triangular(low=entries["low"], mode=entries["mode"], high=entries["high"])


def _truncated_normal(entries: Entries) -> Distribution:
    return TruncatedNormal(
        mean=entries["mean"], sd=_spread(entries), low=entries["low"], high=entries["high"]
    )


def _beta(entries: Entries) -> Distribution | list[Slip]:
    low, high = entries["low"], entries["high"]
    if "alpha" in entries:
        return Beta(alpha=entries["alpha"], beta=entries["beta"], low=low, high=high)
    width = high - low
    mean, variance = (entries["mean"] - low) / width, (_spread(entries) / width) ** 2
    greatest = mean * (1.0 - mean)
    if variance >= greatest:
        key = "sd" if "sd" in entries else "cov"
        limit = math.sqrt(greatest) * width / (1.0 if key == "sd" else entries["mean"])
        message = f"{key} is {entries[key]:g}, too large for these bounds and this mean"
        return [Slip(path=(key,), message=message, allowed=f"below {limit:.4g}")]
    size = greatest / variance - 1.0
    return Beta(alpha=mean * size, beta=(1.0 - mean) * size, low=low, high=high)


def _gamma(entries: Entries) -> Distribution | list[Slip]:
    if "shape" in entries:
        key, shape, scale = "shape", entries["shape"], entries["scale"]
        allowed = f"{LEAST_SHAPE:g} to {GREATEST_SHAPE:g}"
    else:
        key, mean, sd = ("sd" if "sd" in entries else "cov"), entries["mean"], _spread(entries)
        shape, scale = (mean / sd) ** 2, sd * (sd / mean)
        allowed = f"sd from {GREATEST_SHAPE**-0.5:g} to {LEAST_SHAPE**-0.5:.3g} times the mean"
    if LEAST_SHAPE <= shape <= GREATEST_SHAPE:
        return Gamma(shape=shape, scale=scale)
    message = f"{key} is {entries[key]:g}, out of what a gamma distribution is computed for"
    return [Slip(path=(key,), message=message, allowed=allowed)]


def _gumbel(entries: Entries) -> Distribution:
    if "mode" in entries:
        return Gumbel(mode=entries["mode"], scale=entries["scale"])
    scale = math.sqrt(6.0) / math.pi * _spread(entries)
    return Gumbel(mode=entries["mean"] - EULER * scale, scale=scale)


def _discrete(entries: Entries) -> Distribution:
    pairs = sorted(zip(entries["values"], entries["probabilities"], strict=True))
    total = math.fsum(p for _, p in pairs)
    return Discrete(
        values=tuple(value for value, _ in pairs), probabilities=tuple(p / total for _, p in pairs)
    )


def _empirical(entries: Entries) -> Distribution:
    return Empirical(
        values=tuple(sorted(entries["values"])),
        smoothing=entries.get("smoothing", "none"),
        source=entries.get("file", ""),
    )


def _percentiles(entries: Entries) -> Distribution:
    return Percentiles(
        percent=entries["percent"],
        values=entries["values"],
        low=entries.get("low"),
        high=entries.get("high"),
        fit=entries.get("fit", "value"),
    )


BUILDERS: dict[str, Callable[[Entries], Distribution | list[Slip]]] = {
    "normal": _normal,
    "lognormal": _lognormal,
    "uniform": _uniform,
    "triangular": _triangular,
    "truncated_normal": _truncated_normal,
    "beta": _beta,
    "gamma": _gamma,
    "gumbel": _gumbel,
    "discrete": _discrete,
    "empirical": _empirical,
    "percentiles": _percentiles,
}
