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
from sample_results import drivers, limit, ranked_by, sample

from probsoil.errors import ResultsError
from probsoil.report import chance, render_report, text, write_report

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
        assert chance.verdict_sentence(entry, results) in page.text
        said = text.probability_text(entry["probability"], 20_000)
        bounds = text.interval_text(entry["probability"], *entry["interval"])
        assert f"{said} {bounds} {'none' if entry['target_probability'] is None else ''}".strip() in page.text
        margin = chance.margin_text(entry["probability"], entry["interval"], 20_000, 0.95)
        assert f"with 95 % confidence {margin} {entry['exceeding']:,d} of 20,000 realisations" in page.text
    assert chance.overall_sentence(results) in page.text


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
    assert "Ranked by how much more spread in a parameter raises the chance of exceeding" in page.text
    assert "model_error.settlement has an effect but no rank, since more spread in it makes" in page.text
    assert "direction not clear; more spread makes the rarer outcome rarer" in page.text
    assert "noise" not in page.text


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


@pytest.mark.parametrize(
    "key",
    ["slip", "drivers", "driver_quality", "parameters", "dependence", "warnings", "assumptions", "cautions"],
)
def test_page_holds_with_any_one_list_empty(results, key):
    first = copy.deepcopy(results) | {"limits": results["limits"][:1]}
    name = first["limits"][0]["name"]
    for part in ("drivers", "driver_quality"):
        first[part] = [row for row in first[part] if row["limit"] == name]
    shown = Page(render_report(first | {key: []})).text
    assert chance.verdict_sentence(first["limits"][0], results) in shown
    assert "None" not in shown


def test_null_where_the_format_has_it_is_never_printed(results):
    bare = only(
        results, results["limits"][0] | {"reliability_index": None, "reliability_interval": [None, None]}
    )
    bare["provenance"] = results["provenance"] | {"command": None}
    assert "None" not in Page(render_report(bare)).text


def only(results, *limits):
    """The results with these limits and no drivers."""
    return results | {"limits": list(limits), "drivers": [], "driver_quality": []}


def test_none_and_all_exceeding_say_one_bound_and_keep_the_interval_to_tables(results):
    spread = np.linspace(0.2, 0.3, 20_000)
    some = {"time": {"at": 30.0}, "time_text": "at 30 years", "cost_if_exceeded": 2.5e6}
    limits = [
        limit("never", spread, 0.5, 0.002, target_probability=1e-3, **some),
        limit("always", spread, 0.1, 0.002, target_probability=1e-3, **some),
    ]
    shown = Page(render_report(only(results, *limits))).text
    assert "in none of 20,000 realisations, so the chance is below 0.015 % with 95 % confidence" in shown
    assert "in all of 20,000 realisations, so the chance is above 99.985 % with 95 % confidence" in shown
    assert (
        "0 of 20,000 realisations exceed the limit; with 95 % confidence the chance is below 0.015 %" in shown
    )
    assert "times the chance, below EUR 375 with 95 % confidence" in shown
    assert "times the chance, above EUR 2,490,000 with 95 % confidence" in shown
    assert "none of 20,000 realisations 0 to 0.019 %" in shown  # the table of limits
    assert "all of 20,000 realisations 99.981 to 100 %" in shown
    assert "below 0.019 %" not in shown
    assert "gives the one-sided bound" in shown.replace("give the", "gives the")
    assert shown.count("limit 1: below 0.015 %") == 1  # under sampling


def test_costs_have_intervals_and_may_be_added(results, page):
    first = results["limits"][0]
    shares = (first["probability"], *first["interval"])
    mid, low, high = (f"{float(f'{900e3 * share:.3g}'):,.0f}" for share in shares)
    expected = f"EUR {mid} ({low} to {high})"
    assert f"EUR 900,000 if exceeded; times the chance, {expected}" in page.text
    assert "may be added up over the limits, also where limits are exceeded together" in page.text
    assert "Their intervals may not be added." in page.text
    one = Page(render_report(only(results, first))).text
    assert "may be added up" not in one


def certain(results, probability):
    """The results of a scenario in which nothing is uncertain."""
    entry = limit("fixed", np.full(50, 0.3), 0.4 if probability == 0 else 0.2, 0.002, target_probability=0.01,
                  time={"at": 30.0}, time_text="at 30 years", cost_if_exceeded=1000.0)  # fmt: skip
    curve = entry["curve"] | {"low": entry["curve"]["probability"], "high": entry["curve"]["probability"]}
    entry |= {
        "interval": [probability, probability],
        "reliability_interval": [None, None],
        "unseen_bound": None,
        "verdict": "beyond target" if probability else "within target",
        "curve": curve,
    }
    quality = {
        "limit": "fixed",
        "ranked_by": "spread",
        "exceeding": 0,
        "r_squared": None,
        "note": "no parameter is uncertain",
    }
    wild = only(results, entry) | {"driver_quality": [quality], "parameters": [], "dependence": []}
    return wild | {"realisations": 50}


