"""Published ranges: the table is sound, and what lies outside is told with value, range and source."""

import math
import re
from pathlib import Path

import pytest

from probsoil.parameters.range_remarks import range_remarks
from probsoil.scenario import STARTERS, parse_scenario, read_scenario, starter_text
from probsoil.scenario.published_ranges import KINDS, PublishedRange, published_ranges

SCENARIOS = Path(__file__).parents[3] / "scenarios"
# without correlations, which a number that is not uncertain cannot have
STARTER = re.sub(r"\[\[dependence\]\]\nbetween = .*\nrank_correlation = .*\n", "", starter_text("embankment"))
LAMBDA = 'lambda = { dist = "lognormal", mean = 0.36, cov = 0.12, inherent_cov = 0.20, vertical_scale = 1.5 }'
KAPPA = 'kappa = { dist = "lognormal", mean = 0.05, cov = 0.20 }'
POP = 'pop = { dist = "lognormal", mean = 18, cov = 0.30 }'
FRICTION = 'M = { dist = "normal", mean = 1.02, cov = 0.06 }'
FLOW = '{ k = { dist = "lognormal", mean = 1.2e-9, cov = 0.60 }, ck = 0.95 }'
WEIGHT = 'unit_weight = { dist = "normal", mean = 15.8, cov = 0.03 }'


def remarks_with(*edits: tuple[str, str]) -> tuple[str, ...]:
    text = STARTER
    for old, new in edits:
        assert old in text
        text = text.replace(old, new, 1)
    return range_remarks(parse_scenario(text))


@pytest.mark.parametrize("cov", [0.02, 0.9])
def test_scatter_of_kappa_is_not_compared_with_that_of_the_compression_index(cov: float) -> None:
    assert remarks_with((KAPPA, f'kappa = {{ dist = "lognormal", mean = 0.05, cov = {cov} }}')) == ()


@pytest.mark.parametrize("row", published_ranges().rows, ids=lambda row: f"{row.quantity}, {row.source[:12]}")
def test_every_row_is_sound(row: PublishedRange) -> None:
    assert row.kind in KINDS
    assert 0.0 < row.low <= row.high
    assert row.typical is None or row.low <= row.typical <= row.high
    assert row.unit == {"vertical scale": "m", "horizontal scale": "m"}.get(row.kind, row.unit)
    assert row.unit == "-" or "cov" not in row.kind
    assert any(str(year) in row.source for year in range(1960, 2030))
    assert row.soil
    assert row.cited.endswith("(opened)" if row.opened else "(recalled, not opened)")


def test_no_row_stands_twice() -> None:
    rows = [(row.quantity, row.soil, row.kind, row.source, row.note) for row in published_ranges().rows]
    assert len(set(rows)) == len(rows)


def test_table_as_a_frame() -> None:
    frame = published_ranges().to_frame()
    assert len(frame) == len(published_ranges().rows) > 80
    row = frame[(frame.quantity == "k") & (frame.kind == "total cov")].iloc[0]
    assert (row.low, row.high, bool(row.opened)) == (0.68, 0.9, False)
    assert frame.typical.isna().any()


def test_an_envelope_spans_all_rows_and_can_leave_out_a_soil() -> None:
    ranges = published_ranges()
    whole = ranges.envelope(["C_alpha_ratio"], ["value"])
    clay = ranges.envelope(["C_alpha_ratio"], ["value"], without=["granular"])
    assert whole is not None
    assert clay is not None
    assert (whole.low, whole.lowest.soil, whole.high) == (0.01, "granular", 0.07)
    assert (clay.low, clay.lowest.soil, clay.highest.soil) == (0.03, "inorganic clay", "peat")
    assert ranges.envelope(["nothing"], KINDS) is None


@pytest.mark.parametrize("kind", STARTERS)
def test_starters_lie_within(kind: str) -> None:
    assert range_remarks(parse_scenario(starter_text(kind))) == ()


@pytest.mark.parametrize("name", ["heron_flats", "marsh_lane", "reed_causeway"])
def test_demos_lie_within(name: str) -> None:
    assert range_remarks(read_scenario(SCENARIOS / f"{name}.toml")) == ()


