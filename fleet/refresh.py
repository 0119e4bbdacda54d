"""Ask for fresh outlooks after the register has changed. The row is the truth, the message only a hint."""

from collections.abc import Iterable
from datetime import datetime

from celery import current_app
from django.conf import settings
from django.db import transaction

from fleet.models import Standing

# Beyond this many reservoirs at once the sweep, which finds the rows, is kinder than a flood of messages.
MESSAGES_AT_ONCE = 50


def want_refresh(reservoir_ids: Iterable[int], now: datetime) -> None:
    """Mark the reservoirs as wanting a refresh, and after commit send the tasks of AFTER_FLEET_CHANGE_TASKS.

    Call it inside the transaction of the change. A broker that is down loses nothing: the sweep finds `wanted_at`.
    """
    wanted = sorted(set(reservoir_ids))
    Standing.objects.bulk_create([Standing(reservoir_id=pk) for pk in wanted], ignore_conflicts=True)
    Standing.objects.filter(pk__in=wanted).update(wanted_at=now)

    def send() -> None:
        _send(wanted[:MESSAGES_AT_ONCE])

    transaction.on_commit(send, robust=True)


def _send(reservoir_ids: list[int]) -> None:
    for task in settings.AFTER_FLEET_CHANGE_TASKS:
        for reservoir_id in reservoir_ids:
            current_app.send_task(task, args=[reservoir_id])
