"""What the reservoir's page says first."""

from datetime import timedelta
from zoneinfo import ZoneInfo

from fleet.models import Measurand
from samples.models import Outlook
from samples.verdicts import slope_text, verdict
from tests.builders import NOON

UTC = ZoneInfo("UTC")
P14 = Measurand(key="p14", name="Particles ≥14 µm(c)", symbol="≥14 µm(c)", kind="count", scale="count")


def outlook(**facts: object) -> Outlook:
    usual = {"measurand": P14, "word": "over_target", "n": 9, "trend": "rising", "doubling_months": 4.0, "refusal": ""}
    return Outlook(**(usual | {"stretch_from": NOON - timedelta(days=300), "runway": "dated"} | facts))


def said(**facts: object) -> str:
    found = verdict(outlook(**facts), "15", UTC, NOON)
    return " ".join([found.heading, *found.sentences])


def test_it_says_where_how_fast_when_and_how_sure() -> None:
    dates = {f"runway_{end}": NOON + timedelta(days=n) for end, n in (("early", 20), ("median", 50), ("late", 120))}
    text = said(**dates, chance_before_next=0.12, next_planned_at=NOON + timedelta(days=28))
    assert text.startswith("Over target, heading for the limit. The ≥14 µm(c) count is doubling every 4 months")
    assert "passes the limit of 15 around 21 Jul 2026 (80 % range 21 Jun 2026 – 29 Sep 2026)" in text
    assert text.endswith("(29 Jun 2026) is past it is 12 %.") or "is 12 %" in text


def test_a_chance_is_never_printed_as_nothing() -> None:
    text = said(runway="beyond_horizon", chance_before_next=0.001, next_planned_at=NOON)
    assert "under 5 %" in text


def test_past_already_says_since_when_and_gives_no_forecast() -> None:
    text = said(word="past_limit", runway="past", past_since=NOON - timedelta(days=20), chance_before_next=0.9)
    assert "since the sample of 12 May 2026" in text
    assert "chance" not in text


def test_a_refusal_gives_its_reason() -> None:
    text = said(word="no_current_sample", runway="cannot_say", refusal_sentence="The latest sample is 90 days old.")
    assert "No forecast: the latest sample is 90 days old." in text


def test_a_few_samples_show_no_trend_by_themselves() -> None:
    assert "2 samples since 5 Aug 2025, too few" in said(n=2, trend="too few samples", runway="beyond_horizon")


def test_a_slope_is_printed_with_its_interval_and_true_minus() -> None:
    assert slope_text(outlook(slope=0.1, slope_low=-0.02, slope_high=0.25)) == (
        "+0.10 code steps a month (−0.02 to +0.25, 90 %)"
    )
