"""Background work of the alerts app: thin, ids only, safe to repeat."""

from celery import shared_task
from django.conf import settings
from django.utils import timezone

from alerts import deliveries, evaluation


@shared_task
def evaluate_changed() -> None:
    waiting = evaluation.waiting(timezone.now())
    if len(waiting) == 1:
        evaluate_reservoir(waiting[0])
        return
    for reservoir_id in waiting:
        evaluate_reservoir.apply_async((reservoir_id,), expires=settings.SWEEP_SECONDS)


@shared_task
def evaluate_reservoir(reservoir_id: int) -> None:
    evaluation.evaluate_reservoir(reservoir_id, timezone.now(), even_if_judged=True)


@shared_task(soft_time_limit=deliveries.SEND_SECONDS, time_limit=deliveries.SEND_KILL_SECONDS)
def send_delivery(delivery_id: int) -> None:
    deliveries.send(delivery_id, timezone.now())


@shared_task
def send_due() -> None:
    deliveries.send_due(timezone.now())
