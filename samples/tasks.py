"""Background work of the samples app: thin, ids only, safe to repeat."""

from celery import current_app, shared_task
from django.conf import settings
from django.utils import timezone

from samples import outlooks

# One chunk takes about a second, so that a sample that is saved meanwhile waits no longer for its turn.
A_CHUNK = 20


@shared_task
def refresh_outlook(reservoir_id: int) -> None:
    if outlooks.refresh_wanted(reservoir_id, timezone.now()):
        _tell()


@shared_task
def refresh_many(reservoir_ids: list[int]) -> None:
    if outlooks.refresh_many(reservoir_ids, timezone.now()):
        _tell()


@shared_task
def sweep_outlooks() -> None:
    _refresh_in_chunks(outlooks.left_behind(timezone.now()))


@shared_task
def refresh_all() -> None:
    _refresh_in_chunks(outlooks.want_all(timezone.now()))


def _refresh_in_chunks(reservoir_ids: list[int]) -> None:
    for start in range(0, len(reservoir_ids), A_CHUNK):
        refresh_many.delay(reservoir_ids[start : start + A_CHUNK])


def _tell() -> None:
    for name in settings.AFTER_REFRESH_TASKS:
        current_app.send_task(name)
