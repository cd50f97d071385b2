"""Stations from the scenario to results, report, tables and sheet."""

import json
import re
from pathlib import Path

import numpy as np
import pytest

from probsoil.assessment import assess, sheet
from probsoil.assessment.evaluation import drawn_parameters, prepare
from probsoil.errors import ParameterError
from probsoil.report import render_report
from probsoil.report.stations import is_marked, ratio_text
from probsoil.report.tables import tables
from probsoil.scenario import Scenario, parse_scenario
from probsoil.scenario.spatial_averaging import variance_function

# A wide load on gravel of uncertain modulus over stiff clay that is certain: what differs between stations
# is q H / M alone.
LINEAR = """
format = 1
title = "two stations"
seed = 8
realisations = 4096
horizon = 10

[site]
water_table = 1
base = "drained"

[[layers]]
name = "gravel"
soil = "granular"
thickness = 6
unit_weight = 19
constrained_modulus = { dist = "lognormal", mean = 20000, cov = 0.05, inherent_cov = 0.1, \
vertical_scale = 3, horizontal_scale = SCALE }
phi = 33

[[layers]]
name = "clay"
soil = "clay"
thickness = 1
unit_weight = 17
void_ratio = 1
lambda = 0.05
kappa = 0.01
preconsolidation = { stress = 400 }
M = 1
permeability = { cv = 10 }

[load]
shape = "area"

[[stages]]
name = "tank"
pressure = 50
start = 0
end = 0.1

[[stations]]
name = "west"

[[stations]]
name = "east"
y = 15

[[limits]]
name = "step"
quantity = "differential_settlement"
at = 10
not_more_than = 0.001
"""


def linear(scale: float) -> Scenario:
    return parse_scenario(LINEAR.replace("SCALE", f"{scale:g}"))


@pytest.mark.parametrize("scale", [10.0, 60.0])
def test_difference_of_two_stations_against_the_closed_form(scale: float) -> None:
    """sd^2 = 2 s^2 ln(1 + V^2) Gamma^2 (1 - rho), s = q H/M at the mean.

    The band: 4 standard errors of a variance from 4096 draws, sqrt(2/4096) each, and 3 % for the settlement
    being 1/M and not a straight line (its square is of the order of (cov of M)^2 about 0.01).
    """
    found = assess(linear(scale), workers=1)
    step = found.sample.quantity[:, 0]
    rho = np.exp(-2.0 * 15.0 / scale)
    local = float(variance_function(6.0 / 3.0)) * np.log1p(0.1**2)
    expected = 2.0 * (50.0 * 6.0 / 20_000.0) ** 2 * local * (1.0 - rho)
    assert np.mean(step**2) == pytest.approx(expected, rel=4.0 * np.sqrt(2.0 / 4096.0) + 0.03)


def test_stations_that_share_everything_do_not_differ() -> None:
    """rho = exp(-3e-8): the difference is some 2e-4 of the local spread of about 1 mm."""
    found = assess(linear(1e9), realisations=512, workers=1)
    assert found.sample.quantity[:, 0].max() < 2e-6


REED = Path(__file__).parents[3] / "scenarios" / "reed_causeway.toml"
N = 256


@pytest.fixture(scope="module")
def text() -> str:
    return re.sub(r"realisations = \d+", f"realisations = {N}", REED.read_text(encoding="utf-8"))


@pytest.fixture(scope="module")
def found(text: str):
    return assess(parse_scenario(text), workers=1)


def test_results_hold_every_station(found) -> None:
    record = found.results["settlement"]
    assert record["station"] == "station boring 3"
    assert record["station_times"] == [pytest.approx(24.0 * 7.0 / 365.25), 1.0, 30.0]
    rows = {row["name"]: row for row in record["stations"]}
    assert [rows[f"boring {k}"]["along"] for k in range(1, 6)] == [0.0, 20.0, 40.0, 60.0, 80.0]
    assert rows["boring 5"]["thickness"] == {"soft clay": 2.0}
    reference = rows["boring 3"]
    assert reference["mean"][-1] == pytest.approx(record["mean"][-1], rel=1e-6)  # kept in 32 bits
    assert reference["quantiles"]["0.5"][-1] == pytest.approx(record["quantiles"]["0.5"][-1], rel=1e-6)
    assert [pair["stations"] for pair in record["pairs"]] == [
        [f"boring {k}", f"boring {k + 1}"] for k in range(1, 5)
    ]
    pair = record["pairs"][0]
    assert pair["distortion"]["mean"][-1] == pytest.approx(pair["difference"]["mean"][-1] / 20.0)


