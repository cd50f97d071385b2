"""Reading of a distribution written as a table, every mistake of it at once."""

import math
from collections.abc import Callable, Mapping

from probsoil.scenario.distributions import (
    Beta,
    Distribution,
    Lognormal,
    Normal,
    Triangular,
    TruncatedNormal,
    Uniform,
)
from probsoil.scenario.later import LATER_DISTRIBUTIONS, NOT_YET
from probsoil.scenario.slips import Slip, did_you_mean, unknown_key
from probsoil.units import Kind, UnitError, to_base

GREATEST_COV = 1.5
GREATEST_LOG_SD = 3.0
LEAST_SHARE_KEPT = 1e-6  # of a normal distribution by its cuts

_SPREADS = (("mean", "cov"), ("mean", "sd"))
# Keys that settle each distribution; any one of the sets will do.
FORMS: dict[str, tuple[tuple[str, ...], ...]] = {
    "normal": _SPREADS,
    "lognormal": (*_SPREADS, ("median", "log_sd")),
    "uniform": (("low", "high"),),
    "triangular": (("low", "mode", "high"),),
    "truncated_normal": tuple((*keys, "low", "high") for keys in _SPREADS),
    "beta": (*((*keys, "low", "high") for keys in _SPREADS), ("alpha", "beta", "low", "high")),
}
SPATIAL_KEYS = ("inherent_cov", "vertical_scale", "horizontal_scale")
SPATIAL_DISTRIBUTIONS = ("normal", "lognormal")
# Kinds of the numbers that do not share the kind of the parameter itself.
NUMBER_KEYS: dict[str, Kind] = {
    "cov": "number",
    "log_sd": "number",
    "alpha": "number",
    "beta": "number",
    "inherent_cov": "number",
    "vertical_scale": "length",
    "horizontal_scale": "length",
}
_MUST_BE_POSITIVE = ("sd", "log_sd", "alpha", "beta", "vertical_scale", "horizontal_scale", "median")


def own_keys(name: str) -> tuple[str, ...]:
    """Return the keys that belong to one distribution, those of all its forms.

    Parameters
    ----------
    name : str
        Name of the distribution.

    Returns
    -------
    keys : tuple of str
        Without ``dist`` and the keys of spatial variability.
    """
    return tuple(dict.fromkeys(key for form in FORMS[name] for key in form))


def form_text(name: str) -> str:
    """Return in words the sets of keys that settle one distribution.

    Parameters
    ----------
    name : str
        Name of the distribution.

    Returns
    -------
    text : str
        Such as ``mean, cov or mean, sd``.
    """
    return " or ".join(", ".join(form) for form in FORMS[name])


def read_distribution(table: Mapping[str, object], kind: Kind, *, spatial: bool) -> Distribution | list[Slip]:
    """Return the distribution a table describes, or every mistake in it.

    Parameters
    ----------
    table : mapping
        As parsed from the file.
    kind : str
        Kind of quantity of the parameter.
    spatial : bool
        Whether variability from point to point makes sense for the parameter.

    Returns
    -------
    outcome : Distribution or list of Slip
        Numbers in base units.
    """
    name = table.get("dist")
    if not isinstance(name, str) or name not in FORMS:
        return [_name_slip(name, present="dist" in table)]
    extra = SPATIAL_KEYS if spatial and name in SPATIAL_DISTRIBUTIONS else ()
    known = (*own_keys(name), *extra)
    slips = [_unknown_key(key, name, known, table) for key in table if key not in (*known, "dist")]
    numbers: dict[str, float] = {}
    for key in known:
        if key in table:
            outcome = _read_number(table[key], key, kind)
            if isinstance(outcome, Slip):
                slips.append(outcome)
            else:
                numbers[key] = outcome
    slips += _form_slips(name, table, slips) + _value_slips(name, numbers)
    slips += _spatial_slips(table) if extra else []
    if slips:
        return slips
    return _built(name, numbers)


def _built(name: str, numbers: Mapping[str, float]) -> Distribution | list[Slip]:
    """Build a distribution whose numbers are each in order."""
    try:
        outcome = _BUILDERS[name](numbers)
        if isinstance(outcome, list) or _is_usable(outcome):
            return outcome
    except (ArithmeticError, ValueError):
        pass
    return [Slip(path=(), message="these numbers are too far apart to calculate with")]


def _is_usable(distribution: Distribution) -> bool:
    """Whether rounding has left a spread and a mean to calculate with."""
    if isinstance(distribution, TruncatedNormal) and distribution.share_kept < LEAST_SHARE_KEPT:
        return False
    spreads = [getattr(distribution, key, 1.0) for key in ("sd", "log_sd", "alpha", "beta", "median")]
    return min(spreads) > 0.0 and math.isfinite(distribution.expectation) and all(map(math.isfinite, spreads))