@pytest.mark.parametrize(
    ("probability", "said", "cost"),
    [
        (0.0, "with its values the settlement at 30 years is not more than 0.40 m.", "which it is not"),
        (1.0, "with its values the settlement at 30 years is more than 0.20 m.", "which it is"),
    ],
)
def test_a_scenario_without_anything_uncertain_is_said_to_be_one(results, probability, said, cost):
    shown = Page(render_report(certain(results, probability))).text
    assert f"nothing in this scenario is uncertain, and {said}" in shown
    assert f"EUR 1,000 if exceeded, {cost} " in shown
    assert "0.300 m in every realisation" in shown
    assert "no interval: nothing is uncertain" in shown
    assert "No parameter is uncertain: every realisation is the same calculation." in shown
    assert "so other realisations would give the same" in shown
    assert "% confidence" not in shown


def few(results, n):
    entry = limit("few", np.linspace(0.2, 0.3, n), 0.4, 0.002, time={"at": 30.0}, time_text="at 30 years")
    settlement = results["settlement"] | {"realisations": n}
    return only(results, entry) | {"realisations": n, "settlement": settlement}


def test_bands_are_withheld_below_forty_realisations_and_it_is_said_why(results):
    rendered = render_report(few(results, 39))
    shown = Page(rendered).text
    assert "no range from the 5 % to the 95 % point, which 39 realisations cannot give" in shown
    assert "The band from 5 to 95 % is left out: with fewer than 40 realisations" in shown
    assert "mean 0 too few realisations 0.000" in shown
    assert "nine times in ten" not in shown
    assert "5 to 95 % 0" not in shown
    enough = Page(render_report(few(results, 40))).text
    assert "too few" not in enough
    assert "nine times in ten between" in enough


def test_one_realisation_is_one(results):
    shown = Page(render_report(few(results, 1))).text
    assert not re.search(r"(?<![\d,])1 realisations", shown)
    assert "in none of 1 realisation, so the chance is below 95.0 %" in shown


def test_median_says_its_realisations_and_its_interval(results, page):
    low, high = results["limits"][0]["summary"]["median_interval"]
    median = results["limits"][0]["summary"]["quantiles"]["0.5"]
    assert (
        f"median of 20,000 realisations {median:.3f} m ({low:.3f} m to {high:.3f} m with 95 % confidence)"
        in page.text
    )


def test_diamond_is_spoken_of_where_there_is_one(results, page):
    assert "A diamond is a limit" in page.text
    assert "A diamond" not in Page(render_report(only(results, results["limits"][0]))).text


def test_last_row_of_settlement_is_explained_where_it_rests_on_more_realisations(results, page):
    assert "final" not in page.text.split("A selection of times")[0].split("Settlement [m] against time")[1]
    fewer = results | {"settlement": results["settlement"] | {"realisations": 16_384}}
    shown = Page(render_report(fewer)).text
    assert "30, all 20,000 realisations " in shown
    assert "A selection of times, from 16,384 realisations" in shown


def test_warnings_say_what_their_share_is_of(results):
    rows = [
        {
            "code": "slipped_before",
            "message": "realisations that slip",
            "share": 0.02,
            "share_of": "all realisations",
        },
        {"code": "circles", "message": "circles differ", "share": 0.013, "share_of": "the factor of safety"},
    ]
    shown = Page(render_report(results | {"warnings": rows})).text
    assert "Realisations that slip (2.0 % of all realisations)." in shown
    assert "Circles differ (relative error, 1.3 % of the factor of safety)." in shown


def test_numbers_in_descriptions_read_as_in_tables(results):
    wild = copy.deepcopy(results)
    wild["parameters"][0]["text"] = "lognormal, mean 2e-09 m/s, cov 0.6"
    wild["ground"]["layers"][0]["properties"][0]["text"] = "fixed at 33 degree"
    shown = Page(render_report(wild)).text
    assert "lognormal, mean 2 × 10⁻⁹ m/s, cov 0.6" in shown
    assert "fixed at 33 degrees" in shown
    assert "e-09" not in shown


def test_slip_shares_have_intervals(results):
    slip = [results["slip"][0] | {"probability_below_one": 0.013, "interval_below_one": [0.011, 0.015]}]
    assert "1.3 % 1.1 to 1.5 %" in Page(render_report(results | {"slip": slip})).text


def test_errors_of_the_computation_say_what_they_are_of(results):
    grid = results["discretisation"] | {"realisations": 1, "settlement_error": 0.0002}
    shown = Page(render_report(results | {"discretisation": grid})).text
    assert "1 realisation was repeated on a finer grid" in shown
    assert "is put at 0.001 m, and at 0.21 % of the final settlement" in shown
    assert "differed by at most 0.60 % of that over a denser family of circles" in shown
    assert "too high if anything" in shown


