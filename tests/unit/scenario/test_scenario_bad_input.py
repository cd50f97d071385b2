"""Every mistake is answered with its line, its column, its key and a remedy."""

from dataclasses import dataclass

import pytest

from probsoil.errors import Fault, ScenarioError
from probsoil.scenario import parse_scenario


@dataclass(frozen=True)
class Spoiled:
    """One edit of the sound scenario and what must be said of it.

    `pointed` is the text that the fault must point at: the first occurrence after the edit.
    """

    old: str
    new: str
    pointed: str
    key: str
    message: str
    allowed: str = ""
    hint: str = ""


CRUST, SOFT, SAND = (
    'layers[1]{} (layer "crust")',
    'layers[2]{} (layer "soft clay")',
    'layers[3]{} (layer "sand")',
)
KAPPA = "kappa = 0.02"
RANK = "rank_correlation = 0.6"
SLIP = 'quantity = "slip_safety"\nnot_less_than = 1.0'
CASES = {
    # keys and choices
    "unknown key": Spoiled(
        "thickness = 1.5",
        "thicknes = 1.5",
        "thicknes =",
        CRUST.format(".thicknes"),
        'unknown key "thicknes"',
        hint='did you mean "thickness"?',
    ),
    "unknown key at the top": Spoiled(
        "seed = 3",
        "seed = 3\ncolour = 1",
        "colour",
        "colour",
        'unknown key "colour"',
        allowed="realisations",
    ),
    "unknown table": Spoiled(
        "[load]", "[loads]", "[loads]", "loads", "unknown key", hint='did you mean "load"?'
    ),
    "unknown key two tables down": Spoiled(
        "{ cv = 3.0 }",
        "{ cvv = 3.0 }",
        "cvv",
        CRUST.format(".permeability.cvv"),
        "unknown key",
        hint='"cv"',
    ),
    "unknown choice": Spoiled(
        'base = "drained"',
        'base = "draned"',
        '"draned"',
        "site.base",
        "none of the choices",
        allowed="drained or undrained",
        hint='"drained"',
    ),
    "unknown soil": Spoiled(
        'soil = "granular"',
        'soil = "gravelly"',
        '"gravelly"',
        SAND.format(".soil"),
        "unknown soil",
        allowed="clay, granular",
    ),
    "mistyped soil": Spoiled(
        'soil = "granular"',
        'soil = "granullar"',
        '"granullar"',
        SAND.format(".soil"),
        "unknown soil",
        hint='did you mean "granular"?',
    ),
    "key of the other soil": Spoiled(
        "phi = 33",
        "phi = 33\nvoid_ratio = 0.6",
        "void_ratio = 0.6",
        SAND.format(".void_ratio"),
        '"void_ratio" does not go with soil = "granular"',
    ),
    "missing key": Spoiled(
        'name = "sand"\nsoil = "granular"\nthickness = 3.0\n',
        'name = "sand"\nsoil = "granular"\n',
        '[[layers]]\nname = "sand"',
        SAND.format(".thickness"),
        'key "thickness" is missing',
        allowed="thickness of the layer",
    ),
    "number for text": Spoiled('title = "Test bank"', "title = 3", "3", "title", "not text"),
    "text for a whole number": Spoiled("seed = 3", 'seed = "3"', '"3"', "seed", "whole number"),
    "whole number below its range": Spoiled(
        "seed = 3",
        "seed = 3\nrealisations = 0",
        "0\nhorizon",
        "realisations",
        "whole number",
        allowed="from 1",
    ),
    "text for a switch": Spoiled(
        "fill_phi = 34",
        'fill_phi = 34\nsubmergence = "yes"',
        '"yes"',
        "load.submergence",
        "neither true nor false",
    ),
    "number for a table": Spoiled(
        "{ stress = 90 }",
        "90",
        "90\nM",
        CRUST.format(".preconsolidation"),
        "this is not a table",
        hint="preconsolidation = { ocr = 1.5 }",
    ),
    "table of a later version": Spoiled(
        "[load]",
        "[investigation]\nbudget = 1\n[load]",
        "[investigation]",
        "investigation",
        "not computed in this version",
    ),
    "secondary compression twice": Spoiled(
        KAPPA,
        f"C_alpha_ratio = 0.04\n{KAPPA}\nC_alpha = 0.01",
        "C_alpha =",
        CRUST.format(".C_alpha"),
        "secondary compression is given more than once, as C_alpha_ratio and C_alpha",
        allowed="one of C_alpha_ratio, C_alpha",
    ),
    "key of a later version": Spoiled(
        KAPPA,
        f"{KAPPA}\ndrained = false",
        "drained",
        CRUST.format(".drained"),
        "not computed in this version",
    ),
    "distortion without stations": Spoiled(
        SLIP,
        'quantity = "angular_distortion"\nnot_more_than = "1/500"\nat = 1',
        '"angular_distortion"',
        'limits[2].quantity (limit "slip")',
        "angular distortion needs two stations; none given",
        allowed="[[stations]] or [station_line]",
    ),
    "bearing of an embankment": Spoiled(
        SLIP,
        'quantity = "bearing_safety"\nnot_less_than = 1.0',
        '"bearing_safety"',
        'limits[2].quantity (limit "slip")',
        "bearing failure is for a foundation",
        allowed='"strip", "rectangle" or "circle"',
    ),
    "format of a later version": Spoiled(
        "format = 1", "format = 2", "2", "format", "this version reads format = 1"
    ),
    "name with a dot": Spoiled(
        '"sand"', '"s.and"', '"s.and"', 'layers[3].name (layer "s.and")', "will not do"
    ),
    "empty name": Spoiled('"sand"', '""', '""', "layers[3].name", "the name is empty"),
    "reserved name": Spoiled(
        '"sand"', '"site"', '"site"', 'layers[3].name (layer "site")', "name of a table"
    ),
    # numbers and units
    "wrong unit": Spoiled(
        "unit_weight = 17.5",
        'unit_weight = "17.5 kN/m2"',
        '"17.5 kN/m2"',
        CRUST.format(".unit_weight"),
        'unit "kN/m2" is a unit of pressure, not of unit weight',
        allowed="lbf/ft3",
        hint='did you mean "kN/m3"?',
    ),
    "wrong unit in a distribution": Spoiled(
        "mean = 15.8",
        'mean = "15.8 kPa"',
        '"15.8 kPa"',
        SOFT.format(".unit_weight.mean"),
        "is a unit of pressure",
    ),
    "negative thickness": Spoiled(
        "thickness = 1.5",
        "thickness = -1.5",
        "-1.5",
        CRUST.format(".thickness"),
        "-1.5 m is too small",
        allowed="0.05 to 200 m (common practice)",
    ),
    "not a number": Spoiled("horizon = 30", "horizon = nan", "nan", "horizon", "not a number"),
    "infinite": Spoiled("M = 1.1", "M = inf", "inf", CRUST.format(".M"), "infinite"),
    "not a number in a distribution": Spoiled(
        "mean = 0.12",
        "mean = nan",
        "nan",
        CRUST.format(".lambda.mean"),
        "not a number",
    ),
    "M beyond its range": Spoiled(
        "M = 1.1", "M = 3.1", "3.1", CRUST.format(".M"), "too large", allowed="0.15 to 2.5"
    ),
    "crest of no width": Spoiled(
        "crest_width = 12.0",
        "crest_width = 0",
        "0\nside",
        "load.crest_width",
        "too small",
        allowed="above 0",
    ),
    # distributions
    "cov of 3": Spoiled(
        "cov = 0.20 }\nkappa",
        "cov = 3 }\nkappa",
        "3 }\nkappa",
        CRUST.format(".lambda.cov"),
        "coefficient of variation of 3",
        allowed="at most 1.5",
        hint="3 percent is 0.03",
    ),
    "unknown distribution": Spoiled(
        'dist = "lognormal", mean = 0.12',
        'dist = "log-normal", mean = 0.12',
        '"log-normal"',
        CRUST.format(".lambda.dist"),
        "unknown distribution",
        hint='"lognormal"',
    ),
    "number in a list of a distribution": Spoiled(
        'dist = "lognormal", mean = 0.12, cov = 0.20',
        'dist = "discrete", values = [0.1, "12 kPa"], probabilities = [0.5, 0.5]',
        '"12 kPa"',
        CRUST.format(".lambda.values[2]"),
        'unit "kPa" is a unit of pressure',
    ),
    "file of values that is not there": Spoiled(
        'dist = "lognormal", mean = 0.12, cov = 0.20',
        'dist = "empirical", file = "nowhere.csv"',
        '"nowhere.csv"',
        CRUST.format(".lambda.file"),
        "there is no file nowhere.csv",
        allowed="relative to the folder of the scenario",
    ),
    "distribution without a name": Spoiled(
        '{ dist = "lognormal", mean = 0.12, cov = 0.20 }',
        "{ mean = 0.12 }",
        "lambda = { mean",
        CRUST.format(".lambda"),
        "does not name its distribution",
    ),
    "distribution without its spread": Spoiled(
        "mean = 0.12, cov = 0.20",
        "mean = 0.12",
        '{ dist = "lognormal", mean = 0.12 }',
        CRUST.format(".lambda"),
        "a lognormal distribution needs mean, cov or mean, sd or median, log_sd; given: mean",
    ),
    "distribution with too much": Spoiled(
        "mean = 0.12, cov = 0.20",
        "mean = 0.12, cov = 0.2, sd = 0.1",
        '{ dist = "lognormal", mean = 0.12',
        CRUST.format(".lambda"),
        "given: mean, cov, sd",
    ),
    "inherent variability without a scale": Spoiled(
        "mean = 0.12, cov = 0.20",
        "mean = 0.12, cov = 0.20, inherent_cov = 0.2",
        "inherent_cov",
        CRUST.format(".lambda.inherent_cov"),
        "inherent_cov needs vertical_scale",
    ),
    "inherent variability of a thickness": Spoiled(
        "mean = 7.0, sd = 0.6",
        "mean = 7.0, sd = 0.6, inherent_cov = 0.2",
        "inherent_cov",
        SOFT.format(".thickness.inherent_cov"),
        "does not go with this parameter",
    ),
    "distribution that leaves its range": Spoiled(
        "M = 1.1",
        'M = { dist = "normal", mean = 2.4, cov = 0.2 }',
        '{ dist = "normal", mean = 2.4',
        CRUST.format(".M"),
        "leaves its physical range: 42 % of its probability lies outside",
        allowed="at most 5 %",
    ),
    "bounded distribution that leaves its range": Spoiled(
        "M = 1.1",
        'M = { dist = "uniform", low = 0.5, high = 2.51 }',
        '{ dist = "uniform"',
        CRUST.format(".M"),
        "leaves its physical range",
        allowed="0.15 to 2.5 (common practice)",
    ),
    # the ground
    "two layers of one name": Spoiled(
        'name = "sand"',
        'name = "crust"',
        '"crust"\nsoil = "granular"',
        'layers[3].name (layer "crust")',
        'layer 1 is already named "crust"',
    ),
    "kappa above lambda": Spoiled(
        KAPPA,
        "kappa = 0.2",
        "0.2\n",
        CRUST.format(".kappa"),
        "not stiffer than virgin compression",
        hint="swapped",
    ),
    "Cs above lambda": Spoiled(
        KAPPA,
        "Cs = 0.5",
        "0.5",
        CRUST.format(".Cs"),
        "mean kappa of 0.217, lambda to a mean lambda of 0.12",
    ),
    "RR above lambda": Spoiled(
        KAPPA,
        "RR = 0.2",
        "0.2",
        CRUST.format(".RR"),
        "mean kappa of 0.182, lambda to a mean lambda of 0.12",
    ),
    "no virgin compression": Spoiled(
        'lambda = { dist = "lognormal", mean = 0.12, cov = 0.20 }\n',
        "",
        '[[layers]]\nname = "crust"',
        CRUST.format(""),
        "virgin compression is missing",
        allowed="one of lambda, Cc, CR",
    ),
    "virgin compression twice": Spoiled(
        KAPPA,
        f"{KAPPA}\nCR = 0.2",
        "CR = 0.2",
        CRUST.format(".CR"),
        "more than once, as lambda and CR",
    ),
    "M and phi": Spoiled("M = 1.1", "M = 1.1\nphi = 27", "phi = 27", CRUST.format(".phi"), "more than once"),
    "preconsolidation twice": Spoiled(
        "{ stress = 90 }",
        "{ stress = 90, ocr = 2 }",
        "ocr = 2",
        CRUST.format(".preconsolidation.ocr"),
        "more than once",
    ),
    "ocr below one": Spoiled(
        "{ stress = 90 }",
        "{ ocr = 0.8 }",
        "0.8 }",
        CRUST.format(".preconsolidation.ocr"),
        "ratio is 0.8",
        allowed="1",
    ),
    "cv and k": Spoiled(
        "{ cv = 3.0 }",
        "{ cv = 3.0, k = 1e-9, ck = 0.5 }",
        "cv = 3.0, k",
        CRUST.format(".permeability.cv"),
        "does not go with k",
    ),
    "k without ck": Spoiled(
        "{ cv = 3.0 }",
        "{ k = 1e-9 }",
        "{ k = 1e-9 }",
        CRUST.format(".permeability.ck"),
        "ck is missing",
    ),
    # the programme
    "stage that ends before it starts": Spoiled(
        'end = "61 weeks"',
        'end = "59 weeks"',
        '"59 weeks"',
        'stages[2].end (stage "surcharge off")',
        "not after its start",
    ),
    "stages overlap": Spoiled(
        'start = "60 weeks"',
        'start = "3 weeks"',
        '"3 weeks"',
        'stages[2].start (stage "surcharge off")',
        'before stage 1 "first lift" ends',
        allowed="order of time",
    ),
    "stage before time 0": Spoiled(
        "start = 0",
        "start = -1",
        "-1\n",
        'stages[1].start (stage "first lift")',
        "too small",
    ),
    "stage beyond the horizon": Spoiled(
        'end = "61 weeks"',
        "end = 31",
        "31\n",
        'stages[2].end (stage "surcharge off")',
        "beyond the horizon",
    ),
    "more removed than placed": Spoiled(
        "height = -0.5",
        "height = -1.6",
        "-1.6",
        'stages[2].height (stage "surcharge off")',
        "1.6 m is removed but only 1.5 m is there",
        allowed="at least -1.5 m",
    ),
    "stage that changes nothing": Spoiled(
        "height = -0.5",
        "height = 0",
        '0\nstart = "60',
        'stages[2].height (stage "surcharge off")',
        "changes nothing",
    ),
    "pressure on an embankment": Spoiled(
        "height = -0.5",
        "pressure = -9",
        "pressure",
        'stages[2].pressure (stage "surcharge off")',
        "height of fill",
    ),
    "stage without an amount": Spoiled(
        "height = -0.5\n",
        "",
        '[[stages]]\nname = "surcharge',
        'stages[2].height (stage "surcharge off")',
        "is missing",
    ),
    "two stages of one name": Spoiled(
        '"surcharge off"',
        '"first lift"',
        '"first lift"\nheight = -0.5',
        'stages[2].name (stage "first lift")',
        'stage 1 is already named "first lift"',
    ),
    # limits
    "limit beyond the horizon": Spoiled(
        SLIP,
        f'{SLIP}\nat = "31 years"',
        '"31 years"',
        'limits[2].at (limit "slip")',
        "beyond the horizon",
        allowed="0 to 30 years",
    ),
    "limit before time 0": Spoiled(
        SLIP,
        f"{SLIP}\nat = -1",
        "-1\n",
        'limits[2].at (limit "slip")',
        "too small",
        allowed="0 to",
    ),
    "second time beyond the horizon": Spoiled(
        '"30 years"]',
        '"31 years"]',
        '"31 years"',
        'limits[1].between[2] (limit "residual")',
        "beyond the horizon",
    ),
    "times reversed": Spoiled(
        '["61 weeks", "30 years"]',
        '["30 years", "61 weeks"]',
        '["30 years"',
        'limits[1].between (limit "residual")',
        "not in order",
    ),
    "one time only": Spoiled(
        '["61 weeks", "30 years"]',
        '["30 years"]',
        '["30 years"]',
        'limits[1].between (limit "residual")',
        "two times",
    ),
    "settlement without a time": Spoiled(
        'between = ["61 weeks", "30 years"]\n',
        "",
        '[[limits]]\nname = "residual"',
        'limits[1] (limit "residual")',
        "the time of the settlement is missing",
        allowed="at, between",
    ),
    "wrong sense": Spoiled(
        "not_less_than",
        "not_more_than",
        "not_more_than = 1.0",
        'limits[2].not_more_than (limit "slip")',
        '"not_more_than" does not go with quantity = "slip_safety"',
        hint='did you mean "not_less_than"?',
    ),
    "two limits of one name": Spoiled(
        'name = "slip"',
        'name = "residual"',
        '"residual"\nquantity = "slip',
        'limits[2].name (limit "residual")',
        "already named",
    ),
    "degree of one": Spoiled(
        SLIP,
        'quantity = "degree_of_consolidation"\nat = 5\nnot_less_than = 1',
        "1\n",
        'limits[2].not_less_than (limit "slip")',
        "too large",
        allowed="above 0 and below 1",
    ),
    "degree without a time": Spoiled(
        SLIP,
        'quantity = "degree_of_consolidation"\nnot_less_than = 0.9',
        '[[limits]]\nname = "slip"',
        'limits[2].at (limit "slip")',
        'key "at" is missing',
    ),
    "time to consolidation beyond the horizon": Spoiled(
        SLIP,
        'quantity = "time_to_consolidation"\nnot_more_than = 31',
        "31\n",
        'limits[2].not_more_than (limit "slip")',
        "beyond the horizon",
    ),
    "target probability of one": Spoiled(
        SLIP,
        f"{SLIP}\ntarget_probability = 1",
        "1\n",
        'limits[2].target_probability (limit "slip")',
        "too large",
    ),
    # dependence
    "correlation of 1.2": Spoiled(
        RANK, "rank_correlation = 1.2", "1.2\n", "dependence[1].rank_correlation", "too large"
    ),
    "unknown address": Spoiled(
        '"soft clay.Cc"',
        '"soft clay.cc"',
        '"soft clay.cc"',
        "dependence[1].between[1]",
        "no uncertain number",
        hint='did you mean "soft clay.Cc"?',
    ),
    "address of a key not given": Spoiled(
        '"soft clay.Cc"',
        '"soft clay.lambda"',
        '"soft clay.lambda"',
        "dependence[1].between[1]",
        "is not given in this scenario",
    ),
    "fixed number": Spoiled(
        '"soft clay.Cs"',
        '"crust.M"',
        '"crust.M"',
        "dependence[1].between[2]",
        '"crust.M" is a fixed number',
    ),
    "with itself": Spoiled(
        '"soft clay.Cs"',
        '"soft clay.Cc"',
        '"soft clay.Cc"]',
        "dependence[1].between[2]",
        "correlated with itself",
    ),
    "pair given twice": Spoiled(
        RANK,
        f'{RANK}\n[[dependence]]\nbetween = ["soft clay.Cs", "soft clay.Cc"]\nrank_correlation = 0.5',
        '["soft clay.Cs"',
        "dependence[2].between",
        "dependence 1 already gives",
    ),
}