def _name_slip(name: object, *, present: bool) -> Slip:
    allowed = "one of " + ", ".join(FORMS)
    if not present:
        return Slip(
            path=(),
            message="the table does not name its distribution",
            allowed=f"dist = {allowed}",
            at_key=True,
        )
    if name in LATER_DISTRIBUTIONS:
        return Slip(path=("dist",), message=f'distribution "{name}" is {NOT_YET}', allowed=allowed)
    hint = did_you_mean(name, tuple(FORMS)) if isinstance(name, str) else None
    return Slip(path=("dist",), message="unknown distribution", allowed=allowed, hint=hint)


def _unknown_key(key: str, name: str, known: tuple[str, ...], table: Mapping[str, object]) -> Slip:
    if key in SPATIAL_KEYS:
        message = f'"{key}" does not go with this parameter or distribution'
        allowed = "variability from point to point: normal or lognormal soil properties of a layer only"
        return Slip(path=(key,), message=message, allowed=allowed, at_key=True)
    if any(key in own_keys(other) for other in FORMS):
        message = f'"{key}" does not belong to a {name} distribution'
        return Slip(path=(key,), message=message, allowed=form_text(name), at_key=True)
    return unknown_key(key, ("dist", *known), table)


def _read_number(value: object, key: str, kind: Kind) -> float | Slip:
    if not isinstance(value, int | float | str):
        return Slip(path=(key,), message="this is not a number", allowed="a number or a string with a unit")
    try:
        return to_base(value, NUMBER_KEYS.get(key, kind))
    except UnitError as error:
        return Slip(path=(key,), message=error.message, allowed=error.allowed, hint=error.hint)


def _form_slips(name: str, table: Mapping[str, object], found: list[Slip]) -> list[Slip]:
    """Complain of missing or surplus keys, unless a mistyped key explains the gap."""
    given = [key for key in own_keys(name) if key in table]
    if set(given) in [set(form) for form in FORMS[name]] or _explained(name, set(given), found):
        return []
    message = f"a {name} distribution needs {form_text(name)}; given: {', '.join(given) or 'none of them'}"
    return [Slip(path=(), message=message, allowed=form_text(name))]


def _spatial_slips(table: Mapping[str, object]) -> list[Slip]:
    """Complain of point-to-point variability that is given by halves."""
    if "inherent_cov" not in table:
        return [
            Slip(
                path=(key,),
                message=f"{key} says nothing without inherent_cov",
                allowed="inherent_cov with vertical_scale",
                at_key=True,
            )
            for key in ("vertical_scale", "horizontal_scale")
            if key in table
        ]
    if "vertical_scale" in table:
        return []
    message = "inherent_cov needs vertical_scale, over which it averages out"
    return [Slip(path=("inherent_cov",), message=message, allowed="vertical_scale in m", at_key=True)]


def _explained(name: str, given: set[str], found: list[Slip]) -> bool:
    meant = {slip.meant for slip in found if slip.meant}
    return bool(meant) and any(given | meant == set(form) for form in FORMS[name])


def _value_slips(name: str, numbers: Mapping[str, float]) -> list[Slip]:
    slips = [
        Slip(path=(key,), message=f"{key} is {numbers[key]:g}", allowed="above 0")
        for key in _MUST_BE_POSITIVE
        if numbers.get(key, 1.0) <= 0.0
    ]
    slips += [
        slip for key in ("cov", "inherent_cov") if key in numbers for slip in _cov_slips(key, numbers[key])
    ]
    if numbers.get("log_sd", 0.0) > GREATEST_LOG_SD:
        message = f"log_sd is {numbers['log_sd']:g}"
        slips.append(Slip(path=("log_sd",), message=message, allowed=f"above 0, at most {GREATEST_LOG_SD:g}"))
    if name == "lognormal" and numbers.get("mean", 1.0) <= 0.0:
        message = f"mean is {numbers['mean']:g}, and a lognormal variable is never negative"
        hint = "normal, uniform and triangular may be negative"
        slips.append(Slip(path=("mean",), message=message, allowed="above 0", hint=hint))
    elif "cov" in numbers and numbers.get("mean", 1.0) <= 0.0:
        message = "a coefficient of variation needs a mean above 0"
        slips.append(
            Slip(path=("mean",), message=message, allowed="above 0 with cov", hint="give sd instead of cov")
        )
    return slips + _bound_slips(numbers)


