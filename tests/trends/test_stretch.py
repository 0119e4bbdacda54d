"""What restarts a trend, and which samples then belong together."""

import numpy as np
import pytest

from samples.trends.stretch import EventKind, EventMark, Family, latest, resets, segment_numbers, split

ALL = set(Family)
TABLE = {
    EventKind.OIL_CHANGE: ALL,
    EventKind.PARTIAL_CHANGE: ALL,
    EventKind.TOP_UP: ALL,
    EventKind.LABORATORY_CHANGE: ALL,
    EventKind.ELEMENT_CHANGE: {Family.DIRT},
    EventKind.OFFLINE_RUN: {Family.DIRT},
    EventKind.BREATHER: {Family.DIRT},
    EventKind.FILTER_REPAIR: {Family.DIRT},
    EventKind.WATER_REMOVED: {Family.DIRT, Family.WATER},
    EventKind.WEAR_REPAIR: {Family.DIRT, Family.WEAR},
    EventKind.REPAIR_OTHER: set(),
    EventKind.METER_REPLACED: set(),
    EventKind.OTHER: set(),
}


@pytest.mark.parametrize("kind", list(EventKind))
def test_an_event_resets_what_it_acts_on(kind: EventKind) -> None:
    assert {family for family in Family if resets(kind, family, None, 500.0)} == TABLE[kind]


@pytest.mark.parametrize(
    ("litres", "volume", "expected"),
    [(49.0, 500.0, False), (50.0, 500.0, True), (None, 500.0, True), (10.0, None, True)],
)
def test_a_small_known_top_up_changes_nothing(litres: float | None, volume: float | None, expected: bool) -> None:
    assert resets(EventKind.TOP_UP, Family.WATER, litres, volume) is expected
    assert resets(EventKind.PARTIAL_CHANGE, Family.DIRT, litres, volume) is expected
    assert resets(EventKind.OIL_CHANGE, Family.WEAR, litres, volume)


def test_the_chart_breaks_where_the_trend_restarts() -> None:
    events = [EventMark(25.0, EventKind.OTHER), EventMark(35.0, EventKind.ELEMENT_CHANGE)]
    days = [10.0, 20.0, 30.0, 40.0, 50.0]
    first, second = split(days, ["A"] * 5, events, Family.DIRT, 500.0)
    assert first.positions.tolist() == [0, 1, 2]
    assert (second.positions.tolist(), second.begun_by) == ([3, 4], 1)
    assert len(split(days, ["A"] * 5, events, Family.WATER, 500.0)) == 1


def test_samples_of_two_laboratories_run_side_by_side() -> None:
    found = split([1.0, 2.0, 3.0, 4.0], ["A", "B", "A", "B"], [], Family.DIRT, None)
    assert [s.positions.tolist() for s in found] == [[0, 2], [1, 3]]
    assert [s.key for s in found] == ["A", "B"]


def test_samples_in_any_order_come_out_in_order_of_drawing() -> None:
    (only,) = split([30.0, 10.0, 20.0], ["A"] * 3, [], Family.DIRT, None)
    assert only.positions.tolist() == [1, 2, 0]


def test_a_sample_drawn_with_the_event_is_of_the_oil_after_it() -> None:
    events = [EventMark(20.0, EventKind.OIL_CHANGE)]
    before, after = split([10.0, 20.0, 20.5], ["A"] * 3, events, Family.DIRT, None)
    assert (before.positions.tolist(), after.positions.tolist()) == ([0], [1, 2])


def test_the_current_stretch_is_that_of_the_latest_sample() -> None:
    days = [1.0, 2.0, 3.0, 4.0]
    found = latest(split(days, ["A", "B", "A", "A"], [], Family.DIRT, None), days)
    assert found is not None
    assert found.positions.tolist() == [0, 2, 3]
    assert latest([], []) is None


def test_segments_of_many_samples_are_counted_at_once() -> None:
    assert segment_numbers(np.array([1.0, 5.0, 5.1, 9.0]), np.array([5.0, 9.0])).tolist() == [0, 1, 1, 2]
