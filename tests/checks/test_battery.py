"""All checks together, and the forecast check."""

from datetime import UTC, datetime, timedelta

import pytest

from fleet.codes import parse_iso_code
from samples.checks.battery import hard_errors, run_checks
from samples.checks.candidates import CandidateSample, Expectation, PastEvent, PastSample
from samples.checks.forecasts import far_off_the_forecast

OCTOBER = datetime(2026, 10, 12, tzinfo=UTC)
NOVEMBER = datetime(2026, 11, 9, tzinfo=UTC)
USUAL = {"p4": 391.2, "p6": 96.1, "p14": 7.1}
HISTORY = [PastSample(OCTOBER, USUAL, machine_hours=17_961)]


def count_expectation(observed: float) -> Expectation:
    return Expectation("p14", "The count ≥14 µm", observed, mean=9.5, scale=0.5)


@pytest.mark.parametrize(("observed", "word"), [(11.1, "above"), (7.9, "below")])
def test_more_than_three_scales_off_the_forecast_is_doubted(observed: float, word: str) -> None:
    (doubt,) = far_off_the_forecast([count_expectation(observed)])
    assert word in doubt.sentence


def test_three_scales_or_no_forecast_are_not_doubted() -> None:
    unknown = Expectation("p14", "The count ≥14 µm", 30.0, None, None)
    assert far_off_the_forecast([count_expectation(11.0), unknown]) == []


def test_figures_far_off_on_one_side_are_one_doubt() -> None:
    water, iron = (Expectation(key, name, 9.0, 7.0, 0.2) for key, name in (("water", "Water"), ("fe", "Iron")))
    copper = Expectation("cu", "Copper", 1.0, 7.0, 0.2)
    sentences = [doubt.sentence for doubt in far_off_the_forecast([water, iron, copper])]
    assert sentences == [
        "Water and iron are far above what the history led to expect.",
        "Copper is far below what the history led to expect.",
    ]


def test_an_ordinary_sample_has_no_doubt() -> None:
    values = {"p4": 402.0, "p6": 99.3, "p14": 6.8}
    sample = CandidateSample(NOVEMBER, values, parse_iso_code("16/14/10"), 25.0, 18_432)
    expectations = [count_expectation(9.4)]
    assert run_checks(sample, HISTORY, expectations=expectations, charge_began=OCTOBER) == []


def test_a_hundredfold_shift_is_told_once_but_other_quantities_still_speak() -> None:
    sample = CandidateSample(NOVEMBER, {size: 100 * count for size, count in USUAL.items()})
    water = Expectation("water", "Water", 9.0, mean=7.0, scale=0.2)
    doubts = run_checks(sample, HISTORY, expectations=[count_expectation(16.1), water])
    assert [doubt.code for doubt in doubts] == ["counts_shifted_hundredfold", "far_off_forecast"]


def test_every_doubt_is_told_in_reading_order() -> None:
    sample = CandidateSample(NOVEMBER, USUAL, parse_iso_code("19/17/13"), machine_hours=100)
    doubts = run_checks(
        sample,
        HISTORY,
        events=[PastEvent(NOVEMBER - timedelta(days=1), "element change", cleans=True)],
        charge_began=NOVEMBER + timedelta(days=1),
    )
    assert [doubt.code for doubt in doubts] == [
        *("code_disagrees_with_counts", "copy_of_the_last", "hours_backwards"),
        *("drawn_before_charge", "drawn_after_cleaning"),
    ]


def test_no_doubt_blames_a_person_and_each_says_what_settles_it() -> None:
    sample = CandidateSample(NOVEMBER, {"p4": 5e4, "p6": 9e4, "p14": 900}, machine_hours=99_999)
    doubts = [*run_checks(sample, HISTORY), *hard_errors(sample, OCTOBER)]
    assert len(doubts) >= 4
    for doubt in doubts:
        assert doubt.settles.endswith(".")
        assert not {"error", "mistake", "operator", "fault"} & set(doubt.sentence.casefold().split())


def test_what_cannot_be_true_is_a_hard_error() -> None:
    sample = CandidateSample(NOVEMBER, {"p4": 7.0, "p6": 96.0, "p14": 391.0})
    assert [doubt.code for doubt in hard_errors(sample, OCTOBER)] == ["counts_out_of_order", "drawn_in_future"]
    assert hard_errors(CandidateSample(NOVEMBER, USUAL), NOVEMBER) == []
