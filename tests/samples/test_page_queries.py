"""How many queries the pages of samples need: pinned, and the same with 3 and with 30 rows."""

from collections.abc import Callable
from datetime import timedelta
from typing import Any

import pytest
from django.db import connection
from django.http import HttpResponse
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse
from django.utils import timezone

from fleet.models import Reservoir, Role
from samples.models import IntakeFile, Sample
from tests import builders
from tests.samples.scene import client_as, typed

pytestmark = pytest.mark.django_db

# Session, person and the line at the top cost 3 or 4 of them.
PAGES: dict[str, tuple[Callable[[Client, Reservoir], Any], int]] = {
    "log without a reservoir": (lambda client, press: client.get(reverse("log")), 6),
    "log": (lambda client, press: client.get(reverse("log"), {"reservoir": press.tag}), 20),
    "log-find": (lambda client, press: client.get(reverse("log-find"), {"q": "pack"}), 4),
    "log-preview": (lambda client, press: client.post(reverse("log-preview"), typed(press, paste="19/17/13")), 20),
    "samples": (lambda client, press: client.get(reverse("samples")), 10),
    "sample": (lambda client, press: client.get(reverse("sample", args=[first(press).pk])), 17),
    "upload": (lambda client, press: client.get(reverse("upload")), 7),
}


def first(press: Reservoir) -> Sample:
    found: Sample = Sample.objects.filter(reservoir=press).earliest("drawn_at")
    return found


def add(numbers: range, press: Reservoir) -> None:
    for n in numbers:
        builders.laboratory(f"Bench {n}")
        drawn = timezone.now() - timedelta(days=n + 2)
        for place in (press, builders.reservoir(machine=f"Press {n}", area=builders.area(f"Hall {n}"))):
            builders.sample(place, drawn, {"p4": 2178.0, "water": 90.0 + n}, laboratory=builders.laboratory(f"Lab {n}"))
        facts = {"name": f"{n}.csv", "digest": f"{n}", "rows": 1, "added": 1, "entered_at": drawn}
        IntakeFile.objects.create(**facts, entered_by=builders.person())


def queries(ask: Callable[[Client, Reservoir], HttpResponse], client: Client, press: Reservoir) -> int:
    with CaptureQueriesContext(connection) as seen:
        assert ask(client, press).status_code == 200
    return len(seen)


@pytest.mark.parametrize("name", PAGES)
def test_a_page_needs_as_many_queries_for_30_rows_as_for_3(name: str) -> None:
    ask, most = PAGES[name]
    client, press = client_as(Role.ENGINEER), builders.reservoir()
    add(range(3), press)
    with_few = queries(ask, client, press)
    add(range(3, 30), press)
    assert queries(ask, client, press) == with_few <= most
