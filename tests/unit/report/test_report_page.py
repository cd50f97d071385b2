"""The page: whole for any results the contract allows, closed to the network, true to the numbers."""

import base64
import copy
import hashlib
import html
import json
import re
import subprocess
import sys
from html.parser import HTMLParser
from itertools import pairwise

import numpy as np
import pytest
from sample_results import limit, sample

from probsoil.errors import ResultsError
from probsoil.report import render_report, text, write_report

VOID = {"meta", "link", "br", "hr", "img", "input", "wbr"}


class Page(HTMLParser):
    """Reads a page strictly: every element closed in its turn, identifiers once, links within reach."""

    def __init__(self, page: str) -> None:
        super().__init__(convert_charrefs=True)
        self.open: list[str] = []
        self.ids: list[str] = []
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.words: list[str] = []
        self.blocks: list[tuple[str, str]] = []
        self.feed(page)
        self.close()
        assert self.open == []
        assert len(self.ids) == len(set(self.ids))

    def handle_starttag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        self.ids += [value for key, value in attrs if key == "id"]
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        self.ids += [value for key, value in attrs if key == "id"]

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        if self.open and self.open[-1] in {"script", "style"}:
            self.blocks.append((self.open[-1], data))
        else:
            self.words.append(data)

    @property
    def text(self) -> str:
        return re.sub(r"\s+", " ", " ".join(self.words).replace("\u00a0", " "))

    def all(self, tag: str) -> list[dict[str, str | None]]:
        return [attrs for name, attrs in self.tags if name == tag]


@pytest.fixture(scope="module")
def results():
    return sample()


@pytest.fixture(scope="module")
def rendered(results):
    return render_report(results)


@pytest.fixture(scope="module")
def page(rendered):
    return Page(rendered)


def test_headline_table_and_first_reading_agree(results, page):
    for entry in results["limits"]:
        assert text.verdict_sentence(entry, results) in page.text
        chance = text.probability_text(entry["probability"], 20_000)
        bounds = text.interval_text(entry["probability"], *entry["interval"])
        assert (
            f"{chance} {bounds} {'none' if entry['target_probability'] is None else ''}".strip() in page.text
        )
        assert f"interval {bounds} {entry['exceeding']:,d} of 20,000 realisations" in page.text
    assert text.overall_sentence(results) in page.text


def test_same_results_same_bytes(results, rendered):
    assert render_report(copy.deepcopy(results)) == rendered


def test_nothing_points_outside(rendered, page):
    addresses = re.findall(r"https?://[^\s\"'<>)]+", rendered)
    assert set(addresses) <= {
        "http://www.w3.org/2000/svg",
        "http://www.w3.org/1999/xlink",
    }  # names, not places
    for tag, attrs in page.tags:
        assert not {"src", "srcset", "data", "action", "poster"} & set(attrs), tag
        assert not any(key.startswith("on") for key in attrs), tag
        assert "style" not in attrs, tag
        href = attrs.get("href") or attrs.get("xlink:href")
        assert href is None or (href[0] == "#" and href[1:] in page.ids)
    assert "@import" not in rendered
    assert not any("url(" in block for tag, block in page.blocks if tag == "style")


def test_policy_allows_this_script_and_this_style_and_nothing_else(page):
    policy = next(a["content"] for a in page.all("meta") if a.get("http-equiv") == "Content-Security-Policy")
    rules = dict(rule.strip().split(" ", 1) for rule in policy.split(";"))
    assert rules["default-src"] == "'none'"
    for kind, rule in (("style", "style-src"), ("script", "script-src")):
        block = next(b for tag, b in page.blocks if tag == kind and not b.startswith("{"))
        digest = base64.b64encode(hashlib.sha256(block.encode()).digest()).decode()
        assert rules[rule] == f"'sha256-{digest}'"


def test_tables_have_real_headers_and_captions(page):
    tables = page.all("table")
    assert len(tables) == len(page.all("caption")) > 10
    scopes = {attrs.get("scope") for attrs in page.all("th")}
    assert scopes == {"col", "row", "rowgroup"}
    assert all(
        a.get("tabindex") == "0" and a.get("aria-label")
        for a in page.all("div")
        if a.get("class") == "scroll"
    )


def test_every_figure_is_described_and_has_numbers_beside_it(page):
    drawn = [attrs for attrs in page.all("svg") if "aria-hidden" not in attrs]
    assert len(drawn) == 7 + 4
    for attrs in drawn:
        assert attrs["role"] == "img"
        assert set(attrs["aria-labelledby"].split()) <= set(page.ids)
    assert len(page.all("details")) == len(drawn)
    assert all(attrs.get("aria-live") == "polite" for attrs in page.all("output"))


def test_headings_do_not_skip_a_level(page):
    levels = [int(tag[1]) for tag, _ in page.tags if re.fullmatch(r"h[1-6]", tag)]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after - before <= 1 for before, after in pairwise(levels))


