"""A whole site: layers, evidence, outliers, tables, figures, page."""

import csv
import io
import re
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree as ET

import numpy as np
import pytest
import synthetic_tests as drawn

from probsoil.errors import ParameterError, ResultsError
from probsoil.laboratory.ground_column import assumed_column, scenario_column
from probsoil.laboratory.interpretation import Choices, Interpretation, ground_of, interpreted_site
from probsoil.laboratory.observations import EVIDENCE_COLUMNS, UNITS, Observation, observation
from probsoil.laboratory.outliers import flagged
from probsoil.laboratory.sheets import Place, SiteSheets
from probsoil.report.interpretation_figures import interpretation_figures
from probsoil.report.interpretation_page import render_interpretation, write_interpretation
from probsoil.report.interpretation_tables import gist_rows, interpretation_tables
from probsoil.scenario import Scenario, parse_scenario, starter_text
from probsoil.scenario.mean_column import mean_column, mean_stress

HEADER = "kind,test,hole,x,y,layer,depth,parameter,value,unit,standard_error,flag"


@pytest.fixture(scope="module")
def scenario() -> Scenario:
    return parse_scenario(starter_text("embankment"))


@pytest.fixture(scope="module")
def done(scenario: Scenario) -> Interpretation:
    return interpreted_site(drawn.site(), scenario)


def test_evidence_has_the_header_and_reads_back(done: Interpretation) -> None:
    text = done.evidence()
    assert text.splitlines()[0] == HEADER == ",".join(EVIDENCE_COLUMNS)
    rows = list(csv.DictReader(io.StringIO(text)))
    assert len(rows) == len(done.observations)
    for row, one in zip(rows, done.observations, strict=True):
        assert float(row["value"]) == pytest.approx(one.value, rel=1e-5)
        assert row["unit"] == UNITS[row["parameter"]]
        assert (row["x"] == "") == (one.x is None)
        assert row["kind"] in ("oedometer", "triaxial", "vane", "cone")
    assert len(done.to_frame()) == len(rows)


def test_every_kind_of_number_is_there(done: Interpretation) -> None:
    wanted = [
        "lambda",
        "kappa",
        "preconsolidation_stress",
        "cv",
        "k",
        "C_alpha_ratio",
        "M",
        "su",
        "void_ratio",
        "q_net",
    ]
    assert {one.parameter for one in done.observations} >= set(wanted)


def test_numbers_are_put_into_layers_of_clay(done: Interpretation, scenario: Scenario) -> None:
    column = scenario_column(scenario)
    for one in done.observations:
        assert one.layer == "" or one.layer not in column.granular
        if one.layer:
            top, bottom = next((top, bottom) for name, top, bottom in column.layers if name == one.layer)
            assert top <= one.depth <= bottom
        else:
            assert "no layer of the scenario" in one.flag
    assert any("is no clay" in words for words in done.remarks)


def test_stresses_in_situ_are_those_of_the_scenario(scenario: Scenario) -> None:
    column, mean = scenario_column(scenario), mean_column(scenario)
    assert mean is not None
    for index in range(len(scenario.layers)):
        depth = 0.7 * mean.depth[index] + 0.3 * mean.depth[index + 1]
        steady, excess = mean_stress(scenario, mean, index, 0.3)
        assert column.effective_stress(depth) == pytest.approx(steady - excess)
        assert column.stress_at(depth) == pytest.approx(steady - excess)
    for boundary, total in zip(mean.depth, mean.total, strict=True):
        assert column.total_stress(boundary) == pytest.approx(total)
    assert column.stress_at(mean.depth[-1] + 1.0) is None
    assert column.stress_at(0.0) is None


def test_assumed_ground() -> None:
    column = assumed_column(16.0, 1.0)
    assert column.total_stress(5.0) == 80.0
    assert column.effective_stress(5.0) == pytest.approx(80.0 - 9.81 * 4.0)
    assert column.layer_at(5.0) == ""
    for weight, water, words in ((9.0, 1.0, "between 9.81 and 25"), (16.0, -1.0, "0 to 100 m below")):
        with pytest.raises(ParameterError, match=words):
            assumed_column(weight, water)
    with pytest.raises(ParameterError, match="stress ratio, peak deviator"):
        Choices(failure="both")  # type: ignore[arg-type]


