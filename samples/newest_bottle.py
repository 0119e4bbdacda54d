"""Counts come from one bottle: those of an older one have had their say."""

from collections.abc import Callable, Iterable
from datetime import datetime
from typing import TypeVar

T = TypeVar("T")


def of_newest_bottle(rows: Iterable[T], drawn_at: Callable[[T], datetime | None]) -> list[T]:
    """Those rows of one family that come from the bottle drawn last, in the order given; all where none was drawn.

    Give it the rows that have a target or a limit, so that a size nobody judges does not silence those that are. When a
    plant goes from a microscope to a counter, the last microscope count says no more.
    """
    found = list(rows)
    newest = max((moment for row in found if (moment := drawn_at(row)) is not None), default=None)
    return [row for row in found if drawn_at(row) == newest]
