"""What is no longer in use: a reservoir, an oil that was drained, a sample point."""

from datetime import timedelta

import pytest

from alerts import evaluation
from alerts.models import Alert, Delivery, Rule
from fleet.models import Reservoir
from samples.models import Sample
from samples.outlooks import refresh_outlook
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import CLEAN, PAST
from tests.builders import NOON, days_ago

pytestmark = pytest.mark.django_db


def retire(press: Reservoir, in_days: int) -> None:
    press.retired_on = (NOON + timedelta(days=in_days)).date()
    press.save()


def test_a_reservoir_taken_out_of_service_needs_no_response() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), PAST)
    retire(press, in_days=0)
    scene.judged(press)
    alert = Alert.objects.get()
    assert (alert.state, alert.close_reason, alert.closed_by) == ("closed", "other", None)
    assert scene.story(alert)[-1] == "Closed: The reservoir was taken out of service."
    assert scene.standing(press).open_alerts == 0


def test_a_reservoir_that_is_to_be_retired_later_is_in_use_till_then() -> None:
    press = scene.reservoir()
    retire(press, in_days=5)
    scene.arrives(press, days_ago(2), PAST)
    assert scene.the_alert(press).kind == "past_limit"
    assert evaluation.evaluate_by_time(NOON + timedelta(days=4)) == 0
    assert evaluation.evaluate_by_time(NOON + timedelta(days=5)) == 1
    assert not Alert.objects.open().exists()
    assert evaluation.evaluate_by_time(NOON + timedelta(days=6)) == 0


def test_the_day_of_retirement_begins_by_the_clock_of_the_site() -> None:
    press = scene.reservoir()
    press.area.site.time_zone = "Pacific/Auckland"
    press.area.site.save()
    retire(press, in_days=1)
    scene.arrives(press, days_ago(2), PAST, as_of=NOON - timedelta(minutes=1))
    assert scene.the_alert(press).is_open
    # Auckland is twelve hours ahead of UTC in June.
    assert evaluation.evaluate_by_time(NOON) == 1


def test_a_sample_is_missed_until_the_day_of_retirement() -> None:
    press = scene.reservoir(interval_days=60)
    retire(press, in_days=5)
    scene.arrives(press, days_ago(80), CLEAN)
    assert scene.the_alert(press).kind == "overdue"


def test_a_late_bottle_of_oil_that_was_drained_opens_and_mails_nothing() -> None:
    press = scene.reservoir()
    scene.subscriber(press)
    press.charges.update(ended_at=days_ago(10))
    scene.arrives(press, days_ago(12), PAST)
    assert not Alert.objects.exists()
    assert not Delivery.objects.exists()


def test_an_outlook_from_before_the_oil_change_opens_nothing_either() -> None:
    press = scene.reservoir()
    builders.sample(press, days_ago(12), PAST)
    refresh_outlook(press.pk, NOON)
    press.charges.update(ended_at=days_ago(10))
    evaluation.evaluate_changed(NOON)
    assert not Alert.objects.exists()


def test_oil_that_will_be_drained_later_still_speaks() -> None:
    press = scene.reservoir()
    press.charges.update(ended_at=NOON + timedelta(days=1))
    scene.arrives(press, days_ago(12), PAST)
    assert scene.the_alert(press).kind == "past_limit"


def test_new_oil_in_its_drum_is_not_the_sample_that_was_missed() -> None:
    press = scene.reservoir(interval_days=60)
    scene.arrives(press, days_ago(80), CLEAN)
    before = scene.the_alert(press)
    scene.arrives(press, days_ago(1), CLEAN, reason=Sample.Reason.NEW_OIL)
    after = scene.the_alert(press)
    assert (after.kind, after.sample_id) == ("overdue", before.sample_id)


def test_new_oil_in_its_drum_proves_nothing_even_in_an_outlook() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(20), PAST)
    press.events.create(kind="breather", at=days_ago(10))
    bottle = builders.sample(press, days_ago(2), CLEAN)
    refresh_outlook(press.pk, NOON)
    Sample.objects.filter(pk=bottle.pk).update(reason=Sample.Reason.NEW_OIL)
    evaluation.evaluate_changed(NOON)
    assert scene.the_alert(press).is_open


def from_another_point(press: Reservoir) -> None:
    """A clean bottle, after the planned point has been silent for longer than it speaks alone."""
    Rule.objects.filter(kind="overdue").update(enabled=False)
    behind = press.points.create(name="SP-2", place="behind the filter")
    press.events.create(kind="breather", at=days_ago(150))
    scene.arrives(press, days_ago(2), CLEAN, point=behind)


def test_a_clean_bottle_from_another_point_does_not_close_it() -> None:
    press = scene.reservoir()
    first = scene.arrives(press, days_ago(200), PAST, as_of=days_ago(199))
    from_another_point(press)
    alert = scene.the_alert(press)
    assert (alert.kind, alert.sample_id) == ("past_limit", first.pk)
    assert len(scene.story(alert)) == 1


def test_where_its_point_is_gone_another_one_may_close_it() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(200), PAST, as_of=days_ago(199))
    press.points.update(retired_on=days_ago(100).date())
    from_another_point(press)
    assert Alert.objects.get().close_reason == "shown_over"
