"""Every number behind the bearing capacity on a calculation sheet."""

from typing import Any

from probsoil.assessment.sheet_run import SheetRun
from probsoil.ground.bearing import BearingLevel, LevelCapacity, capacities_at
from probsoil.ground.bearing_capacity import growth_ratio, strength_growth_factor
from probsoil.ground.bearing_line import CIRCLES, CrustParts, circle_sections, crust_parts, strength_at_level
from probsoil.ground.foundation import Contact

_EDGE = 1  # zone of strength below the edge


def bearing_rows(run: SheetRun) -> list[dict[str, Any]]:
    """Return what the bearing capacity comes from, for each stage and level.

    Parameters
    ----------
    run : SheetRun
        Site, values and the ground's answer.

    Returns
    -------
    rows : list of dict
        Empty without a foundation.
    """
    site = run.site
    times = set(site.bearing_times.tolist())
    rows = []
    for stage in site.stages:
        if site.foundation is None or stage.end not in times:
            continue
        for level, found in capacities_at(site, run.values, run.state.ground, run.state.strength, stage.end):
            if level.exists[0]:
                named = {"stage": stage.name, "layer": site.layers[level.layer].name}
                rows.append(named | _row(level, found, site.foundation.contact))
    return rows


def _row(level: BearingLevel, found: LevelCapacity, contact: Contact) -> dict[str, Any]:
    width, line = float(level.width[0]), found.line
    ratio = growth_ratio(line.start[0], line.growth[0] * width)
    return {
        "depth": float(level.depth[0]),
        "width": width,
        "strength": float(line.start[0]),
        "growth": float(line.growth[0]),
        "growth_ratio": float(ratio),
        "growth_factor": float(strength_growth_factor(ratio, contact)),
        "crust_factor": float(line.crust_factor[0]),
        "strip_capacity": float(found.strip[0]),
        "shape_factor": float(found.shape_factor[0]),
        "depth_factor": float(found.depth_factor[0]),
        "capacity": float(found.capacity[0]),
        "pressure": float(found.pressure[0]),
        "safety": float(found.safety[0]),
    }


def bearing_detail(run: SheetRun, rows: list[dict[str, Any]]) -> dict[str, Any] | None:
    """Return the profile, the line and the circle where the factor of safety is least.

    Parameters
    ----------
    run : SheetRun
        Site, values and the ground's answer.
    rows : list of dict
        Of `bearing_rows`.

    Returns
    -------
    detail : dict or None
        ``row`` (the one meant), ``circle`` or None without a crust, and ``points``, the level itself first;
        None without rows.
    """
    if not rows:
        return None
    row = min(rows, key=lambda one: float(one["safety"]))
    site, ground = run.site, run.state.ground
    end = next(stage.end for stage in site.stages if stage.name == row["stage"])
    level, found = next(
        pair
        for pair in capacities_at(site, run.values, ground, run.state.strength, end)
        if site.layers[pair[0].layer].name == row["layer"]
    )
    strength = run.state.strength[int(site.record.searchsorted(end)), :1, _EDGE][:, ground.clay]
    below, edge, width = level.below[0], level.edge[0], float(level.width[0])
    parts = crust_parts(found.line, below=below, edge=edge, strength=strength[0], width=width)
    at_level = float(strength_at_level(level.below[:1], strength, level.width[:1])[0])
    start = float(found.line.start[0])
    rows_of_points = [(0.0, at_level, start, max(at_level - start, 0.0) if parts.excess.any() else 0.0, 0.0)]
    rows_of_points += zip(
        below[parts.number], strength[0, parts.number], parts.line, parts.excess, parts.arc, strict=True
    )
    keys = ("below", "strength", "line", "excess", "arc")
    points = [
        {
            "depth": row["depth"] + float(one[0]),
            **{key: float(value) for key, value in zip(keys, one, strict=True)},
        }
        for one in rows_of_points
    ]
    return {"row": row, "circle": _circle(found, parts), "points": points}


def _circle(found: LevelCapacity, parts: CrustParts) -> dict[str, float] | None:
    number = int(found.line.circle[0])
    if number < 0:
        return None
    aside, above = circle_sections()
    return {
        "aside": float(aside[number]),
        "above": float(above[number]),
        "even": float(CIRCLES.even[number]),
        "growing": float(CIRCLES.growing[number]),
        "on_line": parts.worst_on_line,
        "of_crust": float((parts.excess * parts.arc).sum()),
        "least_on_line": parts.alone,
    }
