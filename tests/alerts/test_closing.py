"""What ends an alert: a later accepted sample, new oil, or a person. Nothing else does."""

from datetime import timedelta

import pytest

from alerts import handling
from alerts.models import Alert, Rule
from fleet.models import Role
from samples.models import Sample
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import CLEAN, OVER, PAST
from tests.builders import NOON, days_ago

pytestmark = pytest.mark.django_db

# 150 per mL: inside the limit of 160 (code 14) by a tenth of a step; 70: by 1.2 steps, and within the target of 80.
BARELY_INSIDE = CLEAN | {"p14": 150.0}


def only_past_limit() -> None:
    Rule.objects.exclude(kind="past_limit").update(enabled=False)


def test_a_later_accepted_sample_within_target_closes_it_and_says_so() -> None:
    press = scene.reservoir()
    for days in (200, 140, 80):
        builders.sample(press, days_ago(days), CLEAN)
    scene.arrives(press, days_ago(20), PAST)
    scene.arrives(press, days_ago(2), CLEAN)
    alert = Alert.objects.get()
    assert (alert.state, alert.close_reason, alert.closed_by) == ("closed", "shown_over", None)
    assert alert.close_note == "The sample drawn 30 May 2026 shows ≥14 µm(c) code 12, target 13."
    assert scene.story(alert)[-1].startswith("Closed: The sample drawn 30 May 2026")
    assert scene.standing(press).open_alerts == 0


def test_against_a_trend_that_followed_it_takes_two_samples() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(40), PAST)
    scene.arrives(press, days_ago(20), CLEAN)
    alert = scene.the_alert(press)
    assert alert.kind == "past_limit"
    assert "its trend does not follow yet" in scene.story(alert)[-1]
    scene.arrives(press, days_ago(2), CLEAN)
    assert Alert.objects.get().close_reason == "shown_over"


def test_after_a_correction_on_record_one_sample_is_enough() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(20), PAST)
    press.events.create(kind="breather", at=days_ago(10), note="new breather fitted")
    scene.arrives(press, days_ago(2), CLEAN)
    assert Alert.objects.get().close_reason == "shown_over"


def test_a_late_older_sample_that_is_clean_does_not_close_it() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), PAST)
    scene.arrives(press, days_ago(20), CLEAN)
    assert scene.the_alert(press).kind == "past_limit"


def test_a_later_sample_in_doubt_does_not_close_it() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(20), PAST)
    scene.arrives(press, days_ago(2), CLEAN, verdict=Sample.Verdict.IN_DOUBT)
    assert scene.the_alert(press).kind == "past_limit"


def test_setting_its_sample_aside_does_not_close_it() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(30), CLEAN)
    sample = scene.arrives(press, days_ago(2), PAST)
    Sample.objects.filter(pk=sample.pk).update(verdict="set_aside", verdict_reason="dirty bottle")
    scene.judged(press)
    alert = scene.the_alert(press)
    assert not alert.rests_on_sound_sample


def test_inside_the_limit_by_less_than_a_step_keeps_it_open_and_is_told() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(40), PAST)
    only_past_limit()
    later = scene.arrives(press, days_ago(20), BARELY_INSIDE)
    alert = scene.the_alert(press)
    assert alert.sample_id == later.pk
    assert "not far enough inside" in scene.story(alert)[-1]


def test_inside_the_limit_by_a_step_closes_it_when_nothing_speaks() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(40), PAST)
    press.events.create(kind="breather", at=days_ago(30))
    only_past_limit()
    scene.arrives(press, days_ago(20), CLEAN | {"p14": 79.0, "p6": 700.0})
    # ≥6 at 700 per mL is code 17: over its target of 16, inside its limit of 17 (1300 per mL) by 0.9 steps
    assert scene.the_alert(press).is_open
    scene.arrives(press, days_ago(10), CLEAN | {"p14": 79.0, "p6": 641.0})
    assert Alert.objects.get().close_reason == "shown_over"


def test_over_target_is_over_only_within_target() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(40), OVER)
    scene.arrives(press, days_ago(20), OVER)
    assert scene.the_alert(press).is_open
    press.events.create(kind="element_change", at=days_ago(10))
    scene.arrives(press, days_ago(2), CLEAN)
    assert not Alert.objects.open().exists()


def test_one_measurand_that_is_back_does_not_speak_for_another_of_its_family() -> None:
    press = scene.reservoir()
    for key in ("fe", "cu"):
        builders.limit(press, key=key, high=50.0)
        builders.target(press, key=key, high=20.0)
    scene.arrives(press, days_ago(20), {"fe": 80.0, "cu": 5.0})
    scene.arrives(press, days_ago(2), {"cu": 4.0})
    assert scene.the_alert(press).headline == "Iron 80 mg/kg, limit 50"


def test_the_first_sample_of_new_oil_ends_the_alert_about_the_old() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(20), PAST)
    old = press.charges.get()
    changed_at = days_ago(10)
    press.charges.filter(pk=old.pk).update(ended_at=changed_at)
    press.charges.create(fluid=old.fluid, started_at=changed_at)
    scene.judged(press)
    assert scene.the_alert(press).is_open
    scene.arrives(press, days_ago(2), CLEAN)
    alert = Alert.objects.get()
    assert alert.close_reason == "oil_changed"
    assert alert.close_note.startswith("The oil was changed. The sample drawn 30 May 2026 shows")


def test_new_oil_in_trouble_too_has_an_alert_of_its_own() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(20), PAST)
    old = press.charges.get()
    press.charges.filter(pk=old.pk).update(ended_at=days_ago(10))
    new = press.charges.create(fluid=old.fluid, started_at=days_ago(10))
    scene.arrives(press, days_ago(2), PAST)
    assert scene.the_alert(press).charge == new
    assert Alert.objects.closed().get().charge == old


def test_an_overdue_alert_closes_when_a_newer_sample_has_come() -> None:
    press = scene.reservoir(interval_days=60)
    scene.arrives(press, days_ago(80), CLEAN)
    assert scene.the_alert(press).kind == "overdue"
    scene.arrives(press, days_ago(1), CLEAN)
    alert = Alert.objects.get()
    assert (alert.state, alert.close_note) == ("closed", "A sample has come, drawn 31 May 2026.")


def test_a_longer_grace_keeps_quiet_longer() -> None:
    press = scene.reservoir(interval_days=60)
    scene.arrives(press, days_ago(20), CLEAN)
    Rule.objects.filter(kind="overdue").update(grace_days=30)
    scene.judged(press, NOON + timedelta(days=69))
    assert not Alert.objects.exists()
    scene.judged(press, NOON + timedelta(days=71))
    assert scene.the_alert(press).kind == "overdue"


def test_what_a_person_closed_stays_closed_until_a_later_sample() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(20), PAST)
    engineer = builders.person(Role.ENGINEER)
    handling.close(scene.the_alert(press), engineer, "accepted_as_is", "runs until the stop", NOON)
    scene.judged(press, NOON + timedelta(days=1))
    assert not Alert.objects.open().exists()
    scene.arrives(press, days_ago(2), PAST)
    assert scene.the_alert(press).kind == "past_limit"


def test_an_overdue_alert_that_a_person_closed_is_not_opened_again() -> None:
    press = scene.reservoir(interval_days=60)
    scene.arrives(press, days_ago(80), CLEAN)
    handling.close(scene.the_alert(press), builders.person(Role.ENGINEER), "other", "machine is down", NOON)
    scene.judged(press, NOON + timedelta(days=5))
    assert not Alert.objects.open().exists()
