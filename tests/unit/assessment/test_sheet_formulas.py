"""Every formula of a sheet, keyed into a pocket calculator with the digits shown, gives its result."""

import math
import re
from pathlib import Path

import pytest
from pocket_calculator import allowance, evaluated, half_digit

from probsoil.assessment import sheet
from probsoil.assessment.worked import digits, worked
from probsoil.report.sheet_columns import sheet_tables
from probsoil.scenario import Scenario, parse_scenario, read_scenario, starter_text

ROOT = Path(__file__).parents[3]
VARIED = """
format = 1
title = "Other forms"
seed = 1
horizon = 20

[site]
water_table = 0.5
base = "{base}"

[[layers]]
name = "clay"
soil = "clay"
thickness = 5
unit_weight = 16
void_ratio = 1.6
{forms}
permeability = {{ k = 1e-9, ck = 0.8 }}
kh_kv = 2
C_alpha_ratio = 0.05
{excess}

[drains]
pattern = "square"
spacing = 1.5
equivalent_diameter = 0.07
smear_ratio = 2.5
smear_kh_ks = 3
bottom = 4
discharge_capacity = 60

[load]
shape = "embankment"
crest_width = 8
side_slope = {slope}
fill_unit_weight = 19
fill_phi = 33
fill_cohesion = 2

[[stages]]
name = "fill"
height = 2
start = 0
end = 0.3

[[stages]]
name = "trim"
height = -0.5
start = 2
end = 2.1

[[limits]]
name = "settlement"
quantity = "settlement"
at = 20
not_more_than = 0.5
"""
RATIOS = "CR = 0.25\nRR = 0.03\npreconsolidation = { ocr = 1.4 }\nphi = 26"
INDICES = (
    "Cc = 0.6\nCs = 0.08\npreconsolidation = { stress = 40 }\nM = 1.05\nstrength = { S = 0.24, m = 0.8 }"
)

SPREAD = '{{ dist = "normal", mean = {}, sd = {} }}'
DUG = '[[stages]]\nname = "dug out"\nexcavate = 1.2\nstart = 0\nend = "2 weeks"\n\n'
FURTHER = """
[[further_loads]]
name = "bank"
shape = "embankment"
crest_width = 5
side_slope = 1.5
fill_unit_weight = 18
x = 25

[[further_loads]]
name = "house"
shape = "rectangle"
width = 8
length = 12
depth = 0.5
x = -14
y = 3

"""
FURTHER_STAGES = """name = "bank"
load = "bank"
height = 1.5
start = 0
end = 0.2

[[stages]]
name = "house"
load = "house"
pressure = 40
start = 0
end = 0.4

[[stages]]
name = "fill"
"""


TRIANGLE = 'initial_excess = { pressure = 6, shape = "triangular" }'
EVEN = 'initial_excess = { pressure = 2, shape = "uniform" }'


def varied(forms: str, *, slope: int = 2, base: str = "undrained", excess: str = "") -> str:
    return VARIED.format(forms=forms, slope=slope, base=base, excess=excess)


def distorting(kind: str) -> str:
    """The starter with an undrained modulus in its last clay."""
    head, clay, rest = starter_text(kind).rpartition('soil = "clay"\n')
    return f"{head}{clay}undrained_modulus = {{ ratio = 300 }}\n{rest}"


def earlier_load() -> str:
    """Crust of another permeability over clay under which the water stands higher than above."""
    text = varied(
        RATIOS, base='drained"\nbase_head = "-50 cm', excess="initial_excess = { degree = 0.6, load = 12 }"
    )
    crust = text.partition("[[layers]]")[2].partition("[drains]")[0]
    crust = crust.replace("initial_excess = { degree = 0.6, load = 12 }", "").replace(
        '"clay"\nsoil', '"crust"\nsoil'
    )
    crust = crust.replace("{ k = 1e-9, ck = 0.8 }", "{ cv = 2 }").replace("thickness = 5", "thickness = 1.5")
    return text.replace("[[layers]]", f"[[layers]]{crust}\n[[layers]]", 1)


