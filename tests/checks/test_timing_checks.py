"""Doubts about dates and hours."""

from dataclasses import replace
from datetime import UTC, datetime, timedelta

import pytest

from samples.checks.candidates import CandidateSample, PastEvent, PastSample
from samples.checks.timing import (
    drawn_after_cleaning,
    drawn_before_the_charge,
    drawn_in_the_future,
    drawn_twice_a_day,
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


@pytest.mark.parametrize("hours", [-7, -0.1, 0, 0.1, 11.9])
def test_another_sample_of_the_day_or_of_half_a_day_is_doubted(hours: float) -> None:
    doubt = drawn_twice_a_day(SAMPLE, [past(None), past(None, DRAWN + timedelta(hours=hours))])
    assert doubt is not None
    assert doubt.code == "same_day"
    assert "reason" in doubt.settles


def test_a_sample_of_the_night_before_is_told_as_such() -> None:
    doubt = drawn_twice_a_day(SAMPLE, [past(None, DRAWN - timedelta(hours=8))])
    assert doubt is not None
    assert doubt.sentence == "Another sample of this point was drawn less than 12 hours before, on 8 Nov 2026."


@pytest.mark.parametrize("hours", [-12, 17])
def test_a_sample_of_another_day_and_half_a_day_away_is_fine(hours: float) -> None:
    assert drawn_twice_a_day(SAMPLE, [past(None, DRAWN + timedelta(hours=hours))]) is None


@pytest.mark.parametrize("reason", ["resample", "after_correction", "after_repair", "new_oil"])
def test_a_reason_to_draw_again_settles_it_beforehand(reason: str) -> None:
    assert drawn_twice_a_day(replace(SAMPLE, reason=reason), [past(None, DRAWN)]) is None


@pytest.mark.parametrize(
    ("reason", "doubted"),
    [("after_correction", False), ("after_repair", False), ("new_oil", False), ("resample", True), ("routine", True)],
)
def test_a_sample_drawn_to_show_the_cleaning_is_not_doubted_for_it(reason: str, doubted: bool) -> None:
    assert (drawn_after_cleaning(replace(SAMPLE, reason=reason), cleaning(1)) is not None) is doubted


def test_days_are_told_as_people_write_them() -> None:
    doubt = drawn_before_the_charge(SAMPLE, DRAWN + timedelta(days=10))
    assert doubt is not None
    assert doubt.sentence == "The sample was drawn on 9 Nov 2026, before this oil was filled in (19 Nov 2026)."
