"""`probsoil assess` as a user meets it: answer, options, endings."""

import json
import logging
import re
import warnings
from collections.abc import Callable
from pathlib import Path

import cli_fakes
import pytest
import typer

from probsoil.cli import main
from probsoil.cli._options import duration, share
from probsoil.errors import (
    ConvergenceError,
    DependenceError,
    ParameterError,
    ProbsoilError,
    ResultsError,
    StoppedEarly,
    UnfitFolderError,
)


def test_answer_says_chances_verdicts_drivers_report_and_caution(
    desk: Path, calculation: cli_fakes.Calculation, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["assess", "site.toml"]) == 0
    out, err = capsys.readouterr()
    words = re.sub(r"\s+", " ", out)
    assert "Trial [bold]embankment[/bold]: 2,000 realisations (monte carlo), seed 7" in words
    assert re.search(r"residual \[m\] .* 12\.4 % \(11\.0 to 13\.9 %\) .* Beyond the target", words)
    assert re.search(r"slip .* none of 2,000 realisations \(below 0\.15 % .* No target set", words)
    assert re.search(
        r"soft clay\.b +spread 0\.33 \(0\.27 to 0\.40\) +50 % \(46 to 54\) +raises the chance", out
    )
    assert "ranks go by it" in words
    assert out.index("soft clay.d") < out.index("soft clay.a") < out.index("soft clay.b")
    assert "soft clay.c" not in out  # not ranked
    basis = "ranked by how much more spread in a parameter raises the chance of exceeding the limit"
    assert f"Drivers of residual [m]: {basis}" in words
    assert "Drivers of slip: nothing exceeded, so nothing can be ranked" in out
    assert "Warning: realisations in which kappa was lowered (3.0 % of all realisations)\n" in out
    assert "finer grid differs (relative error, 0.80 % of the final settlement)\n" in out
    assert "Warning: look at this again\n" in out
    assert f"Report: {Path('results', 'site', 'report.html')}" in out
    assert "Local codes and a licensed engineer decide" in words
    assert err == ""
    assert calculation.calls[0]["out"] == Path("results/site")
    assert (desk / "results" / "site" / "report.html").exists()
    assert (desk / "results" / "site" / "limits.csv").exists()


