"""The worked example and the program hold together: each line of the page is worked out again.

The test knows the formulas in its own words. From the page it takes the scenario and the numbers; a line must
follow from its own right-hand side, from the formula here, and agree with the sheet to the digits printed.
"""

import math
import re
import sys
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest

from probsoil.assessment import sheet
from probsoil.assessment.worked import digits
from probsoil.scenario import parse_scenario

sys.path.insert(0, str(Path(__file__).parent / "assessment"))
from pocket_calculator import allowance, evaluated, half_digit

PAGE = (Path(__file__).parents[2] / "docs" / "worked_example.md").read_text(encoding="utf-8")
LINE = re.compile(r"^\((\d+)\) +(\S+) = (.+) = ([\d.]+)(?: (\S+))?$", re.MULTILINE)
LINES = [(int(number), name, right, value) for number, name, right, value, _ in LINE.findall(PAGE)]
CELLS = [
    [float(cell) for cell in row.strip("| ").split("|")]
    for row in re.findall(r"^\| [\d.]+ \|.*$", PAGE, re.MULTILINE)
]
PROSE = re.sub(r"```.*?```", "", PAGE, flags=re.DOTALL)
PAGE_SAYS = {name: float(value) for _, name, _, value in LINES}


def numbers_of(name: str) -> list[float]:
    right = next(one[2] for one in LINES if one[1] == name)
    return [float(one) for one in re.findall(r"(?<![\w.])\d+(?:\.\d+)?", right)]


Z = numbers_of("u0")[1]


@pytest.fixture(scope="module")
def found() -> dict:
    text = re.search(r"```toml\n(.*?)```", PAGE, re.DOTALL)
    assert text is not None
    return sheet(parse_scenario(text[1])).to_dict()


def log_mean(column: int) -> float:
    """Return exp of the mean of the logarithms of a column of the page's cells, by thickness."""
    height = sum(row[0] for row in CELLS)
    return math.exp(sum(row[0] * math.log(row[column]) for row in CELLS) / height)


def spread(z: float, toe: float, shoulder: float) -> float:
    """Return what one half of a trapezoidal strip adds: the integral of line loads over it."""
    return (toe * math.atan2(toe, z) - shoulder * math.atan2(shoulder, z)) / (math.pi * (toe - shoulder))


def smeared(n: float, s: float, ratio: float) -> float:
    """Return mu for equal strain: mean excess pressure, added up ring by ring from the drain."""
    edge = np.linspace(1.0, n, 400_001)
    middle = 0.5 * (edge[1:] + edge[:-1])
    gradient = np.where(middle < s, ratio, 1.0) * (n**2 - middle**2) / middle
    pressure = np.cumsum(gradient * np.diff(edge))
    return float(2.0 * (pressure * middle * np.diff(edge)).sum() / (n**2 * (n**2 - 1.0)))


def power_law(stress: float, past: float) -> float:
    return 0.8 * PAGE_SAYS["S"] * stress ** (1.0 - PAGE_SAYS["m"]) * past ** PAGE_SAYS["m"]


def stresses(p: dict[str, float]) -> Iterator[tuple[str, float]]:
    yield "σv", 18.0 * 1.0 + 16.0 * (Z - 1.0)
    yield "u0", 9.81 * (Z - 1.0)
    yield "σ'0", p["σv"] - p["u0"]
    yield "σ'p", p["σ'0"] + 10.0
    yield "I", spread(Z, 9.0, 6.0) * 2.0
    yield "Δσ", p["I"] * 1.5 * 20.0
    yield "δ", p["sc"] * 9.81 * p["I"]
    yield "σ'", p["σ'0"] + p["Δσ"] - p["δ"]
    yield "h", sum(row[0] for row in CELLS)
    for column, name in enumerate(("σ'0m", "σ'pm", "σ'ym", "σ'm"), start=1):
        yield name, log_mean(column)