def faults_in(text: str) -> tuple[Fault, ...]:
    with pytest.raises(ScenarioError, match="in the scenario") as caught:
        parse_scenario(text, file="bad.toml")
    return caught.value.faults


def place_of(text: str, pointed: str, *, old: str, base: str) -> tuple[int, int]:
    """Line and column of the pointed text, looked for from the table that was edited."""
    edited = base.index(old)
    start = text.rfind("[[" if pointed.startswith("[[") else "\n", 0, edited)
    at = text.index(pointed, max(0, start))
    return text.count("\n", 0, at) + 1, at - (text.rfind("\n", 0, at) + 1) + 1


@pytest.mark.parametrize("case", CASES.values(), ids=CASES.keys())
def test_one_mistake_gives_one_fault_at_its_place(case, base_text):
    assert base_text.count(case.old) >= 1
    text = base_text.replace(case.old, case.new, 1)
    faults = faults_in(text)
    assert len(faults) == 1, "\n".join(map(str, faults))
    fault = faults[0]
    assert fault.file == "bad.toml"
    assert fault.key == case.key
    assert case.message in fault.message
    assert case.allowed in (fault.allowed or "")
    assert case.hint in (fault.hint or "")
    assert (fault.line, fault.column) == place_of(text, case.pointed, old=case.old, base=base_text)
    assert fault.excerpt == text.split("\n")[fault.line - 1]


