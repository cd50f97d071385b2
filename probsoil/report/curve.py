"""The exceedance curve on which the reader moves the threshold: all readings are made here."""

import json
import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

from probsoil.errors import ResultsError
from probsoil.report import alttext
from probsoil.report.chance import chance_text, confidence_of, is_certain, margin_text, realisations_of
from probsoil.report.text import (
    count_text,
    decimals_of,
    exceeding_word,
    interval_text,
    is_number,
    plain_percent,
    probability_text,
    quantity_text,
    realisations_text,
    rounded,
    step_decimals,
    with_unit,
)

_TABLE_ROWS = 12
_TICKS = 5.0
_SAME = 1e-9  # relative; thresholds are round numbers a step apart, so this only absorbs binary rounding


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One threshold of the curve with what the page says of it.

    Attributes
    ----------
    threshold : float, [any]
        Threshold in the limit's unit.
    text : str
        The threshold with its unit.
    probability, low, high : float, [-]
        Exceedance probability and its interval.
    chance, margin, count : str
        The three readings in words; the margin is the interval, or the one-sided bound where none or all
        exceed.
    interval : str
        The two ends of the interval in words, for the table.
    band : tuple of float or None, [-]
        Limits that hold for the whole curve at once; None where the results have none.
    whole : str
        The same in words, for the table.
    """

    threshold: float
    text: str
    probability: float
    low: float
    high: float
    chance: str
    margin: str
    count: str
    interval: str
    band: tuple[float, float] | None = None
    whole: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Axis:
    """One way to lay out the chance axis.

    Attributes
    ----------
    kind : str
        ``even`` or ``log``.
    ticks : tuple of (float, str), [%]
        Height in per cent of the plot from its top, and label.
    line, band : str
        Path data of the curve and its interval, in thousandths of the plot.
    whole : str
        Path data of the limits of the whole curve; empty where there are none.
    heights : tuple of float, [%]
        Height of each step in per cent from the top.
    target : float or None, [%]
        Height of the target probability in per cent from the top; None where there is none or it lies
        outside.
    """

    kind: str
    ticks: tuple[tuple[float, str], ...]
    line: str
    band: str
    whole: str
    heights: tuple[float, ...]
    target: float | None


def curve_steps(limit: dict[str, Any], results: dict[str, Any]) -> list[Step]:
    """Make the reading of every threshold of a limit's curve.

    Parameters
    ----------
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    steps : list of Step
        Rising thresholds; the limit's own is always among them and reads as its headline does.

    Raises
    ------
    ResultsError
        If the curve and the headline count different numbers of exceedances at the limit's threshold.
    """
    curve = limit.get("curve") or {}
    keys = ("threshold", "exceeding", "probability", "low", "high")
    rows = [
        row for row in zip(*(curve.get(key) or [] for key in keys), strict=True) if all(map(is_number, row))
    ]
    own = (limit["threshold"], limit["exceeding"], limit["probability"], *limit["interval"])
    others = []
    for row in rows:
        if not math.isclose(row[0], own[0], rel_tol=_SAME, abs_tol=_SAME * float(curve.get("step") or 1.0)):
            others.append(row)
        elif row[1] != own[1]:
            raise ResultsError(
                f"limit {limit['name']!r}: the curve counts {row[1]} exceedances at the limit's threshold, "
                f"the headline {own[1]}"
            )
    base = (realisations_of(limit, results), confidence_of(limit, results))
    decimals, unit = step_decimals(limit), limit.get("unit", "-")
    steps = [_step(row, base, decimals, unit) for row in sorted([*others, own])]
    low, high = (curve.get(key) or [] for key in ("band_low", "band_high"))
    if not len(low) == len(high) == len(steps):
        return steps
    return [
        replace(step, band=ends, whole=interval_text(step.probability, *ends))
        for step, ends in zip(steps, zip(low, high, strict=True), strict=True)
    ]


def curve_view(number: int, limit: dict[str, Any], results: dict[str, Any]) -> dict[str, Any] | None:
    """Lay out the exceedance curve of one limit for the page.

    Parameters
    ----------
    number : int, [-]
        Number of the limit on the page, from 1.
    limit : dict
        One entry of ``limits`` of the results.
    results : dict
        The results it belongs to.

    Returns
    -------
    view : dict or None
        What the page's template needs; None where the results hold no curve.
    """
    steps = curve_steps(limit, results)
    if len(steps) < 2:
        return None
    start = next(i for i, step in enumerate(steps) if step.threshold == limit["threshold"])
    first, last = steps[0].threshold, steps[-1].threshold
    across = [round(100.0 * (step.threshold - first) / (last - first), 2) for step in steps]
    n, target = realisations_of(limit, results), limit.get("target_probability")
    axes = (_even_axis(steps, across, target), _log_axis(steps, across, target, n))
    decimals = step_decimals(limit)
    data = {
        "start": start,
        "x": across,
        "y": [axis.heights for axis in axes],
        "value": [rounded(step.threshold, decimals).replace(",", "") for step in steps],
        "read": [[step.text, step.chance, step.margin, step.count] for step in steps],
    }
    words = alttext.curve(limit, chance_text(limit, results))
    return {
        "number": number,
        "name": limit["name"],
        "quantity": quantity_text(limit),
        "word": exceeding_word(limit),
        "unit": limit.get("unit", "-"),
        "title": words.title,
        "description": words.description,
        "steps": steps,
        "start": start,
        "own": steps[start],
        "across": across[start],
        "axes": axes,
        "x_ticks": _x_ticks(first, last),
        "whole": plain_percent(confidence_of(limit, results)) if steps[0].band else "",
        "rare": limit["probability"] < 0.02,
        "target": None if target is None else plain_percent(target),
        "total": count_text(n),
        "totals": realisations_text(n),
        "sure": "no interval:"
        if is_certain(limit)
        else f"with {plain_percent(confidence_of(limit, results))} confidence",
        "table": [steps[i] for i in _table_rows(len(steps), start)],
        "json": json.dumps(data, separators=(",", ":"), ensure_ascii=False).replace("<", "\\u003c"),
    }


def _step(
    row: tuple[float, int, float, float, float], base: tuple[int, float], decimals: int, unit: str
) -> Step:
    threshold, count, probability, low, high = row
    n, confidence = base
    return Step(
        threshold=threshold,
        text=with_unit(rounded(threshold, decimals), unit),
        probability=probability,
        low=low,
        high=high,
        chance=probability_text(probability, n).removesuffix(f" of {realisations_text(n)}"),
        margin=margin_text(probability, [low, high], n, confidence),
        interval=interval_text(probability, low, high),
        count=count_text(int(count)),
    )


def _x_ticks(first: float, last: float) -> list[tuple[float, str]]:
    size = _round_size(last - first)
    ticks = [size * k for k in range(math.ceil(first / size - 1e-9), math.floor(last / size + 1e-9) + 1)]
    decimals = decimals_of(float(f"{size:.3g}"))
    return [(round(100.0 * (tick - first) / (last - first), 2), rounded(tick, decimals)) for tick in ticks]


def _round_size(span: float) -> float:
    """Give the round step that cuts a span in at most `_TICKS` parts."""
    unit = 10.0 ** math.floor(math.log10(span))
    return next(unit * k for k in (0.2, 0.25, 0.5, 1.0, 2.0) if span / (unit * k) <= _TICKS)


def _table_rows(size: int, start: int) -> list[int]:
    every = max(1, math.ceil(size / _TABLE_ROWS))
    return sorted({*range(start % every, size, every), start, 0, size - 1})


def _even_axis(steps: list[Step], across: list[float], target: float | None) -> Axis:
    top = max(max(max(step.high, (step.band or (0.0, 0.0))[1]) for step in steps), 1e-9)
    size = _round_size(top)
    count = math.ceil(top / size - 1e-9)
    peak = min(1.0, size * count)

    def height(share: float) -> float:
        return 100.0 * (1.0 - share / peak)

    ticks = [min(peak, round(size * k, 12)) for k in range(count + 1)]
    return _axis("even", ticks, height, steps, across, target)


def _log_axis(steps: list[Step], across: list[float], target: float | None, n: int) -> Axis:
    floor = -math.ceil(math.log10(max(10, n)))

    def height(share: float) -> float:
        return 100.0 if share <= 0 else min(100.0, 100.0 * math.log10(share) / floor)

    return _axis("log", [float(f"1e{power}") for power in range(floor, 1)], height, steps, across, target)


def _axis(
    kind: str,
    ticks: list[float],
    height: Callable[[float], float],
    steps: list[Step],
    across: list[float],
    target: float | None,
) -> Axis:
    ends = [[(step.low, step.high) for step in steps], [step.band for step in steps if step.band]]
    # On the logarithmic axis a chance of none has no height; the line stops and only the band goes on.
    seen = [i for i, step in enumerate(steps) if kind == "even" or step.probability > 0]
    heights = tuple(round(height(step.probability), 2) for step in steps)
    line = _points([across[i] for i in seen], [heights[i] for i in seen])
    level = None if target is None else round(height(target), 2)
    return Axis(
        kind=kind,
        ticks=tuple((round(height(share), 2), plain_percent(share)) for share in ticks),
        line=f"M{'L'.join(line)}" if line else "",
        band=_between(across, ends[0], height),
        whole=_between(across, ends[1], height),
        heights=heights,
        target=level if level is not None and 0.0 <= level <= 100.0 else None,
    )


def _between(across: list[float], ends: list[tuple[float, float]], height: Callable[[float], float]) -> str:
    """Give the outline of what lies between two lines; nothing where there are none."""
    if not ends:
        return ""
    lower, upper = (_points(across, [height(end[side]) for end in ends]) for side in (0, 1))
    return f"M{'L'.join([*upper, *reversed(lower)])}Z"


def _points(across: list[float], down: list[float]) -> list[str]:
    return [f"{10 * x:.0f} {10 * y:.0f}" for x, y in zip(across, down, strict=True)]
