"""Reading of a distribution written as a table, every mistake of it at once."""

import math
from collections.abc import Mapping
from typing import Any, cast

from probsoil.scenario.distribution_builders import BUILDERS
from probsoil.scenario.distribution_keys import (
    FORMS,
    GREATEST_COV,
    GREATEST_LOG_SD,
    SPATIAL_DISTRIBUTIONS,
    SPATIAL_KEYS,
    form_text,
    own_keys,
    settling_keys,
)
from probsoil.scenario.distributions import Distribution, TruncatedNormal
from probsoil.scenario.inherent_range import read_range, root_mean_square_cov
from probsoil.scenario.list_entries import list_slips, read_entry
from probsoil.scenario.listed_distributions import Percentiles
from probsoil.scenario.slips import Slip, did_you_mean, unknown_key
from probsoil.scenario.value_files import read_values
from probsoil.units import Kind

LEAST_SHARE_KEPT = 1e-6  # of a normal distribution by its cuts

_MUST_BE_POSITIVE = (
    "sd",
    "log_sd",
    "alpha",
    "beta",
    "shape",
    "scale",
    "vertical_scale",
    "horizontal_scale",
    "median",
)
_NEVER_NEGATIVE = ("lognormal", "gamma")


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
    entries: dict[str, Any] = {}
    for key in known:
        if key in table:
            value = table[key]
            ranged = key == "inherent_cov" and isinstance(value, dict)
            outcome = (
                read_range(cast("dict[str, object]", value), name) if ranged else read_entry(value, key, kind)
            )
            if isinstance(outcome, Slip):
                slips.append(outcome)
            elif isinstance(outcome, list):
                slips += outcome
            elif ranged:
                entries |= {
                    key: root_mean_square_cov(*cast("tuple[float, float]", outcome)),
                    "inherent_range": outcome,
                }
            else:
                entries[key] = outcome
    slips += _form_slips(name, table, slips)
    slips += _value_slips(name, {key: entries[key] for key in entries if isinstance(entries[key], float)})
    slips += _spatial_slips(table) if extra else []
    if slips:
        return slips
    return _built(name, entries, kind)


def _built(name: str, entries: dict[str, Any], kind: Kind) -> Distribution | list[Slip]:
    """Build a distribution whose entries are each in order."""
    if "file" in entries:
        values = read_values(entries["file"], entries.get("column"), kind)
        if isinstance(values, Slip):
            return [values]
        entries["values"] = values
    slips = list_slips(name, entries)
    if slips:
        return slips
    try:
        outcome = BUILDERS[name](entries)
        if isinstance(outcome, list) or _is_usable(outcome):
            return outcome
    except (ArithmeticError, ValueError):
        pass
    return [Slip(path=(), message="these numbers are too far apart to calculate with")]


def _is_usable(distribution: Distribution) -> bool:
    """Whether rounding has left a spread and a mean to calculate with."""
    if isinstance(distribution, TruncatedNormal) and distribution.share_kept < LEAST_SHARE_KEPT:
        return False
    if isinstance(distribution, Percentiles) and not distribution.is_usable:
        return False
    spreads = [
        getattr(distribution, key, 1.0) for key in ("sd", "log_sd", "alpha", "beta", "scale", "median")
    ]
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
    hint = did_you_mean(name, tuple(FORMS)) if isinstance(name, str) else None
    return Slip(path=("dist",), message="unknown distribution", allowed=allowed, hint=hint)


def _unknown_key(key: str, name: str, known: tuple[str, ...], table: Mapping[str, object]) -> Slip:
    if key in SPATIAL_KEYS:
        message = f'"{key}" does not go with this parameter or distribution'
        allowed = "variability from point to point: normal or lognormal soil properties of a layer only"
        return Slip(path=(key,), message=message, allowed=allowed, at_key=True)
    if any(key in own_keys(other) for other in FORMS):
        message = f'"{key}" does not belong to {_a(name)} distribution'
        return Slip(path=(key,), message=message, allowed=form_text(name), at_key=True)
    return unknown_key(key, ("dist", *known), table)


def _a(name: str) -> str:
    return f"{'an' if name[0] in 'aeio' else 'a'} {name}"


def _form_slips(name: str, table: Mapping[str, object], found: list[Slip]) -> list[Slip]:
    """Complain of missing or surplus keys, unless a mistyped key explains the gap."""
    given = [key for key in settling_keys(name) if key in table]
    if set(given) in [set(form) for form in FORMS[name]] or _explained(name, set(given), found):
        return []
    message = f"{_a(name)} distribution needs {form_text(name)}; given: {', '.join(given) or 'none of them'}"
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
    if name in _NEVER_NEGATIVE and numbers.get("mean", 1.0) <= 0.0:
        message = f"mean is {numbers['mean']:g}, and a {name} variable is never negative"
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
