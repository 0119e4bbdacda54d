"""How the worker looks at what changed: one at once, several each by itself, and never more than a bound."""

import json
from datetime import timedelta

import pytest
from redis import Redis

from alerts import evaluation, facts, tasks
from alerts.models import Alert
from fleet.models import Reservoir, Standing
from samples.outlooks import refresh_outlook
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import CLEAN, PAST
from tests.builders import NOON, days_ago

pytestmark = pytest.mark.django_db


def refreshed(name: str, minutes_ago: int = 0) -> Reservoir:
    press = scene.reservoir(name=name)
    builders.sample(press, days_ago(2), PAST)
    refresh_outlook(press.pk, NOON - timedelta(minutes=minutes_ago))
    return press


def test_a_single_one_is_judged_at_once(broker: Redis) -> None:
    press = refreshed("a")
    tasks.evaluate_changed()
    assert Alert.objects.get(family="dirt").reservoir == press
    assert broker.llen("celery") == 0


def test_several_are_judged_each_by_itself_and_asked_for_again_by_the_next_look(broker: Redis) -> None:
    bad, good = refreshed("a"), refreshed("b")
    tasks.evaluate_changed()
    assert not Alert.objects.exists()
    messages = [json.loads(raw) for raw in broker.lrange("celery", 0, -1)]
    asked = {message["headers"]["argsrepr"] for message in messages}
    assert asked == {f"({bad.pk},)", f"({good.pk},)"}
    assert all(message["headers"]["expires"] for message in messages)


def test_one_that_cannot_be_judged_silences_no_other(broker: Redis, monkeypatch: pytest.MonkeyPatch) -> None:
    refreshed("a"), refreshed("b")

    def fail(*_: object) -> None:
        raise ValueError("a row that cannot be judged")

    monkeypatch.setattr(facts, "reservoir_facts", fail)
    tasks.evaluate_changed()
    assert broker.llen("celery") == 2


def test_a_look_takes_those_that_waited_longest(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(evaluation, "A_LOOK", 2)
    late, early, between = (refreshed(name, ago) for name, ago in (("a", 1), ("b", 30), ("c", 9)))
    assert evaluation.waiting(NOON) == [early.pk, between.pk]
    evaluation.evaluate_reservoir(early.pk, NOON)
    assert evaluation.waiting(NOON) == [between.pk, late.pk]


def test_a_missed_sample_is_looked_at_without_a_change() -> None:
    press = scene.reservoir(interval_days=60)
    scene.arrives(press, days_ago(20), CLEAN)
    assert evaluation.waiting(NOON) == []
    assert evaluation.waiting(NOON + timedelta(days=60)) == [press.pk]
    Standing.objects.update(judged_revision=0)
    assert evaluation.waiting(NOON + timedelta(days=60)) == [press.pk]
