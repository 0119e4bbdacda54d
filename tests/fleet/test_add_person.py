"""The commands that make the first administrator, and tell whether there is one yet."""

import pytest
from django.core.management import CommandError, call_command

from fleet.models import Person, Role

pytestmark = pytest.mark.django_db


def test_it_makes_an_administrator_who_can_log_in(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("FIRST_PASSWORD", "a long enough word")
    call_command("add_person", "ada", "--password-from", "FIRST_PASSWORD")
    ada = Person.objects.get(username="ada")
    assert (ada.role, ada.check_password("a long enough word")) == (Role.ADMINISTRATOR, True)


@pytest.mark.parametrize("password", ["", "12345"])
def test_a_weak_password_is_refused(monkeypatch: pytest.MonkeyPatch, password: str) -> None:
    monkeypatch.setenv("FIRST_PASSWORD", password)
    with pytest.raises(CommandError, match="password"):
        call_command("add_person", "ada", "--password-from", "FIRST_PASSWORD")
    assert not Person.objects.exists()


def test_without_a_terminal_it_says_how_to_give_the_password(monkeypatch: pytest.MonkeyPatch) -> None:
    def no_terminal(prompt: str) -> str:
        raise EOFError

    monkeypatch.setattr("getpass.getpass", no_terminal)
    with pytest.raises(CommandError, match="--password-from VARIABLE"):
        call_command("add_person", "ada")
    assert not Person.objects.exists()


def test_a_login_name_that_is_taken_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("FIRST_PASSWORD", "a long enough word")
    call_command("add_person", "ada", "--password-from", "FIRST_PASSWORD")
    with pytest.raises(CommandError, match="already exists"):
        call_command("add_person", "ada", "--password-from", "FIRST_PASSWORD")


def test_who_may_not_log_in_is_not_counted(capsys: pytest.CaptureFixture[str]) -> None:
    Person.objects.create(username="ada")
    Person.objects.create(username="bo", is_active=False)
    call_command("count_people")
    assert capsys.readouterr().out == "1\n"
