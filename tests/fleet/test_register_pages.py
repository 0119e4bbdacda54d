"""The register in a browser's hands, without script: lists, pages, and the way to a first result."""

import csv
import io
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse

from fleet.models import Role
from tests.builders import alias, area, element, event, filter_position, limit, person, reservoir, site, target

pytestmark = pytest.mark.django_db


@pytest.fixture(autouse=True)
def _engineer(client: Client) -> None:
    client.force_login(person(Role.ENGINEER))


def read(client: Client, name: str, query: str = "", **kwargs: Any) -> str:
    answer = client.get(f"{reverse(name, kwargs=kwargs)}{query}")
    assert answer.status_code == 200
    return answer.content.decode()


def table(client: Client, name: str, query: str = "") -> list[dict[str, str]]:
    answer = client.get(f"{reverse(name)}?format=csv{query}")
    text = b"".join(answer.streaming_content).decode("utf-8-sig")  # type: ignore[attr-defined]
    return list(csv.DictReader(io.StringIO(text, newline="")))


def test_an_empty_fleet_shows_the_way_to_a_first_result(client: Client) -> None:
    page = read(client, "register")
    assert "No reservoir is registered yet" in page
    assert "a site (administrator)" in page
    assert reverse("register-area-add") in page
    reservoir()
    assert "No reservoir is registered yet" not in read(client, "register")


def test_people_stand_on_the_overview_for_administrators_only(client: Client) -> None:
    assert reverse("register-people") not in read(client, "register")
    client.force_login(person(Role.ADMINISTRATOR))
    assert reverse("register-people") in read(client, "register")


@pytest.mark.parametrize(
    ("query", "machines"),
    [
        ("&q=press+drive", {"Press 1 · drive pack"}),
        ("&q=old+unit", {"Mill 1 · gear case"}),
        ("&kind=gearbox", {"Mill 1 · gear case"}),
        ("&q=nothing+like+it", set()),
        ("&kind=no-such-class", {"Press 1 · drive pack", "Mill 1 · gear case"}),
    ],
)
def test_a_list_is_narrowed_by_what_is_asked_for(client: Client, query: str, machines: set[str]) -> None:
    reservoir(machine="Press 1")
    alias(reservoir("gear case", machine="Mill 1", reservoir_class="gearbox"), "OLD UNIT 7")
    assert {row["Reservoir"] for row in table(client, "register-reservoirs", query)} == machines


def test_a_list_is_narrowed_to_an_area_and_to_a_reservoir(client: Client) -> None:
    here, there = reservoir(machine="Press 1"), reservoir(machine="Saw 1", area=area("Yard"))
    for tank in (here, there):
        event(tank)
    for query in (f"&area={there.area_id}", f"&reservoir={there.pk}"):
        assert [row["Reservoir"] for row in table(client, "register-events", query)] == ["Saw 1 · drive pack"]


def test_a_list_sorts_both_ways_and_by_nothing_it_does_not_offer(client: Client) -> None:
    for n, litres in enumerate([400.0, 90.0, 2000.0]):
        reservoir(machine=f"Press {n}", volume_l=litres)
    volumes = [row["Volume, L"] for row in table(client, "register-reservoirs", "&sort=volume_l")]
    assert volumes == ["90.0", "400.0", "2000.0"]
    assert [row["Volume, L"] for row in table(client, "register-reservoirs", "&sort=-volume_l")] == volumes[::-1]
    assert len(table(client, "register-reservoirs", "&sort=area__site__time_zone")) == 3
    assert 'aria-sort="descending"' in read(client, "register-reservoirs", "?sort=-volume_l")


def test_a_long_list_comes_a_hundred_rows_at_a_time_and_whole_as_csv(client: Client) -> None:
    for n in range(101):
        area(f"Hall {n:03}")
    assert "Hall 100" not in read(client, "register-areas")
    assert "Hall 100" in read(client, "register-areas", "?page=2")
    assert len(table(client, "register-areas")) == 101


def test_a_name_that_a_spreadsheet_would_run_is_disarmed(client: Client) -> None:
    area('=HYPERLINK("x")')
    assert table(client, "register-areas")[0]["Area"] == '\'=HYPERLINK("x")'


def test_the_page_of_a_reservoir_shows_what_belongs_to_it(client: Client) -> None:
    tank = reservoir()
    element(filter_position(tank))
    alias(tank), target(tank, "18/16/13"), limit(tank, "20/18/15")
    event(tank, note="sight glass low")
    page = read(client, "register-reservoir", pk=tank.pk)
    for text in ("Held to today", "18/16/13", "20/18/15", "sight glass low", "HYD UNIT 4", "β5(c) ≥ 1000", "SP-1"):
        assert text in page
    assert reverse("reservoir", args=[tank.tag]) in page


def test_times_are_the_clock_of_the_site(client: Client) -> None:
    tank = reservoir(area=area(at=site("Far works", time_zone="Asia/Tokyo")))
    event(tank)
    assert table(client, "register-events")[0]["When"] == "2026-06-01T21:00+09:00"
    assert "1 Jun 2026 21:00" in read(client, "register-events")


def test_an_address_that_leads_nowhere_says_so_in_words(client: Client) -> None:
    answer = client.get("/register/reservoirs/999/")
    assert answer.status_code == 404
    assert "There is nothing at this address" in answer.content.decode()