def test_drivers_claim_slopes_not_halving(page):
    assert "what halving a spread would do is not claimed here" in page.text
    assert "Not to be told from no effect when all parameters are judged together" in page.text


AWKWARD = "<script>alert(1)</script> & \"lift\" 'two' </script> {{ 7*7 }} " + "very long " * 20


def awkward(results):
    wild = copy.deepcopy(results)
    before = results["limits"][0]["name"]
    wild |= {"title": AWKWARD, "currency": AWKWARD, "assumptions": [AWKWARD], "cautions": [AWKWARD]}
    wild["limits"][0]["name"] = AWKWARD
    for row in (*wild["drivers"], *wild["driver_quality"]):
        row["limit"] = AWKWARD if row["limit"] == before else row["limit"]
    for row in wild["drivers"]:
        row["parameter"] = AWKWARD + row["parameter"]
    wild["ground"]["layers"][0]["name"] = wild["ground"]["layers"][0]["properties"][0]["text"] = AWKWARD
    wild["ground"]["water_table"] = wild["ground"]["load"]["text"] = AWKWARD
    wild["slip"][0]["stage"] = wild["settlement"]["stages"][0]["name"] = AWKWARD
    wild["parameters"][0] |= {"name": AWKWARD, "meaning": AWKWARD, "text": AWKWARD, "unit": AWKWARD}
    wild["dependence"][0]["between"] = [AWKWARD, AWKWARD]
    wild["warnings"][0]["message"] = wild["provenance"]["command"] = AWKWARD
    wild["limits"][0]["time_text"] = AWKWARD
    return wild


def test_awkward_names_are_text_everywhere(results):
    rendered = render_report(awkward(results))
    wild = Page(rendered)
    assert len(wild.all("script")) == 1 + 4
    assert rendered.count("<script>alert") == 0
    assert wild.text.count(AWKWARD.strip()) > 15
    assert html.escape("{{ 7*7 }}") in rendered


OPTIONAL = (
    *("seed", "draws", "confidence", "currency", "settlement", "slip", "drivers", "driver_quality", "ground"),
    *("parameters", "dependence", "discretisation", "warnings", "assumptions", "cautions", "provenance"),
)


@pytest.mark.parametrize("key", OPTIONAL)
@pytest.mark.parametrize("empty", [False, True], ids=["absent", "null"])
def test_page_holds_without_any_one_part(results, key, empty):
    first = results | {"limits": results["limits"][:1]}
    less = {name: value for name, value in first.items() if name != key} | ({key: None} if empty else {})
    shown = Page(render_report(less))
    assert text.verdict_sentence(results["limits"][0], results) in shown.text
    assert "None" not in shown.text


def test_page_holds_with_nothing_but_the_limits(results):
    bare = {"format": 1, "kind": "assess", "title": "bare", "realisations": 20_000, "limits": []}
    assert "The scenario sets no limits." in Page(render_report(bare)).text
    needed = ("name", "quantity", "unit", "sense", "threshold", "probability", "interval", "exceeding")
    bare["limits"] = [{key: results["limits"][0][key] for key in needed}]
    shown = Page(render_report(bare)).text
    assert (
        "No target set: the chance that the settlement is more than 0.10 m is 10.8 %, about 1 in 9." in shown
    )
    assert "None" not in shown


@pytest.mark.parametrize(
    "key", ["reliability_index", "reliability_interval", "summary", "curve", "method", "time_text"]
)
def test_limit_holds_with_a_null_in_each_optional_key(results, key):
    bare = {name: results[name] for name in ("format", "kind", "title", "realisations")}
    assert "None" not in Page(render_report(bare | {"limits": [results["limits"][0] | {key: None}]})).text


def test_none_and_all_exceeding(results):
    spread = np.linspace(0.2, 0.3, 20_000)
    some = {"time": {"at": 30.0}, "time_text": "at 30 years"}
    limits = [
        limit("never", spread, 0.5, 0.002, target_probability=1e-3, **some),
        limit("always", spread, 0.1, 0.002, target_probability=1e-3, **some),
    ]
    shown = Page(render_report(results | {"limits": limits, "drivers": [], "driver_quality": []})).text
    assert "in none of 20,000 realisations, so the chance is below 0.019 % with 95 % confidence" in shown
    assert "in all of 20,000 realisations, so the chance is above 99.981 % with 95 % confidence" in shown
    assert "with 95 % confidence the chance is at most 0.015 %" in shown  # about 3 / n


def test_failures_to_converge_and_to_reach_are_said(results):
    limits = copy.deepcopy(results["limits"])
    limits[0]["not_converged"] = 7
    shown = Page(render_report(results | {"limits": limits})).text
    assert "7 realisations, counted as exceeding" in shown
    assert "7 realisations did not converge" in shown
    assert "in 72 realisations not within the time computed; counted as exceeding" in shown
    assert "Every realisation converged." in Page(render_report(results)).text


