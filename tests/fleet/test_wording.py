"""Figures as people read them."""

from datetime import datetime, timedelta
from types import SimpleNamespace

import pytest

from fleet.wording import age_text, headroom_text, runway_aside, runway_text, signed
from tests.builders import NOON


def runway(state: str = "dated", **days: float | None) -> SimpleNamespace:
    def at(name: str) -> datetime | None:
        found = days.get(name)
        return None if found is None else NOON + timedelta(days=found)

    ends = {f"runway_{end}": at(end) for end in ("early", "median", "late")}
    return SimpleNamespace(runway=state, past_since=at("since"), **ends)


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.3, "+0.3"), (-2.4, "−2.4"), (-0.04, "0.0"), (0.0, "0.0"), (1.25, "+1.2"), (8955.04, "+8,955.0")],
)
def test_a_distance_carries_its_sign_and_never_a_minus_before_nothing(value: float, text: str) -> None:
    assert signed(value) == text


def test_headroom_is_steps_for_counts_and_percent_for_the_rest() -> None:
    assert headroom_text(-0.6, "steps") == "−0.6"
    assert headroom_text(-24.2, "%") == "−24 %"
    assert headroom_text(None, "steps") == ""


def test_a_runway_has_its_range() -> None:
    assert runway_text(runway(early=9, median=18, late=41), NOON) == "18 days (9 – 41)"


def test_a_long_runway_is_told_in_months() -> None:
    assert runway_text(runway(early=150, median=300, late=None), NOON) == "10 months (5 – beyond 24 months)"


def test_a_runway_whose_middle_lies_beyond_the_horizon_says_how_soon_it_could_be() -> None:
    only_early = runway(early=95)
    assert runway_text(only_early, NOON) == "95 days at the earliest"
    assert runway_aside(only_early) == "more likely beyond 24 months"


def test_past_beyond_and_refused_are_words() -> None:
    assert runway_text(runway("past", since=-20), NOON) == "passed 20 days ago"
    assert runway_text(runway("past", since=-0.2), NOON) == "passed today"
    assert runway_text(runway("beyond_horizon"), NOON) == "beyond 24 months"
    assert runway_text(runway("cannot_say"), NOON) == "cannot say"


def test_an_age_is_days_since_drawn() -> None:
    assert age_text(NOON - timedelta(days=13), NOON) == "13 d"
    assert age_text(None, NOON) == "no sample"