def scenarios() -> dict[str, Scenario]:
    texts = {kind: starter_text(kind) for kind in ("embankment", "tank", "footing")}
    texts |= {
        "ratios": varied(RATIOS),
        "indices, vertical sides": varied(INDICES, slope=0),
        "still consolidating": varied(RATIOS, excess="initial_excess = { pressure = 6 }"),
        "excess in a triangle": varied(RATIOS, excess=TRIANGLE),
        "even excess, artesian": varied(INDICES, excess=EVEN, base='drained"\nbase_head = "20 cm'),
        "an earlier load, two clays": earlier_load(),
        "distorting fill": varied(RATIOS, excess="undrained_modulus = { ratio = 250 }"),
        "distorting fill, vertical": varied(INDICES, slope=0, excess='undrained_modulus = { Eu = "4 MPa" }'),
        "distorting footing": distorting("footing"),
        "distorting tank": distorting("tank"),
    }
    texts["creep index given"] = varied(RATIOS).replace("C_alpha_ratio = 0.05", "C_alpha = 0.03")
    held = 'shape = "embankment"\nhold_level_until = 1.5'
    texts["level held"] = varied(RATIOS).replace('shape = "embankment"', held)
    texts["excavation"] = (
        starter_text("footing")
        .replace("\n[[stages]]", f"\n{DUG}[[stages]]", 1)
        .replace("pressure = 33", "pressure = 55")
        .replace("0 weeks", "3 weeks")
    )
    texts["further loads"] = (
        texts["level held"]
        .replace("[drains]", FURTHER + "[drains]")
        .replace('name = "fill"\n', FURTHER_STAGES)
    )
    pit = '[[stages]]\nname = "pit"\nexcavate = 1.0\nstart = 0\nend = 0.05\n\n'
    texts["replaced ground"] = (
        varied(RATIOS)
        .replace("[[stages]]", f"{pit}[[stages]]", 1)
        .replace("height = 2\nstart = 0\n", "height = 3\nstart = 0.1\n")
    )
    texts["uncertain works"] = (
        varied(RATIOS)
        .replace("height = 2\n", f"height = {SPREAD.format(2, 0.1)}\n")
        .replace("height = -0.5\n", f"height = {SPREAD.format(-0.5, 0.05)}\n")
        .replace("crest_width = 8\n", f"crest_width = {SPREAD.format(8, 0.5)}\n")
        .replace("spacing = 1.5\n", f"spacing = {SPREAD.format(1.5, 0.1)}\n")
        .replace("bottom = 4\n", f"bottom = {SPREAD.format(4, 0.2)}\n")
    )
    found = {name: parse_scenario(text) for name, text in texts.items()}
    files = sorted((ROOT / "scenarios").glob("*.toml"))
    return found | {path.stem: read_scenario(path) for path in files}


SCENARIOS = scenarios()


@pytest.fixture(scope="module", params=SCENARIOS)
def found(request: pytest.FixtureRequest) -> dict:
    return sheet(SCENARIOS[request.param]).to_dict()


def test_numbers_put_in_give_the_result(found: dict) -> None:
    assert len(found["formulas"]) > 12
    for line in found["formulas"]:
        by_hand, result = evaluated(line["numbers"]), line["result"]
        # what rounding of the digits shown can do, and one part in a million for the second order
        band = allowance(line["numbers"]) * 1.01 + half_digit(repr(result)) + 1e-6 * abs(result)
        assert by_hand == pytest.approx(result, rel=0, abs=band), f"{line['formula']}: {line['numbers']}"


def test_every_symbol_of_a_formula_is_explained_and_replaced(found: dict) -> None:
    known = {"ln", "log10", "sqrt", "exp", "arctan", "sin", "tan", "min", "max", "π"}
    for line in found["formulas"]:
        for symbol in line["symbols"]:
            assert symbol["symbol"] in line["formula"]
            assert symbol["meaning"]
        left = "".join(one if one.isalpha() else " " for one in line["numbers"]).split()
        assert set(left) <= {"".join(c for c in word if c.isalpha()) for word in known}, line["numbers"]


def test_sublayers_add_up_to_the_settlement_exactly(found: dict) -> None:
    rows, last = found["sublayers"], found["through_time"][-1]
    total = sum(row["settlement"] for row in rows) + sum(one["secondary"] for one in found["segments"])
    total += sum(row["settlement"] for row in found["distortion"])
    assert total == pytest.approx(found["final_settlement"], rel=1e-9)
    assert last["settlement"] == found["final_settlement"]
    assert sum(row["distortion"] for row in found["layers"]) == pytest.approx(last["distortion"], abs=1e-12)
    parts = last["clay"] + last["granular"] + last["secondary"] + last["distortion"]
    assert parts == pytest.approx(last["settlement"], rel=1e-12)
    for one in found["segments"]:
        assert one["secondary"] == pytest.approx(sum(spell["secondary"] for spell in one["creep"]), rel=1e-12)
    assert sum(row["secondary"] for row in found["layers"]) == pytest.approx(last["secondary"], abs=1e-12)


def test_every_clay_row_follows_from_its_means(found: dict) -> None:
    example = next(line for line in found["formulas"] if line["name"] == "change of void ratio")
    slopes = {one["symbol"]: one["value"] for one in example["symbols"]}
    layer = example["row"].partition(", ")[2]
    rows = [row for row in found["sublayers"] if row["layer"] == layer]
    assert len(rows) >= 2
    for row in rows:
        initial, past = row["mean_initial_stress"], row["mean_preconsolidation"]
        largest, final = row["mean_largest_stress"], row["mean_final_stress"]
        lost = slopes["κ"] * math.log(past / initial) + slopes["λ"] * math.log(largest / past)
        lost -= slopes["κ"] * math.log(largest / final)
        assert lost == pytest.approx(row["void_ratio_change"], rel=1e-9, abs=1e-12)
        strain = lost / (1.0 + row["void_ratio"])
        assert strain * (row["bottom"] - row["top"]) == pytest.approx(row["settlement"], rel=1e-9, abs=1e-12)


