"""Asking for fresh outlooks after the register has changed."""

import pytest
import redis
from django.db import transaction
from kombu.exceptions import OperationalError
from pytest_django import Settings

from fleet.models import Standing
from fleet.refresh import MESSAGES_AT_ONCE, want_refresh
from tests.builders import NOON, reservoir

QUEUE = "celery"


@pytest.mark.django_db(transaction=True)
def test_after_commit_one_message_a_reservoir_waits_for_the_worker(broker: "redis.Redis") -> None:
    tank = reservoir()
    with transaction.atomic():
        want_refresh([tank.pk, tank.pk], NOON)
        assert broker.llen(QUEUE) == 0
    assert broker.llen(QUEUE) == 1
    assert Standing.objects.get(reservoir=tank).wanted_at == NOON


@pytest.mark.django_db(transaction=True)
def test_a_change_that_is_rolled_back_asks_for_nothing(broker: "redis.Redis") -> None:
    tank = reservoir()
    with transaction.atomic():
        want_refresh([tank.pk], NOON)
        transaction.set_rollback(True)
    assert broker.llen(QUEUE) == 0
    assert not Standing.objects.exists()


@pytest.mark.django_db
def test_a_standing_that_exists_keeps_its_figures() -> None:
    tank = reservoir()
    Standing.objects.create(reservoir=tank, code_text="18/16/13", revision=4)
    want_refresh([tank.pk], NOON)
    standing = Standing.objects.get(reservoir=tank)
    assert (standing.code_text, standing.revision, standing.wanted_at) == ("18/16/13", 4, NOON)


@pytest.mark.django_db(transaction=True)
def test_a_broker_that_is_down_loses_nothing(settings: Settings, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(*args: object, **more: object) -> None:
        raise OperationalError("down")

    monkeypatch.setattr("fleet.refresh.current_app.send_task", refuse)
    tank = reservoir()
    want_refresh([tank.pk], NOON)
    assert Standing.objects.wanted().filter(pk=tank.pk).exists()


@pytest.mark.django_db(transaction=True)
def test_a_whole_plant_is_left_to_the_sweep_beyond_the_first_messages(broker: "redis.Redis") -> None:
    tanks = [reservoir(machine=f"Press {n}").pk for n in range(MESSAGES_AT_ONCE + 5)]
    want_refresh(tanks, NOON)
    assert broker.llen(QUEUE) == MESSAGES_AT_ONCE
    assert Standing.objects.wanted().count() == len(tanks)
