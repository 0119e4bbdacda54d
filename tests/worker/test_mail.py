"""Mail with a real worker: enqueued after commit, refused and tried again, and killed in the middle."""

from collections.abc import Iterator
from datetime import timedelta

import pytest
from django.db import transaction
from django.utils import timezone

from alerts.models import Delivery
from fleet.refresh import want_refresh
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import PAST
from tests.smtp_sink import SmtpSink
from tests.worker_process import CeleryProcess, Worker

pytestmark = pytest.mark.worker


def a_sample_past_the_limit_is_judged() -> None:
    """The worker refreshes the outlook, and that asks it to evaluate."""
    press = scene.reservoir()
    scene.subscriber(press)
    now = timezone.now()
    builders.sample(press, now - timedelta(days=1), PAST)
    with transaction.atomic():
        want_refresh([press.pk], now)


def sent() -> bool:
    return Delivery.objects.filter(state="sent").exists()


def make_due_now() -> None:
    """What an hour's patience would do."""
    Delivery.objects.filter(state="queued").update(due_at=timezone.now())


def two_sweeps_go_by(worker: Worker) -> None:
    """Not `wait_idle`: what a killed worker had not acknowledged stays with the broker for a while."""
    done = "Task alerts.tasks.send_due["
    before = worker.output().count(done)
    worker.wait_until(lambda: worker.output().count(done) >= before + 2)


@pytest.fixture
def sink(worker: Worker, smtp_sink: SmtpSink) -> Iterator[SmtpSink]:
    yield smtp_sink
    smtp_sink.release()


def test_a_judgement_is_mailed_once_and_within_seconds(worker: Worker, sink: SmtpSink) -> None:
    a_sample_past_the_limit_is_judged()
    worker.wait_until(sent, timeout=5)
    worker.wait_idle()
    (mail,) = sink.messages
    assert "Past limit · Press 4 drive pack" in mail.message["Subject"]
    assert "code 16" in mail.body()
    assert "code 16" in mail.body("html")


def test_refused_twice_it_is_tried_again_and_sent_once(worker: Worker, beat: CeleryProcess, sink: SmtpSink) -> None:
    sink.refuse(2)
    a_sample_past_the_limit_is_judged()
    for attempts in (1, 2):
        worker.wait_until(lambda n=attempts: Delivery.objects.filter(state="queued", attempts=n).exists())  # type: ignore[misc]
        make_due_now()
    worker.wait_until(sent)
    worker.wait_idle()
    assert (Delivery.objects.get().attempts, sink.attempts, len(sink.messages)) == (3, 3, 1)


@pytest.mark.parametrize("stage", ["EHLO", "DATA"])
def test_killed_during_a_send_it_is_sent_once_after_the_restart(
    stage: str, worker: Worker, beat: CeleryProcess, sink: SmtpSink
) -> None:
    sink.hold(stage)  # type: ignore[arg-type]
    a_sample_past_the_limit_is_judged()
    worker.wait_until(lambda: Delivery.objects.filter(state="sending").exists())
    worker.kill()
    assert Delivery.objects.get().state == "sending"
    sink.release()
    worker.start()
    worker.wait_until(sent, timeout=30)
    two_sweeps_go_by(worker)
    assert Delivery.objects.get().attempts == 2
    assert len(sink.messages) == 1


def test_once_marked_sent_a_restart_and_a_repeated_message_send_nothing_more(worker: Worker, sink: SmtpSink) -> None:
    from alerts.tasks import send_delivery, send_due

    a_sample_past_the_limit_is_judged()
    worker.wait_until(sent)
    worker.restart()
    send_due.delay()
    send_delivery.delay(Delivery.objects.get().pk)
    worker.wait_idle()
    assert len(sink.messages) == 1
