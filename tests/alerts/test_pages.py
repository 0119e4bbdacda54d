"""The pages of alerts: what they show, to whom, and for how many questions to the database."""

from datetime import timedelta

import pytest
from django.test import Client
from django.urls import reverse
from pytest_django import DjangoAssertNumQueries

from alerts import deliveries, handling
from alerts.models import Alert, Delivery, Rule, Subscription
from fleet.models import Person, Role
from samples.models import Sample
from tests import builders
from tests.alerts import scene
from tests.alerts.scene import CLEAN, OVER, PAST
from tests.builders import NOON, days_ago

pytestmark = pytest.mark.django_db


def logged_in(role: Role = Role.READER) -> Client:
    client = Client()
    client.force_login(builders.person(role))
    return client


def an_alert(**more: object) -> Alert:
    press = scene.reservoir(**more)
    scene.arrives(press, days_ago(60), CLEAN)
    scene.arrives(press, days_ago(2), PAST)
    return scene.the_alert(press)


def text(client: Client, address: str) -> str:
    answer = client.get(address)
    assert answer.status_code == 200
    return answer.getvalue().decode()


def test_the_list_puts_the_gravest_first_then_criticality_then_age() -> None:
    scene.arrives(scene.reservoir(name="later", criticality="B"), days_ago(2), PAST)
    scene.arrives(scene.reservoir(name="critical", criticality="A"), days_ago(2), PAST)
    scene.arrives(scene.reservoir(name="milder", criticality="A"), days_ago(2), OVER)
    page = text(logged_in(), reverse("alerts"))
    assert page.index("critical") < page.index("later") < page.index("milder")


@pytest.mark.parametrize(
    ("query", "shown"),
    [
        ("", {"one", "two"}),
        ("?state=unseen", {"two"}),
        ("?state=closed", {"old"}),
        ("?state=all", {"one", "two", "old"}),
        ("?state=mail", {"one"}),
        ("?family=water", set()),
        ("?q=press+two", {"two"}),
        ("?state=nonsense", {"one", "two"}),
    ],
)
def test_the_list_shows_what_is_asked_for(query: str, shown: set[str]) -> None:
    one, _, old = (an_alert(name=name) for name in ("one", "two", "old"))
    person = builders.person(Role.ENGINEER)
    handling.acknowledge(one, person, "", NOON)
    handling.close(old, person, "other", "done", NOON)
    Delivery.objects.create(alert=one, person=person, reason="x", address="a@b.example", due_at=NOON, last_error="no")
    page = text(logged_in(), reverse("alerts") + query)
    assert {name for name in ("one", "two", "old") if f"Press 4 · {name}</a>" in page} == shown


def test_the_list_can_be_narrowed_to_an_area() -> None:
    an_alert(name="here")
    yard = builders.area("Yard")
    an_alert(name="there", area=yard)
    page = text(logged_in(), reverse("alerts") + f"?area={yard.pk}")
    assert "· there</a>" in page
    assert "· here</a>" not in page


def test_an_empty_list_says_what_opens_an_alert() -> None:
    page = text(logged_in(), reverse("alerts"))
    assert "No alert is open. An alert opens when a rule speaks" in page
    assert "No open alert fits what is asked for." in text(logged_in(), reverse("alerts") + "?q=press")


def test_areas_carry_their_site_in_front_only_where_there_are_several() -> None:
    builders.area("Press hall")
    assert ">Press hall</option>" in text(logged_in(), reverse("alerts"))
    builders.area("Yard", at=builders.site("Far works"))
    page = text(logged_in(), reverse("alerts"))
    assert ">Test works: Press hall</option>" in page
    assert ">Far works: Yard</option>" in page


def test_the_list_comes_as_csv_with_formulas_disarmed() -> None:
    an_alert(name="=cmd()")
    rows = text(logged_in(), reverse("alerts") + "?format=csv").splitlines()
    assert rows[0].lstrip("\ufeff").startswith("kind,family,criticality,tag")
    assert rows[1].startswith("past limit,dirt,B,")
    assert "'=cmd()" in rows[1]


@pytest.mark.parametrize("rows", [3, 30])
def test_the_list_asks_the_same_number_of_questions(
    rows: int, django_assert_num_queries: DjangoAssertNumQueries
) -> None:
    first = an_alert(name="pack 0")
    Alert.objects.bulk_create(
        Alert(
            reservoir=builders.reservoir(name=f"pack {n}"), family="dirt", kind="past_limit", weight=1,
            headline="h", sentence="s", opened_at=NOON, updated_at=NOON, acknowledged_at=NOON,
            acknowledged_by=builders.person(), measurand=first.measurand, sample=first.sample,
        )
        for n in range(1, rows)
    )  # fmt: skip
    client = logged_in()
    with django_assert_num_queries(7):
        client.get(reverse("alerts"))


