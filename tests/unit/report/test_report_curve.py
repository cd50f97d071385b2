"""The exceedance curve: what the page reads must be what the program counted."""

import json

import pytest
from sample_results import interval, sample

from probsoil.errors import ResultsError
from probsoil.report import chance, text
from probsoil.report.curve import curve_steps, curve_view


@pytest.fixture(scope="module")
def results():
    return sample()


@pytest.mark.parametrize("place", [0, 1, 2, 3])
def test_slider_starts_at_the_headline_to_the_digit(results, place):
    limit = results["limits"][place]
    data = json.loads(curve_view(place + 1, limit, results)["json"])
    _, share, bounds, count = data["read"][data["start"]]
    assert f"{share} ({bounds})" == chance.chance_text(limit, results)
    assert count == text.count_text(limit["exceeding"])
    assert float(data["value"][data["start"]]) == limit["threshold"]


@pytest.mark.parametrize("place", [0, 1, 2, 3])
def test_every_step_reads_its_own_count_and_interval(results, place):
    limit = results["limits"][place]
    steps = curve_steps(limit, results)
    assert [step.threshold for step in steps] == limit["curve"]["threshold"]
    bounds = (limit["curve"][key] for key in ("exceeding", "low", "high"))
    for step, count, low, high in zip(steps, *bounds, strict=True):
        assert step.count == f"{count:,d}"
        assert step.interval == text.interval_text(count / 20_000, low, high)
        assert step.margin == chance.margin_text(count / 20_000, [low, high], 20_000, 0.95)
        assert (step.margin == step.interval) == (0 < count < 20_000)
        said = text.probability_text(count / 20_000, 20_000)
        assert step.chance == said.removesuffix(" of 20,000 realisations")
        assert step.chance in {"none", "all"} or 0 < count < 20_000


def test_thresholds_that_read_alike_would_mislead(results):
    for limit in results["limits"]:
        texts = [step.text for step in curve_steps(limit, results)]
        assert len(set(texts)) == len(texts)


def test_contradiction_between_curve_and_headline_is_refused(results):
    limit = json.loads(json.dumps(results["limits"][0]))
    limit["exceeding"] += 1
    with pytest.raises(
        ResultsError, match="counts 2168 exceedances at the limit's threshold, the headline 2169"
    ):
        curve_steps(limit, results)


def test_nulls_in_the_curve_are_left_out_and_the_limit_put_in(results):
    limit = json.loads(json.dumps(results["limits"][0]))
    own = limit["curve"]["threshold"].index(limit["threshold"])
    for place in (own, 3):
        limit["curve"]["low"][place] = None
    steps = curve_steps(limit, results)
    assert len(steps) == len(limit["curve"]["threshold"]) - 1
    assert [step.count for step in steps if step.threshold == limit["threshold"]] == ["2,168"]
    assert limit["curve"]["threshold"][3] not in [step.threshold for step in steps]


def test_without_a_curve_there_is_no_chart(results):
    limit = {key: value for key, value in results["limits"][0].items() if key != "curve"}
    assert curve_view(1, limit, results) is None


@pytest.mark.parametrize("count", [0, 20_000])
def test_flat_curves_draw(results, count):
    limit = json.loads(json.dumps(results["limits"][0]))
    low, high = interval(count)
    size = len(limit["curve"]["threshold"])
    flat = {"exceeding": count, "probability": count / 20_000}
    limit |= flat | {"interval": [low, high]}
    limit["curve"] |= {key: [value] * size for key, value in (flat | {"low": low, "high": high}).items()}
    view = curve_view(1, limit, results)
    even, log = view["axes"]
    assert even.line.count("L") == size - 1
    assert log.line.count("L") == (size - 1 if count else 0)
    for axis in view["axes"]:
        assert all(0.0 <= height <= 100.0 for height in axis.heights)
        assert all(0.0 <= at <= 100.0 for at, _ in axis.ticks)


def test_heights_fall_with_the_chance(results):
    view = curve_view(1, results["limits"][0], results)
    for axis in view["axes"]:
        assert list(axis.heights) == sorted(axis.heights)


def test_ticks_are_round_and_on_the_axis(results):
    view = curve_view(2, results["limits"][1], results)
    first, last = view["steps"][0].threshold, view["steps"][-1].threshold
    assert 3 <= len(view["x_ticks"]) <= 7
    for at, label in view["x_ticks"]:
        assert at == pytest.approx(
            100 * (float(label) - first) / (last - first), abs=0.006
        )  # two decimals kept