def settlements(p: dict[str, float]) -> Iterator[tuple[str, float]]:
    recompression = 0.04 * (math.log(p["σ'pm"] / p["σ'0m"]) - math.log(p["σ'ym"] / p["σ'm"]))
    yield "Δe", recompression + 0.3 * math.log(p["σ'ym"] / p["σ'pm"])
    yield "ε", p["Δe"] / 2.8
    yield "s4", p["ε"] * p["h"]
    yield "sc", sum(numbers_of("sc"))
    yield "Δσm", 30.0 * sum(2.0 * spread(z, 9.0, 6.0) for z in (0.125, 0.375, 0.625, 0.875)) / 4.0
    yield "sg", p["Δσm"] / 15000.0
    yield "De", 1.05 * 1.2
    yield "n", p["De"] / 0.06
    yield "μ", smeared(p["n"], 2.0, 2.0)
    so_far, done = numbers_of("U")
    yield "U", so_far / done
    yield "s10", numbers_of("s10")[0] * 0.04 * 0.3 * math.log(10.0) * p["h"] / 2.8
    yield "S10", sum(numbers_of("S10"))
    end_of_primary = numbers_of("sα")[3]
    yield "sα", p["S10"] * math.log((20.0 - 0.1) / (end_of_primary - 0.1)) / math.log(10.0)
    yield "s", p["sc"] + p["sg"] + p["sα"]


def strengths(p: dict[str, float]) -> Iterator[tuple[str, float]]:
    after = numbers_of("su1")[2]
    yield "m", 1.0 - 0.04 / 0.3
    yield "sinφ", 3.0 / 7.0
    yield "a", (1.0 - p["sinφ"] / 3.0) / (2.0 - 4.0 * p["sinφ"] / 3.0)
    yield "S", p["sinφ"] / (2.0 * p["a"]) * (0.5 + 0.5 * p["a"] ** 2) ** p["m"]
    yield "su0", power_law(p["σ'0"], p["σ'p"])
    yield "su1", power_law(after, after)
    yield "Is", spread(Z, 16.5, 13.5) + spread(Z, 1.5, -1.5)
    yield "c", p["Is"] / p["I"]
    yield "σ's", (1.0 - p["c"]) * p["σ'0"] + p["c"] * after
    yield "su2", power_law(p["σ's"], max(p["σ'p"], p["σ's"]))


def slip(p: dict[str, float]) -> Iterator[tuple[str, float]]:
    across, out, up = numbers_of("R1")[0], numbers_of("R1")[1], numbers_of("R")[0]
    yield "R", sum(numbers_of("R"))
    yield "R1", math.hypot(across + out, up)
    yield "R2", math.hypot(numbers_of("R2")[0] - across, up - 1.5)
    for name in ("M1", "M2", "M3"):
        radius, length, strength = numbers_of(name)
        yield name, radius * length * strength
    yield "Mf", 20.0 * math.tan(34.0 / 180.0 * math.pi) * numbers_of("Mf")[2]
    yield "Md", 20.0 * numbers_of("Md")[1]
    yield "F", (p["M1"] + p["M2"] + p["M3"] + numbers_of("F")[3] + p["Mf"]) / p["Md"]


