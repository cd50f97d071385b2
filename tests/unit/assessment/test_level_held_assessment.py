"""A level that is held, from the scenario to results, tables, report and sheet."""

import json
import re
from pathlib import Path

import numpy as np
import pytest

from probsoil.assessment import assess, sheet
from probsoil.assessment.statements import assumptions
from probsoil.ground.site_model import site_model
from probsoil.report import render_report
from probsoil.report.tables import tables
from probsoil.scenario import Scenario, parse_scenario, starter_text

N = 128


def starter(more: str = "") -> Scenario:
    text = re.sub(r"realisations = [\d_]+", f"realisations = {N}", starter_text("embankment"))
    return parse_scenario(text.replace("submergence = true", f"submergence = true\n{more}"))


@pytest.fixture(scope="module")
def held() -> Scenario:
    return starter('hold_level_until = "1 year"')


@pytest.fixture(scope="module")
def found(held: Scenario, tmp_path_factory: pytest.TempPathFactory):
    return assess(held, workers=1, out=tmp_path_factory.mktemp("held") / "results")


def test_volume_is_thickness_times_the_mean_width_of_the_section(held: Scenario, found) -> None:
    (row,) = found.results["added_fill"]
    shape = site_model(held).embankment
    area = 0.5 * (shape.crest_width + shape.base_width) * shape.full_height
    assert row["mean_width"] == pytest.approx(area / shape.full_height)
    assert (row["until"], row["unit"]) == (1.0, "m3/m")
    for key in ("0.05", "0.5", "0.95"):
        volume, thickness = row["volume"]["quantiles"][key], row["thickness"]["quantiles"][key]
        assert volume == pytest.approx(row["mean_width"] * thickness)
    assert row["thickness"]["mean"] == pytest.approx(found.sample.fill_added.mean())
    assert row["thickness"]["quantiles"]["0.05"] < row["thickness"]["mean"]


def test_thickness_is_the_settlement_when_it_ends_model_error_included(found) -> None:
    times = np.array(found.results["settlement"]["times"])
    settled = found.sample.settlement[:, np.searchsorted(times, 1.0)]
    assert found.sample.fill_added == pytest.approx(settled, rel=1e-5)


def test_it_is_in_the_files(found) -> None:
    folder: Path = found.folder
    stored = json.loads((folder / "results.json").read_text(encoding="utf-8"))
    assert stored["added_fill"] == found.results["added_fill"]
    with np.load(folder / "realisations.npz") as arrays:
        assert arrays["fill_added"].shape == (N,)
    table = tables(found.results)["added_fill"]
    assert list(table["unit"]) == ["m", "m3/m"]
    assert table["mean [unit]"].tolist() == [
        stored["added_fill"][0][k]["mean"] for k in ("thickness", "volume")
    ]


def test_report_and_statements_say_so(held: Scenario, found) -> None:
    page = render_report(found.results)
    assert "Fill added to hold its level" in page
    assert "Volume per metre run: mean" in page
    assert "to hold its level until 1 year" in found.results["ground"]["load"]["text"]
    assert any(
        "its level is held" in one or "level of the fill is held" in one
        for one in assumptions(site_model(held))
    )


def test_nothing_of_it_without() -> None:
    plain = starter()
    results = assess(plain, workers=1).results
    assert results["added_fill"] == []
    assert "added_fill" not in tables(results)
    assert "Fill added to hold its level" not in render_report(results)
    assert not any("level of the fill is held" in one for one in assumptions(site_model(plain)))


def test_sheet_shows_thickness_and_what_it_adds(held: Scenario) -> None:
    shown = sheet(held).to_dict()
    rows = {row["time"]: row for row in shown["through_time"]}
    last = rows[max(rows)]
    assert last["fill_added"] == rows[1.0]["fill_added"] == pytest.approx(rows[1.0]["settlement"])
    weight = shown["values"]["load.fill_unit_weight"]
    assert last["surface_pressure"] == pytest.approx(weight * (last["fill_height"] + last["fill_added"]))
    assert any("ha" in line["formula"] for line in shown["formulas"])


def test_area_gives_a_volume_per_square_metre() -> None:
    text = re.sub(r"realisations = [\d_]+", "realisations = 48", starter_text("embankment"))
    head, _, rest = text.partition("[load]")
    stages = rest[rest.index("[[stages]]") :]
    load = '[load]\nshape = "area"\nfill_unit_weight = 19\nhold_level_until = "1 year"\n\n'
    blocks = re.split(r"(?=^\[\[limits\]\])", stages, flags=re.MULTILINE)
    kept = "".join(block for block in blocks if "slip_safety" not in block)
    results = assess(parse_scenario(head + load + kept), workers=1).results
    (row,) = results["added_fill"]
    assert (row["unit"], row["mean_width"]) == ("m3/m2", None)
    assert row["volume"] == row["thickness"]
    assert "Volume per square metre" in render_report(results)
