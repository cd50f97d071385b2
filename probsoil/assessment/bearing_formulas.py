"""The bearing capacity of a foundation on a calculation sheet, with numbers put in."""

from typing import Any

from probsoil.assessment.worked import Symbol, Worked, worked
from probsoil.ground.bearing_capacity import STRIP_FACTOR

BEARING = "bearing"


def bearing_formulas(rows: list[dict[str, Any]]) -> list[Worked]:
    """Return the factor of safety against bearing failure where it is least.

    Parameters
    ----------
    rows : list of dict
        Bearing of the sheet.

    Returns
    -------
    lines : list of Worked
        Capacity of a strip, of the foundation, and their ratio to the pressure; none without a foundation.
    """
    if not rows:
        return []
    row = min(rows, key=lambda one: one["safety"])
    place = f"end of {row['stage']}, level {row['depth']:.2f} m"
    strip: Symbol = (row["strip_capacity"], "capacity of a strip", "kPa")
    lines = [
        worked(
            BEARING,
            "capacity of a strip",
            "qs = max(Fg · (Nc · c0 + ρ · B/4), Nc · cmin)",
            (row["strip_capacity"], "kPa"),
            {
                "Fg": (row["growth_factor"], "factor for growing strength, from the program's table", "-"),
                "Nc": (STRIP_FACTOR, "2 + π", "-"),
                "c0": (row["strength"], "strength at the level, of the line through the profile", "kPa"),
                "ρ": (row["growth"], "its growth with depth", "kPa/m"),
                "B": (row["width"], "width", "m"),
                "cmin": (row["least_strength"], "least strength within one width below the level", "kPa"),
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
    last = worked(BEARING, "factor of safety", "F = q/p", (row["safety"], "-"), symbols, row=place)
    return [*lines, last]