def from_sheet(found: dict) -> dict[str, float]:
    """Return where the sheet has what each line works out."""
    row, first, last = found["sublayers"][3], found["through_time"][1], found["through_time"][-1]
    strength, circle, segment = found["strength_in_rows"][1], found["slip"][0], found["segments"][0]
    after = strength["at_end_of_stage"]["fill"]
    worked_out = {line["name"]: line["result"] for line in found["formulas"]}
    return {
        "σv": row["total_stress"],
        "u0": row["pore_pressure"],
        "σ'0": row["initial_stress"],
        "σ'p": row["preconsolidation"],
        "I": row["influence"],
        "Δσ": row["stress_increase"],
        "δ": row["relief"],
        "σ'": row["final_stress"],
        "h": row["bottom"] - row["top"],
        "σ'0m": row["mean_initial_stress"],
        "σ'pm": row["mean_preconsolidation"],
        "σ'ym": row["mean_largest_stress"],
        "σ'm": row["mean_final_stress"],
        "Δe": row["void_ratio_change"],
        "ε": row["strain"],
        "s4": row["settlement"],
        "sc": last["clay"],
        "Δσm": sum(one["mean_stress_increase"] for one in found["sublayers"][:2]) / 2.0,
        "sg": last["granular"],
        "De": found["drains"]["influence_diameter"],
        "n": found["drains"]["spacing_ratio"],
        "μ": found["drains"]["factor"],
        "U": first["degree"],
        "s10": row["creep_per_decade"],
        "S10": segment["creep"][0]["creep_per_decade"],
        "sα": segment["secondary"],
        "s": found["final_settlement"],
        "m": strength["exponent"],
        "sinφ": worked_out["sine of the friction angle"],
        "a": worked_out["stress ratio at rest over M"],
        "S": strength["strength_ratio"],
        "su0": strength["before"],
        "su1": after["under_crest"],
        "Is": strength["slope_share"] * row["influence"],
        "c": strength["slope_share"],
        "σ's": after["stress_under_slope"],
        "su2": after["under_slope"],
        **dict.fromkeys(("R", "R1", "R2"), circle["radius"]),
        "M1": circle["clay_moment"]["beyond_toe"],
        "M2": circle["clay_moment"]["under_slope"],
        "M3": circle["clay_moment"]["under_crest"],
        "Mf": circle["fill_friction_moment"],
        "Md": circle["driving_moment"],
        "F": circle["factor"],
    }


def band(right: str, value: str) -> float:
    """Return what the digits printed on both sides of a line can do to it."""
    return 1.01 * allowance(right) + half_digit(value)


@pytest.mark.parametrize(("number", "name", "right", "value"), LINES)
def test_line_follows_from_its_own_numbers(number: int, name: str, right: str, value: str) -> None:
    assert LINES[number - 1][:2] == (number, name)  # counted without a gap
    assert evaluated(right) == pytest.approx(float(value), rel=0, abs=band(right, value))


def test_every_line_follows_from_the_formulas_written_here() -> None:
    wanted = [one for part in (stresses, settlements, strengths, slip) for one in part(PAGE_SAYS)]
    assert [name for name, _ in wanted] == [name for _, name, _, _ in LINES]
    for (number, name, right, value), (_, expected) in zip(LINES, wanted, strict=True):
        assert float(value) == pytest.approx(expected, rel=0, abs=band(right, value)), f"({number}) {name}"


def test_every_line_is_what_the_sheet_says(found: dict) -> None:
    says = from_sheet(found)
    assert set(says) == {name for _, name, _, _ in LINES}
    for number, name, _, value in LINES:
        assert value == digits(says[name]), f"({number}) {name}"


def test_cells_on_the_page_are_those_of_the_sheet(found: dict) -> None:
    keys = ("thickness", "initial_stress", "preconsolidation", "largest_stress", "final_stress")
    cells = [cell for cell in found["cells"] if cell["sublayer"] == 4]
    assert [[digits(cell[key]) for key in keys] for cell in cells] == [
        [digits(one) for one in row] for row in CELLS
    ]


def numbers_in(value: object) -> Iterator[float]:
    if isinstance(value, dict | list | tuple):
        for part in value.values() if isinstance(value, dict) else value:
            yield from numbers_in(part)
    elif isinstance(value, int | float):
        yield float(value)


def test_every_long_number_used_comes_from_the_sheet(found: dict) -> None:
    known = {digits(abs(one)) for one in numbers_in(found)} | {value for _, _, _, value in LINES}
    known |= {digits(one["bottom"] - one["top"]) for one in found["sublayers"]}
    used = " ".join([PROSE, *(right for _, _, right, _ in LINES)])
    long = {
        one for one in re.findall(r"(?<![\w.])\d+\.\d+", used) if len(one.replace(".", "").strip("0")) > 4
    }
    assert long
    assert long <= known, long - known