OUTSIDE = {
    "scatter above": (
        (LAMBDA, 'lambda = { dist = "lognormal", mean = 0.36, cov = 0.80 }'),
        "soft clay.lambda: a cov of 0.8 lies above what is published, 0.1 to 0.73; the greatest is of clay, "
        "Lee, White and Ingles 1983 (recalled, not opened). It may be right all the same",
    ),
    "knowledge and scatter together above": (
        (
            LAMBDA,
            'lambda = { dist = "normal", mean = 1.2, cov = 0.60, inherent_cov = 0.50, vertical_scale = 1.5 }',
        ),
        f"soft clay.lambda: a cov of {math.hypot(0.6, 0.5):.3g} lies above",
    ),
    "scatter of another law above": (
        (LAMBDA, 'lambda = { dist = "gamma", mean = 0.36, cov = 0.75 }'),
        "soft clay.lambda: a cov of 0.75 lies above",
    ),
    "percentage too small to have been measured": (
        (LAMBDA, 'lambda = { dist = "lognormal", mean = 0.36, cov = 0.02 }'),
        "soft clay.lambda: a cov of 0.02 is less than half of the least published scatter of single values, "
        "0.1 (clay, Duncan 2000 (recalled, not opened)); even there it would take more than 4 independent",
    ),
    "point-to-point scatter": (
        ("inherent_cov = 0.20", "inherent_cov = 0.05"),
        "soft clay.lambda: a point-to-point cov of 0.05 lies below what is published, 0.1 to 0.73",
    ),
    # effective stress at 4.5 m: 1.5 m at 17.5 and 3 m at 15.8 less 3.5 m of water, 39.315 kPa
    "scatter of pop, by what it makes": (
        (POP, 'pop = { dist = "lognormal", mean = 18, cov = 1.2 }'),
        "soft clay.pop: a cov of the preconsolidation stress it makes of "
        f"{1.2 * 18.0 / (18.0 + 39.315):.3g} lies above what is published, 0.1 to 0.35",
    ),
    "scatter of pop, too little": (
        (POP, 'pop = { dist = "lognormal", mean = 18, cov = 0.15 }'),
        f"the preconsolidation stress it makes of {0.15 * 18.0 / 57.315:.3g} is less than half",
    ),
    "vertical scale": (
        ("vertical_scale = 1.5", "vertical_scale = 0.05"),
        "soft clay.lambda: a vertical scale of fluctuation of 0.05 m lies below what is published, 0.1 to "
        "12.7 m; the least is of sand and clay, Phoon and Kulhawy 1999 (recalled, not opened)",
    ),
    "horizontal scale": (
        ("vertical_scale = 1.5", "vertical_scale = 1.5, horizontal_scale = 500"),
        "soft clay.lambda: a horizontal scale of fluctuation of 500 m lies above what is published, 2 to "
        "200 m; the greatest is of fluvial clay, JCSS Probabilistic Model Code, part 3.7 Soil Properties, "
        "2006 (opened)",
    ),
    "unit weight": (
        (WEIGHT, "unit_weight = 12.5"),
        "soft clay.unit_weight: a mean unit weight of 12.5 kN/m3 lies below what is published, 13 to "
        "22 kN/m3",
    ),
    "lambda": (
        (LAMBDA, "lambda = 2.0"),
        "soft clay.lambda: a mean lambda of 2 lies above what is published, 0.087 to 1.74",
    ),
    "kappa over lambda": (
        (KAPPA, "kappa = 0.18"),
        "soft clay.kappa: kappa/lambda at the means (Lambda = 1 - kappa/lambda = 0.5) of 0.5 lies above "
        "what is published, 0.02 to 0.385; the greatest is of London clay, Schofield and Wroth 1968",
    ),
    # tan phi of 0.24 to 0.73: 13.5 to 36.1 degrees, M of 0.506 to 1.468
    "M": ((FRICTION, "M = 1.6"), "soft clay.M: a mean M of 1.6 lies above what is published, 0.506 to 1.47"),
    "phi": (
        (FRICTION, "phi = 12"),
        "soft clay.phi: a mean friction angle of 12 degrees lies below what is published, 13.5 to "
        "36.1 degrees; the least is of organic clay and silt, JCSS",
    ),
    "ck over e0": (
        ("ck = 0.95", "ck = 1.9"),
        "soft clay.ck: ck/e0 at the means of 1 lies above what is published, 0.25 to 0.6",
    ),
    "kh over kv": (
        (FRICTION, f"{FRICTION}\nkh_kv = 8"),
        "soft clay.kh_kv: a mean kh/kv of 8 lies above what is published, 1 to 5; the greatest is of "
        "lacustrine clay, Mesri, Feng, Ali and Hayat 1994 (opened)",
    ),
    "creep ratio": (
        (FRICTION, f"{FRICTION}\nC_alpha_ratio = 0.12"),
        "soft clay.C_alpha_ratio: C_alpha/Cc at the means of 0.12 lies above what is published, 0.03 to "
        "0.07; the greatest is of peat",
    ),
    "creep index": (
        (FRICTION, f"{FRICTION}\nC_alpha = 0.01"),
        f"soft clay.C_alpha: C_alpha/Cc at the means of {0.01 / (0.36 * math.log(10.0)):.3g} lies below",
    ),
    "strength ratio": (
        (FRICTION, f"{FRICTION}\nstrength = {{ S = 0.6, m = 0.8 }}"),
        "soft clay.strength_S: a mean S of 0.6 lies above what is published, 0.19 to 0.35",
    ),
    "strength exponent": (
        (FRICTION, f"{FRICTION}\nstrength = {{ S = 0.3, m = 1.2 }}"),
        "soft clay.strength_m: a mean m of 1.2 lies above what is published, 0.46 to 0.9",
    ),
}


@pytest.mark.parametrize("case", OUTSIDE.values(), ids=OUTSIDE.keys())
def test_what_lies_outside_is_told_once(case: tuple[tuple[str, str], str]) -> None:
    edit, beginning = case
    (remark,) = remarks_with(edit)
    assert beginning in remark
    assert remark.endswith("It may be right all the same")


def test_numbers_that_are_not_uncertain_have_no_scatter() -> None:
    assert (
        remarks_with((LAMBDA, "lambda = 0.36"), (KAPPA, "kappa = 0.05"), (WEIGHT, "unit_weight = 15.8")) == ()
    )


def test_every_layer_is_looked_at_and_granular_ones_are_not() -> None:
    found = remarks_with(
        (KAPPA, "kappa = 0.18"), ("kappa = { dist", "kappa = 0.06\n# { dist"), ("phi = 33", "phi = 45")
    )
    assert [one.partition(":")[0] for one in found] == ["crust.kappa", "soft clay.kappa"]