def test_drivers_without_a_rank_fill_up_to_three_and_limits_of_which_nothing_is_known_are_left_out(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    results = cli_fakes.results()
    for driver in results["drivers"][:2]:
        driver["rank"] = None  # a and b; the one of the larger share comes first
    nothing = results["drivers"][0] | {
        "limit": "slip",
        "spread_elasticity": None,
        "spread_interval": [None, None],
    }
    results["drivers"].append(nothing)
    monkeypatch.setattr(cli_fakes, "results", lambda: results)
    assert main(["assess", "site.toml"]) == 0
    table = capsys.readouterr().out.split("Foremost drivers")[1].split("Elasticity:")[0]
    rows = [line.split() for line in table.splitlines() if "soft clay" in line]
    assert [" ".join(row[2:6]).split(" soft")[0] for row in rows] == ["1", "not ranked", "not ranked"]
    assert table.index("soft clay.d") < table.index("soft clay.b") < table.index("soft clay.a")
    assert not re.search(r"^ *slip ", table, re.MULTILINE)


def test_answer_says_when_the_mean_ranks_and_when_nothing_does(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    results = cli_fakes.results()
    results["limits"][0]["probability"] = 0.5
    results["driver_quality"][0]["ranked_by"] = "mean"
    monkeypatch.setattr(cli_fakes, "results", lambda: results)
    assert main(["assess", "site.toml"]) == 0
    words = re.sub(r"\s+", " ", capsys.readouterr().out)
    assert "Drivers of residual [m]: ranked by how much a shift of a parameter's mean changes" in words
    for driver in results["drivers"]:
        driver["rank"] = None
    assert main(["assess", "site.toml"]) == 0
    words = re.sub(r"\s+", " ", capsys.readouterr().out)
    assert "Drivers of residual [m]: no parameter has a rank: for none does a shift of the mean" in words


def test_options_reach_the_calculation_and_absent_ones_leave_the_scenario_alone(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,
) -> None:
    line = (
        "assess site.toml --out here --realisations 500 --draws latin-hypercube --seed 0 --workers 3 --resume"
    )
    assert main(line.split()) == 0
    assert main(["assess", "site.toml"]) == 0
    given, absent = calculation.calls
    assert given["out"] == Path("here")
    assert (given["realisations"], given["draws"], given["seed"]) == (500, "latin hypercube", 0)
    assert (given["workers"], given["resume"], given["force"]) == (3, True, False)
    assert given["command"] == f"probsoil {line}"
    assert (absent["realisations"], absent["draws"], absent["seed"], absent["workers"]) == (None,) * 4
    assert absent["resume"] is False
    assert (absent["within"], absent["time_limit"]) == (None, None)
    assert main(["assess", "site.toml", "--within", "10%", "--time-limit", "2 minutes"]) == 0
    assert (calculation.calls[-1]["within"], calculation.calls[-1]["time_limit"]) == (0.1, 120.0)
    assert main(["assess", "site.toml", "--force"]) == 0
    assert calculation.calls[-1]["force"] is True


def test_json_is_the_result_and_nothing_else(
    desk: Path,
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert main(["assess", "site.toml", "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == cli_fakes.results()
    assert (desk / "results" / "site" / "report.html").exists()


def test_json_never_holds_what_is_not_json(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,  # noqa: ARG001
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setattr(cli_fakes, "results", lambda: {"probability": float("nan")})
    assert main(["assess", "site.toml", "--json"]) == 1
    out, err = capsys.readouterr()
    assert out == ""
    assert "failed unexpectedly: ValueError" in err
    assert str(Path("results", "site", "log.txt")) in err


def test_quiet_prints_nothing_but_still_logs(
    desk: Path, calculation: cli_fakes.Calculation, capsys: pytest.CaptureFixture[str]
) -> None:
    calculation.ending = lambda: logging.getLogger("probsoil.campaign").warning("old chunks removed")
    assert main(["assess", "site.toml", "--quiet"]) == 0
    assert capsys.readouterr() == ("", "")
    assert calculation.calls[0]["progress"] is None
    log = (desk / "results" / "site" / "log.txt").read_text()
    assert "probsoil assess site.toml --quiet" in log
    assert "WARNING probsoil.campaign: old chunks removed" in log
    assert log.rstrip().endswith("done")


def test_warnings_of_ours_go_to_standard_error_and_those_of_python_to_the_log(
    desk: Path, calculation: cli_fakes.Calculation, capsys: pytest.CaptureFixture[str]
) -> None:
    def speak() -> None:
        logging.getLogger("probsoil.campaign").warning("old chunks removed")
        with warnings.catch_warnings():
            warnings.simplefilter("always")
            warnings.warn("beyond the published range", UserWarning, stacklevel=1)

    calculation.ending = speak
    assert main(["assess", "site.toml", "--json"]) == 0
    out, err = capsys.readouterr()
    assert json.loads(out)
    assert err == "old chunks removed\n"
    assert "UserWarning: beyond the published range" in (desk / "results" / "site" / "log.txt").read_text()


def test_second_run_adds_to_the_log_and_leaves_no_handler_behind(
    desk: Path,
    calculation: cli_fakes.Calculation,  # noqa: ARG001
) -> None:
    before = list(logging.getLogger("probsoil").handlers)
    for _ in range(2):
        assert main(["assess", "site.toml", "--quiet"]) == 0
    assert (desk / "results" / "site" / "log.txt").read_text().count("probsoil assess") == 2
    assert logging.getLogger("probsoil").handlers == before


@pytest.mark.parametrize(
    ("ending", "code"),
    [
        (StoppedEarly("stopped early after 3 of 20 chunks; 3 are kept in 'x'"), 3),
        (StoppedEarly("stopped early; nothing is kept", kept=False), 1),
        (ResultsError("folder cannot be written"), 1),
        (UnfitFolderError("the chunks are of another run"), 2),
        (ConvergenceError("no answer", best=1.0, error=0.5), 1),
        (ProbsoilError("chunk 4 of 20 failed: ValueError: odd"), 1),
        (ParameterError("realisations must be a power of two"), 2),
        (DependenceError("correlations cannot hold together"), 2),
    ],
)
def test_each_ending_has_its_code_and_no_traceback(
    desk: Path,
    calculation: cli_fakes.Calculation,
    capsys: pytest.CaptureFixture[str],
    ending: ProbsoilError,
    code: int,
) -> None:
    calculation.ending = ending
    assert main(["assess", "site.toml"]) == code
    out, err = capsys.readouterr()
    assert out == ""
    assert err.count(str(ending)) == 1
    assert "Traceback" not in err
    assert f"ended: {ending}" in (desk / "results" / "site" / "log.txt").read_text()


def test_unexpected_error_is_short_and_its_traceback_is_in_the_log(
    desk: Path, calculation: cli_fakes.Calculation, capsys: pytest.CaptureFixture[str]
) -> None:
    calculation.ending = ZeroDivisionError("clay")
    assert main(["assess", "site.toml"]) == 1
    out, err = capsys.readouterr()
    assert out == ""
    assert "probsoil failed unexpectedly: ZeroDivisionError: clay" in err
    assert "Traceback" not in err
    assert str(Path("results", "site", "log.txt")) in err
    log = (desk / "results" / "site" / "log.txt").read_text()
    assert "Traceback (most recent call last)" in log
    assert log.rstrip().endswith("ZeroDivisionError: clay")


def test_mistakes_in_the_scenario_are_all_told_and_nothing_is_written(
    desk: Path, calculation: cli_fakes.Calculation, capsys: pytest.CaptureFixture[str]
) -> None:
    before = sorted(desk.rglob("*"))
    assert main(["assess", "bad.toml"]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert re.search(r"bad\.toml:\d+:1: .*kapa", err)
    assert 'did you mean "kappa"?' in err
    assert "sede" in err
    assert "Error:" not in err
    assert sorted(desk.rglob("*")) == before
    assert calculation.calls == []


@pytest.mark.parametrize("ending", [DependenceError("cannot hold together"), TypeError("odd")])
def test_run_that_ends_before_it_has_a_folder_leaves_nothing_behind(
    desk: Path,
    calculation: cli_fakes.Calculation,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    ending: Exception,
) -> None:
    def refuse(file: Path) -> None:  # noqa: ARG001
        raise ending

    monkeypatch.setattr("probsoil.scenario.read_scenario", refuse)
    before = sorted(desk.rglob("*"))
    assert main(["assess", "site.toml"]) == (2 if isinstance(ending, DependenceError) else 1)
    assert sorted(desk.rglob("*")) == before
    assert calculation.calls == []
    if isinstance(ending, TypeError):
        err = capsys.readouterr().err
        place = re.search(r"The details are in (\S+\.log);", err)
        assert place is not None
        assert "TypeError: odd" in Path(place[1]).read_text()
        Path(place[1]).unlink()


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ("assess site.toml --realisatons 5", "--realisations"),
        ("assess site.toml --realisations 0", "'--realisations'"),
        ("assess site.toml --workers none", "'--workers'"),
        ("assess site.toml --draws latin", "did you mean 'latin-hypercube'?"),
        (
            "assess site.toml --realisations 2.5",
            "'2.5' is not a whole number; allowed: a whole number from 1",
        ),
        (
            "assess site.toml --realisations 100000001",
            "100,000,001 is too large; allowed: a whole number from 1",
        ),
        ("assess site.toml --seed 9223372036854775808", "is too large"),
        ("assess site.toml --resume --force", "choose one of --resume and --force"),
        ("sheet site.toml --at mode", "'mode' is none of the choices; allowed: mean, median"),
        ("assess site.toml --seed -1", "'--seed'"),
        ("assess", "Missing argument"),
        ("asess site.toml", "Did you mean 'assess'?"),
        ("assess nosuch.toml", "there is no such file"),
    ],
)
def test_mistakes_on_the_command_line_end_with_two_and_a_hint(
    desk: Path,  # noqa: ARG001
    calculation: cli_fakes.Calculation,
    capsys: pytest.CaptureFixture[str],
    line: str,
    message: str,
) -> None:
    assert main(line.split()) == 2
    out, err = capsys.readouterr()
    assert out == ""
    words = re.sub(r"[\s│]+", " ", err)
    assert message in words
    assert "Input should" not in words
    assert "Value error" not in words
    assert calculation.calls == []


@pytest.mark.parametrize(("text", "seconds"), [("5 minutes", 300.0), ("90s", 90.0), ("1.5 h", 5400.0)])
def test_precision_and_time_are_read(text: str, seconds: float) -> None:
    assert duration(text) == seconds
    assert share("20%") == share("0.2") == share(" 20 % ") == 0.2


@pytest.mark.parametrize(
    ("read", "text", "message"),
    [
        (duration, "5", "'5' is not a time; allowed: a number above 0 with seconds, minutes or hours"),
        (duration, "5 weeks", "'5 weeks' is not a time"),
        (duration, "0 s", "'0 s' is not a time"),
        (duration, "1.2.3 s", "'1.2.3 s' is not a time"),
        (share, "often", "'often' is not a share; allowed: such as 20% or 0.2"),
        (share, "120%", "120% is out of range; allowed: above 0 and below 100 %, such as 20%"),
        (share, "nan", "nan is out of range"),
    ],
)
def test_precision_and_time_out_of_range_are_refused(
    read: Callable[[str], float], text: str, message: str
) -> None:
    with pytest.raises(typer.BadParameter, match=re.escape(message)):
        read(text)
