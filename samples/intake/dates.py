"""Dates and times of day as laboratories and people write them. Pure."""

import re
from dataclasses import dataclass
from datetime import date, time
from typing import Final, Literal

from samples.problems import Problem

EARLIEST_YEAR: Final = 1970
_MONTHS: Final = ("jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec")
_CLOCK: Final = r"(?:(?:\s+|T|,\s*)(?P<clock>[0-9]{1,2}[:.h][0-9]{2}(?:[:.][0-9]{2}(?:[.,][0-9]+)?)?))?"
_YEAR_FIRST: Final = re.compile(rf"(?P<year>[0-9]{{4}})([-/.])(?P<month>[0-9]{{1,2}})\2(?P<day>[0-9]{{1,2}}){_CLOCK}")
_DAY_FIRST: Final = re.compile(
    rf"(?P<day>[0-9]{{1,2}})([-/.])\s?(?P<month>[0-9]{{1,2}})\2\s?(?P<year>[0-9]{{4}}|[0-9]{{2}}){_CLOCK}"
)
_NAMED: Final = re.compile(
    rf"(?P<day>[0-9]{{1,2}})[-. ]\s*(?P<name>[A-Za-z]{{3,9}})\.?[-, ]\s*(?P<year>[0-9]{{4}}){_CLOCK}"
)
_TIME: Final = re.compile(r"(?P<hour>[0-9]{1,2})[:.h](?P<minute>[0-9]{2})(?:[:.](?P<second>[0-9]{2})(?:[.,][0-9]+)?)?")


Order = Literal["", "either", "month_first"]


@dataclass(frozen=True, slots=True)
class ReadDate:
    """``day`` and, where one was written, the time of day ``at``; or a ``problem``; or all None for an empty text.

    ``order``: "either" where day and month could also be the other way round (3/4/2026; with dots the day always comes
    first), "month_first" where only that makes a date.
    """

    day: date | None = None
    at: time | None = None
    order: Order = ""
    problem: Problem | None = None


def read_date(text: str) -> ReadDate:
    """Read a date with or without a time of day, as the site's clock shows it.

    Accepts ``2026-11-09``, ``2026-11-09T07:40``, ``9.11.2026 07:40``, ``9/11/2026``, ``9.11.26``, ``9 Nov 2026``.
    With numbers only, the day comes first; where that is impossible (``11/25/2026``) the month does. Two-digit years
    are 20xx.

    Never raises. Problem codes: ``date_unreadable``, ``date_impossible``, ``date_too_old``.

    >>> read_date("9.11.2026 07:40").at
    datetime.time(7, 40)
    """
    cleaned = " ".join(text.split())
    if not cleaned:
        return ReadDate()
    match = _YEAR_FIRST.fullmatch(cleaned) or _DAY_FIRST.fullmatch(cleaned) or _NAMED.fullmatch(cleaned)
    month = _month_of(match) if match is not None else None
    if match is None or month is None:
        return _failed(
            "date_unreadable", f"“{cleaned[:30]}” is not a date. Write it like 9 Nov 2026, 9.11.2026 or 2026-11-09."
        )
    day = _day_of(match, month)
    clock = read_time(match["clock"] or "")
    if day is None or clock.problem is not None:
        return _failed("date_impossible", f"“{cleaned[:30]}” is not in the calendar. Check day, month and time.")
    if day.year < EARLIEST_YEAR:
        return _failed("date_too_old", f"“{cleaned[:30]}” is before {EARLIEST_YEAR}. Check the year.")
    return ReadDate(day, clock.at, _order(match))


def read_time(text: str) -> ReadDate:
    """Read a time of day (``07:40``, ``7.40``, ``07:40:15``); seconds are dropped. Empty text: nothing. Never raises.

    Problem code: ``time_unreadable``.
    """
    cleaned = text.strip()
    if not cleaned:
        return ReadDate()
    match = _TIME.fullmatch(cleaned)
    if match is None or int(match["hour"]) > 23 or int(match["minute"]) > 59:
        return _failed("time_unreadable", f"“{cleaned[:30]}” is not a time of day. Write it like 07:40.")
    return ReadDate(at=time(int(match["hour"]), int(match["minute"])))


def _order(match: re.Match[str]) -> Order:
    if match.re is not _DAY_FIRST:
        return ""
    day, month = int(match["day"]), int(match["month"])
    if month > 12:
        return "month_first"
    return "either" if day <= 12 and day != month and "." not in match[0][: match.start("year")] else ""


def _month_of(match: re.Match[str]) -> int | None:
    groups = match.groupdict()
    if "month" in groups:
        return int(groups["month"])
    name = groups["name"][:3].casefold()
    return _MONTHS.index(name) + 1 if name in _MONTHS else None


def _day_of(match: re.Match[str], month: int) -> date | None:
    year = int(match["year"]) + (2000 if len(match["year"]) == 2 else 0)
    day = int(match["day"])
    if match.re is _DAY_FIRST and month > 12 >= day:
        day, month = month, day
    try:
        return date(year, month, day)
    except ValueError:
        return None


def _failed(code: str, sentence: str) -> ReadDate:
    return ReadDate(problem=Problem(code, sentence))
