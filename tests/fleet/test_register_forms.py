"""Forms of the register: what does not fit is said at its field, and nothing that was typed is lost."""

from datetime import UTC, date, datetime
from typing import Any

import pytest
from django.http import HttpResponse
from django.test import Client
from django.urls import reverse

from fleet.models import Area, Element, Event, Fluid, Limit, Machine, Person, Reservoir, Role, Target
from tests.builders import (
    NOON,
    alias,
    area,
    days_ago,
    element,
    event,
    filter_position,
    fluid,
    limit,
    measurand,
    person,
    reservoir,
    sample,
    site,
    target,
)

pytestmark = pytest.mark.django_db


@pytest.fixture(autouse=True)
def who(client: Client) -> Person:
    engineer = person(Role.ENGINEER)
    client.force_login(engineer)
    return engineer


def send(client: Client, name: str, facts: dict[str, Any], query: str = "", **kwargs: Any) -> HttpResponse:
    sent = {key: value for key, value in facts.items() if value is not None}
    return client.post(reverse(name, kwargs=kwargs) + query, sent)  # type: ignore[return-value]


def faults(answer: HttpResponse) -> dict[str, list[str]]:
    """The codes of what did not fit, by field."""
    assert answer.status_code == 422
    form = answer.context["form"]  # type: ignore[attr-defined]
    return {name: [error.code for error in errors.as_data()] for name, errors in form.errors.items()}


def tank_facts(**more: Any) -> dict[str, Any]:
    facts = {
        "area": area().pk,
        "new_machine": "Press 7",
        "name": "drive pack",
        "tag": "P7-HP",
        "criticality": "A",
        "reservoir_class": "hydraulic",
        "volume_l": "1250,5",
        "cooler": "water",
        "interval_days": "60",
        "fluid": fluid().pk,
        "filled_at": "2025-03-01T08:00",
        "point_name": "SP-1",
        "point_place": "return",
    }
    return facts | more


def figure_facts(tank: Reservoir, **more: Any) -> dict[str, Any]:
    facts = {"scope": "reservoir", "reservoir": tank.pk, "measurand": measurand("iso4406").pk, "code": "18/16/13"}
    return facts | {"basis": "absolute", "valid_from": "2026-01-01", "source": "maker's manual, p. 12"} | more


def test_one_form_registers_a_reservoir_with_its_machine_oil_and_sample_point(client: Client) -> None:
    answer = send(client, "register-reservoir-add", tank_facts())
    tank = Reservoir.objects.get(tag="P7-HP")
    assert answer.headers["Location"] == reverse("register-reservoir", args=[tank.pk])
    charge = tank.charges.get()
    assert (tank.machine.name, tank.volume_l, tank.points.get().is_default) == ("Press 7", 1250.5, True)
    assert (charge.fluid, charge.started_at) == (fluid(), datetime(2025, 3, 1, 8, tzinfo=UTC))
    assert tank.standing.wanted_at is not None


def test_a_new_machine_that_is_there_already_is_taken(client: Client) -> None:
    there = Machine.objects.create(area=area(), name="Press 7")
    send(client, "register-reservoir-add", tank_facts(new_machine="press 7"))
    assert Reservoir.objects.get(tag="P7-HP").machine == there


@pytest.mark.parametrize(
    ("wrong", "field", "code"),
    [
        ({"new_machine": ""}, "machine", "machine_missing"),
        ({"volume_l": "a lot"}, "volume_l", "invalid"),
        ({"volume_l": "nan"}, "volume_l", "invalid"),
        ({"volume_l": "-4"}, "volume_l", "min_value"),
        ({"interval_days": "0"}, "interval_days", "min_value"),
        ({"filled_at": "2999-01-01T08:00"}, "filled_at", "future"),
        ({"filled_at": "yesterday"}, "filled_at", "invalid"),
        ({"tag": ""}, "tag", "required"),
        ({"reservoir_class": "teapot"}, "reservoir_class", "invalid_choice"),
    ],
)
def test_what_does_not_fit_is_said_at_its_field(client: Client, wrong: dict[str, str], field: str, code: str) -> None:
    answer = send(client, "register-reservoir-add", tank_facts(**wrong))
    assert faults(answer) == {field: [code]}
    assert not Reservoir.objects.exists()
    assert not Machine.objects.exists()


def test_a_tag_that_is_taken_is_refused(client: Client) -> None:
    reservoir(tag="P7-HP")
    assert faults(send(client, "register-reservoir-add", tank_facts())) == {"tag": ["unique"]}


