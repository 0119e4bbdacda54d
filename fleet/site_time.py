"""The clock of a site: what a person there types and reads, and the moment it means."""

from datetime import UTC, datetime
from zoneinfo import ZoneInfo

GAP = "That hour did not exist: the clocks were put forward. Give the time after the change."


def moment_at(written: datetime, zone: ZoneInfo) -> datetime:
    """The moment, in UTC, that a clock of the site showed as `written` (without a zone). Of a doubled hour, the first.

    :raises ValueError: when the clocks skipped it

    >>> moment_at(datetime(2026, 7, 1, 12), ZoneInfo("Europe/Vienna")).hour
    10
    """
    moment = written.replace(tzinfo=zone, fold=0).astimezone(UTC)
    if moment.astimezone(zone).replace(tzinfo=None, fold=0) != written:
        raise ValueError(GAP)
    return moment


def written_at(moment: datetime, zone: ZoneInfo) -> datetime:
    """What the site's clock shows at that moment, to the minute and without a zone, as a form holds it."""
    return moment.astimezone(zone).replace(tzinfo=None, second=0, microsecond=0, fold=0)
