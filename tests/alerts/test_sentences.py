"""Values, lines and forecasts in words."""

from datetime import UTC, datetime, timedelta
from typing import Any
from zoneinfo import ZoneInfo

import pytest

from alerts import advice, sentences
from alerts.rules import Finding, Kind, OutlookFacts

NOW = datetime(2026, 6, 1, 12, tzinfo=UTC)


def outlook(**more: Any) -> OutlookFacts:
    facts: dict[str, Any] = {"key": "x", "name": "Water", "family": "water", "word": "past_limit", "unit": "mg/kg"}
    return OutlookFacts(**(facts | more))


@pytest.mark.parametrize(
    ("facts", "said"),
    [
        ({"value": 620.0}, "620 mg/kg"),
        ({"low": 0.0, "high": 10.0}, "<10 mg/kg"),
        ({"low": 1000.0}, "over 1000 mg/kg"),
        ({"low": 50.0, "high": 100.0}, "50 to 100 mg/kg"),
        (
            {"value": 52.3, "unit": "mm²/s", "decimals": 1, "is_percent": True, "baseline": 46.0},
            "52.3 mm²/s (+13.7 % of new)",
        ),
        (
            {"value": 41.4, "unit": "mm²/s", "decimals": 1, "is_percent": True, "baseline": 46.0},
            "41.4 mm²/s (−10.0 % of new)",
        ),
    ],
)
def test_a_quantity_is_said_with_its_unit_and_its_bounds(facts: dict[str, Any], said: str) -> None:
    assert sentences.value_text(outlook(**facts)) == said


# ISO 4406:2021, table 1: number 13 is more than 40 up to and including 80 per mL, 14 up to 160, 7 up to 1.3.
@pytest.mark.parametrize(
    ("facts", "said"),
    [
        ({"value": 80.0}, "code 13"),
        ({"value": 80.01}, "code 14"),
        ({"low": 40.0, "high": 80.0}, "code 13"),
        ({"low": 0.64}, "code ≥7"),
        ({"value": 0.0}, "code 0"),
    ],
)
def test_a_count_is_said_as_its_scale_number(facts: dict[str, Any], said: str) -> None:
    assert sentences.value_text(outlook(is_count=True, **facts)) == said


@pytest.mark.parametrize(
    ("facts", "said"),
    [
        ({"limit_high": 500.0}, "limit 500"),
        ({"limit_low": 3.0, "decimals": 1, "value": 2.1}, "limit not below 3.0"),
        ({"limit_high": 160.0, "is_count": True}, "limit 14"),
        ({"limit_low": -10.0, "limit_high": 10.0, "is_percent": True, "value": 52.0, "baseline": 46.0}, "limit +10 %"),
        (
            {"limit_low": -10.0, "limit_high": 10.0, "is_percent": True, "value": 40.0, "baseline": 46.0},
            "limit not below −10 %",
        ),
        ({}, "no limit"),
    ],
)
def test_the_side_of_the_limit_that_is_nearer_is_said(facts: dict[str, Any], said: str) -> None:
    assert sentences.line_text(outlook(**facts), "limit") == said


@pytest.mark.parametrize(
    ("facts", "said"),
    [
        ({"runway": "past", "past_since": NOW}, "Past it since 1 Jun 2026."),
        ({"runway": "beyond_horizon"}, "No passing of the limit is in sight within 24 months."),
        ({"runway": "cannot_say", "refusal_sentence": "No limit is set."}, "No forecast: No limit is set."),
        (
            {"runway": "dated", "runway_early": NOW, "runway_median": NOW + timedelta(days=30)},
            "At this rate it passes the limit about 1 Jul 2026 (80 % range 1 Jun 2026 to beyond 24 months).",
        ),
        (
            {"runway": "dated", "runway_early": NOW},
            "At this rate it could pass the limit from 1 Jun 2026 on, more likely not within 24 months.",
        ),
    ],
)
def test_a_runway_is_said_with_its_range_or_why_there_is_none(facts: dict[str, Any], said: str) -> None:
    assert sentences.runway_sentence(outlook(**facts), UTC) == said


