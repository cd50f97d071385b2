"""The figures: same bytes every run, fit for the page's content policy, described in words."""

import re
from itertools import pairwise
from xml.etree import ElementTree as ET

import pytest
from sample_results import sample

from probsoil.report import figures
from probsoil.report.drawing import ordered_drivers, shown_drivers
from probsoil.report.palette import DARK, LIGHT
from probsoil.report.svg import tidy_svg

SVG = "{http://www.w3.org/2000/svg}"


@pytest.fixture(scope="module")
def results():
    return sample(n=2000)


@pytest.fixture(scope="module")
def drawings(results):
    return figures(results)


def test_one_figure_per_part(drawings):
    assert list(drawings) == [
        "settlement",
        "slip",
        "ground",
        "drivers-1",
        "drivers-2",
        "drivers-3",
        "drivers-4",
    ]


def test_same_results_same_bytes(results, drawings):
    assert figures(results) == drawings


def test_no_inline_style_no_script_no_address(drawings):
    for name, drawing in drawings.items():
        root = ET.fromstring(drawing)
        for element in root.iter():
            assert "style" not in element.attrib, name
            assert element.tag not in {f"{SVG}style", f"{SVG}script", f"{SVG}image"}, name
            assert not any(value.startswith("http") for value in element.attrib.values()), name


def test_identifiers_are_unique_over_all_figures_and_references_hold(drawings):
    seen: list[str] = []
    for drawing in drawings.values():
        root = ET.fromstring(drawing)
        own = [element.get("id") for element in root.iter() if element.get("id")]
        used = re.findall(r'(?:url\(#|href="#)([^)"]+)', drawing)
        assert used
        assert set(used) <= set(own)
        seen += own
    assert len(seen) == len(set(seen))


def test_text_stays_text_and_the_description_has_numbers(results, drawings):
    root = ET.fromstring(drawings["settlement"])
    assert root.get("role") == "img"
    words = {element.text for element in root.iter(f"{SVG}text")}
    assert {"S1", "S2", "S3", "limit 2"} <= words
    description = root.find(f"{SVG}desc").text
    median = results["settlement"]["quantiles"]["0.5"][-1]
    assert f"median {median:.3f} m" in description
    assert "At 30 years" in description


def test_only_palette_colours_are_used_so_that_dark_pages_recolour_all(drawings):
    for name, drawing in drawings.items():
        assert set(re.findall(r"#[0-9a-f]{6}\b", drawing)) <= set(LIGHT.values()), name


def test_awkward_names_are_drawn_literally(results):
    ground = results["ground"] | {"layers": [results["ground"]["layers"][0] | {"name": "<b>&\"$x$' 泥"}]}
    drawing = figures(results | {"ground": ground})["ground"]
    assert any(
        "<b>&\"$x$' 泥" in (element.text or "") for element in ET.fromstring(drawing).iter(f"{SVG}text")
    )


def test_water_table_is_drawn_where_its_depth_is_given(results):
    def lines(**more):
        drawing = figures({"limits": [], "ground": results["ground"] | more})["ground"]
        return [e for e in ET.fromstring(drawing).iter(f"{SVG}path") if e.get("stroke") == LIGHT["main"]]

    assert len(lines(water_table_depth=1.0)) > len(lines())


def test_thin_layers_keep_their_labels_apart(results):
    layers = [
        {"name": f"seam {k}", "soil": ("clay", "granular")[k % 2], "top": 0.05 * k, "bottom": 0.05 * (k + 1)}
        for k in range(6)
    ] + [{"name": "base", "soil": "clay", "top": 0.3, "bottom": 12.0}]
    root = ET.fromstring(figures(results | {"ground": {"layers": layers}})["ground"])
    heights = sorted(float(e.get("y")) for e in root.iter(f"{SVG}text") if "seam" in (e.text or ""))
    assert len(heights) == 6
    assert min(b - a for a, b in pairwise(heights)) > 9.0  # drawn in 10 px letters


@pytest.mark.parametrize("missing", ["settlement", "slip", "ground", "drivers"])
def test_missing_parts_have_no_figure(results, missing):
    drawn = figures({key: value for key, value in results.items() if key != missing})
    assert not any(name.startswith(missing) for name in drawn)


def test_settlement_without_stages_or_with_gaps_still_draws(results):
    data = results["settlement"] | {"stages": []}
    data["mean"] = [None, *data["mean"][1:]]
    assert "settlement" in figures({"limits": results["limits"], "settlement": data})


def labels_of_limits(drawing):
    """The words on limits in a figure and the height each stands at, from the top."""
    found = {}
    for element in ET.fromstring(drawing).iter(f"{SVG}text"):
        word = "".join(element.itertext())
        if word.startswith("limit"):
            found[word] = float(
                element.get("y") or re.search(r"[-\d.]+\)?$", element.get("transform")).group().rstrip(")")
            )
    return found


def test_limits_at_one_time_keep_their_labels_apart(results):
    one = results["limits"][1]
    near = [one | {"threshold": one["threshold"] + shift} for shift in (0.0, 0.004, 0.01)]
    heights = labels_of_limits(figures(results | {"limits": near})["settlement"])
    assert sorted(heights) == ["limit 1", "limit 2", "limit 3"]
    order = [heights[name] for name in sorted(heights)]
    assert all(after - before > 9.0 for before, after in pairwise(order))  # font size


