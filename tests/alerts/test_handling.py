"""What people do: say that they have seen it, and close it."""

from datetime import timedelta

import pytest

from alerts import handling
from alerts.models import Alert
from fleet.models import Role
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import PAST
from tests.builders import NOON, days_ago

pytestmark = pytest.mark.django_db


@pytest.fixture
def alert() -> Alert:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), PAST)
    return scene.the_alert(press)


def test_it_keeps_the_first_acknowledgement(alert: Alert) -> None:
    first, second = builders.person(), builders.person()
    assert handling.acknowledge(alert, first, "looking at the breather", NOON)
    assert not handling.acknowledge(alert, second, "me too", NOON + timedelta(hours=1))
    alert.refresh_from_db()
    assert (alert.acknowledged_by, alert.acknowledged_at) == (first, NOON)
    assert alert.acknowledged_note == "looking at the breather"


def test_every_note_stands_in_the_story_with_its_author(alert: Alert) -> None:
    first, second = builders.person(first_name="Ada"), builders.person(first_name="Bo")
    handling.acknowledge(alert, first, "looking at the breather", NOON)
    handling.acknowledge(alert, second, "", NOON + timedelta(hours=1))
    assert scene.story(alert)[-2:] == ["Seen by Ada: looking at the breather", "Seen by Bo."]
    assert [entry.by for entry in alert.story.all()[:2]] == [second, first]


def test_closing_keeps_reason_note_and_person_and_counts_down_the_standing(alert: Alert) -> None:
    engineer = builders.person(Role.ENGINEER)
    assert scene.standing(alert.reservoir).open_alerts == 1
    assert handling.close(alert, engineer, "false_alarm", "valve grit, repeat is clean", NOON)
    alert.refresh_from_db()
    assert (alert.state, alert.close_reason, alert.closed_by) == ("closed", "false_alarm", engineer)
    assert scene.standing(alert.reservoir).open_alerts == 0
    assert "valve grit" in scene.story(alert)[-1]


def test_a_second_closing_changes_nothing(alert: Alert) -> None:
    engineer = builders.person(Role.ENGINEER)
    handling.close(alert, engineer, "false_alarm", "valve grit", NOON)
    assert not handling.close(alert, engineer, "other", "something else", NOON + timedelta(days=1))
    alert.refresh_from_db()
    assert (alert.close_reason, alert.closed_at) == ("false_alarm", NOON)
    assert len(scene.story(alert)) == 2


def test_closing_does_not_make_the_standing_count_as_judged(alert: Alert) -> None:
    standing = scene.standing(alert.reservoir)
    standing.revision += 1
    standing.save(update_fields=["revision"])
    handling.close(alert, builders.person(Role.ENGINEER), "other", "done", NOON)
    assert scene.standing(alert.reservoir).judged_revision < standing.revision
