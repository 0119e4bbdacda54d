"""The mail that is owed: who gets it, and how each one is sent once.

A delivery goes queued → sending → sent. It is claimed by a conditional update, so that of any number of workers one
sends it, and once it is marked sent nothing sends it again. Between the mail server's yes and that mark a crash can
make a second copy; it carries the same Message-ID, by which mail programs can tell. A send that fails waits longer each
time; a claim whose worker died is freed by the sweep, which is later than the longest send. It goes to the address the
person has now; one that the mail server refuses for good is tried once more and then given up.
"""

import logging
import smtplib
from collections.abc import Callable, Iterable
from datetime import datetime, timedelta
from typing import Final

from celery import current_app
from celery.exceptions import SoftTimeLimitExceeded
from django.conf import settings
from django.core.exceptions import ValidationError
from django.core.validators import validate_email
from django.db import transaction
from django.db.models import F, Q, QuerySet

from alerts import mail
from alerts.models import Alert, Delivery, Subscription
from alerts.rules import Kind
from fleet.models import Person

logger = logging.getLogger(__name__)

SEND_TASK: Final = "alerts.tasks.send_delivery"
RETRY_MINUTES: Final = (1, 5, 15, 60, 240, 480, 960)
MOST_ATTEMPTS: Final = len(RETRY_MINUTES) + 1
# What a mail server refuses for good is tried once more: the mailbox may have been made meanwhile.
MOST_REFUSALS: Final = 2
BROKEN_OFF: Final = "Broken off while being sent."
# One send takes no longer than this, whatever the mail server does; the worker's hard limit lies between it and
# DELIVERY_STUCK_SECONDS, so that a claim is never freed while somebody still sends.
SEND_SECONDS: Final = 240
SEND_KILL_SECONDS: Final = 300
# A sweep asks for as many as this, those that wait longest first.
A_SWEEP: Final = 200


def subscriptions_to(alert: Alert, kind: str) -> QuerySet[Subscription]:
    """Whose wishes an alert of that kind meets, by site, area and kind."""
    area = alert.reservoir.area
    return Subscription.objects.filter(
        Q(area=None) | Q(area=area), Q(kind="") | Q(kind=kind), site=area.site_id, person__is_active=True
    )


def recipients(alert: Alert, kind: str) -> list[Person]:
    """Active people with a usable address who asked for that kind of mail, each once."""
    asked = Person.objects.filter(pk__in=subscriptions_to(alert, kind).values("person"))
    return [person for person in asked if _is_address(person.email)]


def is_news(alert: Alert, kind: Kind) -> bool:
    """Whether a kind is graver than everything that was mailed about the alert before."""
    mailed = Delivery.objects.filter(alert=alert, reason__in=list(Kind)).values_list("reason", flat=True).distinct()
    return all(kind.is_graver_than(Kind(reason)) for reason in mailed)


def owe(alert: Alert, reason: str, now: datetime) -> list[Person]:
    """Make one delivery per recipient for this reason and have them sent after commit; who got one now."""
    owed = []
    for person in recipients(alert, reason):
        delivery, new = Delivery.objects.get_or_create(
            alert=alert, person=person, reason=reason, defaults={"address": person.email, "due_at": now}
        )
        if new:
            owed.append(person)
            enqueue([delivery.pk])
    return owed


def enqueue(delivery_ids: Iterable[int], expires: float | None = None) -> None:
    """Ask a worker to send, after commit; the message holds for `expires` seconds where that is given.

    One that is lost, or a broker that is down, does no harm: the sweep finds the row.
    """
    for delivery_id in delivery_ids:
        transaction.on_commit(_request_to_send(delivery_id, expires), robust=True)


def _request_to_send(delivery_id: int, expires: float | None) -> Callable[[], None]:
    # A function of its own, not a partial: Django names what failed by its __qualname__.
    def ask_to_send() -> None:
        current_app.send_task(SEND_TASK, args=[delivery_id], expires=expires)

    return ask_to_send


def claim(delivery_id: int, now: datetime) -> bool:
    """Take a delivery that is due; True for exactly one of all who try."""
    taken = (
        Delivery.objects.due(now)
        .filter(pk=delivery_id)
        .update(state=Delivery.State.SENDING, claimed_at=now, attempts=F("attempts") + 1)
    )
    return taken == 1


