"""Which rows of a family speak: those of the bottle that was drawn last."""

from datetime import UTC, datetime

import pytest

from samples.newest_bottle import of_newest_bottle

MAY, JUNE = datetime(2026, 5, 1, tzinfo=UTC), datetime(2026, 6, 1, tzinfo=UTC)


@pytest.mark.parametrize(
    ("drawn", "left"),
    [
        ({}, []),
        ({"p5": MAY, "p4": JUNE, "p14": JUNE}, ["p4", "p14"]),
        ({"p5": JUNE, "p4": MAY, "p14": None}, ["p5"]),
        ({"p4": None, "p14": None}, ["p4", "p14"]),
    ],
)
def test_only_the_newest_bottle_speaks(drawn: dict[str, datetime | None], left: list[str]) -> None:
    assert of_newest_bottle(drawn, drawn.__getitem__) == left
