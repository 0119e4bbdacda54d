"""Background work of the alerts app: thin, ids only, safe to repeat."""

from celery import shared_task
from django.utils import timezone

from alerts import deliveries, evaluation


@shared_task
def evaluate_changed() -> None:
    now = timezone.now()
    evaluation.evaluate_changed(now)
    evaluation.evaluate_overdue(now)


@shared_task
def evaluate_reservoir(reservoir_id: int) -> None:
    evaluation.evaluate_reservoir(reservoir_id, timezone.now(), even_if_judged=True)


@shared_task
def send_delivery(delivery_id: int) -> None:
    deliveries.send(delivery_id, timezone.now())


@shared_task
def send_due() -> None:
    deliveries.send_due(timezone.now())