def send(delivery_id: int, now: datetime) -> bool:
    """Send one delivery if it can be claimed; True when the mail server took it and it is marked sent."""
    if not claim(delivery_id, now):
        return False
    delivery = mail.with_everything(Delivery.objects.all()).get(pk=delivery_id)
    if (hindrance := _hindrance(delivery.person)) is not None:
        return _give_up(delivery, hindrance)
    _address_now(delivery)
    message = mail.build(delivery)
    try:
        message.send()
    except (smtplib.SMTPException, OSError, SoftTimeLimitExceeded) as error:
        logger.warning("Delivery %s, attempt %s: %s", delivery.pk, delivery.attempts, _reason(error))
        most = MOST_REFUSALS if _is_refused_for_good(error) else MOST_ATTEMPTS
        return _put_back(delivery, now, _reason(error), most)
    _claimed_rows(delivery).update(
        state=Delivery.State.SENT, sent_at=now, last_error="", message_id=message.extra_headers["Message-ID"]
    )
    return True


def send_due(now: datetime) -> int:
    """Free claims whose worker is gone, and enqueue what has been due longest, as many as a sweep takes; says how many.

    The messages expire with the next sweep, which asks again: a slow mail server does not pile them up.
    """
    for delivery in Delivery.objects.stuck(now - timedelta(seconds=settings.DELIVERY_STUCK_SECONDS)):
        _put_back(delivery, now, BROKEN_OFF, delay=timedelta())
    due = list(Delivery.objects.due(now).order_by("due_at", "pk").values_list("pk", flat=True)[:A_SWEEP])
    enqueue(due, expires=settings.SWEEP_SECONDS)
    return len(due)


def retry_delay(attempts: int) -> timedelta:
    """How long to wait after that many failed attempts."""
    return timedelta(minutes=RETRY_MINUTES[min(attempts, len(RETRY_MINUTES)) - 1])


def _hindrance(person: Person) -> str | None:
    """Why a person can get no mail now, or None."""
    if not person.is_active:
        return f"{person} is no longer active here."
    return None if _is_address(person.email) else f"{person} has no mail address any more."


def _address_now(delivery: Delivery) -> None:
    """Send to where the person is reached now; at a new address the tries begin anew."""
    if delivery.address != delivery.person.email:
        delivery.address, delivery.attempts = delivery.person.email, 1
        _claimed_rows(delivery).update(address=delivery.address, attempts=delivery.attempts)


def _is_refused_for_good(error: Exception) -> bool:
    """Whether the mail server says that it will never take mail for the address: an answer of 500 or more to RCPT."""
    if not isinstance(error, smtplib.SMTPRecipientsRefused):
        return False
    return all(code >= 500 for code, _ in error.recipients.values())


def _reason(error: Exception) -> str:
    """What went wrong, to be read by people."""
    if isinstance(error, SoftTimeLimitExceeded):
        return f"The mail server took longer than {SEND_SECONDS} s."
    if isinstance(error, smtplib.SMTPRecipientsRefused):
        answers = [f"{to}: {code} {text.decode(errors='replace')}" for to, (code, text) in error.recipients.items()]
        return f"The mail server refused {'; '.join(answers)}"
    return f"{type(error).__name__}: {error}"


def _put_back(
    delivery: Delivery, now: datetime, error: str, most: int = MOST_ATTEMPTS, delay: timedelta | None = None
) -> bool:
    if delivery.attempts >= most:
        return _give_up(delivery, error)
    due_at = now + (retry_delay(delivery.attempts) if delay is None else delay)
    _claimed_rows(delivery).update(state=Delivery.State.QUEUED, due_at=due_at, claimed_at=None, last_error=error[:500])
    return False


def _give_up(delivery: Delivery, error: str) -> bool:
    _claimed_rows(delivery).update(state=Delivery.State.FAILED, claimed_at=None, last_error=error[:500])
    return False


def _claimed_rows(delivery: Delivery) -> QuerySet[Delivery]:
    """The row, as long as it is still under the claim it was read with."""
    return Delivery.objects.filter(pk=delivery.pk, state=Delivery.State.SENDING, claimed_at=delivery.claimed_at)


def _is_address(text: str) -> bool:
    try:
        validate_email(text)
    except ValidationError:
        return False
    return True