def test_means_are_those_of_the_cells(found: dict) -> None:
    for row in found["sublayers"]:
        mine = [cell for cell in found["cells"] if cell["sublayer"] == row["number"]]
        height = sum(cell["thickness"] for cell in mine)
        assert height == pytest.approx(row["bottom"] - row["top"], rel=1e-9)
        if row["soil"] == "clay":
            logs = sum(cell["thickness"] * math.log(cell["final_stress"]) for cell in mine) / height
            assert math.exp(logs) == pytest.approx(row["mean_final_stress"], rel=1e-12)


def test_every_factor_of_safety_is_the_ratio_of_its_moments(found: dict) -> None:
    assert {row["stage"]: row["factor"] for row in found["slip"] if row["stage"] in found["slip_safety"]} == (
        found["slip_safety"]
    )
    for row in found["slip"]:
        clay = sum(row["clay_moment"].values())
        resisting = clay + row["granular_moment"] + row["fill_friction_moment"] + row["fill_cohesion_moment"]
        assert resisting / row["driving_moment"] == pytest.approx(row["factor"], rel=1e-9)
        reach = math.hypot(row["centre_x"] - row["enters_at"], row["centre_y"] - row["fill_height"])
        assert reach == pytest.approx(row["radius"], rel=1e-6)
        for zone, moment in row["clay_moment"].items():
            by_length = row["radius"] * row["clay_length"][zone] * row["clay_strength"][zone]
            assert by_length == pytest.approx(moment, rel=1e-9)


def test_strength_of_the_rows_is_that_of_the_cells(found: dict) -> None:
    cells = {round(cell["depth"], 9): cell for cell in found["strength"]}
    for row in found["strength_in_rows"]:
        cell = cells[round(row["depth"], 9)]
        assert row["before"] == cell["before"]
        for stage, after in row["at_end_of_stage"].items():
            assert cell["at_end_of_stage"][stage] in (after["under_crest"], after["under_slope"])
            law = row["mode_factor"] * row["strength_ratio"]
            overconsolidation = after["preconsolidation_under_slope"] / after["stress_under_slope"]
            slope = law * after["stress_under_slope"] * overconsolidation ** row["exponent"]
            assert slope == pytest.approx(after["under_slope"], rel=1e-9)


def test_digits_are_those_of_a_pocket_calculator() -> None:
    shown = {12.345678: "12.346", 0.5: "0.5", 25000.0: "25000", -3.2: "−3.2", 0.0: "0", 99999.7: "100000"}
    assert {value: digits(value) for value in shown} == shown
    assert digits(2e-9) == "2 · 10^(−9)"
    line = worked(
        "topic",
        "sum",
        "s = s1 + s10 − s∞",
        (0.0, "-"),
        {"s1": (1.0, "", "-"), "s10": (-2.0, "", "-"), "s∞": (3e-7, "", "-")},
        row="row",
    )
    assert line.numbers == "1 + (−2) − (3 · 10^(−7))"


def keys_of(value: object) -> set[str]:
    """Return the keys of objects and of objects in lists; names given by the user are no keys."""
    if isinstance(value, list | tuple):
        return {key for one in value for key in keys_of(one)}
    if not isinstance(value, dict):
        return set()
    named_by_user = {"slip_safety", "bearing_safety", "squeezing_safety", "values"}
    found = set(value)
    for key, one in value.items():
        if key == "at_end_of_stage":
            found |= keys_of(list(one.values()))
        elif key not in named_by_user:
            found |= keys_of(one)
    return found


def test_every_key_is_documented(found: dict) -> None:
    text = (ROOT / "docs" / "results_format.md").read_text(encoding="utf-8").partition("## sheet --json")[2]
    known = {name.removesuffix("[]") for name in re.findall(r"`([\w\[\]]+)`", text)}
    assert keys_of(found) <= known


def test_sections_of_the_csv_come_in_the_order_documented(found: dict) -> None:
    text = (ROOT / "docs" / "results_format.md").read_text(encoding="utf-8").partition("## sheet --csv")[2]
    order = [" ".join(name.split()) for name in re.findall(r"`([^`]+)`", text.partition("## ")[0])]
    names = [table.name for table in sheet_tables(found)]
    stages = [name for name in names if name.startswith("strength after ")]
    place = order.index("strength after STAGE")
    order[place : place + 1] = stages
    assert names == [name for name in order if name in names]