def test_name_in_the_file_goes_before_depth(scenario: Scenario) -> None:
    column = scenario_column(scenario)
    names = [name for name, _, _ in column.layers]
    depth = 0.5 * (column.layers[0][1] + column.layers[0][2])
    assert ground_of(depth, Place(hole="B", depth=depth, stratum=names[1]), column) == names[1]
    assert ground_of(depth, Place(hole="B", depth=depth, stratum="another"), column) == names[0]
    assert ground_of(depth, Place(hole="B", depth=1.0 + depth, stratum=names[1]), column) == names[0]
    assert ground_of(depth, Place(hole="B", depth=depth), None) == ""


def test_without_layers_everything_but_the_cone_has_a_value() -> None:
    done = interpreted_site(drawn.site())
    assert {one.layer for one in done.observations} == {""}
    assert "q_net" not in {one.parameter for one in done.observations}
    assert any("give the layers or a unit weight" in words for words in done.remarks)
    weighed = interpreted_site(drawn.site(), choices=Choices(unit_weight=16.0, water_table=1.0))
    assert "q_net" in {one.parameter for one in weighed.observations}


def test_nothing_gives_nothing() -> None:
    done = interpreted_site(SiteSheets())
    assert done.observations == ()
    assert done.evidence() == HEADER + "\n"
    assert "none" in render_interpretation(done)


def rows_of(values: list[float], parameter: str = "lambda") -> list[Observation]:
    return [
        replace(
            observation("oedometer", (f"O{k}", Place(hole="B", depth=float(k))), parameter, value, None),
            layer="clay",
        )
        for k, value in enumerate(values)
    ]


def test_a_number_that_stands_apart_is_flagged_and_kept() -> None:
    rows = rows_of([0.30, 0.31, 0.29, 0.32, 0.60, 0.30])
    found = flagged(rows)
    assert [one.value for one in found] == [one.value for one in rows]
    assert [bool(one.flag) for one in found] == [False, False, False, False, True, False]
    assert "1.97 times what is usual in clay" in found[4].flag


def test_half_a_position_is_none() -> None:
    row = observation("cone", ("C1", Place(hole="C1", depth=2.0, x=4.0)), "q_net", 200.0, None)
    assert (row.x, row.y) == (None, None)


def test_few_numbers_and_other_layers_flag_nothing() -> None:
    assert not any(one.flag for one in flagged(rows_of([0.3, 0.3, 0.3, 0.9])))
    mixed = [replace(one, layer="other") if one.value > 0.5 else one for one in rows_of([0.3] * 5 + [0.9])]
    assert not any(one.flag for one in flagged(mixed))
    assert not any(one.flag for one in flagged(rows_of([0.30, 0.30, 0.30, 0.30, 0.33])))


def test_growth_with_depth_is_no_outlier_but_a_step_off_it_is() -> None:
    grown = [10.0 * 1.2**k for k in range(12)]
    assert not any(one.flag for one in flagged(rows_of(grown, "su")))
    grown[6] *= 2.0
    assert [bool(one.flag) for one in flagged(rows_of(grown, "su"))] == [k == 6 for k in range(12)]


def test_tables_have_units_and_every_test(done: Interpretation) -> None:
    frames = interpretation_tables(done)
    assert set(frames) >= {"evidence", "oedometer", "increments", "triaxial", "friction", "vane", "cone"}
    assert set(frames["oedometer"]["test"]) == {one.sheet.test for one in done.oedometers}
    assert set(frames["friction"]["failure at"]) == {"stress ratio", "peak deviator"}
    words, rows = gist_rows(done)
    assert len(words) == len(rows[0])
    assert sum(int(row[3]) for row in rows) == len(done.observations)


