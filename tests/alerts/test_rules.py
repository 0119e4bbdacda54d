"""The rules by themselves, without a database: which speaks, how grave it is, and what shows that it is over."""

from dataclasses import replace
from datetime import UTC, datetime, timedelta
from itertools import pairwise
from typing import Any

import pytest

from alerts.models import Rule
from alerts.rules import (
    Finding,
    Kind,
    OpenFacts,
    OutlookFacts,
    ReservoirFacts,
    RuleFacts,
    grace,
    is_recent,
    judge,
    proof_it_is_over,
    weight,
)

NOW = datetime(2026, 6, 1, 12, tzinfo=UTC)
DRAWN = NOW - timedelta(days=2)
RULES = [
    RuleFacts(Kind.PAST_LIMIT),
    RuleFacts(Kind.FORECAST, within_days=30, least_chance=0.2),
    RuleFacts(Kind.OVER_TARGET, mails=False),
    RuleFacts(Kind.OVERDUE, mails=False),
]


def outlook(**more: Any) -> OutlookFacts:
    facts: dict[str, Any] = {
        "key": "water",
        "name": "Water",
        "family": "water",
        "word": "within_target",
        "drawn_at": DRAWN,
        "sample_id": 1,
    }
    return OutlookFacts(**(facts | {"target_high": 200.0, "limit_high": 500.0, "headroom": 40.0} | more))


def findings(*outlooks: OutlookFacts, rules: list[RuleFacts] = RULES, **more: Any) -> list[Finding]:
    facts: dict[str, Any] = {"criticality": "B", "interval_days": 60, "zone": UTC, "outlooks": outlooks} | more
    return judge(ReservoirFacts(**facts), rules, NOW)


def kinds(*outlooks: OutlookFacts, **more: Any) -> list[Kind]:
    return [finding.kind for finding in findings(*outlooks, **more)]


def test_the_kinds_are_those_of_the_table() -> None:
    assert [kind.value for kind in Kind] == Rule.Kind.values


def test_kinds_run_from_gravest_to_least() -> None:
    assert all(graver.is_graver_than(other) for graver, other in pairwise(Kind))
    assert not Kind.FORECAST.is_graver_than(Kind.FORECAST)


def test_weight_sorts_by_rule_and_then_by_criticality() -> None:
    weights = [weight(kind, criticality) for kind in Kind for criticality in "ABC"]
    assert weights == list(range(12))


@pytest.mark.parametrize(
    ("facts", "speaks"),
    [
        ({}, []),
        ({"word": "cannot_tell"}, []),
        ({"word": "no_current_sample"}, []),
        ({"word": "over_target"}, [Kind.OVER_TARGET]),
        ({"word": "past_limit"}, [Kind.PAST_LIMIT]),
        ({"word": "past_limit", "chance": 0.9}, [Kind.PAST_LIMIT]),
        ({"word": "over_target", "chance": 0.2}, [Kind.FORECAST]),
        ({"chance": 0.2}, [Kind.FORECAST]),
        ({"chance": 0.19}, []),
        ({"runway": "dated", "runway_median": NOW + timedelta(days=30)}, [Kind.FORECAST]),
        ({"runway": "dated", "runway_median": NOW + timedelta(days=31)}, []),
        ({"runway": "dated", "runway_median": None}, []),
        ({"runway": "cannot_say", "runway_median": NOW}, []),
        ({"word": "past_limit", "drawn_at": None}, []),
    ],
)
def test_the_gravest_rule_that_applies_speaks(facts: dict[str, Any], speaks: list[Kind]) -> None:
    assert kinds(outlook(**facts)) == speaks


def test_a_good_value_against_its_trend_makes_no_forecast() -> None:
    good = outlook(chance=0.9, headroom=60.0, level_headroom=5.0)
    assert kinds(good) == []
    assert kinds(replace(good, level_headroom=50.5)) == [Kind.FORECAST]
    assert kinds(replace(good, word="over_target")) == [Kind.FORECAST]


@pytest.mark.parametrize(("least", "heard"), [("A", "A"), ("B", "AB"), ("C", "ABC")])
def test_a_rule_is_for_its_criticality_and_above(least: str, heard: str) -> None:
    rules = [RuleFacts(Kind.PAST_LIMIT, least_criticality=least)]
    past = outlook(word="past_limit")
    assert [c for c in "ABC" if findings(past, rules=rules, criticality=c)] == list(heard)