def test_limits_say_where_they_look_and_who_decides(found) -> None:
    anywhere, step, evenness, slip = found.results["limits"]
    assert anywhere["place"] == {"station": "any"}
    assert step["place_text"] == "between the two neighbouring stations for which it is greatest"
    assert (slip["place"], slip["place_text"], slip["decided_by"]) == (None, "", [])
    for limit in (anywhere, step, evenness):
        assert sum(row["share"] for row in limit["decided_by"]) == pytest.approx(1.0)
    quantity = found.sample.quantity
    np.testing.assert_allclose(quantity[:, 1], 20.0 * quantity[:, 2], rtol=1e-12)


def test_drivers_tell_shared_from_local_and_add_up(text: str, found) -> None:
    names, gathering = drawn_parameters(prepare(parse_scenario(text)))
    assert names[-2:] == ("soft clay.lambda (local)", "soft clay.pop (local)")
    assert gathering.size == len(names)
    for limit in found.results["limits"]:
        rows = [row for row in found.results["drivers"] if row["limit"] == limit["name"]]
        assert {row["parameter"] for row in rows} == set(names)
        assert sum(row["share"] for row in rows) == pytest.approx(1.0, abs=1e-9)


def test_parameters_say_what_differs_between_stations(found) -> None:
    share = {row["name"]: row["local_share"] for row in found.results["parameters"]}
    assert 0.3 < share["soft clay.lambda"] < 0.6
    assert share["soft clay.kappa"] == pytest.approx(
        share["soft clay.lambda"] * (2.0 * np.sin(np.pi * 0.6 / 6.0)) ** 2
    )
    assert share["load.fill_unit_weight"] == 0.0


def test_any_number_of_workers_gives_the_same_bits(text: str, found) -> None:
    many = assess(parse_scenario(text.replace(f"= {N}", "= 2500")), workers=3)
    one = assess(parse_scenario(text.replace(f"= {N}", "= 2500")), workers=1)
    assert np.array_equal(many.sample.quantity, one.sample.quantity)
    assert np.array_equal(many.sample.station, one.sample.station)
    assert np.array_equal(one.sample.quantity[:N], found.sample.quantity)


def test_the_order_of_stations_changes_nothing(text: str, found) -> None:
    """But for the first, whose ground the slip stands for."""
    blocks = text.split("[[stations]]")
    last, after = blocks[-1].split("[[dependence]]", 1)
    tail = f"[[dependence]]{after}"
    parts = [blocks[0], blocks[1], last, *blocks[-2:1:-1]]
    other = assess(parse_scenario("[[stations]]".join(parts) + tail), workers=1)
    assert [row["name"] for row in other.results["settlement"]["stations"]][1] == "boring 5"
    assert np.array_equal(other.sample.quantity, found.sample.quantity)


def test_a_campaign_stopped_and_gone_on_with_has_the_same_bits(text: str, tmp_path: Path) -> None:
    scenario = parse_scenario(text)
    first = assess(scenario, out=tmp_path / "a", workers=1)
    again = assess(scenario, out=tmp_path / "a", workers=1)
    assert np.array_equal(first.sample.quantity, again.sample.quantity)
    written = json.loads((tmp_path / "a" / "results.json").read_text(encoding="utf-8"))
    assert len(written["settlement"]["stations"]) == 5


def test_report_shows_the_profile_and_the_differences(found) -> None:
    page = render_report(found.results)
    assert 'id="stations"' in page
    assert "The steepest median difference between neighbours is" in page
    assert "decided by" in page
    assert "of its variance differs between stations" in page
    assert "0.005 (1/200)" in page
    assert "A parameter marked (local)" in page
    assert "Settlement of the stations after 30 years" in page  # what is said to those who cannot see it


