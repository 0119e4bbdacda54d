"""When a sample was drawn, from a day and perhaps a time of day on the site's clock."""

from __future__ import annotations

from datetime import date, datetime, time
from zoneinfo import ZoneInfo

from fleet.site_time import moment_at

NOON = time(12)


def drawn_moment(day: date, clock: time | None, zone: ZoneInfo, now: datetime) -> datetime:
    """The moment; a day without a time stands for its noon, or for its first minute while noon is still to come.

    :raises ValueError: when the clocks skipped that time
    """
    if clock is not None:
        return moment_at(datetime.combine(day, clock), zone)
    noon = moment_at(datetime.combine(day, NOON), zone)
    return noon if noon <= now else moment_at(datetime.combine(day, time.min), zone)
