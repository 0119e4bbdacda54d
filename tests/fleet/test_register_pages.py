"""The register in a browser's hands, without script: lists, pages, and the way to a first result."""

import csv
import io
from typing import Any

import pytest
from django.test import Client
from django.urls import reverse
from pytest_django import DjangoAssertNumQueries

from fleet.models import Role
from tests.builders import alias, area, element, event, filter_position, fluid, limit, person, reservoir, site, target

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


def test_the_steps_of_an_empty_fleet_say_an_area(client: Client) -> None:
    page = read(client, "register")
    assert ">add an area</a>" in page
    assert ">add a fluid</a>" in page


def test_the_first_steps_lead_to_the_target_and_the_limit(client: Client) -> None:
    page = read(client, "board")
    for name in ("register-target-add", "register-limit-add", "log"):
        assert f'href="{reverse(name)}"' in page


def test_an_empty_list_in_a_form_leads_to_its_first_row_and_back(client: Client) -> None:
    site()
    page = read(client, "register-reservoir-add", "?next=/")
    for noun in ("area", "fluid"):
        assert f'None yet: <a href="{reverse(f"register-{noun}-add")}?next=' in page
    assert "?next=%2Fregister%2Freservoirs%2Fadd%2F%3Fnext%3D%2F" in page
    area()
    assert page.count("None yet") == 2
    assert read(client, "register-reservoir-add").count("None yet") == 1


def test_who_may_not_add_the_first_row_is_told_who_may(client: Client) -> None:
    assert "None yet. An administrator can add a site." in read(client, "register-area-add")


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
    volumes = [row["Volume (L)"] for row in table(client, "register-reservoirs", "&sort=volume_l")]
    assert volumes == ["90.0", "400.0", "2000.0"]
    assert [row["Volume (L)"] for row in table(client, "register-reservoirs", "&sort=-volume_l")] == volumes[::-1]
    assert len(table(client, "register-reservoirs", "&sort=area__site__time_zone")) == 3
    assert 'aria-sort="descending"' in read(client, "register-reservoirs", "?sort=-volume_l")


def test_a_long_list_comes_a_hundred_rows_at_a_time_and_whole_as_csv(client: Client) -> None:
    for n in range(101):
        area(f"Hall {n:03}")
    assert "Hall 100" not in read(client, "register-areas")
    assert "Hall 100" in read(client, "register-areas", "?page=2")
    assert len(table(client, "register-areas")) == 101


def test_a_figure_comes_apart_as_csv_with_bare_numbers_and_the_tag(client: Client) -> None:
    tank = reservoir(tag="P4-HP")
    limit(tank, key="water", high=300.0), target(tank, key="viscosity_40", low=-10.0, high=10.0, basis="percent")
    wet, thick = table(client, "register-limits")[0], table(client, "register-targets")[0]
    names = ("Not below", "Not above", "Unit", "Tag", "Set for")
    assert [wet[name] for name in names] == ["", "300.0", "mg/kg", "P4-HP", "one reservoir"]
    assert [thick[name] for name in names] == ["-10.0", "10.0", "%", "P4-HP", "one reservoir"]


@pytest.mark.parametrize("noun", ["sample-points", "other-names", "oil-charges", "events", "filter-positions"])
def test_rows_of_a_reservoir_carry_its_tag_as_csv(client: Client, noun: str) -> None:
    tank = reservoir(tag="P4-HP")
    alias(tank), event(tank), filter_position(tank)
    assert [row["Tag"] for row in table(client, f"register-{noun}")] == ["P4-HP"]


def test_an_element_comes_apart_as_csv(client: Client) -> None:
    element(filter_position(reservoir(tag="P4-HP")))
    row = table(client, "register-elements")[0]
    assert (row["Tag"], row["Beta ratio"], row["Beta ratio at (µm(c))"]) == ("P4-HP", "1000.0", "5.0")


def test_a_unit_stands_after_a_comma_on_the_screen_and_in_brackets_as_csv(client: Client) -> None:
    reservoir()
    assert ">Volume, L</a>" in read(client, "register-reservoirs")
    assert table(client, "register-reservoirs")[0]["Sampled every (days)"] == "60"


@pytest.mark.parametrize("rows", [3, 30])
@pytest.mark.parametrize("noun", ["reservoirs", "limits", "elements", "fluids"])
def test_a_download_asks_the_same_number_of_questions(
    client: Client, noun: str, rows: int, django_assert_max_num_queries: DjangoAssertNumQueries
) -> None:
    for n in range(rows):
        tank = reservoir(machine=f"Press {n}", fluid=fluid(f"HM {n}"))
        limit(tank, "20/18/15"), element(filter_position(tank))
    with django_assert_max_num_queries(6):
        assert len(table(client, f"register-{noun}")) == rows


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
