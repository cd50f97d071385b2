"""The section with its circles: which stage is drawn, what it says, and that nothing else depends on it."""

from xml.etree import ElementTree as ET

import pytest
from sample_results import sample

from probsoil.report import figures, render_report
from probsoil.report.section import drawn_check, section_view, section_words
from probsoil.report.validation import check_results

SVG = "{http://www.w3.org/2000/svg}"


def circle(factor, **more):
    """A made-up circle through (-2, 0), (0, -2) and (2, 0), which goes on to (2.5, 1.5)."""
    spread = {"0.05": 1.1, "0.25": 1.4, "0.5": 2.0, "0.75": 2.2, "0.95": 2.6}
    one = {
        "factor": factor,
        "centre": [0.3125, 0.3125],
        "radius": 2.3337,
        "touch_depth": 2.02,
        "exit": [-2.0, 0.0],
        "entry": [2.3, 1.5],
    }
    return {
        "touch_depth": spread,
        "exit": {level: -value for level, value in zip(spread, reversed(spread.values()), strict=True)},
        "entry": spread,
        "realisations": 2000,
        "at_medians": one,
        "others": [{"centre": [0.0, 1.0], "radius": 2.5, "exit_x": -2.2, "entry_x": 2.4}] * 3,
        "outline": [[0.0, 0.0], [3.0, 1.5], [9.0, 1.5], [12.0, 0.0]],
    } | more


@pytest.fixture(scope="module")
def results():
    made = sample(n=2000)
    factors = (1.9, 1.2, 1.7)
    rows = [row | {"circle": circle(factor)} for row, factor in zip(made["slip"], factors, strict=True)]
    return made | {"slip": rows}


def test_the_stage_with_the_least_factor_at_the_medians_is_drawn(results):
    assert drawn_check(results)["stage"] == "second lift"
    drawing = figures(results)["section"]
    assert "second lift" in drawing
    paths = [element for element in ET.fromstring(drawing).iter(f"{SVG}path") if element.get("d")]
    assert len(paths) > 3 + 1  # the circles and more
    assert "crust" in drawing


def test_words_and_table_say_where_the_circle_lies(results):
    view = section_view(results)
    assert (
        "leaves 2.0 m beyond the toe, reaches 2.0 m below ground level and enters 2.3 m" in view["sentence"]
    )
    assert view["rows"][1][1:4] == ["2.0 (1.1 to 2.6)", "−2.0 (−2.6 to −1.1)", "2.0 (1.1 to 2.6)"]
    words = section_words(drawn_check(results))
    assert "2,000 realisations" in words.description
    page = render_report(results)
    assert view["sentence"] in page
    assert "Section with the critical slip circle of stage second lift" in page


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"exit": [0.0, 0.0]}, "leaves at the toe,"),
        ({"exit": [1.0, 0.5]}, "leaves on the fill, 0.5 m above ground level,"),
        ({"touch_depth": -0.3}, "stays in the fill and enters"),
    ],
)
def test_circles_of_other_kinds_in_words(results, change, said):
    one = circle(1.2)
    one["at_medians"] |= change
    row = results["slip"][1] | {"circle": one}
    assert said in section_view(results | {"slip": [row]})["sentence"]


def test_few_realisations_give_no_tails(results):
    few = circle(1.2, realisations=10)
    view = section_view(results | {"slip": [results["slip"][0] | {"circle": few}]})
    assert view["rows"][0][1] == "2.0"


def test_results_without_circles_have_no_section():
    older = sample(n=2000)
    assert section_view(older) is None
    assert "section" not in figures(older)
    assert "Where the critical circle lies" not in render_report(older)
    lost = [row | {"circle": circle(1.0, at_medians=None)} for row in older["slip"]]
    assert section_view(older | {"slip": lost}) is None


def test_circles_are_checked_with_the_rest(results):
    assert check_results(results, "here")
