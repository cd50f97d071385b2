"""Numbers in words: rounding, bounds and sentences."""

import math

import pytest
from sample_results import interval, sample

from probsoil import probability
from probsoil.report import chance, text
from probsoil.report.numerals import money_text, rough_money_text
from probsoil.report.percentages import bound_text, odds_text, unseen_bound


@pytest.mark.parametrize(
    ("value", "decimals", "expected"),
    [
        (0.125, 2, "0.13"),  # half up, where binary formatting gives 0.12
        (2.5, 0, "3"),
        (1.005, 2, "1.01"),  # the decimal text is rounded, not the binary fraction just below it
        (-0.0004, 3, "0.000"),
        (-1.25, 1, "-1.3"),
        (1234567.0, 0, "1,234,567"),
    ],
)
def test_rounds_half_up_in_decimal(value, decimals, expected):
    assert text.rounded(value, decimals) == expected


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        (None, "not available"),
        (math.nan, "not available"),
        (math.inf, "not available"),
        (0, "0"),
        (0.41234, "0.412"),
        (0.99963, "1.00"),
        (1234.5, "1,235"),
        (1.2e-9, "1.20 × 10⁻⁹"),
        (-3.456e12, "-3.46 × 10¹²"),
    ],
)
def test_number_text(value, expected):
    assert text.number_text(value) == expected


@pytest.mark.parametrize(
    ("value", "expected"), [(30.0, "30"), (1.17, "1.17"), (0.077, "0.077"), (100.0, "100")]
)
def test_years_lose_idle_zeros_only(value, expected):
    assert text.trimmed_text(value) == expected


@pytest.mark.parametrize(
    ("share", "expected"),
    [
        (0.12449, "12.4 %"),
        (0.12450, "12.5 %"),
        (0.0007, "0.070 %"),
        (0.000034, "0.0034 %"),
        (0.99966, "99.966 %"),
        (0.5, "50.0 %"),
        (None, "not available"),
    ],
)
def test_percent_keeps_two_digits_of_the_smaller_side(share, expected):
    assert text.percent_text(share) == expected


@pytest.mark.parametrize(
    ("share", "expected"), [(0.05, "5 %"), (1e-3, "0.1 %"), (0.125, "12.5 %"), (1.0, "100 %")]
)
def test_chosen_percentages_carry_no_false_digits(share, expected):
    assert text.plain_percent(share) == expected


def test_none_and_all_are_never_called_0_or_100_percent():
    assert text.probability_text(0.0, 20_000) == "none of 20,000 realisations"
    assert text.probability_text(1.0, 20_000) == "all of 20,000 realisations"
    for count in (1, 2, 19_998, 19_999):
        assert text.probability_text(count / 20_000, 20_000) not in {"0.0 %", "100.0 %"}


def test_bounds_are_rounded_outwards():
    low, high = interval(0)
    assert (low, round(high, 8)) == (0.0, 0.00018443)
    assert text.interval_text(0.0, low, high) == "0 to 0.019 %"
    low, high = interval(20_000)
    assert text.interval_text(1.0, low, high) == "99.981 to 100 %"


@pytest.mark.parametrize("n", [1, 2, 3, 9, 10, 57, 300, 2999, 20_000, 123_456])
def test_bound_is_the_one_sided_one_rounded_outwards_by_less_than_its_last_digit(n):
    bound = unseen_bound(n, 0.95)
    assert bound == pytest.approx(probability.unseen_bound(n, 0.95), rel=1e-12)
    for estimate, word, exact in ((0.0, "below", bound), (1.0, "above", 1.0 - bound)):
        said, shown = bound_text(estimate, bound).removesuffix(" %").split()
        assert said == word
        last = 10.0 ** -len(shown.partition(".")[2])
        beyond = (float(shown) - 100.0 * exact) * (1 if word == "below" else -1)
        assert -1e-9 <= beyond < last


def test_an_end_that_is_neither_nought_nor_all_is_never_written_so():
    assert text.interval_text(0.001, 2.53e-5, 5.56e-3) == "0.0025 to 0.56 %"
    assert text.interval_text(0.999, 1.0 - 5.56e-3, 1.0 - 2.53e-5) == "99.44 to 99.9975 %"
    assert text.interval_text(0.001, 0.0, 5.56e-3) == "0 to 0.56 %"
    assert text.interval_text(0.5, 0.5, 0.5) == "none"


def test_interval_has_the_decimals_of_its_probability():
    assert text.interval_text(0.1084, 0.10412, 0.11279) == "10.4 to 11.3 %"
    assert text.interval_text(0.0007, 0.00038, 0.00117) == "0.038 to 0.117 %"


@pytest.mark.parametrize(
    ("probability", "expected"),
    [(0.124, "about 1 in 8"), (0.0007, "about 1 in 1,400"), (0.5, "about 1 in 2"), (0.51, ""), (0.0, "")],
)
def test_odds(probability, expected):
    assert odds_text(probability) == expected


