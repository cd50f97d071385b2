"""Stations in the scenario: what is understood, and every mistake with its place."""

import pytest

from probsoil.errors import Fault, ScenarioError
from probsoil.scenario import Scenario, parse_scenario, scenario_schema
from probsoil.scenario.stations import along_line

CC = 'Cc = { dist = "lognormal", mean = 0.80, cov = 0.12 }'
VARYING = (
    'Cc = { dist = "lognormal", mean = 0.80, cov = 0.12, inherent_cov = 0.3, vertical_scale = 2, '
    "horizontal_scale = 40 }"
)
STATIONS = """
[[stations]]
name = "pier"
thickness = { "soft clay" = "5.5 m", sand = 2 }

[[stations]]
name = "edge"
x = 4.5
y = "10 ft"

[station_line]
from = 20
to = 50
spacing = 10
"""
LIMITS = """
[[limits]]
name = "any"
quantity = "settlement"
station = "any"
at = 30
not_more_than = 0.4

[[limits]]
name = "step"
quantity = "differential_settlement"
stations = ["pier", "line 20 m"]
at = 30
not_more_than = 0.05

[[limits]]
name = "slope"
quantity = "angular_distortion"
between = [1, 30]
not_more_than = "1/500"
"""


@pytest.fixture
def text(base_text: str) -> str:
    return base_text.replace(CC, VARYING) + STATIONS + LIMITS


def faults_in(text: str) -> tuple[Fault, ...]:
    with pytest.raises(ScenarioError, match="in the scenario") as caught:
        parse_scenario(text, file="bad.toml")
    return caught.value.faults


def test_stations_as_they_are_understood(text: str) -> None:
    scenario = parse_scenario(text)
    names = [station.name for station in scenario.all_stations]
    assert names == ["pier", "edge", "line 20 m", "line 30 m", "line 40 m", "line 50 m"]
    pier, edge = scenario.stations
    assert dict(pier.thickness) == {"soft clay": 5.5, "sand": 2.0}
    assert (edge.x, edge.y) == (4.5, pytest.approx(3.048))
    assert scenario.limits[-1].threshold == 1.0 / 500.0
    assert scenario.limits[-1].stations == "any"
    assert scenario.limits[-2].stations == ("pier", "line 20 m")


def test_a_line_by_the_number_of_its_stations(text: str) -> None:
    named = text.replace("spacing = 10", 'number = 4\nname = "km"\nx = -2').replace(
        '"line 20 m"', '"km 20 m"'
    )
    line = parse_scenario(named).station_line
    assert [station.name for station in line.stations()] == ["km 20 m", "km 30 m", "km 40 m", "km 50 m"]
    assert {station.x for station in line.stations()} == {-2.0}


def test_without_stations_there_are_none(base_text: str) -> None:
    assert parse_scenario(base_text).all_stations == ()


@pytest.mark.parametrize(
    ("old", "new", "key", "message", "hint"),
    [
        ('name = "edge"', 'name = "pier"', "stations[2].name", "before it is already named", ""),
        ('name = "edge"', 'name = "any"', "stations[2].name", 'a station is named "any"', ""),
        ('x = 4.5\ny = "10 ft"', "x = 0.005", "stations[2]", 'stands where "pier" does', ""),
        ("x = 4.5", "x = 4500", "stations[2].x", "too large", ""),
        (
            '"soft clay" = "5.5 m"',
            '"soft cly" = 5',
            "stations[1].thickness.soft cly",
            "no layer is",
            "soft clay",
        ),
        ('"soft clay" = "5.5 m"', '"soft clay" = -1', "stations[1].thickness.soft clay", "too small", ""),
        (
            '{ "soft clay" = "5.5 m", sand = 2 }',
            "3",
            "stations[1].thickness",
            "not a table of thick",
            "such as",
        ),
        ("spacing = 10", "spacing = 7", "station_line.spacing", "does not go into 30 m", "7.5 m would fit"),
        ("spacing = 10", "spacing = 0.1", "station_line.spacing", "does not go into", ""),
        ("spacing = 10", "number = 1", "station_line.number", "no such whole number", ""),
        ("spacing = 10", "spacing = 10\nnumber = 4", "station_line.spacing", "more than once", ""),
        ("spacing = 10\n", "", "station_line", "how many stations the line has is missing", ""),
        ("to = 50", "to = 10", "station_line.to", "ends at 10 m and begins at 20 m", ""),
        (
            ", horizontal_scale = 40",
            "",
            "layers[2].Cc.inherent_cov",
            "needs horizontal_scale",
            "tens of metres",
        ),
        ('station = "any"', 'station = "peer"', "limits[3].station", 'no station "peer"', '"pier"'),
        ('"line 20 m"]', '"line 25 m"]', "limits[4].stations[2]", 'no station "line 25 m"', "line"),
        ('["pier", "line 20 m"]', '["pier", "pier"]', "limits[4].stations[2]", "compared with itself", ""),
        ('["pier", "line 20 m"]', '["pier"]', "limits[4].stations", "does not say which", ""),
        ('["pier", "line 20 m"]', '"neighbours"', "limits[4].stations", "not on one line", ""),
        ('"1/500"', '"1/500"\ntilt = "removed"', "limits[5].tilt", "slope from end to end", ""),
        ('"1/500"', '"1/0"', "limits[5].not_more_than", "no ratio", ""),
        ('"1/500"', '"0.002 m"', "limits[5].not_more_than", "no ratio", ""),
        ('"1/500"', "1.5", "limits[5].not_more_than", "too large", ""),
        ("between = [1, 30]\n", "", "limits[5]", "the time of the settlement is missing", ""),
        ("between = [1, 30]", "between = [30, 1]", "limits[5].between", "not in order", ""),
        ("between = [1, 30]", "at = 40", "limits[5].at", "beyond the horizon", "raise horizon"),
    ],
)
def test_one_mistake_gives_one_fault(
    text: str, old: str, new: str, key: str, message: str, hint: str
) -> None:
    assert old in text
    (fault,) = faults_in(text.replace(old, new, 1))
    assert fault.key.split(" (")[0] == key
    assert message in fault.message
    assert hint in (fault.hint or "")
    assert fault.line is not None


