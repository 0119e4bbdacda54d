"""Figures as people read them: headroom with its sign, a runway with its range, an age in days."""

from __future__ import annotations

from datetime import datetime
from typing import Protocol

MINUS = "\N{MINUS SIGN}"
HORIZON_MONTHS = 24
BEYOND = f"beyond {HORIZON_MONTHS} months"
LONG_DAYS = 120
DAYS_A_MONTH = 30.4375


class HasRunway(Protocol):
    """What a standing and an outlook have in common."""

    runway: str
    runway_early: datetime | None
    runway_median: datetime | None
    runway_late: datetime | None
    past_since: datetime | None


def signed(value: float, decimals: int = 1) -> str:
    """+1.2, −0.6 or 0.0, with a true minus and never a minus before nothing."""
    rounded = round(value, decimals)
    sign = "+" if rounded > 0 else MINUS if rounded < 0 else ""
    return f"{sign}{abs(rounded):,.{decimals}f}"


def number_text(value: float, decimals: int = 1) -> str:
    """With thousands apart, never in powers of ten, and without decimals that a figure of that size does not have.

    >>> number_text(1740.0), number_text(63.04), number_text(10000.0), number_text(0.64, 0)
    ('1,740', '63.0', '10,000', '0.64')
    """
    if abs(value) >= 100:
        return f"{value:,.0f}"
    if decimals == 0 and value != round(value):
        return f"{value:.3g}"
    return f"{value:.{decimals}f}"


def bound_text(value: float) -> str:
    """A bound as short as it can be written: 0.64, 20, 10,000."""
    return f"{value:,.0f}" if abs(value) >= 100 or value == round(value) else f"{value:g}"


def headroom_text(headroom: float | None, unit: str) -> str:
    if headroom is None:
        return ""
    return f"{signed(headroom, 0)} %" if unit == "%" else signed(headroom)


def days_between(earlier: datetime, later: datetime) -> int:
    return max(round((later - earlier).total_seconds() / 86400), 0)


def age_text(drawn_at: datetime | None, as_of: datetime) -> str:
    return "no sample" if drawn_at is None else f"{days_between(drawn_at, as_of)} d"


def span_text(days: int) -> str:
    """Days while they can be planned by, months after that."""
    if days <= LONG_DAYS:
        return f"{days} day" if days == 1 else f"{days} days"
    return f"{round(days / DAYS_A_MONTH)} months"


def runway_text(outlook: HasRunway, as_of: datetime) -> str:
    """“18 days (9 – 41)”, “35 days at the earliest”, “beyond 24 months”, “passed 20 days ago” or “cannot say”."""
    if outlook.runway == "past":
        return _passed_text(outlook.past_since, as_of)
    if outlook.runway == "beyond_horizon":
        return BEYOND
    if outlook.runway != "dated":
        return "cannot say"
    return _dated_text(outlook, as_of)


def _passed_text(since: datetime | None, as_of: datetime) -> str:
    if since is None:
        return "past already"
    days = days_between(since, as_of)
    return f"passed {span_text(days)} ago" if days else "passed today"


def runway_aside(outlook: HasRunway) -> str:
    """What must be added where only the early end of the range lies within the horizon."""
    only_early = outlook.runway == "dated" and outlook.runway_median is None
    return f"more likely {BEYOND}" if only_early else ""


def _dated_text(outlook: HasRunway, as_of: datetime) -> str:
    early, median, late = (
        None if moment is None else days_between(as_of, moment)
        for moment in (outlook.runway_early, outlook.runway_median, outlook.runway_late)
    )
    if median is None:
        return f"{span_text(early or 0)} at the earliest" if early else "any day at the earliest"
    long = median > LONG_DAYS
    low = _end(early, long) if early else "now"
    high = _end(late, long) if late is not None else BEYOND
    return f"{span_text(median)} ({low} – {high})"


def _end(days: int, months: bool) -> str:
    return str(round(days / DAYS_A_MONTH)) if months else str(days)
