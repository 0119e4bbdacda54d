"""Doubts about dates and hours."""

from datetime import UTC, datetime, timedelta

import pytest

from samples.checks.candidates import CandidateSample, PastEvent, PastSample
from samples.checks.timing import (
    drawn_after_cleaning,
    drawn_before_the_charge,
    drawn_in_the_future,
    hours_backwards,
    hours_faster_than_the_clock,
)

DRAWN = datetime(2026, 11, 9, 7, 40, tzinfo=UTC)
MONTH_AGO = DRAWN - timedelta(days=28)
SAMPLE = CandidateSample(DRAWN, machine_hours=18_432)


def past(hours: float | None, drawn_at: datetime = MONTH_AGO) -> PastSample:
    return PastSample(drawn_at, machine_hours=hours)


def cleaning(days_before: float, *, cleans: bool = True) -> list[PastEvent]:
    return [PastEvent(DRAWN - timedelta(days=days_before), "offline filtration", cleans)]


def test_a_sample_from_the_future_is_doubted() -> None:
    assert drawn_in_the_future(SAMPLE, DRAWN - timedelta(minutes=1)) is not None
    assert drawn_in_the_future(SAMPLE, DRAWN) is None


def test_a_sample_older_than_its_oil_is_doubted() -> None:
    assert drawn_before_the_charge(SAMPLE, DRAWN + timedelta(days=1)) is not None
    assert drawn_before_the_charge(SAMPLE, DRAWN) is None
    assert drawn_before_the_charge(SAMPLE, None) is None


@pytest.mark.parametrize("days", [0, 1, 3])
def test_a_sample_within_three_days_of_cleaning_is_doubted(days: float) -> None:
    doubt = drawn_after_cleaning(SAMPLE, cleaning(days))
    assert doubt is not None
    assert "offline filtration" in doubt.sentence


@pytest.mark.parametrize("days", [3.1, 30, -1])
def test_cleaning_long_ago_or_afterwards_does_not_matter(days: float) -> None:
    assert drawn_after_cleaning(SAMPLE, cleaning(days)) is None


def test_an_event_that_does_not_clean_does_not_matter() -> None:
    assert drawn_after_cleaning(SAMPLE, cleaning(1, cleans=False)) is None


def test_hours_below_the_last_reading_are_doubted() -> None:
    doubt = hours_backwards(SAMPLE, [past(18_500)])
    assert doubt is not None
    assert "18,432 h" in doubt.sentence
    assert "18,500 h" in doubt.sentence


def test_hours_are_held_against_the_last_sample_that_has_them() -> None:
    history = [past(18_500, MONTH_AGO - timedelta(days=28)), past(None), past(99_999, DRAWN + timedelta(days=1))]
    assert hours_backwards(SAMPLE, history) is not None
    assert hours_backwards(SAMPLE, [*history, past(17_961, DRAWN - timedelta(days=20))]) is None


@pytest.mark.parametrize("hours", [18_432, 17_961])
def test_equal_or_growing_hours_are_fine(hours: float) -> None:
    assert hours_backwards(SAMPLE, [past(hours)]) is None


def test_more_hours_than_passed_are_doubted() -> None:
    assert hours_faster_than_the_clock(SAMPLE, [past(18_432 - 28 * 24 - 25)]) is not None
    assert hours_faster_than_the_clock(SAMPLE, [past(18_432 - 28 * 24 - 24)]) is None


def test_without_hours_or_history_there_is_nothing_to_doubt() -> None:
    for history in ([], [past(None)]):
        assert hours_backwards(SAMPLE, history) is None
        assert hours_faster_than_the_clock(SAMPLE, history) is None
    assert hours_backwards(CandidateSample(DRAWN), [past(18_500)]) is None
