"""Logging in, one's own account, and an administrator's care for people."""

import pytest
from django.test import Client
from django.urls import reverse

from fleet.models import Person, Role
from tests.builders import PASSWORD, person

pytestmark = pytest.mark.django_db
NEW = "another long enough word"


def test_a_login_leads_to_the_page_that_was_asked_for(client: Client) -> None:
    person(username="tom")
    asked = reverse("register-events")
    answer = client.post(reverse("login"), {"username": "tom", "password": PASSWORD, "next": asked})
    assert answer.headers["Location"] == asked


def test_a_wrong_password_is_said_in_words(client: Client) -> None:
    person(username="tom")
    page = client.post(reverse("login"), {"username": "tom", "password": "no"}).content.decode()
    assert "do not go together" in page
    assert 'value="tom"' in page


def test_a_person_without_leave_cannot_log_in(client: Client) -> None:
    person(username="gone", is_active=False)
    client.post(reverse("login"), {"username": "gone", "password": PASSWORD})
    assert client.get(reverse("account")).status_code == 302


def test_logging_out_takes_a_form_and_not_a_link(client: Client) -> None:
    client.force_login(person())
    assert client.get(reverse("logout")).status_code == 405
    client.post(reverse("logout"))
    assert client.get(reverse("account")).status_code == 302


def test_a_form_without_its_token_is_refused_in_words() -> None:
    strict = Client(enforce_csrf_checks=True)
    strict.force_login(person())
    answer = strict.post(reverse("account"), {"first_name": "Tom"})
    assert answer.status_code == 403
    assert "This form was out of date" in answer.content.decode()


def test_everybody_may_change_their_name_and_mail_but_not_their_role(client: Client) -> None:
    tom = person()
    client.force_login(tom)
    facts = {"first_name": "Tom", "last_name": "Reed", "email": "tom@plant.example", "role": "administrator"}
    client.post(reverse("account"), facts)
    tom.refresh_from_db()
    assert (str(tom), tom.email, tom.role) == ("Tom Reed", "tom@plant.example", Role.TECHNICIAN)


def test_a_new_password_needs_the_old_one_and_keeps_one_logged_in(client: Client) -> None:
    tom = person()
    client.force_login(tom)
    facts = {"old_password": "wrong", "new_password1": NEW, "new_password2": NEW}
    assert client.post(reverse("account-password"), facts).status_code == 422
    client.post(reverse("account-password"), facts | {"old_password": PASSWORD})
    tom.refresh_from_db()
    assert tom.check_password(NEW)
    assert client.get(reverse("account")).status_code == 200


def test_an_administrator_adds_a_person_who_can_log_in(client: Client) -> None:
    client.force_login(person(Role.ADMINISTRATOR))
    facts = {"username": "tom", "role": "technician", "is_active": "on", "password": NEW}
    client.post(reverse("register-person-add"), facts)
    assert Client().login(username="tom", password=NEW)
    assert Person.objects.get(username="tom").role == Role.TECHNICIAN


def test_a_weak_first_password_is_refused(client: Client) -> None:
    client.force_login(person(Role.ADMINISTRATOR))
    facts = {"username": "tom", "role": "technician", "is_active": "on", "password": "12345"}
    answer = client.post(reverse("register-person-add"), facts)
    assert "password" in answer.context["form"].errors
    assert not Person.objects.filter(username="tom").exists()


def test_an_administrator_gives_a_new_password_and_old_sessions_end(client: Client) -> None:
    tom, his = person(), Client()
    his.force_login(tom)
    client.force_login(person(Role.ADMINISTRATOR))
    client.post(reverse("register-person-password", args=[tom.pk]), {"new_password1": NEW, "new_password2": NEW})
    assert Client().login(username=tom.username, password=NEW)
    assert his.get(reverse("account")).status_code == 302


def test_the_last_administrator_cannot_step_down_in_the_form(client: Client) -> None:
    ada = person(Role.ADMINISTRATOR)
    client.force_login(ada)
    facts = {"username": ada.username, "role": "reader", "is_active": "on"}
    answer = client.post(reverse("register-person-edit", args=[ada.pk]), facts)
    assert answer.status_code == 422
    assert "This is the last active administrator." in answer.content.decode()
    ada.refresh_from_db()
    assert ada.role == Role.ADMINISTRATOR