def test_every_mistake_is_reported_at_once_in_the_order_of_the_file(base_text):
    text = base_text
    edits = [
        ("seed = 3", "seed = -3"),
        ("thickness = 1.5", "thickness = -1.5"),
        (KAPPA, "kapa = 0.02"),
        ("mean = 0.80", 'mean = "0.80 m"'),
        ('soil = "granular"', 'soil = "granullar"'),
        ("constrained_modulus = ", "constrained_modulis = "),
        ("height = -0.5", "height = -5"),
        ('between = ["61 weeks", "30 years"]', 'between = ["30 years", "61 weeks"]'),
        (SLIP, f"{SLIP}\nat = 40"),
    ]
    for old, new in edits:
        assert old in text
        text = text.replace(old, new, 1)
    faults = faults_in(text)
    assert len(faults) == len(edits), "\n".join(map(str, faults))
    assert [fault.line for fault in faults] == sorted(fault.line for fault in faults)


def test_what_stands_under_a_mistyped_key_is_checked_too(base_text):
    faults = faults_in(base_text.replace("[load]", "[laod]").replace("fill_phi = 34", 'fill_phi = "34 m"'))
    assert [fault.key for fault in faults] == ["laod", "laod.fill_phi"]


def test_several_mistakes_in_one_distribution(base_text):
    faults = faults_in(base_text.replace("mean = 0.12, cov = 0.20", 'mean = "0.12 m", covv = 30, foo = 1'))
    assert [fault.key.split(" ")[0] for fault in faults] == [
        "layers[1].lambda.mean",
        "layers[1].lambda.covv",
        "layers[1].lambda.foo",
    ]