@pytest.mark.parametrize("lines", [3, 30])
def test_an_alert_asks_the_same_number_of_questions(
    lines: int, django_assert_num_queries: DjangoAssertNumQueries
) -> None:
    alert = an_alert()
    for n in range(lines):
        handling.acknowledge(alert, builders.person(), f"note {n}", NOON)
        Delivery.objects.create(
            alert=alert, person=builders.person(), reason="past_limit", address="a@b.example", due_at=NOON
        )
    client = logged_in()
    with django_assert_num_queries(8):
        client.get(reverse("alert", args=[alert.pk]))


def test_an_alert_shows_its_evidence_story_caution_and_values_before() -> None:
    alert = an_alert()
    page = text(logged_in(), reverse("alert", args=[alert.pk]))
    for said in ("Dirt in Press 4 · drive pack", "code 16, limit 14", "2 Apr 2026", "code 12", "Before you work on it"):
        assert said in page
    assert "Past limit: ≥14 µm(c) code 16, limit 14." in page


def test_an_alert_shows_a_mail_that_failed_with_its_error_and_next_try() -> None:
    press = scene.reservoir()
    scene.subscriber(press, first_name="Ada", last_name="Orr")
    scene.arrives(press, days_ago(2), PAST)
    delivery = Delivery.objects.get()
    deliveries.claim(delivery.pk, NOON)
    deliveries._put_back(Delivery.objects.get(), NOON, "SMTPDataError: mailbox is full")
    page = text(logged_in(), reverse("alert", args=[delivery.alert_id]))
    for said in ("Ada Orr", "waiting", "next try 1 Jun 12:01", "mailbox is full"):
        assert said in page


def test_an_alert_whose_sample_was_set_aside_says_so() -> None:
    alert = an_alert()
    Sample.objects.filter(alerts=alert).update(verdict="set_aside", verdict_reason="grit")
    assert "Its sample no longer counts" in text(logged_in(), reverse("alert", args=[alert.pk]))


def test_times_on_an_alert_are_site_time() -> None:
    builders.site(time_zone="Asia/Tokyo")
    alert = an_alert()
    assert "1 Jun 2026 21:00" in text(logged_in(), reverse("alert", args=[alert.pk]))


def test_an_alert_that_does_not_exist_is_not_found() -> None:
    assert logged_in().get(reverse("alert", args=[999_999])).status_code == 404


ACTS = [("alert-acknowledge", Role.TECHNICIAN), ("alert-close", Role.ENGINEER)]


@pytest.mark.parametrize("role", list(Role))
@pytest.mark.parametrize(("name", "least"), ACTS)
def test_a_role_can_do_no_more_than_it_may(name: str, least: Role, role: Role) -> None:
    alert = an_alert()
    posted = {"note": "seen", "reason": "false_alarm"}
    answer = logged_in(role).post(reverse(name, args=[alert.pk]), posted)
    alert.refresh_from_db()
    allowed = role.rank >= least.rank
    assert answer.status_code == (302 if allowed else 403)
    assert (alert.acknowledged_at is not None or not alert.is_open) == allowed


@pytest.mark.parametrize(("name", "least"), ACTS)
def test_acting_needs_a_post(name: str, least: Role) -> None:
    assert logged_in(Role.ADMINISTRATOR).get(reverse(name, args=[an_alert().pk])).status_code == 405


def test_the_forms_stand_only_before_those_who_may_use_them() -> None:
    address = reverse("alert", args=[an_alert().pk])
    shown = {role: text(logged_in(role), address) for role in Role}
    assert ["I have seen it" in shown[role] for role in Role] == [False, True, True, True]
    assert ["Close the alert" in shown[role] for role in Role] == [False, False, True, True]


@pytest.mark.parametrize(
    ("posted", "said"),
    [
        ({"reason": "other"}, "Say what was found or decided"),
        ({"note": "done"}, "Choose why it is closed."),
        ({"reason": "shown_over", "note": "it is"}, "Choose one of these reasons."),
    ],
)
def test_closing_without_a_reason_or_a_word_is_refused(posted: dict[str, str], said: str) -> None:
    alert = an_alert()
    answer = logged_in(Role.ENGINEER).post(reverse("alert-close", args=[alert.pk]), posted)
    assert answer.status_code == 422
    assert said in answer.content.decode()
    alert.refresh_from_db()
    assert alert.is_open


def test_closing_twice_says_that_it_was_closed_already() -> None:
    client, address = logged_in(Role.ENGINEER), reverse("alert-close", args=[an_alert().pk])
    client.post(address, {"reason": "other", "note": "first"})
    answer = client.post(address, {"reason": "false_alarm", "note": "second"}, follow=True)
    assert "closed already" in answer.content.decode()
    assert Alert.objects.get().close_note == "first"