def test_failures_to_converge_and_to_reach_are_said(results):
    limits = copy.deepcopy(results["limits"])
    limits[0]["not_converged"] = 7
    shown = Page(render_report(results | {"limits": limits})).text
    assert "7 realisations, counted as exceeding" in shown
    assert "7 realisations did not converge" in shown
    assert "in 72 realisations not within the time computed; counted as exceeding" in shown
    assert "Every realisation converged." in Page(render_report(results)).text


def often_exceeded(results, share):
    """The results of one settlement limit that so great a share of the realisations exceeds."""
    rng = np.random.default_rng(3)
    final = rng.lognormal(np.log(0.62), 0.22, 20_000)
    threshold = round(float(np.quantile(final, 1.0 - share)), 3)
    entry = limit("often", final, threshold, 0.005, time={"at": 30.0}, time_text="at 30 years")
    quality = results["driver_quality"][0] | {"limit": "often", "ranked_by": ranked_by(entry)}
    quality["exceeding"] = entry["exceeding"]
    return results | {"limits": [entry], "drivers": drivers(rng, entry), "driver_quality": [quality]}


def test_drivers_of_a_limit_that_is_mostly_exceeded_read_right(results):
    wild = often_exceeded(results, 0.8)
    entry, first = wild["limits"][0], wild["drivers"][0]
    assert first["rank"] == 1
    assert first["spread_elasticity"] < 0
    shown = Page(render_report(wild)).text
    assert "raises the chance of meeting the limit, the rarer outcome here." in shown
    size = text.number_text(-first["spread_elasticity"], 2)
    other = text.number_text(
        -first["spread_elasticity"] * entry["probability"] / (1.0 - entry["probability"]), 2
    )
    ends = text.pair_text(first["spread_interval"])
    assert (
        f"with 1 % less spread the chance rises by about {size} % of its value (elasticity {ends}) and that "
        f"of meeting the limit falls by about {other} % of its own" in shown
    )
    assert "1 % more spread raises the chance of exceeding by about" in shown  # the last, without a rank
    assert "distinguishable" not in shown.split("model_error.settlement has an effect but no rank")[1][:120]


def test_drivers_near_one_half_are_said_to_be_ranked_by_the_mean(results):
    wild = often_exceeded(results, 0.5)
    first = wild["drivers"][0]
    assert first["mean_elasticity"] < 0
    shown = Page(render_report(wild)).text
    assert "Ranked by how much a shift of a parameter's mean changes the chance" in shown
    size = text.number_text(-10.0 * first["mean_elasticity"], 2)
    assert (
        "a shift of its mean upwards by a tenth of its standard deviation lowers the chance by about "
        f"{size} % of its value (a slope;" in shown
    )
    assert "when the mean of each parameter moves up by a tenth of its standard deviation" in shown
    assert "change of the chance [%] when the mean moves up by 0.1 standard deviations" in shown
    assert "less spread the chance" not in shown


@pytest.mark.parametrize(("share", "measure"), [(0.05, "spread"), (0.5, "mean")])
def test_every_driver_without_a_rank_is_told_for_what_it_is(results, share, measure):
    wild = often_exceeded(results, share)
    states = {
        "p-both": (True, True),
        "p-spread": (True, False),
        "p-mean": (False, True),
        "p-none": (False,) * 2,
    }
    wild["drivers"] = [
        wild["drivers"][0]
        | {"parameter": name, "rank": None, "spread_elasticity": -0.2, "spread_clear": a, "mean_clear": b}
        for name, (a, b) in states.items()
        if measure == "spread" or not b  # ranked by the mean, what is clear by the mean has a rank
    ]
    shown = Page(render_report(wild)).text
    assert "No parameter has a rank: for none does" in shown
    assert (
        "Not distinguishable from no effect when all parameters are judged together, and so without a rank: "
        "p-none." in shown
    )
    assert "p-spread has an effect but no rank, since" in shown
    assert (
        shown.count("1 % more spread lowers the chance of exceeding by about 0.20 %")
        == len(wild["drivers"]) / 2
    )
    if measure == "spread":
        assert "though a shift of their mean has one: p-mean." in shown.replace(
            "of its mean", "of their mean"
        )


