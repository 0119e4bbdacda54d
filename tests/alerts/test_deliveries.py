"""How one mail is sent once: claims, failures that wait longer, and claims whose worker died."""

import json
import re
from concurrent.futures import ThreadPoolExecutor
from datetime import timedelta
from pathlib import Path
from threading import Barrier

import pytest
from celery import current_app
from celery.exceptions import SoftTimeLimitExceeded
from django.conf import settings as django_settings
from django.core.mail import EmailMultiAlternatives
from django.db import IntegrityError, connection, transaction
from kombu.exceptions import OperationalError
from pytest_django import DjangoCaptureOnCommitCallbacks, Settings
from redis import Redis

from alerts import deliveries
from alerts.models import Alert, Delivery
from alerts.tasks import send_delivery
from fleet.models import Person
from tests.alerts import scene
from tests.alerts.scene import PAST
from tests.builders import NOON, days_ago
from tests.smtp_sink import SmtpSink

pytestmark = pytest.mark.django_db


@pytest.fixture
def delivery() -> Delivery:
    press = scene.reservoir()
    scene.subscriber(press)
    scene.arrives(press, days_ago(2), PAST)
    owed: Delivery = Delivery.objects.get()
    return owed


def test_it_is_sent_once_and_marked(delivery: Delivery, smtp_sink: SmtpSink) -> None:
    assert deliveries.send(delivery.pk, NOON)
    assert not deliveries.send(delivery.pk, NOON + timedelta(days=1))
    (received,) = smtp_sink.messages
    delivery.refresh_from_db()
    assert received.recipients == (delivery.address,)
    assert (delivery.state, delivery.sent_at, delivery.attempts) == ("sent", NOON, 1)
    assert delivery.message_id == received.message["Message-ID"]


def test_a_claim_succeeds_once(delivery: Delivery) -> None:
    assert deliveries.claim(delivery.pk, NOON)
    assert not deliveries.claim(delivery.pk, NOON)


def test_nothing_is_claimed_before_it_is_due(delivery: Delivery) -> None:
    assert not deliveries.claim(delivery.pk, NOON - timedelta(seconds=1))


def test_a_refusal_is_kept_and_the_next_try_waits(delivery: Delivery, smtp_sink: SmtpSink) -> None:
    smtp_sink.refuse(1, "451 4.3.0 Mailbox is being moved")
    assert not deliveries.send(delivery.pk, NOON)
    delivery.refresh_from_db()
    assert (delivery.state, delivery.attempts, delivery.due_at) == ("queued", 1, NOON + timedelta(minutes=1))
    assert "Mailbox is being moved" in delivery.last_error
    assert not deliveries.send(delivery.pk, NOON + timedelta(seconds=30))
    assert deliveries.send(delivery.pk, NOON + timedelta(minutes=1))
    delivery.refresh_from_db()
    assert (delivery.state, delivery.last_error, len(smtp_sink.messages)) == ("sent", "", 1)


def test_a_server_that_is_not_there_is_tried_again(delivery: Delivery, settings: Settings) -> None:
    settings.EMAIL_BACKEND = "django.core.mail.backends.smtp.EmailBackend"
    settings.EMAIL_HOST, settings.EMAIL_PORT = "127.0.0.1", 1
    assert not deliveries.send(delivery.pk, NOON)
    delivery.refresh_from_db()
    assert delivery.state == "queued"
    assert "ConnectionRefusedError" in delivery.last_error


def test_waits_grow_and_after_eight_tries_it_is_given_up(delivery: Delivery, smtp_sink: SmtpSink) -> None:
    smtp_sink.refuse(99)
    waits, now = [], NOON
    for _ in range(8):
        deliveries.send(delivery.pk, now)
        delivery.refresh_from_db()
        waits.append((delivery.due_at - now) / timedelta(minutes=1))
        now = delivery.due_at
    assert waits[:7] == [1, 5, 15, 60, 240, 480, 960]
    assert (delivery.state, delivery.attempts) == ("failed", 8)
    assert not deliveries.send(delivery.pk, now + timedelta(days=9))
    assert smtp_sink.attempts == 8