def test_page_stands_alone_and_figures_have_words(done: Interpretation, tmp_path: Path) -> None:
    first = done.oedometers[0]
    short = replace(first, increments=first.increments[-1:])
    few = replace(done, oedometers=(short,), triaxials=done.triaxials[:1])
    page = write_interpretation(few, tmp_path / "new")
    text = page.read_text(encoding="utf-8")
    assert "<script" not in text
    assert not re.search(r"(src|href)=\"(?!#)", re.sub(r"xmlns(:\w+)?=\"[^\"]*\"", "", text))
    assert (page.parent / "evidence.csv").read_text(encoding="utf-8") == done.evidence()
    figures = sorted(path.stem for path in (page.parent / "figures").glob("*.svg"))
    assert {"oedometer-o1", "triaxial-t1", "vane-v1", "cone-c1"} <= set(figures)
    for path in (page.parent / "figures").glob("*.svg"):
        root = ET.fromstring(path.read_text(encoding="utf-8"))
        assert root.find("{http://www.w3.org/2000/svg}desc").text  # type: ignore[union-attr]
        assert "mathdefault" not in path.read_text(encoding="utf-8")
    assert all(name in text for name in ("O1", "T1", "V1", "C1"))
    assert render_interpretation(few) == text


def test_figures_of_alike_names_do_not_meet(done: Interpretation) -> None:
    one, other = done.triaxials[:2]
    twins = replace(
        done,
        oedometers=(),
        vanes=(),
        cones=(),
        triaxials=(
            replace(one, sheet=replace(one.sheet, test="A/1")),
            replace(other, sheet=replace(other.sheet, test="a 1")),
        ),
    )
    assert [found.name for found in interpretation_figures(twins)] == ["triaxial-a-1", "triaxial-a-1-2"]


def test_figures_of_tests_that_are_gone_are_taken_away(done: Interpretation, tmp_path: Path) -> None:
    only = replace(done, oedometers=(), triaxials=done.triaxials[:1], vanes=(), cones=())
    write_interpretation(only, tmp_path)
    (tmp_path / "figures" / "settlement.svg").write_text("of an assessment")
    write_interpretation(replace(only, triaxials=(), vanes=done.vanes), tmp_path)
    assert sorted(path.name for path in (tmp_path / "figures").iterdir()) == ["settlement.svg", "vane-v1.svg"]


def test_folder_that_cannot_be_written(tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("a file")
    with pytest.raises(ResultsError, match="cannot be written"):
        write_interpretation(interpreted_site(SiteSheets()), tmp_path / "taken")


def test_a_test_that_gives_nothing_is_still_drawn() -> None:
    site = drawn.site()
    short = replace(
        site.oedometers[0],
        stress=np.array([10.0, 20.0]),
        void_ratio=np.array([1.2, 1.1]),
        reported_cv=np.full(2, np.nan),
        time_readings=(),
    )
    drained = replace(site.triaxials[0], kind="UU", axial_stress=np.nan, radial_stress=np.nan)
    done = interpreted_site(SiteSheets(oedometers=(short,), triaxials=(drained,), cones=site.cones))
    assert len(interpretation_figures(done)) == 3


def test_numbers_at_one_depth_have_no_line_with_depth() -> None:
    rows = [replace(one, depth=3.0) for one in rows_of([20.0] * 8 + [60.0], "su")]
    assert [bool(one.flag) for one in flagged(rows)] == [False] * 8 + [True]
    assert not any(one.flag for one in flagged([replace(one, value=0.0) for one in rows]))


def test_page_counts_increments_in_words() -> None:
    sheet = drawn.site().oedometers[0]
    lone = tuple(one if place == 4 else None for place, one in enumerate(sheet.time_readings))
    for timed, words in ((lone, "1 increment in time<"), (sheet.time_readings, "increments in time<")):
        done = interpreted_site(SiteSheets(oedometers=(replace(sheet, time_readings=timed),)))
        assert words in render_interpretation(done)
