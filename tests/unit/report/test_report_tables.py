"""The CSV files: numbers at full precision, units in the names."""

import re

import pandas as pd
import pytest
from sample_results import sample

from probsoil.report.tables import tables, write_tables


@pytest.fixture(scope="module")
def results():
    return sample(n=2000)


def test_five_files_and_no_leftovers(results, tmp_path):
    paths = write_tables(results, tmp_path)
    assert sorted(path.name for path in tmp_path.iterdir()) == sorted(path.name for path in paths)
    names = ["limits.csv", "curves.csv", "drivers.csv", "settlement.csv", "parameters.csv"]
    assert [path.name for path in paths] == names


def test_numbers_survive_the_round_trip(results, tmp_path):
    write_tables(results, tmp_path)
    limits = pd.read_csv(tmp_path / "limits.csv")
    assert limits["probability [-]"].tolist() == [limit["probability"] for limit in results["limits"]]
    assert limits["exceeding [realisations]"].tolist() == [limit["exceeding"] for limit in results["limits"]]
    settlement = pd.read_csv(tmp_path / "settlement.csv")
    assert settlement["p95 [m]"].tolist() == results["settlement"]["quantiles"]["0.95"]
    assert settlement["time [years]"].tolist() == results["settlement"]["times"]
    parameters = pd.read_csv(tmp_path / "parameters.csv")
    assert parameters["mean [unit]"].tolist() == [row["mean"] for row in results["parameters"]]


def test_every_number_column_names_a_unit(results):
    for frame in tables(results).values():
        for name in frame.select_dtypes("number").columns:
            assert re.search(r"\[[^\]]+\]$", name), name


def test_ranks_stay_whole_where_some_are_missing(results, tmp_path):
    results = results | {
        "drivers": [row | {"rank": None if i % 2 else 3} for i, row in enumerate(results["drivers"])]
    }
    write_tables(results, tmp_path)
    ranks = pd.read_csv(tmp_path / "drivers.csv", dtype=str)["rank [-]"]
    assert set(ranks.dropna()) == {"3"}
    assert ranks.isna().any()


def test_names_with_commas_and_quotes_are_quoted(results, tmp_path):
    name = 'lift, "second" & <third>'
    limits = [results["limits"][0] | {"name": name}]
    write_tables(results | {"limits": limits}, tmp_path)
    assert pd.read_csv(tmp_path / "limits.csv")["limit"].tolist() == [name]


def test_what_has_no_number_is_said_in_words(results, tmp_path):
    limits = [results["limits"][k] | {"summary": {"mean": None, "sd": None}} for k in (0, 3)]
    for entry in limits:
        entry["summary"]["quantiles"] = {"0.05": 0.5, "0.25": 0.75, "0.5": 1.25, "0.75": None, "0.95": None}
    settlement = results["settlement"] | {"mean": [None, *results["settlement"]["mean"][1:]]}
    write_tables(results | {"limits": limits, "settlement": settlement}, tmp_path)
    frame = pd.read_csv(tmp_path / "limits.csv", dtype=str)
    for column in ("mean [unit]", "sd [unit]", "p75 [unit]", "p95 [unit]"):
        assert frame[column].tolist() == ["beyond the computation", "not reached"]
    assert frame["p50 [unit]"].tolist() == ["1.25", "1.25"]
    means = pd.read_csv(tmp_path / "settlement.csv", dtype=str)["mean [m]"]
    assert means[0] == "beyond the computation"
    assert [float(value) for value in means[1:]] == settlement["mean"][1:]


def test_drivers_say_what_ranks_and_what_is_clear(results, tmp_path):
    quality = [row | {"ranked_by": "mean"} for row in results["driver_quality"][:1]]
    rows = [
        results["drivers"][0],
        results["drivers"][0] | {"spread_clear": None, "mean_clear": None},
        results["drivers"][-1],
    ]
    write_tables(results | {"drivers": rows, "driver_quality": quality}, tmp_path)
    frame = pd.read_csv(tmp_path / "drivers.csv", dtype=str)
    assert frame["ranked by"].tolist() == ["mean", "mean", "spread"]
    assert frame["spread clear"].fillna("").tolist() == ["True", "", str(rows[2]["spread_clear"])]


def test_missing_parts_give_empty_tables(results):
    frames = tables({"limits": results["limits"]})
    assert [len(frames[name]) for name in ("limits", "drivers", "settlement", "parameters")] == [4, 0, 0, 0]


def test_costs_and_medians_have_their_limits(results, tmp_path):
    write_tables(results, tmp_path)
    frame = pd.read_csv(tmp_path / "limits.csv")
    first = results["limits"][0]
    low, high = first["interval"]
    ends = frame.loc[0, ["expected cost low [EUR]", "expected cost high [EUR]"]].tolist()
    assert ends == pytest.approx([900e3 * low, 900e3 * high], rel=1e-12)
    assert frame.loc[0, ["p50 low [unit]", "p50 high [unit]"]].tolist() == first["summary"]["median_interval"]


def test_tails_of_few_realisations_are_withheld_in_words(results, tmp_path):
    limits = [results["limits"][0] | {"model_runs": 39, "summary": {"median_interval": [None, None]}}]
    settlement = results["settlement"] | {"realisations": 39}
    write_tables(results | {"limits": limits, "settlement": settlement}, tmp_path)
    frame = pd.read_csv(tmp_path / "limits.csv", dtype=str)
    for column in ("p05 [unit]", "p95 [unit]", "p50 low [unit]", "p50 high [unit]"):
        assert frame[column].tolist() == ["too few realisations"]
    band = pd.read_csv(tmp_path / "settlement.csv", dtype=str)
    assert set(band["p05 [m]"]) == set(band["p95 [m]"]) == {"too few realisations"}
    assert float(band["p50 [m]"].iloc[-1]) == settlement["quantiles"]["0.5"][-1]