def test_a_send_ends_before_its_claim_is_freed() -> None:
    # After the soft limit the connection is closed politely, which takes one more answer of the mail server.
    assert deliveries.SEND_SECONDS + django_settings.EMAIL_TIMEOUT < deliveries.SEND_KILL_SECONDS
    source = Path(django_settings.BASE_DIR, "config", "settings.py").read_text()
    (default,) = re.findall(r'"SILTWATCH_DELIVERY_STUCK_SECONDS", ([\d.]+)', source)
    assert float(default) > deliveries.SEND_KILL_SECONDS
    assert send_delivery.soft_time_limit == deliveries.SEND_SECONDS
    assert send_delivery.time_limit == deliveries.SEND_KILL_SECONDS


def test_a_send_that_takes_too_long_is_put_back(delivery: Delivery, monkeypatch: pytest.MonkeyPatch) -> None:
    def stall(_: EmailMultiAlternatives) -> None:
        raise SoftTimeLimitExceeded

    monkeypatch.setattr(EmailMultiAlternatives, "send", stall)
    assert not deliveries.send(delivery.pk, NOON)
    delivery.refresh_from_db()
    assert (delivery.state, delivery.last_error) == ("queued", "The mail server took longer than 240 s.")


def test_an_address_that_is_refused_for_good_is_tried_once_more(delivery: Delivery, smtp_sink: SmtpSink) -> None:
    smtp_sink.refuse_address(delivery.address)
    deliveries.send(delivery.pk, NOON)
    delivery.refresh_from_db()
    assert (delivery.state, delivery.attempts) == ("queued", 1)
    deliveries.send(delivery.pk, delivery.due_at)
    delivery.refresh_from_db()
    assert (delivery.state, delivery.attempts) == ("failed", 2)
    assert delivery.last_error == f"The mail server refused {delivery.address}: 550 5.1.1 No such mailbox"


def test_an_address_that_is_refused_for_now_is_tried_on(delivery: Delivery, smtp_sink: SmtpSink) -> None:
    smtp_sink.refuse_address(delivery.address, "450 4.2.1 Mailbox is busy")
    deliveries.send(delivery.pk, NOON)
    deliveries.send(delivery.pk, NOON + timedelta(minutes=1))
    delivery.refresh_from_db()
    assert (delivery.state, delivery.attempts) == ("queued", 2)


def test_a_retry_goes_to_where_the_person_is_reached_now(delivery: Delivery, smtp_sink: SmtpSink) -> None:
    smtp_sink.refuse_address(delivery.address)
    deliveries.send(delivery.pk, NOON)
    Person.objects.update(email="moved@plant.example")
    assert deliveries.send(delivery.pk, NOON + timedelta(minutes=1))
    (received,) = smtp_sink.messages
    delivery.refresh_from_db()
    assert received.recipients == ("moved@plant.example",)
    assert (delivery.address, delivery.attempts) == ("moved@plant.example", 1)


def test_nobody_without_an_address_is_written_to(delivery: Delivery, smtp_sink: SmtpSink) -> None:
    Person.objects.update(email="")
    assert not deliveries.send(delivery.pk, NOON)
    delivery.refresh_from_db()
    assert delivery.state == "failed"
    assert "no mail address" in delivery.last_error


def test_a_sweep_asks_for_what_waits_longest_and_no_more(
    delivery: Delivery,
    broker: Redis,
    monkeypatch: pytest.MonkeyPatch,
    django_capture_on_commit_callbacks: DjangoCaptureOnCommitCallbacks,
) -> None:
    monkeypatch.setattr(deliveries, "A_SWEEP", 1)
    older = Delivery.objects.create(
        alert=delivery.alert, person=delivery.person, reason="forecast", address="x@y.example", due_at=days_ago(1)
    )
    with django_capture_on_commit_callbacks(execute=True):
        assert deliveries.send_due(NOON) == 1
    (message,) = [json.loads(raw) for raw in broker.lrange("mail", 0, -1)]
    assert message["headers"]["argsrepr"] == f"[{older.pk}]"
    assert message["headers"]["expires"]


