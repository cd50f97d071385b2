"""The bearing capacity of a foundation on a calculation sheet, with numbers put in."""

from typing import Any

from probsoil.assessment.worked import Symbol, Worked, worked
from probsoil.ground.bearing_capacity import STRIP_FACTOR

BEARING = "bearing"


def bearing_formulas(detail: dict[str, Any] | None) -> list[Worked]:
    """Return the factor of safety against bearing failure where it is least.

    Parameters
    ----------
    detail : dict or None
        Bearing of the sheet where it is least, of `bearing_answers.bearing_detail`.

    Returns
    -------
    lines : list of Worked
        Line of strength, crust, capacity of a strip and of the foundation, and its ratio to the pressure;
        none without a foundation.
    """
    if detail is None:
        return []
    row = detail["row"]
    place = f"end of {row['stage']}, level {row['depth']:.2f} m"
    lines = [_start(detail, place), _growth(row, place), *_crust(detail, place)]
    strip: Symbol = (row["strip_capacity"], "capacity of a strip", "kPa")
    lines += [
        worked(
            BEARING,
            "capacity of a strip",
            "qs = Fg · (Nc · c0 + ρ · B/4) · fc",
            (row["strip_capacity"], "kPa"),
            {
                "Fg": (row["growth_factor"], "factor for growing strength, from the program's table", "-"),
                "Nc": (STRIP_FACTOR, "2 + π", "-"),
                "c0": (row["strength"], "strength at the level, of the line below the profile", "kPa"),
                "ρ": (row["growth"], "its growth with depth", "kPa/m"),
                "B": (row["width"], "width", "m"),
                "fc": (row["crust_factor"], "crust factor; 1 without a crust", "-"),
            },
            row=place,
        ),
        worked(
            BEARING,
            "bearing capacity",
            "q = qs · fs · fd",
            (row["capacity"], "kPa"),
            {
                "qs": strip,
                "fs": (row["shape_factor"], "shape factor", "-"),
                "fd": (row["depth_factor"], "depth factor", "-"),
            },
            row=place,
        ),
    ]
    symbols: dict[str, Symbol] = {
        "q": (row["capacity"], "bearing capacity", "kPa"),
        "p": (row["pressure"], "net pressure at the level", "kPa"),
    }
    return [*lines, worked(BEARING, "factor of safety", "F = q/p", (row["safety"], "-"), symbols, row=place)]


def _start(detail: dict[str, Any], place: str) -> Worked:
    """Where the line touches the profile: at a point, or at the level itself."""
    row, points = detail["row"], detail["points"]
    touching = min(points, key=lambda point: float((point["strength"] - point["line"]) / point["strength"]))
    result = (row["strength"], "kPa")
    if touching is points[0] and len(points) > 2:
        first, second = points[1:3]
        return worked(
            BEARING,
            "strength at the level, where the line touches the profile",
            "c0 = s1 − max((s2 − s1)/(z2 − z1), 0) · z1",
            result,
            {
                "s1": (first["strength"], "strength at the first point below the level", "kPa"),
                "s2": (second["strength"], "strength at the second point", "kPa"),
                "z1": (first["below"], "depth of the first point below the level", "m"),
                "z2": (second["below"], "depth of the second point below the level", "m"),
            },
            row=place,
        )
    return worked(
        BEARING,
        "strength at the level, of the line that touches the profile",
        "c0 = su/(1 + κ · min(z, B)/B)",
        result,
        {
            "su": (touching["strength"], "strength at the point where the line touches", "kPa"),
            "κ": (row["growth_ratio"], "growth over the width by c0, for which most is carried", "-"),
            "z": (touching["below"], "depth of that point below the level", "m"),
            "B": (row["width"], "width", "m"),
        },
        row=place,
    )


def _growth(row: dict[str, Any], place: str) -> Worked:
    symbols: dict[str, Symbol] = {
        "κ": (row["growth_ratio"], "growth over the width by c0, for which most is carried", "-"),
        "c0": (row["strength"], "strength at the level", "kPa"),
        "B": (row["width"], "width", "m"),
    }
    return worked(BEARING, "growth of the line", "ρ = κ · c0/B", (row["growth"], "kPa/m"), symbols, row=place)


def _crust(detail: dict[str, Any], place: str) -> list[Worked]:
    """Lines of the crust factor; none without a crust."""
    row, circle = detail["row"], detail["circle"]
    if circle is None:
        return []
    carried: Symbol = (circle["on_line"], "what it carries on the line", "kPa")
    return [
        worked(
            BEARING,
            "a circle on strength 1",
            "ue = 2 · ((1 + a)^2 + y^2) · arctan((1 + a)/y)/(a + 0.5)",
            (circle["even"], "-"),
            {
                "a": (circle["aside"], "centre outward from the nearer edge, over the width", "-"),
                "y": (circle["above"], "centre above the level, over the width", "-"),
            },
            row=place,
        ),
        worked(
            BEARING,
            "that circle on the line",
            "Ql = c0 · ue + ρ · B · ug",
            (circle["on_line"], "kPa"),
            {
                "c0": (row["strength"], "strength at the level", "kPa"),
                "ue": (circle["even"], "what it carries on strength 1", "-"),
                "ρ": (row["growth"], "growth of the line", "kPa/m"),
                "B": (row["width"], "width", "m"),
                "ug": (circle["growing"], "on strength that grows from 0 by 1 over the width", "-"),
            },
            row=place,
        ),
        worked(
            BEARING,
            "crust factor",
            "fc = (Ql + Qe)/Q0",
            (row["crust_factor"], "-"),
            {
                "Ql": carried,
                "Qe": (circle["of_crust"], "sum of excess times arc over the points of the table", "kPa"),
                "Q0": (circle["least_on_line"], "least that a circle carries on the line", "kPa"),
            },
            row=place,
        ),
    ]