def test_a_tag_that_differs_by_its_capitals_only_is_refused(client: Client) -> None:
    reservoir(tag="p7-hp")
    answer = send(client, "register-reservoir-add", tank_facts())
    assert faults(answer) == {"tag": ["reservoir_tag_once_any_case"]}
    assert "perhaps with other capital letters" in answer.content.decode()


@pytest.mark.parametrize("name", ["Press hall", "PRESS HALL"])
def test_an_area_has_its_name_once_at_a_site_whatever_its_capitals(client: Client, name: str) -> None:
    facts = {"site": area("Press hall").site_id, "name": name}
    code = "area_once_a_site" if name == "Press hall" else "area_once_a_site_any_case"
    assert faults(send(client, "register-area-add", facts)) == {"name": [code]}
    other = send(client, "register-area-add", facts | {"site": site("Far works").pk})
    assert other.status_code == 302


@pytest.mark.parametrize(
    ("facts", "found"),
    [
        ({"name": "press 1", "tag": "X"}, {"name": ["machine_once_an_area_any_case"]}),
        ({"name": "Press 2", "tag": "m-1"}, {"tag": ["machine_tag_once_any_case"]}),
    ],
)
def test_a_machine_has_its_name_and_tag_once_whatever_their_capitals(
    client: Client, facts: dict[str, str], found: dict[str, list[str]]
) -> None:
    there = Machine.objects.create(area=area(), name="Press 1", tag="M-1")
    assert faults(send(client, "register-machine-add", facts | {"area": there.area_id})) == found


@pytest.mark.parametrize(
    ("wrong", "sentence"),
    [
        ({"pressure_bar": "-1"}, "Must be 0 or more."),
        ({"interval_days": "0"}, "Must be 1 or more."),
        ({"interval_days": "soon"}, "Give a whole number."),
        ({"volume_l": "1000001"}, "No reservoir holds that much"),
        ({"reservoir_class": "teapot"}, "That is not on the list."),
        ({"area": "999999"}, "That is not on the list."),
        ({"name": ""}, "Fill this in."),
        ({"next_stop_on": "soon"}, "Give a day, for example 2026-03-01."),
        ({"name": "x" * 81}, "At most 80 characters fit; these are 81."),
    ],
)
def test_what_does_not_fit_is_said_in_our_own_words(client: Client, wrong: dict[str, str], sentence: str) -> None:
    page = send(client, "register-reservoir-add", tank_facts(**wrong)).content.decode()
    assert sentence in page
    for borrowed in ("Ensure", "Select a valid", "Enter a"):
        assert borrowed not in page


def test_a_reservoir_that_was_there_a_moment_ago_is_refused_in_words(client: Client) -> None:
    reservoir(machine="Press 7")
    answer = send(client, "register-reservoir-add", tank_facts())
    assert faults(answer) == {"name": ["reservoir_once_a_machine"]}


def test_a_refused_form_keeps_what_was_typed_and_leads_to_the_field(client: Client) -> None:
    page = send(client, "register-reservoir-add", tank_facts(volume_l="a lot", hazards="hot")).content.decode()
    assert 'value="a lot"' in page
    assert 'value="hot"' in page
    assert '<a href="#id_volume_l">Volume, L</a>' in page
    assert 'aria-describedby="id_volume_l_error"' in page
    assert 'aria-invalid="true"' in page


def test_times_are_read_by_the_clock_of_the_site(client: Client) -> None:
    tank = reservoir(area=area(at=site("Far works", time_zone="Asia/Tokyo")))
    facts = {"reservoir": tank.pk, "kind": "breather", "at": "2026-03-01T09:30"}
    send(client, "register-event-add", facts)
    logged = Event.objects.get()
    assert logged.at == datetime(2026, 3, 1, 0, 30, tzinfo=UTC)
    page = client.get(reverse("register-event-edit", args=[logged.pk])).content.decode()
    assert 'value="2026-03-01T09:30"' in page


def test_an_event_is_signed_and_leads_back_to_where_one_came_from(client: Client, who: Person) -> None:
    tank = reservoir()
    back = reverse("reservoir", args=[tank.tag])
    facts = {"reservoir": tank.pk, "kind": "top_up", "at": "2026-03-01T09:30", "litres": "12"}
    answer = send(client, "register-event-add", facts, query=f"?next={back}")
    assert answer.headers["Location"] == back
    assert Event.objects.get().entered_by == who