def test_the_band_marks_only_limits_of_its_own_station(found) -> None:
    """The band is that of boring 3; the limit on the worst station is not one of it."""
    settlement, limit = found.results["settlement"], found.results["limits"][0]
    assert not is_marked(limit, settlement)
    assert is_marked(limit | {"place": {"station": "boring 3"}}, settlement)
    assert not is_marked(found.results["limits"][1], settlement)
    assert "A diamond is a limit" not in render_report(found.results)


def test_tables_hold_every_time(found) -> None:
    frames = tables(found.results)
    assert len(frames["stations"]) == 5 * 3
    assert len(frames["station_pairs"]) == 4 * 2 * 3
    assert set(frames["station_pairs"]["unit"]) == {"m", "-"}
    assert frames["limits"]["place"].iloc[0] == "at the station that settles most"


def test_without_a_line_the_first_station_is_compared_with_every_other(text: str) -> None:
    bent = parse_scenario(
        text.replace('name = "boring 5"', 'name = "boring 5"\nx = 9')
        .replace('stations = "neighbours"', 'stations = ["boring 3", "boring 5"]')
        .replace(f"= {N}", "= 64")
    )
    results = assess(bent, workers=1).results
    assert all(row["along"] is None for row in results["settlement"]["stations"])
    assert [pair["stations"][0] for pair in results["settlement"]["pairs"]] == ["boring 3"] * 4
    assert results["limits"][1]["decided_by"] == []
    page = render_report(results)
    assert "from the first station to another" in page
    assert "which do not lie on one line" in page


def test_few_realisations_withhold_the_tails(text: str) -> None:
    results = assess(parse_scenario(text.replace(f"= {N}", "= 8")), workers=1).results
    page = render_report(results)
    assert "too few realisations" in page


def test_nothing_uncertain_at_stations() -> None:
    certain = LINEAR.replace(
        '{ dist = "lognormal", mean = 20000, cov = 0.05, inherent_cov = 0.1, vertical_scale = 3, '
        "horizontal_scale = SCALE }",
        "20000",
    ).replace("4096", "50")
    results = assess(parse_scenario(certain), workers=1).results
    assert results["limits"][0]["probability"] == 0.0
    assert results["settlement"]["pairs"][0]["difference"]["mean"] == [0.0, 0.0]
    assert "none" in render_report(results)


def test_sheet_of_a_station(text: str) -> None:
    scenario = parse_scenario(
        text.replace('name = "boring 5"', 'name = "boring 5"\nx = 9').replace(
            'stations = "neighbours"', 'stations = "any"'
        )
    )
    section = sheet(scenario)
    assert section.station == "centreline"
    rows = {row["station"]: row for row in section.stations}
    assert rows["boring 3"]["settlement"] == pytest.approx(section.final_settlement, rel=1e-12)
    beside = sheet(scenario, station="boring 5")
    assert beside.station == "station boring 5"
    assert beside.final_settlement == pytest.approx(rows["boring 5"]["settlement"], rel=1e-12)
    assert (beside.strength, beside.slip, beside.strength_in_rows) == ((), (), ())
    formulas = {line["name"]: line for line in beside.formulas}
    assert formulas["influence"]["symbols"][0]["value"] == pytest.approx(5.5 + 2.0 * 1.8 + 9.0)
    on_line = sheet(scenario, station="boring 1")
    assert on_line.slip
    assert on_line.values["soft clay.thickness"] == pytest.approx(2.5)
    with pytest.raises(ParameterError, match=r'there is no station "boring 9": there are boring 3, boring 1'):
        sheet(scenario, station="boring 9")


def test_sheet_without_stations_knows_none() -> None:
    plain = parse_scenario(
        LINEAR.replace("SCALE", "10").split("[[stations]]")[0]
        + '[[limits]]\nname = "s"\nquantity = "settlement"\nat = 10\nnot_more_than = 0.1\n'
    )
    assert sheet(plain).stations == ()
    with pytest.raises(ParameterError, match="the scenario has none"):
        sheet(plain, station="west")


@pytest.mark.parametrize(
    ("value", "words"),
    [(0.002, "1/500"), (0.00209, "1/478"), (0.0, "none"), (None, "beyond the computation")],
)
def test_distortion_as_a_ratio(value: float | None, words: str) -> None:
    assert ratio_text(value) == words
