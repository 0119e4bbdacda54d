"""When an alert owes mail, and to whom."""

from datetime import timedelta
from typing import Any

import pytest

from alerts.defaults import ensure_rules
from alerts.evaluation import evaluate_changed, mark_history_judged
from alerts.models import Alert, Delivery, Rule, Subscription
from samples.outlooks import refresh_outlook
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import CLEAN, OVER, PAST
from tests.builders import NOON, days_ago

pytestmark = pytest.mark.django_db


def only_past_limit_and_over_target_mail() -> None:
    Rule.objects.filter(kind="forecast").update(enabled=False)
    Rule.objects.filter(kind="over_target").update(mails=True)


def reasons() -> list[str]:
    return sorted(Delivery.objects.values_list("reason", flat=True))


def test_each_subscriber_is_owed_one_mail_when_an_alert_opens() -> None:
    press = scene.reservoir()
    people = [scene.subscriber(press, first_name="Ada", last_name="Orr"), scene.subscriber(press)]
    scene.arrives(press, days_ago(2), PAST)
    owed = Delivery.objects.filter(alert=scene.the_alert(press))
    assert {delivery.person for delivery in owed} == set(people)
    assert {(delivery.reason, delivery.state, delivery.address) for delivery in owed} == {
        ("past_limit", "queued", person.email) for person in people
    }
    assert "mail to" in scene.story(scene.the_alert(press))[0]
    assert "Ada Orr" in scene.story(scene.the_alert(press))[0]


def test_the_same_trouble_again_owes_no_second_mail() -> None:
    press = scene.reservoir()
    scene.subscriber(press)
    for days in (30, 20, 10):
        scene.arrives(press, days_ago(days), PAST)
    assert reasons() == ["past_limit"]


def test_graver_trouble_owes_one_more_mail_a_person() -> None:
    press = scene.reservoir()
    ensure_rules(press.area.site)
    only_past_limit_and_over_target_mail()
    scene.subscriber(press)
    scene.arrives(press, days_ago(30), OVER)
    scene.arrives(press, days_ago(20), PAST)
    assert reasons() == ["over_target", "past_limit"]
    assert Alert.objects.count() == 1


def test_getting_better_and_worse_again_owes_nothing_new() -> None:
    press = scene.reservoir()
    ensure_rules(press.area.site)
    only_past_limit_and_over_target_mail()
    scene.subscriber(press)
    for days, values in ((40, PAST), (30, OVER), (20, PAST)):
        scene.arrives(press, days_ago(days), values)
    assert reasons() == ["past_limit"]
    assert Alert.objects.count() == 1


def test_a_rule_without_mail_opens_an_alert_and_owes_none() -> None:
    press = scene.reservoir()
    ensure_rules(press.area.site)
    Rule.objects.update(mails=False)
    scene.subscriber(press)
    scene.arrives(press, days_ago(2), PAST)
    assert Alert.objects.count() == 1
    assert not Delivery.objects.exists()


@pytest.mark.parametrize(("interval", "age", "mails"), [(30, 89, 1), (30, 91, 0), (60, 119, 1), (60, 121, 0)])
def test_a_sample_older_than_two_intervals_or_ninety_days_owes_none(interval: int, age: float, mails: int) -> None:
    press = scene.reservoir(interval_days=interval)
    scene.subscriber(press)
    sample = builders.sample(press, days_ago(age), PAST)
    refresh_outlook(press.pk, sample.drawn_at + timedelta(days=1))
    evaluate_changed(NOON)
    assert Alert.objects.get(family="dirt").deliveries.count() == mails


def test_a_stale_history_opens_no_alert_about_the_oil() -> None:
    press = scene.reservoir(interval_days=30)
    scene.subscriber(press)
    scene.arrives(press, days_ago(400), PAST)
    assert not Alert.objects.exclude(family="sampling").exists()
    assert not Delivery.objects.exists()


def test_a_late_older_sample_owes_none_when_a_newer_one_is_inside() -> None:
    press = scene.reservoir()
    scene.subscriber(press)
    scene.arrives(press, days_ago(2), CLEAN)
    scene.arrives(press, days_ago(20), PAST)
    assert not Alert.objects.exists()
    assert not Delivery.objects.exists()


def test_history_loaded_in_bulk_opens_alerts_and_owes_none() -> None:
    press = scene.reservoir()
    scene.subscriber(press)
    builders.sample(press, days_ago(2), PAST)
    refresh_outlook(press.pk, NOON)
    assert mark_history_judged(NOON) == 1
    assert Alert.objects.count() == 1
    evaluate_changed(NOON)
    scene.arrives(press, days_ago(1), PAST)
    assert not Delivery.objects.exists()


def test_history_loaded_in_bulk_is_as_old_as_its_samples() -> None:
    press, pump = scene.reservoir(name="press"), scene.reservoir(name="pump", interval_days=60)
    for of, days, values in ((press, 20, PAST), (pump, 100, CLEAN)):
        builders.sample(of, days_ago(days), values)
        refresh_outlook(of.pk, NOON)
    mark_history_judged(NOON)
    assert Alert.objects.get(reservoir=press).opened_at == days_ago(20)
    assert Alert.objects.get(reservoir=pump).opened_at == days_ago(40)


def test_mail_follows_area_and_kind_of_the_wish() -> None:
    press = scene.reservoir()
    area, site = press.area, press.area.site
    elsewhere = builders.area("Yard", site)
    wishes: list[dict[str, Any]] = [
        *({"area": area}, {"area": elsewhere}, {"kind": "past_limit"}, {"kind": "overdue"}),
        {"area": area, "kind": "past_limit"},
    ]
    people = [builders.person() for _ in wishes]
    for person, wish in zip(people, wishes, strict=True):
        Subscription.objects.create(person=person, site=site, **wish)
    scene.arrives(press, days_ago(2), PAST)
    assert {delivery.person for delivery in Delivery.objects.all()} == {people[0], people[2], people[4]}


def test_two_wishes_of_one_person_make_one_mail() -> None:
    press = scene.reservoir()
    person = scene.subscriber(press)
    Subscription.objects.create(person=person, site=press.area.site, kind="past_limit")
    scene.arrives(press, days_ago(2), PAST)
    assert Delivery.objects.count() == 1


@pytest.mark.parametrize("who", [{"is_active": False}, {"email": ""}, {"email": "a@b.example\nBcc: x@y.example"}])
def test_nobody_inactive_or_without_a_usable_address_is_owed_mail(who: dict[str, Any]) -> None:
    press = scene.reservoir()
    scene.subscriber(press, **who)
    scene.arrives(press, days_ago(2), PAST)
    assert Alert.objects.count() == 1
    assert not Delivery.objects.exists()


def test_a_site_without_rules_gets_the_starting_ones_once() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(20), CLEAN)
    Rule.objects.filter(kind="forecast").update(within_days=7)
    scene.arrives(press, days_ago(2), CLEAN)
    rules = {rule.kind: (rule.mails, rule.within_days, rule.least_chance) for rule in Rule.objects.all()}
    assert rules == {
        "past_limit": (True, None, None),
        "forecast": (True, 7, 0.2),
        "over_target": (False, None, None),
        "overdue": (False, None, None),
    }