def test_a_fault_underlines_the_value(base_text):
    (fault,) = faults_in(base_text.replace("unit_weight = 17.5", 'unit_weight = "17.5 kN/m2"'))
    column, length = fault.span
    assert fault.excerpt[column - 1 : column - 1 + length] == '"17.5 kN/m2"' == fault.given


def test_a_clay_layer_is_needed(base_text):
    start, end = base_text.index('[[layers]]\nname = "crust"'), base_text.index('[[layers]]\nname = "sand"')
    text = base_text[:start] + base_text[end:]
    text = text.replace(
        '[[dependence]]\nbetween = ["soft clay.Cc", "soft clay.Cs"]\nrank_correlation = 0.6\n', ""
    )
    (fault,) = faults_in(text)
    assert "no layer is of clay" in fault.message


def test_slip_needs_an_embankment_and_height_needs_a_unit_weight(base_text):
    start, end = base_text.index("[load]"), base_text.index("[[stages]]")
    faults = faults_in(base_text[:start] + '[load]\nshape = "area"\n' + base_text[end:])
    assert [fault.key for fault in faults] == [
        'stages[1].height (stage "first lift")',
        'stages[2].height (stage "surcharge off")',
        'limits[2].quantity (limit "slip")',
    ]
    assert "unit weight of the fill" in faults[0].message
    assert "an area load has none" in faults[2].message


