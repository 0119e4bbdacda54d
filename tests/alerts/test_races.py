"""Two workers at once, on two connections."""

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from threading import Barrier

import pytest
from django.db import connection, transaction

from alerts import evaluation, handling
from alerts.models import Alert, Delivery
from fleet.models import Role, Standing
from samples.outlooks import refresh_outlook
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import PAST
from tests.builders import NOON, days_ago

pytestmark = pytest.mark.usefixtures("committed_rows")


def together(times: int, work: Callable[[], object]) -> list[object]:
    barrier = Barrier(times)

    def one(_: int) -> object:
        try:
            barrier.wait(timeout=10)
            return work()
        finally:
            connection.close()

    with ThreadPoolExecutor(times) as pool:
        return list(pool.map(one, range(times)))


def test_two_evaluations_at_once_open_one_alert_and_owe_one_mail() -> None:
    press = scene.reservoir()
    scene.subscriber(press)
    builders.sample(press, days_ago(2), PAST)
    refresh_outlook(press.pk, NOON)
    together(4, lambda: evaluation.evaluate_changed(NOON))
    evaluation.evaluate_changed(NOON)
    assert (Alert.objects.count(), Delivery.objects.count()) == (1, 1)


def test_a_row_that_is_being_rewritten_is_left_for_the_next_look() -> None:
    press = scene.reservoir()
    builders.sample(press, days_ago(2), PAST)
    refresh_outlook(press.pk, NOON)
    with transaction.atomic():
        Standing.objects.select_for_update().get(pk=press.pk)
        assert together(1, lambda: evaluation.evaluate_changed(NOON)) == [0]
    assert evaluation.evaluate_changed(NOON) == 1


def test_of_many_people_at_once_one_closes_and_one_is_first_to_see() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), PAST)
    alert, engineer = Alert.objects.get(), builders.person(Role.ENGINEER)
    seen = together(4, lambda: handling.acknowledge(alert, engineer, "", NOON))
    closed = together(4, lambda: handling.close(alert, engineer, "other", "done", NOON))
    assert (seen.count(True), closed.count(True)) == (1, 1)
