"""What opens an alert, and that there is one of it."""

from datetime import timedelta

import pytest
from django.db import IntegrityError, transaction
from pytest_django import DjangoAssertNumQueries

from alerts.evaluation import evaluate_changed, evaluate_reservoir
from alerts.models import Alert, Rule
from samples.models import Sample
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import CLEAN, OVER, PAST
from tests.builders import NOON, days_ago

pytestmark = pytest.mark.django_db


def test_a_sample_past_the_limit_opens_one_alert_that_says_what_and_against_what() -> None:
    press = scene.reservoir()
    sample = scene.arrives(press, days_ago(2), PAST)
    alert = scene.the_alert(press)
    assert (alert.family, alert.kind, alert.sample_id, alert.charge) == ("dirt", "past_limit", sample.pk, sample.charge)
    # 600 per mL lies in 320 … 640: scale number 16 (ISO 4406:2021, table 1)
    assert alert.headline == "≥14 µm(c) code 16, limit 14"
    assert alert.sentence == (
        "Drawn 30 May 2026; 600 per mL; past its limit by 1.9 code steps; limit from: test: plant decision."
    )
    assert alert.measurand is not None
    assert alert.measurand.key == "p14"


def test_a_clean_sample_opens_none_and_the_standing_is_marked_as_judged() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), CLEAN)
    assert not Alert.objects.exists()
    assert scene.standing(press).judged_revision == scene.standing(press).revision > 0


def test_a_sample_over_target_opens_an_alert_of_its_own_kind() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), OVER)
    # 100 per mL lies in 80 … 160: scale number 14 (ISO 4406:2021, table 1); the limit 14 is met
    assert scene.the_alert(press).kind in {"forecast", "over_target"}


def test_a_later_sample_updates_the_alert_instead_of_opening_another() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(30), PAST)
    later = scene.arrives(press, days_ago(2), PAST | {"p14": 1200.0})
    alert = scene.the_alert(press)
    assert alert.sample_id == later.pk
    assert alert.headline == "≥14 µm(c) code 17, limit 14"
    assert scene.story(alert) == [
        "Past limit: ≥14 µm(c) code 16, limit 14.",
        "Still past limit: ≥14 µm(c) code 17, limit 14.",
    ]


def test_the_worst_of_the_counts_speaks_and_names_the_others() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), {"p4": 1000.0, "p6": 1500.0, "p14": 600.0})
    alert = scene.the_alert(press)
    assert alert.headline.startswith("≥14 µm(c) code 16")
    assert "Also: ≥6 µm(c) code 18, limit 17." in alert.sentence


def test_each_family_has_its_own_alert_and_water_is_noted_beside_the_counts() -> None:
    press = scene.reservoir()
    builders.limit(press, key="water", high=500.0)
    scene.arrives(press, days_ago(2), PAST | {"water": 620.0})
    dirt, water = (Alert.objects.get(family=family) for family in ("dirt", "water"))
    assert water.headline == "Water 620 mg/kg, limit 500"
    assert "optical counter counts droplets" in dirt.sentence
    assert scene.standing(press).open_alerts == 2


def test_a_result_in_doubt_makes_no_alert() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), PAST, verdict=Sample.Verdict.IN_DOUBT)
    assert not Alert.objects.exists()


def test_evaluating_twice_changes_nothing() -> None:
    press = scene.reservoir()
    scene.subscriber(press)
    scene.arrives(press, days_ago(2), PAST)
    assert evaluate_changed(NOON) == 0
    assert evaluate_reservoir(press.pk, NOON, even_if_judged=True)
    alert = scene.the_alert(press)
    assert (alert.story.count(), alert.deliveries.count()) == (1, 1)


def test_looking_costs_one_query_when_nothing_changed(django_assert_num_queries: DjangoAssertNumQueries) -> None:
    scene.arrives(scene.reservoir(), days_ago(2), PAST)
    with django_assert_num_queries(1):
        evaluate_changed(NOON)


def test_the_database_refuses_a_second_open_alert_for_the_same_trouble() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), PAST)
    first = scene.the_alert(press)
    first.pk = None
    with pytest.raises(IntegrityError), transaction.atomic():
        first.save(force_insert=True)


def test_an_alert_that_somebody_else_opened_meanwhile_is_updated() -> None:
    press = scene.reservoir()
    sample = builders.sample(press, days_ago(2), PAST)
    other = Alert.objects.create(
        reservoir=press, family="dirt", charge=sample.charge, kind="over_target", weight=7, headline="earlier",
        sentence="earlier", opened_at=days_ago(1), updated_at=days_ago(1),
    )  # fmt: skip
    scene.judged(press)
    other.refresh_from_db()
    assert (other.kind, other.sample_id) == ("past_limit", sample.pk)


def test_a_rule_for_criticality_a_is_silent_about_b() -> None:
    press = scene.reservoir(criticality="B")
    scene.arrives(press, days_ago(2), CLEAN)
    Rule.objects.update(least_criticality="A")
    scene.arrives(press, days_ago(1), PAST)
    assert not Alert.objects.exists()


def test_a_rule_that_is_switched_off_is_silent() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), CLEAN)
    Rule.objects.update(enabled=False)
    scene.arrives(press, days_ago(1), PAST)
    assert not Alert.objects.exists()


def test_a_retired_reservoir_opens_none() -> None:
    press = scene.reservoir(retired_on=NOON.date())
    scene.arrives(press, days_ago(2), PAST)
    assert not Alert.objects.exists()
    assert evaluate_changed(NOON) == 0


def test_a_rising_count_is_told_before_it_passes() -> None:
    press = scene.reservoir()
    for days, p14 in ((200, 22.0), (150, 34.0), (100, 52.0), (50, 85.0), (1, 140.0)):
        builders.sample(press, days_ago(days), CLEAN | {"p14": p14})
    scene.judged(press)
    alert = scene.the_alert(press)
    assert alert.kind == "forecast"
    assert "limit 14" in alert.headline


def test_an_overdue_sample_opens_an_alert_after_a_tenth_of_the_interval() -> None:
    press = scene.reservoir(interval_days=60)
    scene.arrives(press, days_ago(62), CLEAN)
    assert not Alert.objects.exists()
    scene.judged(press, NOON + timedelta(days=4.5))
    alert = scene.the_alert(press)
    assert (alert.family, alert.kind, alert.charge) == ("sampling", "overdue", None)
    assert alert.headline == "Sample due 30 May 2026 has not come"
