"""The CSV files: numbers at full precision, units in the names."""

import re

import pandas as pd
import pytest
from sample_results import sample

from probsoil.report.tables import tables, write_tables


@pytest.fixture(scope="module")
def results():
    return sample(n=2000)


def test_four_files_and_no_leftovers(results, tmp_path):
    paths = write_tables(results, tmp_path)
    assert sorted(path.name for path in tmp_path.iterdir()) == sorted(path.name for path in paths)
    assert [path.name for path in paths] == ["limits.csv", "drivers.csv", "settlement.csv", "parameters.csv"]


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


def test_missing_parts_give_empty_tables(results):
    frames = tables({"limits": results["limits"]})
    assert [len(frames[name]) for name in ("limits", "drivers", "settlement", "parameters")] == [4, 0, 0, 0]