@pytest.mark.parametrize(
    ("chance", "said"), [(0.0, "under 1 %"), (0.2, "20 %"), (0.994, "over 99 %"), (1.0, "over 99 %")]
)
def test_a_chance_is_never_said_to_be_nought_or_certain(chance: float, said: str) -> None:
    assert sentences.chance_text(chance) == said


def forecast(**more: Any) -> str:
    facts = {"name": "Particles ≥4 µm(c)", "is_count": True, "value": 2000.0, "limit_high": 2500.0, "runway": "dated"}
    speaker = outlook(**(facts | more))
    finding = Finding(
        family="dirt", kind=Kind.FORECAST, weight=1, mails=True, sample_id=1, drawn_at=NOW, charge_id=1, speaker=speaker
    )
    return sentences.headline(finding, UTC)


# ISO 4406:2021, table 1: number 18 is more than 1300 up to and including 2500 per mL.
@pytest.mark.parametrize(
    ("facts", "said"),
    [
        (
            {"chance": 0.22, "next_planned_at": NOW + timedelta(days=30)},
            "≥4 µm(c) code 18 now, may pass its limit 18: 22 % chance by 1 Jul 2026",
        ),
        ({"chance": 0.22}, "≥4 µm(c) code 18 now, may pass its limit 18: 22 % chance before the next sample"),
        ({"runway_median": NOW}, "≥4 µm(c) code 18 now, may pass its limit 18 about 1 Jun 2026"),
        (
            {"is_count": False, "name": "Base", "unit": "", "value": 4.0, "limit_high": None, "limit_low": 3.0}
            | {"decimals": 1, "chance": 0.3},
            "Base 4.0 now, may fall below its limit 3.0: 30 % chance before the next sample",
        ),
    ],
)
def test_a_forecast_says_what_may_come_and_what_is_now(facts: dict[str, Any], said: str) -> None:
    assert forecast(**facts) == said


@pytest.mark.parametrize(
    ("drawn_at", "said"),
    [
        (None, "The first sample, planned for 1 Jun 2026, has not come. No sample of this reservoir is on record yet."),
        (
            NOW - timedelta(days=60),
            "The sample planned for 1 Jun 2026 has not come. The last one was drawn 2 Apr 2026.",
        ),
    ],
)
def test_a_missing_sample_is_said_with_the_one_before_it_if_any(drawn_at: datetime | None, said: str) -> None:
    finding = Finding(
        family="sampling", kind=Kind.OVERDUE, weight=1, mails=True, sample_id=None, drawn_at=drawn_at, charge_id=None,
        due_at=NOW,
    )  # fmt: skip
    assert sentences.evidence(finding, UTC) == said


@pytest.mark.parametrize(("steps", "said"), [(1.0, "1.0 code step"), (1.04, "1.0 code step"), (1.7, "1.7 code steps")])
def test_one_step_is_said_as_one(steps: float, said: str) -> None:
    assert sentences.steps_text(steps) == said


def test_a_day_is_the_day_of_the_site() -> None:
    late = datetime(2026, 3, 5, 20, tzinfo=UTC)
    assert sentences.day_text(late, ZoneInfo("Asia/Tokyo")) == "6 Mar 2026"
    assert sentences.day_text(late, UTC, year=False) == "5 Mar"


def test_cautions_fit_the_work_and_end_with_the_site_procedures() -> None:
    assert "filter cart" in " ".join(advice.cautions("dirt"))
    assert "injection injury" in " ".join(advice.cautions("dirt", pressure_bar=200.0))
    assert "injection injury" not in " ".join(advice.cautions("dirt"))
    assert "Isolate" not in " ".join(advice.cautions("sampling"))
    assert "catch fire" in " ".join(advice.cautions("wear", hazards="FIRE"))
    assert all(advice.cautions(family)[-1] == advice.DEFER for family in advice.FIRST_STEPS)


def test_before_the_limit_there_is_time_to_plan() -> None:
    assert advice.first_steps("dirt", Kind.FORECAST)[-1].startswith("The limit is not passed")
    assert not any("not passed" in step for step in advice.first_steps("dirt", Kind.PAST_LIMIT))
