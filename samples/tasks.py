"""Background work of the samples app: thin, ids only, safe to repeat."""

from celery import current_app, shared_task
from django.conf import settings
from django.utils import timezone

from samples import outlooks


@shared_task
def refresh_outlook(reservoir_id: int) -> None:
    outlooks.refresh_outlook(reservoir_id, timezone.now())
    for name in settings.AFTER_REFRESH_TASKS:
        current_app.send_task(name)


@shared_task
def sweep_outlooks() -> None:
    for reservoir_id in outlooks.wanted_ids():
        refresh_outlook.delay(reservoir_id)


@shared_task
def refresh_all() -> None:
    outlooks.want_all(timezone.now())
    sweep_outlooks.delay()
