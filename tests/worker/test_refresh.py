"""Outlooks through a real worker: fresh after a save, and there after a kill."""

from collections.abc import Iterator
from contextlib import contextmanager
from datetime import timedelta

import psycopg
import pytest
from django.db import connection, transaction
from django.utils import timezone

from config.celery import app
from fleet.models import Reservoir, Standing
from fleet.refresh import want_refresh
from samples.models import Outlook
from tests import builders
from tests.worker_process import Worker

pytestmark = pytest.mark.worker


def sampled() -> Reservoir:
    made = builders.reservoir()
    builders.limit(made, "20/18/15")
    builders.sample(made, timezone.now() - timedelta(days=2), {"p4": 1250.0, "p6": 320.0, "p14": 40.0})
    return made


@contextmanager
def held(made: Reservoir) -> Iterator[None]:
    """Somebody else holds the standing row, so that a refresh stops in its middle and waits."""
    parameters = connection.get_connection_params()
    parameters.pop("cursor_factory", None)
    parameters.pop("context", None)
    with psycopg.connect(**parameters) as other:
        other.execute("SELECT 1 FROM fleet_standing WHERE reservoir_id = %s FOR UPDATE", [made.pk])
        yield


def waits_for_the_row() -> bool:
    with connection.cursor() as cursor:
        cursor.execute(
            "SELECT count(*) FROM pg_stat_activity WHERE wait_event_type = 'Lock' AND datname = current_database()"
        )
        row = cursor.fetchone()
    return bool(row and row[0])


def is_fresh(made: Reservoir) -> bool:
    return Standing.objects.filter(pk=made.pk, wanted_at=None, word="within_target").exists()


def test_a_change_that_is_committed_is_worked_out(worker: Worker) -> None:
    made = sampled()
    with transaction.atomic():
        want_refresh([made.pk], timezone.now())
    worker.wait_until(lambda: is_fresh(made))
    assert Outlook.objects.filter(reservoir=made).count() == 3


def test_a_change_that_is_rolled_back_asks_for_nothing(worker: Worker) -> None:
    made = sampled()
    with transaction.atomic():
        want_refresh([made.pk], timezone.now())
        transaction.set_rollback(True)
    worker.wait_idle()
    assert not Outlook.objects.exists()


def test_a_worker_killed_in_the_middle_of_a_refresh_leaves_it_to_the_sweep(worker: Worker) -> None:
    made = sampled()
    Standing.objects.create(reservoir=made, wanted_at=timezone.now() - timedelta(minutes=1))
    with held(made):
        app.send_task("samples.tasks.refresh_outlook", args=[made.pk])
        worker.wait_until(waits_for_the_row)
        worker.kill()
    assert not Outlook.objects.exists()
    worker.start()
    app.send_task("samples.tasks.sweep_outlooks")
    worker.wait_until(lambda: is_fresh(made))
    assert Outlook.objects.filter(reservoir=made).count() == 3
