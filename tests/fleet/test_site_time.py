"""The clock of a site. Dates of the clock changes: IANA time zone database."""

from datetime import UTC, datetime
from zoneinfo import ZoneInfo

import pytest

from fleet.site_time import moment_at, written_at

VIENNA = ZoneInfo("Europe/Vienna")


def clock(month: int, day: int, hour: int, minute: int = 0) -> datetime:
    """What the clock on the wall shows: it knows no zone."""
    return datetime(2026, month, day, hour, minute)  # noqa: DTZ001


@pytest.mark.parametrize(("month", "hour_utc"), [(1, 11), (7, 10)])
def test_noon_at_the_site_is_another_moment_in_summer(month: int, hour_utc: int) -> None:
    assert moment_at(clock(month, 1, 12), VIENNA) == datetime(2026, month, 1, hour_utc, tzinfo=UTC)


def test_an_hour_that_the_clocks_skipped_is_refused() -> None:
    with pytest.raises(ValueError, match="did not exist"):
        moment_at(clock(3, 29, 2, 30), VIENNA)


def test_of_a_doubled_hour_the_first_is_meant() -> None:
    assert moment_at(clock(10, 25, 2, 30), VIENNA) == datetime(2026, 10, 25, 0, 30, tzinfo=UTC)


@pytest.mark.parametrize("written", [clock(3, 29, 3), clock(10, 25, 2), clock(6, 1, 0, 1)])
def test_what_was_written_is_read_back(written: datetime) -> None:
    assert written_at(moment_at(written, VIENNA), VIENNA) == written