def test_the_worst_of_a_family_speaks_by_rule_first_and_headroom_second() -> None:
    iron, copper, tin = (
        outlook(key=key, name=key, family="wear", word=word, headroom=headroom)
        for key, word, headroom in (
            ("fe", "over_target", 5.0),
            ("cu", "past_limit", -10.0),
            ("sn", "past_limit", -40.0),
        )
    )
    (finding,) = findings(iron, copper, tin)
    assert finding.speaker == tin
    assert [companion.outlook.key for companion in finding.companions] == ["cu", "fe"]


def test_counts_of_an_older_bottle_have_had_their_say() -> None:
    old = outlook(key="p15m", family="dirt", is_count=True, word="past_limit", drawn_at=DRAWN - timedelta(days=40))
    new = outlook(key="p14", family="dirt", is_count=True)
    assert kinds(old, new) == []
    assert kinds(old) == [Kind.PAST_LIMIT]


def test_a_size_that_nobody_judges_silences_no_other() -> None:
    old = outlook(key="p14", family="dirt", is_count=True, word="past_limit", drawn_at=DRAWN - timedelta(days=40))
    new = outlook(key="p38", family="dirt", is_count=True, word="cannot_tell", target_high=None, limit_high=None)
    assert kinds(old, new) == [Kind.PAST_LIMIT]


@pytest.mark.parametrize(
    ("days_late", "grace_days", "speaks"), [(5.9, None, 0), (6.1, None, 1), (1.9, 2, 0), (2.1, 2, 1)]
)
def test_a_sample_is_overdue_after_the_grace(days_late: float, grace_days: int | None, speaks: int) -> None:
    rules = [RuleFacts(Kind.OVERDUE, grace_days=grace_days)]
    assert len(findings(rules=rules, next_due_at=NOW - timedelta(days=days_late))) == speaks


def test_the_grace_of_no_days_is_none() -> None:
    assert grace(RuleFacts(Kind.OVERDUE, grace_days=0), 60) == timedelta(0)
    assert grace(RuleFacts(Kind.OVERDUE), 60) == timedelta(days=6)


@pytest.mark.parametrize(
    ("age", "interval", "recent"), [(90, 30, True), (91, 30, False), (120, 60, True), (121, 60, False)]
)
def test_recent_is_two_intervals_or_ninety_days(age: int, interval: int, recent: bool) -> None:
    assert is_recent(NOW - timedelta(days=age), interval, NOW) == recent


OPEN = OpenFacts("water", Kind.PAST_LIMIT, since=DRAWN - timedelta(days=30), measurand_key="water")


@pytest.mark.parametrize(
    ("facts", "kind", "over"),
    [
        ({}, Kind.PAST_LIMIT, True),
        ({"word": "over_target", "headroom": 10.0}, Kind.PAST_LIMIT, True),
        ({"word": "over_target", "headroom": 9.9}, Kind.PAST_LIMIT, False),
        ({"word": "over_target", "headroom": 50.0}, Kind.OVER_TARGET, False),
        ({"word": "cannot_tell", "headroom": 10.0}, Kind.FORECAST, True),
        ({"word": "cannot_tell", "headroom": None}, Kind.PAST_LIMIT, False),
        ({"target_high": None, "headroom": 9.0}, Kind.PAST_LIMIT, False),
        ({"target_high": None, "headroom": 11.0}, Kind.PAST_LIMIT, True),
        ({"is_count": True, "word": "over_target", "headroom": 1.0}, Kind.PAST_LIMIT, True),
        ({"is_count": True, "word": "over_target", "headroom": 0.9}, Kind.PAST_LIMIT, False),
        ({"word": "no_current_sample"}, Kind.PAST_LIMIT, False),
        ({"drawn_at": OPEN.since}, Kind.PAST_LIMIT, False),
        ({"key": "other"}, Kind.PAST_LIMIT, False),
        ({"headroom": 60.0, "level_headroom": 5.0}, Kind.PAST_LIMIT, False),
    ],
)
def test_what_shows_that_it_is_over(facts: dict[str, Any], kind: Kind, over: bool) -> None:
    reservoir = ReservoirFacts("B", 60, UTC, outlooks=[outlook(**facts)])
    assert (proof_it_is_over(replace(OPEN, kind=kind), reservoir) is not None) == over


def test_a_second_good_value_settles_it_against_the_trend() -> None:
    reservoir = ReservoirFacts("B", 60, UTC, outlooks=[outlook(headroom=60.0, level_headroom=5.0)])
    assert proof_it_is_over(replace(OPEN, was_better=True), reservoir) is not None