def test_quantiles_on_realisations_without_a_number_are_said_in_words(results):
    wild = copy.deepcopy(results)
    wild = only(wild, wild["limits"][0], wild["limits"][3])
    for entry in wild["limits"]:
        entry["summary"] |= {"mean": None, "sd": None}
        entry["summary"]["quantiles"] |= {"0.75": None, "0.95": None}
    wild["settlement"]["quantiles"]["0.95"] = [None for _ in wild["settlement"]["times"]]
    wild["settlement"]["mean"] = [None for _ in wild["settlement"]["times"]]
    wild["slip"][0]["quantiles"] = dict.fromkeys(wild["slip"][0]["quantiles"])
    wild["slip"][0]["mean"] = None
    shown = Page(render_report(wild)).text
    assert re.search(
        r"median of 20,000 realisations 0\.\d+ years \(.{1,60}\); 5 % point 0\.\d+ years, 95 % point not",
        shown,
    )
    assert re.search(
        r"median of 20,000 realisations 0\.\d+ m \(.{1,60}\); 5 % point 0\.\d+ m, 95 % point beyond",
        shown,
    )
    assert re.search(r"is 0\.\d+ m \(5 % point 0\.\d+ m, 95 % point beyond the computation\)", shown)
    assert "first lift 0.077 1.50" + 6 * " beyond the computation" in shown
    assert "median beyond the computation, 5 to 95 % beyond the computation to beyond" in shown
    wild["limits"][1]["summary"]["quantiles"] = dict.fromkeys(("0.05", "0.25", "0.5", "0.75", "0.95"))
    shown = Page(render_report(wild)).text
    assert "median of 20,000 realisations not reached (" in shown
    assert "); 5 % point not reached, 95 % point not reached" in shown
    assert "not more than 2 years not reached" in shown  # in the table of limits


def test_area_load_without_slip_has_no_slip_section(results):
    stages = [stage | {"height_after": None, "pressure_after": 40.0} for stage in results["ground"]["stages"]]
    ground = results["ground"] | {"load": {"shape": "area", "text": "wide"}, "stages": stages}
    shown = Page(render_report(results | {"slip": [], "ground": ground}))
    assert "slip" not in shown.ids
    assert "40.0 kPa" in shown.text


def test_twelve_limits_and_one_layer(results):
    limits = [results["limits"][k % 4] | {"name": f"limit no {k}"} for k in range(12)]
    ground = results["ground"] | {"layers": results["ground"]["layers"][1:2]}
    shown = Page(render_report(only(results, *limits) | {"ground": ground}))
    assert len(shown.all("output")) == 12
    assert "Of the 12 limits, 3 are beyond their target chances" in shown.text


def test_cut_shares_and_warnings_are_shown(page):
    assert "soft clay.kappa 0.040 %" in page.text
    assert "The preconsolidation stress of crust is at its floor (1.3 %)." in page.text


def test_limit_without_exceedances_has_drivers_without_numbers(results):
    nothing = {
        "limit": results["limits"][0]["name"], "parameter": "soft clay.lambda", "rank": None,
        "spread_elasticity": None, "spread_interval": [None, None], "mean_elasticity": None,
        "spread_clear": None, "mean_clear": None,
        "mean_interval": [None, None], "share": None, "share_interval": [None, None], "direction": "unclear",
    }  # fmt: skip
    quality = {
        "limit": nothing["limit"],
        "ranked_by": "spread",
        "exceeding": 0,
        "r_squared": None,
        "note": "no realisation exceeds the limit",
    }
    shown = Page(render_report(results | {"drivers": [nothing], "driver_quality": [quality]})).text
    assert "Read from 0 exceeding realisations. No realisation exceeds the limit." in shown
    assert "No parameter could be judged, and none has a rank." in shown
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
    rows = [results["parameters"][0] | {"low": low, "high": high}]
    assert f" {said}, cut nothing " in Page(render_report(results | {"parameters": rows})).text


def test_written_page_equals_the_rendered_one(results, rendered, tmp_path):
    (tmp_path / "results.json").write_text(json.dumps(results), encoding="utf-8")
    path = write_report(tmp_path)
    assert path == tmp_path / "report.html"
    assert path.read_text(encoding="utf-8") == rendered
    names = sorted(entry.name for entry in (tmp_path / "figures").iterdir())
    assert names == [*(f"drivers-{k}.svg" for k in range(1, 5)), "ground.svg", "settlement.svg", "slip.svg"]
    assert not list(tmp_path.rglob("*.part"))


def test_infinity_in_a_results_file_is_read_as_missing(results, tmp_path):
    wild = only(results, results["limits"][0] | {"reliability_index": float("inf")})
    (tmp_path / "results.json").write_text(json.dumps(wild), encoding="utf-8")
    assert "inf" not in Page(write_report(tmp_path).read_text(encoding="utf-8")).text.split()


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (None, "cannot be read"),
        ("{", "is not a results file"),
        ("[]", "not the results of an assessment in format 1"),
        ('{"format": 2, "kind": "assess"}', "not the results of an assessment in format 1"),
        ('{"format": 1, "kind": "assess", "title": "t"}', "seed is missing"),
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
