"""How many queries a page needs: pinned, and the same with 3 and with 30 rows.

To add a page: its address name, how its kwargs come from the first reservoir, and the most queries it may need.
"""

from collections.abc import Callable
from datetime import date, timedelta
from typing import Any

import pytest
from django.db import connection
from django.test import Client
from django.test.utils import CaptureQueriesContext
from django.urls import reverse

from fleet.models import Reservoir, Role
from tests import builders
from tests.test_roles import NOUN_ROLES

Kwargs = Callable[[Reservoir], dict[str, Any]]


def nothing(tank: Reservoir) -> dict[str, Any]:
    return {}


def tag(tank: Reservoir) -> dict[str, Any]:
    return {"tag": tank.tag}


def first(path: str = "pk") -> Kwargs:
    """The id of the first reservoir, or of what it has at the path."""

    def found(tank: Reservoir) -> dict[str, Any]:
        return {"pk": Reservoir.objects.filter(pk=tank.pk).order_by(path).values_list(path, flat=True)[0]}

    return found


# Session, person and the line at the top cost 3 or 4 of them.
PAGES: dict[str, tuple[Kwargs, int]] = {
    "account": (nothing, 7),
    "board": (nothing, 8),
    "reservoir": (tag, 15),
    "samples": (nothing, 9),
    "alerts": (nothing, 8),
    "register": (nothing, 17),
    "register-sites": (nothing, 5),
    "register-areas": (nothing, 5),
    "register-machines": (nothing, 6),
    "register-reservoirs": (nothing, 6),
    "register-sample-points": (nothing, 6),
    "register-other-names": (nothing, 5),
    "register-fluids": (nothing, 5),
    "register-oil-charges": (nothing, 6),
    "register-events": (nothing, 6),
    "register-filter-positions": (nothing, 6),
    "register-elements": (nothing, 6),
    "register-targets": (nothing, 5),
    "register-limits": (nothing, 5),
    "register-laboratories": (nothing, 5),
    "register-people": (nothing, 5),
    "register-site": (first("area__site"), 5),
    "register-area": (first("area"), 6),
    "register-machine": (first("machine"), 5),
    "register-reservoir": (first(), 16),
    "register-fluid": (first("charges__fluid"), 5),
    "register-position": (first("filter_positions"), 5),
    "register-event": (first("events"), 4),
    "register-reservoir-add": (nothing, 8),
    "register-reservoir-edit": (first(), 8),
    "register-event-add": (nothing, 7),
    "register-element-add": (nothing, 5),
    "register-target-add": (nothing, 9),
}


def build(numbers: range) -> None:
    """Reservoirs with everything that a page lists, and as much again at the first one."""
    for n in numbers:
        tank = builders.reservoir(machine=f"Press {n}", area=builders.area(f"Hall {n}"))
        _equip(tank, n)
        _equip(_first(), 100 + n)
        builders.laboratory(f"Bench {n}")
        builders.fluid(f"HM {n}")
        builders.site(f"Works {n}")


def _first() -> Reservoir:
    return Reservoir.objects.get(machine__name="Press 0")


def _equip(tank: Reservoir, n: int) -> None:
    position = builders.filter_position(tank, f"R{n}")
    builders.element(position, date(2025, 1, 1))
    builders.event(tank, at=builders.days_ago(n + 1), entered_by=builders.person(), fluid=builders.fluid())
    builders.alias(tank, f"UNIT {n}")
    day = date(2001, 1, 1) + timedelta(days=n)
    builders.target(tank, "18/16/13", since=day, author=builders.person())
    builders.limit(tank, "20/18/15", since=day)


def queries(client: Client, name: str) -> int:
    address = reverse(name, kwargs=PAGES[name][0](_first()))
    with CaptureQueriesContext(connection) as seen:
        assert client.get(address).status_code == 200
    return len(seen)


@pytest.mark.django_db
@pytest.mark.parametrize("name", PAGES)
def test_a_page_needs_as_many_queries_for_30_rows_as_for_3(client: Client, name: str) -> None:
    client.force_login(builders.person(Role.ADMINISTRATOR))
    build(range(3))
    with_few = queries(client, name)
    build(range(3, 30))
    assert queries(client, name) == with_few <= PAGES[name][1]


def test_every_list_of_the_register_is_counted() -> None:
    lists = {f"register-{many}" for _, many, *_ in NOUN_ROLES}
    assert lists <= set(PAGES)
