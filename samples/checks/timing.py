"""Checks of when a sample was drawn, and at how many running hours."""

from collections.abc import Sequence
from datetime import datetime, timedelta
from typing import Final

from samples.checks.candidates import CandidateSample, Doubt, PastEvent, PastSample, latest_before

DAYS_AFTER_CLEANING: Final = 3
_METER_TOLERANCE_HOURS: Final = 24.0


def drawn_in_the_future(candidate: CandidateSample, as_of: datetime) -> Doubt | None:
    if candidate.drawn_at <= as_of:
        return None
    return Doubt(
        "drawn_in_future",
        f"The sample is dated {candidate.drawn_at.date().isoformat()}, which is still to come.",
        "Check the date on the bottle or on the round sheet.",
    )


def drawn_before_the_charge(candidate: CandidateSample, charge_began: datetime | None) -> Doubt | None:
    if charge_began is None or candidate.drawn_at >= charge_began:
        return None
    return Doubt(
        "drawn_before_charge",
        f"The sample was drawn on {candidate.drawn_at.date().isoformat()}, before this oil was filled in "
        f"({charge_began.date().isoformat()}).",
        "Check the date drawn, and the date of the oil change.",
    )


def drawn_after_cleaning(candidate: CandidateSample, events: Sequence[PastEvent]) -> Doubt | None:
    """Drawn within three days after an event that takes particles out: it shows the event, not the reservoir."""
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
        f"({event.ended_at.date().isoformat()}). It may look better than the oil will stay.",
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
        f"{previous.drawn_at.date().isoformat()}.",
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
        f"The meter gained {gained:,.0f} h since {previous.drawn_at.date().isoformat()}, "
        f"but only {passed:,.0f} h have passed.",
        "Read the meter again, and check both dates.",
    )


def _latest_with_hours(candidate: CandidateSample, history: Sequence[PastSample]) -> PastSample | None:
    return latest_before(candidate.drawn_at, [past for past in history if past.machine_hours is not None])