def test_threshold_is_written_as_it_was_given_and_curve_thresholds_as_finely_as_their_step():
    limit = sample(n=500)["limits"][0]
    assert text.threshold_text(limit) == "0.10 m"
    assert text.step_decimals(limit) == 3


@pytest.mark.parametrize(
    ("place", "expected"),
    [
        (0, "the settlement between 1.17 and 30 years is more than 0.10 m"),
        (1, "the settlement at 30 years is more than 0.90 m"),
        (2, "the least factor of safety against slip over the stages is less than 1.00"),
        (3, "the time to 90 % consolidation is more than 2 years from the start"),
    ],
)
def test_event_of_each_quantity(place, expected):
    assert text.event_text(sample(n=500)["limits"][place]) == expected


def test_event_without_a_time_text_is_made_from_the_times():
    limit = sample(n=500)["limits"][0]
    del limit["time_text"]
    assert text.quantity_text(limit) == "the settlement between 1.17 and 30 years"
    limit |= {
        "quantity": "degree_of_consolidation",
        "time": {"at": 2.0},
        "sense": "not less than",
        "unit": "-",
    }
    assert text.event_text(limit) == "the degree of consolidation at 2 years is less than 0.10"


@pytest.mark.parametrize(
    ("verdict", "expected"),
    [
        ("within target", "Within the target of 5 %: the chance that"),
        ("beyond target", "Beyond the target of 5 %: the chance that"),
        ("not conclusive", "Not conclusive against a target of 5 %: the chance that"),
        (None, "No target set: the chance that"),
    ],
)
def test_verdict_sentence_opens_with_the_verdict(verdict, expected):
    results = sample(n=500)
    limit = results["limits"][0] | {"verdict": verdict}
    sentence = chance.verdict_sentence(limit, results)
    assert sentence.startswith(expected)
    assert ("more realisations are needed" in sentence) == (verdict == "not conclusive")


@pytest.mark.parametrize(
    ("probability", "word", "bound"), [(0.0, "none", "below 0.015 %"), (1.0, "all", "above 99.985 %")]
)
def test_verdict_sentence_when_none_or_all_exceed(probability, word, bound):
    results = sample()
    count = round(probability * 20_000)
    limit = results["limits"][1] | {
        "probability": probability,
        "interval": interval(count),
        "exceeding": count,
    }
    sentence = chance.verdict_sentence(limit, results)
    assert f"in {word} of 20,000 realisations, so the chance is {bound} with 95 % confidence." in sentence
    assert (
        chance.chance_text(limit, results) == f"{word} of 20,000 realisations ({bound} with 95 % confidence)"
    )


def test_overall_sentence_counts_the_verdicts():
    results = sample()
    assert chance.overall_sentence(results) == (
        "Of the 4 limits, 1 is beyond its target chance, 1 is not conclusive, 1 is within its target chance "
        "and 1 has no target."
    )
    results["limits"] = results["limits"][:1]
    assert chance.overall_sentence(results) == "The one limit is beyond its target chance."


@pytest.mark.parametrize(
    ("ends", "expected"),
    [
        ([1.134, 1.176], "1.13 to 1.18"),
        ([3.549, None], "above 3.54"),
        ([None, -3.549], "below -3.54"),
        ([None, None], "not available"),
        (None, "not available"),
    ],
)
def test_pair_text(ends, expected):
    assert text.pair_text(ends) == expected


@pytest.mark.parametrize(
    ("low", "high", "expected"),
    [
        (1.2, 3.4, "nine times in ten between 1.20 years and 3.40 years"),
        (1.2, None, "5 % point 1.20 years, 95 % point not reached"),
        (None, None, "5 % point not reached, 95 % point not reached"),
    ],
)
def test_range_text(low, high, expected):
    beyond = text.uncomputed_text("time_to_consolidation")
    assert text.range_text(low, high, "years", 40, beyond) == expected
    assert text.range_text(low, high, "years", 39, beyond).startswith("no range from the 5 %")
    assert text.uncomputed_text("slip_safety") == "beyond the computation"


def test_money_and_lists():
    assert money_text(900e3, "EUR") == "EUR 900,000"
    assert money_text(None, "EUR") == "not available"
    assert rough_money_text(202_612.0, "EUR") == "EUR 203,000"
    assert rough_money_text(12_961.2, "EUR", up=True) == "EUR 13,000"
    assert rough_money_text(12_961.2, "EUR", down=True) == "EUR 12,900"
    assert rough_money_text(99.6, "") == "100"
    assert rough_money_text(None, "EUR") == "not available"
    assert text.list_text([]) == ""
    assert text.list_text(["a"]) == "a"
    assert text.list_text(["a", "b", "c"]) == "a, b and c"


def test_units_are_left_off_pure_numbers_and_missing_ones():
    assert text.value_text(0.41234, "m") == "0.412 m"
    assert text.value_text(1.372, "-") == "1.37"
    assert text.value_text(0.0002, "m") == "less than 0.001 m"
    assert text.value_text(-0.0002, "m") == text.value_text(0.0, "m") == "0.000 m"
    assert text.value_text(None, "m") == "not available"
    assert text.with_unit("3", "kPa") == "3 kPa"