def test_the_sweep_frees_a_claim_whose_worker_died(delivery: Delivery, settings: Settings) -> None:
    settings.DELIVERY_STUCK_SECONDS = 120
    deliveries.claim(delivery.pk, NOON)
    assert deliveries.send_due(NOON + timedelta(seconds=119)) == 0
    assert deliveries.send_due(NOON + timedelta(seconds=121)) == 1
    delivery.refresh_from_db()
    assert (delivery.state, delivery.last_error) == ("queued", "Broken off while being sent.")


def test_a_claim_that_was_freed_cannot_be_marked_by_its_first_owner(delivery: Delivery) -> None:
    deliveries.claim(delivery.pk, NOON)
    late = Delivery.objects.get(pk=delivery.pk)
    deliveries.send_due(NOON + timedelta(hours=1))
    deliveries._give_up(late, "late")
    delivery.refresh_from_db()
    assert delivery.state == "queued"


def test_the_sweep_asks_the_worker_after_commit(
    delivery: Delivery, broker: Redis, django_capture_on_commit_callbacks: DjangoCaptureOnCommitCallbacks
) -> None:
    with django_capture_on_commit_callbacks(execute=True):
        assert deliveries.send_due(NOON) == 1
        assert broker.llen("mail") == 0
    assert broker.llen("mail") == 1
    assert b"alerts.tasks.send_delivery" in broker.lrange("mail", 0, 0)[0]


def test_nobody_who_has_left_gets_it(delivery: Delivery, smtp_sink: SmtpSink) -> None:
    Person.objects.update(is_active=False)
    assert not deliveries.send(delivery.pk, NOON)
    delivery.refresh_from_db()
    assert delivery.state == "failed"
    assert "no longer active" in delivery.last_error
    assert not smtp_sink.messages


def test_the_database_refuses_a_second_delivery_for_the_same_reason(delivery: Delivery) -> None:
    with pytest.raises(IntegrityError), transaction.atomic():
        Delivery.objects.create(
            alert=delivery.alert, person=delivery.person, reason=delivery.reason, address="x@y.example", due_at=NOON
        )


@pytest.fixture
def owed_for_real(committed_rows: None) -> Delivery:
    press = scene.reservoir()
    person = scene.subscriber(press)
    alert = Alert.objects.create(
        reservoir=press, family="dirt", kind="past_limit", weight=1, headline="h", sentence="s",
        opened_at=NOON, updated_at=NOON,
    )  # fmt: skip
    return Delivery.objects.create(alert=alert, person=person, reason="past_limit", address=person.email, due_at=NOON)


@pytest.mark.django_db(transaction=True)
def test_a_broker_that_is_down_does_no_harm(owed_for_real: Delivery, monkeypatch: pytest.MonkeyPatch) -> None:
    def refused(*_: object, **__: object) -> None:
        raise OperationalError("no broker")

    monkeypatch.setattr(current_app, "send_task", refused)
    with transaction.atomic():
        assert deliveries.send_due(NOON) == 1
    owed_for_real.refresh_from_db()
    assert owed_for_real.state == "queued"


@pytest.mark.django_db(transaction=True)
def test_of_many_workers_at_once_one_gets_the_claim(owed_for_real: Delivery) -> None:
    together = Barrier(6)

    def work(_: int) -> bool:
        try:
            together.wait(timeout=10)
            return deliveries.claim(owed_for_real.pk, NOON)
        finally:
            connection.close()

    with ThreadPoolExecutor(6) as pool:
        assert sorted(pool.map(work, range(6))) == [False] * 5 + [True]
    owed_for_real.refresh_from_db()
    assert owed_for_real.attempts == 1
