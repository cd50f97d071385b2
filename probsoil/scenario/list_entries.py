"""Entries of a distribution's table by themselves, and what lists of them must agree on."""

import math
from collections.abc import Mapping
from typing import Any

from probsoil.scenario.distribution_keys import CHOICE_KEYS, NUMBER_KEYS, entry_shape
from probsoil.scenario.slips import Slip, did_you_mean
from probsoil.units import Kind, UnitError, to_base

GREATEST_COUNT = 100_000  # of values in one list
LEAST_PERCENT = 0.001  # and as far from 100
SUM_TOLERANCE = 1e-6  # of probabilities; what is left over is spread over all of them

_NUMBER_RULE = "a number or a string with a unit"


def read_entry(value: object, key: str, kind: Kind) -> object:
    """Return what stands under one key, in the base unit.

    Parameters
    ----------
    value : object
        From the file.
    key : str
        Key.
    kind : str
        Kind of quantity of the parameter.

    Returns
    -------
    entry : float, tuple of float, str, Slip or list of Slip, [base unit]
        Number, list or words; slips where it will not do.
    """
    shape = entry_shape(key)
    if shape == "list":
        return _list(value, key, kind)
    if shape == "number":
        return _number(value, (key,), NUMBER_KEYS.get(key, kind))
    if shape == "choice":
        return _choice(value, key)
    if not isinstance(value, str) or not value:
        return Slip(path=(key,), message="this is not text", allowed=f"a {key} name in quotes")
    return value


def _number(value: object, path: tuple[str | int, ...], kind: Kind) -> float | Slip:
    if not isinstance(value, int | float | str):
        return Slip(path=path, message="this is not a number", allowed=_NUMBER_RULE)
    try:
        return to_base(value, kind)
    except UnitError as error:
        return Slip(path=path, message=error.message, allowed=error.allowed, hint=error.hint)


def _list(value: object, key: str, kind: Kind) -> tuple[float, ...] | Slip | list[Slip]:
    if not isinstance(value, list):
        return Slip(path=(key,), message="this is not a list", allowed="numbers in square brackets")
    if not 2 <= len(value) <= GREATEST_COUNT:
        message = f"the list has {len(value)} {'entry' if len(value) == 1 else 'entries'}"
        return Slip(path=(key,), message=message, allowed=f"2 to {GREATEST_COUNT:,d}")
    read = [_number(one, (key, place), NUMBER_KEYS.get(key, kind)) for place, one in enumerate(value)]
    slips = [one for one in read if isinstance(one, Slip)]
    return slips or tuple(one for one in read if not isinstance(one, Slip))


def _choice(value: object, key: str) -> str | Slip:
    choices = CHOICE_KEYS[key]
    if value in choices:
        return str(value)
    hint = did_you_mean(value, choices) if isinstance(value, str) else None
    return Slip(path=(key,), message=f"unknown {key}", allowed=" or ".join(choices), hint=hint)


def list_slips(name: str, entries: Mapping[str, Any]) -> list[Slip]:
    """Return what is wrong with the lists of a distribution taken together.

    Parameters
    ----------
    name : str
        Name of the distribution.
    entries : mapping
        Entries, each in order by itself.

    Returns
    -------
    slips : list of Slip
        Empty where nothing is.
    """
    checks = {"discrete": _discrete, "empirical": _empirical, "percentiles": _percentiles}
    return checks[name](entries) if name in checks else []


def _discrete(entries: Mapping[str, Any]) -> list[Slip]:
    values, shares = entries["values"], entries["probabilities"]
    if slips := _count_slips("probabilities", entries):
        return slips
    slips = [
        Slip(path=("probabilities", place), message=f"the probability is {p:g}", allowed="above 0")
        for place, p in enumerate(shares)
        if p <= 0.0
    ]
    total = math.fsum(shares)
    if not slips and abs(total - 1.0) > SUM_TOLERANCE:
        hint = "a fraction for each, not a percentage" if abs(total - 100.0) < 1.0 else None
        message = f"the probabilities add up to {total:.8g}"
        slips.append(Slip(path=("probabilities",), message=message, allowed="1", hint=hint))
    seen: dict[float, int] = {}
    for place, value in enumerate(values):
        if seen.setdefault(value, place) != place:
            message = f"the value {value:g} stands here a second time"
            allowed = "each value once, with the whole of its probability"
            slips.append(Slip(path=("values", place), message=message, allowed=allowed))
    return slips


def _empirical(entries: Mapping[str, Any]) -> list[Slip]:
    if "column" in entries and "file" not in entries:
        return [
            Slip(path=("column",), message="column says nothing without file", allowed="file", at_key=True)
        ]
    if max(entries["values"]) > min(entries["values"]):
        return []
    message, hint = "all values are the same", "give the number itself"
    return [Slip(path=("file" if "file" in entries else "values",), message=message, hint=hint)]


def _percentiles(entries: Mapping[str, Any]) -> list[Slip]:
    if slips := _count_slips("percent", entries):
        return slips
    slips = [
        Slip(
            path=("percent", place),
            message=f"the percentage is {percent:g}",
            allowed=f"{LEAST_PERCENT:g} to {100.0 - LEAST_PERCENT:g}",
            hint=_end_hint(percent),
        )
        for place, percent in enumerate(entries["percent"])
        if not LEAST_PERCENT <= percent <= 100.0 - LEAST_PERCENT
    ]
    for key in ("percent", "values"):
        slips += _rising_slips(key, entries[key])
    return slips or _end_slips(entries)


def _end_hint(percent: float) -> str | None:
    return {0.0: "give the least value as low", 100.0: "give the greatest value as high"}.get(percent)


def _rising_slips(key: str, numbers: tuple[float, ...]) -> list[Slip]:
    return [
        Slip(
            path=(key, place),
            message=f"{numbers[place]:g} follows {numbers[place - 1]:g}",
            allowed="each larger than the one before it",
        )
        for place in range(1, len(numbers))
        if not numbers[place] > numbers[place - 1]
    ]


def _end_slips(entries: Mapping[str, Any]) -> list[Slip]:
    values, low, high = entries["values"], entries.get("low"), entries.get("high")
    slips = []
    if low is not None and not low < values[0]:
        allowed = f"below the least stated value, {values[0]:g}"
        slips.append(Slip(path=("low",), message=f"low is {low:g}", allowed=allowed))
    if high is not None and not high > values[-1]:
        allowed = f"above the greatest stated value, {values[-1]:g}"
        slips.append(Slip(path=("high",), message=f"high is {high:g}", allowed=allowed))
    if entries.get("fit") != "logarithm":
        return slips
    hint = "a fit of the logarithm never goes below 0 by itself"
    if values[0] <= 0.0:
        message = f"the value is {values[0]:g}, which has no logarithm"
        slips.append(Slip(path=("values", 0), message=message, allowed="above 0"))
    elif low is not None and low <= 0.0:
        message = f"low is {low:g}, which has no logarithm"
        slips.append(Slip(path=("low",), message=message, allowed="above 0, or left out", hint=hint))
    return slips


def _count_slips(key: str, entries: Mapping[str, Any]) -> list[Slip]:
    given, values = len(entries[key]), len(entries["values"])
    if given == values:
        return []
    return [Slip(path=(key,), message=f"there are {given} {key} for {values} values", allowed="one for each")]