def _cov_slips(key: str, value: float) -> list[Slip]:
    if 0.0 < value <= GREATEST_COV:
        return []
    hint = None
    if value > GREATEST_COV:
        hint = f"it is a fraction, not a percentage: {value:g} percent is {value / 100.0:g}"
    message = f"a coefficient of variation of {value:g}"
    return [Slip(path=(key,), message=message, allowed=f"above 0, at most {GREATEST_COV:g}", hint=hint)]


def _bound_slips(numbers: Mapping[str, float]) -> list[Slip]:
    low, high = numbers.get("low"), numbers.get("high")
    if low is None or high is None:
        return []
    if not low < high:
        return [
            Slip(path=("high",), message=f"high is {high:g} and low is {low:g}", allowed="low below high")
        ]
    mode, mean = numbers.get("mode"), numbers.get("mean")
    if mode is not None and not low <= mode <= high:
        return [
            Slip(
                path=("mode",), message=f"mode is {mode:g}", allowed=f"from low ({low:g}) to high ({high:g})"
            )
        ]
    if mean is not None and not low < mean < high:
        return [
            Slip(
                path=("mean",),
                message=f"mean is {mean:g}",
                allowed=f"between low ({low:g}) and high ({high:g})",
            )
        ]
    return []


def _spread(numbers: Mapping[str, float]) -> float:
    return numbers["sd"] if "sd" in numbers else numbers["cov"] * numbers["mean"]


def _spatial(numbers: Mapping[str, float]) -> tuple[float, float | None, float | None]:
    return numbers.get("inherent_cov", 0.0), numbers.get("vertical_scale"), numbers.get("horizontal_scale")


def _normal(numbers: Mapping[str, float]) -> Distribution:
    inherent, vertical, horizontal = _spatial(numbers)
    return Normal(
        mean=numbers["mean"],
        sd=_spread(numbers),
        inherent_cov=inherent,
        vertical_scale=vertical,
        horizontal_scale=horizontal,
    )


def _lognormal(numbers: Mapping[str, float]) -> Distribution | list[Slip]:
    if "median" in numbers:
        median, log_sd = numbers["median"], numbers["log_sd"]
    else:
        log_sd = math.sqrt(math.log1p((_spread(numbers) / numbers["mean"]) ** 2))
        if log_sd > GREATEST_LOG_SD:
            return [
                Slip(
                    path=("sd",),
                    message="sd is too large for this mean",
                    allowed="sd at most 90 times the mean",
                )
            ]
        median = numbers["mean"] * math.exp(-0.5 * log_sd**2)
    inherent, vertical, horizontal = _spatial(numbers)
    return Lognormal(
        median=median,
        log_sd=log_sd,
        inherent_cov=inherent,
        vertical_scale=vertical,
        horizontal_scale=horizontal,
    )


def _uniform(numbers: Mapping[str, float]) -> Distribution:
    return Uniform(low=numbers["low"], high=numbers["high"])


def _triangular(numbers: Mapping[str, float]) -> Distribution:
    return Triangular(low=numbers["low"], mode=numbers["mode"], high=numbers["high"])


def _truncated_normal(numbers: Mapping[str, float]) -> Distribution:
    return TruncatedNormal(
        mean=numbers["mean"], sd=_spread(numbers), low=numbers["low"], high=numbers["high"]
    )


def _beta(numbers: Mapping[str, float]) -> Distribution | list[Slip]:
    low, high = numbers["low"], numbers["high"]
    if "alpha" in numbers:
        return Beta(alpha=numbers["alpha"], beta=numbers["beta"], low=low, high=high)
    width = high - low
    mean, variance = (numbers["mean"] - low) / width, (_spread(numbers) / width) ** 2
    greatest = mean * (1.0 - mean)
    if variance >= greatest:
        key = "sd" if "sd" in numbers else "cov"
        limit = math.sqrt(greatest) * width / (1.0 if key == "sd" else numbers["mean"])
        message = f"{key} is {numbers[key]:g}, too large for these bounds and this mean"
        return [Slip(path=(key,), message=message, allowed=f"below {limit:.4g}")]
    size = greatest / variance - 1.0
    return Beta(alpha=mean * size, beta=(1.0 - mean) * size, low=low, high=high)


_BUILDERS: dict[str, Callable[[Mapping[str, float]], Distribution | list[Slip]]] = {
    "normal": _normal,
    "lognormal": _lognormal,
    "uniform": _uniform,
    "triangular": _triangular,
    "truncated_normal": _truncated_normal,
    "beta": _beta,
}