@pytest.mark.parametrize("key", ["layers", "stages", "limits"])
@pytest.mark.parametrize(("value", "message"), [("[]", "the list is empty"), ("3", "not a list of tables")])
def test_lists_that_are_none(key, value, message, base_text):
    head = f"{key} = {value}\n"
    blocks = [
        block for block in base_text.split("\n\n") if not block.startswith((f"[[{key}]]", "[[dependence]]"))
    ]
    (fault,) = faults_in(head + "\n\n".join(blocks))
    assert message in fault.message
    assert (fault.line, fault.key) == (1, key)


def three_correlations(first: float, second: float, third: float) -> str:
    pairs = (("Cc", "Cs", first), ("Cs", "k", second), ("Cc", "k", third))
    return "".join(
        f'[[dependence]]\nbetween = ["soft clay.{a}", "soft clay.{b}"]\nrank_correlation = {rank}\n'
        for a, b, rank in pairs
    )


def test_correlations_that_cannot_hold_together_and_the_nearest_that_can(base_text):
    start, end = base_text.index("[[dependence]]"), base_text.index("[[limits]]")
    text = base_text[:start] + three_correlations(0.9, 0.9, -0.9) + base_text[end:]
    (fault,) = faults_in(text)
    assert fault.key == "dependence[1].rank_correlation"
    assert "cannot hold together" in fault.message
    for pair in ("soft clay.Cc with soft clay.Cs: 0.9", "soft clay.Cc with soft clay.k: -0.9"):
        assert pair in fault.message
    assert "Higham 2002" in fault.hint
    ranks = [float(part.rpartition(": ")[2]) for part in fault.hint.split("; ")]
    parse_scenario(base_text[:start] + three_correlations(*ranks) + base_text[end:])


