"""Writes the sheets of Tern Marsh: CSV tables as the program reads them, and an AGS4 file of the same tests.

Run from the root of the repository to write them anew:
    python tests/unit/laboratory/marsh_files.py
"""

import csv
import io
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

import marsh_truth as truth
import numpy as np

FOLDER = Path(__file__).parents[3] / "scenarios" / "tern_marsh"
Rows = list[Sequence[object]]


@dataclass
class Sheets:
    """Rows of every table, and what the AGS4 file needs beside them."""

    holes: Rows = field(default_factory=list)
    strata: Rows = field(default_factory=list)
    plasticity: Rows = field(default_factory=list)
    specimens: Rows = field(default_factory=list)
    increments: Rows = field(default_factory=list)
    readings: Rows = field(default_factory=list)
    triaxials: Rows = field(default_factory=list)
    shear: Rows = field(default_factory=list)
    vane: Rows = field(default_factory=list)
    cone: Rows = field(default_factory=list)


def sheets() -> Sheets:
    """Return the sheets, always the same."""
    made = Sheets()
    streams = iter(np.random.SeedSequence(truth.SEED).spawn(40))
    _ground(made, np.random.default_rng(next(streams)))
    for hole, sample, depth, timed in truth.OEDOMETERS:
        _oedometer(made, np.random.default_rng(next(streams)), (hole, sample, depth), timed)
    for hole, sample, depth, kind, ratio in truth.TRIAXIALS:
        rng = np.random.default_rng(next(streams))
        test = f"{hole}-{sample} {kind}"
        sheared = truth.shear(rng, truth.specimen(rng, hole, sample, depth), kind, ratio)
        made.triaxials.append(
            (test, hole, depth, kind, sheared.axial_stress, sheared.radial_stress, sheared.void_ratio)
        )
        made.shear += [(test, *row) for row in sheared.rows]
    for hole in truth.VANES:
        made.vane += [(hole, *row, "no") for row in truth.vane_rows(np.random.default_rng(next(streams)))]
    for hole in truth.CONES:
        rng = np.random.default_rng(next(streams))
        made.cone += [
            (hole, *row, truth.AREA_RATIO) for row in truth.cone_rows(rng, truth.HOLES[hole][2] - 0.2)
        ]
    return made


def _ground(made: Sheets, rng: np.random.Generator) -> None:
    for hole, (x, y, end) in truth.HOLES.items():
        made.holes.append((hole, x, y, end))
        if hole in truth.VANES:
            tops = [0.0, *(round(clay.base + 0.1 * rng.integers(-2, 3), 1) for clay in truth.CLAYS)]
            names = [*(clay.name for clay in truth.CLAYS), "sand"]
            for name, top, base in zip(names, tops, [*tops[1:], end], strict=True):
                made.strata.append((hole, top, base, name))
            for depth in (1.0, 3.0, 5.0, 6.5, 8.0, 10.0, 11.3):
                clay = truth.clay_at(depth)
                assert clay is not None
                made.plasticity.append((hole, depth, round(clay.plasticity + 3.0 * rng.standard_normal())))


def _oedometer(
    made: Sheets, rng: np.random.Generator, place: tuple[str, str, float], timed: Sequence[int]
) -> None:
    hole, sample, depth = place
    specimen = truth.specimen(rng, hole, sample, depth)
    test = f"{hole}-{sample} oedometer"
    initial = round(specimen.void_ratio, 3)
    made.specimens.append((test, hole, depth, initial, 20.0, "both faces", truth.READING_ERROR, ""))
    greatest, before = 3.0, initial
    for number, stress in enumerate(truth.LOADS, 1):
        greatest = max(greatest, stress)
        read = truth.void_ratio_at(specimen, stress, greatest)
        void_ratio = round(float(read + truth.READING_ERROR * rng.standard_normal()), 3)
        cv = truth.coefficient_of_consolidation(specimen, stress) * float(
            np.exp(0.15 * rng.standard_normal())
        )
        first = stress >= 25 and stress == greatest and stress not in truth.LOADS[: number - 1]
        made.increments.append((test, number, stress, void_ratio, _two_figures(cv) if first else ""))
        if number in timed:
            whole = (before - void_ratio) / (1.0 + initial) * 20.0
            height = (1.0 + 0.5 * (before + void_ratio)) / (1.0 + initial) * 20.0
            curve = truth.time_curve(rng, specimen, stress, whole, height)
            made.readings += [(test, number, *row) for row in curve]
        before = void_ratio


def _two_figures(number: float) -> str:
    return f"{number:#.2g}".rstrip(".")


CSV_TABLES = {
    "holes": ("hole", "x (m)", "y (m)", "final depth (m)"),
    "strata": ("hole", "top (m)", "base (m)", "stratum"),
    "plasticity": ("hole", "depth (m)", "plasticity index (%)"),
    "oedometer_specimens": (
        "test",
        "hole",
        "depth (m)",
        "initial void ratio",
        "initial height (mm)",
        "drainage",
        "void ratio reading error",
        "preconsolidation stress (kPa)",
    ),
    "oedometer_increments": ("test", "increment", "stress (kPa)", "void ratio", "cv (m2/year)"),
    "oedometer_readings": ("test", "increment", "time (min)", "compression (mm)"),
    "triaxial_specimens": (
        "test",
        "hole",
        "depth (m)",
        "kind",
        "axial stress (kPa)",
        "radial stress (kPa)",
        "void ratio",
    ),
    "triaxial_readings": ("test", "axial strain (%)", "deviator stress (kPa)", "pore pressure change (kPa)"),
    "vane": ("hole", "depth (m)", "strength (kPa)", "remoulded strength (kPa)", "corrected"),
    "cone": (
        "hole",
        "depth (m)",
        "cone resistance (MPa)",
        "sleeve friction (kPa)",
        "pore pressure (kPa)",
        "area ratio",
    ),
}


def csv_files() -> dict[str, str]:
    """Return the text of every CSV file by name."""
    made = sheets()
    rows = (
        *(made.holes, made.strata, made.plasticity, made.specimens, made.increments, made.readings),
        *(made.triaxials, made.shear, made.vane, made.cone),
    )
    files = {}
    for (name, headings), table in zip(CSV_TABLES.items(), rows, strict=True):
        text = io.StringIO()
        text.write("# Tern Marsh, an invented site: made up by a computer for trying the program\n")
        writer = csv.writer(text, lineterminator="\n")
        writer.writerow(headings)
        writer.writerows(table)
        files[f"{name}.csv"] = text.getvalue()
    return files


def write() -> None:
    """Write every file of the demo's sheets."""
    from marsh_ags import ags_file

    (FOLDER / "sheets").mkdir(parents=True, exist_ok=True)
    for name, text in csv_files().items():
        (FOLDER / "sheets" / name).write_text(text, encoding="utf-8", newline="")
    (FOLDER / "tern_marsh.ags").write_text(ags_file(), encoding="utf-8", newline="")


if __name__ == "__main__":
    write()