def test_limits_at_one_point_share_a_label_and_those_off_the_axis_stand_apart(results):
    one = results["limits"][1]
    drawing = figures(results | {"limits": [one, one]})["settlement"]
    assert list(labels_of_limits(drawing)) == ["limits 1 and 2"]
    deep = [one | {"threshold": threshold} for threshold in (8.0, 9.0)]
    heights = labels_of_limits(figures(results | {"limits": deep})["settlement"])
    assert sorted(heights) == ["limit 1 is deeper", "limit 2 is deeper"]
    assert heights["limit 2 is deeper"] - heights["limit 1 is deeper"] > 9.0


def test_few_realisations_have_no_band_from_5_to_95_percent(results):
    data = results["settlement"]
    nothing = [None] * len(data["times"])
    few = data | {"realisations": 10, "quantiles": data["quantiles"] | {"0.05": nothing, "0.95": nothing}}
    slip = [row | {"quantiles": row["quantiles"] | {"0.05": None, "0.95": None}} for row in results["slip"]]
    drawn = figures(results | {"settlement": few, "slip": slip, "realisations": 10})
    assert "5 to 95 %" not in drawn["settlement"]
    assert "25 to 75 %" in drawn["settlement"]
    assert "5 to 95 %" not in drawn["slip"]


def test_a_limit_deeper_than_the_axis_is_said_to_be(results):
    limits = [results["limits"][1] | {"threshold": 50.0}]
    drawing = figures({"limits": limits, "settlement": results["settlement"]})["settlement"]
    assert "limit 1 is deeper" in drawing


def test_drivers_come_ranked_first_and_at_most_twelve(results):
    name = results["limits"][0]["name"]
    row = results["drivers"][0]
    rows = [
        row | {"parameter": f"p{k}", "rank": None if k < 3 else 20 - k, "spread_elasticity": k / 10}
        for k in range(20)
    ]
    many = {"drivers": rows}
    ranks = [entry["rank"] for entry in ordered_drivers(many, name)]
    assert ranks == [*range(1, 18), None, None, None]
    assert len(shown_drivers(many, name)) == 12


def test_drivers_ranked_by_the_mean_are_ordered_and_drawn_by_it(results):
    name = results["limits"][0]["name"]
    row = results["drivers"][0] | {"rank": None, "spread_elasticity": 9.0}
    rows = [
        row | {"parameter": f"p{k}", "mean_elasticity": value} for k, value in enumerate((0.1, -0.3, 0.2))
    ]
    quality = [{"limit": name, "ranked_by": "mean"}]
    some = {"limits": results["limits"][:1], "drivers": rows, "driver_quality": quality}
    assert [entry["parameter"] for entry in ordered_drivers(some, name)] == ["p1", "p2", "p0"]
    drawing = figures(some)["drivers-1"]
    assert "p1 -3.00 (" in drawing  # 10 % of the elasticity
    assert "9.00" not in drawing


def test_band_without_a_number_anywhere_still_draws(results):
    data = results["settlement"] | {
        "quantiles": {
            level: [None] * len(values) for level, values in results["settlement"]["quantiles"].items()
        },
        "mean": [None] * len(results["settlement"]["times"]),
    }
    assert "settlement" in figures({"limits": results["limits"], "settlement": data})


def test_stage_without_a_median_says_so(results):
    rows = [row | {"quantiles": dict.fromkeys(row["quantiles"]), "mean": None} for row in results["slip"]]
    drawing = figures({"limits": [], "slip": rows, "realisations": 20_000})["slip"]
    assert drawing.count("median beyond the computation") >= len(rows)


def test_a_driver_without_a_number_is_not_drawn(results):
    rows = [results["drivers"][0] | {"spread_elasticity": None, "spread_interval": None, "rank": None}]
    assert shown_drivers({"drivers": rows}, rows[0]["limit"]) == []


def test_tidying_keeps_fragment_links_and_renames_them():
    text = (
        '<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink" width="9">'
        '<defs><path id="m" d="M0 0" style="stroke: #000; font-family: x"/></defs>'
        '<use xlink:href="#m"/><g id="idle" clip-path="url(#m)"/></svg>'
    )
    tidy = tidy_svg(text, name="f", title="a < b", description="c & d")
    root = ET.fromstring(tidy)
    assert [e.get("id") for e in root.iter() if e.get("id")] == ["f-title", "f-desc", "f-m"]
    assert 'href="#f-m"' in tidy
    assert "url(#f-m)" in tidy
    assert root.find(f".//{SVG}path").attrib == {"id": "f-m", "d": "M0 0", "stroke": "#000"}
    assert root.find(f"{SVG}title").text == "a < b"
    assert "width" not in root.attrib


def luminance(colour: str) -> float:
    """Relative luminance of WCAG 2."""
    parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    linear = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


@pytest.mark.parametrize("colours", [LIGHT, DARK], ids=["light", "dark"])
@pytest.mark.parametrize("role", ["ink", "muted", "main", "mark"])
@pytest.mark.parametrize("ground", ["paper", "panel"])
def test_text_contrast_reaches_wcag_aa(colours, role, ground):
    light, dark = sorted((luminance(colours[role]), luminance(colours[ground])), reverse=True)
    assert (light + 0.05) / (dark + 0.05) >= 4.5


@pytest.mark.parametrize("colours", [LIGHT, DARK], ids=["light", "dark"])
@pytest.mark.parametrize(
    ("line", "behind"), [("main", "band"), ("main", "paper"), ("mark", "paper"), ("ink", "band")]
)
def test_lines_stand_out_from_what_they_cross(colours, line, behind):
    light, dark = sorted((luminance(colours[line]), luminance(colours[behind])), reverse=True)
    assert (light + 0.05) / (dark + 0.05) >= 3.0  # WCAG 2 asks 3 of graphics