def test_area_load_without_slip_has_no_slip_section(results):
    stages = [stage | {"height_after": None, "pressure_after": 40.0} for stage in results["ground"]["stages"]]
    ground = results["ground"] | {"load": {"shape": "area", "text": "wide"}, "stages": stages}
    shown = Page(render_report(results | {"slip": [], "ground": ground}))
    assert "slip" not in shown.ids
    assert "40.0 kPa" in shown.text


def test_twelve_limits_and_one_layer(results):
    limits = [results["limits"][k % 4] | {"name": f"limit no {k}"} for k in range(12)]
    ground = results["ground"] | {"layers": results["ground"]["layers"][1:2]}
    shown = Page(render_report(results | {"limits": limits, "ground": ground}))
    assert len(shown.all("output")) == 12
    assert "Of the 12 limits, 3 are beyond their target chances" in shown.text


def test_cut_shares_and_warnings_are_shown(page):
    assert "soft clay.kappa 0.040 %" in page.text
    assert "The preconsolidation stress of crust is at its floor (1.3 %)." in page.text


def test_limit_without_exceedances_has_drivers_without_numbers(results):
    nothing = {
        "limit": results["limits"][0]["name"], "parameter": "soft clay.lambda", "rank": None,
        "spread_elasticity": None, "spread_interval": [None, None], "mean_elasticity": None,
        "mean_interval": [None, None], "share": None, "share_interval": [None, None], "direction": "unclear",
    }  # fmt: skip
    quality = {
        "limit": nothing["limit"],
        "exceeding": 0,
        "r_squared": None,
        "note": "no realisation exceeds the limit",
    }
    shown = Page(render_report(results | {"drivers": [nothing], "driver_quality": [quality]})).text
    assert "Read from 0 exceeding realisations. No realisation exceeds the limit." in shown
    assert "No parameter stands out from the noise of these realisations." in shown
    assert "lambda – not available not available" in shown


@pytest.mark.parametrize(
    ("low", "high", "said"),
    [
        (None, None, "no bound"),
        (0.0, None, "above 0"),
        (None, 3.0, "below 3"),
        (0.5, 1.0, "0.5 to 1"),
    ],
)
def test_physical_range_in_words(results, low, high, said):
    bare = {name: results[name] for name in ("format", "kind", "title", "realisations")}
    rows = [results["parameters"][0] | {"low": low, "high": high}]
    assert f" {said}, cut nothing " in Page(render_report(bare | {"limits": [], "parameters": rows})).text


def test_written_page_equals_the_rendered_one(results, rendered, tmp_path):
    (tmp_path / "results.json").write_text(json.dumps(results), encoding="utf-8")
    path = write_report(tmp_path)
    assert path == tmp_path / "report.html"
    assert path.read_text(encoding="utf-8") == rendered
    names = sorted(entry.name for entry in (tmp_path / "figures").iterdir())
    assert names == [*(f"drivers-{k}.svg" for k in range(1, 5)), "ground.svg", "settlement.svg", "slip.svg"]
    assert not list(tmp_path.rglob("*.part"))


def test_infinity_in_a_results_file_is_read_as_missing(results, tmp_path):
    limits = [results["limits"][0] | {"reliability_index": float("inf")}]
    (tmp_path / "results.json").write_text(json.dumps(results | {"limits": limits}), encoding="utf-8")
    assert "inf" not in Page(write_report(tmp_path).read_text(encoding="utf-8")).text.split()


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (None, "cannot be read"),
        ("{", "is not a results file"),
        ("[]", "not the results of an assessment in format 1"),
        ('{"format": 2, "kind": "assess"}', "not the results of an assessment in format 1"),
        ('{"format": 1, "kind": "assess", "title": "t"}', "no realisations, limits in the results"),
    ],
)
def test_wrong_results_are_refused(tmp_path, content, message):
    if content is not None:
        (tmp_path / "results.json").write_text(content, encoding="utf-8")
    with pytest.raises(ResultsError, match=message):
        write_report(tmp_path)


def test_folder_that_cannot_be_written_is_said(results, tmp_path):
    (tmp_path / "results.json").write_text(json.dumps(results), encoding="utf-8")
    (tmp_path / "figures").write_text("in the way", encoding="utf-8")
    with pytest.raises(ResultsError, match="the report cannot be written to"):
        write_report(tmp_path)
    assert not (tmp_path / "report.html").exists()


def test_importing_the_report_loads_no_plotting():
    code = (
        "import sys, probsoil.report, probsoil.report.text;"
        "print(sorted({'matplotlib', 'jinja2', 'pandas', 'scipy'} & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