RULES = {
    "past_limit-enabled": "on", "past_limit-mails": "on", "past_limit-least_criticality": "C",
    "forecast-enabled": "on", "forecast-least_criticality": "A", "forecast-within_days": "14",
    "over_target-least_criticality": "C",
    "overdue-enabled": "on", "overdue-least_criticality": "C", "overdue-grace_days": "5",
}  # fmt: skip


@pytest.mark.parametrize("role", list(Role))
def test_everybody_reads_the_rules_and_an_engineer_changes_them(role: Role) -> None:
    builders.site()
    client = logged_in(role)
    page = text(client, reverse("rules"))
    assert ("Save the rules" in page) == (role.rank >= Role.ENGINEER.rank)
    answer = client.post(reverse("rules"), RULES)
    assert answer.status_code == (302 if role.rank >= Role.ENGINEER.rank else 403)
    forecast = Rule.objects.get(kind="forecast")
    assert (forecast.within_days, forecast.mails) == ((14, False) if answer.status_code == 302 else (30, True))


def test_changed_rules_have_every_reservoir_judged_again() -> None:
    press = scene.reservoir()
    scene.arrives(press, days_ago(2), CLEAN)
    logged_in(Role.ENGINEER).post(reverse("rules"), RULES)
    assert scene.standing(press).judged_revision != scene.standing(press).revision
    scene.judged(press, NOON + timedelta(minutes=1))
    assert scene.standing(press).judged_revision == scene.standing(press).revision


@pytest.mark.parametrize(
    ("wrong", "said"),
    [
        ({"forecast-within_days": "", "forecast-least_chance": ""}, "Give a number of days, a chance, or both."),
        ({"forecast-least_chance": "98"}, "Must be 95 % or less."),
        ({"forecast-least_chance": "0.2"}, "Must be 5 % or more."),
        ({"forecast-least_chance": "often"}, "“often” is not a number."),
        ({"overdue-grace_days": "-1"}, "Must be 0 or more."),
    ],
)
def test_a_rule_that_cannot_be_is_refused_at_its_field(wrong: dict[str, str], said: str) -> None:
    builders.site()
    answer = logged_in(Role.ENGINEER).post(reverse("rules"), RULES | wrong)
    assert answer.status_code == 422
    assert said in answer.content.decode()
    assert "<strong>Not saved.</strong> 1 thing to mend" in answer.content.decode()
    assert Rule.objects.get(kind="forecast").within_days == 30


def test_a_chance_is_written_and_shown_in_per_cent_and_kept_as_a_share() -> None:
    builders.site()
    client = logged_in(Role.ENGINEER)
    assert 'name="forecast-least_chance" value="20"' in text(client, reverse("rules"))
    client.post(reverse("rules"), RULES | {"forecast-least_chance": "7,5"})
    assert Rule.objects.get(kind="forecast").least_chance == 0.075
    assert 'name="forecast-least_chance" value="7.5"' in text(client, reverse("rules"))


@pytest.mark.parametrize(("written", "kept"), [("5", 0.05), ("95", 0.95)])
def test_the_ends_of_what_a_chance_may_be_are_allowed(written: str, kept: float) -> None:
    builders.site()
    logged_in(Role.ENGINEER).post(reverse("rules"), RULES | {"forecast-least_chance": written})
    assert Rule.objects.get(kind="forecast").least_chance == kept


def test_the_rules_page_without_a_site_says_so() -> None:
    assert "There is no site yet" in text(logged_in(), reverse("rules"))


def test_a_person_chooses_their_own_mail() -> None:
    hall = builders.area()
    client, person = logged_in(), Person.objects.get()
    client.post(reverse("mail-choice-add"), {"where": f"area-{hall.pk}", "kind": "past_limit"})
    client.post(reverse("mail-choice-add"), {"where": f"site-{hall.site_id}", "kind": ""})
    client.post(reverse("mail-choice-add"), {"where": f"site-{hall.site_id}", "kind": ""})
    chosen = Subscription.objects.filter(person=person).order_by("pk")
    assert [(wish.site, wish.area, wish.kind) for wish in chosen] == [
        (hall.site, hall, "past_limit"),
        (hall.site, None, ""),
    ]


def test_a_place_that_is_not_on_the_list_is_refused() -> None:
    client = logged_in()
    answer = client.post(reverse("mail-choice-add"), {"where": "site-999", "kind": ""}, follow=True)
    assert "Choose a site or an area" in answer.content.decode()
    assert not Subscription.objects.exists()


def test_nobody_removes_the_mail_of_somebody_else() -> None:
    press = scene.reservoir()
    person = scene.subscriber(press)
    wish = Subscription.objects.get()
    logged_in(Role.ADMINISTRATOR).post(reverse("mail-choice-remove", args=[wish.pk]))
    assert Subscription.objects.filter(pk=wish.pk).exists()
    client = Client()
    client.force_login(person)
    client.post(reverse("mail-choice-remove", args=[wish.pk]))
    assert not Subscription.objects.exists()
