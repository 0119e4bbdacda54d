"""How long things take on this machine: printed, never asserted. `make bench` runs it."""

import os
import platform
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from datetime import timedelta

import numpy as np
import pytest
from django.db import connection
from django.test import Client
from django.utils import timezone

from fleet.models import Reservoir, Role, Standing
from samples.demo.load import load
from samples.outlooks import refresh_outlook
from samples.trends.forecast import Side, runway
from samples.trends.level import LevelParameters, run_filter
from tests import builders

pytestmark = pytest.mark.bench
COUNTS = LevelParameters(0.20, 0.08, 0.05)


@contextmanager
def quietly(capsys: pytest.CaptureFixture[str]) -> Iterator[Callable[[str], None]]:
    with capsys.disabled():
        yield print


def best_of(work: Callable[[], object], times: int = 5) -> float:
    """The shortest of a few runs, in seconds: the one that was least disturbed."""
    spent = []
    for _ in range(times):
        start = time.perf_counter()
        work()
        spent.append(time.perf_counter() - start)
    return min(spent)


def test_name_the_machine(capsys: pytest.CaptureFixture[str]) -> None:
    with quietly(capsys) as say:
        say(
            f"\n{platform.machine()}, {os.cpu_count()} cores, "
            f"Python {platform.python_version()}, numpy {np.__version__}"
        )


def test_filter_and_runway_of_eighty_thousand_stretches(capsys: pytest.CaptureFixture[str]) -> None:
    rng = np.random.default_rng(1)
    times = np.sort(rng.uniform(0, 36, (80_000, 24)), axis=1)
    y = 14 + rng.normal(0, 0.4, times.shape).cumsum(axis=1)
    spent = best_of(lambda: run_filter(times, y, COUNTS), 3)
    state = run_filter(times, y, COUNTS).state
    ahead = best_of(lambda: runway(state, 18.0, Side.UPPER, COUNTS), 3)
    with quietly(capsys) as say:
        say(f"filter, 80,000 stretches × 24 samples: {spent:.2f} s; their runways: {ahead:.2f} s")


@pytest.mark.django_db
def test_refresh_and_pages_of_the_demo_fleet(client: Client, capsys: pytest.CaptureFixture[str]) -> None:
    builders.measurand("water")
    now = timezone.now()
    loading = best_of(lambda: load(now), 1)
    trimmer = Reservoir.objects.get(machine__name="Edge trimmer")
    refreshing = best_of(lambda: refresh_outlook(trimmer.pk, now))
    client.force_login(builders.person(Role.READER))
    board = best_of(lambda: client.get("/"))
    page = best_of(lambda: client.get(f"/reservoirs/{trimmer.tag}/"))
    with quietly(capsys) as say:
        say(f"demo fleet, 60 reservoirs and three years: loaded in {loading:.1f} s")
        say(f"one reservoir refreshed: {1000 * refreshing:.0f} ms")
        say(f"board: {1000 * board:.0f} ms; a reservoir's page: {1000 * page:.0f} ms")


@pytest.mark.django_db
def test_the_board_of_ten_thousand_reservoirs(client: Client, capsys: pytest.CaptureFixture[str]) -> None:
    area, fluid = builders.area(), builders.fluid()
    machine = builders.reservoir(area=area, fluid=fluid).machine
    Reservoir.objects.bulk_create(
        Reservoir(
            area=area, machine=machine, name=f"pack {n}", tag=f"B-{n:05d}", reservoir_class="hydraulic", volume_l=400
        )
        for n in range(10_000)
    )
    drawn = timezone.now() - timedelta(days=5)
    Standing.objects.bulk_create(
        Standing(
            reservoir_id=pk, word="within_target", rank=4, room=n % 70 / 10, headroom=n % 70 / 10, last_drawn_at=drawn
        )
        for n, pk in enumerate(Reservoir.objects.exclude(tag__startswith="T-").values_list("pk", flat=True))
    )
    with connection.cursor() as cursor:
        cursor.execute("ANALYZE fleet_reservoir, fleet_standing")
    client.force_login(builders.person(Role.READER))
    with quietly(capsys) as say:
        say(f"board of 10,000 reservoirs, first hundred rows: {1000 * best_of(lambda: client.get('/')):.0f} ms")
