"""Checks of when a sample was drawn, and at how many running hours."""

from collections.abc import Sequence
from datetime import datetime, timedelta
from typing import Final

from samples.checks.candidates import CandidateSample, Doubt, PastEvent, PastSample, day_of, latest_before

DAYS_AFTER_CLEANING: Final = 3
HOURS_BETWEEN_SAMPLES: Final = 12
_METER_TOLERANCE_HOURS: Final = 24.0
# Why a sample is drawn when the oil is meant to have changed, or has not been in service at all.
_AFTER_A_CHANGE: Final = frozenset({"after_correction", "after_repair", "new_oil"})
_DRAWN_AGAIN: Final = _AFTER_A_CHANGE | {"resample"}


def drawn_in_the_future(candidate: CandidateSample, as_of: datetime) -> Doubt | None:
    if candidate.drawn_at <= as_of:
        return None
    return Doubt(
        "drawn_in_future",
        f"The sample is dated {day_of(candidate.drawn_at)}, which is still to come.",
        "Check the date on the bottle or on the round sheet.",
    )


def drawn_before_the_charge(candidate: CandidateSample, charge_began: datetime | None) -> Doubt | None:
    if charge_began is None or candidate.drawn_at >= charge_began:
        return None
    return Doubt(
        "drawn_before_charge",
        f"The sample was drawn on {day_of(candidate.drawn_at)}, before this oil was filled in "
        f"({day_of(charge_began)}).",
        "Check the date drawn, and the date of the oil change.",
    )


def drawn_twice_a_day(candidate: CandidateSample, others: Sequence[PastSample]) -> Doubt | None:
    """Another sample of the point on the same day, or less than twelve hours away, that no reason given explains.

    Args:
        others: the samples of this sample point that are not set aside, before and after this one. Days are those of
            the zone in which the moments are given, so give them on the site's clock.
    """
    if candidate.reason in _DRAWN_AGAIN:
        return None
    close = [other for other in others if _is_close(other.drawn_at, candidate.drawn_at)]
    if not close:
        return None
    other = min(close, key=lambda each: abs(each.drawn_at - candidate.drawn_at))
    return Doubt(
        "same_day",
        f"Another sample of this point was drawn {_how_close(other.drawn_at, candidate.drawn_at)}.",
        "If the bottle was filled again on purpose, give that as the reason it was drawn. If not, check date and "
        "sample point: it may be the same bottle twice, or another reservoir's.",
    )


def drawn_after_cleaning(candidate: CandidateSample, events: Sequence[PastEvent]) -> Doubt | None:
    """Drawn within three days after an event that takes particles out: it shows the event, not the reservoir.

    None where the reason given says that it was drawn to show the change.
    """
    if candidate.reason in _AFTER_A_CHANGE:
        return None
    window = timedelta(days=DAYS_AFTER_CLEANING)
    recent = [
        event for event in events if event.cleans and timedelta(0) <= candidate.drawn_at - event.ended_at <= window
    ]
    if not recent:
        return None
    event = max(recent, key=lambda each: each.ended_at)
    return Doubt(
        "drawn_after_cleaning",
        f"The sample was drawn within {DAYS_AFTER_CLEANING} days after: {event.name} "
        f"({day_of(event.ended_at)}). It may look better than the oil will stay.",
        "The next sample in the usual rhythm settles it.",
    )


def hours_backwards(candidate: CandidateSample, history: Sequence[PastSample]) -> Doubt | None:
    """Machine hours [h] below those of an earlier sample."""
    hours, previous = candidate.machine_hours, _latest_with_hours(candidate, history)
    if hours is None or previous is None or previous.machine_hours is None or hours >= previous.machine_hours:
        return None
    return Doubt(
        "hours_backwards",
        f"The meter reads {hours:,.0f} h, less than the {previous.machine_hours:,.0f} h of "
        f"{day_of(previous.drawn_at)}.",
        "Read the meter again. If it was replaced or reset, log that as an event.",
    )


def hours_faster_than_the_clock(candidate: CandidateSample, history: Sequence[PastSample]) -> Doubt | None:
    """More machine hours [h] since the last sample than hours have passed, with one day's tolerance."""
    hours, previous = candidate.machine_hours, _latest_with_hours(candidate, history)
    if hours is None or previous is None or previous.machine_hours is None:
        return None
    passed = (candidate.drawn_at - previous.drawn_at).total_seconds() / 3600
    gained = hours - previous.machine_hours
    if gained <= passed + _METER_TOLERANCE_HOURS:
        return None
    return Doubt(
        "hours_faster_than_clock",
        f"The meter gained {gained:,.0f} h since {day_of(previous.drawn_at)}, but only {passed:,.0f} h have passed.",
        "Read the meter again, and check both dates.",
    )


def _latest_with_hours(candidate: CandidateSample, history: Sequence[PastSample]) -> PastSample | None:
    return latest_before(candidate.drawn_at, [past for past in history if past.machine_hours is not None])


def _is_close(one: datetime, other: datetime) -> bool:
    return one.date() == other.date() or abs(one - other) < timedelta(hours=HOURS_BETWEEN_SAMPLES)


def _how_close(other: datetime, drawn_at: datetime) -> str:
    if other.date() == drawn_at.date():
        return f"on the same day, {day_of(other)}"
    return f"less than {HOURS_BETWEEN_SAMPLES} hours {'before' if other < drawn_at else 'after'}, on {day_of(other)}"