def test_one_correlation_that_is_one_in_all_but_name_is_refused(base_text):
    (fault,) = faults_in(base_text.replace("rank_correlation = 0.6", "rank_correlation = 0.9999999999"))
    assert "cannot hold together" in fault.message
    assert "soft clay.Cc with soft clay.Cs: 0.99" in fault.hint


DRAINS = (
    '[drains]\npattern = "square"\nspacing = 1.3\nequivalent_diameter = 0.066\nsmear_ratio = 3\n'
    "smear_kh_ks = 3\nbottom = 8\n"
)


@pytest.mark.parametrize(
    ("old", "new", "key", "message"),
    [
        ('"square"', '"hexagonal"', "drains.pattern", "hexagonal"),
        ("spacing = 1.3", "spacing = -1.3", "drains.spacing", "is too small"),
        ("smear_ratio = 3", "smear_ratio = 0.5", "drains.smear_ratio", "is too small"),
        ("equivalent_diameter = 0.066", "equivalent_diameter = 0.5", "drains.smear_ratio", "smear zones"),
        ("bottom = 8", 'bottom = 8\ninstalled = "40 years"', "drains.installed", "end of the time axis"),
        ("bottom = 8", "bottom = 8\ndepth = 3", "drains.depth", "unknown key"),
        ("bottom = 8\n", "", "drains", "bottom"),
    ],
)
def test_drains_wrongly_given(base_text, old, new, key, message):
    text = base_text.replace("[load]", DRAINS.replace(old, new) + "\n[load]", 1)
    with pytest.raises(ScenarioError, match=message) as caught:
        parse_scenario(text)
    assert caught.value.faults[0].key.startswith(key)