def test_nobody_is_led_to_another_site(client: Client) -> None:
    tank = reservoir()
    facts = {"reservoir": tank.pk, "kind": "breather", "at": "2026-03-01T09:30"}
    answer = send(client, "register-event-add", facts, query="?next=https://elsewhere.example/")
    assert answer.headers["Location"] == reverse("register-reservoir", args=[tank.pk])


@pytest.mark.parametrize("kind", ["top_up", "partial_change"])
def test_oil_that_was_added_needs_its_litres(client: Client, kind: str) -> None:
    facts = {"reservoir": reservoir().pk, "kind": kind, "at": "2026-03-01T09:30"}
    assert faults(send(client, "register-event-add", facts)) == {"litres": ["litres_missing"]}


def test_an_event_cannot_end_before_it_began(client: Client) -> None:
    facts = {
        "reservoir": reservoir().pk,
        "kind": "offline_run",
        "at": "2026-03-02T08:00",
        "ended_at": "2026-03-01T08:00",
    }
    assert faults(send(client, "register-event-add", facts)) == {"ended_at": ["event_span_forward"]}


def test_an_oil_change_through_the_form_begins_a_charge(client: Client) -> None:
    tank = reservoir()
    send(client, "register-event-add", {"reservoir": tank.pk, "kind": "oil_change", "at": "2026-03-01T09:30"})
    assert tank.charges.count() == 2


def test_a_refusal_of_the_subject_stands_above_the_form(client: Client) -> None:
    tank = reservoir()
    tank.charges.all().delete()
    facts = {"reservoir": tank.pk, "kind": "oil_change", "at": "2026-03-01T09:30"}
    assert faults(send(client, "register-event-add", facts)) == {"fluid": ["oil_unknown"]}


def test_a_new_element_takes_the_old_one_out(client: Client) -> None:
    position = filter_position(reservoir())
    old = element(position)
    facts = {
        "position": position.pk,
        "fitted_on": "2026-03-01",
        "rating_kind": "beta",
        "beta": "200",
        "beta_size_um": "5",
    }
    send(client, "register-element-add", facts | {"found": "indicator up"})
    old.refresh_from_db()
    assert (old.removed_on, old.removal_note) == (date(2026, 3, 1), "indicator up")
    assert Element.objects.count() == 2


@pytest.mark.parametrize(
    ("wrong", "field", "code"),
    [
        ({"beta": "", "beta_size_um": ""}, "beta", "element_beta_rating_has_beta"),
        ({"beta_size_um": ""}, "beta_size_um", "element_beta_with_size"),
        ({"fitted_on": "2999-01-01"}, "fitted_on", "future"),
        ({"fitted_on": "2025-01-01"}, "fitted_on", "element_no_overlap"),
    ],
)
def test_an_element_that_does_not_fit_is_refused(client: Client, wrong: dict[str, str], field: str, code: str) -> None:
    position = filter_position(reservoir())
    element(position)
    facts = {
        "position": position.pk,
        "fitted_on": "2026-03-01",
        "rating_kind": "beta",
        "beta": "200",
        "beta_size_um": "5",
    }
    assert faults(send(client, "register-element-add", facts | wrong)) == {field: [code]}


def test_a_target_is_kept_with_its_author_in_the_standard_way_of_writing(client: Client, who: Person) -> None:
    send(client, "register-target-add", figure_facts(reservoir(), code=" 18 / 16 / 13 "))
    made = Target.objects.get()
    assert (made.code, made.author, made.source) == ("18/16/13", who, "maker's manual, p. 12")


def test_a_new_figure_does_not_overwrite_the_old(client: Client) -> None:
    tank = reservoir()
    target(tank, "19/17/14")
    send(client, "register-target-add", figure_facts(tank))
    assert set(Target.objects.values_list("code", flat=True)) == {"19/17/14", "18/16/13"}


def test_what_does_not_belong_to_the_scope_is_let_go(client: Client) -> None:
    tank = reservoir()
    facts = figure_facts(tank, scope="class", site=site().pk, reservoir_class="gearbox", fluid=fluid().pk)
    send(client, "register-limit-add", facts)
    made = Limit.objects.get()
    assert (made.site, made.reservoir_class, made.fluid, made.reservoir) == (site(), "gearbox", None, None)