def test_limits_that_need_stations(base_text: str) -> None:
    faults = faults_in(base_text + LIMITS.replace('station = "any"', 'station = "pier"'))
    assert [fault.message for fault in faults] == [
        'there is no station "pier"; none is given',
        "differential settlement needs two stations; none given",
        "angular distortion needs two stations; none given",
    ]
    one = base_text + '\n[[stations]]\nname = "pier"\n' + LIMITS
    assert "needs two stations; 1 given" in faults_in(one)[0].message


def test_too_many_stations(text: str) -> None:
    (fault,) = faults_in(text.replace("spacing = 10", "number = 49"))
    assert fault.message == "there are 51 stations"
    assert fault.allowed == "at most 50"


def test_correlations_that_cannot_hold_at_every_station(text: str) -> None:
    pair = 'between = ["soft clay.Cc", "load.fill_unit_weight"]\nrank_correlation = 0.75'
    tied = text.replace("[[limits]]", f"[[dependence]]\n{pair}\n\n[[limits]]", 1)
    (fault,) = faults_in(tied)
    assert "cannot hold at every station: soft clay.Cc with load.fill_unit_weight: 0.75" in fault.message
    greatest = float(fault.allowed.rpartition(" ")[2])
    assert parse_scenario(tied.replace("= 0.75", f"= {greatest - 0.002:.3f}")).all_stations
    assert faults_in(tied.replace("= 0.75", f"= {greatest + 0.002:.3f}"))


def test_correlated_numbers_vary_over_one_distance(text: str) -> None:
    other = 'Cs = { dist = "lognormal", mean = 0.11, cov = 0.20'
    apart = text.replace(other, f"{other}, inherent_cov = 0.3, vertical_scale = 2, horizontal_scale = 60")
    (fault,) = faults_in(apart)
    assert "vary in plan over 40 m and 60 m" in fault.message
    assert fault.allowed == "the same horizontal_scale for both"


def test_a_point_of_a_foundation_is_said_by_the_stations(base_text: str) -> None:
    load = '[load]\nshape = "circle"\ndiameter = 20\nat = 5\nfill_unit_weight = 10\n\n'
    start, end = base_text.index("[load]"), base_text.index("[[stages]]")
    text = base_text[:start] + load + base_text[end:]
    text = text.replace('quantity = "slip_safety"', 'quantity = "bearing_safety"')
    (fault,) = faults_in(text + '\n[[stations]]\nname = "rim"\nx = 10\n')
    assert (fault.key, fault.message) == ("load.at", "where settlement is reported is said by the stations")


def test_mistakes_of_stations_are_seen_beside_others(text: str) -> None:
    faults = faults_in(text.replace("seed = 3", "seed = -3").replace('name = "edge"', 'name = "pier"'))
    assert [fault.key.split(" (")[0] for fault in faults] == ["seed", "stations[2].name"]
    assert len(faults_in(text.replace("x = 4.5", 'x = "4.5 kg"'))) == 1


@pytest.mark.parametrize(
    ("places", "order"),
    [
        ([(0, 0), (0, 30), (0, 10)], [0, 2, 1]),
        ([(5, 0), (0, 0), (-5, 0)], [2, 1, 0]),
        ([(0, 0), (3, 4), (6, 8), (-3, -4)], [3, 0, 1, 2]),
        ([(10, -5), (0, 5), (5, 0)], [0, 2, 1]),
        ([(0, 0), (0, 10), (1, 5)], None),
        ([(0, 0)], None),
    ],
)
def test_stations_along_a_line(places: list, order: list[int] | None) -> None:
    assert along_line(places) == order


def test_schema_takes_what_the_reader_takes() -> None:
    definitions = scenario_schema()["$defs"]
    ratio = definitions["AngularDistortionLimit"]["properties"]["not_more_than"]["anyOf"]
    assert any("1" in str(choice.get("pattern")) for choice in ratio)
    assert {"from", "to", "number", "spacing", "x", "name"} == set(definitions["StationLine"]["properties"])
    assert isinstance(Scenario.model_fields["stations"].default, tuple)