@pytest.mark.parametrize(
    ("key", "wrong", "found"),
    [
        ("iso4406", {"code": ""}, {"code": ["code_missing"]}),
        ("iso4406", {"code": "18/16/37"}, {"code": ["code_number_too_high"]}),
        ("iso4406", {"high": "20"}, {"high": ["side_beside_code"]}),
        ("water", {"high": "300"}, {"code": ["code_not_for_this"]}),
        ("water", {"code": "", "low": "100"}, {"high": ["side"]}),
        ("water", {"code": "", "high": "300", "basis": "percent"}, {"basis": ["basis"]}),
        ("viscosity_40", {"code": ""}, {"high": ["side"]}),
        ("viscosity_40", {"code": "", "low": "10", "high": "-10"}, {"high": ["sides_crossed"]}),
        ("iso4406", {"source": ""}, {"source": ["required"]}),
        ("iso4406", {"scope": "fluid", "fluid": ""}, {"fluid": ["scope_missing"]}),
    ],
)
def test_a_figure_that_makes_no_sense_is_refused(
    client: Client, key: str, wrong: dict[str, str], found: dict[str, list[str]]
) -> None:
    facts = figure_facts(reservoir(), measurand=measurand(key).pk, site=site().pk) | wrong
    assert faults(send(client, "register-target-add", facts)) == found


@pytest.mark.parametrize("wrong", ["target", "limit"])
def test_a_target_beyond_its_limit_is_refused_at_both_forms(client: Client, wrong: str) -> None:
    tank = reservoir()
    if wrong == "target":
        limit(tank, "17/15/12")
    else:
        target(tank, "20/18/15")
    answer = send(client, f"register-{wrong}-add", figure_facts(tank))
    assert faults(answer) == {"code": ["target_beyond_limit"]}


def test_the_makers_figure_stands_beside_the_form(client: Client) -> None:
    tank = reservoir()
    Machine.objects.update(maker_requirement="17/15/12, water below 200 mg/kg (manual 4.2)")
    page = client.get(reverse("register-target-add") + f"?reservoir={tank.pk}").content.decode()
    assert "The maker of this machine asks for: 17/15/12" in page


def test_a_second_planned_sample_point_takes_over(client: Client) -> None:
    tank = reservoir()
    send(client, "register-point-add", {"reservoir": tank.pk, "name": "SP-2", "is_default": "on"})
    assert [point.name for point in tank.points.filter(is_default=True)] == ["SP-2"]


def test_an_alias_ends_after_it_begins(client: Client) -> None:
    facts = {"reservoir": reservoir().pk, "name": "OLD", "valid_from": "2026-01-02", "valid_to": "2026-01-01"}
    assert faults(send(client, "register-alias-add", facts)) == {"valid_to": ["alias_span_forward"]}


def test_new_baselines_of_a_fluid_ask_for_fresh_outlooks(client: Client) -> None:
    tank = reservoir()
    oil = Fluid.objects.get()
    send(client, "register-fluid-edit", {"name": oil.name, "viscosity_40": "45,2"}, pk=oil.pk)
    tank.refresh_from_db()
    assert tank.standing.wanted_at is not None
    assert Fluid.objects.get().viscosity_40 == 45.2


def test_an_oil_charge_that_an_event_began_is_moved_by_the_event_only(client: Client) -> None:
    tank = reservoir()
    charge = tank.charges.get()
    event(tank, "oil_change", charge.started_at)
    send(client, "register-charge-edit", {"fluid": fluid("HM 32").pk, "started_at": "2020-01-01T00:00"}, pk=charge.pk)
    charge.refresh_from_db()
    assert (charge.fluid.name, charge.started_at) == ("HM 32", days_ago(1095))


def test_what_is_still_used_cannot_be_removed(client: Client) -> None:
    tank = reservoir()
    sample(tank, NOON)
    for name, row in (("area", tank.area), ("machine", tank.machine), ("reservoir", tank)):
        answer = client.post(reverse(f"register-{name}-remove", args=[row.pk]))
        assert answer.status_code == 409
        assert "still used" in answer.content.decode()
    assert Area.objects.exists()


def test_what_was_entered_by_mistake_is_removed_after_asking(client: Client) -> None:
    tank = reservoir()
    wrong = alias(tank)
    address = reverse("register-alias-remove", args=[wrong.pk])
    assert "Remove HYD UNIT 4?" in client.get(address).content.decode()
    assert client.post(address).headers["Location"] == reverse("register-reservoir", args=[tank.pk])
    assert not tank.aliases.exists()
